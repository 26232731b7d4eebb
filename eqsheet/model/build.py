"""Builds the equation system of a document: one pass after the other, in the order of `build_system`.

Takes: the statements of a worksheet. Gives: an `EquationSystem` and diagnostics. A statement with a finding is
left out of the system; the others are unaffected.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from fnmatch import fnmatchcase

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error, warning
from eqsheet.model.bind import (
    Binder,
    Bound,
    Unbound,
    entry_text,
    instance_name,
    member_formulas,
    resolved_key,
)
from eqsheet.model.curves import collect_curves
from eqsheet.model.families import FamilyCollector, FamilyReference, Numbering
from eqsheet.model.findings import Finding
from eqsheet.model.indexing import Domain, Indexing, IndexSlip, filtered, grown, whole_number
from eqsheet.model.lower import NeedsMembers
from eqsheet.model.lower_definitions import check_definition, collect_definitions, without_echoes
from eqsheet.model.lower_statements import (
    GuessMeant,
    LoweredStatement,
    lower_equation,
    lower_guess,
    lower_limit,
    lower_show,
)
from eqsheet.model.placed import Placed, place_statements
from eqsheet.model.scope import Context, IndexScope, NameTable, OfInstance
from eqsheet.model.system import (
    EquationItem,
    EquationSystem,
    Guard,
    GuessItem,
    LimitItem,
    Place,
    Validity,
)
from eqsheet.model.tables import CellKnown, TableColumn, Tables, collect_tables
from eqsheet.model.tape import Formula, Literal, TapeBuilder
from eqsheet.model.unit_statements import collect_units
from eqsheet.model.value_of_known import known_value
from eqsheet.model.written_nodes import names_in
from eqsheet.syntax import nodes as syntax
from eqsheet.syntax.walk import walk
from eqsheet.units.dimension import DIMENSIONLESS
from eqsheet.units.unit import Unit

_LOWER: dict[type, Callable[..., LoweredStatement]] = {
    syntax.Equation: lower_equation,
    syntax.Guess: lower_guess,
    syntax.Limit: lower_limit,
    syntax.Show: lower_show,
}
_ONE = Domain()


@dataclass
class LoweredCache:
    """Lowered statements by their text, kept while a worksheet is edited.

    Places in them are relative to the statement, so they serve wherever it now stands. The whole cache is
    dropped when units, definitions or index sets change, since every statement may depend on them.
    """

    names: NameTable = field(default_factory=NameTable)
    context: Context | None = None
    entries: dict[object, LoweredStatement | None] = field(default_factory=dict)

    def enter(self, context: Context) -> None:
        """Use the cache under `context`."""
        if self.context is None or not _same_context(self.context, context) or len(self.entries) > 200_000:
            self.entries.clear()
            self.names = NameTable()
        self.context = context

    def lowered(
        self, statement: syntax.Statement, indices: IndexScope, in_instance: bool
    ) -> LoweredStatement | None:
        """The lowered statement, worked out now if it is new; None where each member needs one of its own."""
        text = statement.line.text
        plain = not indices.free and not indices.fixed and not in_instance
        key: object = text if plain else (text, _signature(indices), in_instance)
        if key in self.entries:
            return self.entries[key]
        assert self.context is not None
        found: LoweredStatement | None
        try:
            found = _LOWER[type(statement.node)](statement, self.context, self.names, indices, in_instance)
        except NeedsMembers:
            found = None
        self.entries[key] = found
        return found


def _signature(indices: IndexScope) -> tuple[object, ...]:
    return tuple(sorted(indices.free.items())), tuple(sorted(indices.fixed.items()))


@dataclass(frozen=True, slots=True)
class _Work:
    """A statement in its place, lowered, with the domain of its indices."""

    place: Placed
    number: int
    domain: Domain
    lowered: LoweredStatement


def build_system(
    statements: Sequence[syntax.Statement],
    cache: LoweredCache | None = None,
    freed: Collection[str] = (),
) -> tuple[EquationSystem, tuple[Diagnostic, ...]]:
    """The equation system of the statements in use (those that are not off).

    Parameters
    ----------
    statements : sequence of Statement
        In the order of the text; statements switched off are ignored.
    cache : LoweredCache, optional
        Lowered statements of an earlier state of the worksheet; updated.
    freed : collection of str
        Full names of members whose knowns do not count (``D[P12]``).
    """
    used = [s for s in statements if not s.off]
    diagnostics: list[Diagnostic] = []
    cache = cache or LoweredCache()
    _check_labels(_all(used), diagnostics)
    unit_table = collect_units(used, diagnostics)
    definitions = collect_definitions(used, diagnostics)
    tables = collect_tables(used, unit_table, diagnostics)
    placed = place_statements(used, diagnostics)
    indexing = Indexing(tables.sets, _whole_knowns(used), tables.members)
    curves = collect_curves(used, definitions, unit_table, diagnostics)
    context = Context(unit_table, definitions, indexing, curves)
    cache.enter(context)
    told = [f.at(s) for s in definitions.values() for f in check_definition(s, context)]
    diagnostics += told
    numbered = _numbered(placed, tables)
    slips: list[tuple[Finding, syntax.Statement]] = []
    work = _lower_all(placed, numbered, cache, indexing, slips, diagnostics)
    # A known switched off still tells in which unit its quantity is thought of.
    idle = [
        one
        for s in statements
        if s.off and isinstance(s.node, syntax.Equation)
        if (one := cache.lowered(s, IndexScope(), False)) is not None
    ]
    system = _assemble(work, tables, idle, numbered, cache.names, context, freed, diagnostics)
    if slips:
        quantities = {name.partition("[")[0] for name in system.names}
        diagnostics.extend(finding.at(statement, quantities) for finding, statement in slips)
    return system, without_echoes(diagnostics, told, used, {*definitions, *curves})


def _all(statements: Iterable[syntax.Statement]) -> Iterable[syntax.Statement]:
    for statement in statements:
        yield statement
        yield from _all(statement.body)


def _whole_knowns(statements: Sequence[syntax.Statement]) -> Mapping[str, int]:
    """Knowns that are plain whole numbers, of those that subscripts and ranges mention."""
    mentioned = names_in(
        (s.node.clauses, s.node.filter) if isinstance(s.node, syntax.Family) else s.node
        for s in _all(statements)
        if isinstance(s.node, syntax.Family | syntax.Use) or "[" in s.line.text or " for " in s.line.text
    )
    if not mentioned:
        return {}
    whole: dict[str, int] = {}
    for statement in statements:
        node = statement.node
        if not isinstance(node, syntax.Equation):
            continue
        for target, value in ((node.left, node.right), (node.right, node.left)):
            if (
                isinstance(target, syntax.Reference)
                and isinstance(value, syntax.Number)
                and target.dotted in mentioned
                and value.unit is None
                and (number := whole_number(value)) is not None
            ):
                whole[target.dotted] = number
    return whole


def _numbered(placed: Sequence[Placed], tables: Tables) -> dict[int, tuple[int, syntax.Statement]]:
    """Statements of the system with their numbers, by identity."""
    numbered: dict[int, tuple[int, syntax.Statement]] = {}
    rows = (known.row for column in tables.columns for known in column.knowns)
    for statement in (*(p.statement for p in placed), *rows):
        numbered.setdefault(id(statement), (len(numbered), statement))
    return numbered


def _lower_all(
    placed: Sequence[Placed],
    numbered: Mapping[int, tuple[int, syntax.Statement]],
    cache: LoweredCache,
    indexing: Indexing,
    slips: list[tuple[Finding, syntax.Statement]],
    diagnostics: list[Diagnostic],
) -> list[_Work]:
    work: list[_Work] = []
    domains: dict[tuple[int, ...], Domain | None] = {}
    no_indices = IndexScope()
    said: set[int] = set()
    for place in placed:
        statement = place.statement
        number = numbered[id(statement)][0]
        in_instance = place.instance is not None
        domain, indices = _ONE, no_indices
        if place.heads:
            over = _domain(place.heads, indexing, domains, diagnostics)
            if over is None:
                continue
            domain, indices = over, IndexScope(free=over.sets)
        one = cache.lowered(statement, indices, in_instance)
        if one is not None:
            if one.findings and id(statement) not in said:
                said.add(id(statement))
                slips.extend((finding, statement) for finding in one.findings)
            work.append(_Work(place, number, domain, one))
            continue
        for entry in range(domain.size):
            fixed = {n: (int(a[entry]), domain.sets[n]) for n, a in domain.arrays.items()}
            one = cache.lowered(statement, IndexScope(fixed=fixed), in_instance)
            assert one is not None
            if one.findings and id(statement) not in said:
                said.add(id(statement))
                slips.extend((finding, statement) for finding in one.findings)
            work.append(_Work(place, number, domain.at(entry), one))
    return work


def _domain(
    heads: Sequence[syntax.Statement],
    indexing: Indexing,
    known: dict[tuple[int, ...], Domain | None],
    diagnostics: list[Diagnostic],
) -> Domain | None:
    """The domain of some `for` lines, None where one of them is wrong (which is said once)."""
    key = tuple(map(id, heads))
    if key in known:
        return known[key]
    outer = _domain(heads[:-1], indexing, known, diagnostics) if len(heads) > 1 else _ONE
    head = heads[-1].node
    assert isinstance(head, syntax.Family)
    result = None
    if outer is not None:
        try:
            result = outer
            for clause in head.clauses:
                result = grown(result, clause, indexing)
            result = filtered(result, head.filter, indexing)
            if not result.size and outer.size:
                diagnostics.append(_empty_family(heads[-1]))
        except IndexSlip as slip:
            diagnostics.append(slip.finding.at(heads[-1]))
            result = None
    known[key] = result
    return result


def _empty_family(head: syntax.Statement) -> Diagnostic:
    return warning(
        "empty-family",
        "this family has no members",
        Label(head.whole),
        help="its lines are not used; check the range or the filter",
    )


def _assemble(
    work: list[_Work],
    tables: Tables,
    idle: Sequence[LoweredStatement],
    numbered: Mapping[int, tuple[int, syntax.Statement]],
    provisional: NameTable,
    context: Context,
    freed: Collection[str],
    diagnostics: list[Diagnostic],
) -> EquationSystem:
    """Give the quantities their final numbers and bind all items to them."""
    indexing = context.indexing
    statements = tuple(statement for _, statement in numbered.values())
    numbering, broken = _number(work, tables, provisional, indexing, diagnostics)
    binder = Binder(
        numbering, indexing, provisional, {i: n for i, (n, _) in numbered.items()}, broken, diagnostics
    )
    names = numbering.names(indexing)
    _refuse_indices_like_quantities(work, numbering, diagnostics)
    gathered = _Gathered(names, statements)
    for column in tables.columns:
        _put_column(gathered, column, numbering, binder)
    for one in work:
        _put(gathered, one, binder, indexing)
    _count_plainly(gathered, indexing, numbering)
    _apply_overrides(gathered, freed, diagnostics)
    gathered.equations.sort(key=_equation_key(statements))
    return EquationSystem(
        statements,
        names,
        tuple(gathered.first_places),
        tuple(gathered.equations),
        tuple(_by_precedence(gathered.guesses, statements, names, diagnostics)),
        tuple(gathered.limits),
        gathered.shown,
        gathered.preferred_units(idle, binder),
        context.unit_table,
        context.unit_table.ambient,
        any(one.lowered.uses_gauge for one in work),
        tuple(gathered.shows),
        _families_by_quantity(numbering),
    )


def _refuse_indices_like_quantities(
    work: Sequence[_Work], numbering: Numbering, diagnostics: list[Diagnostic]
) -> None:
    """An index that bears the name of a quantity would make one name mean two things in its body."""
    paths = {tuple(name for name, _ in path) for path in numbering.families}
    if not paths:
        return
    checked: set[tuple[int, int]] = set()
    for one in work:
        statement = one.place.statement
        scope = one.place.scope
        for part in (*one.place.heads, statement):
            if (id(part), id(scope)) in checked or (part is statement and " for " not in statement.line.text):
                continue
            checked.add((id(part), id(scope)))
            for clause in _clauses(part):
                key = scope.resolve(clause.index)
                path = (key,) if isinstance(key, str) else tuple(name for name, _ in key.path)
                if key in numbering.plain or path in paths:
                    slip = error(
                        "index-is-quantity",
                        f"`{clause.index}` is an index here and a quantity elsewhere",
                        Label(part.span(clause.start, clause.end)),
                        help="give the index another name",
                    )
                    if slip not in diagnostics:
                        diagnostics.append(slip)


def _clauses(statement: syntax.Statement) -> list[syntax.IndexClause]:
    """The index clauses of a `for` line, or of the aggregates in a statement."""
    if isinstance(statement.node, syntax.Family):
        return list(statement.node.clauses)
    return [node for node in walk(statement.node) if isinstance(node, syntax.IndexClause)]


def _families_by_quantity(numbering: Numbering) -> tuple[int, ...]:
    """For each quantity the number of its family's first member; empty where there are no families."""
    if not numbering.families:
        return ()
    first = list(range(numbering.total))
    for family in numbering.families.values():
        first[family.first : family.first + family.size] = [family.first] * family.size
    return tuple(first)


