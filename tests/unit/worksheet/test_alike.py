"""What many members share is told once."""

from __future__ import annotations

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.diagnostics.source import Source, Span
from eqsheet.worksheet.alike import fold_alike

SOURCE = Source("x", "x[i] = 1\ny = 2\n")
NAMES = ("x[1]", "x[2]", "x[3]", "p.x", "y")
HERE, THERE = Span(SOURCE, 0, 8), Span(SOURCE, 9, 14)


def about(name: str, span: Span = HERE, code: str = "no-solution", more: str = "") -> Diagnostic:
    return error(code, f"no solution found: `{name}` from line 1{more}", Label(span))


def test_members_with_one_fault_are_told_once() -> None:
    (found,) = fold_alike([about("x[1]"), about("x[2]"), about("x[3]")], NAMES)
    assert found.message == about("x[1]").message
    assert found.notes == ("the same is so of `x[2]` and `x[3]`",)


def test_numbers_in_the_headline_make_no_difference() -> None:
    found = fold_alike([about("x[1]", more=": 3.5 against 2"), about("x[2]", more=": 4e-3 against 1")], NAMES)
    assert len(found) == 1


def test_members_may_stand_in_labels_and_notes() -> None:
    both = [
        error("equation-always-false", "`x[i] = 1` is false", Label(HERE), Label(THERE, f"`{n}` is set here"))
        for n in ("x[1]", "x[2]")
    ]
    (found,) = fold_alike(both, NAMES)
    assert found.notes == ("the same is so of `x[2]`",)


def test_different_places_codes_or_words_stay_apart() -> None:
    several = [
        about("x[1]"),
        about("x[2]", THERE),
        about("x[3]", code="under-determined"),
        about("p.x", more=" within the bounds"),
    ]
    assert fold_alike(several, NAMES) == several


def test_findings_without_members_stay_as_they_are() -> None:
    several = [about("y"), about("z"), error("no-statement", "nothing"), error("no-statement", "nothing")]
    assert fold_alike(several, NAMES) == several


def test_the_order_is_kept() -> None:
    found = fold_alike([about("x[1]"), about("y", THERE), about("x[2]")], NAMES)
    assert [d.span for d in found] == [HERE, THERE]
