"""What can be said of units before anything is computed: dimensions, kinds, and diagnostics of both."""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.model.bare_angles import bare_angle_diagnostics
from eqsheet.model.dimension_messages import dimension_diagnostics
from eqsheet.model.infer_dimensions import DimensionResult, infer_dimensions
from eqsheet.model.infer_kinds import KindResult, infer_kinds
from eqsheet.model.kind_messages import kind_diagnostics
from eqsheet.model.rotation_check import rotation_diagnostics
from eqsheet.model.tape import Formula
from eqsheet.model.unit_slips import unit_slips
from eqsheet.syntax.nodes import Statement

#: The quantity that gauge pressures stand on, where the worksheet sets it.
AMBIENT = "ambient"


@dataclass(frozen=True, slots=True)
class UnitCheck:
    """Dimensions and kinds of all quantities, and what is wrong with them."""

    dimensions: DimensionResult
    kinds: KindResult
    diagnostics: tuple[Diagnostic, ...]


def check_units(
    formulas: Sequence[Formula],
    statements: Sequence[Statement],
    names: Sequence[str],
    minor: Collection[int] = (),
) -> UnitCheck:
    """Infer dimensions and kinds, and put all findings into words.

    Parameters
    ----------
    formulas : sequence of Formula
        Everything whose dimensions must fit; ``Formula.statement`` counts in `statements`.
    statements : sequence of Statement
    names : sequence of str
        Of the quantities, by number.
    minor : collection of int
        Numbers of the formulas of guesses, limits, validity conditions and shown units: they are blamed first
        where it could be either.
    """
    dimensions = infer_dimensions(formulas, len(names), minor=minor)
    clashing = {clash.formula for clash in dimensions.clashes}
    ambient = [number for number, name in enumerate(names) if name == AMBIENT]
    kinds = infer_kinds(formulas, dimensions.dimensions, minor, clashing, ambient)
    diagnostics = (
        *dimension_diagnostics(dimensions, formulas, statements, names),
        *kind_diagnostics(kinds, formulas, statements, names),
        *rotation_diagnostics(formulas, dimensions.dimensions, statements, names),
        *unit_slips(formulas, statements),
        *bare_angle_diagnostics(formulas, statements, names),
    )
    return UnitCheck(dimensions, kinds, diagnostics)