def _number(
    work: Sequence[_Work],
    tables: Tables,
    provisional: NameTable,
    indexing: Indexing,
    diagnostics: list[Diagnostic],
) -> tuple[Numbering, set[object]]:
    """Numbers of all quantities that equations name, and the keys that broken statements name."""
    collector = FamilyCollector(indexing)
    for column in tables.columns:
        collector.declare(((column.name, 1),), (column.set,), column.codes)
    plain: set[str] = set()
    broken: set[object] = set()
    keys = provisional.names
    for one in work:
        if one.lowered.findings:
            broken.update(resolved_key(keys[n], one.place) for n, _, _ in one.lowered.named)
        if one.lowered.equation is None:
            continue
        for number, _, _ in one.lowered.named:
            key = keys[number]
            resolved = key if one.place.plain and isinstance(key, str) else resolved_key(key, one.place)
            if isinstance(resolved, str):
                plain.add(resolved)
                continue
            written_key = key.key if isinstance(key, OfInstance) else key
            # A path written out, `supply.dP`, refers to what the template makes; so does a line of an
            # instance's group.
            makes = not isinstance(key, OfInstance) and (
                isinstance(written_key, str)
                or (isinstance(written_key, FamilyReference) and len(written_key.path) == 1)
            )
            try:
                collector.see(resolved, one.domain, makes)
            except IndexSlip as slip:
                found = slip.finding.at(one.place.statement)
                if found not in diagnostics:
                    diagnostics.append(found)
    # What is wrong with a reference that makes no member is said again, and better, when it is bound.
    collector.finish()
    families = {path[0][0] for path in collector.sets if len(path) == 1 and path[0][1]}
    return collector.numbering(plain - families), broken


