"""Stages in a row with a recycle are solved through the few unknowns that the recycle carries, however many stages."""

from __future__ import annotations

import math

import pytest
from scipy.optimize import brentq
from solving import solve

# A bed of catalyst in layers, its feed warmed by its outlet (data invented; conversion explicit in the layer's own
# temperature, an implicit equation in that).
BED = """
    for i in 1..{n}:
        T[i] = T[i-1] + 200 K * (X[i] - X[i-1])
        X[i] = X[i-1] + (1 - X[i])*0.02*exp(12*(1 - 400 K/T[i]))
    T[0] = 300 K + 0.3*(T[{n}] - 300 K)
    X[0] = 0
"""


def outlet(feed: float, layers: int) -> float:
    """Temperature behind the last layer, K, layer by layer."""
    temperature, conversion = feed, 0.0

    def left(after: float) -> float:
        rate = 0.02 * math.exp(12 * (1 - 400 / after))
        return temperature + 200 * ((conversion + rate) / (1 + rate) - conversion) - after

    for _ in range(layers):
        after = brentq(left, temperature, temperature + 200, xtol=1e-12)
        conversion += (after - temperature) / 200
        temperature = after
    return temperature


@pytest.mark.parametrize("layers", [15, 40, 100])
def test_a_bed_with_a_recycle_of_heat(layers: int) -> None:
    solution = solve(BED.format(n=layers))
    assert solution.solved, [d.message for d in solution.diagnostics]
    found = solution[f"T[{layers}]"].si
    feed = 300 + 0.3 * (found - 300)
    # Marched on from the feed that the solution has, one layer after the other.
    assert outlet(feed, layers) == pytest.approx(found, rel=1e-9)
