"""Sums, products and extremes over many members as equations of their own, so that no formula grows with them.

Sixteen members make a part, sixteen parts a part of the next level, until one is left. A part of a sum is the mean
of its members, which is of their kind (reading or difference), as a sum is not. The parts are quantities of
families that no name in a worksheet can mean, since theirs have round brackets; the equations of a level are alike,
so that they are kept and solved as arrays.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from typing import TYPE_CHECKING

import numpy as np

from eqsheet.model.families import FamilyReference
from eqsheet.model.indexing import Codes, Domain, Indexing, member_text
from eqsheet.model.tape import Formula, TapeBuilder
from eqsheet.model.while_lowering import ConditionMet
from eqsheet.model.written_nodes import canonical, names_in, renamed
from eqsheet.syntax import nodes as syntax

if TYPE_CHECKING:
    from eqsheet.model.lower import Lowering

# From this many members on; a sum of fewer is one formula.
MANY = 1000
# How many members make a part: few levels, and formulas that are still short. A power of two divides exactly.
FAN = 16
# The index over the parts of a level; no name in a worksheet looks like it.
ENTRY = "#"
# How the name of a family ends that is made for the members themselves.
MEMBERS = ", members"
_SUBSCRIPTS = re.compile(r'\[(?:"[^"]*"|[^\]"])*\]')
JOINED = {"sum": "add", "prod": "mul", "min": "min", "max": "max"}


@dataclass(frozen=True)
class Part:
    """The equations of one level, or of its odd last part.

    Attributes
    ----------
    name : str
        What the family of parts is called.
    formula : Formula
        Outputs (part, what it is made from), in provisional numbers.
    domain : Domain
    conditions : tuple of ConditionMet
        Validity conditions of definitions that the members use.
    summed : frozenset of int
        Provisional numbers of what an index over a range runs through, which the aggregate does not make.
    """

    name: str
    formula: Formula
    domain: Domain
    conditions: tuple[ConditionMet, ...]
    summed: frozenset[int]


def in_parts(lowering: Lowering, node: syntax.Aggregate, domain: Domain, indexing: Indexing) -> int:
    """The instruction for the value of an aggregate; its parts are added to those of the `lowering`.

    Parameters
    ----------
    domain : Domain
        Its members, of which there are many.

    Raises
    ------
    NeedsMembers
        If the body's formula depends on the member.
    Poisoned
    """
    name = _name(lowering, node, indexing)
    place = (node.start, node.end)
    indices = [clause.index for clause in node.clauses]
    arrays = {index: domain.arrays[index] for index in indices}
    sets = {index: domain.sets[index] for index in indices}
    members = Domain(domain.size, arrays, sets)
    operand = _alone(lowering, node)
    if operand is None:
        operand = _made_members(lowering, node, name, members)
        arrays, sets = {ENTRY: np.arange(domain.size)}, {ENTRY: ""}
    level, regular, last = 0, 1, 1
    count = domain.size
    while count > 1:
        level += 1
        made = _reference(f"{name}, parts of {regular * FAN:,}", place)
        # The last operand may stand for fewer members than the others.
        whole = count // FAN - (count % FAN == 0 and last != regular)
        if whole:
            builder = TapeBuilder()
            operands = [_operand(builder, lowering, operand, sets, j, place) for j in range(FAN)]
            value = _joined(builder, node.function, operands, [1] * FAN, place)
            part_arrays = {
                f"{index}{ENTRY}{j}": array[: whole * FAN].reshape(whole, FAN)[:, j]
                for index, array in arrays.items()
                for j in range(FAN)
            }
            _add(lowering, builder, made, value, place, np.arange(whole), part_arrays, sets)
        rest = count - whole * FAN
        if rest:
            builder = TapeBuilder()
            operands = [_operand(builder, lowering, operand, sets, j, place) for j in range(rest)]
            value = _joined(builder, node.function, operands, [regular] * (rest - 1) + [last], place)
            part_arrays = {
                f"{index}{ENTRY}{j}": array[whole * FAN + j :][:1]
                for index, array in arrays.items()
                for j in range(rest)
            }
            _add(lowering, builder, made, value, place, np.array([whole]), part_arrays, sets)
        last = regular * (rest - 1) + last if rest else regular * FAN
        regular *= FAN
        count = whole + (rest > 0)
        operand, arrays, sets = made, {ENTRY: np.arange(count)}, {ENTRY: ""}
    top = replace(operand, written=("0",), fixed={ENTRY: (0, "")})
    result = lowering.builder.quantity(lowering.number_of(top), place)
    if node.function != "sum":
        return result
    total = lowering.builder.constant(Fraction(domain.size), place)
    return lowering.builder.apply("mul", total, result, place=place)


def is_part(name: str) -> bool:
    """Whether the name of a quantity (its family's, for a member) is that of a part.

    >>> is_part("supply.sum(Q(i) for i in 1..N), parts of 16[3]"), is_part('x["Fe(OH)3"]')
    (True, False)
    """
    return "(" in name and "(" in _SUBSCRIPTS.sub("", name)


def is_like_members(name: str) -> bool:
    """Whether the quantity of that name is a part of one dimension and kind with what it is made from."""
    family = _SUBSCRIPTS.sub("", name)
    made = family.partition("(")[0].rpartition(".")[2]
    return is_part(name) and made != "prod" and not family.endswith(MEMBERS)


def _alone(lowering: Lowering, node: syntax.Aggregate) -> FamilyReference | None:
    """The quantity that the body is; None where it is an expression."""
    if not isinstance(node.body, syntax.Reference) or node.body.subscripts is None:
        return None
    inside = lowering.inside(dict.fromkeys((clause.index for clause in node.clauses), ""))
    inside.value(node.body)
    key = lowering.key_of(inside.builder.quantities[0])
    return key if isinstance(key, FamilyReference) else None


def _made_members(lowering: Lowering, node: syntax.Aggregate, name: str, domain: Domain) -> FamilyReference:
    """Quantities made for what the body is at each member."""
    inside = lowering.inside(domain.sets)
    body = inside.value(node.body)
    place = (node.body.start, node.body.end)
    made = _reference(name + MEMBERS, place)
    _add(
        lowering,
        inside.builder,
        made,
        body,
        place,
        np.arange(domain.size),
        domain.arrays,
        domain.sets,
        tuple(inside.conditions),
    )
    return made


def _name(lowering: Lowering, node: syntax.Aggregate, indexing: Indexing) -> str:
    """The aggregate as written, without square brackets, and the members of the indices it stands under."""
    text = " ".join(lowering.text[node.start : node.end].split())
    used = names_in((node,))
    outer = [
        f"{index} = {member_text(set_name, code, indexing)}"
        for index, (code, set_name) in sorted(lowering.fixed.items())
        if index in used
    ]
    return " at ".join([text, ", ".join(outer)] if outer else [text]).translate({91: "(", 93: ")"})


def _reference(name: str, place: tuple[int, int]) -> FamilyReference:
    return FamilyReference(((name, 1),), (ENTRY,), (syntax.Reference(*place, ENTRY),))


def _operand(
    builder: TapeBuilder,
    lowering: Lowering,
    reference: FamilyReference,
    indices: Mapping[str, str],
    position: int,
    place: tuple[int, int],
) -> int:
    """The leaf for an operand by its position in its part."""
    nodes = renamed(reference.nodes, {index: f"{index}{ENTRY}{position}" for index in indices})
    written = tuple(canonical(node, reference.fixed) for node in nodes)
    return builder.quantity(lowering.number_of(replace(reference, written=written, nodes=nodes)), place)


def _joined(
    builder: TapeBuilder,
    function: str,
    operands: Sequence[int],
    counts: Sequence[int],
    place: tuple[int, int],
) -> int:
    """Operands that stand for so many members each, taken together."""
    if function == "sum" and len(set(counts)) > 1:
        factors = [builder.constant(Fraction(count), place) for count in counts]
        operands = [builder.apply("mul", f, o, place=place) for f, o in zip(factors, operands)]
    result = operands[0]
    for operand in operands[1:]:
        result = builder.apply(JOINED[function], result, operand, place=place)
    if function != "sum":
        return result
    divisor = builder.constant(Fraction(sum(counts) if len(set(counts)) > 1 else len(counts)), place)
    return builder.apply("div", result, divisor, place=place)


def _add(
    lowering: Lowering,
    builder: TapeBuilder,
    made: FamilyReference,
    value: int,
    place: tuple[int, int],
    entries: Codes,
    arrays: Mapping[str, Codes],
    sets: Mapping[str, str],
    conditions: tuple[ConditionMet, ...] = (),
) -> None:
    """Add the equation of some parts."""
    left = builder.quantity(lowering.number_of(made), place)
    formula = builder.formula((left, value), 0, ((left, value),))
    of_set = {name: sets[name.partition(ENTRY)[0] or ENTRY] for name in arrays}
    domain = Domain(len(entries), {**arrays, ENTRY: entries}, {**of_set, ENTRY: ""})
    running = {name for name, set_name in of_set.items() if not set_name and not name.startswith(ENTRY)}
    keys = {number: lowering.key_of(number) for number in formula.quantities}
    summed = frozenset(n for n, k in keys.items() if isinstance(k, FamilyReference) and k.runs_with(running))
    lowering.parts.append(Part(made.path[0][0], formula, domain, conditions, summed))
