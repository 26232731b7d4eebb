"""Binds lowered statements to quantities: subscripts become numbers, one formula a member.

Subscripts are worked out for all members of a family at once, as arrays.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.model.aggregate_parts import ENTRY, is_part
from eqsheet.model.families import Family, FamilyReference, Numbering, written_name
from eqsheet.model.indexing import (
    Codes,
    Domain,
    Indexing,
    IndexSlip,
    member_text,
    no_set_with,
    placed,
    subscript,
)
from eqsheet.model.placed import Placed, Scope, is_hidden
from eqsheet.model.scope import NameTable, OfInstance
from eqsheet.model.spelling import did_you_mean
from eqsheet.model.tape import Formula, Instruction, Tape, TapeBuilder, interned, operands_of
from eqsheet.syntax import nodes as syntax

# Of the members there are so many are told by name.
MOST_NAMED = 6


class Unbound(Exception):
    """A statement names a quantity that is not there; the diagnostic is already noted."""


@dataclass(frozen=True)
class Bound:
    """Numbers of the quantities of a statement, for every entry of its domain.

    Attributes
    ----------
    domain : Domain
    columns : mapping of int to (int or Codes)
        By provisional number: one quantity number for all entries, or an array of them.
    """

    domain: Domain
    columns: Mapping[int, int | Codes]

    def numbers(self, provisional: Sequence[int], entry: int) -> tuple[int, ...]:
        """Quantity numbers of one entry."""
        columns = self.columns
        return tuple([c if isinstance(c := columns[p], int) else int(c[entry]) for p in provisional])

    def at(self, entry: int) -> Bound:
        """One entry alone."""
        columns = {p: c if isinstance(c, int) else c[entry : entry + 1] for p, c in self.columns.items()}
        return Bound(self.domain.at(entry), columns)


class Binder:
    """Puts final quantity numbers and statement numbers into lowered items."""

    def __init__(
        self,
        numbering: Numbering,
        indexing: Indexing,
        provisional: NameTable,
        statement_numbers: Mapping[int, int],
        broken: set[object],
        diagnostics: list[Diagnostic],
    ) -> None:
        self.numbering = numbering
        self.indexing = indexing
        self._provisional = provisional
        self._statement_numbers = statement_numbers
        self._broken = broken
        self._diagnostics = diagnostics
        self._without_member: set[object] = set()
        self._plain: dict[int, int] = {}
        for number, key in enumerate(provisional.names):
            if isinstance(key, str) and key in numbering.plain:
                self._plain[number] = numbering.plain[key]
        self._by_name: dict[str, list[Family]] = {}
        for path, family in numbering.families.items():
            self._by_name.setdefault(".".join(name for name, _ in path), []).append(family)

    def statement_number(self, statement: syntax.Statement) -> int:
        """Number of a statement among those of the system."""
        return self._statement_numbers[id(statement)]

    def resolved(self, provisional: int, place: Placed) -> str | FamilyReference:
        """The quantity a provisional number stands for at a place."""
        return resolved_key(self._provisional.names[provisional], place)

    def bind(
        self, named: Sequence[tuple[int, int, int]], place: Placed, domain: Domain, skip: int = -1
    ) -> Bound:
        """Numbers of all quantities a statement names.

        Parameters
        ----------
        named : sequence of (provisional number, start, end)
        skip : int
            A provisional number to leave alone (the stand-in of a pattern).

        Raises
        ------
        Unbound
        """
        plain = self._plain
        if place.plain and all(p in plain for p, _, _ in named):
            return Bound(domain, {p: plain[p] for p, _, _ in named})
        columns: dict[int, int | Codes] = {}
        failed = False
        for number, start, end in named:
            if number == skip:
                continue
            try:
                columns[number] = self.column(number, place, domain, start, end)
            except Unbound:
                failed = True
        if failed:
            raise Unbound
        return Bound(domain, columns)

    def column(self, number: int, place: Placed, domain: Domain, start: int, end: int) -> int | Codes:
        """Numbers of one quantity over the domain."""
        key = self.resolved(number, place)
        if isinstance(key, str):
            found = self.numbering.plain.get(key)
            if found is None:
                self._unknown(key, place, start, end)
                raise Unbound
            return found
        family = self.numbering.families.get(key.path)
        if family is None:
            if not self._memberless(key, place, domain, start, end):
                self._unknown(key, place, start, end)
            raise Unbound
        codes = self._codes(key, family.sets, place, domain, start, end)
        if codes is None:
            raise Unbound
        numbers = family.numbers(codes, domain.size)
        missing = np.flatnonzero(numbers < 0)
        if missing.size:
            self._no_member(key, family, codes, int(missing[0]), place, domain, start, end)
            raise Unbound
        if domain.size and not family.sets:
            return int(numbers[0])
        return numbers

    def all_members(self, number: int, place: Placed) -> Codes | None:
        """All members of the family that a bare name means, None where the name is no family's."""
        key = self.resolved(number, place)
        if isinstance(key, str) and key in self.numbering.plain:
            return None
        name = key if isinstance(key, str) else key.text
        if isinstance(key, FamilyReference) and key.path in self.numbering.families:
            return None
        families = self._by_name.get(name, [])
        if not families or (isinstance(key, FamilyReference) and key.written[len(place.scope.written) :]):
            return None
        return np.concatenate([np.arange(f.first, f.first + f.size) for f in families])

    def matching(self, matches: Sequence[str]) -> list[int]:
        """Numbers of all quantities of the families and plain names in `matches`."""
        found: list[int] = []
        for name in matches:
            if name in self.numbering.plain:
                found.append(self.numbering.plain[name])
            for family in self._by_name.get(name, ()):
                found.extend(range(family.first, family.first + family.size))
        return sorted(found)

    @property
    def family_texts(self) -> tuple[str, ...]:
        """Names of all plain quantities and families, without subscripts; those of parts of sums are not told."""
        return tuple(name for name in (*self.numbering.plain, *self._by_name) if not is_part(name))

    def plain_number(self, provisional: int) -> int | None:
        """Number of a plain quantity of the worksheet, None for any other."""
        return self._plain.get(provisional)

    def note(self, diagnostic: Diagnostic) -> None:
        """Add a diagnostic, once."""
        self._add(diagnostic)

    # --- slips --------------------------------------------------------------------------------------------

    def _add(self, diagnostic: Diagnostic) -> None:
        if diagnostic not in self._diagnostics:
            self._diagnostics.append(diagnostic)

    def _codes(
        self,
        key: FamilyReference,
        sets: Sequence[str | None],
        place: Placed,
        domain: Domain,
        start: int,
        end: int,
    ) -> list[Codes | int] | None:
        """The codes of the subscripts over the sets of the slots; None where one is wrong, which is said."""
        full = key.over(domain)
        codes = []
        for k, (node, of) in enumerate(zip(key.nodes, sets)):
            try:
                found = subscript(node, full, self.indexing)
                if found.name and of is None:
                    raise no_set_with(found.name, node, self.indexing)
                codes.append(placed(found, of or "", node, self.indexing))
            except IndexSlip as slip:
                self._add(key.found_at(slip.finding, k, start, end).at(place.statement))
                return None
        return codes

    def _memberless(self, key: FamilyReference, place: Placed, domain: Domain, start: int, end: int) -> bool:
        """Say what is wrong with a reference to a family without members; whether it is one."""
        sets = self.numbering.memberless.get(key.path)
        if sets is None or not sets or key in self._broken:
            return False
        codes = self._codes(key, sets, place, domain, start, end)
        if codes is None:
            return True
        firsts = [int(np.broadcast_to(np.asarray(one), (domain.size,))[0]) for one in codes]
        texts = [member_text(of or "", first, self.indexing) for of, first in zip(sets, firsts)]
        name = written_name(key.path, texts)
        at = entry_text(domain, 0, self.indexing)
        self._add(
            error(
                "no-such-member",
                f"there is no `{name}`" + (f" (at {at})" if at else ""),
                Label(place.statement.span(start, end)),
                notes=(f"`{key.text}` has no members",),
                help="members are made by an index alone in the brackets, `x[i]`, or by fixed ones, `x[3]`",
            )
        )
        return True

    def _unknown(self, key: str | FamilyReference, place: Placed, start: int, end: int) -> None:
        if key in self._broken:
            return
        here = Label(place.statement.span(start, end))
        name = key if isinstance(key, str) else key.text
        if name in self._broken:
            return
        families = [family for family in self._by_name.get(name, ()) if family.sets]
        if families:
            family = families[0]
            slots = ", ".join(f"`{s}`" if s else "whole numbers" for s in family.sets)
            self._add(
                error(
                    "family-without-subscript",
                    f"`{name}` is a family with {len(family.sets)} subscript{'s' * (len(family.sets) != 1)}",
                    here,
                    help=f"write `{written_name(family.path, ['...'] * len(family.sets))}` (over {slots})",
                )
            )
            return
        if name in self.numbering.plain or name in self._by_name:
            self._add(error("not-a-family", f"`{name}` is not a family, so it takes no subscript", here))
            return
        column = self.indexing.columns.get(name)
        if column is not None:
            self._add(
                error(
                    "member-as-number",
                    f"`{name}` names members of `{column.of}`, so it is no quantity",
                    here,
                    help=f"it stands in brackets, `V[{name}[l]]`, and in filters, `if {name}[l] = n`",
                )
            )
            return
        if isinstance(key, FamilyReference) and len(key.path) > 1:
            self._unknown_in_instance(key, here)
            return
        self._add(
            error(
                "unknown-name",
                f"no equation mentions `{name}`",
                here,
                help=did_you_mean(name, self.family_texts),
            )
        )

    def _unknown_in_instance(self, key: FamilyReference, here: Label) -> None:
        owner = key.path[:-1]
        inside = [path[-1][0] for path in self.numbering.families if path[:-1] == owner]
        owner_text = ".".join(name for name, _ in owner)
        if not inside:
            instances = {
                ".".join(n for n, _ in path[:-1]) for path in self.numbering.families if len(path) > 1
            }
            self._add(
                error(
                    "unknown-instance",
                    f"there is no instance `{owner_text}`",
                    here,
                    help=did_you_mean(owner_text, instances)
                    or "a dot leads into an instance of a template, or into `const`",
                )
            )
            return
        self._add(
            error(
                "no-such-quantity",
                f"`{owner_text}` has no `{key.path[-1][0]}`",
                here,
                help=did_you_mean(key.path[-1][0], inside) or f"it has {', '.join(sorted(inside)[:8])}",
            )
        )

    def _members_there(self, family: Family) -> str:
        """Which members there are, with the gaps between them where these are few."""

        def name(position: int) -> str:
            return f"`{family.name(position, self.indexing)}`"

        last = family.size - 1
        if len(family.sets) > 1:
            return f"there are {family.size:,} members, from {name(0)} to {name(last)}"
        runs = [(0, last)] if family.sets[0] else _runs(family.codes[:, 0])
        if family.sets[0] and family.size <= MOST_NAMED:
            runs = [(position, position) for position in range(family.size)]
        if len(runs) == 1 and runs[0][0] < last:
            return f"the members run from {name(0)} to {name(last)}"
        if len(runs) > MOST_NAMED:
            return f"there are {family.size:,} members, from {name(0)} to {name(last)}, with gaps"
        texts = [name(a) if a == b else f"{name(a)} to {name(b)}" for a, b in runs]
        are = "members are" if family.size > 1 else "only member is"
        return f"the {are} " + " and ".join(part for part in (", ".join(texts[:-1]), texts[-1]) if part)

    def _no_member(
        self,
        key: FamilyReference,
        family: Family,
        codes: Sequence[Codes | int],
        entry: int,
        place: Placed,
        domain: Domain,
        start: int,
        end: int,
    ) -> None:
        # A sum that runs too far wants many of them, in one place.
        where = (key.path, id(place.statement), start, end)
        if where in self._without_member:
            return
        self._without_member.add(where)
        texts = [
            member_text(s, int(np.broadcast_to(np.asarray(c), (domain.size,))[entry]), self.indexing)
            for s, c in zip(family.sets, codes)
        ]
        name = written_name(key.path, texts)
        at = entry_text(domain, entry, self.indexing)
        self._add(
            error(
                "no-such-member",
                f"there is no `{name}`" + (f" (at {at})" if at else ""),
                Label(place.statement.span(start, end)),
                notes=(self._members_there(family),),
                help=f"give `{name}` a line of its own, or leave that member out with a filter (`if ...`)",
            )
        )


