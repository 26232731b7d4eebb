"""Diagnostics for readings and differences that are mixed up."""

from __future__ import annotations

from collections.abc import Sequence

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error, warning
from eqsheet.diagnostics.shortened import shortened
from eqsheet.model.infer_kinds import KIND_WORDS, KindResult
from eqsheet.model.kind_misuse import Misuse
from eqsheet.model.kind_rules import TEMPERATURE
from eqsheet.model.kind_weights import READING
from eqsheet.model.tape import Formula, Literal
from eqsheet.syntax.nodes import Statement

SUM = "sum-of-readings"
NOT_A_DIFFERENCE = "reading-as-difference"
NOT_A_READING = "difference-as-reading"
TWICE = "reading-made-absolute"

#: For units of readings, the units to write a difference in.
_DIFFERENCE_UNITS = {
    "degC": ("delta_degC", "K"),
    "degF": ("delta_degF", "K"),
    "barg": ("bar",),
    "psig": ("psi",),
    "kPag": ("kPa",),
    "MPag": ("MPa",),
    "mbarg": ("mbar",),
}


def kind_diagnostics(
    result: KindResult,
    formulas: Sequence[Formula],
    statements: Sequence[Statement],
    names: Sequence[str],
) -> tuple[Diagnostic, ...]:
    """An error for each certain misuse, a warning for each offset that counts twice.

    Parameters as for `dimension_diagnostics`.
    """
    return tuple(_diagnostic(misuse, formulas, statements, names) for misuse in result.misuses)


def _diagnostic(
    misuse: Misuse, formulas: Sequence[Formula], statements: Sequence[Statement], names: Sequence[str]
) -> Diagnostic:
    formula = formulas[misuse.formula]
    statement = statements[formula.statement]
    text = shortened(statement.line.text[slice(*misuse.place)])
    literal = formula.literals[misuse.literal] if misuse.literal >= 0 else None
    noun = "a temperature" if misuse.dimension == TEMPERATURE else "a gauge pressure"
    labels = [Label(statement.span(*misuse.place)), *_origins(misuse, formulas, statements, names)]
    if misuse.against is not None and misuse.against != misuse.place:
        labels.append(Label(statement.span(*misuse.against), _against(misuse)))
    if misuse.what == "offset":
        return warning(
            TWICE,
            f"`{text}` is added to {noun} reading, which is absolute already",
            *labels,
            notes=("temperatures are computed in K and pressures absolute, whatever unit they are shown in",),
            help=f"leave `{text}` out",
        )
    if misuse.what == "sum":
        where = shortened(statement.line.text[slice(*(misuse.against or misuse.place))])
        return error(
            SUM,
            f"`{where}` adds up readings, which have an origin each",
            *labels,
            help=_sum_cure(misuse, literal, text, formulas, names),
        )
    if misuse.what == "reading":
        return error(
            NOT_A_DIFFERENCE,
            f"`{text}` is {noun} reading, but a difference is needed here",
            *labels,
            help=_in_difference_unit(literal, text) or "subtract the reading it is counted from",
        )
    return error(
        NOT_A_READING,
        f"`{text}` is a difference, but {noun} reading is needed here",
        *labels,
        help=_reading_cure(literal, text, misuse),
    )


def _against(misuse: Misuse) -> str:
    return {"reading": "a difference", "difference": "a reading"}.get(misuse.what, "")


def _origins(
    misuse: Misuse, formulas: Sequence[Formula], statements: Sequence[Statement], names: Sequence[str]
) -> list[Label]:
    """The lines that made the quantities readings or differences."""
    labels: list[Label] = []
    for quantity, kind, origin in misuse.quantities:
        if origin is not None and origin.formula != misuse.formula:
            statement = statements[formulas[origin.formula].statement]
            said = f"`{names[quantity]}` is a {KIND_WORDS[kind]} by this line"
            labels.append(Label(statement.span(*origin.place), said))
    return labels


def _in_difference_unit(literal: Literal | None, text: str) -> str:
    """Advice to write the literal in a unit of differences, empty where it is not a reading."""
    if literal is None or literal.kind != "reading":
        return ""
    number = text.removesuffix(literal.unit).strip()
    units = _DIFFERENCE_UNITS.get(literal.unit, ("K",) if literal.dimension == TEMPERATURE else ("Pa",))
    # A number that does not mean the same in the other unit is not repeated: 9 degF is 5 K.
    same = [f"`{number} {unit}`" for unit in units if unit != "K" or literal.unit == "degC"]
    return (
        f"write {' or '.join(same)} for a difference" if same else f"write it in {units[0]} for a difference"
    )


def _sum_cure(
    misuse: Misuse, literal: Literal | None, text: str, formulas: Sequence[Formula], names: Sequence[str]
) -> str:
    direct = _in_difference_unit(literal, text)
    if direct:
        return direct
    for quantity, kind, origin in reversed(misuse.quantities):
        if kind != READING or origin is None:
            continue
        for written in formulas[origin.formula].literals:
            if written.kind == "reading" and (written.start, written.end) == origin.place:
                units = _DIFFERENCE_UNITS.get(written.unit, ())
                if units:
                    return (
                        f"if `{names[quantity]}` is a difference, give it in {' or '.join(units)}; "
                        "a mean is divided by the number of readings"
                    )
    return "only one of them can be a reading; a mean is divided by the number of readings"


def _reading_cure(literal: Literal | None, text: str, misuse: Misuse) -> str:
    if literal is not None and literal.kind == "difference" and literal.unit.startswith("delta_"):
        number = text.removesuffix(literal.unit).strip()
        return f"write `{number} {literal.unit.removeprefix('delta_')}` for a reading"
    return "add the reading it is counted from"
