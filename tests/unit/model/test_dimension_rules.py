"""Forms and demands of single tapes."""

from __future__ import annotations

from fractions import Fraction

import pytest
from written_formulas import formula

from eqsheet.model.dimension_rules import PLAIN, rules_of
from eqsheet.model.tape import BINARY_FUNCTIONS, UNARY_FUNCTIONS, TapeBuilder
from eqsheet.units.dimension import Dimension
from eqsheet.units.unit import Unit


def demands(text: str) -> list[tuple[str, str, str]]:
    """Left text, right text (or the dimension needed) and reason of each demand of a formula."""
    written = formula(text, [])
    rules = rules_of(written.tape, written.alike)

    def at(instruction: int) -> str:
        return text[slice(*written.places[instruction])]

    return [(at(d.left), at(d.right) if d.right >= 0 else d.needed.text, d.what) for d in rules.demands]


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("y = a + b", [("a", "b", "sum"), ("y", "a + b", "equation")]),
        ("y = a - b", [("a", "b", "difference"), ("y", "a - b", "equation")]),
        ("y = min(a, b)", [("a", "b", "min"), ("y", "min(a, b)", "equation")]),
        ("y = logmean(a, b)", [("a", "b", "logmean"), ("y", "logmean(a, b)", "equation")]),
        ("y = atan2(a, b)", [("a", "b", "atan2"), ("y", "atan2(a, b)", "equation")]),
        ("y = exp(a)", [("a", "1", "exp"), ("y", "exp(a)", "equation")]),
        ("y = a**b", [("a", "1", "base"), ("b", "1", "exponent"), ("y", "a**b", "equation")]),
        ("a < b", [("a", "b", "comparison")]),
        (
            "y = a if c > d else b",
            [
                ("d", "c", "comparison"),
                ("a", "b", "if"),
                ("y", "a if c > d else b", "equation"),
            ],
        ),
        ("y = a*b", [("y", "a*b", "equation")]),
        ("y = sign(a)", [("y", "sign(a)", "equation")]),
        ("y = abs(-a)", [("y", "abs(-a)", "equation")]),
    ],
)
def test_each_operation_demands_what_it_must(text: str, expected: list[tuple[str, str, str]]) -> None:
    assert demands(text) == expected


@pytest.mark.parametrize("text", ["y + 0 = y", "y*0 = y", "y = 0", "min(y, 0) = y", "y > 0", "0 < y"])
def test_zero_fits_any_dimension(text: str) -> None:
    assert demands(text) == []


def test_zero_over_something_is_zero_still() -> None:
    assert demands("y + 0/x = y") == []


def test_a_product_adds_exponents_and_a_root_halves_them() -> None:
    written = formula("y = sqrt(a**3*b)/a", [])
    root = rules_of(written.tape, ()).forms[-1]
    assert root is not None
    assert dict(root.quantities) == {1: Fraction(1, 2), 2: Fraction(1, 2)}


def test_exponents_chain_exactly() -> None:
    written = formula("y = ((a**(2/3))**(3/4))**2", [])
    form = rules_of(written.tape, ()).forms[-1]
    assert form is not None
    assert form.quantities == ((1, 1),)


def test_what_cancels_leaves_a_plain_number() -> None:
    written = formula("y = a*b/(b*a)", [])
    assert rules_of(written.tape, ()).forms[-1] == PLAIN


def test_power_zero_is_a_plain_number() -> None:
    written = formula("y = a**0", [])
    assert rules_of(written.tape, ()).forms[-1] == PLAIN


def test_strip_demands_the_unit_and_attach_gives_it() -> None:
    pascal = Dimension.of({"kg": 1, "m": -1, "s": -2})
    kelvin = Dimension.of({"K": 1})
    b = TapeBuilder()
    temperature = b.quantity(0, (0, 1))
    number = b.apply("strip", temperature, Unit("degC", kelvin, 1.0, 273.15, True))
    result = b.apply("attach", b.apply("exp", number), Unit("mmHg", pascal, 133.322))
    rules = rules_of(b.tape((result,)), ())
    assert [(d.left, d.right, d.needed, d.what) for d in rules.demands] == [
        (temperature, -1, kelvin, "strip")
    ]
    form = rules.forms[result]
    assert form is not None and form.constant == pascal


def test_every_function_has_a_rule() -> None:
    for name in UNARY_FUNCTIONS:
        b = TapeBuilder()
        rules_of(b.tape((b.apply(name, b.quantity(0, (0, 1))),)), ())
    for name in BINARY_FUNCTIONS:
        b = TapeBuilder()
        rules_of(b.tape((b.apply(name, b.quantity(0, (0, 1)), b.quantity(1, (0, 1))),)), ())


def test_an_unknown_operation_is_our_mistake() -> None:
    b = TapeBuilder()
    with pytest.raises(ValueError, match="gudermann"):
        rules_of(b.tape((b.apply("gudermann", b.quantity(0, (0, 1))),)), ())


def test_rules_are_worked_out_once_for_a_shape() -> None:
    a, b = formula("a = b + 2.5", []), formula("u = v + 7.5", [])
    assert rules_of(a.tape, a.alike) is rules_of(b.tape, b.alike)
