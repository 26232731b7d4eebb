"""Builds the equation system of a document: one pass after the other, in the order of `build_system`.

Takes: the statements of a worksheet. Gives: an `EquationSystem` and diagnostics. A statement with a finding is
left out of the system; the others are unaffected.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Iterator, Mapping, Sequence
from dataclasses import replace

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.model.bind import (
    Binder,
    resolved_key,
)
from eqsheet.model.curves import collect_curves
from eqsheet.model.domains import Domains, visible
from eqsheet.model.equation_group import LARGE_FAMILY
from eqsheet.model.families import FamilyCollector, FamilyReference, Numbering
from eqsheet.model.family_names import FamilyNames
from eqsheet.model.find_units_like_names import find_units_like_names
from eqsheet.model.findings import Finding
from eqsheet.model.gather import (
    Gathered,
    Work,
    apply_overrides,
    by_precedence,
    count_plainly,
    equation_key,
    put_column,
    put_statement,
)
from eqsheet.model.grouping import Grouping
from eqsheet.model.index_conditions import by_condition, index_conditions
from eqsheet.model.indexing import Domain, Indexing, each_with_all
from eqsheet.model.lower_definitions import check_definition, collect_definitions, without_echoes
from eqsheet.model.lower_statements import (
    LoweredStatement,
)
from eqsheet.model.lowered_cache import LoweredCache
from eqsheet.model.members_set import unmentioned_members
from eqsheet.model.placed import Placed, Scope, place_statements
from eqsheet.model.scope import NO_INDICES, Context, IndexScope, NameTable, OfInstance
from eqsheet.model.system import (
    EquationSystem,
    LimitItem,
)
from eqsheet.model.tables import Tables, collect_tables
from eqsheet.model.unit_statements import collect_units
from eqsheet.model.whole_numbers import WholeNumbers
from eqsheet.model.written_nodes import names_in
from eqsheet.syntax import nodes as syntax
from eqsheet.syntax.walk import walk


def build_system(
    statements: Sequence[syntax.Statement],
    cache: LoweredCache | None = None,
    freed: Collection[str] = (),
    large_family: int = LARGE_FAMILY,
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
    large_family : int
        Statements with at least so many members are kept as arrays, where they are simple enough.
    """
    used = [s for s in statements if not s.off]
    diagnostics: list[Diagnostic] = []
    cache = cache or LoweredCache()
    _check_labels(_all(used), diagnostics)
    unit_table = collect_units(used, diagnostics)
    definitions = collect_definitions(used, diagnostics)
    tables = collect_tables(used, unit_table, diagnostics)
    placed = place_statements(used, diagnostics)
    whole = WholeNumbers(placed, _names_in_subscripts(used))
    indexing = Indexing(tables.sets, whole.of_worksheet(), tables.members)
    curves = collect_curves(used, definitions, unit_table, diagnostics)
    context = Context(unit_table, definitions, indexing, curves)
    cache.enter(context)
    told = [f.at(s) for s in definitions.values() for f in check_definition(s, context)]
    diagnostics += told
    numbered = _numbered(placed, tables)
    slips: list[tuple[Finding, syntax.Statement]] = []
    lost: set[object] = set()
    work = _lower_all(placed, numbered, cache, indexing, whole, slips, lost, diagnostics)
    # A known switched off still tells in which unit its quantity is thought of.
    idle = [
        one
        for s in statements
        if s.off and isinstance(s.node, syntax.Equation)
        if (one := cache.lowered(s, IndexScope(), False)) is not None
    ]
    system = _assemble(
        work,
        tables,
        idle,
        numbered,
        cache.names,
        lost,
        context,
        whole.mentioned,
        freed,
        diagnostics,
        large_family,
    )
    if slips:
        quantities = {name.partition("[")[0] for name in system.names}
        diagnostics.extend(finding.at(statement, quantities) for finding, statement in slips)
    return system, without_echoes(diagnostics, told, used, {*definitions, *curves})


def _all(statements: Iterable[syntax.Statement]) -> Iterable[syntax.Statement]:
    for statement in statements:
        yield statement
        yield from _all(statement.body)


def _names_in_subscripts(statements: Sequence[syntax.Statement]) -> set[str]:
    """The names that subscripts, ranges, filters and lines with them mention."""
    return names_in(
        (s.node.clauses, s.node.filter) if isinstance(s.node, syntax.Family) else s.node
        for s in _all(statements)
        if isinstance(s.node, syntax.Family | syntax.Use) or "[" in s.line.text or " for " in s.line.text
    )


def _numbered(placed: Sequence[Placed], tables: Tables) -> dict[int, tuple[int, syntax.Statement]]:
    """Statements of the system with their numbers, by identity."""
    numbered: dict[int, tuple[int, syntax.Statement]] = {}
    rows = (cell.row for column in tables.columns for cell in column.cells)
    for statement in (*(p.statement for p in placed), *rows):
        numbered.setdefault(id(statement), (len(numbered), statement))
    return numbered


