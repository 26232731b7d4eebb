"""Weights of kinds: 1 for a reading, 0 for a difference, and sums of them.

A reading has an origin (20 degC, 3 barg), a difference has none. Weights add where values are added, so
``T_2 - T_1`` has 0, ``T_1 + dT`` has 1, a mean ``(T_1 + T_2)/2`` has 1, and ``T_1 + 2 degC``, a slip, has 2.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction

READING, DIFFERENCE = 1, 0


@dataclass(frozen=True, slots=True)
class Weight:
    """``constant + sum of factor * weight of a variable``.

    Variables are slots of quantities (from 0) and, as ``-1 - i``, instructions i that may be either kind.
    ``scaled`` is true after multiplication by a number other than 1 and -1.
    """

    constant: Fraction
    terms: tuple[tuple[int, int], ...] = ()
    scaled: bool = False

    @property
    def certain(self) -> Fraction | None:
        """Its value where no variable is left in it."""
        return None if self.terms else self.constant

    @property
    def sound(self) -> bool:
        """Whether it is a kind at all: a multiple of a reading is neither reading nor difference."""
        return not self.scaled or self.constant in (READING, DIFFERENCE)


def added(a: Weight, b: Weight, sign: int) -> Weight:
    """``a + sign * b``."""
    terms = dict(a.terms)
    for variable, factor in b.terms:
        total = terms.get(variable, 0) + sign * factor
        if total:
            terms[variable] = total
        else:
            terms.pop(variable, None)
    return Weight(a.constant + sign * b.constant, tuple(sorted(terms.items())), a.scaled or b.scaled)


def scaled(weight: Weight, factor: Fraction) -> Weight | None:
    """The weight times a number; None where a kind that is open would be multiplied."""
    if factor == 1:
        return weight
    if factor == -1:
        return added(Weight(Fraction(0)), weight, -1)
    return None if weight.terms else Weight(weight.constant * factor, (), True)


ZERO = Weight(Fraction(DIFFERENCE))
ONE = Weight(Fraction(READING))


def with_known(gap: Weight, now: Mapping[int, int], either: Mapping[int, int]) -> Weight:
    """The gap with all kinds put in that are known, by slot and by instruction."""
    constant = gap.constant
    terms: list[tuple[int, int]] = []
    for variable, factor in gap.terms:
        kind = now.get(variable) if variable >= 0 else either.get(variable)
        if kind is None:
            terms.append((variable, factor))
        else:
            constant += factor * kind
    return Weight(constant, tuple(terms), gap.scaled)


def forced_kinds(gap: Weight) -> list[tuple[int, int]] | None:
    """Kinds that follow from ``gap = 0``, every variable being 0 or 1; None where it cannot hold."""
    lowest = gap.constant + sum(min(factor, 0) for _, factor in gap.terms)
    highest = gap.constant + sum(max(factor, 0) for _, factor in gap.terms)
    if lowest > 0 or highest < 0:
        return None
    if lowest == 0 < highest:
        return [(variable, READING if factor < 0 else DIFFERENCE) for variable, factor in gap.terms]
    if lowest < 0 == highest:
        return [(variable, READING if factor > 0 else DIFFERENCE) for variable, factor in gap.terms]
    return []


def is_difference(weight: Weight | None) -> bool:
    """Whether it is certainly that of a difference."""
    return weight is not None and weight.certain == DIFFERENCE
