"""Index sets, domains of indices, and subscripts evaluated over them.

Members are numbered: whole numbers stand for themselves, the member names of a set for their positions in it.
A domain holds one array of numbers for each index, all equally long: one entry for each member of a family.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from operator import add, mul, sub
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

from eqsheet.model.findings import Finding
from eqsheet.model.reserved_names import RESERVED
from eqsheet.model.spelling import did_you_mean
from eqsheet.model.written_nodes import canonical
from eqsheet.syntax import nodes as syntax
from eqsheet.syntax.spine import left_spine

Codes: TypeAlias = NDArray[np.int64]

# A family of more members is refused at once: it is a slip (a value meant for something else), and would not
# fit into memory.
MOST_MEMBERS = 20_000_000


@dataclass(frozen=True)
class IndexSet:
    """Named members in order."""

    name: str
    members: tuple[str, ...]
    positions: Mapping[str, int] = field(repr=False)

    @staticmethod
    def of(name: str, members: tuple[str, ...]) -> IndexSet:
        """The set with its look-up by name."""
        return IndexSet(name, members, {m: i for i, m in enumerate(members)})


@dataclass(frozen=True)
class MemberColumn:
    """A column of rows whose cells name members of a set: `codes` by position of the row, -1 for none."""

    name: str
    rows: str
    of: str
    codes: Codes


@dataclass(frozen=True)
class Indexing:
    """Everything that subscripts may refer to.

    Attributes
    ----------
    sets : mapping of str to IndexSet
    whole : mapping of str to int
        Knowns that are plain whole numbers.
    columns : mapping of str to MemberColumn
    """

    sets: Mapping[str, IndexSet] = field(default_factory=dict)
    whole: Mapping[str, int] = field(default_factory=dict)
    columns: Mapping[str, MemberColumn] = field(default_factory=dict)


@dataclass(frozen=True)
class Indices:
    """Codes over some domain: an array, or one number for all; `set` names their set, empty for whole numbers.

    ``name`` is filled instead for a bare member name whose set the slot decides.
    """

    codes: Codes | int
    set: str = ""
    name: str = ""


@dataclass(frozen=True)
class Domain:
    """One entry for each member of a family.

    Attributes
    ----------
    size : int
    arrays : mapping of str to Codes
        By index.
    sets : mapping of str to str
        Set of each index, empty for whole numbers.
    """

    size: int = 1
    arrays: Mapping[str, Codes] = field(default_factory=dict)
    sets: Mapping[str, str] = field(default_factory=dict)

    def where(self, mask: NDArray[np.bool_]) -> Domain:
        """The entries for which `mask` holds."""
        return Domain(int(mask.sum()), {n: a[mask] for n, a in self.arrays.items()}, self.sets)

    def at(self, entry: int) -> Domain:
        """One entry alone."""
        return Domain(1, {n: a[entry : entry + 1] for n, a in self.arrays.items()}, self.sets)


class IndexSlip(Exception):
    """A subscript or index clause that means nothing; `finding` says why."""

    def __init__(self, code: str, message: str, node: object, help: str = "") -> None:
        super().__init__(message)
        start, end = getattr(node, "start", 0), getattr(node, "end", 0)
        self.finding = Finding(code, message, start, end, help)


def grown(domain: Domain, clause: syntax.IndexClause, indexing: Indexing) -> Domain:
    """The domain with one more index.

    Raises
    ------
    IndexSlip
    """
    if clause.index in domain.arrays:
        raise index_twice(clause)
    _check_name(clause, indexing)
    if isinstance(clause.over, syntax.Range):
        first = _whole(clause.over.first, domain, indexing)
        last = _whole(clause.over.last, domain, indexing)
        lengths = np.maximum(np.broadcast_to(np.asarray(last) - np.asarray(first) + 1, (domain.size,)), 0)
        starts = np.broadcast_to(np.asarray(first), (domain.size,))
        set_name = ""
    else:
        name = clause.over.dotted
        found = indexing.sets.get(name)
        if found is None or clause.over.subscripts is not None:
            raise IndexSlip(
                "unknown-index-set",
                f"there is no index set `{name}`",
                clause.over,
                did_you_mean(name, indexing.sets) or "a set is made by `rows`, or write a range `1..N`",
            )
        lengths = np.full(domain.size, len(found.members))
        starts = np.zeros(domain.size, dtype=np.int64)
        set_name = name
    total = int(lengths.sum())
    if total > MOST_MEMBERS:
        raise IndexSlip(
            "family-too-large",
            f"this family would have {total:,} members; the most is {MOST_MEMBERS:,}",
            clause,
        )
    repeats = {n: np.repeat(a, lengths) for n, a in domain.arrays.items()}
    offsets = np.cumsum(lengths) - lengths
    ramp = np.arange(total, dtype=np.int64) - np.repeat(offsets, lengths) + np.repeat(starts, lengths)
    return Domain(
        total, {**repeats, clause.index: ramp.astype(np.int64)}, {**domain.sets, clause.index: set_name}
    )


def index_twice(clause: syntax.IndexClause) -> IndexSlip:
    """That an index is in force where another is to be made of its name."""
    return IndexSlip(
        "index-twice",
        f"the index `{clause.index}` is already in use here",
        clause,
        "give the inner index another name",
    )


def _check_name(clause: syntax.IndexClause, indexing: Indexing) -> None:
    """An index may bear no name that means something else where the index is used."""
    name = clause.index
    of = indexing.sets.get(clause.over.dotted) if isinstance(clause.over, syntax.Reference) else None
    if name in RESERVED:
        other = RESERVED[name]
    elif name in indexing.sets:
        other = f"`{name}` is an index set"
    elif of is not None and name in of.positions:
        other = f"`{name}` is a member of `{of.name}`"
    else:
        return
    raise IndexSlip(
        "index-name-taken",
        f"{other}, so no index can be called so here",
        clause,
        "give the index another name",
    )


def filtered(domain: Domain, condition: syntax.Expression | None, indexing: Indexing) -> Domain:
    """The part of the domain for which a condition on indices holds; a cell left unknown lets none hold."""
    if condition is None:
        return domain
    return domain.where(np.broadcast_to(_truth(condition, domain, indexing)[0], (domain.size,)))


def each_with_all(outer: Domain, inner: Domain) -> Domain:
    """Every entry of one domain with every entry of another that shares no index with it."""
    arrays = {name: np.repeat(array, inner.size) for name, array in outer.arrays.items()}
    arrays |= {name: np.tile(array, outer.size) for name, array in inner.arrays.items()}
    return Domain(outer.size * inner.size, arrays, {**outer.sets, **inner.sets})


_ON_INDICES: Mapping[str, Callable[[Any, Any], Any]] = {"+": add, "-": sub, "*": mul}


def subscript(node: syntax.Expression, domain: Domain, indexing: Indexing) -> Indices:
    """What a subscript stands for at every entry of the domain.

    Raises
    ------
    IndexSlip
    """
    match node:
        case syntax.Text():
            return Indices(0, name=node.value)
        case syntax.Number():
            return Indices(_whole_literal(node))
        case syntax.Reference() if node.subscripts is not None:
            return _member_of_column(node, domain, indexing)
        case syntax.Reference():
            name = node.dotted
            if name in domain.arrays:
                return Indices(domain.arrays[name], domain.sets[name])
            if name in indexing.whole:
                return Indices(indexing.whole[name])
            return Indices(0, name=name)
        case syntax.Unary() if node.operator in "+-":
            inner = _numbers(node.operand, domain, indexing)
            return Indices(inner if node.operator == "+" else -inner)
        case syntax.Binary() if node.operator in _ON_INDICES:
            first, operations = left_spine(node)
            if all(part.operator in _ON_INDICES for part in operations):
                result = _numbers(first, domain, indexing)
                for part in operations:
                    result = _ON_INDICES[part.operator](result, _numbers(part.right, domain, indexing))
                return Indices(result)
    raise IndexSlip(
        "subscript-form",
        "in brackets stand indices, members, whole-number knowns, and sums of them",
        node,
    )


def _column_read(node: syntax.Reference, indexing: Indexing) -> tuple[MemberColumn, syntax.Expression]:
    """The column that a reference like ``a[l]`` is to, and what stands in its brackets."""
    column = indexing.columns.get(node.dotted)
    if column is None or node.subscripts is None or len(node.subscripts) != 1:
        raise IndexSlip(
            "subscript-form",
            f"`{node.dotted}` is no column that names members, so it cannot stand in brackets",
            node,
            f"write `{node.name} of SET` in the heading of its rows",
        )
    return column, node.subscripts[0]


def _member_of_column(node: syntax.Reference, domain: Domain, indexing: Indexing) -> Indices:
    """The members that the cells of a column name, of which none may be left unknown."""
    column, below = _column_read(node, indexing)
    rows = placed(subscript(below, domain, indexing), column.rows, below, indexing)
    codes = column.codes[np.asarray(rows)]
    missing = np.flatnonzero(codes < 0)
    if missing.size:
        row = member_text(column.rows, int(np.ravel(rows)[missing[0]]), indexing)
        text = canonical(node, {})
        raise IndexSlip(
            "cell-left-unknown",
            f"`{column.name}[{row}]` names no member: its cell is left unknown",
            node,
            f"name one, or leave the row out with `if {text} = {text}`: no comparison with such a cell holds",
        )
    return Indices(codes, column.of)


def _cells_of_column(node: syntax.Reference, domain: Domain, indexing: Indexing) -> Indices:
    """The members that the cells of a column name, -1 for a cell left unknown."""
    column, below = _column_read(node, indexing)
    rows = np.asarray(placed(_compared(below, domain, indexing), column.rows, below, indexing))
    return Indices(np.where(rows < 0, -1, column.codes[rows]), column.of)


def placed(indices: Indices, set_name: str, node: syntax.Expression, indexing: Indexing) -> Codes | int:
    """The codes for a slot over `set_name` (empty: whole numbers).

    Raises
    ------
    IndexSlip
        If the subscript is of another set, or names no member.
    """
    if indices.name:
        if not set_name:
            raise IndexSlip(
                "no-such-member",
                f"`{indices.name}` is no index, no whole-number known and no member here",
                node,
                did_you_mean(indices.name, indexing.whole),
            )
        found = indexing.sets[set_name]
        if indices.name not in found.positions:
            raise IndexSlip(
                "no-such-member",
                f"`{indices.name}` is not a member of `{set_name}`",
                node,
                did_you_mean(indices.name, found.members)
                or f"its members are {', '.join(found.members[:8])}{' ...' if len(found.members) > 8 else ''}",
            )
        return found.positions[indices.name]
    if indices.set != set_name:
        here = f"a member of `{indices.set}`" if indices.set else "a whole number"
        there = f"members of `{set_name}`" if set_name else "whole numbers"
        help = _cure_for_mixed(node, set_name, indexing)
        raise IndexSlip("index-mixed", f"{here} stands where {there} are used elsewhere", node, help)
    return indices.codes


def _cure_for_mixed(node: syntax.Expression, set_name: str, indexing: Indexing) -> str:
    """What to write in a slot over `set_name` (empty: whole numbers) in place of `node`."""
    if not set_name:
        return "write a whole number, or an index over a range: `for i in 1..N`"
    members = indexing.sets[set_name].members
    if isinstance(node, syntax.Number) and node.text in members:
        return f'a member named by a number stands in quotes: `"{node.text}"`'
    texts = (member_text(set_name, code, indexing) for code in range(min(len(members), 4)))
    listed = ", ".join(texts) + (" ..." if len(members) > 4 else "")
    return f"write a member ({listed}), an index `in {set_name}`, or a column `of {set_name}`"


def no_set_with(name: str, node: syntax.Expression, indexing: Indexing) -> IndexSlip:
    """What to say of a subscript that stands for a member, where no set has one of that name."""
    members = [member for one in indexing.sets.values() for member in one.members]
    return IndexSlip(
        "no-such-member",
        f"`{name}` is no index, no whole-number known and no member of a set",
        node,
        did_you_mean(name, members)
        or "the members of a set are the names of its `rows`; a quantity by itself has a plain name, `x_A`",
    )


def member_text(set_name: str, code: int, indexing: Indexing) -> str:
    """A member as written in brackets: quoted where it is not a name."""
    if not set_name:
        return str(code)
    name = indexing.sets[set_name].members[code]
    return name if name.isidentifier() else f'"{name}"'


def _numbers(node: syntax.Expression, domain: Domain, indexing: Indexing) -> Codes | int:
    found = subscript(node, domain, indexing)
    if found.set or found.name:
        what = found.name or getattr(node, "name", "this")
        raise IndexSlip("subscript-form", f"`{what}` is no whole number, so it cannot be reckoned with", node)
    return found.codes


def _whole(node: syntax.Expression, domain: Domain, indexing: Indexing) -> Codes | int:
    try:
        return _numbers(node, domain, indexing)
    except IndexSlip as slip:
        if isinstance(node, syntax.Reference) and slip.finding.code == "subscript-form":
            raise IndexSlip(
                "range-not-whole",
                f"`{node.dotted}` is not a known whole number",
                node,
                f"set it by a line of its own: `{node.dotted} = 10`",
            ) from None
        raise


def whole_number(node: syntax.Expression) -> int | None:
    """The value of a plain whole number with or without a sign; None for all else, or one beyond exact floats."""
    if isinstance(node, syntax.Unary) and node.operator in "+-" and isinstance(node.operand, syntax.Number):
        inner = whole_number(node.operand)
        return None if inner is None else -inner if node.operator == "-" else inner
    if not isinstance(node, syntax.Number):
        return None
    value = float(node.text)
    if node.unit is not None or not value.is_integer() or abs(value) > 2**53:
        return None
    return -int(value) if node.negated else int(value)


def _whole_literal(node: syntax.Number) -> int:
    value = whole_number(node)
    if value is None:
        raise IndexSlip("subscript-form", f"`{node.text}` is not a whole number", node)
    return value


def holds(condition: syntax.Expression, domain: Domain, indexing: Indexing) -> NDArray[np.bool_]:
    """Whether a condition on indices holds at the entries (size,) of the domain.

    Raises
    ------
    IndexSlip
        Also where a cell left unknown decides.
    """
    true, false = (np.broadcast_to(one, (domain.size,)) for one in _truth(condition, domain, indexing))
    if not (true | false).all():
        raise IndexSlip(
            "cell-left-unknown",
            "this comparison cannot be decided: the cell is left unknown",
            condition,
            "name a member in the cell, or leave its row out with a filter",
        )
    return true


Truth: TypeAlias = tuple[NDArray[np.bool_], NDArray[np.bool_]]


def _truth(node: syntax.Expression, domain: Domain, indexing: Indexing) -> Truth:
    """Where a condition holds and where it does not; neither, where a cell left unknown decides (after Kleene)."""
    match node:
        case syntax.Logical():
            parts = [_truth(operand, domain, indexing) for operand in node.operands]
            true, false = parts[0]
            for more_true, more_false in parts[1:]:
                if node.operator == "and":
                    true, false = true & more_true, false | more_false
                else:
                    true, false = true | more_true, false & more_false
            return true, false
        case syntax.Unary() if node.operator == "not":
            true, false = _truth(node.operand, domain, indexing)
            return false, true
        case syntax.Comparison():
            operands = [_compared(operand, domain, indexing) for operand in node.operands]
            true, false = np.asarray(True), np.asarray(False)
            for operator, a, b, node_a, node_b in zip(
                node.operators, operands, operands[1:], node.operands, node.operands[1:]
            ):
                set_name = a.set or b.set
                left, right = placed(a, set_name, node_a, indexing), placed(b, set_name, node_b, indexing)
                holds = np.asarray(_COMPARE[operator](left, right))
                # The code of a cell left unknown is negative, as whole numbers may be.
                known = (np.asarray(left) >= 0) & (np.asarray(right) >= 0) if set_name else np.asarray(True)
                true, false = true & holds & known, false | (~holds & known)
            return true, false
    raise IndexSlip("filter-form", "a filter compares indices, members and whole-number knowns", node)


def _compared(node: syntax.Expression, domain: Domain, indexing: Indexing) -> Indices:
    """A side of a comparison; unlike in brackets, cells left unknown may stand here."""
    if isinstance(node, syntax.Reference) and node.subscripts is not None:
        if node.dotted in indexing.columns:
            return _cells_of_column(node, domain, indexing)
        raise IndexSlip(
            "filter-form",
            f"`{node.dotted}` is a quantity, and which members there are cannot depend on its value",
            node,
            "a filter compares indices, members and whole-number knowns",
        )
    return subscript(node, domain, indexing)


_COMPARE = {
    "<": np.less,
    "<=": np.less_equal,
    ">": np.greater,
    ">=": np.greater_equal,
    "=": np.equal,
    "!=": np.not_equal,
}