def _lower_all(
    placed: Sequence[Placed],
    numbered: Mapping[int, tuple[int, syntax.Statement]],
    cache: LoweredCache,
    indexing: Indexing,
    whole: WholeNumbers,
    slips: list[tuple[Finding, syntax.Statement]],
    lost: set[object],
    diagnostics: list[Diagnostic],
) -> list[Work]:
    """Lowered statements with their domains; the names of those whose `for` line is wrong are added to `lost`."""
    work: list[Work] = []
    domains = Domains(indexing, whole, diagnostics)
    said: set[int] = set()
    parts_there: set[object] = set()
    for place in placed:
        statement = place.statement
        number = numbered[id(statement)][0]
        domain = domains.of(place)
        if domain is None:
            lost.update(_names_at(place))
            continue
        free = visible(domain.sets)
        found = _lowered(place, domain, free, cache, indexing, whole)
        for over, one in found:
            if one.findings and id(statement) not in said:
                said.add(id(statement))
                slips.extend((_of_instance(finding, place), statement) for finding in one.findings)
            work.append(Work(place, number, over, one))
            work += _parts(work[-1], parts_there)
    return work


def _lowered(
    place: Placed,
    domain: Domain,
    free: Mapping[str, str],
    cache: LoweredCache,
    indexing: Indexing,
    whole: WholeNumbers,
) -> Iterator[tuple[Domain, LoweredStatement]]:
    """A statement lowered for the parts of its domain that need a formula of their own."""
    statement, in_instance = place.statement, place.instance is not None
    local = whole.local(place.scope)
    if local:
        local = {name: local[name] for name in names_in((statement.node,)).intersection(local)}
    here = IndexScope(whole=local) if local else NO_INDICES
    if not free:
        one = cache.lowered(statement, here, in_instance)
        assert one is not None, "without an index there is one member"
        yield domain, one
        return
    indexing = whole.indexing(indexing, place.scope)
    conditions = index_conditions(statement, free, domain, indexing)
    # The members of a limit are told in order, so they are not taken apart.
    if not conditions or not isinstance(statement.node, syntax.Limit):
        for over, decided in by_condition(domain, conditions, indexing):
            one = cache.lowered(statement, replace(here, free=free, decided=decided), in_instance)
            if one is None:
                yield from _member_by_member(statement, over, free, here, cache, in_instance)
            else:
                yield over, one
        return
    yield from _member_by_member(statement, domain, free, here, cache, in_instance)


def _member_by_member(
    statement: syntax.Statement,
    domain: Domain,
    free: Mapping[str, str],
    here: IndexScope,
    cache: LoweredCache,
    in_instance: bool,
) -> Iterator[tuple[Domain, LoweredStatement]]:
    """A statement lowered for each member by itself."""
    for entry in range(domain.size):
        fixed = {n: (int(domain.arrays[n][entry]), free[n]) for n in free}
        one = cache.lowered(statement, replace(here, fixed=fixed), in_instance)
        assert one is not None, "with its indices fixed a member is lowered"
        yield domain.at(entry), one


def _of_instance(finding: Finding, place: Placed) -> Finding:
    """A finding about a value, with the instance of a template that it is of."""
    instance = place.instance or place.scope
    if finding.code != "value-not-finite" or not instance.path:
        return finding
    return replace(finding, notes=(*finding.notes, f"in the instance `{instance.text}`"))


def _names_at(place: Placed) -> Iterator[str]:
    """What the quantities that a statement names are called, without subscripts."""
    for name in names_in((place.statement.node,)):
        for scope in (place.scope, place.instance or place.scope):
            key = scope.resolve(name)
            yield key if isinstance(key, str) else key.text


def _parts(one: Work, there: set[object]) -> list[Work]:
    """The parts of large sums in a statement, those that are not `there` yet from a like sum elsewhere."""
    found = []
    place = Placed(one.place.statement, one.place.scope)
    already = frozenset(there)
    for part in one.lowered.parts:
        key = place.scope.resolve(part.name)
        if key in already:
            continue
        there.add(key)
        # In an instance of a family of instances there are parts for each.
        domain = each_with_all(one.domain, part.domain) if place.scope.nodes else part.domain
        found.append(Work(place, one.number, domain, part.lowered))
    return found


