"""Pipe networks as worksheets with `rows`, against printed flows.

F. M. White, Fluid Mechanics, McGraw-Hill, section on multiple-pipe systems: three pipes in parallel (example 6.17)
and the same three between reservoirs (example 6.18); data and printed flows from memory, three figures, water at
20 degC. The book takes the friction factor after Colebrook (1939) by iteration.
A looped network follows, whose flows are worked out a second time by Hardy Cross's own method (University of Illinois
Bulletin 286, 1936) from another start.
"""

from __future__ import annotations

from math import log10, pi

import pytest
from scipy.optimize import brentq

import eqsheet

PIPES = """\
rho = 998 kg/m^3
nu = 1.02e-6 m^2/s
rows pipe: a of node, b of node, L in m, D in cm, eps in mm
{pipes}
for l in pipe:
    Q[l] = v[l]*pi*D[l]^2/4
    Re[l] = abs(v[l])*D[l]/nu
    1/sqrt(f[l]) = -2*log10(eps[l]/(3.7*D[l]) + 2.51/(Re[l]*sqrt(f[l])))
    H[a[l]] - H[b[l]] = f[l]*L[l]/D[l]*v[l]*abs(v[l])/(2*const.g_n)
f near 0.025 within 0.005 .. 0.2
show Q in m^3/h, H in m
"""

WHITE = """\
    P1 {0} 100 8 0.24
    P2 {1} 150 6 0.12
    P3 {2}  80 4 0.20"""


def flows(text: str, guesses: str = "") -> eqsheet.Solution:
    solution = eqsheet.parse(text + guesses).solve()
    assert solution.status == "solved", [d.message for d in solution.diagnostics]
    return solution


def test_three_pipes_in_parallel() -> None:
    tables = "rows node: H in m\n    top 20.3\n    bottom 0\n"
    pipes = PIPES.format(pipes=WHITE.format(*["top bottom"] * 3))
    solution = flows(tables + pipes, "total = sum(Q[l] for l in pipe)\nshow total in m^3/h\nv near 2 m/s\n")
    printed = {"Q[P1]": 62.5, "Q[P2]": 25.9, "Q[P3]": 11.4, "total": 99.8}
    for name, flow in printed.items():
        assert solution[name].to("m^3/h") == pytest.approx(flow, abs=0.1)


def test_three_reservoirs() -> None:
    tables = "rows node: H in m\n    lake1 20\n    lake2 100\n    lake3 40\n    junction -\n"
    pipes = PIPES.format(pipes=WHITE.format("lake1 junction", "lake2 junction", "lake3 junction"))
    solution = flows(
        tables + pipes,
        "sum(Q[l] for l in pipe) = 0 m^3/s\nH[junction] near 30 m\nv[P1] near -2 m/s\nv[P2] near 2 m/s\nv[P3] near 1 m/s\n",
    )
    # Printed with the head of the junction found to a tenth of a metre, where the three sum to 0.7 m^3/h.
    for name, flow in {"Q[P1]": -52.4, "Q[P2]": 47.1, "Q[P3]": 6.0}.items():
        assert solution[name].to("m^3/h") == pytest.approx(flow, abs=0.7)


LOOPED = {
    "A": ("n1", "n2", 300, 20),
    "B": ("n2", "n3", 250, 15),
    "C": ("n1", "n4", 350, 18),
    "D": ("n4", "n5", 125, 13),
    "E": ("n2", "n5", 350, 15),
    "F": ("n5", "n6", 300, 13),
    "G": ("n3", "n6", 125, 12),
}
TAKEN = {"n2": 10, "n3": 15, "n4": 20, "n5": 18, "n6": 12}  # L/s
LOOPS = ({"A": 1, "E": 1, "D": -1, "C": -1}, {"B": 1, "G": 1, "F": -1, "E": -1})


def loss(pipe: str, flow: float) -> float:
    """Loss of head in m at a flow in m^3/s."""
    _, _, length, bore = LOOPED[pipe]
    d = bore / 100
    v = abs(flow) / (pi * d**2 / 4)
    y = brentq(
        lambda y: y + 2 * log10(0.2e-3 / (3.7 * d) + 2.51 * y * 1.02e-6 / (v * d)), 1.0, 20.0, xtol=1e-14
    )
    return float(length / d * v**2 / (2 * 9.80665) / y**2 * (1 if flow > 0 else -1))


def hardy_cross() -> dict[str, float]:
    """Flows in m^3/s: each loop in turn is corrected until its losses sum to nothing."""
    now = {"A": 42e-3, "B": 16e-3, "C": 33e-3, "D": 13e-3, "E": 16e-3, "F": 11e-3, "G": 1e-3}
    for _ in range(300):
        for loop in LOOPS:
            gap = sum(sense * loss(p, now[p]) for p, sense in loop.items())
            slope = sum(2 * abs(loss(p, now[p]) / now[p]) for p in loop)
            for p, sense in loop.items():
                now[p] -= sense * gap / slope
    return now


def test_looped_network_against_hardy_cross() -> None:
    rows = "\n".join(
        f"    {name} {a} {b} {length} {bore} 0.2" for name, (a, b, length, bore) in LOOPED.items()
    )
    taken = "rows node: H in m, q in L/s\n    n1 50 -\n" + "".join(
        f"    {n} - {q}\n" for n, q in TAKEN.items()
    )
    balance = (
        "for n in node:\n"
        "    sum(Q[l] for l in pipe if b[l] = n) - sum(Q[l] for l in pipe if a[l] = n) = q[n]\n"
        "H near 40 m\nv near 1 m/s\n"
    )
    solution = flows(taken + PIPES.format(pipes=rows), balance)
    for name, flow in hardy_cross().items():
        assert solution[f"Q[{name}]"].si == pytest.approx(flow, rel=1e-9, abs=1e-12)
    assert solution["q[n1]"].to("L/s") == pytest.approx(-sum(TAKEN.values()), rel=1e-12)
