"""Small words that help: which line is first, the way round a circle, what a broken line or file leaves unsaid."""

from __future__ import annotations

from pathlib import Path

import pytest
from solving import errors, lines, only, solve

import eqsheet


def test_of_a_cell_and_a_line_the_first_in_the_text_is_first() -> None:
    found = only(solve("rows pipe: L\n    p1 2\nL[p1] = 3\n"), "set-twice")
    assert [(label.span.line, label.text) for label in found.labels] == [(3, "again here"), (2, "first here")]


def test_a_cell_left_unknown_is_where_its_member_is_missing() -> None:
    found = only(solve("rows pipe: L\n    p1 2\n    p2 -\n"), "under-determined")
    assert found.span is not None
    assert (found.span.line, found.span.text) == (3, "-")


def test_the_way_round_a_circle_of_templates() -> None:
    text = (
        "template a:\n    use b as q\ntemplate b:\n    use c as r\ntemplate c:\n    use a as p\nuse a as x\n"
    )
    found = only(solve(text), "template-uses-itself")
    assert found.message == "the template `a` uses itself, by way of `b` and `c`"


def test_a_value_that_is_none_is_told_with_its_instance() -> None:
    found = only(solve("template t:\n    z = 1 m/0\nuse t as a\n"), "value-not-finite")
    assert "in the instance `a`" in found.notes
    outer = "template o:\n    use t as b:\n        z = 1 m/0\ntemplate t:\n    y = z\nuse o as a\n"
    assert "in the instance `a.b`" in only(solve(outer), "value-not-finite").notes


def test_an_index_is_given_a_unit_by_a_factor() -> None:
    found = only(solve("for i in 1..3:\n    x[i] = 2 m\n    y[i] = x[i] + i\n"), "dimension-clash")
    assert found.help == "give it a unit: `i*1 m`"


def test_a_line_that_clashes_is_not_called_false_too() -> None:
    assert errors(solve("z = 3 m\nfor i in 1..3:\n    z = i + z\n")) == ["dimension-clash"]


@pytest.mark.parametrize(
    "text", ["for i in 1..9 step 2:\n    x[i] = 1\n", "N = 9\nx = sum(i for i in 1..N by 2)\n"]
)
def test_a_range_has_no_step(text: str) -> None:
    assert errors(solve(text)) == ["range-step"]


def test_what_a_misplaced_curve_would_have_been_is_not_missed() -> None:
    text = """
        template pump:
            H = h(Q)
            curve h(Q in L/s) in m:
                0 10
                2 5
        use pump as p:
            Q = 1 L/s
    """
    assert errors(solve(text)) == ["misplaced-statement"]


def test_names_of_a_broken_line_are_not_missed() -> None:
    text = "template t:\n    y = nofunction(a) + b\nuse t as p:\n    a = 2\n    b = 3\nz = p.b\n"
    assert errors(solve(text)) == ["unknown-function"]


@pytest.mark.parametrize("table", [None, "", "node, L\na, 1\n", "pipe, L [m]\na, 1\n"])
def test_what_a_file_would_have_made_is_not_missed(tmp_path: Path, table: str | None) -> None:
    sheet = tmp_path / "main.eqsheet"
    sheet.write_text(
        'rows pipe from "p.csv"\nfor p in pipe:\n    Q[p] = L[p]*2\ny = Q[a]\n', encoding="utf-8"
    )
    if table is not None:
        (tmp_path / "p.csv").write_text(table, encoding="utf-8")
    solution = eqsheet.load(sheet).solve()
    assert len(errors(solution)) == 1
    assert lines(solution.diagnostics[0])[0] == 1


def test_what_a_family_runs_over_is_told_in_words() -> None:
    text = "rows st: F\n    s1 1\nfor i in st, k in 1..2:\n    L[i, k] = F[i]*k\ny = L\n"
    assert only(solve(text), "family-without-subscript").help.endswith("(over `st`, whole numbers)")
