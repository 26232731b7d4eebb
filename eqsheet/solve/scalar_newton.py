"""Safeguarded Newton iteration for one unknown, in plain floats.

The damped Newton iteration of `newton` for n = 1, where the natural monotonicity test is that of the
residual itself (Deuflhard 2004, section 3.3), with a bracket kept once a change of sign has been seen: a
step that leaves it is replaced by its middle (Press et al., Numerical Recipes, section 9.4, "rtsafe", gives
the idea; the code is our own).
"""

from __future__ import annotations

from math import copysign, inf, log2, nextafter

from eqsheet.solve.damping import LEAST_DAMPING
from eqsheet.solve.factor import SINGULAR_CONDITION
from eqsheet.solve.interior import LEAST_FRACTION, NUDGE, RESTING
from eqsheet.solve.kind_of_root import FAR
from eqsheet.solve.near_zero import UNSETTLED
from eqsheet.solve.newton import CONTRACTING, QUICK
from eqsheet.solve.order_of_growth import NOISE, grows_by_a_power
from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import ScalarProblem
from eqsheet.solve.termination import (
    ACCEPTABLE,
    AT_REST,
    BESIDE,
    NEARLY_ZERO,
    NEIGHBOURHOOD,
    PROBE,
    ROUNDING,
    SLOW,
    SURE,
    SUSPECT_CONDITION,
    ZERO_FLOOR,
    last_step_due,
)
from eqsheet.solve.trail import Trail


def scalar_newton(problem: ScalarProblem, start: float, trail: Trail) -> Outcome:
    """The root that safeguarded Newton steps lead to from `start`, or where and why they end.

    Parameters
    ----------
    problem : ScalarProblem
    start : float
        Moved strictly inside the bounds first.
    trail : Trail
        Written on the way.
    """
    x = enter(problem, start)
    value, slope = problem.linearise(x)
    if not _finite(value, slope):
        return trail.close(Status.DOMAIN, x, inf)
    damping, limiting = 0.0, -1
    # Nearest points known to either side with the opposite sign of the residual at x.
    below, above = -inf, inf
    last_rest, quick = inf, False
    while True:
        floor = max(abs(x), ZERO_FLOOR * problem.magnitude)
        # On a quadratic approach the next step reaches rounding level anyhow: no need to ask what the terms
        # say.
        scaled = (residual_by_slope if quick else scaled_residual)(problem, x, value, slope)
        trail.note(x, scaled, damping, limiting)
        step = -value / slope if slope != 0.0 else (0.0 if value == 0.0 else inf)
        rest = abs(step) / floor
        near = rest <= AT_REST and (last_step_due(rest, rest / last_rest) or rest > SLOW * last_rest)
        if scaled <= ROUNDING or near:
            return finish(problem, x, value, slope, trail)
        if trail.spent:
            return trail.close(Status.BUDGET)
        if slope == 0.0:
            if below == -inf and above == inf:
                return trail.close(Status.SINGULAR)
            step = (below if above == inf else above) - x
        last_rest = rest
        damping = 1.0
        while True:
            trial = x + damping * step
            limiting = -1 if damping == 1.0 else 0
            if not below < trial < above:
                # Only one side can hold an opposite sign: half way to it.
                trial, limiting = 0.5 * (x + (below if trial <= below else above)), 0
            if not problem.lower < trial < problem.upper:
                trial, limiting = _cut(problem, x, trial, min(1.0, rest)), 0
            new_value, new_slope = problem.linearise(trial)
            if _finite(new_value, new_slope):
                crossed = (new_value > 0.0) != (value > 0.0) and new_value != 0.0
                if abs(new_value) < abs(value):
                    break
                if crossed:
                    if trial > x:
                        above = min(above, trial)
                    else:
                        below = max(below, trial)
            damping *= 0.5
            if damping < LEAST_DAMPING or trial == x:
                if rest <= AT_REST:
                    return finish(problem, x, value, slope, trail)
                held = not problem.lower < x + step < problem.upper
                return trail.close(Status.HELD if held else Status.STALLED, on_bound=(0,) if held else ())
        if crossed:
            # The old point is now the one of opposite sign, and what was known beyond it is of the same sign.
            below, above = (x, inf) if trial > x else (-inf, x)
        trail.contracting = damping == 1.0 and abs(new_value) < CONTRACTING * abs(value)
        quick = damping == 1.0 and abs(new_value) < QUICK * abs(value)
        x, value, slope = trial, new_value, new_slope


