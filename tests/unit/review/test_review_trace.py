"""The course of the iterations in words."""

from __future__ import annotations

import pytest

import eqsheet
from eqsheet.review.trace import MOST_UNKNOWNS, trace_lines

RING = """\
N = {n}
for i in 1..N:
    x[i]^3 + x[i] = 2 + x[i+1]/10
    x[i] near 1
x[N+1] = x[1]
x[N+1] near 1
"""


@pytest.mark.parametrize("n", [5, 40])
def test_of_a_large_block_a_few_unknowns_are_named(n: int) -> None:
    first = trace_lines(eqsheet.parse(RING.format(n=n)).solve())[0]
    named = ", ".join(f"x[{i}]" for i in range(1, min(n + 1, MOST_UNKNOWNS) + 1))
    more = "" if n + 1 <= MOST_UNKNOWNS else f" and {n + 1 - MOST_UNKNOWNS} more"
    assert first == f"Block 1: {named}{more} from lines 3, 5"
