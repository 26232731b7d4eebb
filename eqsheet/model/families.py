"""Families of quantities: which members exist, and the numbers of all quantities.

A family is known by its path: the names of instances and quantity, ``("supply", "dP")``, each with so many
subscripts. A plain quantity is a family without subscripts. Members exist where a subscript is an index by
itself (``T[i]`` over the whole domain) or fixed (``T[0]``, ``y[N+1]``); ``T[i-1]`` alone makes none.
"""

from __future__ import annotations

from collections.abc import Collection, Container, Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import TypeAlias

import numpy as np

from eqsheet.model.findings import Finding
from eqsheet.model.indexing import Codes, Domain, Indexing, IndexSlip, member_text, placed, subscript
from eqsheet.syntax import nodes as syntax
from eqsheet.syntax.spine import operands_in_run

# One step of a path: a name, and how many subscripts stand behind it.
Step: TypeAlias = tuple[str, int]
Path: TypeAlias = tuple[Step, ...]


# The place of a reference in a definition, which is written out in another line.
NOWHERE = (0, -1)


@dataclass(frozen=True)
class FamilyReference:
    """A quantity as referred to from a statement, before its subscripts are worked out.

    Attributes
    ----------
    path : Path
    written : tuple of str
        The subscripts as text, which tells references apart.
    nodes : tuple of expressions
        The subscripts; not compared.
    fixed : mapping of str to (int, str)
        Code and set of indices already decided (inside an aggregate written out); not compared, but part of
        `written`.
    whole : mapping of str to int
        Whole numbers of the template it stands in; likewise.
    place : tuple of (int, int)
        Where it stands in the line that named it first; other lines may name the same quantity. Not compared.
    inherited : int
        How many of the subscripts are those of instances around the line. Not compared.
    """

    path: Path
    written: tuple[str, ...]
    nodes: tuple[syntax.Expression, ...] = field(compare=False)
    fixed: Mapping[str, tuple[int, str]] = field(compare=False, default_factory=dict)
    place: tuple[int, int] = field(compare=False, default=(0, 0))
    inherited: int = field(compare=False, default=0)
    whole: Mapping[str, int] = field(compare=False, default_factory=dict)

    @property
    def text(self) -> str:
        """The name without subscripts."""
        return ".".join(name for name, _ in self.path)

    def runs_with(self, indices: Collection[str]) -> bool:
        """Whether one of the indices stands in the brackets by itself."""
        return any(
            isinstance(node, syntax.Reference) and node.subscripts is None and node.dotted in indices
            for node in self.nodes
        )

    def over(self, domain: Domain) -> Domain:
        """The domain with what has one value everywhere."""
        numbers = {name: (value, "") for name, value in self.whole.items()}
        return with_fixed(domain, {**numbers, **self.fixed})

    def found_at(self, finding: Finding, slot: int, start: int, end: int) -> Finding:
        """What was found of a subscript, placed where the reference stands between `start` and `end`."""
        first, last = self.place
        if slot < self.inherited or last - first != end - start:
            return replace(finding, start=start, end=end)
        return replace(finding, start=finding.start - first + start, end=finding.end - first + start)


@dataclass(frozen=True)
class Family:
    """One family with its members in order.

    Attributes
    ----------
    path : Path
    sets : tuple of str
        Index set of each slot, empty for whole numbers.
    codes : ndarray (members, slots)
        In lexicographic order.
    first : int
        Number of its first member; the others follow.
    """

    path: Path
    sets: tuple[str, ...]
    codes: Codes
    first: int
    low: Codes
    radix: Codes
    keys: Codes

    @property
    def size(self) -> int:
        """How many members there are."""
        return len(self.codes)

    def numbers(self, columns: Sequence[Codes | int], size: int) -> Codes:
        """Quantity numbers for codes given slot by slot; -1 where there is no such member."""
        if not self.sets:
            return np.full(size, self.first)
        key = np.zeros(size, dtype=np.int64)
        outside = np.zeros(size, dtype=bool)
        for column, low, radix in zip(columns, self.low, self.radix):
            shifted = np.broadcast_to(np.asarray(column), (size,)) - low
            outside |= (shifted < 0) | (shifted >= radix)
            key = key * radix + shifted
        if len(self.keys) and self.keys[-1] - self.keys[0] == len(self.keys) - 1:
            position = key - self.keys[0]
            outside |= (position < 0) | (position >= len(self.keys))
        else:
            position = np.searchsorted(self.keys, key)
            outside |= (position >= len(self.keys)) | (
                self.keys[np.minimum(position, len(self.keys) - 1)] != key
            )
        return np.where(outside, -1, self.first + position)

    def name(self, member: int, indexing: Indexing) -> str:
        """Full name of a member by its position."""
        row = self.codes[member] if self.sets else ()
        texts = [member_text(s, int(c), indexing) for s, c in zip(self.sets, row)]
        return written_name(self.path, texts)


