"""Kinds of temperatures and pressures, reading or difference, inferred from all formulas of a worksheet.

Runs after `infer_dimensions`. Kinds spread from literals (`kind_rules` says how) over a worklist; a formula
that cannot hold is set aside, or the known that brought it about, and reported as a `Misuse`.
"""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass, field

from eqsheet.model.dimension_blame import Origin, Place, extent
from eqsheet.model.kind_misuse import Misuse, doubled_offsets, is_no_kind, misuse_of
from eqsheet.model.kind_rules import (
    KEPT_APART,
    Agreement,
    Breach,
    KindReader,
    KindShapes,
    PresumingShape,
)
from eqsheet.model.kind_weights import DIFFERENCE, READING
from eqsheet.model.tape import Formula
from eqsheet.units.dimension import Dimension

#: Words for kinds, as results carry them.
KIND_WORDS = {READING: "reading", DIFFERENCE: "difference"}
UNKNOWN_KIND = "unknown"
PLAIN_KIND = "plain"


@dataclass(frozen=True, slots=True)
class KindResult:
    """Kinds by quantity, what fixed them, and misuses.

    Kinds are ``reading``, ``difference``, ``unknown`` for temperatures and pressures, ``plain`` for all else.
    """

    kinds: tuple[str, ...]
    origins: tuple[Origin | None, ...]
    misuses: tuple[Misuse, ...]

    def __getitem__(self, quantity: int) -> str:
        """The word results carry: a quantity of unknown kind is shown as a plain value."""
        kind = self.kinds[quantity]
        return PLAIN_KIND if kind == UNKNOWN_KIND else kind


@dataclass(slots=True)
class _Pass:
    kinds: dict[int, int] = field(default_factory=dict)
    reasons: dict[int, tuple[int, Agreement]] = field(default_factory=dict)
    breaches: dict[int, Breach] = field(default_factory=dict)


def infer_kinds(
    formulas: Sequence[Formula],
    dimensions: Sequence[Dimension | None],
    minor: Collection[int] = (),
    without: Collection[int] = (),
    origins_of_gauge: Collection[int] = (),
) -> KindResult:
    """Which temperatures and pressures are readings and which are differences.

    Parameters
    ----------
    formulas, minor
        As for `infer_dimensions`.
    dimensions
        By quantity, as inferred.
    without
        Formulas to leave out, whose dimensions clash.
    origins_of_gauge
        Quantities that hold the pressure gauge readings stand on, which they include already.
    """
    shapes = KindShapes(dimensions)
    readers: dict[int, KindReader] = {}
    users: dict[int, list[int]] = {}
    apart = [dimension in KEPT_APART for dimension in dimensions]
    for index, formula in enumerate(formulas):
        kinds_matter = any(apart[q] for q in formula.quantities) or any(
            literal.kind != "plain" for literal in formula.literals
        )
        if index in without or not kinds_matter:
            continue
        reader = shapes.reader(formula)
        if reader.shape.concerned:
            readers[index] = reader
            for quantity in formula.quantities:
                users.setdefault(quantity, []).append(index)
    set_aside: set[int] = set()
    found = _spread(readers, users, set_aside)
    while found.breaches:
        set_aside.add(_culprit(readers, users, found, set_aside, frozenset(minor)))
        found = _spread(readers, users, set_aside)
    _presume(readers, users, dimensions, set_aside, found)
    origins: list[Origin | None] = [None] * len(dimensions)
    for quantity, (index, agreement) in found.reasons.items():
        origins[quantity] = Origin(index, _witness(formulas[index], agreement, quantity))
    misuses = [
        misuse_of(readers[index], index, found.kinds, origins, dimensions) for index in sorted(set_aside)
    ]
    misuses.extend(doubled_offsets(readers, found.kinds, origins, set_aside, frozenset(origins_of_gauge)))
    kinds = tuple(
        PLAIN_KIND if not apart[q] else KIND_WORDS[found.kinds[q]] if q in found.kinds else UNKNOWN_KIND
        for q in range(len(dimensions))
    )
    return KindResult(kinds, tuple(origins), tuple(m for m in misuses if m is not None))


def _presume(
    readers: dict[int, KindReader],
    users: dict[int, list[int]],
    dimensions: Sequence[Dimension | None],
    set_aside: Collection[int],
    found: _Pass,
) -> None:
    """Add kinds that are likely, though not certain, to those found; changes `found`."""
    if all(q in found.kinds for q in users if dimensions[q] in KEPT_APART):
        return
    shapes = KindShapes(dimensions, PresumingShape)
    presuming = {index: shapes.reader(reader.formula) for index, reader in readers.items()}
    likely = _Pass(dict(found.kinds), dict(found.reasons))
    _visit_all(presuming, users, likely, sorted(presuming), set(set_aside))
    found.kinds, found.reasons = likely.kinds, likely.reasons


