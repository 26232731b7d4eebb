"""Binds lowered statements and gathers the items of the equation system, one a member."""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from fnmatch import fnmatchcase

import numpy as np

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error, warning
from eqsheet.model.bind import (
    Binder,
    Bound,
    Unbound,
    entry_text,
    instance_name,
    member_formulas,
)
from eqsheet.model.equation_group import EquationGroup, GuessGroup, LimitGroup
from eqsheet.model.families import Numbering
from eqsheet.model.grouping import Grouping, PreferredUnits
from eqsheet.model.indexing import Codes, Domain, Indexing
from eqsheet.model.lower_statements import (
    GuessMeant,
    LoweredStatement,
)
from eqsheet.model.members_without_value import members_without_value
from eqsheet.model.placed import Placed
from eqsheet.model.system import (
    EquationItem,
    Guard,
    GuessItem,
    LimitItem,
    Place,
    Validity,
)
from eqsheet.model.tables import CellKnown, TableColumn
from eqsheet.model.tape import Formula, Literal, TapeBuilder
from eqsheet.model.unused_indices import unused_index
from eqsheet.model.value_of_known import known_value
from eqsheet.syntax import nodes as syntax
from eqsheet.units.dimension import DIMENSIONLESS
from eqsheet.units.registry import UnitTable
from eqsheet.units.unit import Unit


@dataclass(frozen=True, slots=True)
class Work:
    """A statement in its place, lowered, with the domain of its indices."""

    place: Placed
    number: int
    domain: Domain
    lowered: LoweredStatement


@dataclass
class Gathered:
    """Items bound so far."""

    names: Sequence[str]
    statements: tuple[syntax.Statement, ...]
    unit_table: UnitTable
    grouping: Grouping | None = None
    equations: list[EquationItem] = field(default_factory=list)
    limits: list[LimitItem | LimitGroup] = field(default_factory=list)
    guesses: list[GuessItem] = field(default_factory=list)
    of_all_members: dict[tuple[object, ...], Place] = field(default_factory=dict)
    shown: dict[int, Unit | None] = field(default_factory=dict)
    shown_by_name: set[int] = field(default_factory=set)
    shows: list[Formula] = field(default_factory=list)
    hints: tuple[dict[int, Unit], dict[int, Unit], dict[int, Unit], dict[int, Unit]] = field(
        default_factory=lambda: ({}, {}, {}, {})
    )

    def __post_init__(self) -> None:
        nowhere = Place(0, 0, 0)
        self.first_places = [nowhere] * len(self.names)
        self._placed = [False] * len(self.names)

    def see(self, quantity: int, place: Place) -> None:
        """Note where a quantity is named, the first time; with large families, where its family is."""
        if self.grouping is not None:
            quantity = self.grouping.family(quantity)
        if not self._placed[quantity]:
            self._placed[quantity] = True
            self.first_places[quantity] = place

    def grouped(self) -> tuple[tuple[EquationGroup, ...], tuple[GuessGroup, ...], Codes | None]:
        """What is kept as arrays; guesses that clash are written out, since each is to be told of."""
        grouping = self.grouping
        if grouping is None:
            return (), (), None
        if grouping.guesses_twice(self.guesses):
            self.guesses += [group.item(i) for group in grouping.guesses for i in range(len(group))]
            self.guesses.sort(key=lambda item: item.place.statement)
            grouping.guesses.clear()
        return tuple(grouping.equations), tuple(grouping.guesses), grouping.firsts

    def preferred_units(self, idle: Sequence[LoweredStatement], binder: Binder) -> Mapping[int, Unit]:
        """Unit for each quantity by precedence: `show`, known, known switched off, guess, limit, curve."""
        units: dict[int, Unit] = {q: unit for q, unit in self.shown.items() if unit is not None}
        knowns, guesses, limits, curves = self.hints
        off: dict[int, Unit] = {}
        for one in idle:
            for provisional, unit in one.unit_hints:
                number = binder.plain_number(provisional)
                if number is not None:
                    off.setdefault(number, unit)
        groups: tuple[Mapping[int, Unit | None], ...] = (self.shown, knowns, off, guesses, limits, curves)
        if self.grouping is not None:
            return PreferredUnits(groups, self.grouping.firsts, len(self.names))
        for group in groups:
            for quantity, found in group.items():
                if found is not None:
                    units.setdefault(quantity, found)
            for family in binder.numbering.families.values():
                # A member without a unit of its own is shown like the first that has one.
                members = range(family.first, family.first + family.size)
                units_of = (group.get(q) for q in members)
                common = next((found for found in units_of if found is not None), None)
                if common is not None:
                    for quantity in members:
                        units.setdefault(quantity, common)
        return units


