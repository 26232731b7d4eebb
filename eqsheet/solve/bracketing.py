"""One unknown: hunting for changes of sign from the guess outward, and what each of them turns out to be."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from math import inf

from eqsheet.solve.chandrupatla import Bracket, chandrupatla
from eqsheet.solve.outcome import Outcome, Status
from eqsheet.solve.problem import ScalarProblem
from eqsheet.solve.scalar_newton import enter, finish, scalar_newton, scaled_residual
from eqsheet.solve.trail import Trail

# Samples of equal distance over a finite range.
EVEN_SAMPLES = 64
# Samples for each doubling of the distance from the guess, or of the value itself where it is positive.
FARTHEST_DOUBLING = 60
# Halvings when looking for the edge of the domain between a finite and a non-finite sample.
EDGE_HALVINGS = 60
# Golden section of an interval, and steps after which it is as short as a minimum is sharp.
GOLDEN = 0.6180339887498949
GOLDEN_STEPS = 50


def bracketing(problem: ScalarProblem, start: float, trail: Trail) -> Outcome:
    """The root nearest `start` among the changes of sign that the samples show.

    Statuses: as `scalar_newton` where a root was found; POLE where residuals change sign only by jumping; MINIMUM
    where they never do and are least inside the range, NO_SIGN_CHANGE where they fall towards an end of it; DOMAIN
    where no sample is finite.
    """
    jump: float | None = None
    for bracket in sign_changes(problem, start, trail):
        shrunk = chandrupatla(problem.residual, bracket)
        x, value = shrunk.better
        if _vanishes(problem, bracket, shrunk):
            value, slope = problem.linearise(x)
            outcome = finish(problem, x, value, slope, trail)
            if outcome.solved:
                return outcome
        if jump is None:
            jump = x
        if trail.spent:
            return trail.close(Status.BUDGET)
    if trail.best_residual == inf:
        return trail.close(Status.DOMAIN)
    if jump is None:
        # A root that is touched without a change of sign lies near the smallest sample.
        touched = scalar_newton(problem, float(trail.best), trail)
        if touched.solved:
            return touched
        least = _least_near(problem, float(trail.best))
        end = float(trail.best) if least is None else least
        status = Status.NO_SIGN_CHANGE if least is None else Status.MINIMUM
        return trail.close(status, end, scaled_residual(problem, end, *problem.linearise(end)))
    value, slope = problem.linearise(jump)
    return trail.close(Status.POLE, jump, scaled_residual(problem, jump, value, 0.0))


def _least_near(problem: ScalarProblem, sample: float) -> float | None:
    """Where the residual is least near a sample; None where it falls towards the end of the range.

    By golden section (Kiefer, Proc. Amer. Math. Soc. 4 (1953), 502-506).
    """

    def size(x: float) -> float:
        return abs(problem.residual(x))

    points = sorted({sample, *sample_points(problem, sample)})
    sizes = [size(x) for x in points]
    i = points.index(sample)
    while 0 < i < len(points) - 1:
        lower = min(i - 1, i + 1, key=lambda k: sizes[k] if sizes[k] < inf else inf)
        if not sizes[lower] < sizes[i]:
            break
        i = lower
    if not 0 < i < len(points) - 1 or not sizes[i] < min(sizes[i - 1], sizes[i + 1]) < inf:
        return None
    begin, end = points[i - 1], points[i + 1]
    for _ in range(GOLDEN_STEPS):
        first, second = end - GOLDEN * (end - begin), begin + GOLDEN * (end - begin)
        if size(first) <= size(second):
            end = second
        else:
            begin = first
    return 0.5 * (begin + end)


def sign_changes(
    problem: ScalarProblem, start: float, trail: Trail, further: Sequence[float] = ()
) -> Iterator[Bracket]:
    """Changes of sign between neighbouring samples and at edges of the domain, nearest to `start` first.

    Parameters
    ----------
    further : sequence of float
        Samples besides those of `sample_points`; those outside the bounds are left out.
    """
    origin = enter(problem, start)
    value = problem.residual(origin)
    _note(problem, origin, value, trail)
    if value == 0.0:
        yield Bracket(origin, value, origin, value)
    upward = _Walk(problem, origin, value, trail)
    downward = _Walk(problem, origin, value, trail)
    inside = {x for x in further if problem.lower < x < problem.upper}
    points = sorted(inside.union(sample_points(problem, origin)))
    above = [x for x in points if x > origin]
    below = [x for x in points if x < origin][::-1]
    i = j = 0
    while i < len(above) or j < len(below):
        if j >= len(below) or (i < len(above) and above[i] - origin <= origin - below[j]):
            yield from upward.to(above[i])
            i += 1
        else:
            yield from downward.to(below[j])
            j += 1


class _Walk:
    """Samples in one direction, remembering the last finite one and whether the last one was finite."""

    def __init__(self, problem: ScalarProblem, x: float, value: float, trail: Trail) -> None:
        self.problem = problem
        self.trail = trail
        self.last = x
        self.finite = abs(value) < inf
        self.known: tuple[float, float] | None = (x, value) if self.finite else None

    def to(self, x: float) -> Iterator[Bracket]:
        """Brackets met on the way to sample x."""
        value = self.problem.residual(x)
        finite = abs(value) < inf
        _note(self.problem, x, value, self.trail)
        if finite != self.finite:
            # Close in on the edge of the domain from the finite side: a root may hide beside it.
            inside, outside = (x, self.last) if finite else (self.last, x)
            edge = self._edge(inside, outside)
            if edge is not None:
                edge_value = self.problem.residual(edge)
                # After a gap this may be a pole that a sample has hit, so the other side of the gap counts
                # too.
                yield from self._between(edge, edge_value)
                self.known = (edge, edge_value)
        if finite:
            yield from self._between(x, value)
            self.known = (x, value)
        self.last, self.finite = x, finite

    def _between(self, x: float, value: float) -> Iterator[Bracket]:
        if self.known is not None and (self.known[1] > 0.0) != (value > 0.0):
            yield Bracket(*self.known, x, value)

    def _edge(self, inside: float, outside: float) -> float | None:
        """The last finite point on the way from `inside` to `outside`; None if that is `inside`."""
        first = inside
        for _ in range(EDGE_HALVINGS):
            middle = 0.5 * (inside + outside)
            if middle in (inside, outside):
                break
            if abs(self.problem.residual(middle)) < inf:
                inside = middle
            else:
                outside = middle
        return None if inside == first else inside


def sample_points(problem: ScalarProblem, origin: float) -> list[float]:
    """Where to look, in rising order, strictly inside the bounds.

    Distances from `origin` that double, up to 2^60 typical sizes or the bounds; values that double and
    halve where the unknown is positive (or negative) throughout, as quantities that span decades are; and
    even steps over a finite range.
    """
    lower, upper = problem.lower, problem.upper
    points = {
        origin + side * problem.magnitude * 2.0**k
        for k in range(-4, FARTHEST_DOUBLING)
        for side in (-1.0, 1.0)
    }
    if origin != 0.0:
        points.update(origin * 2.0**k for k in range(-FARTHEST_DOUBLING, FARTHEST_DOUBLING))
    if abs(upper - lower) < inf:
        width = upper - lower
        points.update(lower + width * (k + 0.5) / EVEN_SAMPLES for k in range(EVEN_SAMPLES))
        # Towards the bounds themselves: residuals are often largest, or finite last, there.
        points.update(lower + width * 2.0**-k for k in range(7, 50, 3))
        points.update(upper - width * 2.0**-k for k in range(7, 50, 3))
    return sorted(x for x in points if lower < x < upper)


def _note(problem: ScalarProblem, x: float, value: float, trail: Trail) -> None:
    """Keep the sample if its residual, unscaled, is the smallest so far; samples are no iterations."""
    if abs(value) < trail.best_residual:
        trail.best, trail.best_residual = x, abs(value)


def _vanishes(problem: ScalarProblem, first: Bracket, last: Bracket) -> bool:
    """Whether the residual shrank with the bracket, as at a root and not at a pole or a jump."""
    _, value = last.better
    return abs(value) < min(abs(first.value_a), abs(first.value_b)) or value == 0.0
