"""Starts that equations tell one another take time in proportion to the equations."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import pytest

import eqsheet
from eqsheet.model.build import build_system
from eqsheet.syntax.parse import parse_document
from eqsheet.worksheet.guesses import work_out_guesses
from eqsheet.worksheet.starting_values import Start, starting_values

# Each member is told by the one after it: an order that is against that of the equations.
BACKWARDS = """\
for i in 1..{n}:
    2*x[i] = x[i+1] + 1
x[{last}] = 9
"""
# Two seeds in each member, and nothing told by them but the member's own third unknown.
SEEDS = """\
for i in 1..{n}:
    a[i]*b[i] + exp(a[i] + b[i]) = sin(a[i]*c[i]) + c[i]^2*b[i]
    a[i] + b[i] = 3*c[i]
    a[i]*b[i]*sin(a[i]) = 0.1*exp(b[i])
"""


class Counted(Sequence[Any]):
    """A sequence that counts how often an item is looked at."""

    def __init__(self, items: Sequence[Any]) -> None:
        self._items = items
        self.looks = 0

    def __len__(self) -> int:
        return len(self._items)

    def __getitem__(self, index: Any) -> Any:
        self.looks += 1
        return self._items[index]


def started(text: str) -> tuple[Start, dict[str, int], int]:
    """The start with nothing known, positions by name, and how often the equations were looked at."""
    document, _ = parse_document(eqsheet.parse(text).source)
    system, _ = build_system(document.statements)
    guesses, _ = work_out_guesses(system, {}, ["plain"] * len(system.names))
    known = {item.known: item.value for item in system.equations if item.known >= 0}
    unknowns = [q for q in range(len(system.names)) if q not in known]
    values = [known.get(q, float("nan")) for q in range(len(system.names))]
    formulas = Counted([item.formula for item in system.equations if item.known < 0])
    start = starting_values(unknowns, formulas, values, guesses, [None] * len(system.names))
    return start, {system.names[q]: i for i, q in enumerate(unknowns)}, formulas.looks


def test_a_chain_against_the_order_of_the_equations() -> None:
    n = 300
    start, place, looks = started(BACKWARDS.format(n=n, last=n + 1))
    value = 9.0
    for i in range(n, 0, -1):
        value = 0.5 * (value + 1.0)
        assert start.values[place[f"x[{i}]"]] == value
    assert not start.blind
    assert looks <= 8 * n


def test_many_seeds() -> None:
    n = 100
    start, place, looks = started(SEEDS.format(n=n))
    assert len(start.blind) == 2 * n
    for i in range(1, n + 1):
        a, b, c = (start.values[place[f"{name}[{i}]"]] for name in "abc")
        assert abs(a + b - 3.0 * c) < 1e-14
    assert looks <= 8 * 3 * n


@pytest.mark.parametrize(("h", "scale"), [("h", 1.0), ("1000*h", 1e-3), ("h/1000", 1e3)])
def test_in_which_scale_an_equation_says_what_an_unknown_is_is_no_matter(h: str, scale: float) -> None:
    """From x near 2, h is 6 by what it is, and 11 by the balance that would have to be turned for it."""
    says, balance = f"{h} = 3*x", f"{h} - x^3 = 3"
    for lines in ([balance, says], [says, balance]):
        start, place, _ = started("\n".join(lines) + "\nx near 2\n")
        assert start.values[place["h"]] == pytest.approx(6.0 * scale, rel=1e-12)
