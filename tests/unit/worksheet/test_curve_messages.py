"""What is said of curves costs nothing where there are none."""

from __future__ import annotations

from collections.abc import Iterator

import eqsheet
from eqsheet.model.build import build_system
from eqsheet.model.tape import Formula
from eqsheet.worksheet.curve_messages import stepped_diagnostic


class Counted(list[Formula]):
    """A list that counts how many items are taken from it."""

    taken = 0

    def __iter__(self) -> Iterator[Formula]:
        for item in super().__iter__():
            self.taken += 1
            yield item


def test_equations_without_curves_are_looked_at_once() -> None:
    n = 40
    system, _ = build_system(
        eqsheet.parse(f"for i in 1..{n}:\n    x[i]^2 = 1 + x[i-1]\nx[0] = x[{n}]").document.statements
    )
    formulas = Counted(item.formula for item in system.equations)
    formulas.taken = 0
    assert stepped_diagnostic(system, formulas, range(len(system.names))) is None
    assert formulas.taken == n + 1
