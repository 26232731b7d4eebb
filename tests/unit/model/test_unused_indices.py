"""Lines and instances that do not name an index of their family."""

from __future__ import annotations

import pytest
from both_ways import codes, only, said

PIPE = "template pipe:\n    m = 2*v\n"


@pytest.mark.parametrize(
    ("text", "line", "index"),
    [
        ("for i in 1..4:\n    a + b = 3\n    b = d[i]", 2, "i"),
        ("for i in 1..3, j in 1..2:\n    y[i] = i", 2, "j"),
        ("for i in 1..3:\n    for j in 1..i:\n        y[i] = i", 3, "j"),
        ("for i in 1..2000:\n    a = 3\nb = 2*a", 2, "i"),
    ],
)
def test_equation(text: str, line: int, index: str) -> None:
    found = next(one for one in said(text) if one.code == "index-unused")
    assert found.span is not None
    assert (found.span.line, found.message) == (
        line,
        f"this line does not name the index `{index}`, so it stands several times alike",
    )


@pytest.mark.parametrize(
    "text",
    [
        "for i in 1..3, j in 1..2 if j = 1:\n    y[i] = i",
        "for i in 1..1:\n    a = 3",
        "for i in 1..2:\n    y[i] = i\n    require y[1] <= 2\n    y[i] near 2",
    ],
)
def test_lines_that_differ_all_the_same(text: str) -> None:
    assert codes(text) == []


def test_instance() -> None:
    found = only(PIPE + "for k in 1..3:\n    use pipe as p", "index-unused")
    assert found.span is not None
    assert found.span.line == 4
    assert found.help == "write `... as p[k]`"


def test_the_outer_one_of_two_instances() -> None:
    text = PIPE + "template pair:\n    use pipe as a\n    a.v = 2\nfor k in 1..3:\n    use pair as p"
    found = only(text, "index-unused")
    assert found.span is not None
    assert found.span.line == 7


def test_a_member_beside_the_index_makes_no_instance() -> None:
    found = said(PIPE + "for i in 1..2:\n    use pipe as p[i+1]:\n        v = 1 m/s")
    assert [one.code for one in found] == ["subscript-form"]
    assert found[0].message == "`i+1` makes no instances"
