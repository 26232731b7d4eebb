"""Files that a worksheet names: other worksheets it includes, and tables in CSV.

Paths are relative and stay inside the worksheet's folder, so that a worksheet is data to be trusted no further
than its own folder.
"""

from __future__ import annotations

import os
from collections.abc import Sequence
from dataclasses import dataclass, field, replace

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.model.spelling import did_you_mean
from eqsheet.syntax.bounds import LARGEST_FILE
from eqsheet.syntax.csv_table import Table, read_grid, read_table
from eqsheet.syntax.nodes import Curve, Include, Rows, Statement
from eqsheet.syntax.nodes import Text as TextNode
from eqsheet.syntax.parse import parse_document
from eqsheet.syntax.read import read_regular_file

# A worksheet that includes more files than this has gone wrong.
MOST_FILES = 1000


@dataclass
class _Attaching:
    """What is known while files are read: the real folder, and how the worksheet's own path names it."""

    folder: str
    shown: str
    diagnostics: list[Diagnostic] = field(default_factory=list)
    done: set[str] = field(default_factory=set)
    chain: tuple[str, ...] = ()


def attach_files(
    statements: Sequence[Statement], name: str
) -> tuple[tuple[Statement, ...], tuple[Diagnostic, ...]]:
    """The statements with included ones in their places, and tables filled from their files.

    Parameters
    ----------
    statements : sequence of Statement
    name : str
        Name of the worksheet's file, whose folder all paths are relative to.
    """
    if not any(_names_file(s) for s in statements):
        return tuple(statements), ()
    work = _Attaching(os.path.realpath(os.path.dirname(os.path.abspath(name))), os.path.dirname(name))
    work.chain = (os.path.realpath(name),)
    work.done.add(work.chain[0])
    return tuple(_attached(statements, work)), tuple(work.diagnostics)


def _names_file(statement: Statement) -> bool:
    node = statement.node
    return isinstance(node, Include) or (isinstance(node, Rows | Curve) and node.path is not None)


def _attached(statements: Sequence[Statement], work: _Attaching) -> list[Statement]:
    result: list[Statement] = []
    for statement in statements:
        node = statement.node
        if statement.off:
            result.append(statement)
        elif isinstance(node, Include):
            result.extend(_included(statement, node, work))
        elif isinstance(node, Rows | Curve) and node.path is not None:
            filled = _filled(statement, node, node.path, work)
            if filled is not None:
                result.append(filled)
            elif isinstance(node, Curve):
                # It stays without rows, so that its uses are not taken for slips of their own.
                result.append(statement)
        else:
            result.append(statement)
    return result


def _included(statement: Statement, node: Include, work: _Attaching) -> list[Statement]:
    path = _inside(statement, node.path, work)
    if path is None:
        return []
    if path in work.chain:
        names = " includes ".join(os.path.basename(p) for p in (*work.chain[work.chain.index(path) :], path))
        work.diagnostics.append(
            error(
                "include-cycle",
                f"files include each other in a circle: {names}",
                Label(statement.whole),
                help="put what both need into a file of its own",
            )
        )
        return []
    if path in work.done:
        return []
    work.done.add(path)
    if len(work.done) > MOST_FILES:
        work.diagnostics.append(
            error("worksheet-too-large", f"more than {MOST_FILES} files are included", Label(statement.whole))
        )
        return []
    source = read_regular_file(path)
    if isinstance(source, Diagnostic):
        work.diagnostics.append(_unreadable(statement, node.path, source, path, work))
        return []
    source = replace(source, name=os.path.join(work.shown, node.path.value), attached=True)
    document, found = parse_document(source)
    work.diagnostics.extend(found)
    outer = work.chain
    work.chain = (*outer, path)
    result = _attached(document.statements, work)
    work.chain = outer
    return result


