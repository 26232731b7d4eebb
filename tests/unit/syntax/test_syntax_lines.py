"""Where statements begin and end."""

from __future__ import annotations

import pytest

from eqsheet.diagnostics.source import Source
from eqsheet.syntax.lines import indentation, logical_lines, split_comment
from eqsheet.syntax.remarks import remarks


def texts(text: str) -> list[str]:
    return [line.text for line in logical_lines(Source("sheet", text)).logical]


ONE_STATEMENT = {
    "open bracket": "x = (a\n  + b)",
    "open bracket, same indentation": "x = (a\n+ b\n)",
    "open subscript": "x = T[i,\n  j]",
    "trailing operator": "x = a +\n  b",
    "trailing comma": "show a,\n  b",
    "trailing equals": "x =\n  a",
    "trailing word": "x = if a < b then\n  1 else\n  2",
    "leading operator": "x = a\n  + b\n  - c",
    "leading word": "x = if a < b\n  then 1\n  else 2",
    "leading valid": "x = a\n  valid Re > 1",
    "comment inside": "x = a +  # first\n  # between\n  b",
    "blank line inside": "x = (a +\n\n  b)",
    "bracket in a comment": "x = (a  # )\n  + b)",
    "factor on the next line": "x = a\n  * near + 3",
    "bracket in quotes": 'x = y[")"\n  ]',
}


@pytest.mark.parametrize("name", ONE_STATEMENT)
def test_statement_goes_on(name: str) -> None:
    text = ONE_STATEMENT[name]
    assert texts(f"{text}\nlast = 1") == [text, "last = 1"]


TWO_STATEMENTS = {
    "percent": "x = 5 %\ny = 2",
    "open bound": "x within 0 K ..\ny = 2",
    "plain": "x = a\ny = b",
    "bracket left open": "x = (a\ny = b",
    "bracket left open before a keyword": "x = (a\nrequire b < c",
    "bracket left open before a label": "x = (a\nenergy: b = c",
    "bracket left open before a heading": "x = (a\n## Heading\n  b",
    "side missing": "x =\ny = b",
    "comma left over": "show x,\nshow y",
    "blank line before a leading sign": "x = a\n\n- y = b",
    "bounds for everything": "x = a\n* within 0 ..",
    "guess for everything": "x = a\n*_in near 3 bar",
    "hash in quotes": 'x = y["#1"]\nz = 2',
}


@pytest.mark.parametrize("name", TWO_STATEMENTS)
def test_statement_ends(name: str) -> None:
    assert len(texts(TWO_STATEMENTS[name])) == 2


def test_line_knows_its_place_its_indentation_and_its_comment() -> None:
    source = Source("sheet", "\n# prose\n  x = (a +  # one\n    b)   # two  \ny = 2")
    first, second = logical_lines(source).logical
    assert source.text[first.offset : first.offset + len(first.text)] == first.text
    assert (first.line, first.indent, first.comment) == (3, 2, "two")
    assert (second.line, second.indent, second.comment) == (5, 0, "")


def test_rows_of_a_table_are_one_line_each() -> None:
    lines = logical_lines(Source("sheet", "rows s: a,\n   b\n  H2O 1 -\n  CO2 -1 2\nx = 1"))
    assert [line.text for line in lines.logical] == ["rows s: a,\n   b", "H2O 1 -", "CO2 -1 2", "x = 1"]
    assert lines.table_rows == {1, 2}


def test_open_bracket_is_the_one_nothing_closes() -> None:
    lines = logical_lines(Source("sheet", "x = f(a) + (b + (c)"))
    assert dict(lines.open_brackets) == {0: 11}


def test_tabs_reach_to_the_next_multiple_of_four() -> None:
    assert [indentation(text) for text in ("x", "  x", "\tx", "  \tx", "\t x")] == [0, 2, 4, 4, 5]


def test_comment_starts_at_the_first_hash_outside_quotes() -> None:
    assert split_comment('a "x#y" # b # c') == ('a "x#y" ', " b # c")
    assert split_comment('a "x#y') == ('a "x', "y")
    assert split_comment("a") == ("a", None)


@pytest.mark.parametrize(
    ("comment", "parts"),
    [
        ("", ("", "", "")),
        ("bore", ("bore", "", "")),
        ("source: ISO 5167-2; table 3", ("", "ISO 5167-2; table 3", "")),
        ("assume: clean; source: P-104", ("", "P-104", "clean")),
        (
            "flow, Source: log book; assume: steady; assume: no leaks",
            ("flow", "log book", "steady; no leaks"),
        ),
        ("resource: is no source", ("resource: is no source", "", "")),
    ],
)
def test_remarks(comment: str, parts: tuple[str, str, str]) -> None:
    assert tuple(remarks(comment)) == parts


@pytest.mark.parametrize(
    ("line", "title"),
    [
        ("## Given", "Given"),
        ("##Given", "Given"),
        ("###Größe: bore", "Größe: bore"),
        ("##x = 3 m", ""),  # a statement put aside
        ("####----", ""),
        ("# #tag", ""),
    ],
)
def test_a_heading_without_its_blank_opens_a_section(line: str, title: str) -> None:
    (prose,) = logical_lines(Source("sheet", line)).prose
    assert prose.title == title
