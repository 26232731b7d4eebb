"""Warns of units that are read as the rules say but seldom meant so: ``3/8 in`` and ``0.6 W/m*K``.

A unit belongs to the number before it, so that ``3/8 in`` is 3 divided by 8 inches; and ``/`` reaches over one
symbol, so that ``W/m*K`` is ``W*K/m``. Both may be meant, and then there is a clearer way to write them.
"""

from __future__ import annotations

import re
from collections.abc import Sequence

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, warning
from eqsheet.model.tape import Formula, Literal
from eqsheet.syntax.nodes import Statement

DIVISOR = "unit-in-divisor"
AFTER_SLASH = "unit-after-slash"

#: Two whole numbers with `/` between them, the second with a letter close behind, not part of a longer product.
_FRACTION = re.compile(r"(?<![\w.*/^])([0-9]+) */ *([0-9]+) ?(?=[^\W\d_])")
_FACTOR_AFTER_SLASH = re.compile(r"(.*?)/([^\W\d]\w*(?:\^-?[0-9]+)?)[*·]([^\W\d]\w*(?:\^-?[0-9]+)?)")


def unit_slips(formulas: Sequence[Formula], statements: Sequence[Statement]) -> tuple[Diagnostic, ...]:
    """A warning for each fraction with a unit in its divisor, and each unit with a factor after ``/``."""
    found: dict[tuple[int, int], Diagnostic] = {}
    innocent: set[str] = set()
    for formula in formulas:
        statement = statements[formula.statement]
        for literal in formula.literals:
            key = (formula.statement, literal.start)
            if not literal.unit or key in found:
                continue
            if literal.unit not in innocent:
                slip = _factor_after_slash(literal, statement)
                if slip is None:
                    innocent.add(literal.unit)
                else:
                    found[key] = slip
                    continue
            fraction = _fraction(literal, statement)
            if fraction is not None:
                found[key] = fraction
    return tuple(found.values())


def _factor_after_slash(literal: Literal, statement: Statement) -> Diagnostic | None:
    parts = _FACTOR_AFTER_SLASH.fullmatch(literal.unit)
    if parts is None:
        return None
    before, divisor, factor = parts.groups()
    return warning(
        AFTER_SLASH,
        f"`{literal.unit}` is read as `{before}*{factor}/{divisor}`",
        Label(statement.span(literal.start, literal.end)),
        help=f"write `{before}/({divisor}*{factor})` if both are divisors, `{before}*{factor}/{divisor}` if not",
    )


def _fraction(literal: Literal, statement: Statement) -> Diagnostic | None:
    text = statement.line.text
    if "/" not in text[: literal.start]:
        return None
    for parts in _FRACTION.finditer(text, 0, literal.end):
        if parts.start(2) == literal.start:
            above, below = parts.groups()
            return warning(
                DIVISOR,
                f"`{text[parts.start() : literal.end]}` is read as {above} divided by {below} {literal.unit}",
                Label(statement.span(parts.start(), literal.end)),
                help=f"write `{above}/{below} * 1 {literal.unit}` if the fraction is the number of the unit, "
                f"`{above} / ({below} {literal.unit})` if not",
            )
    return None
