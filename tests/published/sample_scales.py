"""Samples with their quantities in other scales: families, guesses, limits and conditions included.

A quantity that is multiplied in the text by a power of ten wherever it is named is another number to the solver, and
the same worksheet to the reader. Left as they are: readings (an origin has no factor), whole numbers that size
families, columns of tables, knowns with a tolerance, and what belongs to templates and their instances.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from random import Random

from exact_evaluation import statements_of

from eqsheet.syntax.nodes import (
    Aggregate,
    Definition,
    Equation,
    Family,
    Guess,
    Include,
    IndexClause,
    NamePattern,
    Number,
    Reference,
    Rows,
    Shared,
    Show,
    Statement,
    Template,
    Use,
)
from eqsheet.syntax.walk import walk
from eqsheet.worksheet.solution import Solution

SAMPLES = Path(__file__).parents[2] / "samples"
DECADES = 6


@dataclass(frozen=True)
class _Edit:
    start: int
    end: int
    by: str


def factors_of(text: str, solution: Solution, seed: int) -> dict[str, int]:
    """Decimal exponents by name, or by family, of all that can be scaled."""
    random = Random(seed)
    left = _left_alone(text) | {"ambient"}
    # Columns of tables read from files are not in the text.
    for name, value in solution.items():
        if value.known and value.statement is not None and not isinstance(value.statement.node, Equation):
            left.add(name.partition("[")[0])
    names = sorted({name.partition("[")[0] for name in solution if "." not in name})
    kinds = {name.partition("[")[0]: value.kind for name, value in solution.items()}
    powers = [p for p in range(-DECADES, DECADES + 1) if p]
    return {n: random.choice(powers) for n in names if n not in left and kinds[n] != "reading"}


def in_other_scales(text: str, factors: Mapping[str, int]) -> str:
    """The text with each quantity multiplied wherever it is named."""
    edits: list[_Edit] = []
    for statement in _all(statements_of(text)):
        node = statement.node
        if isinstance(node, (Rows, Show, Use, Template, Shared, Include)):
            continue
        offset = statement.line.offset
        hidden = {p.name for p in node.parameters} if isinstance(node, Definition) else set()
        if isinstance(node, Guess):
            power = 0 if isinstance(node.target, NamePattern) else factors.get(node.target.name, 0)
            for part in (node.near, node.lower, node.upper):
                if part is not None:
                    edits += _scaled(statement, part, factors, hidden)
                    if power:
                        edits.append(_Edit(offset + part.start, offset + part.start, "("))
                        edits.append(_Edit(offset + part.end, offset + part.end, f")/1e{power}"))
        elif not isinstance(node, Family):
            edits += _scaled(statement, node, factors, hidden)
    # From the end; of two at one place the one that ends first is put in last, so that it stands outside.
    for edit in sorted(edits, key=lambda e: (e.start, e.end), reverse=True):
        text = text[: edit.start] + edit.by + text[edit.end :]
    return text


def _scaled(
    statement: Statement, node: object, factors: Mapping[str, int], hidden: set[str]
) -> Iterator[_Edit]:
    subscripts = {id(inner) for r in _references(node) for s in r.subscripts or () for inner in walk(s)}
    subscripts |= {id(n.over) for n in walk(node) if isinstance(n, IndexClause)}
    offset = statement.line.offset
    for reference in _references(node):
        power = factors.get(reference.name, 0)
        if (
            power
            and reference.owner is None
            and id(reference) not in subscripts
            and reference.name not in hidden
        ):
            written = statement.line.text[reference.start : reference.end]
            yield _Edit(offset + reference.start, offset + reference.end, f"({written}*1e{power})")


def _references(node: object) -> list[Reference]:
    return [n for n in walk(node) if isinstance(n, Reference)]


def _all(statements: tuple[Statement, ...]) -> Iterator[Statement]:
    for statement in statements:
        yield statement
        if not statement.off and not isinstance(statement.node, (Template, Use)):
            yield from (s for s in _all(statement.body) if not s.off)


def _left_alone(text: str) -> set[str]:
    """Names that cannot be scaled."""
    found: set[str] = set()

    def look(statements: tuple[Statement, ...], inside: bool) -> None:
        for statement in statements:
            node = statement.node
            if isinstance(node, Rows):
                found.update(column.name for column in node.columns)
            within = inside or isinstance(node, (Template, Use))
            if within or isinstance(node, (Shared, Family)):
                found.update(r.name for r in _references(node))
            if isinstance(node, Equation) and node.tolerance is not None:
                found.update(r.name for r in _references(node))
            for inner in walk(node):
                if isinstance(inner, Aggregate):
                    found.update(r.name for c in inner.clauses for r in _references(c))
                if isinstance(inner, Reference):
                    found.update(r.name for s in inner.subscripts or () for r in _references(s))
            look(statement.body, within)

    look(statements_of(text), False)
    # A known that is a whole number without a unit may be a number of things.
    for statement in statements_of(text):
        node = statement.node
        if (
            isinstance(node, Equation)
            and isinstance(node.right, Number)
            and node.right.unit is None
            and isinstance(node.left, Reference)
            and float(node.right.text).is_integer()
        ):
            found.add(node.left.name)
    return found
