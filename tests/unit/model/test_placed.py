"""Statements in families and instances."""

from __future__ import annotations

import time

import pytest

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.diagnostics.source import Source
from eqsheet.model.families import FamilyReference
from eqsheet.model.placed import Placed, place_statements
from eqsheet.model.written_nodes import canonical
from eqsheet.syntax.parse import parse_document


def placed(text: str) -> tuple[tuple[Placed, ...], list[Diagnostic]]:
    document, found = parse_document(Source("x", text))
    assert found == ()
    diagnostics: list[Diagnostic] = []
    return place_statements(document.statements, diagnostics), diagnostics


def lines(text: str) -> list[tuple[str, str, int]]:
    """Text, instance and number of `for` lines around it, of each placed statement."""
    places, diagnostics = placed(text)
    assert diagnostics == []
    return [(p.statement.line.text.strip(), (p.instance or p.scope).text, len(p.heads)) for p in places]


def test_a_plain_worksheet_stays_as_it_is() -> None:
    places, _ = placed("a = 1\nb = 2*a\n")
    assert all(place.plain for place in places)


def test_families_keep_their_heads() -> None:
    text = "for i in 1..2:\n    a[i] = 1\n    for k in 1..2:\n        b[i, k] = 2\nc = 1\n"
    assert lines(text) == [("a[i] = 1", "", 1), ("b[i, k] = 2", "", 2), ("c = 1", "", 0)]


TEMPLATE = "template t:\n    shared rho\n    x = 2*y*rho\n    y = 1\n    y near 3\n"


def test_lines_of_an_instance_take_the_place_of_the_templates_own() -> None:
    text = TEMPLATE + "use t as p:\n    y = 4\nuse t as q:\n    y near 7\n"
    assert lines(text) == [
        ("y = 4", "p", 0),
        ("x = 2*y*rho", "p", 0),
        ("y near 3", "p", 0),
        ("y near 7", "q", 0),
        ("x = 2*y*rho", "q", 0),
        ("y = 1", "q", 0),
    ]


def test_what_is_off_has_no_place() -> None:
    assert lines(TEMPLATE + "use t as p:\n    off y = 4\noff use t as q\n") == [
        ("x = 2*y*rho", "p", 0),
        ("y = 1", "p", 0),
        ("y near 3", "p", 0),
    ]


def test_names_in_an_instance() -> None:
    places, _ = placed(
        "template o:\n    shared rho\n    use t as inner\n    z = 1\n" + TEMPLATE + "use o as p\n"
    )
    scope = next(p.scope for p in places if p.statement.line.text.strip() == "x = 2*y*rho")
    assert scope.text == "p.inner"
    local = scope.resolve("x")
    assert isinstance(local, FamilyReference)
    assert local.text == "p.inner.x"
    assert scope.resolve("rho") == "rho"


def test_a_name_shared_by_the_inner_template_alone_is_the_outer_ones() -> None:
    places, _ = placed("template o:\n    use t as inner\n    rho = 2\n" + TEMPLATE + "use o as p\n")
    scope = next(p.scope for p in places if p.statement.line.text.strip() == "x = 2*y*rho")
    found = scope.resolve("rho")
    assert isinstance(found, FamilyReference)
    assert found.text == "p.rho"


def test_instances_in_a_family_carry_its_index() -> None:
    places, _ = placed(TEMPLATE + "for l in 1..2:\n    use t as p[l]:\n        y = l\n")
    line, inside = places[:2]
    assert (len(line.heads), len(inside.heads), len(inside.scope.heads)) == (1, 0, 1)
    found = inside.scope.resolve("x")
    assert isinstance(found, FamilyReference)
    assert (found.path, found.written) == ((("p", 1), ("x", 0)), ("l",))


def test_the_index_around_an_instance_is_hidden_from_its_template() -> None:
    places, _ = placed(
        "template o:\n    for l in 1..2:\n        use t as q[l]\n"
        + TEMPLATE
        + "for l in 1..2:\n    use o as p[l]\n"
    )
    innermost = places[0].scope
    names = [canonical(node, {}) for node in innermost.nodes]
    assert names == ["l'0", "l'1"]
    assert innermost.written == ("l", "l")


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("use t as p\n", "unknown-template"),
        (TEMPLATE + "use t as p\nuse t as p\n", "instance-twice"),
        (TEMPLATE + TEMPLATE, "template-twice"),
        ("template a:\n    use a as b\nuse a as c\n", "template-uses-itself"),
        ("template a:\n    use b as x\ntemplate b:\n    use a as y\nuse a as c\n", "template-uses-itself"),
        (TEMPLATE + "for l in 1..2:\n    use t as p[l+1]\n", "subscript-form"),
        ("shared x\n", "misplaced-statement"),
        ("for i in 1..2:\n    new unit EUR\n", "misplaced-statement"),
        (TEMPLATE + "use t as p:\n    require y <= 2\n", "misplaced-statement"),
    ],
)
def test_slips(text: str, code: str) -> None:
    _, diagnostics = placed(text)
    assert [d.code for d in diagnostics] == [code]


def test_templates_that_multiply_are_given_up(monkeypatch: pytest.MonkeyPatch) -> None:
    levels = "".join(
        f"template t{k}:\n" + "".join(f"    use t{k + 1} as u{j}\n" for j in range(40)) for k in range(6)
    )
    text = levels + "template t6:\n    x = 1\nuse t0 as p\n"
    monkeypatch.setattr("eqsheet.model.placed.MOST_PLACED", 1000)
    begin = time.perf_counter()
    _, diagnostics = placed(text)
    assert time.perf_counter() - begin < 5
    assert {d.code for d in diagnostics} == {"worksheet-too-large"}