def put_statement(gathered: Gathered, one: Work, binder: Binder, indexing: Indexing) -> None:
    """Bind one statement's items; in a family without members there are none."""
    if not one.domain.size:
        return
    lowered = one.lowered
    try:
        if lowered.equation is not None:
            slip = unused_index(one.place, one.domain)
            if slip is not None:
                binder.note(slip)
                return
            bound = binder.bind((*lowered.named, *lowered.conditions_name), one.place, one.domain)
            _put_equations(gathered, one, lowered.equation, bound, binder)
            _put_hints(gathered.hints[0], lowered.unit_hints, bound)
            _put_hints(gathered.hints[3], lowered.curve_hints, bound)
        elif lowered.limit is not None:
            bound = binder.bind(lowered.named, one.place, one.domain)
            _put_limits(gathered, one, lowered.limit, bound, indexing)
            _put_hints(gathered.hints[2], lowered.unit_hints, bound)
        for meant in lowered.guesses:
            _put_guesses(gathered, one, meant, binder)
    except Unbound:
        return
    for item in lowered.shows:
        _put_show(gathered, one, item.quantity, item.unit, item.formula, (item.start, item.end), binder)


def _put_hints(hints: dict[int, Unit], units: Sequence[tuple[int, Unit]], bound: Bound) -> None:
    for provisional, unit in units:
        column = bound.columns[provisional]
        if not bound.domain.size:
            continue
        for quantity in (column,) if isinstance(column, int) else column.tolist():
            hints.setdefault(quantity, unit)


def _member(one: Work, entry: int, indexing: Indexing) -> str:
    """What tells one member of a statement from the others, for messages."""
    scope = one.place.instance or one.place.scope
    name = instance_name(scope, one.domain, entry, indexing)
    told = {node.name for node in scope.nodes if isinstance(node, syntax.Reference)}
    indices = {n: a for n, a in one.domain.arrays.items() if n not in told}
    rest = entry_text(replace(one.domain, arrays=indices), entry, indexing)
    return ", ".join(part for part in (name, rest) if part)


def _put_equations(gathered: Gathered, one: Work, item: EquationItem, bound: Bound, binder: Binder) -> None:
    indexing = binder.indexing
    place = Place(one.number, item.place.start, item.place.end)
    for provisional, start, end in one.lowered.named:
        where = Place(one.number, start, end)
        column = bound.columns[provisional]
        for quantity in (column,) if isinstance(column, int) else _to_be_seen(column, gathered.grouping):
            gathered.see(quantity, where)

    def told(domain: Domain, entry: int) -> str:
        return _member(replace(one, domain=domain), entry, indexing)

    statement = one.place.statement
    name = gathered.names.__getitem__
    slip = members_without_value(item, bound, statement, name, told, gathered.unit_table)
    if slip is not None:
        binder.note(slip)
        return
    if gathered.grouping is not None:
        rest = gathered.grouping.take_equation(item, bound, place, told)
        if rest is None:
            return
        bound, one = rest, replace(one, domain=rest.domain)
    valid = [
        list(
            zip(
                member_formulas(v.formula, bound, one.number),
                zip(*(member_formulas(g.formula, bound, one.number) for g in v.guards))
                if v.guards
                else ((),) * bound.domain.size,
            )
        )
        for v in item.valid
    ]
    for entry, formula in enumerate(member_formulas(item.formula, bound, one.number)):
        known = -1 if item.known < 0 else bound.numbers((item.known,), entry)[0]
        value = item.value
        if known >= 0 and value != value:
            value = known_value(formula)
        conditions = tuple(
            Validity(
                own[entry][0],
                v.text,
                replace(v.place, statement=one.number),
                tuple(Guard(f, g.branch) for f, g in zip(own[entry][1], v.guards)),
            )
            for v, own in zip(item.valid, valid)
        )
        member = "" if one.place.plain else _member(one, entry, indexing)
        gathered.equations.append(
            EquationItem(formula, place, known, value, item.tolerance, conditions, member)
        )


