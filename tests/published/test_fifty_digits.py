"""Samples and families that are called solved hold at fifty digits, worked out from their text apart from the program."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import pytest
from exact_families import holds, worst
from test_family_problems import BOUNDARY_VALUE, BROYDEN

import eqsheet

SAMPLES = Path(__file__).parents[2] / "samples"
# What this evaluator does not know: measured curves, templates.
BEYOND = {"booster", "heating_pipes"}

FAMILIES = {
    "broyden": BROYDEN.format(n=30),
    "boundary value": BOUNDARY_VALUE.format(n=25),
    # Rod with conduction, radiation and convection, without guesses (data invented).
    "rod": """\
N = 12
L = 0.5 m
dx = L/N
k = 20 W/(m*K)
d = 10 mm
T_air = 300 K
for i in 1..N:
    k*pi*d^2/4*(T[i+1] - 2*T[i] + T[i-1])/dx = pi*d*dx*(0.8*const.sigma*(T[i]^4 - T_air^4) + (8 W/(m^2*K))*(T[i] - T_air))
T[0] = 900 K
T[N+1] = T[N]
""",
    # Equilibrium stages with a feed in the middle, filters and sums (data invented).
    "stages": """\
N = 9
feed = 5
alpha = 2.4
L0 = 3 mol/s
V0 = 4 mol/s
F = 2 mol/s
z = 45 %
for i in 1..N:
    y[i] = alpha*x[i]/(1 + (alpha - 1)*x[i])
    x[i] near 0.5 within 0 .. 1
    y[i] near 0.5 within 0 .. 1
for i in 1..N if i <= feed:
    D[i] = L0
for i in 1..N if i > feed:
    D[i] = L0 + F
for i in 2..N if i != feed:
    D[i-1]*x[i-1] + V0*y[i+1] = D[i]*x[i] + V0*y[i]
D[feed-1]*x[feed-1] + V0*y[feed+1] + F*z = (L0 + F)*x[feed] + V0*y[feed]
y[N+1] = x[N]*0.4
x[1] = 0.6*y[1] + 0.1
held = sum(x[i] for i in 1..N if i != feed)
""",
    # Two tables, one of them naming members of the other (data invented).
    "tree": """\
rows node: h in m, q in L/s
    top   40  -
    fork  12  0
    left   3  2
    right  5  3
rows pipe: a of node, b of node, K in s^2/m^5
    trunk  top   fork   9e5
    west   fork  left   1.1e6
    east   fork  right  0.7e6
for p in pipe:
    H[a[p]] - H[b[p]] = K[p]*Q[p]*abs(Q[p])
for n in node if n != top:
    sum(Q[p] for p in pipe if b[p] = n) - sum(Q[p] for p in pipe if a[p] = n) = q[n]
q[top] = -sum(q[n] for n in node if n != top)
H[top] = h[top]
Q near 1 L/s
""",
}


@dataclass(frozen=True)
class Moved:
    """A result, one value of which is put off by a part of itself."""

    si: float
    dimension: object


@pytest.mark.parametrize("name", sorted({p.stem for p in SAMPLES.glob("*.eqsheet")} - BEYOND))
def test_a_sample_holds_at_fifty_digits(name: str) -> None:
    path = SAMPLES / f"{name}.eqsheet"
    solution = eqsheet.load(path).solve()
    assert solution.solved
    assert holds(path.read_text(encoding="utf-8"), solution, SAMPLES)


@pytest.mark.parametrize("name", FAMILIES)
def test_a_family_holds_at_fifty_digits(name: str) -> None:
    solution = eqsheet.parse(FAMILIES[name]).solve()
    assert solution.solved, [d.message for d in solution.diagnostics]
    assert holds(FAMILIES[name], solution)


@pytest.mark.parametrize(
    "name, quantity", [("broyden", "x[7]"), ("rod", "T[5]"), ("stages", "held"), ("tree", "Q[west]")]
)
def test_the_check_tells_one_wrong_member(name: str, quantity: str) -> None:
    found = eqsheet.parse(FAMILIES[name]).solve()
    values = {n: Moved(v.si * (1 + 1e-9 * (n == quantity)), v.dimension) for n, v in found.items()}
    assert worst(FAMILIES[name], values) > 1e-12