def _runs(codes: Codes) -> list[tuple[int, int]]:
    """Positions of the first and last of each run of consecutive whole numbers."""
    ends = np.flatnonzero(np.append(np.diff(codes) != 1, True))
    return list(zip([0, *(ends[:-1] + 1).tolist()], ends.tolist()))


def resolved_key(key: object, place: Placed) -> str | FamilyReference:
    """The quantity that a key of the name table stands for at a place."""
    if isinstance(key, OfInstance):
        assert place.instance is not None
        return place.instance.resolve(key.key)
    assert isinstance(key, str | FamilyReference)
    return place.scope.resolve(key)


def instance_name(scope: Scope, domain: Domain, entry: int, indexing: Indexing) -> str:
    """The name of an instance at one entry, ``p[P12]``; empty for the worksheet itself."""
    texts = []
    for node in scope.nodes:
        found = subscript(node, domain, indexing)
        code = int(np.broadcast_to(np.asarray(found.codes), (domain.size,))[entry])
        texts.append(found.name or member_text(found.set, code, indexing))
    return written_name(scope.path, texts)


def entry_text(domain: Domain, entry: int, indexing: Indexing) -> str:
    """``i = 3, s = H2O``; empty for a domain without indices."""
    return ", ".join(
        f"{name} = {member_text(domain.sets[name], int(array[entry]), indexing)}"
        for name, array in domain.arrays.items()
        if ENTRY not in name and not is_hidden(name)
    )


