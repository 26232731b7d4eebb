"""Turns against cycles."""

from __future__ import annotations

import math

from written_formulas import formulas, statements

from eqsheet.diagnostics.diagnostic import Diagnostic, Severity
from eqsheet.model.check_units import check_units
from eqsheet.model.tape import Formula, TapeBuilder


def warnings(*texts: str, more: tuple[Formula, ...] = ()) -> list[Diagnostic]:
    found, names = formulas(texts)
    check = check_units([*found, *more], statements([*texts, *["" for _ in more]]), names)
    assert all(d.severity is not Severity.ERROR for d in check.diagnostics)
    return [d for d in check.diagnostics if d.code == "rpm-against-hz"]


def test_a_speed_in_rpm_against_a_frequency_in_hz() -> None:
    (warned,) = warnings("n = 1450[rpm]", "f = 50[Hz]", "p = 2.5", "n = f/p")
    assert [label.span.text for label in warned.labels] == ["f/p", "n", "1450[rpm]", "50[Hz]"]
    assert "2*pi" in warned.help


def test_a_known_against_a_literal() -> None:
    assert len(warnings("n = 1450[rpm]", "n < 50[Hz]")) == 1


def test_a_sum_of_both() -> None:
    assert len(warnings("n = 1450[rpm]", "m = n + 2[Hz]")) == 1


def test_like_against_like_is_fine() -> None:
    assert warnings("n = 1450[rpm]", "m = 900[rpm]", "n = m*1.6", "f = 50[Hz]", "g = f/2") == []


def test_a_factor_of_pi_is_the_conversion() -> None:
    """n = 2*pi*f/p is right, n = 2*f/p is not."""
    for factor, expected in ((math.pi, 0), (3.0, 0)):
        b = TapeBuilder()
        n, f = b.quantity(0, (0, 0)), b.quantity(1, (0, 0))
        right = b.apply("mul", b.constant(factor), f)
        formula = b.formula((n, right), 2, ((n, right),))
        assert len(warnings("n = 1450[rpm]", "f = 50[Hz]", more=(formula,))) == expected


def test_products_of_other_dimension_are_of_no_interest() -> None:
    assert warnings("n = 1450[rpm]", "f = 50[Hz]", "t = 3[s]", "x = n*t", "y = f*t", "x = y") == []
