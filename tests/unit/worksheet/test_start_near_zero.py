"""Unknowns that equal starts make zero, such as an angle between two buses, start near zero."""

from __future__ import annotations

import eqsheet
from eqsheet.model.build import build_system
from eqsheet.syntax.parse import parse_document
from eqsheet.worksheet.guesses import work_out_guesses
from eqsheet.worksheet.starting_values import NEAR_ZERO, starting_values

WORKSHEET = """\
theta = a - b
P = 10*sin(theta) + theta^3
2*P + a = 1
b = 0.3*P
a near 0 within -1 .. 1
b near 0 within -1 .. 1
"""


def test_the_start_of_a_difference() -> None:
    document, _ = parse_document(eqsheet.parse(WORKSHEET).source)
    system, _ = build_system(document.statements)
    guesses, _ = work_out_guesses(system, {}, ["plain"] * len(system.names))
    unknowns = range(len(system.names))
    nothing = [float("nan")] * len(system.names)
    formulas = [item.formula for item in system.equations]
    start = starting_values(unknowns, formulas, nothing, guesses, [None] * len(system.names))
    theta = start.values[system.names.index("theta")]
    assert 0 < abs(theta) <= 2 * NEAR_ZERO


def test_it_is_solved() -> None:
    solution = eqsheet.parse(WORKSHEET).solve()
    assert solution.status == "solved"
    assert abs(solution["theta"].si - (solution["a"].si - solution["b"].si)) < 1e-14
