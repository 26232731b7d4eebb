"""Units whose last symbol is a quantity or an index too are doubted where both readings fit."""

from __future__ import annotations

import pytest
from both_ways import codes, only


@pytest.mark.parametrize(
    ("text", "literal", "what"),
    [
        ("L = 3\na = 10 bar/L", "10 bar/L", "a quantity"),
        ("L = 3\nx = 5 kg*L", "5 kg*L", "a quantity"),
        ("for m in 1..3:\n    u[m] = 2 kg*m", "2 kg*m", "an index"),
        ("y = sum(2 kg*m for m in 1..3)", "2 kg*m", "an index"),
        ("template t:\n    shared L\n    a = 10 bar/L\nuse t as u\nL = 4", "10 bar/L", "a quantity"),
        ("template t:\n    L = 4 m\n    a = 10 bar/L\nuse t as u", "10 bar/L", "a quantity"),
    ],
)
def test_both_readings_fit(text: str, literal: str, what: str) -> None:
    found = only(text, "unit-like-name")
    symbol = literal[-1]
    assert found.message == f"`{symbol}` is read as a unit in `{literal}`, and is {what} too"
    assert found.span is not None
    assert found.span.text == literal
    assert f"{literal[:-2]} {literal[-2]} {symbol}`" in found.help


@pytest.mark.parametrize(
    "text",
    [
        # The result is a pressure by volume only with the litre.
        "L = 3\na = 10 bar/L\nshow a in bar/L",
        "m = 3 kg\nF = k*(2 cm)\nk = 5 N/m\nshow F in N",
        # No such quantity where the literal stands.
        "template t:\n    a = 10 bar/L\nuse t as u\nL = 4",
        # A member is no number, so it cannot divide.
        "rows sp: K\n    A 1\nfor s in sp:\n    v[s] = 2 m/s",
        "L = 3\na = 10 bar / L",
    ],
)
def test_only_one_reading_fits(text: str) -> None:
    assert codes(text) == []


def test_where_only_the_name_fits_the_clash_says_so() -> None:
    found = only("L = 2 m\na = 10 bar/L\na = b\nshow b in bar/m", "dimension-clash")
    assert "bar / L" in found.help
