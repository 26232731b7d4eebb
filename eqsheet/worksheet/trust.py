"""How far the numbers of a solved block are to be trusted, in the worksheet's own terms."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

from eqsheet.diagnostics.diagnostic import Diagnostic, warning
from eqsheet.model.system import EquationSystem, Place
from eqsheet.solve.outcome import Status
from eqsheet.units.dimension import Dimension
from eqsheet.worksheet.places import label_of, line_words
from eqsheet.worksheet.starting_values import TYPICAL

if TYPE_CHECKING:
    from eqsheet.worksheet.prepare import Prepared
    from eqsheet.worksheet.run import BlockRun

# Below this many digits a result is not good enough for ordinary work, and the run says so.
FEW_DIGITS = 5
# Below this part of a value an error leaves that many digits for sure.
FEWEST_SURE = 0.5 * 10.0**-FEW_DIGITS
# Condition of a block from which on its equations lose digits by being close to dependent.
CLOSE_TO_DEPENDENT = 1e5

_DEPENDENT = "the equations are close to depending on each other"
_MAGNIFIED = "rounding is magnified on the way to it, as where nearly equal terms cancel"
_CHECK = "a small change of the inputs moves it much; check that the problem is posed as meant"


def trust_warnings(
    system: EquationSystem, run: BlockRun, dimensions: Sequence[Dimension | None]
) -> list[Diagnostic]:
    """A warning where a solved block is a double root, or good to few digits only.

    Parameters
    ----------
    dimensions : sequence of Dimension or None
        By quantity number.
    """
    result = run.result
    assert result is not None
    doubtful = [
        position
        for position, (value, error_bound) in enumerate(zip(result.values, result.errors))
        if not error_bound <= FEWEST_SURE * (abs(value) or 1.0)
    ]
    double = result.outcome is not None and result.outcome.status is Status.DOUBLE
    if not doubtful and not double:
        return []
    places = [system.equations[e].place for e in run.equations]
    if double:
        return [_double_root(system, run, places)]
    found = [
        (digits_of(result.values[p], result.errors[p]), p)
        for p in doubtful
        if result.values[p] != 0.0 or _matters(result.errors[p], dimensions[run.unknowns[p]])
    ]
    worst = min((pair for pair in found if pair[0] < FEW_DIGITS), default=None)
    return [] if worst is None else [few_digits_warning(system, run, *worst, places)]


def _matters(error_bound: float, dimension: Dimension | None) -> bool:
    """Whether an error of zero is more than a small part of what is typical of the dimension."""
    return not error_bound <= FEWEST_SURE * TYPICAL.get("" if dimension is None else dimension.text, 1.0)


def few_digits_warning(
    system: EquationSystem, run: BlockRun, digits: int, position: int, places: Sequence[Place]
) -> Diagnostic:
    """A warning that the unknown at a position of a solved block has few digits.

    Parameters
    ----------
    places : sequence of Place
        Of the block's equations, in the order of the text; one of each statement will do.
    """
    result = run.result
    assert result is not None
    name, where = system.names[run.unknowns[position]], line_words(system, places)
    why = _DEPENDENT if result.condition > CLOSE_TO_DEPENDENT else _MAGNIFIED
    if result.values[position] == 0.0:
        said = f"`{name}` from {where} is zero, but not one digit of it is sure: {why}"
    else:
        said = f"`{name}` from {where} is good to about {digits} digits: {why}"
    return warning("few-digits", said, label_of(system, places[0]), help=_CHECK)


def poor_known(prepared: Prepared, quantity: int, value: float, error_bound: float) -> Diagnostic:
    """A warning that a known set to an expression has few digits."""
    system = prepared.system
    place = system.equations[prepared.setters[quantity]].place
    name, where = system.names[quantity], line_words(system, [place])
    return warning(
        "few-digits",
        f"`{name}` from {where} is good to about {digits_of(value, error_bound)} digits: {_MAGNIFIED}",
        label_of(system, place),
        help=_CHECK,
    )


def _double_root(system: EquationSystem, run: BlockRun, places: Sequence[Place]) -> Diagnostic:
    """A warning that two or more solutions of a block meet at the one found."""
    result = run.result
    assert result is not None and result.outcome is not None
    digits = [digits_of(value, error_bound) for value, error_bound in zip(result.values, result.errors)]
    parts = [abs(part) for part in result.outcome.null_unknowns] or [0.0] * len(digits)
    # What the equations fix least.
    position = min(range(len(digits)), key=lambda p: (digits[p], -parts[p]))
    name, where = system.names[run.unknowns[position]], line_words(system, places)
    good = "" if result.values[position] == 0.0 else f", good to about {digits[position]} digits"
    return warning(
        "double-root",
        f"`{name}` from {where} is a double root{good}",
        label_of(system, places[0]),
        help="two solutions meet here, and a small change of the inputs may leave two or none; check what is meant",
    )


def digits_of(value: float, error_bound: float) -> int:
    """Decimal digits of a value that an error leaves good, 0 to 15."""
    if not math.isfinite(error_bound):
        return 0
    if error_bound == 0.0:
        return 15
    if value == 0.0:
        return 0
    return int(min(max(math.floor(-math.log10(error_bound / abs(value))), 0), 15))