def enter(problem: ScalarProblem, x: float) -> float:
    """The point itself if strictly inside the bounds, else moved in."""
    if problem.lower < x < problem.upper:
        return x
    room = NUDGE * min(problem.upper - problem.lower, problem.magnitude)
    inside = problem.lower + room if x <= problem.lower else problem.upper - room
    return _strictly(problem, inside)


def scaled_residual(problem: ScalarProblem, x: float, value: float, slope: float) -> float:
    """|value| relative to the size of the equation, as `termination` defines it; inf where that is zero."""
    scaled = residual_by_slope(problem, x, value, slope)
    if scaled <= ROUNDING or NEARLY_ZERO <= scaled < inf:
        return scaled
    size = max(abs(slope * x), term_size(problem, x, slope))
    return abs(value) / size if size > 0.0 else inf


def residual_by_slope(problem: ScalarProblem, x: float, value: float, slope: float) -> float:
    """|value| relative to what the slope alone says; at rounding level only if x as it is explains it."""
    if value == 0.0:
        return 0.0
    by_slope = abs(slope * x)
    if abs(value) <= ROUNDING * by_slope:
        return abs(value) / by_slope
    size = abs(slope) * max(abs(x), ZERO_FLOOR * problem.magnitude)
    return max(abs(value) / size, 2.0 * ROUNDING) if size > 0.0 else inf


def known_size(problem: ScalarProblem, x: float) -> float:
    """Size of the terms, where x is nearly zero that of a point a little way off; see `termination`."""
    size = problem.size(x)
    floor = ZERO_FLOOR * problem.magnitude
    if abs(x) < floor:
        off = copysign(floor, x)
        if problem.lower < off < problem.upper:
            size = max(size, problem.size(off))
    return size


def term_size(problem: ScalarProblem, x: float, slope: float) -> float:
    """As `known_size`, with the slope in its place where the problem does not know it."""
    return known_size(problem, x) or abs(slope) * max(abs(x), ZERO_FLOOR * problem.magnitude)


def finish(problem: ScalarProblem, x: float, value: float, slope: float, trail: Trail) -> Outcome:
    """One more correction if it improves the residual, then the judgement of the point."""
    if slope != 0.0 and value != 0.0:
        polished = x - value / slope
        if problem.lower < polished < problem.upper:
            again, again_slope = problem.linearise(polished)
            if abs(again) <= abs(value):
                x, value, slope = polished, again, again_slope
    sure = trail.contracting and 0.0 < abs(value) <= SURE * abs(slope * x)
    scaled = (residual_by_slope if sure else scaled_residual)(problem, x, value, slope)
    if not (scaled <= ACCEPTABLE and (sure or confirmed_scalar(problem, x, value, slope))):
        return trail.close(Status.STALLED, x, scaled)
    if not sure:
        root = _root_as_it_is(problem, x, value, slope)
        if root is None:
            return trail.close(Status.STALLED, x, scaled)
        x, value, slope = root
    bound = problem.lower if x - problem.lower < problem.upper - x else problem.upper
    resting = (0,) if abs(x - bound) <= RESTING * max(abs(bound), problem.magnitude) < inf else ()
    kind = _kind_of_root(problem, x, value, slope)
    null = () if kind is Status.CONVERGED else (1.0,)
    return trail.close(kind, x, scaled, resting, null, null)


