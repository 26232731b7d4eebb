"""The structural verdict in the worksheet's own terms: lines and names instead of rows and columns."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Mapping, Sequence

from eqsheet.diagnostics.diagnostic import Diagnostic, error
from eqsheet.model.aggregate_parts import is_part
from eqsheet.model.spelling import close_names
from eqsheet.model.system import EquationItem, EquationSystem
from eqsheet.model.tape import Formula
from eqsheet.structure.verdict import Conflict, Shortfall, Structure
from eqsheet.syntax.nodes import Statement
from eqsheet.worksheet.places import MOST_LABELS, MOST_LISTED, label_of, line_words, listed, quoted
from eqsheet.worksheet.unshared_names import unshared_note

# Each name is compared with all others; where very many quantities are free, a slip is not the reason.
MOST_SPELLED = 20
# The forgotten `shared` of a template shows at its first instances.
MOST_LOOKED_AT = 200

# Names that an engineer may take for given.
_NOT_GIVEN = {
    **dict.fromkeys(("π", "Pi", "PI"), "`{}` is a quantity like any other; the number is written `pi`"),
    "ambient": "`{}` is set by no line: write `ambient = 101.325 kPa` or the like",
}


def structure_diagnostics(
    system: EquationSystem,
    formulas: Sequence[Formula],
    rows: Sequence[int],
    structure: Structure,
    statements: Sequence[Statement],
) -> list[Diagnostic]:
    """One diagnostic for each over- or under-determined piece of a worksheet of some statements.

    Conflicts are not reported here: whether the statements contradict each other or merely repeat themselves is
    told once the rest is solved, see `conflict_diagnostic`.
    """
    square = len(structure.unmatched_rows) == len(structure.unmatched_columns)
    singular = bool(structure.conflicts) and square
    slips = _likely_slips(system, formulas, structure.shortfalls, statements)
    return [
        shortfall_diagnostic(system, rows, shortfall, singular, slips) for shortfall in structure.shortfalls
    ]


def shortfall_diagnostic(
    system: EquationSystem,
    rows: Sequence[int],
    shortfall: Shortfall,
    singular: bool,
    slips: Mapping[int, str],
) -> Diagnostic:
    """What is free in an under-determined piece, and what could be added.

    Parameters
    ----------
    singular : bool
        The worksheet as a whole has as many equations as unknowns, so that elsewhere there is one too many.
    slips : mapping of int to str
        What is to be said of quantities whose names are likely slips.
    """
    items = [system.equations[rows[r]] for r in shortfall.rows]
    columns: Sequence[int] = _told(system, shortfall.columns)
    if len(columns) > MOST_LISTED:
        # Not all of them are told: the ones that may be missing a line go first.
        columns = sorted(columns, key=_as_if_found(system, items))
    names = [system.names[c] for c in columns]
    missing = shortfall.missing
    count = "one more equation or known is" if missing == 1 else f"{missing} more equations or knowns are"
    if items:
        where = line_words(system, [i.place for i in items])
        number = len(items) - (len(shortfall.columns) - len(columns))
        message = f"{where} {'does' if number == 1 else 'do'} not determine {quoted(names)}: {count} needed"
    else:
        message = f"nothing determines {quoted(names)}"
    labels = [label_of(system, system.first_places[columns[0]])]
    others = dict.fromkeys(
        label_of(system, i.place)
        for i in items
        if i.place.statement != system.first_places[columns[0]].statement
    )
    labels += list(others)[:MOST_LABELS]
    notes = []
    if singular:
        notes.append(
            "the worksheet has as many equations as unknowns, but too many of them elsewhere: it is structurally singular"
        )
    notes += [slips[column] for column in shortfall.columns if column in slips]
    wanted = "one of" if missing == 1 else f"{missing} of"
    help = (
        f"set {names[0]!r}".replace("'", "`") + " by a line of its own, or add an equation for it"
        if len(names) == 1
        else f"set {wanted} {quoted(names, 'or')} by a line of its own, or add an equation between them"
    )
    return error("under-determined", message, *labels, notes=tuple(notes), help=help)


def _as_if_found(
    system: EquationSystem, items: Sequence[EquationItem]
) -> Callable[[int], tuple[bool, bool, bool, bool]]:
    """How much a free quantity looks like one to be found, not like one whose line was forgotten.

    What has a guess or a shown unit, or is alone on a left side, is to be found; what stands in one equation only, or
    nowhere alone, may be a known that is missing.
    """
    wanted = {*system.shown, *(guess.quantity for guess in system.guesses)}
    uses = Counter(quantity for item in items for quantity in item.formula.quantities)
    alone: tuple[set[int], set[int]] = (set(), set())
    for item in items:
        for side, output in enumerate(item.formula.tape.outputs[:2]):
            operation, *rest = item.formula.tape.instructions[output]
            if operation == "quantity":
                alone[side].add(item.formula.quantities[rest[0]])
    left, right = alone
    return lambda q: (q in wanted, q in left, uses[q] > 1, q in right)


def _likely_slips(
    system: EquationSystem,
    formulas: Sequence[Formula],
    shortfalls: Sequence[Shortfall],
    statements: Sequence[Statement],
) -> dict[int, str]:
    """What is to be said of free quantities that are likely slips.

    They stand in one equation only and have a name close to another, or are local to a template that forgot to share
    them.
    """
    if not shortfalls:
        return {}
    uses = Counter(quantity for formula in formulas for quantity in formula.quantities)
    free = [c for shortfall in shortfalls for c in shortfall.columns]
    once = [c for c in free if uses[c] == 1 or system.names[c] in _NOT_GIVEN]
    found: dict[int, str] = {}
    inside = (c for c in free[:MOST_LOOKED_AT] if "." in system.names[c])
    for column in inside:
        said = unshared_note(system.names[column], statements, system.names)
        # Once for all instances of a template.
        if said and not any(said.endswith(other.partition(" is there")[2]) for other in found.values()):
            found[column] = said
    for column in once[:MOST_SPELLED]:
        if column in found:
            continue
        # Members of one family are alike by design, and an index is no slip.
        if system.names[column] in _NOT_GIVEN:
            found[column] = _NOT_GIVEN[system.names[column]].format(system.names[column])
            continue
        close = () if "[" in system.names[column] else _close(system.names[column], system.names)
        if close:
            place = line_words(system, (system.first_places[column],))
            found[column] = (
                f"`{system.names[column]}` occurs only on {place}: did you mean {quoted(close, 'or')}?"
            )
    return found


def _close(name: str, names: Sequence[str]) -> tuple[str, ...]:
    """Names that one may be a slip for; inside an instance, of its own quantities."""
    owner, dot, last = name.rpartition(".")
    if not dot:
        return close_names(name, names)
    others = [n.rpartition(".") for n in names]
    return tuple(f"{owner}.{n}" for n in close_names(last, [n for own, _, n in others if own == owner]))


def _told(system: EquationSystem, columns: Sequence[int]) -> Sequence[int]:
    """The quantities without the parts of large sums, each of which has an equation of its own; those if alone."""
    return [c for c in columns if not is_part(system.names[c])] or columns


def conflict_diagnostic(
    system: EquationSystem, rows: Sequence[int], conflict: Conflict, satisfied: bool | None, gap: str
) -> Diagnostic:
    """What competes in an over-determined piece, and what could be switched off.

    Parameters
    ----------
    satisfied : bool or None
        Whether the left-out equations hold at the solution of the others; None where that could not be found.
    gap : str
        The sides of the first left-out equation that does not hold, in words.
    """
    items = [system.equations[rows[r]] for r in conflict.rows]
    items.sort(key=lambda i: i.place.statement)
    likely = sorted(items, key=_suspicion(system, items))
    names = [system.names[c] for c in _told(system, conflict.columns)]
    knowns = [system.names[i.known] for i in likely if i.known >= 0]
    where = line_words(system, [i.place for i in items])
    parts = len(conflict.columns) - len(names)
    many = f"{len(items) - parts} statements for {len(names)} quantit{'y' if len(names) == 1 else 'ies'}"
    left_out = [system.equations[rows[r]] for r in conflict.left_out]
    labels = [label_of(system, left_out[0].place, "this is one too many" if satisfied is not True else "")]
    others = dict.fromkeys(label_of(system, i.place) for i in likely if i.place != left_out[0].place)
    labels += list(others)[:MOST_LABELS]
    notes = [f"they compete for {quoted(names)}"]
    if gap:
        notes.append(gap)
    off = "one of them" if conflict.excess == 1 else f"{conflict.excess} of them"
    help = f"switch {off} `off`"
    if knowns:
        help += f"; {'the known' if len(knowns) == 1 else 'a known'} that could go: {quoted(knowns, 'or')}"
    if satisfied:
        message = f"{where} repeat each other: {many}, all satisfied by the solution"
        return error("redundant-equations", message, *labels, notes=tuple(notes), help=help)
    if satisfied is False:
        message = f"{where} contradict each other: {many}"
        return error("contradicting-equations", message, *labels, notes=tuple(notes), help=help)
    verb = "over-determines" if len({i.place.statement for i in items}) == 1 else "over-determine"
    message = f"{where} {verb} {listed([f'`{n}`' for n in names])}: {many}"
    return error("over-determined", message, *labels, notes=tuple(notes), help=help)


def _suspicion(system: EquationSystem, items: Sequence[EquationItem]) -> Callable[[EquationItem], int]:
    """How unlikely it is that a competing statement is the one too many; equal ones stay in their order.

    A known whose quantity has a guess as well was meant to be found, and so was one that an equation has alone
    on a side.
    """
    guessed = {guess.quantity for guess in system.guesses}
    given = {q for item in items if item.known < 0 for q in _alone(item.formula)}
    times = Counter(item.known for item in items)

    def rank(item: EquationItem) -> int:
        if item.known < 0:
            return 3
        if item.known in guessed:
            return 0
        return 1 if item.known in given or times[item.known] > 1 else 2

    return rank


def _alone(formula: Formula) -> list[int]:
    """Quantities that stand alone on a side of an equation."""
    sides = [formula.tape.instructions[output] for output in formula.tape.outputs]
    return [formula.quantities[side[1]] for side in sides if side[0] == "quantity"]
