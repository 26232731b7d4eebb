"""How expressions bind, and where a unit ends."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

import pytest

from eqsheet.syntax.nodes import (
    Aggregate,
    Binary,
    Call,
    Comparison,
    Conditional,
    Equation,
    Logical,
    Number,
    Range,
    Reference,
    Text,
    Unary,
)
from eqsheet.syntax.parse import parsed_text


def right_side(text: str) -> Any:
    node = parsed_text(f"y = {text}").node
    assert isinstance(node, Equation)
    return node.right


def shape(node: Any) -> Any:
    """A tree as nested tuples."""
    match node:
        case Number(text=text, unit=None):
            return text
        case Number(text=text, unit=unit, negated=negated):
            return ("-" if negated else "", text, unit.text)
        case Reference(name=name, subscripts=None, owner=None):
            return name
        case Reference(name=name, subscripts=subscripts, owner=owner):
            below = None if subscripts is None else tuple(map(shape, subscripts))
            return (shape(owner) if owner is not None else "", ".", name, below)
        case Text(value=value):
            return ("text", value)
        case Unary(operator=operator, operand=operand):
            return (operator, shape(operand))
        case Binary(operator=operator, left=left, right=right):
            return (shape(left), operator, shape(right))
        case Comparison(operators=operators, operands=operands):
            return ("chain", operators, tuple(map(shape, operands)))
        case Logical(operator=operator, operands=operands):
            return (operator, *map(shape, operands))
        case Call(name=name, arguments=arguments):
            return (name, *map(shape, arguments))
        case Conditional(condition=condition, then=then, otherwise=otherwise):
            return ("if", shape(condition), shape(then), shape(otherwise))
        case Aggregate(function=function, body=body, clauses=clauses, filter=chosen):
            over = [(c.index, _over(c.over)) for c in clauses]
            return (function, shape(body), *over, shape(chosen) if chosen is not None else None)
    raise AssertionError(node)


def _over(over: Range | Reference) -> Any:
    return (shape(over.first), shape(over.last)) if isinstance(over, Range) else shape(over)


BINDING = {
    "a + b*c": ("a", "+", ("b", "*", "c")),
    "a - b - c": (("a", "-", "b"), "-", "c"),
    "a/b/c": (("a", "/", "b"), "/", "c"),
    "a/b*c": (("a", "/", "b"), "*", "c"),
    "-x^2": ("-", ("x", "^", "2")),
    "2^3^2": ("2", "^", ("3", "^", "2")),
    "(2^3)^2": (("2", "^", "3"), "^", "2"),
    "x^-2": ("x", "^", ("-", "2")),
    "2^-x^2": ("2", "^", ("-", ("x", "^", "2"))),
    "a*-b": ("a", "*", ("-", "b")),
    "a - -b": ("a", "-", ("-", "b")),
    "-a*b": (("-", "a"), "*", "b"),
    "+a": ("+", "a"),
    "f(a, b + 1)": ("f", "a", ("b", "+", "1")),
    "T[i-1]": ("", ".", "T", (("i", "-", "1"),)),
    'x["NH4+", s]': ("", ".", "x", (("text", "NH4+"), "s")),
    "supply.dP": ("supply", ".", "dP", None),
    "p[l].Q": (("", ".", "p", ("l",)), ".", "Q", None),
    "V[a[l]]": ("", ".", "V", (("", ".", "a", ("l",)),)),
    "const.R": ("const", ".", "R", None),
    "if a < b then c else d + 1": ("if", ("chain", ("<",), ("a", "b")), "c", ("d", "+", "1")),
    "if a < b then 1 else if b < c then 2 else 3": (
        *("if", ("chain", ("<",), ("a", "b")), "1"),
        ("if", ("chain", ("<",), ("b", "c")), "2", "3"),
    ),
    "if not a < b and c = d or e >= f then 1 else 2": (
        "if",
        (
            "or",
            ("and", ("not", ("chain", ("<",), ("a", "b"))), ("chain", ("=",), ("c", "d"))),
            ("chain", (">=",), ("e", "f")),
        ),
        "1",
        "2",
    ),
    "if a <= b < c then 1 else 2": ("if", ("chain", ("<=", "<"), ("a", "b", "c")), "1", "2"),
    "if a != b then 1 else 2": ("if", ("not", ("chain", ("=",), ("a", "b"))), "1", "2"),
    "sum(x[s] for s in species)": ("sum", ("", ".", "x", ("s",)), ("s", "species"), None),
    "prod(i for i in 1..N-1, j in 0..2 if i > j)": (
        *("prod", "i", ("i", ("1", ("N", "-", "1"))), ("j", ("0", "2"))),
        ("chain", (">",), ("i", "j")),
    ),
    "max(a, b)": ("max", "a", "b"),
    "near + of*shared - off/rows": (("near", "+", ("of", "*", "shared")), "-", ("off", "/", "rows")),
}


@pytest.mark.parametrize("text", BINDING)
def test_expression_binds_as_written_in_the_reference(text: str) -> None:
    assert shape(right_side(text)) == BINDING[text]


UNITS = {
    "52.5 mm": ("", "52.5", "mm"),
    "52.5mm": ("", "52.5", "mm"),
    "3 in": ("", "3", "in"),
    "5 %": ("", "5", "%"),
    "5%": ("", "5", "%"),
    "450 W/(m^2*K)": ("", "450", "W/(m^2*K)"),
    "2.1e-4 1/K": ("", "2.1e-4", "1/K"),
    "4 1/(m*s)": ("", "4", "1/(m*s)"),
    "5 kg·m/s^2": ("", "5", "kg·m/s^2"),
    "5 m^(1/3)": ("", "5", "m^(1/3)"),
    "5 s^-1": ("", "5", "s^-1"),
    "5 eV": ("", "5", "eV"),
    "10 bar/L": ("", "10", "bar/L"),
    "10 bar / L": (("", "10", "bar"), "/", "L"),
    "10 bar * L": (("", "10", "bar"), "*", "L"),
    "10 bar/(L + 2)": (("", "10", "bar"), "/", ("L", "+", "2")),
    "6 kW*(m/2)": (("", "6", "kW"), "*", ("m", "/", "2")),
    "6 kW*(m)": (("", "6", "kW"), "*", "m"),
    "10 bar/supply.L": (("", "10", "bar"), "/", ("supply", ".", "L", None)),
    "10 bar/L[2]": (("", "10", "bar"), "/", ("", ".", "L", ("2",))),
    "10 bar/f(2)": (("", "10", "bar"), "/", ("f", "2")),
    "10 m/s*f(2)": (("", "10", "m/s"), "*", ("f", "2")),
    "5 m*2": (("", "5", "m"), "*", "2"),
    "5 m/2": (("", "5", "m"), "/", "2"),
    "2*3 m": ("2", "*", ("", "3", "m")),
    "-5 degC": ("-", "5", "degC"),
    "- 5 degC": ("-", "5", "degC"),
    "+5 degC": ("", "5", "degC"),
    "(-5 degC)": ("-", "5", "degC"),
    "-(5 degC)": ("-", ("", "5", "degC")),
    "a*-5 K": ("a", "*", ("-", "5", "K")),
    "T1 -5 degC": ("T1", "-", ("", "5", "degC")),
    "T1 - 5 degC": ("T1", "-", ("", "5", "degC")),
    "T1 - -5 degC": ("T1", "-", ("-", "5", "degC")),
    "-5": ("-", "5"),
    "(5 m)^2": (("", "5", "m"), "^", "2"),
    "2^(5 %)": ("2", "^", ("", "5", "%")),
}


@pytest.mark.parametrize("text", UNITS)
def test_unit_reaches_as_far_as_the_rule_says(text: str) -> None:
    assert shape(right_side(text)) == UNITS[text]


@pytest.mark.parametrize("word", ["then", "else"])
def test_words_of_the_language_are_no_units(word: str) -> None:
    node = right_side("if a < 2 then 3 else 4")
    assert shape(node) == ("if", ("chain", ("<",), ("a", "2")), "3", "4")
    assert word in ("then", "else")


def test_factors_carry_symbols_exponents_and_places() -> None:
    number = right_side("450 W/(m^2*K)*kg^(1/3)")
    assert [(f.symbol, f.exponent) for f in number.unit.factors] == [
        ("W", Fraction(1)),
        ("m", Fraction(-2)),
        ("K", Fraction(-1)),
        ("kg", Fraction(1, 3)),
    ]
    text = "y = 450 W/(m^2*K)*kg^(1/3)"
    assert [text[f.start : f.end] for f in number.unit.factors] == ["W", "m^2", "K", "kg^(1/3)"]
    assert text[number.unit.start : number.unit.end] == number.unit.text == "W/(m^2*K)*kg^(1/3)"
    assert text[number.start : number.end] == "450 W/(m^2*K)*kg^(1/3)"


def test_a_quotient_inside_a_bracket_below_counts_above() -> None:
    factors = right_side("1 J/(kg/s*K)").unit.factors
    assert [(f.symbol, f.exponent) for f in factors] == [("J", 1), ("kg", -1), ("s", 1), ("K", -1)]


def test_places_cover_the_text_with_its_brackets() -> None:
    text = "y = (a + b)*-5 K"
    node = right_side(text[4:])
    assert text[node.left.start : node.left.end] == "(a + b)"
    assert text[node.right.start : node.right.end] == "-5 K"
    assert text[node.operator_start] == "*"
    assert (node.start, node.end) == (4, len(text))


def test_names_in_two_spellings_of_unicode_are_one() -> None:
    composed, decomposed = right_side("caf\u00e9"), right_side("cafe\u0301")
    assert composed.name == decomposed.name
    assert right_side("\u00b5").name == right_side("\u03bc").name