def _root_as_it_is(
    problem: ScalarProblem, x: float, value: float, slope: float
) -> tuple[float, float, float] | None:
    """The root with value and slope: x itself, or zero beside it; None where neither is one. See `near_zero`."""
    size = max(problem.size(x) or term_size(problem, x, slope), abs(slope * x))
    # Beyond a kink there may be neither terms nor slopes.
    holds = value == 0.0 or abs(value) <= ACCEPTABLE * size
    if holds and (
        abs(x) > NEIGHBOURHOOD * problem.magnitude or ROUNDING * size <= UNSETTLED * abs(slope * x)
    ):
        return x, value, slope
    if problem.lower <= 0.0 <= problem.upper:
        at_zero, slope_there = problem.linearise(0.0)
        if abs(at_zero) <= ACCEPTABLE * problem.size(0.0):
            return 0.0, at_zero, slope_there if abs(slope_there) < inf else slope
    return (x, value, slope) if holds else None


def _kind_of_root(problem: ScalarProblem, x: float, value: float, slope: float) -> Status:
    """Whether the root is single, double, or one of a continuum; see `kind_of_root`."""
    by_slope = abs(slope * x)
    if 0.0 < abs(value) <= SURE * by_slope:
        return Status.CONVERGED
    reach = max(abs(x), NEIGHBOURHOOD * problem.magnitude)
    size = max(by_slope, term_size(problem, x, slope))
    if abs(slope) * reach * SUSPECT_CONDITION >= size > 0.0:
        return Status.CONVERGED
    near, far = (_least_beside(problem, x, distance * reach) for distance in (PROBE, 2.0 * PROBE))
    noise = max(NOISE * ROUNDING * size, 8.0 * abs(value))
    if far <= noise:
        farthest = int(log2(FAR * max(abs(x), problem.magnitude) / (PROBE * reach)))
        further = (_least_beside(problem, x, PROBE * reach * 2.0**k) for k in range(1, farthest + 1))
        return Status.DOUBLE if grows_by_a_power(further, noise) else Status.CONTINUUM
    if far > 3.0 * near or abs(slope) * reach * SINGULAR_CONDITION < size:
        return Status.DOUBLE
    return Status.CONVERGED


def _least_beside(problem: ScalarProblem, x: float, distance: float) -> float:
    """Smaller of the residuals at `distance` to either side; inf where neither can be had."""
    values = [
        abs(problem.residual(p)) for p in (x - distance, x + distance) if problem.lower < p < problem.upper
    ]
    return min((v for v in values if v < inf), default=inf)


def confirmed_scalar(problem: ScalarProblem, x: float, value: float, slope: float) -> bool:
    """Whether a residual small only against the slope belongs to a root, not a pole; see `termination`."""
    if value == 0.0:
        return True
    shift = BESIDE * max(abs(x), ZERO_FLOOR * problem.magnitude)
    for moved in (x + shift, x - shift):
        if problem.lower < moved < problem.upper:
            there = problem.residual(moved)
            if abs(there) < inf:
                if abs(value) <= ACCEPTABLE * min(known_size(problem, x), known_size(problem, moved)):
                    return True
                return abs(there) > max(abs(value), 0.25 * abs(slope) * shift)
    return abs(value) <= ACCEPTABLE * known_size(problem, x)


def _cut(problem: ScalarProblem, x: float, trial: float, closeness: float) -> float:
    """The trial stopped short of the bound it would pass."""
    fraction = max(LEAST_FRACTION, 1.0 - closeness)
    bound = problem.lower if trial <= problem.lower else problem.upper
    return _strictly(problem, x + fraction * (bound - x))


def _strictly(problem: ScalarProblem, x: float) -> float:
    """The point, moved by one unit in the last place where rounding has put it onto a bound."""
    if x <= problem.lower:
        return nextafter(problem.lower, inf)
    if x >= problem.upper:
        return nextafter(problem.upper, -inf)
    return x


def _finite(value: float, slope: float) -> bool:
    """Whether both are finite."""
    return value - value == 0.0 and slope - slope == 0.0
