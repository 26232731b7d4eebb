"""Preparing a worksheet with large families: knowns, checks and the order of solution from arrays.

What arrays cannot tell in words (equations without unknowns, a system that is not square) is left to the passes
for equations written out.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from eqsheet.model.branch_codes import branch_codes, branches_of
from eqsheet.model.branches import settle
from eqsheet.model.equation_group import EquationGroup, offsets
from eqsheet.model.lazy_sequence import LazySequence
from eqsheet.model.specialise import conditions
from eqsheet.model.system import EquationItem, EquationSystem
from eqsheet.model.tape import Formula
from eqsheet.structure.verdict import Structure

Numbers = NDArray[np.int64]


def knowns_of_groups(system: EquationSystem, known_values: dict[int, float], setters: dict[int, int]) -> None:
    """Add the values of knowns that stand in groups, and the numbers of their equations."""
    for first, group in zip(offsets(system.groups, len(system.written)), system.groups):
        if group.known is None or group.values is None:
            continue
        for number, (quantity, value) in enumerate(zip(group.known.tolist(), group.values.tolist()), first):
            known_values.setdefault(quantity, value)
            setters.setdefault(quantity, number)


def settle_groups(system: EquationSystem, known_values: Mapping[int, float]) -> EquationSystem:
    """The system with the conditions in groups decided that known quantities decide: see `settle`.

    A group whose members take different branches is one for each choice of branches, in its place.
    """
    if not any(conditions(group.bound.formula.tape) for group in system.groups):
        return system
    known = np.full(len(system.names), np.nan)
    numbers = np.fromiter(known_values.keys(), np.int64, len(known_values))
    known[numbers] = np.fromiter(known_values.values(), float, len(known_values))
    groups: list[EquationGroup] = []
    for group in system.groups:
        groups += _settled(group, known)
    written = tuple(system.written)
    equations: list[tuple[int, Callable[[int], EquationItem]]] = [(len(written), written.__getitem__)]
    equations += [(len(group), group.item) for group in groups]
    return replace(system, groups=tuple(groups), equations=LazySequence(equations))


def _settled(group: EquationGroup, known: NDArray[np.float64]) -> list[EquationGroup]:
    tape = group.bound.formula.tape
    found = conditions(tape)
    if not found or group.known is not None:
        return [group]
    code = branch_codes(tape, list(known[group.bound.numbers.T]), group.bound.literals, len(group))
    if not code.any():
        return [group]
    parts = []
    _, firsts = np.unique(code, return_index=True)
    for one in code[np.sort(firsts)].tolist():
        entries = np.flatnonzero(code == one)
        part = group.bound.part(entries)
        parts.append(group.part(entries, part.specialised(branches_of(tape, one)) if one else part))
    return parts


def settled_formulas(system: EquationSystem, known_values: Mapping[int, float]) -> Sequence[Formula]:
    """The formulas of all equations; those of groups are settled already."""
    written = tuple([settle(item.formula, known_values.get) for item in system.written])
    groups = [(len(group), group.bound.at) for group in system.groups]
    return LazySequence([(len(written), written.__getitem__), *groups])


def all_hold_unknowns(
    system: EquationSystem, formulas: Sequence[Formula], known_values: Mapping[int, float]
) -> bool:
    """Whether every known is set once, and every other equation holds an unknown."""
    known = np.zeros(len(system.names), dtype=bool)
    known[np.fromiter(known_values, np.int64, len(known_values))] = True
    written = system.written
    knowns = sum(item.known >= 0 for item in written)
    knowns += sum(len(group) for group in system.groups if group.known is not None)
    if knowns != len(known_values):
        return False
    for number, item in enumerate(written):
        if item.known < 0 and all(known[q] for q in formulas[number].quantities):
            return False
    others = (group.bound.numbers for group in system.groups if group.known is None)
    return not any(known[numbers].all(axis=1).any() for numbers in others)


def structure_of_groups(system: EquationSystem, formulas: Sequence[Formula]) -> Structure:
    """The structural verdict, where every equation takes part: rows are equation numbers."""
    from eqsheet.structure.analyse_sparse import analyse_sparse

    count = len(system.written)
    rows = [formulas[number].quantities for number in range(count)]
    lengths = [np.array([len(row) for row in rows], dtype=np.int64)]
    entries = [np.array([q for row in rows for q in row], dtype=np.int64)]
    for group in system.groups:
        numbers = group.bound.numbers
        lengths.append(np.full(len(group), numbers.shape[1], dtype=np.int64))
        entries.append(numbers.ravel())
    indptr = np.concatenate([[0], np.cumsum(np.concatenate(lengths))])
    indices = np.concatenate(entries)
    return analyse_sparse(indptr.astype(np.int32), indices.astype(np.int32), len(system.names))
