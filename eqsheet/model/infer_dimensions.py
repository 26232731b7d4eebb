"""Dimensions of all quantities of a worksheet, inferred from its formulas.

Nothing is declared: the dimensions are the most general solution of all demands of all formulas, a linear
system over the rationals. Whether there is a solution does not depend on the order of the lines; where there
is none, one formula after another is set aside until there is (`dimension_culprit` says which), and each is
reported as a `Clash`.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass

from eqsheet.model.dimension_blame import Clash, Origin, describe_clash, fits, origins_of
from eqsheet.model.dimension_culprit import LARGEST_EFFORT, choose_culprit
from eqsheet.model.dimension_propagation import UNKNOWN, Inference, Worklines, propagate
from eqsheet.model.dimension_rules import Exponent
from eqsheet.model.tape import Formula
from eqsheet.units.dimension import Dimension


@dataclass(frozen=True, slots=True)
class Link:
    """A product of powers of quantities, each left open by itself, that has a known dimension."""

    powers: tuple[tuple[int, Exponent], ...]
    dimension: Dimension


@dataclass(frozen=True, slots=True)
class DimensionResult:
    """What is known of the dimensions.

    Attributes
    ----------
    dimensions : tuple of (Dimension or None)
        By quantity; None where nothing fixes it.
    origins : tuple of (Origin or None)
        By quantity: the formula, and the place in it, that fixed it. None where it was given or is open.
    clashes : tuple of Clash
        Formulas that contradict the others, by formula number.
    links : tuple of Link
        How quantities without dimension hang together.
    """

    dimensions: tuple[Dimension | None, ...]
    origins: tuple[Origin | None, ...]
    clashes: tuple[Clash, ...]
    links: tuple[Link, ...]

    @property
    def unknown(self) -> tuple[int, ...]:
        """Quantities whose dimension nothing fixes."""
        return tuple(q for q, dimension in enumerate(self.dimensions) if dimension is None)


def infer_dimensions(
    formulas: Sequence[Formula],
    quantities: int,
    known: Mapping[int, Dimension] | None = None,
    minor: Collection[int] = (),
) -> DimensionResult:
    """The dimensions of `quantities` quantities that `formulas` imply.

    Parameters
    ----------
    formulas : sequence of Formula
    quantities : int
        How many there are; formulas number them from 0.
    known : mapping of int to Dimension, optional
        Dimensions given beforehand.
    minor : collection of int
        Numbers of formulas that state no physics (guesses, limits, shown units): blamed first where it could
        be either.

    >>> from eqsheet.model.tape import Literal, TapeBuilder
    >>> b = TapeBuilder()
    >>> v = b.quantity(0, (0, 1))
    >>> speed = b.literal(Literal(2.0, Dimension.of({"m": 1, "s": -1}), "plain", 4, 9))
    >>> infer_dimensions([b.formula((v, speed), 0, ((v, speed),))], 1).dimensions[0].text
    'm/s'
    """
    given = dict(known or {})
    lines = Worklines(formulas, quantities)
    blamed: list[int] = []
    set_aside: set[int] = set()
    found = propagate(lines, given)
    while found.broken:
        if lines.visits > LARGEST_EFFORT:
            blamed.extend(index for index, _ in found.broken)
        else:
            blamed.append(choose_culprit(lines, found, frozenset(set_aside), frozenset(minor)))
        set_aside = {sibling for index in blamed for sibling in lines.siblings(index)}
        found = propagate(lines, given, set_aside)
    if len(blamed) > 1 and lines.visits <= LARGEST_EFFORT:
        found = _take_back(lines, given, blamed, found)
    origins = origins_of(lines, given, found)
    _, open_ones = found.elimination.settled()
    links = tuple(
        Link(
            ((quantity, 1), *((other, -power) for other, power in sorted(parts.terms.items()))),
            parts.constant,
        )
        for quantity, parts in sorted(open_ones.items())
    )
    dimensions = tuple(lines.dimensions[n] if n != UNKNOWN else None for n in found.state)
    clashes = [
        describe_clash(lines, found, origins, index) or _clash_within_statement(lines, given, blamed, index)
        for index in sorted(blamed)
    ]
    return DimensionResult(dimensions, origins, tuple(c for c in clashes if c is not None), links)


def _clash_within_statement(
    lines: Worklines, given: Mapping[int, Dimension], blamed: Collection[int], index: int
) -> Clash | None:
    """How a blamed formula contradicts others of its own statement, as one branch of an `if` does another."""
    set_aside = {sibling for other in blamed if other != index for sibling in lines.siblings(other)}
    found = propagate(lines, given, set_aside.difference(lines.siblings(index)) | {index})
    return describe_clash(lines, found, origins_of(lines, given, found), index)


def _take_back(
    lines: Worklines, given: Mapping[int, Dimension], blamed: list[int], found: Inference
) -> Inference:
    """Take back formulas that fit after all, now that others are set aside; changes `blamed`."""
    for index in sorted(blamed):
        if not fits(lines, found, index):
            continue
        rest = [other for other in blamed if other != index]
        again = propagate(lines, given, {sibling for other in rest for sibling in lines.siblings(other)})
        if not again.broken:
            blamed.remove(index)
            found = again
    return found
