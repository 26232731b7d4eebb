"""Blocks without a solution of their own are given up before every start has been tried."""

from __future__ import annotations

from textwrap import dedent

from solving import lines, only

import eqsheet
from eqsheet.solve.trail import Budget
from eqsheet.worksheet.between_blocks import run_between_blocks


def methods_tried(text: str) -> list[str]:
    """Methods of the attempts at the first block that is not solved."""
    run = run_between_blocks(eqsheet.parse(dedent(text)).prepare(), Budget())
    result = run.blocks[run.unsolved[0] - 1].result
    assert result is not None and result.outcome is not None
    return [outcome.method for outcome in (*result.outcome.attempts, result.outcome)]


# A photovoltaic module by its single-diode equation (common practice; data invented), which stands there twice.
MODULE = """
    I = I_L - I_0*(exp((V + I*R_s)/(n*V_t)) - 1) - (V + I*R_s)/R_sh
    2*I + 2*I_0*(exp((V + I*R_s)/(n*V_t)) - 1) = 2*I_L - 2*(V + I*R_s)/R_sh
    I_L = 8 A
    I_0 = 1e-9 A
    R_s = 0.2 V/A
    R_sh = 300 V/A
    n = 60*1.2
    V_t = 25.7 mV
    V near 30 V within 0 V .. 50 V
    I near 7 A within 0 A .. 10 A
"""


def test_an_equation_that_stands_there_twice_is_named_after_few_attempts() -> None:
    found = only(eqsheet.parse(dedent(MODULE)).solve(), "no-solution")
    assert "leave a combination of unknowns free: `I` and `V` from lines 2 and 3" in found.message
    assert set(lines(found)[:2]) == {2, 3}
    assert len(methods_tried(MODULE)) <= 3


def test_where_bounds_prove_that_there_is_no_solution_no_starts_are_spread() -> None:
    text = "x^2 + sin(y) = -5\nx + y^3 = 2\n"
    assert only(eqsheet.parse(text).solve(), "no-solution").message.startswith("there is no solution")
    assert "spread starts" not in methods_tried(text)