def member_formulas(formula: Formula, bound: Bound, statement: int) -> Iterator[Formula]:
    """The formula of each entry of the domain, quantities numbered finally."""
    domain = bound.domain
    by_index = [k for k, literal in enumerate(formula.literals) if literal.index]
    for entry in range(domain.size):
        numbers = bound.numbers(formula.quantities, entry)
        literals = formula.literals
        if by_index:
            own = list(literals)
            for k in by_index:
                own[k] = replace(own[k], value=float(domain.arrays[own[k].index][entry]), index="")
            literals = tuple(own)
        if len(set(numbers)) == len(numbers):
            yield Formula(
                formula.tape,
                numbers,
                literals,
                formula.places,
                statement,
                formula.alike,
                formula.differences,
            )
        else:
            yield merged(replace(formula, quantities=numbers, literals=literals, statement=statement))


def merged(formula: Formula) -> Formula:
    """The formula with quantities that stand several times in `quantities` taken together."""
    first: dict[int, int] = {}
    slots = tuple(first.setdefault(q, len(first)) for q in formula.quantities)
    if len(first) == len(slots):
        return formula
    tape, numbers = _merged_tape(formula.tape, slots)
    places: list[tuple[int, int]] = [(0, 0)] * len(tape.instructions)
    for old in range(len(numbers) - 1, -1, -1):
        places[numbers[old]] = formula.places[old]
    return Formula(
        tape,
        tuple(first),
        formula.literals,
        tuple(places),
        formula.statement,
        tuple((numbers[a], numbers[b]) for a, b in formula.alike),
        tuple(numbers[i] for i in formula.differences),
    )


@lru_cache(maxsize=4096)
def _merged_tape(tape: Tape, slots: tuple[int, ...]) -> tuple[Tape, tuple[int, ...]]:
    """The tape with each quantity k renamed to ``slots[k]``, and the new number of each instruction."""
    builder = TapeBuilder()
    numbers: list[int] = []
    for instruction in tape.instructions:
        numbers.append(_copied(builder, instruction, slots, numbers))
    copy = builder.tape(tuple(numbers[o] for o in tape.outputs))
    whole = Tape(copy.instructions, copy.outputs, len(set(slots)), tape.literals)
    return interned(whole), tuple(numbers)


def _copied(
    builder: TapeBuilder, instruction: Instruction, slots: Sequence[int], numbers: Sequence[int]
) -> int:
    operation = instruction[0]
    if operation == "quantity":
        return builder.apply("quantity", slots[instruction[1]])
    if operation in ("literal", "const"):
        return builder.apply(operation, instruction[1])
    operands = operands_of(instruction)
    return builder.apply(operation, *(numbers[i] for i in operands), *instruction[1 + len(operands) :])