def _spread(readers: dict[int, KindReader], users: dict[int, list[int]], without: Collection[int]) -> _Pass:
    """Kinds spread from nothing, knowns first."""
    found = _Pass()
    left_out = set(without)
    singles = [index for index, reader in readers.items() if len(reader.formula.quantities) <= 1]
    touched = _visit_round(readers, users, found, singles, left_out)
    others = set(readers).difference(singles)
    _visit_all(readers, users, found, sorted(others | touched), left_out)
    return found


def _visit_all(
    readers: dict[int, KindReader],
    users: dict[int, list[int]],
    found: _Pass,
    queue: list[int],
    left_out: set[int],
) -> None:
    """Visit round by round, so that each kind is put down to the shortest chain of lines."""
    while queue:
        queue = sorted(_visit_round(readers, users, found, queue, left_out))


def _visit_round(
    readers: dict[int, KindReader],
    users: dict[int, list[int]],
    found: _Pass,
    queue: list[int],
    left_out: set[int],
) -> set[int]:
    """Visit all formulas in the light of the same knowledge; gives those to visit in the next round."""
    touched: set[int] = set()
    news: list[tuple[int, int, int, Agreement]] = []
    for index in queue:
        if index in left_out:
            continue
        reader = readers[index]
        quantities = reader.formula.quantities
        now = {slot: found.kinds[q] for slot, q in enumerate(quantities) if q in found.kinds}
        visit = reader.visit(now)
        if visit.breach is not None:
            found.breaches[index] = visit.breach
            left_out.add(index)
            continue
        news.extend((quantities[slot], kind, index, why) for slot, kind, why in visit.solved)
    for quantity, kind, index, why in news:
        if quantity not in found.kinds:
            found.kinds[quantity] = kind
            found.reasons[quantity] = (index, why)
            touched.update(users[quantity])
        elif found.kinds[quantity] != kind:
            touched.add(index)
    return touched - left_out


def _culprit(
    readers: dict[int, KindReader],
    users: dict[int, list[int]],
    found: _Pass,
    set_aside: set[int],
    minor: frozenset[int],
) -> int:
    """The formula in breach, or a line that fixed one of its kinds where that explains more.

    At par, a sum of readings is the fault of the sum. In any other breach a known given as a reading may be
    meant as a difference; of several it is the smallest, as differences are smaller than readings.
    """
    index, breach = min(found.breaches.items())
    reader = readers[index]
    causes = {q: found.reasons[q][0] for q in reader.formula.quantities if q in found.reasons}
    own = [literal.value for literal in reader.formula.literals if literal.kind == "reading"]
    likely = [(index not in minor, value, index) for value in own]
    likely += [
        (cause not in minor, value, cause)
        for quantity, cause in causes.items()
        for value in readings_written(readers[cause].formula)
        if _would_fit_as_difference(reader, breach, found, quantity)
    ]
    odd = min(likely)[2] if likely else index

    def rank(candidate: int) -> tuple[int, ...]:
        without = _spread(readers, users, {*set_aside, candidate})
        return (
            len(without.breaches),
            candidate != odd,
            candidate not in minor,
            candidate != index,
            candidate,
        )

    return min({index, *causes.values()}, key=rank)


def readings_written(formula: Formula) -> list[float]:
    """SI values of the readings in a formula of a single quantity; empty for any other."""
    if len(formula.quantities) > 1:
        return []
    return [literal.value for literal in formula.literals if literal.kind == "reading"]


def _would_fit_as_difference(reader: KindReader, breach: Breach, found: _Pass, quantity: int) -> bool:
    """Whether the agreement in breach would hold if the quantity were a difference."""
    agreement = breach.agreement
    sides = (agreement.left, agreement.right)
    bare = all(side >= 0 and reader.instructions[side][0] == "quantity" for side in sides)
    if bare or any(is_no_kind(weight) for weight in (breach.left, breach.right)):
        return False
    quantities = reader.formula.quantities
    now = {slot: found.kinds[q] for slot, q in enumerate(quantities) if q in found.kinds}
    now[quantities.index(quantity)] = DIFFERENCE
    again = reader.visit(now).breach
    return again is None or again.agreement != agreement


def _witness(formula: Formula, agreement: Agreement, quantity: int) -> Place:
    """Place of what the quantity agreed with, where it stands alone on one side; else the whole."""
    sides = (agreement.left, agreement.right)
    for side, other in (sides, sides[::-1]):
        if side < 0 or other < 0:
            continue
        operation, *operands = formula.tape.instructions[side]
        slot = operands[0]
        if operation == "quantity" and isinstance(slot, int) and formula.quantities[slot] == quantity:
            return formula.places[other]
    return formula.places[agreement.owner] if agreement.owner >= 0 else extent(formula)
