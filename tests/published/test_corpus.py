"""The figures of the corpus kept from falling back, on a part of the runs that ``corpus_figures.py`` takes."""

from __future__ import annotations

from collections.abc import Iterable

import pytest
from adversarial import CONTINUUM
from corpus_changes import FAULTS, corpus
from corpus_runs import (
    Run,
    adversarial_runs,
    as_written,
    faults,
    guesses_removed,
    other_order,
    rescalings,
    starts_off,
    starts_removed,
)

from eqsheet.solve.trail import Budget

ENTRIES = corpus()
EDGE = [e for e in ENTRIES if "domain edge" in e.sets]
PUBLISHED = [e for e in ENTRIES if "published" in e.sets]


def check(running: Iterable[Run], asked: float) -> None:
    """The share asked for is right, and nothing is called solved that is not."""
    runs = list(running)
    assert [run.name for run in runs if run.false] == []
    wrong = [f"{run.name}: {run.said}" for run in runs if not run.right]
    assert len(runs) - len(wrong) >= asked * len(runs), wrong


def test_the_corpus_is_as_large_as_asked() -> None:
    assert len(ENTRIES) >= 100
    assert len(EDGE) >= 40
    assert len(PUBLISHED) >= 20
    assert all("# Source: " in e.text for e in ENTRIES)


def test_every_worksheet_is_solved_as_written() -> None:
    check(as_written(ENTRIES), 1.0)


def test_start_values_removed() -> None:
    check(starts_removed(ENTRIES), 0.95)


def test_guesses_removed_bounds_and_all() -> None:
    check(guesses_removed(ENTRIES), 0.95)


@pytest.mark.parametrize("factor", [1e-2, 1e2])
def test_start_values_off_by_a_hundred(factor: float) -> None:
    check(starts_off(ENTRIES, (factor,)), 0.98)


def test_domain_edges_from_far_off() -> None:
    check(starts_off(EDGE, (1e-3, 1e3)), 0.99)


def test_published_systems_from_far_off() -> None:
    check(starts_off(PUBLISHED, (1e-3, 1e3)), 0.98)


def test_quantities_rescaled() -> None:
    check(rescalings(ENTRIES, (2,)), 1.0)


def test_lines_shuffled_and_names_changed() -> None:
    check(other_order(ENTRIES[::2], (1,)), 1.0)


@pytest.mark.parametrize("kind", ["exponent", "contradiction"])
def test_the_faulty_line_is_among_the_first_named(kind: str) -> None:
    assert kind in FAULTS
    check(faults(ENTRIES, kind, 25, 1), 0.8)


def test_nothing_is_called_solved_that_has_no_solution() -> None:
    """On a small budget: what leaves a combination free takes longer to be told."""
    runs = list(adversarial_runs(Budget(iterations=60, seconds=0.3)))
    assert [run.name for run in runs if run.false] == []
    assert [f"{run.name}: {run.said}" for run in runs if not run.right and run.name not in CONTINUUM] == []
