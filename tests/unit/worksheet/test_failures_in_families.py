"""What is said of a family that has no solution: each line once, members by name, bounds only where they are reached."""

from __future__ import annotations

import re

from solving import only, solve

RING = """
    for i in 1..4:
        x[i]^2 + x[i+1]^2 = 2 + 0.1*i
        x[i] near i within 0.2 .. 10
    x[5]*x[1] = 30
"""


def test_a_line_of_several_members_is_shown_once() -> None:
    found = only(solve(RING), "no-solution")
    shown = [label.span for label in found.labels]
    assert len(shown) == len(set(shown)) == 2


def test_equations_are_told_with_their_members() -> None:
    notes = only(solve(RING), "no-solution").notes
    told = [note for note in notes if re.search(r"\bline 2\b", note)]
    assert told
    assert all(re.search(r"line 2 \(i = [1-4]\)", note) for note in told)


def test_members_of_instances_are_told_with_the_instance() -> None:
    text = """
        template pair:
            exp(x) + x^2 = -s
            x near 1
        use pair as p:
            s = 1
    """
    notes = only(solve(text), "no-solution").notes
    assert any("line 2 (p)" in note for note in notes)


def test_what_is_away_from_its_bound_does_not_rest_on_it() -> None:
    """The circle of radius 2 about the origin and the line x - y = 5 do not meet; they are nearest at (1.77, -1.77)."""
    found = only(solve("x^2 + y^2 = 4\nx - y = 5\nx within 0 .. 10\ny near 1"), "no-solution")
    assert not any("rests on" in note for note in found.notes)


def test_what_is_on_its_bound_rests_on_it() -> None:
    found = only(solve(RING), "no-solution")
    best = next(note for note in found.notes if note.startswith("best point"))
    resting = [re.findall(r"`(x\[\d\])` rests on its lower bound 0\.2", note) for note in found.notes]
    names = [name for group in resting for name in group]
    assert names
    assert all(f"{name} = 0.2" in best for name in names)
