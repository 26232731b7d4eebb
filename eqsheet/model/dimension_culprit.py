"""Which formula a contradiction of dimensions is blamed on.

A contradiction is a set of statements that cannot all hold. Each is tried as the culprit: the one whose removal
leaves the fewest contradictions in the whole worksheet is it, so a known with a slip in its unit is found by
the several equations that agree against it. Next, the one is preferred without which the quantities have usual
dimensions: a stress, not a force times an area. Ties go to units written in lines that state no physics (a guess),
then to equations before knowns, then to formulas that a usual slip explains, then to those where a plain
number is wanted.
"""

from __future__ import annotations

from collections import Counter
from fractions import Fraction

from eqsheet.model.dimension_propagation import UNKNOWN, Inference, Worklines, demand_row, propagate_without
from eqsheet.model.dimension_rules import Demand
from eqsheet.units.dimension import DIMENSIONLESS, Dimension
from eqsheet.units.dimension_names import dimension_word

#: Visits of formulas spent on telling culprits apart, for all contradictions of a worksheet together; about
#: one second. Beyond it the formula in which a contradiction showed is blamed.
LARGEST_EFFORT = 600_000

GRAVITY = Dimension.of({"m": 1, "s": -2})
#: Has a name, but turns up more often where a length was forgotten.
PER_LENGTH = Dimension.of({"m": -1})

#: Powers a quantity may be off by in a slip: forgotten, once too many, or squared where it should not be.
SLIPS = (1, -1, 2, -2)

NONE = -1


def choose_culprit(
    lines: Worklines, found: Inference, set_aside: frozenset[int], minor: frozenset[int]
) -> int:
    """The formula of the first contradiction in `found` that is best set aside."""
    best = found.broken[0][0]
    best_rank: tuple[int, ...] | None = None
    uses = Counter(q for index in found.conflict for q in lines.formulas[index].quantities)
    knowns = {quantity: _known_of(lines, found, quantity, minor) for quantity in uses}
    for index in found.conflict if len(found.conflict) > 1 else ():
        if lines.visits > LARGEST_EFFORT:
            break
        without = propagate_without(lines, found, lines.siblings(index), set_aside)
        written = len(lines.formulas[index].quantities) <= 1
        oddness = {q: _oddness(lines, without.state[q], uses[q] > 1) for q in knowns}
        rank = (
            len(without.broken),
            # A unit written on purpose says little against itself, however odd it is.
            sum(oddness[q] for q, known in knowns.items() if known in (index, NONE)),
            not (written and index in minor),
            written or not _slip_explains(lines, without, index),
            sum(oddness.values()),
            written,
            not _wants_a_number(lines, without, index),
            index not in minor,
            -len(lines.formulas[index].quantities),
            -index,
        )
        if best_rank is None or rank < best_rank:
            best, best_rank = index, rank
    return best


def _known_of(lines: Worklines, found: Inference, quantity: int, minor: frozenset[int]) -> int:
    """The known whose unit is the quantity's dimension in `found`, or -1."""
    reason = found.reasons.get(quantity)
    if reason is None or reason.formula in minor or len(lines.formulas[reason.formula].quantities) > 1:
        return NONE
    return reason.formula


def _oddness(lines: Worklines, number: int, shared: bool) -> int:
    """How unlikely a quantity of the dimension is: roots of units more than products without a name.

    A dimension left open speaks a little against a culprit too, where the quantity is `shared` by several
    formulas: without the culprit they agree only because nothing is left to be compared.
    """
    if number == UNKNOWN:
        return 1 if shared else 0
    dimension = lines.dimensions[number]
    if any(power.denominator > 1 for _, power in dimension):
        return 4
    if dimension == DIMENSIONLESS or dimension_word(dimension):
        return 1 if dimension == PER_LENGTH else 0
    return 2


def _broken_demands(lines: Worklines, without: Inference, index: int) -> list[tuple[Demand, Dimension]]:
    """Demands of the formula that fail in the light of all the others, with what is left over in them."""
    rows = [demand_row(lines, index, n, without.state) for n in range(len(lines.rules[index].demands))]
    return [
        (demand, row.constant)
        for demand, row in zip(lines.rules[index].demands, rows)
        if row.constant and not row.terms
    ]


def _slip_explains(lines: Worklines, without: Inference, index: int) -> bool:
    """Whether the formula would fit with one of its quantities to another power, or gravity put in."""
    for demand, excess in _broken_demands(lines, without, index):
        if excess in (GRAVITY, DIMENSIONLESS / GRAVITY):
            return True
        for slot, power in demand.form.quantities:
            dimension = lines.dimensions[without.state[lines.formulas[index].quantities[slot]]]
            if any(power + step and excess * dimension ** Fraction(step) == DIMENSIONLESS for step in SLIPS):
                return True
    return False


def _wants_a_number(lines: Worklines, without: Inference, index: int) -> bool:
    """Whether it is a function's argument or a number without unit that does not fit."""
    operations = [operation for operation, *_ in lines.formulas[index].tape.instructions]
    return any(
        demand.right < 0 or "const" in (operations[demand.left], operations[demand.right])
        for demand, _ in _broken_demands(lines, without, index)
    )
