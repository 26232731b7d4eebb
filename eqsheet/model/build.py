"""Builds the equation system of a document: one pass a kind of statement, in the order of `build_system`.

Takes: the statements in use. Gives: an `EquationSystem` and diagnostics. A statement with a finding is left
out of the system; the others are unaffected.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field, replace
from fnmatch import fnmatchcase

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error, warning
from eqsheet.model.lower import Context, NameTable
from eqsheet.model.lower_definitions import check_definition, collect_definitions
from eqsheet.model.lower_statements import (
    LoweredStatement,
    lower_equation,
    lower_guess,
    lower_limit,
    lower_show,
)
from eqsheet.model.spelling import did_you_mean
from eqsheet.model.system import EquationItem, EquationSystem, GuessItem, LimitItem, Place, Validity
from eqsheet.model.tape import Formula
from eqsheet.model.unit_statements import collect_units
from eqsheet.syntax import nodes as syntax
from eqsheet.units.unit import Unit

_LOWER: dict[type, Callable[[syntax.Statement, Context, NameTable], LoweredStatement]] = {
    syntax.Equation: lower_equation,
    syntax.Guess: lower_guess,
    syntax.Limit: lower_limit,
    syntax.Show: lower_show,
}
_ELSEWHERE = (syntax.Definition, syntax.NewUnit)


@dataclass
class LoweredCache:
    """Lowered statements by their text, kept while a worksheet is edited.

    Places in them are relative to the statement, so they serve wherever it now stands. The whole cache is
    dropped when units or definitions change, since every statement may depend on them.
    """

    names: NameTable = field(default_factory=NameTable)
    context: Context | None = None
    entries: dict[str, LoweredStatement] = field(default_factory=dict)

    def enter(self, context: Context) -> None:
        """Use the cache under `context`."""
        if self.context is None or not _same_context(self.context, context) or len(self.entries) > 200_000:
            self.entries.clear()
            self.names = NameTable()
        self.context = context

    def lowered(self, statement: syntax.Statement) -> LoweredStatement:
        """The lowered statement, worked out now if it is new."""
        key = statement.line.text
        found = self.entries.get(key)
        if found is None:
            assert self.context is not None
            found = _LOWER[type(statement.node)](statement, self.context, self.names)
            self.entries[key] = found
        return found


def build_system(
    statements: Sequence[syntax.Statement], cache: LoweredCache | None = None
) -> tuple[EquationSystem, tuple[Diagnostic, ...]]:
    """The equation system of the statements in use (those that are not off).

    Parameters
    ----------
    statements : sequence of Statement
        In the order of the text; statements switched off are ignored.
    cache : LoweredCache, optional
        Lowered statements of an earlier state of the worksheet; updated.
    """
    used = tuple(s for s in statements if not s.off)
    diagnostics: list[Diagnostic] = []
    cache = cache or LoweredCache()
    _check_labels(used, diagnostics)
    unit_table = collect_units(used, diagnostics)
    definitions = collect_definitions(used, diagnostics)
    context = Context(unit_table, definitions)
    cache.enter(context)
    for statement in definitions.values():
        diagnostics.extend(f.at(statement) for f in check_definition(statement, context))
    lowered: list[tuple[int, syntax.Statement, LoweredStatement]] = []
    for number, statement in enumerate(used):
        if isinstance(statement.node, _ELSEWHERE):
            continue
        if type(statement.node) not in _LOWER:
            diagnostics.append(_unsupported(statement))
            continue
        one = cache.lowered(statement)
        diagnostics.extend(f.at(statement) for f in one.findings)
        lowered.append((number, statement, one))
    # A known switched off still tells in which unit its quantity is thought of.
    idle = [cache.lowered(s) for s in statements if s.off and isinstance(s.node, syntax.Equation)]
    system = _assemble(used, lowered, idle, cache.names, context, diagnostics)
    return system, tuple(diagnostics)


def _assemble(
    used: tuple[syntax.Statement, ...],
    lowered: list[tuple[int, syntax.Statement, LoweredStatement]],
    idle: Sequence[LoweredStatement],
    provisional: NameTable,
    context: Context,
    diagnostics: list[Diagnostic],
) -> EquationSystem:
    """Give the quantities their final numbers and bind all items to them."""
    first_places: dict[int, Place] = {}
    broken_names: set[int] = set()
    for number, _, one in lowered:
        if one.equation is not None:
            for quantity, start, end in one.named:
                first_places.setdefault(quantity, Place(number, start, end))
        elif one.findings:
            broken_names.update(quantity for quantity, _, _ in one.named)
    order = sorted(first_places, key=provisional.names.__getitem__)
    names = tuple(provisional.names[p] for p in order)
    final = {p: i for i, p in enumerate(order)}
    binder = _Binder(used, final, provisional, names, broken_names, diagnostics)
    equations: list[EquationItem] = []
    limits: list[LimitItem] = []
    guesses: list[GuessItem] = []
    shown: dict[int, Unit | None] = {}
    shows: list[Formula] = []
    for number, _, one in lowered:
        if one.equation is not None:
            equations.append(binder.equation(one.equation, number))
        elif one.limit is not None:
            if binder.knows(one, number):
                limits.append(replace_limit(one.limit, binder.formula(one.limit.formula, number), number))
        elif one.guesses:
            guesses.extend(binder.guesses(one, number))
        for item in one.shows:
            if binder.knows_one(item.quantity, number, item.start, item.end):
                shown.setdefault(final[item.quantity], item.unit)
                if item.formula is not None:
                    shows.append(binder.formula(item.formula, number))
    equations.sort(key=_equation_key(names, used))
    return EquationSystem(
        used,
        names,
        tuple(first_places[p] for p in order),
        tuple(equations),
        tuple(_by_precedence(guesses, used, names, diagnostics)),
        tuple(limits),
        shown,
        _preferred_units([one for _, _, one in lowered], idle, final, shown),
        context.unit_table,
        context.unit_table.ambient,
        any(one.uses_gauge for _, _, one in lowered),
        tuple(shows),
    )


class _Binder:
    """Puts final quantity numbers and statement numbers into lowered items."""

    def __init__(
        self,
        used: tuple[syntax.Statement, ...],
        final: dict[int, int],
        provisional: NameTable,
        names: tuple[str, ...],
        broken_names: set[int],
        diagnostics: list[Diagnostic],
    ) -> None:
        self._used = used
        self._final = final
        self._provisional = provisional
        self._names = names
        self._broken_names = broken_names
        self._diagnostics = diagnostics

    def formula(self, formula: Formula, statement: int) -> Formula:
        """The formula with final numbers."""
        return Formula(
            formula.tape,
            tuple([self._final[q] for q in formula.quantities]),
            formula.literals,
            formula.places,
            statement,
            formula.alike,
            formula.differences,
        )

    def equation(self, item: EquationItem, statement: int) -> EquationItem:
        """The equation with final numbers."""
        valid = tuple(
            Validity(
                self.formula(v.formula, statement),
                v.text,
                replace(v.place, statement=statement),
                tuple(replace(g, formula=self.formula(g.formula, statement)) for g in v.guards),
            )
            for v in item.valid
        )
        return EquationItem(
            self.formula(item.formula, statement),
            Place(statement, item.place.start, item.place.end),
            -1 if item.known < 0 else self._final[item.known],
            item.value,
            item.tolerance,
            valid,
        )

    def knows(self, one: LoweredStatement, statement: int) -> bool:
        """Whether all names of a statement occur in equations; those that do not are reported."""
        return not [n for n in one.named if not self.knows_one(n[0], statement, n[1], n[2])]

    def knows_one(self, quantity: int, statement: int, start: int, end: int) -> bool:
        """Whether a provisional quantity occurs in an equation; reported if not."""
        if quantity in self._final:
            return True
        if quantity not in self._broken_names:
            name = self._provisional.names[quantity]
            self._diagnostics.append(
                error(
                    "unknown-name",
                    f"no equation mentions `{name}`",
                    Label(self._used[statement].span(start, end)),
                    help=did_you_mean(name, self._names),
                )
            )
        return False

    def guesses(self, one: LoweredStatement, statement: int) -> list[GuessItem]:
        """One guess for each quantity meant."""
        items: list[GuessItem] = []
        for meant in one.guesses:
            place = Place(statement, meant.start, meant.end)
            stand_in = self._provisional.numbers[meant.target]
            others = [n for n in one.named if n[0] != stand_in]
            if [n for n in others if not self.knows_one(n[0], statement, n[1], n[2])]:
                continue
            if not meant.pattern:
                start, end = next((s, e) for q, s, e in one.named if q == stand_in)
                if self.knows_one(stand_in, statement, start, end):
                    formula = self.formula(meant.formula, statement)
                    items.append(GuessItem(self._final[stand_in], place, True, formula, meant.roles))
                continue
            matching = [i for i, name in enumerate(self._names) if fnmatchcase(name, _glob(meant.target))]
            if not matching:
                self._diagnostics.append(
                    warning(
                        "pattern-without-match",
                        f"no quantity matches `{meant.target}`",
                        Label(self._used[statement].span(meant.start, meant.end)),
                    )
                )
            for quantity in matching:
                quantities = tuple(
                    quantity if q == stand_in else self._final[q] for q in meant.formula.quantities
                )
                formula = replace(meant.formula, quantities=quantities, statement=statement)
                items.append(GuessItem(quantity, place, False, formula, meant.roles))
        return items


def _glob(pattern: str) -> str:
    """The pattern for `fnmatchcase`: only ``*`` is special in a worksheet."""
    return pattern.replace("[", "[[]").replace("?", "[?]")


def replace_limit(item: LimitItem, formula: Formula, statement: int) -> LimitItem:
    """The limit bound to `formula` in `statement`."""
    return replace(item, formula=formula, place=replace(item.place, statement=statement))


def _equation_key(
    names: tuple[str, ...], used: tuple[syntax.Statement, ...]
) -> Callable[[EquationItem], tuple[bool, list[int], str]]:
    """Order of equations that does not depend on the order of lines: knowns, then by names, then by text."""

    def key(item: EquationItem) -> tuple[bool, list[int], str]:
        text = used[item.place.statement].line.text[item.place.start : item.place.end]
        return item.known < 0, sorted(item.formula.quantities), text

    return key


def _by_precedence(
    guesses: list[GuessItem],
    used: tuple[syntax.Statement, ...],
    names: tuple[str, ...],
    diagnostics: list[Diagnostic],
) -> list[GuessItem]:
    """Guesses by name before those by pattern; two start values by name for one quantity are reported."""
    seen: dict[tuple[int, str], GuessItem] = {}
    for item in guesses:
        if not item.exact:
            continue
        for role in item.roles:
            first = seen.setdefault((item.quantity, role), item)
            if first is not item:
                what = "start value" if role == "near" else f"{role} bound"
                diagnostics.append(
                    error(
                        "guess-twice",
                        f"`{names[item.quantity]}` has two guesses with a {what}",
                        Label(
                            used[item.place.statement].span(item.place.start, item.place.end), "again here"
                        ),
                        Label(
                            used[first.place.statement].span(first.place.start, first.place.end), "first here"
                        ),
                        help="keep one of the two lines, or switch one `off`",
                    )
                )
    return sorted(guesses, key=lambda g: not g.exact)


def _preferred_units(
    lowered: Sequence[LoweredStatement],
    idle: Sequence[LoweredStatement],
    final: dict[int, int],
    shown: dict[int, Unit | None],
) -> dict[int, Unit]:
    """Unit for each quantity by precedence: `show`, known, known switched off, guess, limit."""
    units: dict[int, Unit] = {q: unit for q, unit in shown.items() if unit is not None}
    groups = (
        [one for one in lowered if one.equation is not None],
        idle,
        [one for one in lowered if one.guesses],
        [one for one in lowered if one.limit is not None],
    )
    for group in groups:
        for one in group:
            for quantity, unit in one.unit_hints:
                if quantity in final:
                    units.setdefault(final[quantity], unit)
    return units


def _check_labels(used: tuple[syntax.Statement, ...], diagnostics: list[Diagnostic]) -> None:
    first: dict[str, syntax.Statement] = {}
    for statement in used:
        if not statement.label:
            continue
        other = first.setdefault(statement.label, statement)
        if other is not statement:
            diagnostics.append(
                error(
                    "label-twice",
                    f"the label `{statement.label}` stands twice",
                    Label(statement.whole, "again here"),
                    Label(other.whole, "first here"),
                    help="labels name statements, so each may stand once",
                )
            )


def _unsupported(statement: syntax.Statement) -> Diagnostic:
    word = statement.line.text.split(None, 1)[0].rstrip(":")
    return error(
        "unsupported-statement",
        f"`{word}` is not understood by this version",
        Label(statement.span(0, len(word))),
    )


def _same_context(a: Context, b: Context) -> bool:
    mine, other = a.unit_table, b.unit_table
    if mine is not other and (mine.ambient, mine.added) != (other.ambient, other.added):
        return False
    if a.definitions.keys() != b.definitions.keys():
        return False
    return all(
        x.node == b.definitions[name].node and x.line.text == b.definitions[name].line.text
        for name, x in a.definitions.items()
    )
