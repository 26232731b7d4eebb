"""The structural verdict, said with lines and names before any number of the part at fault."""

from __future__ import annotations

import pytest
from solving import errors, lines, only, solve, values


def test_over_determined_names_statements_quantities_and_what_could_go() -> None:
    solution = solve(
        """
        D = 50 mm
        A = pi*D^2/4
        Q = 2 L/s
        v = Q/A
        v = 3 m/s
        """
    )
    found = only(solution, "contradicting-equations")
    assert found.message == "lines 1, 2, 3, 4 and 5 contradict each other: 5 statements for 4 quantities"
    assert sorted(lines(found)) == [1, 2, 3, 4, 5]
    assert found.notes[0] == "they compete for `A`, `D`, `Q` and `v`"
    assert found.help == "switch one of them `off`; a known that could go: `v`, `D` or `Q`"


def test_the_known_of_a_quantity_with_its_own_equation_is_the_one_too_many() -> None:
    """2 L/s through pi/4*(50 mm)^2 is 1.0186 m/s by hand."""
    found = only(solve("v = 3 m/s\nv = Q/A\nQ = 2 L/s\nA = pi*D^2/4\nD = 50 mm"), "contradicting-equations")
    assert (lines(found)[0], found.labels[0].text) == (1, "this is one too many")
    assert found.notes[1] == "the others make `v` 1.0186 m/s, line 1 sets it to 3 m/s"


def test_values_that_contradict_are_not_shown_nor_what_depends_on_them() -> None:
    solution = solve("x + y = 5\nx - y = 1\n2*x = 7\nz = 2*x\nk = 3*w\nw = 2")
    assert errors(solution) == ["contradicting-equations"]
    assert values(solution) == {"k": 6.0, "w": 2.0}


def test_redundant_is_told_from_contradicting() -> None:
    solution = solve("x + y = 5\nx - y = 1\n2*x = 6")
    found = only(solution, "redundant-equations")
    assert found.message == (
        "lines 1, 2 and 3 repeat each other: 3 statements for 2 quantities, all satisfied by the solution"
    )
    assert solution.status == "invalid"
    assert values(solution) == pytest.approx({"x": 3.0, "y": 2.0})


def test_whether_they_contradict_cannot_be_told_where_the_others_have_no_solution() -> None:
    solution = solve("x^2 = -1\nx*y = 3\ny = 2*x")
    assert "over-determined" in errors(solution)
    assert "`x` and `y`" in only(solution, "over-determined").message


def test_under_determined_names_what_is_free_and_what_to_add() -> None:
    solution = solve("D = 50 mm\nA = pi*D^2/4\nv = Q/A\nshow v in m/s")
    found = only(solution, "under-determined")
    assert found.message == "line 3 does not determine `Q` and `v`: one more equation or known is needed"
    assert found.help == "set one of `Q` or `v` by a line of its own, or add an equation between them"
    assert lines(found) == [3]
    assert values(solution) == pytest.approx({"D": 0.05, "A": 0.0019634954084936209})


def test_how_many_are_missing() -> None:
    found = only(solve("a + b + c = 3\nd = a\na near 1"), "under-determined")
    assert "2 more equations or knowns are needed" in found.message
    assert found.help.startswith("set 2 of `a`, `b`, `c` or `d`")


def test_a_quantity_that_no_equation_needs_to_hold() -> None:
    """It stands in an equation that is taken by another quantity: it is free all the same."""
    found = only(solve("x = y + z\nx = 2\ny = 1\nw = z*u"), "under-determined")
    assert "`u`" in found.message and "`w`" in found.message and "`z`" not in found.message


def test_separate_pieces_are_said_separately() -> None:
    solution = solve("a + b = 1\nc + d = 2\na near 1\nc near 1")
    assert errors(solution) == ["under-determined", "under-determined"]


def test_a_name_used_once_that_is_close_to_another_is_likely_a_slip() -> None:
    found = only(solve("flow = 3 L/s\ny = Flow*3\nz = flow"), "under-determined")
    assert found.notes == ("`Flow` occurs only on line 2: did you mean `flow`?",)


