"""A diagnostic on one line."""

from __future__ import annotations

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, Severity, warning
from eqsheet.diagnostics.oneline import one_line
from eqsheet.diagnostics.source import Source, Span

LOOP = Source("loop.eqsheet", "a = 1\nb = 2\n")


def test_place_severity_message_code() -> None:
    assert one_line(warning("odd", "it is odd", Label(Span(LOOP, 10, 11)))) == (
        "loop.eqsheet:2:5: warning: it is odd [odd]"
    )


def test_without_place_and_file_only_the_headline() -> None:
    assert one_line(Diagnostic("odd", Severity.NOTE, "it is odd")) == "note: it is odd [odd]"


def test_numbers_that_mean_nothing_are_left_out() -> None:
    source = Source("--with", "a = 1", numbered=False)
    assert one_line(warning("odd", "m", Label(Span(source, 0, 1)))) == "--with: warning: m [odd]"


def test_it_stays_one_line_whatever_the_message() -> None:
    assert "\n" not in one_line(warning("odd", "two\nlines", Label(Span(LOOP, 0, 1))))
