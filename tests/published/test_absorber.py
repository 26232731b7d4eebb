"""An absorber of equilibrium stages against Kremser's closed form.

A. Kremser, National Petroleum News 22 (21), 1930, 43-49; M. Souders and G. G. Brown, Ind. Eng. Chem. 24, 1932, 519-522:
with the absorption factor A = L/(m*V) and pure solvent, the part of the solute absorbed in N stages is
(A^(N+1) - A)/(A^(N+1) - 1), and N/(N+1) where A = 1.
"""

from __future__ import annotations

import mpmath
import pytest

import eqsheet

WORKSHEET = """\
N = {stages}
A = {factor}
m = 1.7
V = 100 kmol/h
L = A*m*V
x[0] = 0
y[N+1] = 0.02
for i in 1..N:
    L*(x[i] - x[i-1]) = V*(y[i+1] - y[i])
    y[i] = m*x[i]
absorbed = 1 - y[1]/y[N+1]
"""


def kremser(factor: float, stages: int) -> tuple[float, float]:
    """The part absorbed, and the mole fraction of the gas that leaves."""
    with mpmath.workdps(60):
        a = mpmath.mpf(factor)
        part = (
            mpmath.mpf(stages) / (stages + 1) if a == 1 else (a ** (stages + 1) - a) / (a ** (stages + 1) - 1)
        )
        return float(part), float((1 - part) * mpmath.mpf("0.02"))


@pytest.mark.parametrize("stages", [10, 100, 1000])
@pytest.mark.parametrize("factor", [0.7, 1.0, 1.01, 1.4])
def test_absorber_against_kremser(factor: float, stages: int) -> None:
    solution = eqsheet.parse(WORKSHEET.format(stages=stages, factor=factor)).solve()
    assert solution.status == "solved", [d.message for d in solution.diagnostics]
    part, leaving = kremser(factor, stages)
    assert solution["absorbed"].si == pytest.approx(part, rel=1e-10)
    # What leaves is all but absorbed in many stages: relative to what comes in.
    assert solution["y[1]"].si == pytest.approx(leaving, abs=1e-10 * 0.02)


def test_stages_are_changed_for_one_run() -> None:
    solution = eqsheet.parse(WORKSHEET.format(stages=3, factor=1.4)).solve(changes=["N = 25"])
    assert solution["absorbed"].si == pytest.approx(kremser(1.4, 25)[0], rel=1e-10)