@dataclass
class _Gathered:
    """Items bound so far."""

    names: tuple[str, ...]
    statements: tuple[syntax.Statement, ...]
    equations: list[EquationItem] = field(default_factory=list)
    limits: list[LimitItem] = field(default_factory=list)
    guesses: list[GuessItem] = field(default_factory=list)
    shown: dict[int, Unit | None] = field(default_factory=dict)
    shows: list[Formula] = field(default_factory=list)
    hints: tuple[dict[int, Unit], dict[int, Unit], dict[int, Unit]] = field(
        default_factory=lambda: ({}, {}, {})
    )

    def __post_init__(self) -> None:
        nowhere = Place(0, 0, 0)
        self.first_places = [nowhere] * len(self.names)
        self._placed = [False] * len(self.names)

    def see(self, quantity: int, place: Place) -> None:
        """Note where a quantity is named, the first time."""
        if not self._placed[quantity]:
            self._placed[quantity] = True
            self.first_places[quantity] = place

    def preferred_units(self, idle: Sequence[LoweredStatement], binder: Binder) -> dict[int, Unit]:
        """Unit for each quantity by precedence: `show`, known, known switched off, guess, limit."""
        units: dict[int, Unit] = {q: unit for q, unit in self.shown.items() if unit is not None}
        knowns, guesses, limits = self.hints
        off: dict[int, Unit] = {}
        for one in idle:
            for provisional, unit in one.unit_hints:
                number = binder.plain_number(provisional)
                if number is not None:
                    off.setdefault(number, unit)
        groups: tuple[Mapping[int, Unit | None], ...] = (self.shown, knowns, off, guesses, limits)
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


