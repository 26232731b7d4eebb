"""Which members exist, and their numbers."""

from __future__ import annotations

import numpy as np
import pytest

from eqsheet.diagnostics.source import Source
from eqsheet.model.families import FamilyCollector, FamilyReference, Numbering, makes_members, written_name
from eqsheet.model.indexing import Domain, Indexing, IndexSet
from eqsheet.syntax import nodes as syntax
from eqsheet.syntax.parse import parse_statement

INDEXING = Indexing({"node": IndexSet.of("node", ("A", "B"))}, {"N": 3})
RANGE = Domain(3, {"i": np.array([1, 2, 3])}, {"i": ""})
SET = Domain(2, {"n": np.array([0, 1])}, {"n": "node"})


def reference(text: str) -> FamilyReference:
    statement, diagnostics = parse_statement(Source("x", f"y = {text}"))
    assert diagnostics == ()
    assert statement is not None
    assert isinstance(statement.node, syntax.Equation)
    node = statement.node.right
    assert isinstance(node, syntax.Reference)
    subscripts = node.subscripts or ()
    written = tuple(
        text[s.start - node.start : s.end - node.start] for s in subscripts if hasattr(s, "start")
    )
    return FamilyReference(((node.name, len(subscripts)),), written, subscripts)


def numbering(*seen: tuple[str, Domain], plain: tuple[str, ...] = ()) -> Numbering:
    collector = FamilyCollector(INDEXING)
    for text, domain in seen:
        collector.see(reference(text), domain, makes=True)
    assert collector.finish() == []
    return collector.numbering(set(plain))


@pytest.mark.parametrize(
    ("seen", "names"),
    [
        ([("T[i]", RANGE)], ["T[1]", "T[2]", "T[3]"]),
        ([("T[i]", RANGE), ("T[i-1]", RANGE), ("T[0]", Domain())], ["T[0]", "T[1]", "T[2]", "T[3]"]),
        ([("T[N+1]", Domain()), ("T[1]", Domain())], ["T[1]", "T[4]"]),
        ([("z[n]", SET), ("z[B]", Domain())], ["z[A]", "z[B]"]),
        ([("x[i, 2]", RANGE), ("x[1, 1]", Domain())], ["x[1, 1]", "x[1, 2]", "x[2, 2]", "x[3, 2]"]),
        ([("T[i-1]", RANGE)], []),
    ],
)
def test_members(seen: list[tuple[str, Domain]], names: list[str]) -> None:
    assert list(numbering(*seen).names(INDEXING)) == names


def test_plain_quantities_and_families_are_numbered_by_name() -> None:
    found = numbering(("T[i]", RANGE), plain=("a", "Z"))
    assert found.names(INDEXING) == ("T[1]", "T[2]", "T[3]", "Z", "a")
    assert found.plain == {"Z": 3, "a": 4}


def test_the_order_of_seeing_does_not_matter() -> None:
    seen = [("T[i]", RANGE), ("z[n]", SET), ("T[0]", Domain())]
    assert numbering(*seen).names(INDEXING) == numbering(*reversed(seen)).names(INDEXING)


@pytest.mark.parametrize("members", [[1, 2, 3, 4], [1, 3, 4], [-2, 5, 100_000]])
def test_numbers_of_members_and_of_none(members: list[int]) -> None:
    seen = [(f"T[{m}]", Domain()) for m in members]
    family = numbering(*seen).families[(("T", 1),)]
    wanted = np.array([*members, min(members) - 1, max(members) + 1, 50, -1])
    expected = [family.first + members.index(m) if m in members else -1 for m in wanted.tolist()]
    assert family.numbers([wanted], len(wanted)).tolist() == expected


def test_numbers_in_two_slots_do_not_run_over() -> None:
    family = numbering(("x[1, 1]", Domain()), ("x[1, 2]", Domain()), ("x[2, 1]", Domain())).families[
        (("x", 2),)
    ]
    first, second = np.array([1, 1, 2, 2, 1]), np.array([1, 2, 1, 2, 3])
    assert (family.numbers([first, second], 5) - family.first).tolist()[:3] == [0, 1, 2]
    assert family.numbers([first, second], 5).tolist()[3:] == [-1, -1]


def test_a_slot_has_one_set() -> None:
    collector = FamilyCollector(INDEXING)
    collector.see(reference("x[i]"), RANGE, makes=True)
    found = collector.see(reference("x[n]"), SET, makes=True)
    assert found is not None
    assert found.code == "index-mixed"


def test_a_family_whose_references_are_all_wrong_has_no_members() -> None:
    collector = FamilyCollector(INDEXING)
    collector.see(reference("z[n]"), SET, makes=False)
    collector.see(reference("z[C]"), Domain(), makes=True)
    assert [slip.finding.code for slip in collector.finish()] == ["no-such-member"]
    assert collector.numbering(()).families == {}


@pytest.mark.parametrize(
    ("text", "makes"),
    [
        ("i", True),
        ("0", True),
        ("N", True),
        ("N+1", True),
        ("-1", True),
        ("i-1", False),
        ("2*i", False),
        ("i+N", False),
        ("A", True),
    ],
)
def test_subscripts_that_make_members(text: str, makes: bool) -> None:
    assert makes_members(reference(f"x[{text}]").nodes[0], {"i"}) is makes


def test_written_names() -> None:
    assert written_name((("p", 1), ("dP", 0)), ["P12"]) == "p[P12].dP"
    assert written_name((("x", 2),), ["3", "H2O"]) == "x[3, H2O]"
    assert written_name((("r", 0), ("one", 1), ("v", 1)), ["1", "2"]) == "r.one[1].v[2]"
