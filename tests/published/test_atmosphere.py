"""U.S. Standard Atmosphere, 1976 (NOAA-S/T 76-1562), the two lowest layers, by geometric altitude."""

from __future__ import annotations

from collections.abc import Callable
from decimal import Decimal

import pytest

import eqsheet

Solve = Callable[[str], eqsheet.Solution]

ATMOSPHERE = """
# Constants of the standard itself, not today's best values.
R_star = 8314.32 J/(kmol*K)
M_0 = 28.9644 kg/kmol
g_0 = 9.80665 m/s^2
r_0 = 6356.766 km
T_0 = 288.15 K
p_0 = 1013.25 mbar
lapse = 6.5 K/km
H_1 = 11 km
T_1 = T_0 - lapse*H_1
p_1 = p_0*(T_1/T_0)^(g_0*M_0/(R_star*lapse))

geopotential: H = r_0*Z/(r_0 + Z)
T = if H <= H_1 then T_0 - lapse*H else T_1
p = if H <= H_1 then p_0*(T/T_0)^(g_0*M_0/(R_star*lapse)) else p_1*exp(-g_0*M_0*(H - H_1)/(R_star*T_1))
rho = p*M_0/(R_star*T)
show Z in m, H in m, p in Pa, T in K, rho in kg/m^3
"""

# Table 1 of the standard, to the digits remembered: Z in m, T in K, p in Pa, rho in kg/m^3.
TABLE = [
    ("5000", "255.676", "5.4048e4", "7.3643e-1"),
    ("10000", "223.252", "2.6500e4", "4.1351e-1"),
    ("15000", "216.650", "1.211e4", "1.948e-1"),
    ("20000", "216.650", "5.5293e3", "8.8910e-2"),
]


def half_unit(printed: str) -> float:
    """Half a unit of the last printed place: what rounding may have taken away."""
    exponent = Decimal(printed).as_tuple().exponent
    assert isinstance(exponent, int)
    return 0.5 * 10.0**exponent


@pytest.mark.parametrize(("altitude", "temperature", "pressure", "density"), TABLE)
def test_table_by_altitude(
    solved: Solve, altitude: str, temperature: str, pressure: str, density: str
) -> None:
    solution = solved(f"Z = {altitude} m\n{ATMOSPHERE}")
    for name, printed in (("T", temperature), ("p", pressure), ("rho", density)):
        assert solution[name].value == pytest.approx(float(printed), abs=1.01 * half_unit(printed)), name


@pytest.mark.parametrize(("altitude", "temperature", "pressure", "density"), TABLE)
def test_altitude_from_pressure(
    solved: Solve, altitude: str, temperature: str, pressure: str, density: str
) -> None:
    """What an altimeter does: the layer is not known before the altitude is.

    The rounding of the printed pressure is worth half_unit/(rho g) of altitude.
    """
    start = "Z near 8 km within 0 km .. 20.1 km\nH near 8 km within 0 km .. 20.1 km"
    solution = solved(f"p = {pressure} Pa\n{start}\n{ATMOSPHERE}")
    slack = half_unit(pressure) / (float(density) * 9.7)
    assert solution["Z"].to("m") == pytest.approx(float(altitude), abs=slack)
    assert solution["T"].to("K") == pytest.approx(
        float(temperature), abs=0.0065 * slack + half_unit(temperature)
    )


def test_base_pressures_of_the_layers(solved: Solve) -> None:
    """Geopotential base levels, table 4 of the standard: 22632.06 Pa at 11 km, 5474.889 Pa at 20 km."""
    solution = solved(f"H = 20 km\n{ATMOSPHERE}")
    assert solution["p_1"].si == pytest.approx(22632.06, abs=0.01)
    assert solution["p"].value == pytest.approx(5474.889, abs=0.002)
