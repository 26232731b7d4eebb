"""What is misused in a formula whose kinds cannot be, and sums that are likely slips though they can."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from eqsheet.model.dimension_blame import Origin, Place
from eqsheet.model.kind_rules import KEPT_APART, TEMPERATURE, Breach, KindReader
from eqsheet.model.kind_weights import DIFFERENCE, READING, Weight
from eqsheet.units.dimension import Dimension

#: Offsets that make a reading absolute, in SI: 273.15 K, 459.67 degR and one atmosphere, as rounded in use.
#: Readings are kept absolute already, so that added to one they count twice.
TEMPERATURE_OFFSETS = ((272.9, 273.3), (255.3, 255.45))
PRESSURE_OFFSETS = ((0.999e5, 1.0145e5),)


@dataclass(frozen=True, slots=True)
class Misuse:
    """A reading where a difference is needed, or the other way round.

    Attributes
    ----------
    what : str
        ``sum``: the weight is that of several readings. ``reading``: a reading where a difference is needed.
        ``difference``: a difference where a reading is needed. ``offset``: a reading made absolute twice.
    formula : int
    place : (int, int)
        The guilty text.
    against : (int, int) or None
        The text in the same line it is in conflict with.
    quantities : tuple of (int, int, Origin or None)
        Quantities in the formula whose kinds matter: number, kind (1 reading, 0 difference), what fixed it.
    literal : int
        Number of the formula's literal that is the guilty text, -1 if it is none.
    dimension : Dimension
        Temperature or pressure.
    """

    what: str
    formula: int
    place: Place
    against: Place | None
    quantities: tuple[tuple[int, int, Origin | None], ...]
    literal: int
    dimension: Dimension


def is_no_kind(weight: Weight) -> bool:
    """Whether it is of itself neither reading nor difference: the sum of two readings, or minus a reading."""
    return weight.certain is not None and weight.certain not in (READING, DIFFERENCE)


def misuse_of(
    reader: KindReader,
    index: int,
    kinds: Mapping[int, int],
    origins: Sequence[Origin | None],
    dimensions: Sequence[Dimension | None],
) -> Misuse | None:
    """What is wrong in formula `index`, in the light of all the others."""
    formula = reader.formula
    now = {slot: kinds[q] for slot, q in enumerate(formula.quantities) if q in kinds}
    visit = reader.visit(now)
    if visit.breach is None:
        return None
    now.update({slot: kind for slot, kind, _ in visit.solved})
    weights = reader.weights(now)
    what, guilty, other = _guilty(reader, visit.breach, weights)
    against = formula.places[other] if other >= 0 else None
    roots = {other} if what == "sum" else {visit.breach.agreement.left, visit.breach.agreement.right}
    apart = [(slot, q) for slot, q in enumerate(formula.quantities) if dimensions[q] in KEPT_APART]
    involved = _slots_in(reader, roots)
    parts = tuple((q, now[slot], origins[q]) for slot, q in apart if slot in now and slot in involved)
    operation, *operands = reader.instructions[guilty]
    literal = operands[0] if operation == "literal" and isinstance(operands[0], int) else -1
    place = formula.places[guilty]
    return Misuse(what, index, place, against, parts, literal, reader.dimension(guilty))


def _slots_in(reader: KindReader, roots: set[int]) -> set[int]:
    """Slots of the quantities that stand in the sums at `roots`."""
    slots: set[int] = set()
    stack = [root for root in roots if root >= 0]
    while stack:
        operation, *operands = reader.instructions[stack.pop()]
        if operation == "quantity" and isinstance(operands[0], int):
            slots.add(operands[0])
        elif operation not in ("literal", "const"):
            stack.extend(o for o in operands if isinstance(o, int))
    return slots


def _guilty(reader: KindReader, breach: Breach, weights: Sequence[Weight | None]) -> tuple[str, int, int]:
    """What is wrong, the instruction to point at, and the one it is in conflict with or -1."""
    agreement = breach.agreement
    for side, weight in ((agreement.right, breach.right), (agreement.left, breach.left)):
        if side >= 0 and is_no_kind(weight):
            if weight.constant < DIFFERENCE:
                return "reading", _subtracted(reader, side, weights), -1
            return "sum", _reading_too_many(reader, side, weights), side
    if agreement.right < 0:
        what = "reading" if agreement.needed == DIFFERENCE else "difference"
        return what, agreement.left, -1
    # An expression speaks for itself; a bare literal or quantity is what does not fit it.
    guilty, other = sorted((agreement.left, agreement.right), key=reader.bareness, reverse=True)
    return ("reading" if _is_reading(weights[guilty]) else "difference"), guilty, other


def _is_reading(weight: Weight | None) -> bool:
    return weight is not None and weight.certain == READING


def _reading_too_many(reader: KindReader, side: int, weights: Sequence[Weight | None]) -> int:
    """The term of the sum to point at: a reading written out in it, else all of it."""
    terms = _terms(reader, side)
    readings = [term for term in terms if _is_reading(weights[term])]
    written = [term for term in readings if reader.instructions[term][0] == "literal"]
    if written and len(readings) > 1:
        return written[-1]
    return side


def _subtracted(reader: KindReader, side: int, weights: Sequence[Weight | None]) -> int:
    """The last reading subtracted, which makes a difference less a reading; all of it if it is hidden."""
    operation, *operands = reader.instructions[side]
    last = operands[-1]
    if operation in ("sub", "neg") and isinstance(last, int) and _is_reading(weights[last]):
        return last
    return side


def _terms(reader: KindReader, index: int) -> list[int]:
    """The terms of a sum, in the order of the text."""
    terms: list[int] = []
    waiting = [index]
    while waiting:
        term = waiting.pop()
        operation, *operands = reader.instructions[term]
        if operation in ("add", "sub", "neg"):
            waiting.extend(reversed([o for o in operands if isinstance(o, int)]))
        else:
            terms.append(term)
    return terms


def doubled_offsets(
    readers: dict[int, KindReader],
    kinds: Mapping[int, int],
    origins: Sequence[Origin | None],
    set_aside: set[int],
    origins_of_gauge: frozenset[int],
) -> list[Misuse]:
    """Sums such as ``T + 273.15 K`` with T a reading, which is kept in kelvin already."""
    misuses: list[Misuse] = []
    for index, reader in readers.items():
        additions = [operands for operation, *operands in reader.instructions if operation == "add"]
        if index in set_aside or not additions:
            continue
        formula = reader.formula
        now = {slot: kinds[q] for slot, q in enumerate(formula.quantities) if q in kinds}
        weights = reader.weights(now)
        for operands in additions:
            for offset, other in (operands, operands[::-1]):
                if not _is_reading(weights[other]) or not _is_offset(reader, offset, origins_of_gauge):
                    continue
                parts = tuple(
                    (formula.quantities[slot], now[slot], origins[formula.quantities[slot]])
                    for slot in sorted(_slots_in(reader, {other}))
                    if slot in now
                )
                place, against = formula.places[offset], formula.places[other]
                misuses.append(Misuse("offset", index, place, against, parts, -1, reader.dimension(offset)))
    return misuses


def _is_offset(reader: KindReader, index: int, origins_of_gauge: frozenset[int]) -> bool:
    """Whether the operand is what makes a reading absolute: 273.15 K, one atmosphere, the ambient pressure."""
    operation, *(slot, *_) = reader.instructions[index]
    if operation == "quantity":
        return reader.formula.quantities[slot] in origins_of_gauge
    if operation != "literal" or reader.formula.literals[slot].kind == "reading":
        return False
    literal = reader.formula.literals[slot]
    offsets = TEMPERATURE_OFFSETS if literal.dimension == TEMPERATURE else PRESSURE_OFFSETS
    return any(low <= literal.value <= high for low, high in offsets)
