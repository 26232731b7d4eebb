"""Edits, their undoing and their history."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from eqsheet.live.lines import Edit, History, between

LINES = st.lists(st.sampled_from(["a", "b", "c", ""]), max_size=8).map(tuple)


@given(LINES, LINES)
def test_edit_between_two_states_leads_from_one_to_the_other_and_back(old, new):
    edit = between(old, new)
    assert edit.applied(old) == new
    assert edit.undone.applied(new) == old


def test_edit_between_touches_only_what_differs():
    edit = between(("a", "b", "c", "d"), ("a", "x", "d"))
    assert edit == Edit(1, ("b", "c"), ("x",))


@pytest.mark.parametrize(
    "edit", [Edit(0, ("b",), ()), Edit(3, ("c",), ()), Edit(-1, (), ("x",)), Edit(4, (), ("x",))]
)
def test_edit_of_other_lines_is_refused(edit):
    with pytest.raises(ValueError, match="not those the edit replaces"):
        edit.applied(("a", "b", "c"))


def test_history_goes_back_and_forth_and_forgets_after_a_new_edit():
    first, second = Edit(0, (), ("a",)), Edit(1, (), ("b",))
    history = History().after(first).after(second)
    back = history.back()
    assert back is not None
    undo, history = back
    assert undo == second.undone
    forth = history.forth()
    assert forth is not None and forth[0] == second
    assert history.after(Edit(1, (), ("c",))).forth() is None


def test_empty_history_has_nothing_to_do():
    assert History().back() is None
    assert History().forth() is None