def written_name(path: Path, subscripts: Sequence[str]) -> str:
    """``p[P12].dP``, ``x[3, H2O]``."""
    parts = []
    taken = 0
    for name, count in path:
        inside = ", ".join(subscripts[taken : taken + count])
        taken += count
        parts.append(f"{name}[{inside}]" if count else name)
    return ".".join(parts)


@dataclass(frozen=True)
class Numbering:
    """Numbers of all quantities.

    Attributes
    ----------
    plain : mapping of str to int
        Of quantities without subscripts and owners.
    families : mapping of Path to Family
    total : int
    memberless : mapping of Path to (tuple of (str or None))
        Families that are referred to and have no members, with the set of each slot; None where nothing tells it.
    """

    plain: Mapping[str, int]
    families: Mapping[Path, Family]
    total: int
    memberless: Mapping[Path, tuple[str | None, ...]] = field(default_factory=dict)

    def names(self, indexing: Indexing) -> tuple[str, ...]:
        """Names by number."""
        names = [""] * self.total
        for name, number in self.plain.items():
            names[number] = name
        for family in self.families.values():
            for member in range(family.size):
                names[family.first + member] = family.name(member, indexing)
        return tuple(names)


class FamilyCollector:
    """Gathers, statement by statement, which members exist."""

    def __init__(self, indexing: Indexing) -> None:
        self._indexing = indexing
        self.sets: dict[Path, list[str | None]] = {}
        self._members: dict[Path, list[Codes]] = {}
        self._waiting: list[tuple[FamilyReference, Domain]] = []
        self._by_name: dict[Path, list[set[str]]] = {}
        self._declared: set[Path] = set()

    def declare(self, path: Path, sets: Sequence[str], codes: Codes) -> None:
        """Members that a table makes."""
        self.sets[path] = list(sets)
        self._declared.add(path)
        self._members.setdefault(path, []).append(codes.reshape(-1, len(sets)))

    def see(
        self, reference: FamilyReference, domain: Domain, makes: bool, place: tuple[int, int] = (0, 0)
    ) -> Finding | None:
        """Note a reference; the sets of its slots now, its members (where it `makes` any) in `finish`.

        Parameters
        ----------
        place : tuple of (int, int)
            Where it stands in its line, for what is wrong with it.
        """
        slots = self.sets.setdefault(reference.path, [None] * len(reference.nodes))
        for k, node in enumerate(reference.nodes):
            try:
                found = subscript(node, reference.over(domain), self._indexing)
                if found.name:
                    if slots[k] is None:
                        self._by_name.setdefault(reference.path, [set() for _ in slots])[k].add(found.name)
                    continue
                if slots[k] is None:
                    slots[k] = found.set
                elif slots[k] != found.set:
                    placed(found, slots[k] or "", node, self._indexing)
            except IndexSlip as slip:
                return reference.found_at(slip.finding, k, *place)
        if makes:
            self._waiting.append((reference, domain))
        return None

    def finish(self) -> list[IndexSlip]:
        """Work the members out, once all slots are known; slips found on the way."""
        slips: list[IndexSlip] = []
        for path in self._with_other_subscripts():
            del self.sets[path]
            self._by_name.pop(path, None)
        for path, names in self._by_name.items():
            slots = self.sets[path]
            slots[:] = [self._set_of(n) if s is None else s for s, n in zip(slots, names)]
        for reference, domain in self._waiting:
            if reference.path not in self.sets:
                continue
            indices = {*domain.arrays, *reference.fixed}
            if not all(makes_members(node, indices) for node in reference.nodes):
                continue
            try:
                self._members.setdefault(reference.path, []).append(self._codes(reference, domain))
            except IndexSlip as slip:
                slips.append(slip)
        return slips

    def _with_other_subscripts(self) -> set[Path]:
        """Paths that have the name of a family with another number of subscripts.

        The family is the one that a table makes, else that which lines over an index make, else that which most
        lines make, else the first.
        """
        weights: dict[Path, list[int]] = {path: [1, 0, 0] for path in self._declared}
        for reference, domain in self._waiting:
            weight = weights.setdefault(reference.path, [0, 0, 0])
            weight[1] = max(weight[1], bool(domain.arrays))
            weight[2] += 1
        alike: dict[tuple[str, ...], list[Path]] = {}
        for path in weights:
            alike.setdefault(tuple(name for name, _ in path), []).append(path)
        several = [paths for paths in alike.values() if len(paths) > 1]
        return {path for paths in several for path in paths if path != max(paths, key=weights.__getitem__)}

    def _set_of(self, names: Collection[str]) -> str | None:
        """The set that a slot is over where only members by name stand: the one that has most of them.

        Of several that have them all it makes no difference which is taken.
        """
        counts = {
            name: sum(member in one.positions for member in names)
            for name, one in self._indexing.sets.items()
        }
        best = max(counts.values(), default=0)
        return min(name for name, count in counts.items() if count == best) if best else None

    def forget(self, names: Collection[str]) -> None:
        """Take back the families of some names: they are quantities, given a subscript by mistake."""
        for path in [p for p in self.sets if len(p) == 1 and p[0][0] in names]:
            del self.sets[path]
            self._members.pop(path, None)

    def _codes(self, reference: FamilyReference, domain: Domain) -> Codes:
        full = reference.over(domain)
        slots = self.sets[reference.path]
        columns = [
            np.broadcast_to(
                np.asarray(
                    placed(subscript(node, full, self._indexing), slots[k] or "", node, self._indexing)
                ),
                (domain.size,),
            )
            for k, node in enumerate(reference.nodes)
        ]
        if not columns:
            return np.zeros((min(domain.size, 1), 0), dtype=np.int64)
        return np.stack(columns, axis=1)

    def numbering(self, plain: Collection[str]) -> Numbering:
        """Numbers for plain quantities and families together, in the order of their names."""
        families: dict[Path, Family] = {}
        numbers: dict[str, int] = {}
        paths = {written_name(p, ["0"] * sum(n for _, n in p)): p for p in self._members}
        first = 0
        for name in sorted({*plain, *paths}):
            if name in plain:
                numbers[name] = first
                first += 1
                continue
            family = self._family(paths[name], first)
            if family is not None:
                families[paths[name]] = family
                first += family.size
        memberless = {path: tuple(sets) for path, sets in self.sets.items() if path not in families}
        return Numbering(numbers, families, first, memberless)

    def _family(self, path: Path, first: int) -> Family | None:
        gathered = self._members[path]
        # A path stands here without members where all its references are wrong, which is said where they stand.
        codes = _unique(np.concatenate(gathered)) if gathered else np.zeros((0, 0), dtype=np.int64)
        if not len(codes):
            return None
        sets = tuple(s or "" for s in self.sets.get(path, []))
        low = codes.min(axis=0) if sets else np.zeros(0, dtype=np.int64)
        radix = codes.max(axis=0) - low + 1 if sets else np.zeros(0, dtype=np.int64)
        keys = np.zeros(len(codes), dtype=np.int64)
        for k in range(len(sets)):
            keys = keys * radix[k] + (codes[:, k] - low[k])
        return Family(path, sets, codes, first, low, radix, keys)


