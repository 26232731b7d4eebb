"""Angles without a unit are radians; whole numbers beyond a full turn are doubted."""

from __future__ import annotations

import pytest

import eqsheet


def warned(text: str) -> list[tuple[str, str]]:
    """What is pointed at, and the cure, of each warning."""
    return [
        (d.span.text, d.help or "")
        for d in eqsheet.parse(text).solve().diagnostics
        if d.code == "angle-without-unit" and d.span is not None
    ]


@pytest.mark.parametrize("text", ["y = cos(30)", "y = sin(-30)", "define f(x) = tan(x)\ny = f(30)"])
def test_a_literal_in_degrees_is_doubted(text: str) -> None:
    ((place, cure),) = warned(text)
    assert place.lstrip("-") == "30"
    assert f"{place} deg" in cure


@pytest.mark.parametrize("known", ["a = 45", "a = -45", "45 = a"])
def test_a_known_in_degrees_is_doubted_once_however_often_it_is_used(known: str) -> None:
    ((place, _),) = warned(f"{known}\ny = sin(a) + cos(a)\nz = tan(a)")
    assert place.lstrip("-") == "45"


@pytest.mark.parametrize(
    "text",
    [
        "y = cos(30 deg)",
        "y = cos(30 rad)",
        "a = 45 deg\ny = cos(a)",
        "y = cos(6)",  # less than a full turn
        "y = cos(7.5)",  # not whole
        "y = sin(2*pi*50*0.3)",
        "w = 50 1/s\nt = 3 s\ny = sin(w*t)",
        "a = 45\ny = 2*a",
        "for i in 1..20:\n    y[i] = sin(i)",
        "define dewpoint(T in degC) in degC = T + sin(T)\nT_d = dewpoint(30 degC)",
    ],
)
def test_what_is_meant_in_radians_is_left_alone(text: str) -> None:
    assert warned(text) == []
