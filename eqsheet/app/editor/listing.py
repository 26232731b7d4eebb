"""The lines of the worksheet, each followed by the values it gives."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from eqsheet.diagnostics.diagnostic import Severity
from eqsheet.diagnostics.oneline import headline
from eqsheet.diagnostics.printable import printable
from eqsheet.live.document import EditedWorksheet
from eqsheet.review.columns import width_of
from eqsheet.review.table import margin_words
from eqsheet.units.display import format_value
from eqsheet.worksheet.shown_units import with_unit
from eqsheet.worksheet.solution import QuantityValue, Solution

_BELOW = " " * 10


def listing(document: EditedWorksheet, numbers: Iterable[int], width: int) -> list[str]:
    """The lines of those numbers (from 1) with what stands below each.

    Below a line stand the values of the block it completes, how its limit stands, and its errors and warnings.
    """
    below = _below(document.solution, document.good)
    lines: list[str] = []
    for number in numbers:
        lines.append(numbered(number, document.lines[number - 1]))
        lines += [part for text in below.get(number, ()) for part in _wrapped(text, width)]
    return lines


def numbered(number: int, text: str) -> str:
    """A line as it is listed."""
    return f"{number:>4}  {printable(text)}".rstrip()


def value_words(value: QuantityValue) -> str:
    """``v = 2.31 m/s``."""
    return f"{value.name} = {written(value)}"


def written(value: QuantityValue) -> str:
    """The value with its unit, in digits suited to the evidence."""
    return with_unit(format_value(value.value, value.digits), value.shown_in)


def _below(solution: Solution, good: Solution | None) -> dict[int, list[str]]:
    """What stands below each line."""
    found: dict[int, list[str]] = {}
    for block in solution.blocks:
        if not block.lines:
            continue
        values = [solution[name] for name in block.unknowns if name in solution]
        words = ", ".join(map(value_words, values))
        if len(block.lines) > 1 and words:
            words += f",  with {_lines_words(block.lines[:-1])}"
        if not values and good is not None:
            words = ", ".join(f"before: {value_words(good[n])}" for n in block.unknowns if n in good)
        if words:
            found.setdefault(
                block.statements[-1].line.line + _height(block.statements[-1].line.text), []
            ).append(words)
    for value in solution.values():
        if value.known and value.line is not None and value.statement is not None:
            words = written(value)
            if value.unit not in ("", "1") and value.unit not in value.statement.line.text:
                found.setdefault(value.line + _height(value.statement.line.text), []).append(
                    f"{value.name} = {words}"
                )
    for limit in solution.limits:
        if limit.line is not None:
            stands = "holds" if limit.holds else "FAILS"
            last = limit.line + _height(limit.statement.line.text)
            found.setdefault(last, []).append(f"{stands}, {margin_words(limit)}")
    for diagnostic in solution.diagnostics:
        span = diagnostic.span
        if diagnostic.severity is not Severity.NOTE and span is not None and span.source.numbered:
            found.setdefault(span.line, []).append(headline(diagnostic))
    return found


def _height(text: str) -> int:
    """How many lines a statement takes besides its first."""
    return text.count("\n")


def _lines_words(lines: Sequence[int]) -> str:
    """The lines in words, neighbours together: ``lines 3, 7 to 9``.

    >>> _lines_words((3, 7, 8, 9))
    'lines 3, 7 to 9'
    """
    runs: list[list[int]] = []
    for line in lines:
        if runs and line == runs[-1][-1] + 1:
            runs[-1].append(line)
        else:
            runs.append([line])
    most = 4
    words = [str(run[0]) if len(run) == 1 else f"{run[0]} to {run[-1]}" for run in runs[:most]]
    more = " and more" if len(runs) > most else ""
    return f"line{'s' * (len(lines) > 1)} {', '.join(words)}{more}"


def _wrapped(text: str, width: int) -> list[str]:
    """The text below a line, broken at blanks after commas where it is too long."""
    room = max(width - len(_BELOW), 30)
    lines = [""]
    for part in text.split(", "):
        joined = f"{lines[-1]}, {part}" if lines[-1] else part
        if width_of(joined) >= room and lines[-1]:
            lines[-1] += ","
            lines.append(part)
        else:
            lines[-1] = joined
    return [_BELOW + line for line in lines]
