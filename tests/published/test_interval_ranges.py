"""Ranges narrowed by a worksheet's equations hold its solution: on every worksheet of the corpus."""

from __future__ import annotations

import math

import pytest
from corpus_changes import Entry, corpus

import eqsheet
from eqsheet.worksheet.follow_from_knowns import follow_from_knowns
from eqsheet.worksheet.guesses import work_out_guesses
from eqsheet.worksheet.intervals import narrowed

ENTRIES = corpus()


@pytest.mark.parametrize("bounded", [True, False], ids=["within bounds", "without bounds"])
@pytest.mark.parametrize("group", ENTRIES[::20], ids=lambda e: f"from {e.name}")
def test_the_solution_is_in_the_ranges(group: Entry, bounded: bool) -> None:
    """All equations at once, with the knowns as they are, twenty worksheets a test."""
    first = ENTRIES.index(group)
    for entry in ENTRIES[first : first + 20]:
        sheet = eqsheet.parse(entry.text)
        solution, prepared = sheet.solve(), sheet.prepare()
        guesses, _ = work_out_guesses(prepared.system, follow_from_knowns(prepared), prepared.kinds)
        names = prepared.system.names
        unknowns = [q for q in range(len(names)) if q not in prepared.known_values]
        values = [prepared.known_values.get(q, math.nan) for q in range(len(names))]
        bounds = [guesses.bounds(q) if bounded else (-math.inf, math.inf) for q in unknowns]
        formulas = [f for f in prepared.formulas if any(q in unknowns for q in f.quantities)]
        found = narrowed(unknowns, formulas, values, bounds)
        assert found.empty == -1, entry.name
        for quantity, (low, high) in zip(unknowns, found.ranges):
            value = solution[names[quantity]]
            assert low - value.error <= value.si <= high + value.error, (entry.name, names[quantity])