def _to_be_seen(column: Codes, grouping: Grouping | None) -> Iterable[int]:
    """The quantities of a column; one for all where they are of one family and places are kept by family."""
    if grouping is None or not len(column):
        return set(column.tolist())
    first, last = int(column.min()), int(column.max())
    return (first,) if grouping.family(first) == grouping.family(last) else set(column.tolist())


def _put_limits(gathered: Gathered, one: Work, item: LimitItem, bound: Bound, indexing: Indexing) -> None:
    item = replace(item, place=replace(item.place, statement=one.number))
    if gathered.grouping is not None:
        group = gathered.grouping.limits(item, bound, lambda entry: _member(one, entry, indexing))
        if group is not None:
            gathered.limits.append(group)
            return
    for entry, formula in enumerate(member_formulas(item.formula, bound, one.number)):
        member = "" if one.place.plain else _member(one, entry, indexing)
        text = f"{item.text} ({member})" if member else item.text
        gathered.limits.append(replace(item, formula=formula, text=text))


def _put_guesses(gathered: Gathered, one: Work, meant: GuessMeant, binder: Binder) -> None:
    place = Place(one.number, meant.start, meant.end)
    lowered = one.lowered
    targets: list[int] | None = None
    exact = True
    if meant.pattern:
        key = binder.resolved(meant.target, one.place)
        pattern = key if isinstance(key, str) else key.text
        matching = [name for name in binder.family_texts if fnmatchcase(name, _glob(pattern))]
        targets = binder.matching(matching)
        exact = False
        if not targets:
            gathered_diagnostic = warning(
                "pattern-without-match",
                f"no quantity matches `{pattern}`",
                Label(one.place.statement.span(meant.start, meant.end)),
            )
            binder.note(gathered_diagnostic)
            return
    else:
        members = binder.all_members(meant.target, one.place)
        if members is not None:
            targets = members.tolist()
            exact = False
            for role in meant.roles:
                first = gathered.of_all_members.setdefault((role, *targets[:1], len(targets)), place)
                if first != place:
                    key = binder.resolved(meant.target, one.place)
                    name = key if isinstance(key, str) else key.text
                    binder.note(_guess_twice(name, role, gathered.statements, place, first))
    bound = binder.bind(lowered.named, one.place, one.domain, meant.target if targets is not None else -1)
    if gathered.grouping is not None and _keep_guesses(gathered, one, meant, bound, targets, exact):
        return
    if targets is None:
        for entry, formula in enumerate(member_formulas(meant.formula, bound, one.number)):
            (quantity,) = bound.numbers((meant.target,), entry)
            gathered.guesses.append(GuessItem(quantity, place, exact, formula, meant.roles))
            for _, unit in lowered.unit_hints:
                gathered.hints[1].setdefault(quantity, unit)
        return
    for quantity in targets:
        own = Bound(bound.domain, {**bound.columns, meant.target: quantity})
        for formula in member_formulas(meant.formula, own, one.number):
            gathered.guesses.append(GuessItem(quantity, place, exact, formula, meant.roles))
        for _, unit in lowered.unit_hints:
            gathered.hints[1].setdefault(quantity, unit)


