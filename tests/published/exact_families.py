"""The defining property for worksheets with families and tables, written out here apart from the program.

Indices, members, filters and sums are read from the syntax tree alone; values come from the solution by name.
"""

from __future__ import annotations

import csv
import itertools
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from fnmatch import fnmatchcase
from pathlib import Path
from typing import TypeAlias

import mpmath
from exact_evaluation import (
    DIGITS,
    HOLDS,
    PAST_BOUND,
    Bounded,
    Evaluator,
    least_sizes,
    statements_of,
)

from eqsheet.syntax.nodes import (
    Aggregate,
    Comparison,
    Definition,
    Equation,
    Expression,
    Family,
    Guess,
    IndexClause,
    NamePattern,
    Range,
    Reference,
    Rows,
    Statement,
)
from eqsheet.worksheet.solution import Solution

# A running index stands for a whole number or a member of a set.
Member: TypeAlias = "int | str"


@dataclass(frozen=True)
class Tables:
    """Index sets by name, and by column the member of another set that each row names."""

    members: dict[str, list[str]] = field(default_factory=dict)
    named: dict[str, dict[str, str]] = field(default_factory=dict)


class IndexedEvaluator(Evaluator):
    """Values of expressions at given quantities and indices."""

    def __init__(
        self,
        names: Mapping[str, Bounded],
        definitions: Mapping[str, Definition],
        tables: Tables,
        indices: Mapping[str, Member],
    ) -> None:
        super().__init__(names, definitions)
        self.tables = tables
        self.indices = indices

    def at(self, indices: Mapping[str, Member]) -> IndexedEvaluator:
        """The same with further indices."""
        return IndexedEvaluator(self.names, self.definitions, self.tables, {**self.indices, **indices})

    def of(self, node: Expression) -> Bounded:
        if isinstance(node, Aggregate):
            found = [inner.of(node.body) for inner in self.over(node.clauses, node.filter)]
            values, bounds = [f.value for f in found], [f.bound for f in found]
            if node.function == "sum":
                return Bounded(mpmath.fsum(values), mpmath.fsum(bounds))
            if node.function == "prod":
                value = mpmath.fprod(values)
                return Bounded(value, mpmath.fsum(abs(value / v) * b for v, b in zip(values, bounds)))
            return next(f for f in found if f.value == (min if node.function == "min" else max)(values))
        if isinstance(node, Reference) and node.owner is None:
            if node.subscripts is not None:
                return self.names[self.name(node)]
            if isinstance(self.indices.get(node.name), int):
                return Bounded(mpmath.mpf(self.indices[node.name]), mpmath.mpf(0))
        return super().of(node)

    def holds(self, node: Expression) -> bool:
        if isinstance(node, Comparison):
            members = [self.member(operand) for operand in node.operands]
            if any(isinstance(member, str) for member in members):
                equal = members[0] == members[1]
                return equal if node.operators[0] == "=" else not equal
        return super().holds(node)

    def over(self, clauses: tuple[IndexClause, ...], filter: Expression | None) -> Iterator[IndexedEvaluator]:
        """An evaluator for each combination of members that the filter lets pass."""
        for members in itertools.product(*(self._set(clause.over) for clause in clauses)):
            inner = self.at({clause.index: member for clause, member in zip(clauses, members)})
            if filter is None or inner.holds(filter):
                yield inner

    def name(self, node: Reference) -> str:
        """The name of a member, as results bear it."""
        assert node.subscripts is not None
        return f"{node.name}[{', '.join(str(self.member(s)) for s in node.subscripts)}]"

    def member(self, node: Expression) -> Member | None:
        """What an expression names as a subscript; None where it is none."""
        if isinstance(node, Reference) and node.owner is None:
            if node.subscripts is None:
                if node.name in self.indices:
                    return self.indices[node.name]
                if any(node.name in members for members in self.tables.members.values()):
                    return node.name
            elif node.name in self.tables.named:
                (row,) = (self.member(s) for s in node.subscripts)
                return self.tables.named[node.name][str(row)]
        text = getattr(node, "value", None)
        if isinstance(text, str):
            return text
        try:
            value = self.of(node).value
        except (KeyError, NotImplementedError):
            return None
        return int(value) if value == int(value) else None

    def _set(self, over: Range | Reference) -> list[Member]:
        if isinstance(over, Reference):
            return list(self.tables.members[over.name])
        return list(range(int(self.of(over.first).value), int(self.of(over.last).value) + 1))


