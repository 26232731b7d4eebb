"""How long an edit of one known takes, from the typed line to the values on the screen.

To reach: 10 ms for 20 equations, 50 ms for 1,000. Nothing here asserts a time; the assertions make sure that
what is timed is right.
"""

from __future__ import annotations

from itertools import cycle
from typing import Any

import pytest
from edited_worksheets import Shown, loops
from one_line import one_line_worksheet

import eqsheet


def alternating(shown: Shown, edits: list[str]) -> Any:
    """A function that types the next of the edits, over and over."""
    texts = cycle(edits)
    return lambda: shown.type(next(texts))


def agrees_with_cold(shown: Shown) -> None:
    cold = eqsheet.parse("\n".join(shown.document.lines)).solve()
    warm = shown.document.solution
    assert {n: v.si for n, v in warm.items()} == {n: v.si for n, v in cold.items()}


def test_known_of_twenty_coupled_equations(benchmark: Any) -> None:
    shown = Shown(loops(1))
    said = benchmark(alternating(shown, [f"D_01 = {40 + i} mm" for i in range(200)]))
    assert "D_01" in said and "solved" in said
    agrees_with_cold(shown)


def test_known_of_one_of_fifty_loops(benchmark: Any) -> None:
    shown = Shown(loops(50))
    assert sum(len(b.unknowns) for b in shown.document.solution.blocks) == 1000
    said = benchmark(alternating(shown, [f"D_25 = {40 + i / 7} mm" for i in range(200)]))
    assert "D_25" in said and "solved" in said
    agrees_with_cold(shown)


@pytest.mark.parametrize("edit", ["x_0 = 1.{} m", "y = {} m"], ids=["moves all", "moves nothing"])
def test_known_of_a_thousand_lines(benchmark: Any, edit: str) -> None:
    text, _ = one_line_worksheet(1000)
    shown = Shown(text)
    said = benchmark(alternating(shown, [edit.format(100 + i) for i in range(200)]))
    assert "solved" in said
    agrees_with_cold(shown)


def test_line_inserted_above_a_thousand_equations(benchmark: Any) -> None:
    shown = Shown(loops(50))
    solved = shown.document.memory.solved_anew
    notes = iter(range(10_000_000))
    benchmark(lambda: shown.document.insert(1, f"# note {next(notes)}"))
    assert shown.document.memory.solved_anew == solved
