"""Strategies for worksheets: names, literals, expressions as trees, statements and whole texts.

Trees carry zero for every place; compare with `eqsheet.syntax.meaning.same_meaning`.
"""

from __future__ import annotations

import re

from hypothesis import strategies as st
from hypothesis.strategies import SearchStrategy

from eqsheet.syntax.literal import unit
from eqsheet.syntax.nodes import (
    Aggregate,
    Binary,
    Call,
    Comparison,
    Conditional,
    Expression,
    IndexClause,
    Logical,
    Number,
    Range,
    Reference,
    Text,
    Unary,
)
from eqsheet.syntax.write import write_expression

NAMES = ("x", "y", "T_in", "rho", "K", "m", "bar", "near", "of", "off", "rows", "η", "e", "L", "_a", "in_1")
UNITS = ("m", "bar/L", "W/(m^2*K)", "1/K", "%", "in", "m^(1/2)", "kg*m^2", "degC", "1/(m*s)", "e")

names: SearchStrategy[str] = st.sampled_from(NAMES)
digits: SearchStrategy[str] = st.sampled_from(("0", "1", "2", "10", "0.5", "2.1e-4", "1E3", "007"))
units: SearchStrategy[str] = st.sampled_from(UNITS)


def _briefly(strategy: SearchStrategy[Expression]) -> SearchStrategy[Expression]:
    """The strategy under a short description; one made of itself many times over is slow to describe."""

    @st.composite
    def brief(draw: st.DrawFn) -> Expression:
        return draw(strategy)

    return brief()


def _number(text: str, symbol: str | None, negated: bool) -> Number:
    if symbol is None:
        return Number(0, 0, text)
    return Number(0, 0, text, unit(0, 0, symbol), negated)


numbers: SearchStrategy[Expression] = st.builds(_number, digits, st.none() | units, st.booleans())
plain_references: SearchStrategy[Expression] = st.builds(lambda name: Reference(0, 0, name), names)


def _subscripted(name: str, subscripts: list[Expression], owner: str | None) -> Reference:
    before = None if owner is None else Reference(0, 0, owner)
    return Reference(0, 0, name, tuple(subscripts) or None, before)


def _comparison(operands: list[Expression], operators: list[str]) -> Comparison:
    return Comparison(0, 0, tuple(operators[: len(operands) - 1]), tuple(operands))


def _conditions(inner: SearchStrategy[Expression]) -> SearchStrategy[Expression]:
    operators = st.lists(st.sampled_from(("<", "<=", ">", ">=", "=")), min_size=2, max_size=2)
    members = st.builds(lambda text: Text(0, 0, text), st.sampled_from(("NH4+", "a b", "#1")))
    comparisons = st.builds(_comparison, st.lists(inner | members, min_size=2, max_size=3), operators)
    return st.recursive(
        comparisons,
        lambda below: st.one_of(
            st.builds(lambda c: Unary(0, 0, "not", c), below),
            st.builds(
                lambda word, parts: Logical(0, 0, word, tuple(parts)),
                st.sampled_from(("and", "or")),
                st.lists(below, min_size=2, max_size=3),
            ),
        ),
        max_leaves=3,
    )


def _clauses(inner: SearchStrategy[Expression]) -> SearchStrategy[list[IndexClause]]:
    whole = st.sampled_from(("0", "1", "12")).map(lambda text: Number(0, 0, text))
    bounds: SearchStrategy[Expression] = whole | plain_references
    ranges = st.builds(lambda first, last: Range(0, 0, first, last), bounds, bounds)
    over = ranges | st.builds(lambda name: Reference(0, 0, name), names)
    clause = st.builds(lambda index, where: IndexClause(0, 0, index, where), names, over)
    return st.lists(clause, min_size=1, max_size=2)


def _wider(narrower: SearchStrategy[Expression]) -> SearchStrategy[Expression]:
    inner = _briefly(narrower)
    conditions = _briefly(_conditions(inner))
    return st.one_of(
        st.builds(
            lambda operator, left, right: Binary(0, 0, operator, 0, left, right),
            st.sampled_from("+-*/^"),
            inner,
            inner,
        ),
        st.builds(lambda sign, operand: Unary(0, 0, sign, operand), st.sampled_from("+-"), inner),
        st.builds(
            lambda name, arguments: Call(0, 0, name, 0, tuple(arguments)),
            names,
            st.lists(inner, min_size=1, max_size=3),
        ),
        st.builds(_subscripted, names, st.lists(inner, max_size=2), st.none() | names),
        st.builds(lambda c, a, b: Conditional(0, 0, c, a, b), conditions, inner, inner),
        st.builds(
            lambda function, body, clauses, chosen: Aggregate(0, 0, function, body, tuple(clauses), chosen),
            st.sampled_from(("sum", "prod", "min", "max")),
            inner,
            _clauses(inner),
            st.none() | conditions,
        ),
    )


