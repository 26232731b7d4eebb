"""A solution as text: quantities by section, limits with their margins, and a line of verdict."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from pathlib import Path

from eqsheet.diagnostics.diagnostic import Severity
from eqsheet.review.columns import in_columns
from eqsheet.review.folding import extremes, family_name, values_together, worst_limits
from eqsheet.syntax.nodes import Guess, Reference, Statement
from eqsheet.units.display import format_value
from eqsheet.worksheet.many_limits import failing_limits
from eqsheet.worksheet.many_values import ManyValues
from eqsheet.worksheet.own_line import own_line
from eqsheet.worksheet.solution import BlockReport, BranchReport, LimitReport, QuantityValue, Solution

MOST_LINES_NAMED = 3


def solution_lines(solution: Solution) -> list[str]:
    """The whole table; empty where there is nothing to show."""
    lines: list[str] = []
    said = _said_of_guesses(solution)
    for title, values in _sections(solution):
        if lines:
            lines.append("")
        if title:
            lines.append(title)
        rows = [
            _row(group.first, solution.blocks, said)
            if group.count == 1
            else _family_row(group, solution.blocks)
            for group in values
        ]
        lines += in_columns(rows, numeric=1, indent="  " if title else "")
    if solution.limits:
        lines += ["", "Limits", *limit_lines(solution.limits)]
    if solution.branches:
        lines += ["", "Branches", *branch_lines(solution.branches)]
    off = off_lines(solution)
    if off:
        lines += ["", "Switched off", *off]
    return lines[1:] if lines and not lines[0] else lines


def branch_lines(branches: Iterable[BranchReport]) -> list[str]:
    """A line for each condition: whether it holds; members of a family that take the same branch are counted."""
    members: dict[tuple[int | None, str, bool], list[BranchReport]] = {}
    for branch in branches:
        members.setdefault((branch.line, branch.text, branch.holds), []).append(branch)
    rows = []
    for (line, text, holds), alike in members.items():
        where = "" if line is None else f"line {line}"
        count = sum(branch.count for branch in alike)
        own = alike[0].member if count == 1 else f"{count} members"
        rows.append((text, "holds" if holds else "does not hold", where, own))
    return in_columns(rows, indent="  ")


def off_lines(solution: Solution) -> list[str]:
    """The statements that are kept but not used."""
    return in_columns(
        [
            (
                " ".join(s.line.text.strip().removeprefix("off ").split()).removesuffix(":"),
                f"line {s.line.line}",
                s.description,
            )
            for s in _off(solution.statements)
            if s.source.numbered
        ],
        indent="  ",
    )


def _off(statements: Iterable[Statement]) -> Iterator[Statement]:
    """Statements switched off, those in groups too; a group switched off counts once."""
    for statement in statements:
        if statement.off:
            yield statement
        else:
            yield from _off(statement.body)


def _sections(solution: Solution) -> list[tuple[str, list[ManyValues]]]:
    """Quantities in order of showing, grouped by the section of their line."""
    order: dict[str, list[ManyValues]] = {}
    for group in values_together(solution.quantities):
        statement = group.first.statement
        order.setdefault("" if statement is None else statement.section, []).append(group)
    titles = [s.section for s in solution.statements]
    rank = {title: i for i, title in reversed(list(enumerate(titles)))}
    return sorted(order.items(), key=lambda pair: rank.get(pair[0], -1))


def _said_of_guesses(solution: Solution) -> dict[str, str]:
    """Descriptions that stand behind guesses: words for unknowns that no line has alone on a side."""
    return {
        s.node.target.dotted: s.description
        for s in solution.statements
        if isinstance(s.node, Guess) and isinstance(s.node.target, Reference) and s.description and not s.off
    }


def _row(value: QuantityValue, blocks: Sequence[BlockReport], said: Mapping[str, str]) -> tuple[str, ...]:
    statement = value.statement
    description = statement.description if statement is not None and _is_own(value, blocks) else ""
    description = description or said.get(value.name, "")
    unit = "" if value.unit == "1" else value.unit
    if value.tolerance:
        unit = f"{unit} {value.tolerance}".strip()
    return value.name, format_value(value.value, value.digits), unit, origin_words(value, blocks), description


def _family_row(group: ManyValues, blocks: Sequence[BlockReport]) -> tuple[str, ...]:
    """One line for a large family."""
    found = extremes(group)
    unit = "" if group.first.unit == "1" else group.first.unit
    return family_name(group.first.name), found.text, unit, _family_origin(group, blocks), found.words


def _family_origin(group: ManyValues, blocks: Sequence[BlockReport]) -> str:
    words = {origin_words(value, blocks) for value in group.origins}
    if len(words) == 1:
        return words.pop()
    if group.first.block is None:
        lines = sorted({value.line for value in group.origins if value.line is not None})
        if not lines:
            return "given for this run"
        where = f"lines {lines[0]} to {lines[-1]}" if lines[0] < lines[-1] else f"line {lines[0]}"
        return f"given, {where}{_in_file(group.first)}"
    numbers = {value.block for value in group.origins if value.block is not None}
    lines = sorted({line for number in numbers for line in blocks[number - 1].lines})
    if len(lines) <= MOST_LINES_NAMED:
        return f"line{'s' * (len(lines) > 1)} {', '.join(map(str, lines))}" if lines else "solved"
    return f"{len(lines)} lines, {lines[0]} to {lines[-1]}"


def _is_own(value: QuantityValue, blocks: Sequence[BlockReport]) -> bool:
    """Whether the quantity's line speaks of it: a known, a block of one equation, or alone on a side."""
    if value.block is None or len(blocks[value.block - 1].statements) == 1:
        return True
    return value.statement is not None and own_line(value.name, (value.statement,)) is not None


