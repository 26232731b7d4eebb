"""Points that fill the unit cube evenly, the same at every run.

References
----------
I. M. Sobol, On the distribution of points in a cube and the approximate evaluation of integrals, USSR Comput. Math.
Math. Phys. 7 (1967), 86-112; the order by the Gray code of I. A. Antonov and V. M. Saleev, ibid. 19 (1979), 252-256.
Direction numbers: S. Joe and F. Y. Kuo, Constructing Sobol sequences with better two-dimensional projections, SIAM
J. Sci. Comput. 30 (2008), 2635-2654, table new-joe-kuo-6, dimensions 2 to 53. A. B. Owen, Latin supercube sampling
for very high-dimensional simulations, ACM Trans. Model. Comput. Simul. 8 (1998), 71-102, for what lies beyond.

All points are moved by one digital shift, so that none lies on a face or in a symmetry of the cube. A library's
generator would take longer to import than a small block takes to solve.
"""

from __future__ import annotations

import numpy as np

from eqsheet.solve.problem import Vector

# One dimension after the other, from the second on: the inner coefficients of its primitive polynomial as a number,
# then the initial direction numbers, as many as the degree of the polynomial.
_JOE_AND_KUO = """
    0 1; 1 1 3; 1 1 3 1; 2 1 1 1; 1 1 1 3 3; 4 1 3 5 13; 2 1 1 5 5 17; 4 1 1 5 5 5; 7 1 1 7 11 19;
    11 1 1 5 1 1; 13 1 1 1 3 11; 14 1 3 5 5 31; 1 1 3 3 9 7 49; 13 1 1 1 15 21 21; 16 1 3 1 13 27 49;
    19 1 1 1 15 7 5; 22 1 3 1 15 13 25; 25 1 1 5 5 19 61; 1 1 3 7 11 23 15 103; 4 1 3 7 13 13 15 69;
    7 1 1 3 13 7 35 63; 8 1 3 5 9 1 25 53; 14 1 3 1 13 9 35 107; 19 1 3 1 5 27 61 31;
    21 1 1 5 11 19 41 61; 28 1 3 5 3 3 13 69; 31 1 1 7 13 1 19 1; 32 1 3 7 5 13 19 59;
    37 1 1 3 9 25 29 41; 41 1 3 5 13 23 1 55; 42 1 3 7 3 13 59 17; 50 1 3 1 3 5 53 69;
    55 1 1 5 5 23 33 13; 56 1 1 7 7 1 61 123; 59 1 1 7 9 13 61 49; 62 1 3 3 5 3 55 33;
    14 1 3 1 15 31 13 49 245; 21 1 3 5 15 31 59 63 97; 22 1 3 1 11 11 11 77 249;
    38 1 3 1 11 27 43 71 9; 47 1 1 7 15 21 11 81 45; 49 1 3 7 3 25 31 65 79; 50 1 3 1 1 19 11 3 205;
    52 1 1 5 9 19 21 29 157; 56 1 3 7 11 1 33 89 185; 67 1 3 3 3 15 9 79 71; 70 1 3 7 11 15 39 119 27;
    84 1 1 3 1 11 31 97 225; 97 1 1 1 3 23 43 57 177; 103 1 3 7 7 17 17 37 71;
    115 1 3 1 5 27 63 123 213; 122 1 1 3 5 11 43 53 133
"""
_BITS = 32
_DIMENSIONS = 1 + _JOE_AND_KUO.count(";") + 1
# Multiples of the golden section, as a binary fraction, are the digital shift.
_SHIFT = 2654435769
# Any fixed number: the same worksheet must give the same answer tomorrow.
_SEED = 20040


def sobol(dimensions: int, count: int) -> Vector:
    """`count` points (count, dimensions), strictly between 0 and 1.

    Parameters
    ----------
    count : int
        A power of two: then each half, quarter, ... of every axis holds as many points as the others.

    Notes
    -----
    Beyond 53 dimensions each further group of 53 takes the same points in another order.
    """
    groups = []
    for first in range(0, dimensions, _DIMENSIONS):
        points = _fractions(min(_DIMENSIONS, dimensions - first), count)
        if first:
            points = points[np.random.default_rng(_SEED + first).permutation(count)]
        groups.append(points)
    return np.hstack(groups)


def _fractions(dimensions: int, count: int) -> Vector:
    """The shifted sequence in at most as many dimensions as there are direction numbers for."""
    numbers = np.arange(1, dimensions + 1, dtype=np.uint64) * np.uint64(_SHIFT) % np.uint64(2**_BITS)
    # From one number of the Gray code to the next one digit changes: that of the lowest zero of the index.
    changed = [((~index) & (index + 1)).bit_length() - 1 for index in range(count - 1)]
    directions = np.array([_directions(k) for k in range(dimensions)], dtype=np.uint64)
    steps = np.vstack([numbers, directions[:, changed].T])
    return (np.bitwise_xor.accumulate(steps, axis=0).astype(float) + 0.5) / 2.0**_BITS


def _directions(dimension: int) -> list[int]:
    """Direction numbers of a dimension, each with `_BITS` binary places."""
    if dimension == 0:
        return [1 << (_BITS - 1 - k) for k in range(_BITS)]
    inner, *initial = map(int, _JOE_AND_KUO.split(";")[dimension - 1].split())
    degree = len(initial)
    found = [m << (_BITS - 1 - k) for k, m in enumerate(initial)]
    for k in range(degree, _BITS):
        value = found[k - degree] ^ (found[k - degree] >> degree)
        for j in range(1, degree):
            if inner >> (degree - 1 - j) & 1:
                value ^= found[k - j]
        found.append(value)
    return found
