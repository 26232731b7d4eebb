"""Combustion equilibrium of propane from 2,000 random positive starts, with bounds at zero.

Source: K. Meintjes and A. P. Morgan, Chemical equilibrium systems as numerical test problems, ACM Transactions on
Mathematical Software 16 (1990), 143-151: the five reduced equations of propane in air with its constants; the physical
root is printed there as (0.003114, 34.60, 0.06504, 0.8594, 0.03695) (equations and values from memory of the paper).
"""

from collections import Counter

import numpy as np

from eqsheet.solve.ladder import solve_block
from eqsheet.solve.problem import Problem

STARTS = 2000
# Decades to either side of one over which every unknown of a start is spread.
DECADES = 2.0
PHYSICAL = (0.003114, 34.60, 0.06504, 0.8594, 0.03695)

R = 10.0
R5 = 0.193
R6 = 0.002597 / 40**0.5
R7 = 0.003448 / 40**0.5
R8 = 0.00001799 / 40
R9 = 0.0002155 / 40**0.5
R10 = 0.00003846 / 40


def linearise(y):
    """Residuals (5,) and Jacobian (5, 5) of the reduced equations."""
    a, b, c, d, e = y
    residual = np.array(
        [
            a * b + a - 3 * e,
            2 * a * b + a + 2 * R10 * b * b + b * c * c + R7 * b * c + R9 * b * d + R8 * b - R * e,
            2 * b * c * c + R7 * b * c + 2 * R5 * c * c + R6 * c - 8 * e,
            R9 * b * d + 2 * d * d - 4 * R * e,
            a * b
            + a
            + R10 * b * b
            + b * c * c
            + R7 * b * c
            + R9 * b * d
            + R8 * b
            + R5 * c * c
            + R6 * c
            + d * d
            - 1,
        ]
    )
    by_b = c * c + R7 * c + R9 * d + R8
    jacobian = np.array(
        [
            [b + 1, a, 0, 0, -3],
            [2 * b + 1, 2 * a + 4 * R10 * b + by_b, 2 * b * c + R7 * b, R9 * b, -R],
            [0, 2 * c * c + R7 * c, 4 * b * c + R7 * b + 4 * R5 * c + R6, 0, -8],
            [0, R9 * d, 0, R9 * b + 4 * d, -4 * R],
            [b + 1, a + 2 * R10 * b + by_b, 2 * b * c + R7 * b + 2 * R5 * c + R6, R9 * b + 2 * d, 0],
        ]
    )
    return residual, jacobian


def sizes(y):
    """Largest term (5,) of each equation."""
    a, b, c, d, e = np.abs(y)
    return np.array(
        [
            max(a * b, a, 3 * e),
            max(2 * a * b, a, b * c * c, R * e),
            max(2 * b * c * c, R6 * c, 8 * e),
            max(2 * d * d, 4 * R * e),
            max(a * b, a, b * c * c, d * d, 1.0),
        ]
    )


def test_the_physical_root_from_nearly_every_start_and_no_other_ever():
    generator = np.random.default_rng(1990)
    ends = Counter()
    for _ in range(STARTS):
        start = 10.0 ** generator.uniform(-DECADES, DECADES, 5)
        problem = Problem(
            5, lambda y: linearise(y)[0], linearise, sizes, start, np.zeros(5), np.full(5, np.inf), start
        )
        outcome = solve_block(problem)
        physical = outcome.solved and np.allclose(outcome.x, PHYSICAL, rtol=2e-3)
        ends["physical" if physical else "another root" if outcome.solved else "no root"] += 1
    assert ends["another root"] == 0
    assert ends["physical"] >= 1990, ends
