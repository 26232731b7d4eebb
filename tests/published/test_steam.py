"""Water and steam: the industrial formulation IAPWS R7-97(2012) as a worksheet, solved both ways.

Verification values are those the release prints, in its tables 5 (region 1), 35 and 36 (saturation). The
package `iapws` is a second reference away from the printed points.
"""

from __future__ import annotations

from collections.abc import Callable

import pytest
from iapws.iapws97 import _PSat_T, _Region1

import eqsheet

Solve = Callable[[str], eqsheet.Solution]

# Table 2 of the release: exponents I, J and coefficient n of the 34 terms of region 1.
REGION_1 = """
 0  -2  0.14632971213167       0  -1 -0.84548187169114       0   0 -0.37563603672040e1
 0   1  0.33855169168385e1     0   2 -0.95791963387872       0   3  0.15772038513228
 0   4 -0.16616417199501e-1    0   5  0.81214629983568e-3    1  -9  0.28319080123804e-3
 1  -7 -0.60706301565874e-3    1  -1 -0.18990068218419e-1    1   0 -0.32529748770505e-1
 1   1 -0.21841717175414e-1    1   3 -0.52838357969930e-4    2  -3 -0.47184321073267e-3
 2   0 -0.30001780793026e-3    2   1  0.47661393906987e-4    2   3 -0.44141845330846e-5
 2  17 -0.72694996297594e-15   3  -4 -0.31679644845054e-4    3   0 -0.28270797985312e-5
 3   6 -0.85205128120103e-9    4  -5 -0.22425281908000e-5    4  -2 -0.65171222895601e-6
 4  10 -0.14341729937924e-12   5  -8 -0.40516996860117e-6    8 -11 -0.12734301741641e-8
 8  -6 -0.17424871230634e-9   21 -29 -0.68762131295531e-18  23 -31  0.14478307828521e-19
29 -38  0.26335781662795e-22  30 -39 -0.11947622640071e-22  31 -40  0.18228094581404e-23
32 -41 -0.93537087292458e-25
"""
WORDS = REGION_1.split()
TERMS = [(int(i), int(j), float(n)) for i, j, n in zip(WORDS[::3], WORDS[1::3], WORDS[2::3])]


def region_1(given: str) -> str:
    """The worksheet of region 1: v and h from the derivatives of the Gibbs energy, with `given` appended."""
    by_pressure = " + ".join(f"({-n * i!r})*x^{i - 1}*y^{j}" for i, j, n in TERMS if i)
    by_temperature = " + ".join(f"({n * j!r})*x^{i}*y^{j - 1}" for i, j, n in TERMS if j)
    return f"""
        R = 0.461526 kJ/(kg*K)
        x = 7.1 - p/(16.53 MPa)
        y = 1386 K / T - 1.222
        v = R*T/(16.53 MPa)*gamma_pi
        h = R*(1386 K)*gamma_tau
        gamma_pi = {by_pressure}
        gamma_tau = {by_temperature}
        show T in K, p in MPa, v in m^3/kg, h in kJ/kg
        {given}
        """


TABLE_5 = [
    (300, 3, 0.100215168e-2, 0.115331273e3),
    (300, 80, 0.971180894e-3, 0.184142828e3),
    (500, 3, 0.120241800e-2, 0.975542239e3),
]


@pytest.mark.parametrize(("temperature", "pressure", "volume", "enthalpy"), TABLE_5)
def test_region_1_forwards(
    solved: Solve, temperature: float, pressure: float, volume: float, enthalpy: float
) -> None:
    """Table 5, to the nine digits printed."""
    solution = solved(region_1(f"T = {temperature} K\n        p = {pressure} MPa"))
    assert solution["v"].value == pytest.approx(volume, rel=6e-9)
    assert solution["h"].value == pytest.approx(enthalpy, rel=6e-9)


@pytest.mark.parametrize(("temperature", "pressure", "volume", "enthalpy"), TABLE_5)
def test_region_1_temperature_from_enthalpy(
    solved: Solve, temperature: float, pressure: float, volume: float, enthalpy: float
) -> None:
    """Table 5 read backwards: one unknown in a formula of 28 terms; nine digits in, nine digits out."""
    given = f"""
        h = {enthalpy!r} kJ/kg
        p = {pressure} MPa
        T near 400 K within 273.15 K .. 623.15 K"""
    solution = solved(region_1(given))
    assert solution["T"].to("K") == pytest.approx(temperature, rel=1e-8)
    assert solution["v"].value == pytest.approx(volume, rel=2e-8)


@pytest.mark.parametrize(("temperature", "pressure"), [(420.0, 10.0), (555.0, 22.5), (610.0, 60.0)])
def test_region_1_pressure_and_temperature_from_volume_and_enthalpy(
    solved: Solve, temperature: float, pressure: float
) -> None:
    """Both unknown at once, states between the printed ones; v and h come from the package `iapws`."""
    state = _Region1(temperature, pressure)
    given = f"""
        v = {float(state["v"])!r} m^3/kg
        h = {float(state["h"])!r} kJ/kg
        T near 500 K within 273.15 K .. 623.15 K
        p near 20 MPa within 0.1 MPa .. 100 MPa"""
    solution = solved(region_1(given))
    assert solution["T"].to("K") == pytest.approx(temperature, rel=1e-9)
    assert solution["p"].to("MPa") == pytest.approx(pressure, rel=1e-8)


SATURATION = """
# Region 4, equation (29): one polynomial in beta and theta, solved for either.
beta = (p/(1 MPa))^0.25
theta = T_r + n9/(T_r - n10)
T_r = T/(1 K)
beta^2*theta^2 + n1*beta^2*theta + n2*beta^2 + n3*beta*theta^2 + n4*beta*theta + n5*beta
  + n6*theta^2 + n7*theta + n8 = 0
n1 = 0.11670521452767e4
n2 = -0.72421316703206e6
n3 = -0.17073846940092e2
n4 = 0.12020824702470e5
n5 = -0.32325550322333e7
n6 = 0.14915108613530e2
n7 = -0.48232657361591e4
n8 = 0.40511340542057e6
n9 = -0.23855557567849
n10 = 0.65017534844798e3
p within 0.0006 MPa .. 22.1 MPa
T within 273 K .. 647.1 K
beta within 0.15 .. 2.17
"""


@pytest.mark.parametrize(
    ("temperature", "pressure"), [(300, 0.353658941e-2), (500, 0.263889776e1), (600, 0.123443146e2)]
)
def test_saturation_pressure(solved: Solve, temperature: float, pressure: float) -> None:
    """Table 35, to the nine digits printed, and the package `iapws` to twelve."""
    solution = solved(f"{SATURATION}\nT = {temperature} K\np near 1 MPa\nbeta near 1\n")
    assert solution["p"].to("MPa") == pytest.approx(pressure, rel=6e-9)
    assert solution["p"].to("MPa") == pytest.approx(_PSat_T(temperature), rel=1e-10)


@pytest.mark.parametrize(
    ("pressure", "temperature"),
    [("1 bar", 0.372755919e3), ("10 bar", 0.453035632e3), ("10 MPa", 0.584149488e3)],
)
def test_saturation_temperature(solved: Solve, pressure: str, temperature: float) -> None:
    """Table 36, to the nine digits printed."""
    solution = solved(
        f"show T in K\n{SATURATION}\np = {pressure}\nT near 200 degC\nT_r near 450\ntheta near 450\n"
    )
    assert solution["T"].value == pytest.approx(temperature, rel=6e-9)
