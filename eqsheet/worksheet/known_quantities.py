"""Values and errors of all quantities before any block is solved."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import NamedTuple

from eqsheet.worksheet.prepare import Prepared
from eqsheet.worksheet.written_values import as_typed


class _Last(NamedTuple):
    known_values: Mapping[int, float]
    contested: frozenset[int]
    values: tuple[float, ...]
    errors: tuple[float, ...]


_last: list[_Last] = []


def known_quantities(prepared: Prepared) -> tuple[tuple[float, ...], tuple[float, ...]]:
    """SI values by quantity number, nan where not known, and how far they may be from what was typed.

    Those of the last worksheet are kept, since it may well be solved again.
    """
    if _last:
        last = _last[0]
        if last.known_values is prepared.known_values and last.contested is prepared.contested:
            return last.values, last.errors
    count = len(prepared.system.names)
    values = [math.nan] * count
    errors = [0.0] * count
    for quantity, value in prepared.known_values.items():
        if quantity not in prepared.contested:
            values[quantity] = value
            errors[quantity] = as_typed(value)
    _last[:] = [_Last(prepared.known_values, prepared.contested, tuple(values), tuple(errors))]
    return _last[0].values, _last[0].errors
