"""What an edit has done, in words."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from eqsheet.app.editor.listing import numbered, written
from eqsheet.live.moved import Change, Moved
from eqsheet.review.columns import in_columns, width_of
from eqsheet.review.table import margin_words
from eqsheet.units.display import format_value
from eqsheet.worksheet.shown_units import in_unit
from eqsheet.worksheet.solution import LimitReport, QuantityValue

MOST_CHANGES = 12
"""Values shown after an edit; the rest is a word away."""

_AS_DIFFERENCE = {"degC": "K", "degF": "delta_degF"}


def edit_lines(start: int, old: Sequence[str], new: Sequence[str]) -> list[str]:
    """The lines an edit has put in, and those it has taken out; long ones folded in the middle."""
    lines = _folded([numbered(start + 1 + i, text) for i, text in enumerate(new)])
    return lines + _folded(
        [f" was  {text}" if new else f"gone  {text}" for text in old if text.strip() or not new]
    )


def _folded(lines: list[str]) -> list[str]:
    most = 8
    if len(lines) <= most:
        return lines
    return [*lines[: most // 2], f"      and {len(lines) - most} more", *lines[-most // 2 :]]


def moved_lines(moved: Moved, most: int = MOST_CHANGES) -> list[str]:
    """Values that changed, the largest relative change first, then what is new or gone, then limits."""
    changes = moved.changes[:most]
    lines = _change_rows(changes)
    if len(moved.changes) > most:
        lines.append(f"  and {len(moved.changes) - most} more, less; `changes` shows all")
    lines += _listed("new", moved.added, most)
    if moved.gone:
        names = [value.name for value in moved.gone[:most]]
        more = f" and {len(moved.gone) - most} more" if len(moved.gone) > most else ""
        lines.append(f"  no longer: {', '.join(names)}{more}")
    lines += _limit_rows("now fails", moved.fails)
    lines += _limit_rows("now holds", moved.holds)
    return lines


def _change_rows(changes: Sequence[Change]) -> list[str]:
    old, new = _to_the_right(map(_old_number, changes)), _to_the_right(map(_new_number, changes))
    units = ["" if change.new.unit == "1" else change.new.unit for change in changes]
    rows = [
        (change.new.name, before, "->", after, unit, _by(change))
        for change, before, after, unit in zip(changes, old, new, units)
    ]
    return in_columns(rows, indent="  ")


def _to_the_right(cells: Iterable[str]) -> list[str]:
    cells = list(cells)
    widest = max(map(width_of, cells), default=0)
    return [" " * (widest - width_of(cell)) + cell for cell in cells]


def _new_number(change: Change) -> str:
    return format_value(change.new.value, change.new.digits)


def _old_number(change: Change) -> str:
    old, new = change.old, change.new
    if old.dimension != new.dimension:
        return written(old)
    return format_value(in_unit(new.shown_in, new.kind, old.si), old.digits)


def _by(change: Change) -> str:
    """The change: relative, but for readings as a difference, which have no ratio."""
    old, new = change.old, change.new
    if old.dimension != new.dimension:
        return ""
    if new.kind == "reading":
        step = format_value(new.shown_in.difference_from_si(new.si - old.si), 3)
        unit = _AS_DIFFERENCE.get(new.unit, new.unit.removesuffix("g").removesuffix("a"))
        return f"{'' if step.startswith('-') else '+'}{step} {unit}"
    if old.si == 0.0:
        return ""
    return f"{change.relative * 100:+.3g}%"


def _listed(word: str, values: Sequence[QuantityValue], most: int) -> list[str]:
    if not values:
        return []
    named = ", ".join(f"{value.name} = {written(value)}" for value in values[:most])
    more = f" and {len(values) - most} more" if len(values) > most else ""
    return [f"  {word}: {named}{more}"]


def _limit_rows(word: str, limits: Sequence[LimitReport]) -> list[str]:
    return in_columns(
        [
            (f"{word}:", limit.text, margin_words(limit), "" if limit.line is None else f"line {limit.line}")
            for limit in limits
        ],
        indent="  ",
    )