def _put(gathered: _Gathered, one: _Work, binder: Binder, indexing: Indexing) -> None:
    """Bind one statement's items."""
    lowered = one.lowered
    try:
        if lowered.equation is not None:
            bound = binder.bind((*lowered.named, *lowered.conditions_name), one.place, one.domain)
            _put_equations(gathered, one, lowered.equation, bound, indexing)
            _put_hints(gathered.hints[0], lowered, bound)
        elif lowered.limit is not None:
            bound = binder.bind(lowered.named, one.place, one.domain)
            _put_limits(gathered, one, lowered.limit, bound, indexing)
            _put_hints(gathered.hints[2], lowered, bound)
        for meant in lowered.guesses:
            _put_guesses(gathered, one, meant, binder)
    except Unbound:
        return
    for item in lowered.shows:
        _put_show(gathered, one, item.quantity, item.unit, item.formula, (item.start, item.end), binder)


def _put_hints(hints: dict[int, Unit], lowered: LoweredStatement, bound: Bound) -> None:
    for provisional, unit in lowered.unit_hints:
        for entry in range(bound.domain.size):
            (quantity,) = bound.numbers((provisional,), entry)
            hints.setdefault(quantity, unit)


def _member(one: _Work, entry: int, indexing: Indexing) -> str:
    """What tells one member of a statement from the others, for messages."""
    scope = one.place.instance or one.place.scope
    name = instance_name(scope, one.domain, entry, indexing)
    told = {node.name for node in scope.nodes if isinstance(node, syntax.Reference)}
    indices = {n: a for n, a in one.domain.arrays.items() if n not in told}
    rest = entry_text(replace(one.domain, arrays=indices), entry, indexing)
    return ", ".join(part for part in (name, rest) if part)


