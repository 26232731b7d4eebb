"""Units that are read as the rules say but seldom meant so are pointed out, and nothing else is."""

from __future__ import annotations

import pytest

import eqsheet
from eqsheet.diagnostics.diagnostic import Diagnostic

CODES = ("unit-in-divisor", "unit-after-slash")


def warned(text: str) -> list[Diagnostic]:
    solution = eqsheet.parse(text).solve()
    return [d for d in solution.diagnostics if d.code in CODES]


@pytest.mark.parametrize(
    ("text", "guilty", "cure"),
    [
        ("t = 3/8 in", "3/8 in", "3/8 * 1 in"),
        ("t = 1 + 3 / 8 in * 1 in", "3 / 8 in", "3/8 * 1 in"),
        ("k = 0.6 W/m*K", "0.6 W/m*K", "W/(m*K)"),
        ("c = 4.18 kJ/kg*K", "4.18 kJ/kg*K", "kJ/(kg*K)"),
        ("x = 3 1/m*K", "3 1/m*K", "1/(m*K)"),
    ],
)
def test_a_slip_is_shown_with_its_cure(text: str, guilty: str, cure: str) -> None:
    (slip,) = warned(text)
    assert slip.labels[0].span.text == guilty
    assert cure in slip.help


@pytest.mark.parametrize(
    "text",
    [
        "t = 3/8 * 1 in",
        "t = 0.375 in",
        "f = 1 / (50 s)",
        "f = 1.5/50 s",
        "b = L/2 m\nL = 3 m",
        "rho = 0.0175 Ohm*mm^2/m",
        "k = 0.6 W/(m*K)",
        "c = 4 J/kg/K",
        "v = 3 m/s * t/(1 s)\nt = 2 s",
    ],
)
def test_what_is_plain_is_left_alone(text: str) -> None:
    assert warned(text) == []


def test_a_line_is_warned_of_once() -> None:
    assert len(warned("D = 3/8 in\nrequire D > 0 1/in\nA = D^2")) == 1