def _filled(
    statement: Statement, node: Rows | Curve, written: TextNode, work: _Attaching
) -> Statement | None:
    path = _inside(statement, written, work)
    if path is None:
        return None
    source = read_regular_file(path)
    if isinstance(source, Diagnostic):
        work.diagnostics.append(
            _unreadable(statement, written, replace(source, help=_where_too_large(path)), path, work)
        )
        return None
    source = replace(source, name=os.path.join(work.shown, written.value), attached=True)
    is_grid = isinstance(node, Curve) and len(node.parameters) == 2
    table, found = read_grid(source, statement.section) if is_grid else read_table(source, statement.section)
    work.diagnostics.extend(found)
    if table is None or (isinstance(node, Curve) and not _has_units_of(node, table, work)):
        return None
    if isinstance(node, Rows):
        first = table.columns[0]
        if first.unit is not None or first.of is not None:
            work.diagnostics.append(
                error(
                    "csv-heading",
                    "the first column holds the names of the members",
                    Label(table.heading.span(first.start, first.end)),
                    help=f"write `{first.name}` alone",
                )
            )
            return None
        if first.name != node.name:
            work.diagnostics.append(
                error(
                    "csv-heading",
                    f"the names in this file are headed `{first.name}`, and the set is called `{node.name}`",
                    Label(table.heading.span(first.start, first.end)),
                    Label(statement.span(written.start, written.end), "the file is named here"),
                    help=f"if it is the right file, write `{node.name}` into its first field",
                )
            )
            return None
        named = replace(node, columns=table.columns[1:], heading=table.heading)
        return replace(statement, node=named, body=table.rows)
    return replace(statement, body=table.rows)


def _has_units_of(node: Curve, table: Table, work: _Attaching) -> bool:
    """Whether the heading of a curve's file names no other units than the curve does."""
    wanted = (node.parameters[0].unit, node.result_unit)
    for column, unit in zip(table.columns, wanted):
        text = "1" if unit is None else unit.text
        if column.unit is not None and column.unit.text != text:
            work.diagnostics.append(
                error(
                    "csv-heading",
                    f"this column is in {column.unit.text}, and the curve `{node.name}` takes it in {text}",
                    Label(table.heading.span(column.start, column.end)),
                    help="write the unit of the file into the heading of the curve",
                )
            )
            return False
    return True


def _inside(statement: Statement, written: TextNode, work: _Attaching) -> str | None:
    """The real path of a file named in a worksheet; None (after a diagnostic) where it leads outside."""
    here = Label(statement.span(written.start, written.end))
    name = written.value
    if not name or "\0" in name or os.path.isabs(name) or name.startswith("~") or "\\" in name:
        work.diagnostics.append(
            error(
                "path-not-inside",
                "the path of a file is relative, with / between folders",
                here,
                help="keep the file in the worksheet's folder or one below it",
            )
        )
        return None
    path = os.path.realpath(os.path.join(work.folder, name))
    if os.path.commonpath((path, work.folder)) != work.folder:
        work.diagnostics.append(
            error(
                "path-not-inside",
                f"`{name}` leads out of the worksheet's folder",
                here,
                help="keep the file in the worksheet's folder or one below it",
            )
        )
        return None
    return path


def _unreadable(
    statement: Statement, written: TextNode, why: Diagnostic, path: str, work: _Attaching
) -> Diagnostic:
    reason = why.message.rpartition(": ")[2]
    return error(
        "unreadable-attachment",
        f"`{written.value}` cannot be read: {reason}",
        Label(statement.span(written.start, written.end)),
        help=why.help if os.path.lexists(path) else _where_it_may_be(statement, written.value, path, work),
    )


def _where_too_large(path: str) -> str:
    """What to do with a table that is more than is read; empty for one that cannot be read for other reasons."""
    if not os.path.isfile(path) or os.path.getsize(path) <= LARGEST_FILE:
        return ""
    return "leave out the columns and rows that the worksheet does not use: 200,000 rows have room"


def _where_it_may_be(statement: Statement, name: str, path: str, work: _Attaching) -> str:
    """What to write for a file that is not there: it may be beside the file that names it, or called much alike."""
    folder = os.path.dirname(os.path.relpath(statement.source.name, work.shown or "."))
    beside = os.path.normpath(os.path.join(folder, name)).replace(os.sep, "/")
    if folder and os.path.isfile(os.path.join(work.folder, beside)):
        return f"all paths start at the worksheet's folder: write `{beside}`"
    try:
        there = os.listdir(os.path.dirname(path))
    except OSError:
        there = []
    like = did_you_mean(os.path.basename(name), there[:MOST_FILES])
    return like or "the path starts at the worksheet's folder"