def origin_words(value: QuantityValue, blocks: Sequence[BlockReport]) -> str:
    """Where a value comes from: the line that sets it or the lines it is solved from, its own one first."""
    if value.block is None:
        return "given for this run" if value.line is None else f"given, line {value.line}{_in_file(value)}"
    lines = blocks[value.block - 1].lines
    if not lines:
        return "solved"
    if len(lines) == 1:
        return f"line {lines[0]}"
    if len(lines) <= MOST_LINES_NAMED:
        return f"lines {', '.join(map(str, lines))}"
    if value.line is not None and _is_own(value, blocks):
        return f"line {value.line} with {len(lines) - 1} more"
    return f"{len(lines)} lines, {lines[0]} to {lines[-1]}"


def _in_file(value: QuantityValue) -> str:
    """The file that the line of a known stands in, where that is not the worksheet itself."""
    if value.statement is None or not value.statement.source.attached:
        return ""
    return f" of {Path(value.statement.source.name).name}"


def limit_lines(limits: Iterable[LimitReport]) -> list[str]:
    """One line for each limit: what it says, whether it holds, and by how much."""
    return in_columns(
        [
            (
                limit.text,
                "holds" if limit.holds else "FAILS",
                margin_words(limit),
                "" if limit.line is None else f"line {limit.line}",
                ", ".join(part for part in (words, limit.statement.description) if part),
            )
            for limit, words in worst_limits(limits)
        ],
        indent="  ",
    )


def margin_words(limit: LimitReport) -> str:
    slack = format_value(abs(limit.slack), 3)
    unit = "" if limit.unit == "1" else f" {limit.unit}"
    word = "to spare" if limit.slack >= 0 else "too far"
    if limit.margin is None:
        return f"{slack}{unit} {word}"
    return f"{slack}{unit} ({_percent(abs(limit.margin))}) {word}"


def _percent(part: float) -> str:
    """Three digits, written out as far as a reader takes them in: 12.4%, 1090%.

    >>> _percent(0.124), _percent(10.94), _percent(3e9)
    ('12.4%', '1094%', '3e+11%')
    """
    percent = part * 100
    return f"{percent:.0f}%" if 1000 <= percent < 1e6 else f"{percent:.3g}%"


def verdict_line(solution: Solution) -> str:
    """One line: the file, and how it stands."""
    failing = failing_limits(solution.limits)
    count = len(solution.limits)
    match solution.status:
        case "solved":
            limits = "" if not count else ", the limit holds" if count == 1 else f", all {count} limits hold"
            words = f"solved{limits}"
        case "outside-limits":
            words = f"solved, but {failing} of {count} limit{'s' * (count != 1)} {'fails' if failing == 1 else 'fail'}"
        case "unsolved":
            words = "no solution found"
        case _:
            words = "not valid"
    warnings = sum(d.severity is Severity.WARNING for d in solution.diagnostics)
    if warnings:
        words += f", {warnings} warning{'s' * (warnings != 1)}"
    return f"{solution.worksheet}: {words}"