def _put_equations(
    gathered: _Gathered, one: _Work, item: EquationItem, bound: Bound, indexing: Indexing
) -> None:
    place = Place(one.number, item.place.start, item.place.end)
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
    for provisional, start, end in one.lowered.named:
        where = Place(one.number, start, end)
        column = bound.columns[provisional]
        for quantity in (column,) if isinstance(column, int) else set(column.tolist()):
            gathered.see(quantity, where)


def _put_limits(gathered: _Gathered, one: _Work, item: LimitItem, bound: Bound, indexing: Indexing) -> None:
    for entry, formula in enumerate(member_formulas(item.formula, bound, one.number)):
        member = "" if one.place.plain else _member(one, entry, indexing)
        gathered.limits.append(
            replace(
                item,
                formula=formula,
                place=replace(item.place, statement=one.number),
                text=f"{item.text} ({member})" if member else item.text,
            )
        )


def _put_guesses(gathered: _Gathered, one: _Work, meant: GuessMeant, binder: Binder) -> None:
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
    bound = binder.bind(lowered.named, one.place, one.domain, meant.target if targets is not None else -1)
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


def _put_show(
    gathered: _Gathered,
    one: _Work,
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
        gathered.shown.setdefault(bound.numbers((provisional,), entry)[0], unit)
    if formula is not None:
        gathered.shows.extend(member_formulas(formula, bound, one.number))


def _put_column(gathered: _Gathered, column: TableColumn, numbering: Numbering, binder: Binder) -> None:
    """The knowns of a column of a table."""
    family = numbering.families.get(((column.name, 1),))
    if family is None:
        return
    numbers = family.numbers([column.codes], len(column.codes))
    for known in column.knowns:
        quantity = int(numbers[known.code])
        item = _cell_item(quantity, known, binder.statement_number(known.row))
        gathered.equations.append(item)
        gathered.see(quantity, item.place)
        if column.unit is not None:
            gathered.hints[0].setdefault(quantity, column.unit)


def _count_plainly(gathered: _Gathered, indexing: Indexing, numbering: Numbering) -> None:
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


def _apply_overrides(gathered: _Gathered, freed: Collection[str], diagnostics: list[Diagnostic]) -> None:
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


def _equation_key(
    statements: tuple[syntax.Statement, ...],
) -> Callable[[EquationItem], tuple[bool, list[int], str]]:
    """Order of equations that does not depend on the order of lines: knowns, then by names, then by text."""

    def key(item: EquationItem) -> tuple[bool, list[int], str]:
        text = statements[item.place.statement].line.text[item.place.start : item.place.end]
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
                what = {"near": "a start value", "lower": "a lower bound", "upper": "an upper bound"}[role]
                diagnostics.append(
                    error(
                        "guess-twice",
                        f"`{names[item.quantity]}` has two guesses with {what}",
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


def _check_labels(used: Iterable[syntax.Statement], diagnostics: list[Diagnostic]) -> None:
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


def _same_context(a: Context, b: Context) -> bool:
    mine, other = a.unit_table, b.unit_table
    if mine is not other and (mine.ambient, mine.added) != (other.ambient, other.added):
        return False
    if a.definitions.keys() != b.definitions.keys() or not _same_indexing(a.indexing, b.indexing):
        return False
    if a.curves != b.curves:
        return False
    return all(
        x.node == b.definitions[name].node and x.line.text == b.definitions[name].line.text
        for name, x in a.definitions.items()
    )


def _same_indexing(a: Indexing, b: Indexing) -> bool:
    if a.whole != b.whole or a.sets.keys() != b.sets.keys() or a.columns.keys() != b.columns.keys():
        return False
    return all(s.members == b.sets[n].members for n, s in a.sets.items()) and all(
        (c.rows, c.of, c.codes.tolist()) == (d.rows, d.of, d.codes.tolist())
        for n, c in a.columns.items()
        if (d := b.columns[n]) is not None
    )