def with_fixed(domain: Domain, fixed: Mapping[str, tuple[int, str]]) -> Domain:
    """The domain with indices that have one value everywhere."""
    if not fixed:
        return domain
    arrays = {n: np.full(domain.size, code) for n, (code, _) in fixed.items()}
    return Domain(
        domain.size, {**domain.arrays, **arrays}, {**domain.sets, **{n: s for n, (_, s) in fixed.items()}}
    )


def makes_members(node: syntax.Expression, indices: Container[str]) -> bool:
    """Whether a subscript makes the members it names: an index alone, or something fixed.

    ``i-1`` does not: it only refers to a member that another line makes.
    """
    match node:
        case syntax.Binary() | syntax.Unary():
            return _is_fixed(node, indices)
        case _:
            return True


def _is_fixed(node: syntax.Expression, indices: Container[str]) -> bool:
    match node:
        case syntax.Number():
            return True
        case syntax.Reference():
            return node.name not in indices
        case syntax.Unary():
            return _is_fixed(node.operand, indices)
        case syntax.Binary():
            return all(_is_fixed(operand, indices) for operand in operands_in_run(node))
        case _:
            return False


def _unique(codes: Codes) -> Codes:
    if codes.shape[1] == 0 or not len(codes):
        return codes[:1]
    if codes.shape[1] == 1:
        # Mostly runs in order, which a stable sort takes as they are.
        ordered = np.sort(codes[:, 0], kind="stable")
        return np.asarray(ordered[np.append(True, ordered[1:] != ordered[:-1])][:, None])
    return np.unique(codes, axis=0)