expressions: SearchStrategy[Expression] = _briefly(
    st.recursive(numbers | plain_references, _wider, max_leaves=10)
)
conditions: SearchStrategy[Expression] = _briefly(_conditions(expressions))

expression_texts: SearchStrategy[str] = expressions.map(write_expression)
condition_texts: SearchStrategy[str] = conditions.map(write_expression)
sum_texts: SearchStrategy[str] = expressions.map(
    lambda expression: write_expression(Binary(0, 0, "+", 0, Reference(0, 0, "y"), expression))
)
literal_texts: SearchStrategy[str] = numbers.map(write_expression)


def _joined(*parts: SearchStrategy[str] | str) -> SearchStrategy[str]:
    return st.tuples(*(st.just(p) if isinstance(p, str) else p for p in parts)).map("".join)


statement_texts: SearchStrategy[str] = st.one_of(
    _joined(expression_texts, " = ", expression_texts),
    _joined(names, ": ", expression_texts, " = ", expression_texts),
    _joined("off ", names, " = ", literal_texts),
    _joined(names, " = 5 ", units, " ± 2 ", units),
    _joined(names, " = 5 ± 0.2 (k=2)"),
    _joined(names, " near ", expression_texts, " within ", expression_texts, " .. "),
    _joined(names, "_* within ", literal_texts, " .. ", literal_texts),
    _joined("require ", sum_texts, " <= ", sum_texts),
    _joined("require ", sum_texts, " = ", sum_texts, " within ", literal_texts),
    _joined("show ", names, " in ", units, ", ", names),
    _joined("define f(", names, " in ", units, ", b) in ", units, " = ", expression_texts),
    _joined("y = ", expression_texts, " valid ", condition_texts, ", ", condition_texts),
    _joined("new unit skid = 48 ", units),
    _joined("rows species: z, M in ", units, ", b of bus\n   H2O 0.2 -\n     'a' 1 2"),
    _joined("for i in 1..N if ", condition_texts, ":\n  T[i] - T[i-1] = ", expression_texts),
    _joined("curve head(Q in ", units, ") in m by line:\n\t1 2\n\t3 -4"),
    st.just('rows bus from "bus.csv"'),
    st.just("template pipe:\n     shared rho, mu\n     use pipe as p[l]:\n          L = 5 m"),
    st.just('include "glycol.eqsheet"'),
)

prose_texts: SearchStrategy[str] = st.sampled_from(
    (
        "",
        "# prose",
        "## Section",
        "   # indented prose",
        "#",
        "\n\n",
        "x = 3  # bore; source: P-104; assume: clean",
    )
)
worksheet_texts: SearchStrategy[str] = st.lists(statement_texts | prose_texts, max_size=6).map("\n".join)

# Pieces that slips are made of.
_SPLINTERS = (
    *(
        " ",
        "  ",
        "\n",
        "\n    ",
        "\t",
        "#",
        ",",
        ".",
        "..",
        "=",
        "==",
        "**",
        "(",
        ")",
        "[",
        "]",
        '"',
        "'",
        ":",
    ),
    *(
        "+",
        "-",
        "±",
        "·",
        "²",
        "°",
        "%",
        "{",
        ";",
        "\u00a0",
        "＝",
        "if ",
        " then ",
        " else ",
        " in ",
        " for ",
    ),
    *("1", "e", "_", "x", "within ", "valid ", "off ", "\x00", "\u202e", "\U0001f600", "\ud7ff"),
)


@st.composite
def mutated_texts(draw: st.DrawFn) -> str:
    """Worksheets with a few pieces put in, taken out or doubled."""
    text = draw(worksheet_texts)
    for _ in range(draw(st.integers(1, 4))):
        start = draw(st.integers(0, len(text)))
        end = min(len(text), start + draw(st.integers(0, 4)))
        piece = draw(st.sampled_from(_SPLINTERS) | st.just(text[start:end] * 2))
        text = text[:start] + piece + text[end:]
    return text


@st.composite
def respaced_texts(draw: st.DrawFn) -> str:
    """Worksheets with blanks put in and taken out, so that most still parse."""
    text = draw(worksheet_texts)
    for _ in range(draw(st.integers(1, 6))):
        place = draw(st.integers(0, len(text)))
        if place < len(text) and text[place] == " ":
            text = text[:place] + text[place + 1 :]
        else:
            text = text[:place] + draw(st.sampled_from((" ", "  ", "\n    ", " # c\n      "))) + text[place:]
    return text


