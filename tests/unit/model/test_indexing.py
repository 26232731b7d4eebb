"""Domains of indices, filters, and subscripts over them."""

from __future__ import annotations

import numpy as np
import pytest

from eqsheet.diagnostics.source import Source
from eqsheet.model.indexing import (
    MOST_MEMBERS,
    Domain,
    Indexing,
    IndexSet,
    IndexSlip,
    MemberColumn,
    filtered,
    grown,
    member_text,
    placed,
    subscript,
    whole_number,
)
from eqsheet.syntax import nodes as syntax
from eqsheet.syntax.parse import parse_statement

INDEXING = Indexing(
    {"node": IndexSet.of("node", ("A", "B", "C+")), "line": IndexSet.of("line", ("L1", "L2"))},
    {"N": 3, "M": -1},
    {
        "a": MemberColumn("a", "line", "node", np.array([0, 2])),
        "b": MemberColumn("b", "line", "node", np.array([1, -1])),
    },
)


def head(text: str) -> syntax.Family:
    statement, diagnostics = parse_statement(Source("x", f"for {text}:\n    z = 1\n"))
    assert diagnostics == ()
    assert statement is not None
    assert isinstance(statement.node, syntax.Family)
    return statement.node


def domain(text: str) -> Domain:
    node = head(text)
    result = Domain()
    for clause in node.clauses:
        result = grown(result, clause, INDEXING)
    return filtered(result, node.filter, INDEXING)


def index_of(text: str) -> syntax.Expression:
    statement, diagnostics = parse_statement(Source("x", f"y = x[{text}]"))
    assert diagnostics == ()
    assert statement is not None
    assert isinstance(statement.node, syntax.Equation)
    assert isinstance(statement.node.right, syntax.Reference)
    assert statement.node.right.subscripts is not None
    return statement.node.right.subscripts[0]


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("i in 1..4", {"i": [1, 2, 3, 4]}),
        ("i in 1..N", {"i": [1, 2, 3]}),
        ("i in M..N-1", {"i": [-1, 0, 1, 2]}),
        ("i in 3..1", {"i": []}),
        ("n in node", {"n": [0, 1, 2]}),
        ("i in 1..2, k in 1..i", {"i": [1, 2, 2], "k": [1, 1, 2]}),
        ("i in 1..3, k in i+1..3", {"i": [1, 1, 2], "k": [2, 3, 3]}),
        ("i in 1..2, n in line", {"i": [1, 1, 2, 2], "n": [0, 1, 0, 1]}),
        ("i in 1..4 if i != 3", {"i": [1, 2, 4]}),
        ("n in node if n != A", {"n": [1, 2]}),
        ('n in node if n = "C+" or n = A', {"n": [0, 2]}),
        ("l in line if a[l] = A", {"l": [0]}),
        ("i in 1..3, k in 1..3 if i < k and not k = 3", {"i": [1], "k": [2]}),
        ("i in 1..9 if 2*i = N+1", {"i": [2]}),
        # L2 has no b: nothing said of it holds.
        ("l in line if b[l] = B", {"l": [0]}),
        ("l in line if b[l] != A", {"l": [0]}),
        ("l in line if not (b[l] != B)", {"l": [0]}),
        ("l in line if b[l] = b[l]", {"l": [0]}),
        ("l in line if b[l] = B or l = L2", {"l": [0, 1]}),
        ("l in line if not (b[l] = A and l = L1)", {"l": [0, 1]}),
    ],
)
def test_domains(text: str, expected: dict[str, list[int]]) -> None:
    found = domain(text)
    assert {name: array.tolist() for name, array in found.arrays.items()} == expected
    assert found.size == len(next(iter(expected.values())))


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("i in 1..2, i in 1..3", "index-twice"),
        ("i in 1..K", "range-not-whole"),
        ("n in nodes", "unknown-index-set"),
        (f"i in 1..{MOST_MEMBERS + 1}", "family-too-large"),
        ("i in 1..100000, k in 1..100000", "family-too-large"),
        ("n in node if n = D", "no-such-member"),
        ("n in node if n = 2", "index-mixed"),
        ("i in 1..3 if q[i] > 2", "filter-form"),
    ],
)
def test_slips_of_domains(text: str, code: str) -> None:
    with pytest.raises(IndexSlip) as caught:
        domain(text)
    assert caught.value.finding.code == code


@pytest.mark.parametrize(
    ("text", "over", "set_name", "codes"),
    [
        ("i-1", "i in 1..3", "", [0, 1, 2]),
        ("N+1", "i in 1..2", "", 4),
        ("-1", "i in 1..2", "", -1),
        ("2*i+N", "i in 1..2", "", [5, 7]),
        ("n", "n in node", "node", [0, 1, 2]),
        ("B", "n in node", "node", 1),
        ('"C+"', "n in node", "node", 2),
        ("a[l]", "l in line", "node", [0, 2]),
        ("a[L2]", "i in 1..1", "node", [2]),
    ],
)
def test_subscripts(text: str, over: str, set_name: str, codes: object) -> None:
    node = index_of(text)
    found = placed(subscript(node, domain(over), INDEXING), set_name, node, INDEXING)
    assert np.array_equal(np.atleast_1d(found), np.atleast_1d(np.array(codes)))


@pytest.mark.parametrize(
    ("text", "over", "set_name", "code"),
    [
        ("n", "n in node", "", "index-mixed"),
        ("i", "i in 1..2", "node", "index-mixed"),
        ("D", "n in node", "node", "no-such-member"),
        ("D", "i in 1..2", "", "no-such-member"),
        ("n+1", "n in node", "node", "subscript-form"),
        ("i/2", "i in 1..2", "", "subscript-form"),
        ("1.5", "i in 1..2", "", "subscript-form"),
        ("c[i]", "i in 1..2", "", "subscript-form"),
        ("b[L2]", "i in 1..1", "node", "cell-left-unknown"),
    ],
)
def test_slips_of_subscripts(text: str, over: str, set_name: str, code: str) -> None:
    node = index_of(text)
    with pytest.raises(IndexSlip) as caught:
        placed(subscript(node, domain(over), INDEXING), set_name, node, INDEXING)
    assert caught.value.finding.code == code


def test_members_in_brackets_are_quoted_where_they_are_no_names() -> None:
    assert [member_text("node", k, INDEXING) for k in range(3)] == ["A", "B", '"C+"']
    assert member_text("", -4, INDEXING) == "-4"


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("3", 3),
        ("-3", -3),
        ("+3", 3),
        ("2e3", 2000),
        ("2.0", 2),
        ("2.5", None),
        ("3 m", None),
        ("1e300", None),
        ("N", None),
    ],
)
def test_whole_numbers(text: str, value: int | None) -> None:
    statement, _ = parse_statement(Source("x", f"n = {text}"))
    assert statement is not None
    assert isinstance(statement.node, syntax.Equation)
    assert whole_number(statement.node.right) == value
