"""Hiebert's chemical equilibrium problems, with their starts.

Source: K. L. Hiebert, An evaluation of mathematical software that solves systems of nonlinear equations, ACM
Transactions on Mathematical Software 8 (1982), 5-20. The paper itself was not at hand; equations, constants and starts
are those of its codings by L. Weimann, Zuse Institute Berlin (ChemEqui1.f, ChemEqui2.f, ChemEqui3.f, 2005), who also
takes the exponentials or squares of the unknowns of the third. A coding by E. Bertolazzi, University of Trento (NLtoolbox),
differs in one index of the second problem and of the third: where Weimann has x5 in the last equation of the second
it has x4, where he has x2 in the eighth of the third it has x3. Both readings are taken here. (It also takes 3 for the
ratio of oxygen to fuel in place of 10; then the first two balances leave no composition without a negative amount.)
"""

from __future__ import annotations

from more_garbow_hillstrom import Published


def two_species(x, m):
    return [x[1] - 10, x[0] * x[1] - 50000]


def six_species(x, m):
    return [*_balances(x), x[4] - 55 * (0 * x[0] + 10) ** 14 * x[2] * x[5]]


def six_species_other_reading(x, m):
    return [*_balances(x), x[3] - 55 * (0 * x[0] + 10) ** 14 * x[2] * x[5]]


def _balances(x):
    one = 0 * x[0] + 1
    return [
        x[0] + x[1] + x[3] - one / 1000,
        x[4] + x[5] - 55,
        x[0] + x[1] + x[2] + 2 * x[4] + x[5] - 110 - one / 1000,
        x[0] - x[1] / 10,
        x[0] - 10000 * x[2] * x[3],
    ]


def propane(x, m):
    """The ten species of propane burning in air."""
    return _propane(x, m, x[1])


def propane_other_reading(x, m):
    return _propane(x, m, x[2])


def _propane(x, m, doubtful):
    """As `propane`; the codings differ in the species that stands in the eighth equation."""
    one = 0 * x[0] + 1
    total = x[0] + x[1] + x[2] + x[3] + x[4] + x[5] + x[6] + x[7] + x[8] + x[9]
    return [
        x[0] + x[3] - 3,
        2 * x[0] + x[1] + x[3] + x[6] + x[7] + x[8] + 2 * x[9] - 10,
        2 * x[1] + 2 * x[4] + x[5] + x[6] - 8,
        2 * x[2] + x[4] - 40,
        x[0] * x[4] - 193 * one / 1000 * x[1] * x[3],
        m.sqrt(x[1]) * x[5] - 2597 * one / 10**6 * m.sqrt(x[1] * x[3] * total),
        m.sqrt(x[3]) * x[6] - 3448 * one / 10**6 * m.sqrt(x[0] * x[3] * total),
        x[3] * x[7] - 1799 * one / 10**8 * doubtful * total,
        x[3] * x[8] - 2155 * one / 10**7 * x[0] * m.sqrt(x[2] * total),
        x[3] ** 2 * x[9] - 3846 * one / 10**8 * x[3] ** 2 * total,
    ]


def propane_in_logarithms(y, m):
    return propane([m.exp(v) for v in y], m)


def propane_in_roots(y, m):
    return propane([v**2 for v in y], m)


SMALL, LARGE = 3.0e-4, 27.5
PROBLEMS = (
    Published(1, "two species", two_species, (1, 1)),
    Published(2, "six species, start near", six_species, (SMALL, SMALL, LARGE, SMALL, LARGE, LARGE)),
    Published(2, "six species, start of ones", six_species, (1,) * 6),
    Published(2, "six species, other reading", six_species_other_reading, (1,) * 6),
    Published(3, "propane", propane, (1,) * 10),
    Published(3, "propane, other reading", propane_other_reading, (1,) * 10),
    # A start of ones: the logarithms of one.
    Published(3, "propane in logarithms", propane_in_logarithms, (0,) * 10),
    Published(3, "propane in roots", propane_in_roots, (1,) * 10),
)