def _keep_guesses(
    gathered: Gathered,
    one: Work,
    meant: GuessMeant,
    bound: Bound,
    targets: Sequence[int] | None,
    exact: bool,
) -> bool:
    """Keep the guesses of a statement as arrays, with their units; whether that was possible."""
    grouping = gathered.grouping
    column = bound.columns[meant.target] if targets is None else np.array(targets, dtype=np.int64)
    if grouping is None or isinstance(column, int):
        return False
    own = Bound(bound.domain, {**bound.columns, meant.target: column})
    place = Place(one.number, meant.start, meant.end)
    if not grouping.take_guesses(meant.formula, own, column, place, exact, meant.roles):
        return False
    for _, unit in one.lowered.unit_hints:
        for quantity in column.tolist():
            gathered.hints[1].setdefault(quantity, unit)
    return True


def _put_show(
    gathered: Gathered,
    one: Work,
    provisional: int,
    unit: Unit | None,
    formula: Formula | None,
    span: tuple[int, int],
    binder: Binder,
) -> None:
    members = binder.all_members(provisional, one.place)
    try:
        if members is None:
            bound = binder.bind(((provisional, *span),), one.place, one.domain)
        else:
            domain = Domain(len(members))
            bound = Bound(domain, {provisional: members})
    except Unbound:
        return
    for entry in range(bound.domain.size):
        quantity = bound.numbers((provisional,), entry)[0]
        if members is None and quantity not in gathered.shown_by_name:
            # A member by itself goes before the family, whichever stands first.
            gathered.shown_by_name.add(quantity)
            gathered.shown[quantity] = unit
        gathered.shown.setdefault(quantity, unit)
    if formula is not None:
        if gathered.grouping is not None and members is not None:
            # One member tells of all.
            _, firsts = np.unique([gathered.grouping.family(q) for q in members.tolist()], return_index=True)
            bound = Bound(Domain(len(firsts)), {provisional: members[firsts]})
        gathered.shows.extend(member_formulas(formula, bound, one.number))


def put_column(gathered: Gathered, column: TableColumn, numbering: Numbering, binder: Binder) -> None:
    """The knowns of a column of a table, and where its cells stand."""
    family = numbering.families.get(((column.name, 1),))
    if family is None:
        return
    numbers = family.numbers([column.codes], len(column.codes))
    # Where places are kept by family, the first cell stands for all.
    for cell in column.cells if gathered.grouping is None else column.cells[:1]:
        gathered.see(int(numbers[cell.code]), Place(binder.statement_number(cell.row), *cell.place))
    if gathered.grouping is not None and _keep_cells(gathered, gathered.grouping, column, numbers, binder):
        return
    for known in column.knowns:
        quantity = int(numbers[known.code])
        item = _cell_item(quantity, known, binder.statement_number(known.row))
        gathered.equations.append(item)
        if column.unit is not None:
            gathered.hints[0].setdefault(quantity, column.unit)


def _keep_cells(
    gathered: Gathered, grouping: Grouping, column: TableColumn, numbers: Codes, binder: Binder
) -> bool:
    """Keep the knowns of a column as arrays; whether that was possible."""
    if not column.knowns:
        return False
    known = numbers[np.array([one.code for one in column.knowns], dtype=np.int64)]
    values = np.array([one.literal.value for one in column.knowns])
    places = [(binder.statement_number(k.row), k.literal.start, k.literal.end) for k in column.knowns]
    first = _cell_item(int(known[0]), column.knowns[0], places[0][0])
    if not grouping.take_cells(first, known, values, np.array(places, dtype=np.int64)):
        return False
    if column.unit is not None:
        gathered.hints[0].setdefault(int(known[0]), column.unit)
    return True