def test_square_but_structurally_singular() -> None:
    """Three equations, three unknowns: two of them fight for x, and nothing is left for z."""
    solution = solve("x^2 = 4\nx + 1 = 3\ny = z + x")
    assert sorted(errors(solution)) == ["redundant-equations", "under-determined"]
    note = "the worksheet has as many equations as unknowns, but too many of them elsewhere: it is structurally singular"
    assert only(solution, "under-determined").notes == (note,)
    assert values(solution) == {"x": 2.0}


def test_an_ill_posed_worksheet_is_invalid_even_where_a_block_fails_too() -> None:
    solution = solve("x^2 = -1\ny = z + 1")
    assert sorted(errors(solution)) == ["no-solution", "under-determined"]
    assert solution.status == "invalid"


def test_a_condition_on_knowns_is_settled_before_the_verdict() -> None:
    """With the branch settled, x stands in no equation: the verdict must see that."""
    text = "mode = {mode}\ny = if mode > 1 then x else 3\nx near 1"
    free = only(solve(text.format(mode=2)), "under-determined")
    assert "`x` and `y`" in free.message
    other = solve(text.format(mode=0))
    assert "nothing determines `x`" in only(other, "under-determined").message
    assert values(other)["y"] == 3.0


def test_many_lines_are_folded() -> None:
    text = "\n".join(f"x{i} = x{i + 1} + 1" for i in range(20)) + "\nx0 = 3\nx20 = 4"
    found = only(solve(text), "contradicting-equations")
    assert "and 15 more" in found.message
    assert len(found.labels) <= 7


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("A = π*D^2/4\nD = 50 mm\nC = π*D", "the number is written `pi`"),
        ("p = 2*ambient\nq = ambient/2\nr = 1 barg", "write `ambient = 101.325 kPa`"),
    ],
)
def test_names_that_are_taken_for_given_are_told_not_to_be(text: str, said: str) -> None:
    (note,) = only(solve(text), "under-determined").notes
    assert said in note


def test_a_known_whose_quantity_has_a_guess_is_named_first_among_what_competes() -> None:
    text = "a = 2 m\nb = 3 m\nx = a + b + y\ny*x = 10 m^2\nx near 5 m\nx = 7 m\n"
    found = only(solve(text), "contradicting-equations")
    assert 6 in lines(found)[:2]
    assert "could go: `x`, `a`" in found.help


def test_a_known_that_an_equation_has_alone_on_a_side_is_named_before_the_others() -> None:
    found = only(solve("a = 2 m\nb = 3 m\nc = a*b/1 m\nd = c + a\nd = 4 m"), "contradicting-equations")
    assert 5 in lines(found)[:2]


def test_what_may_be_missing_goes_before_a_long_list_of_what_is_to_be_found() -> None:
    solution = solve(
        """
        N = 50
        for i in 1..N:
            T[i-1] - 2*T[i] + T[i+1] = 0 K
            T[i] near 300 K
        T[0] = 300 K
        T[N+1] = u
        """
    )
    found = only(solution, "under-determined")
    assert "do not determine `u`, " in found.message
    assert found.help.startswith("set one of `u`, ")
    assert lines(found)[0] == 6


INNER = """
    template pipe:
        shared g
        m = 2*v + g
        v = 1 m/s
    template two:
        use pipe as a
        total = a.m
    g = 1 m/s
"""


def test_a_shared_name_that_the_template_between_does_not_share() -> None:
    found = only(solve(INNER + "    use two as t\n"), "under-determined")
    assert [note for note in found.notes if "`t.g`" in note] == [
        "`t.g` is there because `pipe` shares `g`: if that of the worksheet around is meant, "
        "write `shared g` in `two` too"
    ]


def test_it_is_told_once_for_all_instances() -> None:
    text = INNER + "    for i in 1..5:\n        use two as t[i]\n"
    found = [d for d in solve(text).diagnostics if d.code == "under-determined"]
    assert sum("write `shared g`" in note for d in found for note in d.notes) == 1


def test_a_name_of_the_template_between_is_its_own() -> None:
    text = INNER.replace("total = a.m", "total = a.m + g") + "    use two as t\n"
    found = only(solve(text), "under-determined")
    assert not any("shares" in note for note in found.notes)


def test_a_close_name_is_looked_for_in_the_same_instance() -> None:
    text = "template t:\n    y = 2*flov\n    flow = 3\nuse t as p\nflov = 1\n"
    found = only(solve(text), "under-determined")
    assert found.notes[0].startswith("`p.flov` occurs only on line 2: did you mean `p.flow`?")
