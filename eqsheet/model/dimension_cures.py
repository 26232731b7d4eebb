"""What would mend a clash of dimensions, where a usual slip explains it."""

from __future__ import annotations

import re
from collections.abc import Sequence
from fractions import Fraction

from eqsheet.diagnostics.shortened import shortened
from eqsheet.model.dimension_blame import Clash, Part
from eqsheet.model.dimension_culprit import GRAVITY, SLIPS
from eqsheet.model.infer_dimensions import DimensionResult
from eqsheet.model.tape import Formula
from eqsheet.units.dimension import DIMENSIONLESS, Dimension
from eqsheet.units.dimension_names import described, dimension_word, suggested_unit

#: More quantities than this that would fit are no help.
MOST_NAMED = 3


def cure_for(
    clash: Clash, formula: Formula, result: DimensionResult, names: Sequence[str], text: str, suspects: str
) -> str:
    """Advice on the clash, in the words of the worksheet.

    Parameters
    ----------
    text : str
        The formula's logical line.
    suspects : str
        Which knowns may have the wrong unit; said where no slip in the formula itself explains the clash.
    """
    guilty = text[slice(*clash.place)]
    read_as_unit = _unit_that_is_a_name(clash, formula, names)
    if read_as_unit:
        return read_as_unit
    if clash.literal and clash.expected is not None:
        return _joined(_unit_for_literal(guilty, clash.expected, clash.found), suspects)
    missing = DIMENSIONLESS / clash.excess
    gravity = _gravity(missing)
    if len(clash.guilty) > 1 or any(part.power != 1 for part in clash.guilty):
        powers = [cure for part in clash.guilty if (cure := _other_power(part, missing, names))]
        if powers:
            return f"it would fit with {' or with '.join(powers)}"
    if gravity:
        return gravity
    opposite = [cure for part in clash.innocent if (cure := _other_power(part, clash.excess, names))]
    if clash.bare < 0 and opposite and clash.against is not None:
        return f"it would fit with {' or with '.join(opposite)} in `{shortened(text[slice(*clash.against)])}`"
    if clash.against is None and clash.expected == DIMENSIONLESS:
        divide = f"divide `{shortened(guilty)}` by a quantity or value that is {described(clash.excess)} too"
        return _joined(divide, suspects)
    makes_up = _made_up_for(missing, result, names)
    sentence = f"`{shortened(guilty)}` lacks a factor in {missing.text}"
    if makes_up:
        return sentence + makes_up
    alone = len(clash.guilty) == 1 and clash.guilty[0].power == 1
    return _joined("" if alone else sentence, suspects)


def _joined(*cures: str) -> str:
    return "; ".join(filter(None, cures))


def _other_power(part: Part, missing: Dimension, names: Sequence[str]) -> str:
    """The quantity with the power at which the clash would be gone, empty if none is near."""
    if part.dimension is None or part.dimension == DIMENSIONLESS:
        return ""
    for step in SLIPS:
        if part.dimension ** Fraction(step) == missing:
            name = names[part.quantity]
            power = part.power + step
            before = _to_power(name, part.power)
            return f"`{_to_power(name, power)}` in place of `{before}`" if power else f"`{before}` left out"
    return ""


def _to_power(name: str, power: int | Fraction) -> str:
    if power == 1:
        return name
    if power < 0:
        return f"1/{_to_power(name, -power)}"
    return f"{name}^{power}" if Fraction(power).denominator == 1 else f"{name}^({power})"


def _gravity(missing: Dimension) -> str:
    if missing == GRAVITY:
        return "is the acceleration of gravity missing? It is `const.g_n`"
    if missing == DIMENSIONLESS / GRAVITY:
        return "is the acceleration of gravity one factor too many?"
    return ""


def _unit_for_literal(guilty: str, expected: Dimension, found: Dimension | None) -> str:
    if expected == DIMENSIONLESS:
        return "write it without a unit, or divide by a quantity of the same dimension"
    unit = suggested_unit(expected)
    if found == DIMENSIONLESS:
        # An index counts as a number too, but a unit stands behind digits only.
        return (
            f"give it a unit: `{guilty} {unit}`"
            if guilty[-1:].isdigit()
            else f"give it a unit: `{guilty}*1 {unit}`"
        )
    word = dimension_word(expected)
    return f"give it in a unit of {word}, such as {unit}" if word else ""


def _made_up_for(missing: Dimension, result: DimensionResult, names: Sequence[str]) -> str:
    """Which quantity would make up for what is missing; empty if none or many would."""
    fitting = [names[q] for q, dimension in enumerate(result.dimensions) if dimension == missing]
    inverse = [
        names[q] for q, dimension in enumerate(result.dimensions) if dimension == DIMENSIONLESS / missing
    ]
    if 1 <= len(fitting) <= MOST_NAMED:
        return f", which {_listed(fitting)} would be"
    if 1 <= len(inverse) <= MOST_NAMED:
        return f"; division by {_listed(inverse)} would mend that"
    return ""


def _listed(names: Sequence[str]) -> str:
    return " or ".join(f"`{name}`" for name in names)


def _unit_that_is_a_name(clash: Clash, formula: Formula, names: Sequence[str]) -> str:
    """Advice where a unit in the guilty text ends in a symbol that is a quantity too: ``10 bar/L``."""
    start, end = clash.place
    for literal in formula.literals:
        if not (start <= literal.start and literal.end <= end):
            continue
        split = re.fullmatch(r"(.+)([*/·])([^\W\d]\w*)", literal.unit)
        if split and split[3] in names:
            return (
                f"`{literal.unit}` was read as a unit; if `{split[3]}` is meant as the quantity, "
                f"put spaces: `{split[1]} {split[2]} {split[3]}`"
            )
    return ""
