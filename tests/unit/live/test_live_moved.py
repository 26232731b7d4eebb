"""What changed between two solutions."""

import pytest

import eqsheet
from eqsheet.live.moved import Moved, moved


def solved(text):
    return eqsheet.parse(text).solve()


def test_same_worksheet_has_not_moved():
    text = "x = 3 m\ny = 2*x\nrequire y <= 7 m"
    assert not moved(solved(text), solved(text))


def test_added_and_gone_quantities_are_told_by_name():
    found = moved(solved("x = 3 m\nz = 1"), solved("x = 3 m\ny = 2*x"))
    assert [v.name for v in found.added] == ["y"]
    assert [v.name for v in found.gone] == ["z"]
    assert not found.changes


def test_change_from_zero_is_whole_and_sorted_by_size():
    found = moved(solved("a = 0 m\nb = 1 m\nc = 1 m"), solved("a = 1 m\nb = -3 m\nc = 1.5 m"))
    assert [(c.new.name, c.relative) for c in found.changes] == [("b", -4.0), ("a", 1.0), ("c", 0.5)]


def test_rounding_is_no_change():
    old, new = solved("x = 0.3 m"), solved("x = 0.1 m + 0.2 m")
    assert old["x"].si != new["x"].si
    assert not moved(old, new)


def test_change_of_dimension_is_a_change():
    found = moved(solved("x = 3 m"), solved("x = 3 s"))
    assert [c.new.unit for c in found.changes] == ["s"]


@pytest.mark.parametrize(
    ("old", "new", "fails", "holds"),
    [
        ("x = 1 m\nrequire x < 2 m", "x = 3 m\nrequire x < 2 m", ["x < 2 m"], []),
        ("x = 3 m\nrequire x < 2 m", "x = 1 m\nrequire x < 2 m", [], ["x < 2 m"]),
        ("x = 3 m", "x = 3 m\nrequire x < 2 m", ["x < 2 m"], []),
        ("x = 1 m", "x = 1 m\nrequire x < 2 m", [], []),
    ],
)
def test_limits_that_changed_their_state(old, new, fails, holds):
    found = moved(solved(old), solved(new))
    assert [limit.text for limit in found.fails] == fails
    assert [limit.text for limit in found.holds] == holds


def test_against_nothing_only_failing_limits_are_told():
    found = moved(None, solved("x = 3 m\nrequire x < 2 m\nrequire x > 1 m"))
    assert [limit.text for limit in found.fails] == ["x < 2 m"]
    assert found == Moved(fails=found.fails)
