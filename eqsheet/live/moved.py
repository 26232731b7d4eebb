"""What changed between two solutions of a worksheet."""

from __future__ import annotations

from dataclasses import dataclass

from eqsheet.worksheet.solution import LimitReport, QuantityValue, Solution

# Below this a difference is the rounding of another path to the same answer, not a change.
SAME_TO = 1e-12


@dataclass(frozen=True, slots=True)
class Change:
    """A quantity with its old and new value.

    Attributes
    ----------
    old, new : QuantityValue
    relative : float
        Change relative to the old value (to the new one where the old is zero), both in SI.
    """

    old: QuantityValue
    new: QuantityValue
    relative: float


@dataclass(frozen=True)
class Moved:
    """All that differs between two solutions.

    Attributes
    ----------
    changes : tuple of Change
        The largest relative change first, then by name.
    added, gone : tuple of QuantityValue
        Quantities only the new or only the old solution has.
    fails, holds : tuple of LimitReport
        Limits that fail or hold now and did not before, or were not there before and fail.
    """

    changes: tuple[Change, ...] = ()
    added: tuple[QuantityValue, ...] = ()
    gone: tuple[QuantityValue, ...] = ()
    fails: tuple[LimitReport, ...] = ()
    holds: tuple[LimitReport, ...] = ()

    def __bool__(self) -> bool:
        return bool(self.changes or self.added or self.gone or self.fails or self.holds)


def moved(old: Solution | None, new: Solution) -> Moved:
    """What changed from `old` to `new`; against nothing, only the limits that fail are told."""
    if old is None:
        return Moved(fails=tuple(limit for limit in new.limits if not limit.holds))
    changes = []
    for name, value in new.quantities.items():
        before = old.quantities.get(name)
        if before is None or (before.si == value.si and before.shown_in is value.shown_in):
            continue
        change = _change(before, value)
        if change is not None:
            changes.append(change)
    changes.sort(key=lambda c: (-abs(c.relative), c.new.name))
    held = {limit.text: limit.holds for limit in old.limits}
    return Moved(
        tuple(changes),
        tuple([value for name, value in new.quantities.items() if name not in old.quantities]),
        tuple([value for name, value in old.quantities.items() if name not in new.quantities]),
        tuple([limit for limit in new.limits if not limit.holds and held.get(limit.text, True)]),
        tuple([limit for limit in new.limits if limit.holds and held.get(limit.text) is False]),
    )


def _change(old: QuantityValue, new: QuantityValue) -> Change | None:
    if old.dimension != new.dimension:
        return Change(old, new, 1.0)
    difference = new.si - old.si
    size = max(abs(old.si), abs(new.si))
    if abs(difference) <= SAME_TO * size + min(old.error, new.error):
        return None
    return Change(old, new, difference / (abs(old.si) or abs(new.si)))
