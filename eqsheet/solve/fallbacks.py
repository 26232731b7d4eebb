"""The rungs above plain Newton, in the order of their cost. Imported only when Newton has failed."""

from __future__ import annotations

from eqsheet.solve.continuation import fixed_point_homotopy, newton_homotopy
from eqsheet.solve.dogleg import dogleg
from eqsheet.solve.levenberg_marquardt import levenberg_marquardt
from eqsheet.solve.logarithmic import logarithmic_dogleg, logarithmic_homotopy, logarithmic_newton
from eqsheet.solve.newton import newton
from eqsheet.solve.problem import Problem
from eqsheet.solve.spread import spread
from eqsheet.solve.trail import Rung

WITHOUT_BOUNDS: tuple[tuple[str, Rung], ...] = (
    ("newton, start moved", newton),
    ("dogleg", dogleg),
    ("levenberg-marquardt", levenberg_marquardt),
    ("newton homotopy", newton_homotopy),
    ("fixed-point homotopy", fixed_point_homotopy),
    ("spread starts", spread),
)
# Bounds are where logarithms help, and where a homotopy in the unknowns themselves may leave the box.
WITH_BOUNDS: tuple[tuple[str, Rung], ...] = (
    ("newton, start moved", newton),
    ("logarithmic newton", logarithmic_newton),
    ("dogleg", dogleg),
    ("levenberg-marquardt", levenberg_marquardt),
    ("logarithmic dogleg", logarithmic_dogleg),
    ("logarithmic homotopy", logarithmic_homotopy),
    ("newton homotopy", newton_homotopy),
    ("fixed-point homotopy", fixed_point_homotopy),
    ("spread starts", spread),
)
# The other methods work on dense matrices, which a block of more unknowns than this has no room for.
LARGEST_DENSE = 500
FOR_LARGE: tuple[tuple[str, Rung], ...] = (
    ("newton, start moved", newton),
    ("logarithmic newton", logarithmic_newton),
)


def fallbacks(problem: Problem) -> tuple[tuple[str, Rung], ...]:
    """The rungs for a problem, with their names."""
    if problem.n > LARGEST_DENSE:
        return FOR_LARGE
    bounded = bool((problem.lower > -float("inf")).any() or (problem.upper < float("inf")).any())
    return WITH_BOUNDS if bounded else WITHOUT_BOUNDS
