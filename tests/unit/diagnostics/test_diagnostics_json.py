"""A diagnostic as data."""

from __future__ import annotations

import json

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, Severity, error
from eqsheet.diagnostics.json import as_data
from eqsheet.diagnostics.source import Source, Span

LOOP = Source("loop.eqsheet", "a = 1\nb = 2\n")


def test_the_keys_the_interface_promises() -> None:
    found = as_data(error("odd", "it is odd", Label(Span(LOOP, 10, 11)), help="mend it"))
    assert found == {
        "code": "odd",
        "severity": "error",
        "file": "loop.eqsheet",
        "line": 2,
        "column": 5,
        "message": "it is odd",
        "help": "mend it",
        "notes": [],
        "labels": [],
    }


def test_secondary_places_and_notes() -> None:
    found = as_data(
        error("odd", "m", Label(Span(LOOP, 6, 7)), Label(Span(LOOP, 0, 1), "set here"), notes=("n",))
    )
    assert found["notes"] == ["n"]
    assert found["labels"] == [
        {"file": "loop.eqsheet", "line": 1, "column": 1, "text": "a", "says": "set here"}
    ]


def test_line_is_null_where_numbers_mean_nothing() -> None:
    source = Source("--with", "a = 1", numbered=False)
    found = as_data(error("odd", "m", Label(Span(source, 0, 1)), Label(Span(source, 4, 5), "here")))
    assert (found["file"], found["line"], found["column"]) == ("--with", None, None)
    assert found["labels"][0]["line"] is None


def test_without_a_place() -> None:
    found = as_data(Diagnostic("odd", Severity.ERROR, "m", file="a.eqsheet"))
    assert (found["file"], found["line"], found["column"]) == ("a.eqsheet", None, None)


def test_it_can_be_written() -> None:
    written = json.dumps(as_data(error("odd", "m", Label(Span(LOOP, 0, 1)))), allow_nan=False)
    assert json.loads(written)["code"] == "odd"
