"""The rungs above plain Newton, in the order of their cost. Imported only when Newton has failed."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from eqsheet.solve.continuation import fixed_point_homotopy, newton_homotopy
from eqsheet.solve.dogleg import dogleg
from eqsheet.solve.levenberg_marquardt import levenberg_marquardt
from eqsheet.solve.logarithmic import logarithmic_dogleg, logarithmic_homotopy, logarithmic_newton
from eqsheet.solve.newton import newton
from eqsheet.solve.problem import Problem
from eqsheet.solve.redundancy import redundant
from eqsheet.solve.spread import spread
from eqsheet.solve.trail import Rung

# What the ladder ends with, and what it never leaves out.
LAST = "spread starts"
WITHOUT_BOUNDS: tuple[tuple[str, Rung], ...] = (
    ("newton, start moved", newton),
    ("dogleg", dogleg),
    ("levenberg-marquardt", levenberg_marquardt),
    ("newton homotopy", newton_homotopy),
    ("fixed-point homotopy", fixed_point_homotopy),
    (LAST, spread),
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
    (LAST, spread),
)
# The other methods work on dense matrices, which a block of more unknowns than this has no room for.
LARGEST_DENSE = 500
FOR_LARGE: tuple[tuple[str, Rung], ...] = (
    ("newton, start moved", newton),
    ("logarithmic newton", logarithmic_newton),
)
# Where the equations depend on each other throughout, or have no root, no start is better than another: the way onto
# the curve of roots, if there is one, or to where the sides come closest.
WHERE_NO_START_HELPS: tuple[tuple[str, Rung], ...] = (
    ("newton, start moved", newton),
    ("levenberg-marquardt", levenberg_marquardt),
)


def fallbacks(
    problem: Problem,
    own_rungs: Sequence[tuple[str, Rung]] = (),
    hopeless: Callable[[], bool] | None = None,
) -> tuple[tuple[str, Rung], ...]:
    """The rungs for a problem, with their names; the caller's own ones before them.

    Parameters
    ----------
    hopeless : callable, optional
        Whether the caller can prove that there is no root within the bounds.
    """
    if problem.n > LARGEST_DENSE:
        return (*own_rungs, *FOR_LARGE)
    if redundant(problem) or (hopeless is not None and hopeless()):
        return WHERE_NO_START_HELPS
    bounded = bool((problem.lower > -float("inf")).any() or (problem.upper < float("inf")).any())
    return (*own_rungs, *(WITH_BOUNDS if bounded else WITHOUT_BOUNDS))