def count_plainly(gathered: Gathered, indexing: Indexing, numbering: Numbering) -> None:
    """A known that counts members is a plain number, even where it is 0, which fits any dimension."""
    for name, value in indexing.whole.items():
        quantity = numbering.plain.get(name)
        if value == 0 and quantity is not None:
            place = gathered.first_places[quantity]
            builder = TapeBuilder()
            left = builder.quantity(quantity, (place.start, place.end))
            right = builder.literal(Literal(1.0, DIMENSIONLESS, "plain", place.start, place.end, ""))
            gathered.shows.append(builder.formula((left, right), place.statement, ((left, right),)))


def _cell_item(quantity: int, known: CellKnown, statement: int) -> EquationItem:
    builder = TapeBuilder()
    literal = known.literal
    left = builder.quantity(quantity, (literal.start, literal.end))
    right = builder.literal(literal)
    formula = builder.formula((left, right), statement, ((left, right),))
    place = Place(statement, literal.start, literal.end)
    return EquationItem(formula, place, quantity, literal.value)


def apply_overrides(gathered: Gathered, freed: Collection[str], diagnostics: list[Diagnostic]) -> None:
    """Knowns given for one run replace those of the worksheet; freed members lose theirs."""
    for_this_run = {
        item.known
        for item in gathered.equations
        if item.known >= 0 and not gathered.statements[item.place.statement].source.numbered
    }
    gone = dict.fromkeys(freed, False)
    kept = []
    for item in gathered.equations:
        if item.known >= 0:
            name = gathered.names[item.known]
            own = not gathered.statements[item.place.statement].source.numbered
            if item.known in for_this_run and not own:
                continue
            if name in gone and not own:
                gone[name] = True
                continue
        kept.append(item)
    gathered.equations = kept
    for name, done in gone.items():
        if not done:
            diagnostics.append(not_a_known(name, gathered.names, name in gathered.names))


def not_a_known(name: str, knowns: Iterable[str], mentioned: bool) -> Diagnostic:
    """What to say where a name to be freed is set by no line."""
    from eqsheet.diagnostics.source import Source, Span
    from eqsheet.model.spelling import did_you_mean

    source = Source("--free", name, numbered=False)
    return error(
        "not-a-known",
        f"`{name}` is not set by a line of its own, so it cannot be freed",
        Label(Span(source, 0, len(name))),
        help=did_you_mean(name, knowns) or ("it is already an unknown" if mentioned else ""),
    )


def _glob(pattern: str) -> str:
    """The pattern for `fnmatchcase`: only ``*`` is special in a worksheet."""
    return pattern.replace("[", "[[]").replace("?", "[?]")


def equation_key(
    statements: tuple[syntax.Statement, ...],
) -> Callable[[EquationItem], tuple[bool, list[int], str]]:
    """Order of equations that does not depend on the order of lines: knowns, then by names, then by text."""

    def key(item: EquationItem) -> tuple[bool, list[int], str]:
        text = statements[item.place.statement].line.text[item.place.start : item.place.end]
        return item.known < 0, sorted(item.formula.quantities), text

    return key


def by_precedence(
    guesses: list[GuessItem],
    used: tuple[syntax.Statement, ...],
    names: Sequence[str],
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
                diagnostics.append(_guess_twice(names[item.quantity], role, used, item.place, first.place))
    return sorted(guesses, key=lambda g: not g.exact)


def _guess_twice(
    name: str, role: str, statements: Sequence[syntax.Statement], place: Place, first: Place
) -> Diagnostic:
    what = {"near": "a start value", "lower": "a lower bound", "upper": "an upper bound"}[role]
    return error(
        "guess-twice",
        f"`{name}` has two guesses with {what}",
        Label(statements[place.statement].span(place.start, place.end), "again here"),
        Label(statements[first.statement].span(first.start, first.end), "first here"),
        help="keep one of the two lines, or switch one `off`",
    )
