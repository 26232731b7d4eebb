"""A known set to another value gives what preparing the changed worksheet anew gives."""

from __future__ import annotations

from pathlib import Path

import pytest

import eqsheet
from eqsheet.worksheet.prepare_changed import prepare_changed, unchanged
from eqsheet.worksheet.sheet import Worksheet

SAMPLES = sorted((Path(__file__).parents[3] / "samples").glob("*.eqsheet"))
PIPE = """D = 52.5 mm  # bore
L = 12 m ± 1 cm
n = 3
Q = 2 L/s
p = 2 barg
A = pi*D^2/4
v = Q/A
x = if Q > 1 L/s then n*v else v
y = p*L
"""


def seen(sheet: Worksheet, changes: list[str]) -> list[object]:
    """What a user sees of a solution."""
    solution = sheet.solve(changes)
    values = [
        (q.name, q.si, q.unit, q.kind, q.line, q.error, q.digits, q.tolerance) for q in solution.values()
    ]
    return [
        solution.status,
        values,
        solution.limits,
        solution.diagnostics,
        solution.blocks,
        solution.statements,
    ]


def assert_same(text: str, changes: list[str]) -> None:
    """Changed after it was solved as it stands, and changed straight away."""
    warm = eqsheet.parse(text)
    warm.solve()
    assert seen(warm, changes) == seen(eqsheet.parse(text), changes)


@pytest.mark.parametrize(
    "changes",
    [
        ["D = 60 mm"],
        ["D = 60 mm", "Q = 3 L/s"],
        ["D = 60 mm  # larger bore"],
        ["bore: D = 60 mm"],
        ["D = 6 cm"],
        ["D = 60"],
        ["D = 0 mm"],
        ["60 mm = D"],
        ["L = 13 m"],
        ["L = 13 m ± 2 cm"],
        ["n = 4"],
        ["Q = 0.5 L/s"],
        ["p = 3 barg"],
        ["p = 3 bar"],
        ["v = 2 m/s"],
        ["z = 2 m"],
        ["ambient = 84 kPa"],
        ["D = A/L"],
        ["D = "],
        ["require v < 1 m/s"],
    ],
)
def test_changes_of_a_pipe(changes: list[str]) -> None:
    assert_same(PIPE, changes)


@pytest.mark.parametrize(
    "text", ["a = 2 m\nb = 3 m\na + b = 5 m", "a = 2 m\na = 3 m\nb = a", "a = 2 m\nb = a + 1 s"]
)
def test_worksheets_in_which_more_than_values_may_change(text: str) -> None:
    assert_same(text, ["a = 4 m"])


@pytest.mark.parametrize("path", SAMPLES, ids=lambda path: path.stem)
def test_numbers_of_the_samples(path: Path) -> None:
    sheet = eqsheet.load(path)
    base = unchanged(sheet.prepare())
    system = base.prepared.system
    for quantity, setter in list(base.prepared.setters.items())[:4]:
        item = system.equations[setter]
        written = system.statements[item.place.statement].line.text[item.place.start : item.place.end]
        changed = prepare_changed(base, [written], sheet.cache)
        if changed is not None:
            assert changed.formulas == base.prepared.formulas, system.names[quantity]
            assert changed.known_values == base.prepared.known_values
            assert changed.system.first_places == system.first_places


def test_is_taken_for_a_plain_number() -> None:
    sheet = eqsheet.parse(PIPE)
    base = unchanged(sheet.prepare())
    assert prepare_changed(base, ["D = 60 mm"], sheet.cache) is not None
    assert prepare_changed(base, ["D = 6 cm"], sheet.cache) is None
    assert prepare_changed(base, ["Q = 0.5 L/s"], sheet.cache) is None


def test_is_ready_from_the_second_call_with_changes_on() -> None:
    """A single call, as from the command line, prepares nothing that it does not need."""
    sheet = eqsheet.parse(PIPE)
    once = seen(sheet, ["D = 60 mm"])
    assert sheet.unchanged is None
    assert seen(sheet, ["D = 60 mm"]) == once
    assert sheet.unchanged is not None