def _assemble(
    work: list[Work],
    tables: Tables,
    idle: Sequence[LoweredStatement],
    numbered: Mapping[int, tuple[int, syntax.Statement]],
    provisional: NameTable,
    lost: set[object],
    context: Context,
    counting: Collection[str],
    freed: Collection[str],
    diagnostics: list[Diagnostic],
    large_family: int,
) -> EquationSystem:
    """Give the quantities their final numbers and bind all items to them."""
    indexing = context.indexing
    statements = tuple(statement for _, statement in numbered.values())
    numbering, broken = _number(work, tables, provisional, indexing, counting, diagnostics)
    broken |= lost
    binder = Binder(
        numbering, indexing, provisional, {i: n for i, (n, _) in numbered.items()}, broken, diagnostics
    )
    grouping = None
    largest = max(
        (*(one.domain.size for one in work), *(len(column.knowns) for column in tables.columns)), default=0
    )
    if largest >= large_family:
        grouping = Grouping(numbering, large_family, not freed and all(s.source.numbered for s in statements))
    names = numbering.names(indexing) if grouping is None else FamilyNames(numbering, indexing)
    _refuse_indices_like_quantities(work, numbering, diagnostics)
    gathered = Gathered(names, statements, context.unit_table, grouping)
    for column in tables.columns:
        put_column(gathered, column, numbering, binder)
    for one in work:
        put_statement(gathered, one, binder, indexing)
    count_plainly(gathered, indexing, numbering)
    headings = {column.name for column in tables.columns}
    diagnostics.extend(unmentioned_members(gathered, numbering, indexing, headings))
    apply_overrides(gathered, freed, diagnostics)
    gathered.equations.sort(key=equation_key(statements))
    groups = gathered.grouped()
    guesses = tuple(by_precedence(gathered.guesses, statements, names, diagnostics))
    first_places = gathered.first_places
    limits = tuple([one for one in gathered.limits if isinstance(one, LimitItem)])
    return EquationSystem(
        statements,
        names,
        tuple(first_places) if grouping is None else grouping.by_family(first_places.__getitem__),
        tuple(gathered.equations) if grouping is None else grouping.all_equations(gathered.equations),
        guesses if grouping is None else grouping.all_guesses(guesses),
        limits if grouping is None else grouping.all_limits(gathered.limits),
        gathered.shown,
        gathered.preferred_units(idle, binder),
        context.unit_table,
        context.unit_table.ambient,
        any(one.lowered.uses_gauge for one in work),
        tuple(gathered.shows),
        _families_by_quantity(numbering) if grouping is None else grouping.by_family(int),
        *groups,
        () if grouping is None else guesses,
        limits if grouping is None else tuple(gathered.limits),
        find_units_like_names(work, numbering),
    )


def _refuse_indices_like_quantities(
    work: Sequence[Work], numbering: Numbering, diagnostics: list[Diagnostic]
) -> None:
    """An index that bears the name of a quantity would make one name mean two things in its body."""
    paths = {tuple(name for name, _ in path) for path in numbering.families}
    if not paths:
        return
    checked: set[tuple[int, int]] = set()
    for one in work:
        for part, scope in _with_indices(one.place):
            if (id(part), id(scope)) in checked:
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


def _with_indices(place: Placed) -> Iterator[tuple[syntax.Statement, Scope]]:
    """A statement and the `for` lines around it, those around its instances included, with their scopes."""
    scope, heads = place.scope, place.heads
    if " for " in place.statement.line.text:
        yield place.statement, scope
    yield from ((head, scope) for head in heads)
    while scope.around is not None:
        heads, scope = scope.heads, scope.around
        yield from ((head, scope) for head in heads)


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
    work: Sequence[Work],
    tables: Tables,
    provisional: NameTable,
    indexing: Indexing,
    counting: Collection[str],
    diagnostics: list[Diagnostic],
) -> tuple[Numbering, set[object]]:
    """Numbers of all quantities that equations name, and the keys that broken statements name.

    Parameters
    ----------
    counting : collection of str
        Names that ranges and subscripts mention.
    """
    collector = FamilyCollector(indexing)
    for column in tables.columns:
        collector.declare(((column.name, 1),), (column.set,), column.codes)
    plain: set[str] = set()
    # Names that a known sets without a subscript, and names of families beyond doubt.
    alone: set[str] = set()
    indexed: set[str] = {column.name for column in tables.columns}
    broken: set[object] = set()
    keys = provisional.names
    for one in work:
        if one.lowered.findings:
            broken.update(resolved_key(keys[n], one.place) for n, _, _ in one.lowered.named)
        if one.lowered.equation is None:
            continue
        for number, start, end in one.lowered.named:
            key = keys[number]
            resolved = key if one.place.plain and isinstance(key, str) else resolved_key(key, one.place)
            if isinstance(resolved, str):
                plain.add(resolved)
                if number == one.lowered.equation.known:
                    alone.add(resolved)
                continue
            if one.domain.arrays or resolved.fixed:
                indexed.add(resolved.path[0][0])
            written_key = key.key if isinstance(key, OfInstance) else key
            # A path written out, `supply.dP`, refers to what the template makes; so does a line of an
            # instance's group.
            local = isinstance(written_key, str) or (
                isinstance(written_key, FamilyReference) and len(written_key.path) == 1
            )
            # A template may name a number in its ranges and subscripts only, where it is no quantity.
            makes = number not in one.lowered.summed and (
                written_key in counting if isinstance(key, OfInstance) else local
            )
            finding = collector.see(resolved, one.domain, makes, (start, end))
            if finding is not None and (found := finding.at(one.place.statement)) not in diagnostics:
                diagnostics.append(found)
    # What is wrong with a reference that makes no member is said again, and better, when it is bound.
    collector.finish()
    collector.forget({*(alone - indexed), *indexing.columns})
    families = {path[0][0] for path in collector.sets if len(path) == 1 and path[0][1]}
    return collector.numbering(plain.difference(families, indexing.columns)), broken


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
