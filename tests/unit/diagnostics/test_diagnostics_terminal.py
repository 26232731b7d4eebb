"""A diagnostic as a person sees it at a terminal."""

from __future__ import annotations

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, Severity, error, note, warning
from eqsheet.diagnostics.source import Source, Span
from eqsheet.diagnostics.terminal import COLOURED, render, render_all

LOOP = Source("loop.eqsheet", "D = 52.5 mm\np = D + 3 bar\n")


def place(source: Source, text: str) -> Span:
    start = source.text.index(text)
    return Span(source, start, start + len(text))


def test_headline_place_and_guilty_text() -> None:
    shown = render(error("clash", "pressure is added to length", Label(place(LOOP, "3 bar"))))
    assert shown.splitlines() == [
        "loop.eqsheet:2:9: error: pressure is added to length [clash]",
        "   2 | p = D + 3 bar",
        "     |         ^^^^^",
    ]


def test_other_places_follow_with_what_is_said_of_them() -> None:
    shown = render(
        error(
            "clash",
            "pressure is added to length",
            Label(place(LOOP, "3 bar"), "a pressure"),
            Label(place(LOOP, "52.5 mm"), "makes D a length"),
            notes=("first note", "second note"),
            help="check the units",
        )
    )
    assert shown.splitlines() == [
        "loop.eqsheet:2:9: error: pressure is added to length [clash]",
        "   2 | p = D + 3 bar",
        "     |         ^^^^^ a pressure",
        "   1 | D = 52.5 mm",
        "     |     ------- makes D a length",
        "  note: first note",
        "  note: second note",
        "  help: check the units",
    ]


def test_two_places_in_one_line_share_it() -> None:
    lines = render(
        warning("clash", "m", Label(place(LOOP, "3 bar")), Label(place(LOOP, "p"), "here"))
    ).splitlines()
    assert lines[1:] == ["   2 | p = D + 3 bar", "     |         ^^^^^", "     | - here"]


def test_a_place_in_another_file_names_it() -> None:
    other = Source("pump.eqsheet", "n = 2")
    lines = render(
        note("twice", "m", Label(place(LOOP, "p")), Label(place(other, "n"), "first here"))
    ).splitlines()
    assert lines[3:] == ["  in pump.eqsheet:", "   1 | n = 2", "     | - first here"]


def test_colour_is_for_severity_alone() -> None:
    shown = render(error("clash", "m", Label(place(LOOP, "p")), help="h"), COLOURED)
    assert shown.splitlines() == [
        "loop.eqsheet:2:1: \x1b[1;31merror\x1b[0m: m [clash]",
        "   2 | p = D + 3 bar",
        "     | \x1b[1;31m^\x1b[0m",
        "  help: h",
    ]


def test_without_a_place_the_file_is_named() -> None:
    shown = render(Diagnostic("unreadable-file", Severity.ERROR, "no such file", file="a.eqsheet"))
    assert shown == "a.eqsheet: error: no such file [unreadable-file]"


def test_numbers_that_mean_nothing_are_left_out() -> None:
    source = Source("--with", "D = 5 lbs", numbered=False)
    assert render(error("unknown-unit", "m", Label(place(source, "lbs")))).splitlines() == [
        "--with: error: m [unknown-unit]",
        "     | D = 5 lbs",
        "     |       ^^^",
    ]


def test_wide_characters_shift_the_underline() -> None:
    source = Source("a", "温度 = 3 lbs")
    assert render(error("c", "m", Label(place(source, "lbs")))).splitlines()[2] == "     |          ^^^"


def test_tabs_are_widened() -> None:
    source = Source("a", "x\t= 3 lbs")
    assert render(error("c", "m", Label(place(source, "lbs")))).splitlines()[1:] == [
        "   1 | x    = 3 lbs",
        "     |          ^^^",
    ]


def test_long_lines_are_cut_round_the_place() -> None:
    source = Source("a", "x = " + "a + " * 5000 + "3 lbs" + " + b" * 5000)
    lines = render(error("c", "m", Label(place(source, "lbs"))), width=60).splitlines()
    assert all(len(line) <= 60 for line in lines[1:])
    column = lines[2].index("^")
    assert lines[1][column : column + 3] == "lbs"
    assert lines[1].startswith("   1 | ...")
    assert lines[1].endswith("...")


def test_a_guilty_text_longer_than_the_line_is_cut() -> None:
    source = Source("a", "x = " + "y" * 300)
    lines = render(error("c", "m", Label(place(source, "y" * 300))), width=60).splitlines()
    assert all(len(line) <= 60 for line in lines[1:])


def test_a_place_over_several_lines_is_underlined_in_its_first() -> None:
    source = Source("a", "x = (1 +\n 2)")
    lines = render(error("c", "m", Label(Span(source, 4, len(source.text))))).splitlines()
    assert lines[1:] == ["   1 | x = (1 +", "     |     ^^^^"]


def test_the_end_of_a_line_can_be_pointed_at() -> None:
    source = Source("a", "x = ")
    assert render(error("c", "m", Label(Span(source, 4, 4)))).splitlines()[1:] == [
        "   1 | x =",
        "     |     ^",
    ]


def test_escape_sequences_do_not_reach_the_terminal() -> None:
    source = Source("a\x1b[2J", "x = \x1b[31m")
    shown = render(error("c", "m\x1b]0;t\x07", Label(place(source, "\x1b[31m"), "l\x1b"), help="\x1b"))
    assert "\x1b" not in shown
    assert "\x07" not in shown


def test_line_numbers_line_up_in_long_worksheets() -> None:
    source = Source("a", "\n" * 123455 + "x = 1 lbs")
    assert render(error("c", "m", Label(place(source, "lbs")))).splitlines()[1:] == [
        "123456 | x = 1 lbs",
        "       |       ^^^",
    ]


def test_several_are_set_apart() -> None:
    one = error("c", "m", Label(place(LOOP, "p")))
    assert render_all([one, one]) == render(one) + "\n\n" + render(one)
