"""Remembered blocks give the cold answer, and are given up when anything they depend on changes."""

import pytest

import eqsheet
from eqsheet.diagnostics.source import Source
from eqsheet.model.lowered_cache import LoweredCache
from eqsheet.worksheet.block_memory import BlockMemory
from eqsheet.worksheet.sheet import read

SHEET = [
    "a = 2 m",
    "b = 3 m",
    "x*y = a*b",
    "x + y = 5 m",
    "x near 1 m",
    "z = if x > 2.5 m then 2*x else 3*x",
    "w^2 = a*z",
    "require w < 10 m",
]


class Edited:
    """A worksheet solved again and again with one memory."""

    def __init__(self):
        self.cache, self.memory = LoweredCache(), BlockMemory()

    def solve(self, lines):
        return read(Source("sheet", "\n".join(lines)), self.cache, self.memory).solve()


def told(solution):
    """All a solution says."""
    return (
        solution.status,
        {n: (v.si, v.error, v.digits, v.line) for n, v in solution.items()},
        [(b.unknowns, b.lines, b.method, b.iterations, b.residual, b.solved) for b in solution.blocks],
        [(d.code, d.message, d.span.line if d.span else None) for d in solution.diagnostics],
    )


@pytest.mark.parametrize(
    "edit",
    [
        lambda lines: ["# above", *lines],
        lambda lines: [*reversed(lines)],
        lambda lines: ["A = 1 m", *lines],
        lambda lines: [*lines, "zz = 2*w"],
        lambda lines: ["a = 2.5 m", *lines[1:]],
        lambda lines: [line.replace("near 1 m", "near 4 m") for line in lines],
        lambda lines: [line.replace("near 1 m", "within 0 m .. 2.2 m") for line in lines],
        lambda lines: [line.replace("2.5 m", "1.5 m") for line in lines],
        lambda lines: [line.replace("x*y", "y * x") for line in lines],
        lambda lines: [line.replace("= 3 m", "= 2 m") for line in lines],
        lambda lines: [line.replace("5 m", "1 m") for line in lines],
        lambda lines: [line.replace("x", "q") for line in lines],
        lambda lines: lines[1:],
    ],
)
def test_solution_after_an_edit_is_the_cold_one(edit):
    edited = Edited()
    edited.solve(SHEET)
    changed = edit(SHEET)
    assert told(edited.solve(changed)) == told(eqsheet.parse("\n".join(changed)).solve())
    assert told(edited.solve(SHEET)) == told(eqsheet.parse("\n".join(SHEET)).solve())


def test_unchanged_worksheet_solves_nothing_anew():
    edited = Edited()
    edited.solve(SHEET)
    before = edited.memory.solved_anew
    edited.solve(SHEET)
    assert edited.memory.solved_anew == before
    assert edited.memory.recalled == before


def test_knowns_of_equal_value_are_not_mixed_up():
    edited = Edited()
    edited.solve(["a = 2 m", "b = 2 m", "x = a + 1 m", "y = a + 1 m"])
    after = ["a = 2 m", "b = 2 m", "x = a + 1 m", "y = b + 1 m"]
    solution = edited.solve(after)
    assert [b.depends for b in solution.blocks] == [("a",), ("b",)]
    assert told(solution) == told(eqsheet.parse("\n".join(after)).solve())


def test_failed_block_is_explained_again_where_it_now_stands():
    edited = Edited()
    edited.solve(["x^2 = -4"])
    solution = edited.solve(["# above", "x^2 = -4"])
    assert solution.status == "unsolved"
    assert [d.span.line for d in solution.diagnostics if d.code == "no-solution"] == [2]
