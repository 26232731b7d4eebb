"""Newton, dogleg and homotopy in coordinates without bounds; the root found is finished in the unknowns
themselves."""

from __future__ import annotations

from eqsheet.solve.continuation import newton_homotopy
from eqsheet.solve.dogleg import dogleg
from eqsheet.solve.interior_coordinates import interior_coordinates
from eqsheet.solve.newton import newton
from eqsheet.solve.outcome import Outcome
from eqsheet.solve.problem import Problem, Vector
from eqsheet.solve.termination import measured
from eqsheet.solve.trail import Rung, Trail


def logarithmic_newton(problem: Problem, start: Vector, trail: Trail) -> Outcome:
    """`newton` in interior coordinates."""
    return _in_coordinates(newton, problem, start, trail)


def logarithmic_dogleg(problem: Problem, start: Vector, trail: Trail) -> Outcome:
    """`dogleg` in interior coordinates."""
    return _in_coordinates(dogleg, problem, start, trail)


def logarithmic_homotopy(problem: Problem, start: Vector, trail: Trail) -> Outcome:
    """`newton_homotopy` in interior coordinates: the curve can leave through no bound."""
    return _in_coordinates(newton_homotopy, problem, start, trail)


def _in_coordinates(method: Rung, problem: Problem, start: Vector, trail: Trail) -> Outcome:
    """The outcome of `method`, judged in the unknowns themselves."""
    coordinates = interior_coordinates(problem)
    inner = method(coordinates.problem, coordinates.there(start), trail)
    x = coordinates.back(inner.x)
    if inner.solved:
        return newton(problem, x, trail.renew())
    return trail.close(inner.status, x, measured(problem, x))