def holds(text: str, solution: Solution, folder: Path | None = None) -> bool:
    """As `exact_evaluation.holds`, also with families, sums over them, and tables (in `folder` where attached)."""
    return worst(text, solution, folder) <= HOLDS and within_bounds(text, solution, folder)


def worst(text: str, solution: Solution, folder: Path | None = None) -> float:
    """The largest residual over its bound, of all equations written out."""
    least = least_sizes(solution)
    sized = {n: max(abs(v.si), least[n]) for n, v in solution.items()}
    largest = 0.0
    with mpmath.workdps(DIGITS):
        for inner, node in _written_out(text, solution, folder, sized):
            if isinstance(node, Equation):
                left, right = inner.of(node.left), inner.of(node.right)
                gap, bound = abs(left.value - right.value), max(left.bound, right.bound)
                largest = max(largest, float(gap / bound if bound else gap))
    return largest


def within_bounds(text: str, solution: Solution, folder: Path | None = None) -> bool:
    """Whether all values lie in the bounds that guesses set, also those of a whole family or of a pattern."""
    with mpmath.workdps(DIGITS):
        for inner, guess in _written_out(text, solution, folder, {n: abs(v.si) for n, v in solution.items()}):
            if not isinstance(guess, Guess):
                continue
            for name in _meant(inner, guess.target, solution):
                value = solution[name].si
                slack = PAST_BOUND * abs(value)
                if guess.lower is not None and value < inner.of(guess.lower).value - slack:
                    return False
                if guess.upper is not None and value > inner.of(guess.upper).value + slack:
                    return False
    return True


def _meant(inner: IndexedEvaluator, target: Reference | NamePattern, solution: Solution) -> list[str]:
    if isinstance(target, NamePattern):
        return [name for name in solution if fnmatchcase(name.split("[")[0], target.pattern)]
    if target.subscripts is not None:
        return [inner.name(target)]
    return [name for name in solution if name.split("[")[0] == target.name]


def _written_out(
    text: str, solution: Solution, folder: Path | None, sizes: Mapping[str, float]
) -> Iterator[tuple[IndexedEvaluator, object]]:
    """Every statement in force with the indices it is taken at."""
    statements = statements_of(text)
    definitions = {s.node.name: s.node for s in statements if isinstance(s.node, Definition)}
    names = {n: Bounded(mpmath.mpf(v.si), mpmath.mpf(sizes[n])) for n, v in solution.items()}
    whole = IndexedEvaluator(names, definitions, _tables(statements, folder), {})

    def each(evaluator: IndexedEvaluator, statement: Statement) -> Iterator[tuple[IndexedEvaluator, object]]:
        if isinstance(statement.node, Family):
            for inner in evaluator.over(statement.node.clauses, statement.node.filter):
                for part in statement.body:
                    if not part.off:
                        yield from each(inner, part)
        else:
            yield evaluator, statement.node

    for statement in statements:
        yield from each(whole, statement)


def _tables(statements: tuple[Statement, ...], folder: Path | None) -> Tables:
    tables = Tables()
    for statement in statements:
        node = statement.node
        if not isinstance(node, Rows):
            continue
        if node.path is None:
            columns = [(c.name, c.of) for c in node.columns]
            rows = [[cell.text for cell in part.node.cells] for part in statement.body]
        else:
            assert folder is not None
            heading, *rows = csv.reader((folder / node.path.value).read_text(encoding="utf-8").splitlines())
            words = [word.split() for word in heading[1:]]
            columns = [(w[0], w[2] if w[1:2] == ["of"] else None) for w in words]
        tables.members[node.name] = [row[0].strip() for row in rows]
        for place, (name, of) in enumerate(columns, 1):
            if of is not None:
                tables.named[name] = {row[0].strip(): row[place].strip() for row in rows}
    return tables
