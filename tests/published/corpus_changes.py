"""Changes to a worksheet's text that the figures of the corpus are taken with.

Each takes a text and gives one that means the same (rescaled, shuffled, renamed), has other guesses, or has a
seeded fault. Places come from the syntax tree, so that nothing but what is meant is changed.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from pathlib import Path
from random import Random
from typing import TypeGuard

from exact_evaluation import statements_of

from eqsheet.syntax.nodes import (
    Binary,
    Equation,
    Expression,
    Guess,
    Number,
    Reference,
    Statement,
    Unary,
)
from eqsheet.syntax.walk import walk
from eqsheet.units.registry import UnitTable
from eqsheet.units.unit import Unit
from eqsheet.worksheet.solution import Solution

CORPUS = Path(__file__).parent / "corpus"


@dataclass(frozen=True)
class Entry:
    """One worksheet of the corpus: its name, its text and the sets it belongs to."""

    name: str
    text: str
    sets: tuple[str, ...]


def corpus() -> list[Entry]:
    """All worksheets of the corpus, by name."""
    entries = []
    for path in sorted(CORPUS.glob("*.eqsheet")):
        text = path.read_text(encoding="utf-8")
        lines = [line for line in text.splitlines() if line.startswith("# Set: ")]
        sets = tuple(lines[0].removeprefix("# Set: ").split(", ")) if lines else ()
        entries.append(Entry(path.stem, text, sets))
    return entries


@dataclass(frozen=True)
class _Edit:
    """Characters `start` to `end` of the text become `by`."""

    start: int
    end: int
    by: str


def _edited(text: str, edits: Iterable[_Edit]) -> str:
    for edit in sorted(edits, key=lambda e: (e.start, e.end), reverse=True):
        text = text[: edit.start] + edit.by + text[edit.end :]
    return text


def _part(statement: Statement, node: Expression) -> str:
    return statement.line.text[node.start : node.end]


# --- other guesses ----------------------------------------------------------------------------------------


def without_starts(text: str) -> str:
    """Every start value removed, bounds kept."""
    return _with_guesses(text, lambda statement, near: "", True)


def without_guesses(text: str) -> str:
    """Every guess removed, start values and bounds."""
    return _with_guesses(text, lambda statement, near: "", False)


def with_starts_off(text: str, factor: float) -> str:
    """Every start value multiplied, those of temperatures in kelvin; bounds kept."""

    def off(statement: Statement, near: Expression) -> str:
        if isinstance(near, Number) and near.unit is not None:
            unit = UnitTable.standard().resolve(
                near.unit.text, tuple((f.symbol, f.exponent) for f in near.unit.factors)
            )
            assert isinstance(unit, Unit)
            if unit.origin:
                return f"near {unit.to_si(float(near.text)) * factor!r} K"
        return f"near ({_part(statement, near)})*{factor!r}"

    return _with_guesses(text, off, True)


def _with_guesses(text: str, near: Callable[[Statement, Expression], str], bounds: bool) -> str:
    edits = []
    for statement in statements_of(text):
        guess = statement.node
        if not isinstance(guess, Guess):
            continue
        parts = [near(statement, guess.near)] if guess.near is not None else []
        if bounds and (guess.lower is not None or guess.upper is not None):
            low = _part(statement, guess.lower) + " " if guess.lower is not None else ""
            high = " " + _part(statement, guess.upper) if guess.upper is not None else ""
            parts.append(f"within {low}..{high}")
        parts = [p for p in parts if p]
        assert isinstance(guess.target, Reference)
        by = " ".join([guess.target.name, *parts]) if parts else ""
        edits.append(_Edit(statement.whole.start, statement.whole.end, by))
    return _edited(text, edits)


# --- the same in other words ------------------------------------------------------------------------------


def names_of(text: str) -> list[str]:
    """Names of all quantities, sorted."""
    return sorted({r.name for _, r in _references(text)})


def _references(text: str) -> list[tuple[Statement, Reference]]:
    """All places where a quantity is named, parameters of definitions apart."""
    return [
        (statement, node)
        for statement in statements_of(text)
        if isinstance(statement.node, (Equation, Guess))
        for node in walk(statement.node)
        if _names_quantity(node)
    ]


def _names_quantity(node: object) -> TypeGuard[Reference]:
    """Whether a node names a quantity; `const` before the dot is a reference as well."""
    return isinstance(node, Reference) and node.owner is None and node.name not in ("pi", "const")


def renamed(text: str) -> tuple[str, Mapping[str, str]]:
    """Every quantity under another name, the order of names kept; and the new name of each."""
    new = {name: f"w{number:03d}" for number, name in enumerate(names_of(text))}
    edits = [
        _Edit(s.line.offset + r.start, s.line.offset + r.start + len(r.name), new[r.name])
        for s, r in _references(text)
    ]
    return _edited(text, edits), new


def shuffled(text: str, seed: int) -> str:
    """The lines in another order."""
    lines = text.splitlines()
    Random(seed).shuffle(lines)
    return "\n".join(lines) + "\n"


def rescaled(text: str, factors: Mapping[str, int]) -> str:
    """Each quantity replaced by itself times a power of ten: what the solver sees is another number.

    Parameters
    ----------
    factors : mapping of str to int
        Decimal exponents; a quantity without one is left alone.
    """
    edits = []
    for statement in statements_of(text):
        node = statement.node
        offset = statement.line.offset
        if isinstance(node, Guess):
            assert isinstance(node.target, Reference)
            power = factors.get(node.target.name, 0)
            for part in (node.near, node.lower, node.upper):
                if part is not None and power:
                    by = f"({_part(statement, part)})/1e{power}"
                    edits.append(_Edit(offset + part.start, offset + part.end, by))
        elif isinstance(node, Equation):
            for reference in walk(node):
                if isinstance(reference, Reference) and factors.get(reference.name, 0):
                    by = f"({reference.name}*1e{factors[reference.name]})"
                    edits.append(_Edit(offset + reference.start, offset + reference.end, by))
    return _edited(text, edits)


# --- faults -----------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Fault:
    """A worksheet with one wrong line: its text, the number of the line, and what was done to it."""

    text: str
    line: int
    what: str


def _mutation(text: str, places: list[tuple[int, int, str]], what: str, random: Random) -> Fault | None:
    if not places:
        return None
    start, end, by = random.choice(places)
    line = text.count("\n", 0, start) + 1
    return Fault(
        text[:start] + by + text[end:], line, f"{what} in line {line}: `{text[start:end]}` -> `{by}`"
    )


def sign_fault(text: str, solution: Solution, random: Random) -> Fault | None:
    """A plus for a minus or the other way round, in an equation."""
    places = []
    for statement in statements_of(text):
        if isinstance(statement.node, Equation):
            for node in walk(statement.node):
                if isinstance(node, Binary) and node.operator in "+-":
                    at = statement.line.offset + node.operator_start
                    places.append((at, at + 1, "-" if node.operator == "+" else "+"))
                elif isinstance(node, Unary) and node.operator == "-":
                    at = statement.line.offset + node.start
                    places.append((at, at + 1, ""))
    return _mutation(text, places, "sign", random)


def exponent_fault(text: str, solution: Solution, random: Random) -> Fault | None:
    """Another exponent, or a quantity squared that was not, in an equation that holds no literal alone."""
    places = []
    for statement in statements_of(text):
        node = statement.node
        if not isinstance(node, Equation) or isinstance(node.right, Number):
            continue
        raised = set()
        for part in walk(node):
            if isinstance(part, Binary) and part.operator == "^":
                raised.add(part.left.start)
                if isinstance(part.right, Number):
                    start = statement.line.offset + part.right.start
                    end = statement.line.offset + part.right.end
                    places.append((start, end, "3" if part.right.text == "2" else "2"))
        for part in walk(node):
            if _names_quantity(part) and part.start not in raised:
                end = statement.line.offset + part.end
                places.append((end, end, "^2"))
    return _mutation(text, places, "exponent", random)


def contradiction(text: str, solution: Solution, random: Random) -> Fault | None:
    """One more line that sets an unknown to another value than the equations give."""
    unknown = sorted(n for n in solution if not solution[n].known and solution[n].si != 0.0)
    if not unknown:
        return None
    name = random.choice(unknown)
    value = solution[name]
    unit = "" if value.unit == "1" else f" {value.unit}"
    line = text.count("\n") + 1
    by = f"{name} = {value.value * 1.3:.6g}{unit}\n"
    return Fault(text + by, line, f"contradiction in line {line}: `{by.strip()}`")


def shut_out(text: str, solution: Solution, random: Random) -> Fault | None:
    """Bounds of an unknown that its solution does not lie in."""
    places = []
    for statement in statements_of(text):
        guess = statement.node
        if not isinstance(guess, Guess) or not isinstance(guess.target, Reference):
            continue
        value = solution[guess.target.name]
        if value.si <= 0.0 or value.kind == "reading":
            continue
        unit = "" if value.unit == "1" else f" {value.unit}"
        low, high = value.value * 1.5, value.value * 2.5
        by = f"{guess.target.name} within {low:.6g}{unit} .. {high:.6g}{unit}"
        places.append((statement.whole.start, statement.whole.end, by))
    return _mutation(text, places, "no solution", random)


FAULTS: Mapping[str, Callable[[str, Solution, Random], Fault | None]] = {
    "sign": sign_fault,
    "exponent": exponent_fault,
    "contradiction": contradiction,
    "no solution": shut_out,
}
