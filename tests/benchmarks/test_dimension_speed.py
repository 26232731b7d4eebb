"""Dimensions and kinds of thousands of lines, without the rest of the way to the answer."""

from __future__ import annotations

from typing import Any

from one_line import one_line_worksheet

import eqsheet
from eqsheet.model.family_units import check_units_by_family


def test_units_of_ten_thousand_lines(benchmark: Any) -> None:
    text, expected = one_line_worksheet(10_000)
    system = eqsheet.parse(text).prepare().system
    units = benchmark.pedantic(check_units_by_family, args=(system,), rounds=1)
    assert units.diagnostics == ()
    assert sum(d is not None for d in units.dimensions) == len(expected)
