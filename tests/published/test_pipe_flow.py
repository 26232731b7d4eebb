"""Flow in pipes and through orifices against published numbers."""

from __future__ import annotations

from collections.abc import Callable
from math import exp, log10, pi, sqrt

import mpmath
import pytest
from scipy.optimize import brentq

import eqsheet

Solve = Callable[[str], eqsheet.Solution]


def test_flow_for_a_given_head_loss(solved: Solve) -> None:
    """White, Fluid Mechanics, example 6.9 (from memory): oil, 100 m of 0.3 m pipe, 8 m of head, k/D = 0.0002.

    Printed there: V = 4.84 m/s, f = 0.0201, Q = 0.342 m^3/s. A second calculation with mpmath at 30 digits
    decides the rest: with the head loss given, Re*sqrt(f) is known and Colebrook's formula is explicit.
    """
    solution = solved(
        """
        require f <= 0.1
        L = 100 m
        h_f = 8 m
        D = 30 cm
        k = 0.0002*D
        nu = 2e-5 m^2/s
        g = 9.81 m/s^2
        Q = v*pi*(D/2)^2
        darcy: h_f*2*g*D/L = f*v^2
        colebrook: -2*log10(k/D/3.7 + 2.51/Re/sqrt(f)) = f^-0.5 valid 4e3 <= Re <= 1e8
        Re*nu = v*D
        f within 0.008 .. 0.1
        v near sqrt(2*g*h_f)
        show Q in L/s
        """
    )
    assert solution["v"].value == pytest.approx(4.84, abs=0.005)
    assert solution["f"].value == pytest.approx(0.0201, abs=0.00005)
    assert solution["Q"].to("m^3/s") == pytest.approx(0.342, abs=0.0005)
    with mpmath.workdps(30):
        root_f_times_v = mpmath.sqrt(mpmath.mpf(8) * 2 * mpmath.mpf("9.81") * mpmath.mpf("0.3") / 100)
        re_root_f = root_f_times_v * mpmath.mpf("0.3") / mpmath.mpf("2e-5")
        inverse = -2 * mpmath.log10(mpmath.mpf("0.0002") / mpmath.mpf("3.7") + mpmath.mpf("2.51") / re_root_f)
        v, f = root_f_times_v * inverse, 1 / inverse**2
    assert solution["v"].si == pytest.approx(float(v), rel=1e-12)
    assert solution["f"].si == pytest.approx(float(f), rel=1e-12)


@pytest.mark.parametrize(
    ("reynolds", "friction"),
    [("4000", 0.0399), ("1e4", 0.0309), ("1e5", 0.0180), ("1e6", 0.0116), ("1e7", 0.0081), ("1e8", 0.0059)],
)
def test_smooth_pipe(solved: Solve, reynolds: str, friction: float) -> None:
    """White, Fluid Mechanics, eq. (6.38) and its table (from memory): Prandtl's law for smooth pipes."""
    solution = solved(f"1/f^(1/2) = 2*log10(Re*f^(1/2)) - 0.8\nRe = {reynolds}\nf near 0.02 within 0 .. 0.1")
    f = solution["f"].value
    assert f == pytest.approx(friction, abs=0.00005)
    assert 1 / sqrt(f) == pytest.approx(2 * log10(float(reynolds) * sqrt(f)) - 0.8, rel=1e-12)


ORIFICE = """
# Air through an orifice plate, {taps} tappings: ISO 5167-2:2003, Reader-Harris/Gallagher equation.
L_up = {L_up}
L_down = {L_down}
D = 73.91 mm
d = 22.2 mm
rho = 1.1645909036 kg/m^3
mu = 18.5861753095 µPa*s
beta = d/D
A = (19000*beta/Re_D)^0.8
M_down = 2*L_down/(1 - beta)
C = 0.5961 + 0.0261*beta^2 - 0.216*beta^8 + 0.000521*(1e6*beta/Re_D)^0.7
  + (0.0188 + 0.0063*A)*beta^3.5*(1e6/Re_D)^0.3
  + (0.043 + 0.080*exp(-10*L_up) - 0.123*exp(-7*L_up))*(1 - 0.11*A)*beta^4/(1 - beta^4)
  - 0.031*(M_down - 0.8*M_down^1.1)*beta^1.3
valid_range: require 0.1 <= beta <= 0.75
Re_D = 4*q_m/(pi*mu*D)
discharge: q_m = C/sqrt(1 - beta^4)*pi/4*d^2*sqrt(2*dp*rho)      # assume: expansibility of one
Re_D near 1e5 within 5000 .. 1e8
C near 0.6
{given}
"""

TAPPINGS = [
    ("corner", "0", "0", 0.6000085121444034),
    ("D and D/2", "1", "0.47", 0.5988219225153976),
    ("flange", "25.4 mm / D", "25.4 mm / D", 0.5990042535666878),
]


def discharge_coefficient(mass_flow: float, l_up: float, l_down: float) -> float:
    """Reader-Harris/Gallagher equation in SI floats, pipe of at least 71.12 mm bore."""
    bore, beta = 0.07391, 0.0222 / 0.07391
    reynolds = 4 * mass_flow / (pi * 18.5861753095e-6 * bore)
    a = (19000 * beta / reynolds) ** 0.8
    m = 2 * l_down / (1 - beta)
    upstream = (0.043 + 0.080 * exp(-10 * l_up) - 0.123 * exp(-7 * l_up)) * (1 - 0.11 * a)
    return (
        0.5961 + 0.0261 * beta**2 - 0.216 * beta**8 + 0.000521 * (1e6 * beta / reynolds) ** 0.7
        + (0.0188 + 0.0063 * a) * beta**3.5 * (1e6 / reynolds) ** 0.3
        + upstream * beta**4 / (1 - beta**4) - 0.031 * (m - 0.8 * m**1.1) * beta**1.3
    )  # fmt: skip


@pytest.mark.parametrize(("taps", "l_up", "l_down", "expected"), TAPPINGS, ids=[case[0] for case in TAPPINGS])
def test_orifice_discharge_coefficient(
    solved: Solve, taps: str, l_up: str, l_down: str, expected: float
) -> None:
    """Expected: values in the published tests of the open-source library `fluids`, same plate and flow."""
    text = ORIFICE.format(taps=taps, L_up=l_up, L_down=l_down, given="q_m = 0.124431876 kg/s\ndp near 1 kPa")
    solution = solved(text)
    assert solution["C"].value == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize(("taps", "l_up", "l_down", "_"), TAPPINGS, ids=[case[0] for case in TAPPINGS])
def test_orifice_flow_from_the_pressure_difference(
    solved: Solve, taps: str, l_up: str, l_down: str, _: float
) -> None:
    """The coefficient depends on the flow it determines; checked against a bracketed root in SI floats."""
    text = ORIFICE.format(
        taps=taps, L_up=l_up, L_down=l_down, given="dp = 250 mbar\nq_m near 1 g/s within 0 g/s .."
    )
    solution = solved(text)
    ends = {"0": 0.0, "1": 1.0, "0.47": 0.47, "25.4 mm / D": 0.0254 / 0.07391}
    beta, bore = 0.0222 / 0.07391, 0.0222
    ideal = pi / 4 * bore**2 * sqrt(2 * 25e3 * 1.1645909036 / (1 - beta**4))
    flow = brentq(
        lambda q: discharge_coefficient(q, ends[l_up], ends[l_down]) * ideal - q,
        1e-3,
        1.0,
        xtol=1e-300,
        rtol=9e-16,
    )
    assert solution["q_m"].to("kg/s") == pytest.approx(flow, rel=1e-12)
