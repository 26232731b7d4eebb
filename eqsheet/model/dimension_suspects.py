"""Knowns that a clash of dimensions may go back to: one whose unit, were it another, would make the line agree.

A clash shows where two lines meet, which may be far from the line with the slip: with ``rho = 998 kg/m^2`` it is the limit
on the pressure drop that does not fit. From the quantities of the clash the products are followed back to the knowns
they are made of, each with the dimension it would need; one that no other line confirms, and that would then be of a
usual dimension, is a suspect.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction

from eqsheet.model.dimension_culprit import GRAVITY
from eqsheet.model.dimension_propagation import UNKNOWN, Inference, Worklines
from eqsheet.units.dimension import DIMENSIONLESS, Dimension
from eqsheet.units.dimension_names import dimension_word

#: Quantities looked at behind one clash.
_MOST_QUANTITIES = 200


@dataclass(frozen=True, slots=True)
class Suspect:
    """A known, its formula, its dimension, and the one with which the clash would be gone."""

    quantity: int
    formula: int
    dimension: Dimension
    needed: Dimension


def suspects(
    lines: Worklines, found: Inference, clash: int, changes: Mapping[int, Dimension]
) -> tuple[Suspect, ...]:
    """The knowns behind a clash that one change of unit would mend.

    Parameters
    ----------
    clash : int
        The formula that does not fit the others.
    changes : mapping of int to Dimension
        Quantities in it, each with the factor that would make the formula fit if its dimension had it besides.
    """
    result: list[Suspect] = []
    seen: set[int] = set()
    waiting = [(quantity, change, frozenset((clash,))) for quantity, change in changes.items()]
    while waiting and len(seen) < _MOST_QUANTITIES:
        quantity, change, path = waiting.pop(0)
        reason = found.reasons.get(quantity)
        if quantity in seen or reason is None or found.state[quantity] == UNKNOWN:
            continue
        seen.add(quantity)
        if _is_confirmed(lines, found, quantity, path | {reason.formula}):
            continue
        if len(lines.formulas[reason.formula].quantities) == 1:
            dimension = lines.dimensions[found.state[quantity]]
            if _is_a_slip(change) and dimension_word(dimension * change):
                result.append(Suspect(quantity, reason.formula, dimension, dimension * change))
            continue
        demands = lines.rules[reason.formula].demands
        if len(demands) > 1:
            # One term of a sum made to fit would no longer fit the others.
            continue
        slots = lines.formulas[reason.formula].quantities
        powers = {slots[slot]: Fraction(power) for slot, power in demands[0].form.quantities}
        own = powers.pop(quantity, None)
        if own is not None:
            further = path | {reason.formula}
            waiting += [(other, change ** (-own / power), further) for other, power in powers.items()]
    return tuple(result)


def _is_a_slip(change: Dimension) -> bool:
    """Whether units differ as slips do: per second or not, square or cubic, pound or pound-force."""
    return len(change) == 1 or change in (GRAVITY, DIMENSIONLESS / GRAVITY)


def _is_confirmed(lines: Worklines, found: Inference, quantity: int, path: frozenset[int]) -> bool:
    """Whether a line off the path relates the quantity to others whose dimensions come from elsewhere."""
    for user in lines.users[quantity]:
        if user in path:
            continue
        reasons = (found.reasons.get(other) for other in lines.formulas[user].quantities)
        if all(reason is not None and reason.formula != user for reason in reasons):
            return True
    return False