# --- worksheets that mean something, and what slips make of them ------------------------------------------------

SENSIBLE = (
    """v = Q/(pi*D^2/4)
dP = f*(L/D)*rho*v^2/2
1/sqrt(f) = -2*log10(eps/(3.7*D) + 2.51/(Re*sqrt(f))) valid Re > 4000
Re = rho*v*D/mu
dP = 24 kPa
L = 120 m
D = 52.5 mm ± 0.1 mm
eps = 0.045 mm
rho = 998 kg/m^3
mu = 1 mPa*s
f near 0.02 within 0.005 .. 0.1
v near 1 m/s within 0 m/s ..
require 0.5 m/s <= v <= 2.5 m/s
show Q in L/min""",
    """Q = m_h*cp*(T_1 - T_2)
Q = m_c*cp*(T_4 - T_3)
Q = U*A*logmean(T_1 - T_4, T_2 - T_3)
m_h = 0.8 kg/s
m_c = 1.1 kg/s
cp = 4.19 kJ/(kg*K)
U = 850 W/(m^2*K)
A = 6.5 m^2
T_1 = 92 degC
T_3 = 11 degC
T_2 near 45 degC within 11.5 degC .. 91.9 degC
T_4 near 50 degC within 11.1 degC .. 91.5 degC
require Q <= 250 kW
show T_2 in degF""",
    """ambient = 84 kPa
define p_sat(T in degC) in mmHg = 10^(8.07 - 1730.6/(233.4 + T)) valid 1 degC <= T <= 100 degC
define half(x) = x/2
p = p_sat(T)
p = half(0.4 barg)
new unit EUR
price = 12 EUR/kg
m = 3 kg
cost = price*m
off cost = 40 EUR
k: y^2 = if m > 2 kg then 4 else x
x = 3
y near -1
c_* within 0 ..
c_a^2 = 9
require y = -2 within 1 %""",
)
# What stands in for a piece: other names, numbers, units and operators, some of them impossible.
_STAND_INS = (
    *("x", "v", "T_1", "D", "p_sat", "y", "0", "1", "-1", "1e308", "1e-300", "0.5", "2^0.5", "1e400"),
    *(" m", " kg", " degC", " K", " barg", " kPa", " mm", "", " %", " EUR", " 1/s", " kgg"),
    *("+", "-", "*", "/", "^", "=", "<=", ">", "(", ")", " near ", " within ", "off ", "require ", "show "),
    *("sqrt(", "ln(", "exp(", "if x > 1 then ", " else ", "logmean(", "abs(", "define f(x) = ", "# ", ": "),
)


@st.composite
def slipped_worksheets(draw: st.DrawFn) -> str:
    """Sensible worksheets with lines lost, doubled or moved and pieces exchanged; many are still read."""
    lines = draw(st.sampled_from(SENSIBLE)).split("\n")
    for _ in range(draw(st.integers(0, 3))):
        place = draw(st.integers(0, len(lines) - 1))
        what = draw(st.sampled_from(("lost", "doubled", "moved", "foreign")))
        if what == "lost" and len(lines) > 1:
            del lines[place]
        elif what == "doubled":
            lines.insert(draw(st.integers(0, len(lines))), lines[place])
        elif what == "moved":
            lines.insert(draw(st.integers(0, len(lines) - 1)), lines.pop(place))
        else:
            lines.insert(place, draw(st.sampled_from("\n".join(SENSIBLE).split("\n"))))
    for _ in range(draw(st.integers(0, 3))):
        place = draw(st.integers(0, len(lines) - 1))
        pieces = re.findall(r"[\w.]+| +\S+|\W", lines[place])
        if pieces:
            pieces[draw(st.integers(0, len(pieces) - 1))] = draw(st.sampled_from(_STAND_INS))
        lines[place] = "".join(pieces)
    return "\n".join(lines)


_NUMBERS = (
    "0",
    "1",
    "-1",
    "2",
    "0.5",
    "-3.7",
    "1e3",
    "1e-3",
    "1e9",
    "1e-9",
    "1e150",
    "1e-150",
    "1e308",
    "1e-300",
)


@st.composite
def renumbered_worksheets(draw: st.DrawFn) -> str:
    """Sensible worksheets with other numbers in a few places: most are valid, and many have no solution."""
    pieces = re.split(r"((?<![\w.])\d[\d.]*(?![\w.]))", draw(st.sampled_from(SENSIBLE)))
    places = range(1, len(pieces), 2)
    for place in draw(st.lists(st.sampled_from(places), min_size=1, max_size=4)):
        pieces[place] = draw(st.sampled_from(_NUMBERS))
    return "".join(pieces)
