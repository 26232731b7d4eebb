"""Runs of the corpus: what each figure counts, one function a figure.

A run counts as solved only where the program says so and the equations hold at fifty digits, within the
bounds; where the program says so and they do not, it is a false success.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from random import Random
from time import perf_counter

from adversarial import ALL, CONTINUUM
from corpus_changes import (
    FAULTS,
    Entry,
    Fault,
    names_of,
    renamed,
    rescaled,
    shuffled,
    with_starts_off,
    without_guesses,
    without_starts,
)
from exact_evaluation import holds

import eqsheet
from eqsheet.solve.ladder import DEFAULT_BUDGET
from eqsheet.solve.trail import Budget

SAME = 1e-10
DECADES = 6
# A fault is looked for among the first lines that are named.
FIRST = 3
# What a run of the adversarial set may take besides the budget of its one block: the time between checks of
# the clock, and the look past the bounds.
GRACE = 4.0


@dataclass(frozen=True)
class Run:
    """One solved text: what of, how it went, and how it was meant to go.

    Attributes
    ----------
    name : str
    right : bool
        Whether it did what the figure asks.
    false : bool
        Whether it was called solved and is not.
    said : str
        What went wrong; empty where nothing did.
    seconds : float
    """

    name: str
    right: bool
    false: bool
    said: str
    seconds: float


def _solved(name: str, text: str) -> tuple[Run, eqsheet.Solution]:
    begin = perf_counter()
    solution = eqsheet.parse(text).solve()
    seconds = perf_counter() - begin
    if not solution.solved:
        said = next((d.message for d in solution.diagnostics if d.severity.value == "error"), "")
        return Run(name, False, False, said, seconds), solution
    true = holds(text, solution)
    return Run(name, true, not true, "" if true else "false success", seconds), solution


def as_written(entries: Sequence[Entry]) -> Iterator[Run]:
    """Each worksheet with its own guesses."""
    return (_solved(e.name, e.text)[0] for e in entries)


def starts_removed(entries: Sequence[Entry]) -> Iterator[Run]:
    """Start values removed, bounds kept."""
    return (_solved(e.name, without_starts(e.text))[0] for e in entries)


def guesses_removed(entries: Sequence[Entry]) -> Iterator[Run]:
    """Guesses removed, bounds and all: any solution counts."""
    return (_solved(e.name, without_guesses(e.text))[0] for e in entries)


def starts_off(entries: Sequence[Entry], factors: Sequence[float]) -> Iterator[Run]:
    """All start values multiplied by each of the factors."""
    for entry in entries:
        for factor in factors:
            yield _solved(f"{entry.name} x{factor:g}", with_starts_off(entry.text, factor))[0]


def rescalings(entries: Sequence[Entry], seeds: Sequence[int]) -> Iterator[Run]:
    """Each quantity in another scale, up to six powers of ten either way; temperatures with an origin apart."""
    for entry in entries:
        original, solution = _solved(entry.name, entry.text)
        for seed in seeds:
            random = Random(f"{entry.name} {seed}")
            factors = {
                name: random.randint(-DECADES, DECADES)
                for name in names_of(entry.text)
                if name in solution and solution[name].kind != "reading"
            }
            run, again = _solved(f"{entry.name} scaled {seed}", rescaled(entry.text, factors))
            scale = {name: 10.0 ** factors.get(name, 0) for name in solution}
            yield _compared(original, solution, run, again, {n: n for n in solution}, scale)


def other_order(entries: Sequence[Entry], seeds: Sequence[int]) -> Iterator[Run]:
    """Lines shuffled and names changed, their order kept."""
    for entry in entries:
        original, solution = _solved(entry.name, entry.text)
        for seed in seeds:
            text, new = renamed(shuffled(entry.text, seed))
            run, again = _solved(f"{entry.name} shuffled {seed}", text)
            yield _compared(original, solution, run, again, new, {})


def _compared(
    original: Run,
    solution: eqsheet.Solution,
    run: Run,
    again: eqsheet.Solution,
    new: Mapping[str, str],
    scale: Mapping[str, float],
) -> Run:
    """Right where both are solved to the same results in as many iterations, give or take one, or neither is."""
    if not (original.right and run.right):
        same = original.right == run.right
        return Run(run.name, same, run.false, "" if same else run.said or "solved now", run.seconds)
    for name, value in solution.items():
        found = again[new[name]].si * scale.get(name, 1.0)
        # What the program itself says is good to fewer digits may differ by as much.
        allowed = max(SAME * abs(value.si), value.error)
        if abs(found - value.si) > allowed:
            return Run(run.name, False, run.false, f"{name}: {value.si!r} and {found!r}", run.seconds)
    before = {tuple(sorted(new[n] for n in b.unknowns)): b.iterations for b in solution.blocks}
    for block in again.blocks:
        # A known that is rescaled becomes a block of its own, which was none before.
        steps = before.get(tuple(sorted(block.unknowns)), block.iterations)
        if len(block.unknowns) > 1 and abs(block.iterations - steps) > 1:
            return Run(run.name, False, run.false, f"{steps} and {block.iterations} iterations", run.seconds)
    return run


def adversarial_runs(budget: Budget = DEFAULT_BUDGET) -> Iterator[Run]:
    """Worksheets without a solution to be found: each ends in time, unsolved, and says what is true."""
    for name, text in ALL.items():
        begin = perf_counter()
        solution = eqsheet.parse(text).solve(budget=budget)
        seconds = perf_counter() - begin
        message = " ".join(d.message for d in solution.diagnostics)
        said = ""
        if solution.solved:
            said = "called solved"
        elif seconds > budget.seconds + GRACE:
            said = f"took {seconds:.1f} s"
        elif name in CONTINUUM and "free" not in message:
            said = f"not said to leave anything free: {message}"
        elif not any(d.severity.value == "error" for d in solution.diagnostics):
            said = "no word why"
        yield Run(name, not said, solution.solved, said, seconds)


def faults(entries: Sequence[Entry], kind: str, count: int, seed: int) -> Iterator[Run]:
    """Seeded faults of one kind that leave the worksheet without a solution: is the line among the first named?

    A fault that leaves a worksheet with a (wrong) solution cannot be seen, and another is taken.
    """
    random = Random(f"{kind} {seed}")
    make: Callable[..., Fault | None] = FAULTS[kind]
    found = 0
    while found < count:
        entry = random.choice(entries)
        sound = eqsheet.parse(entry.text).solve()
        fault = make(entry.text, sound, random)
        if fault is None:
            continue
        begin = perf_counter()
        solution = eqsheet.parse(fault.text).solve()
        seconds = perf_counter() - begin
        if solution.solved:
            continue
        found += 1
        named = lines_named(solution)
        right = fault.line in named[:FIRST]
        yield Run(entry.name, right, False, "" if right else f"{fault.what}; named {named}", seconds)


def lines_named(solution: eqsheet.Solution) -> list[int]:
    """Lines in the order the errors name them."""
    named: dict[int, None] = {}
    for diagnostic in solution.diagnostics:
        if diagnostic.severity.value == "error":
            for label in diagnostic.labels:
                named[label.span.line] = None
    return list(named)
