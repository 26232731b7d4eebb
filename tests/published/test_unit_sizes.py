"""Sizes of units against NIST Special Publication 811 (2008), appendix B.8.

The numbers are those of the appendix as transcribed in the R package NISTunits (file R/NISTfactors.R); they
are rounded there to seven significant digits, exact ones apart, and compared to the last digit given.
"""

from __future__ import annotations

from decimal import Decimal

import pytest

from eqsheet.units.display import parse_product
from eqsheet.units.registry import UnitTable
from eqsheet.units.unit import Unit

# unit, the SI unit it is given in, the factor as printed
NIST_SP_811 = [
    ("mi^2", "m^2", "2589988"),
    ("atm", "Pa", "101325"),
    ("kgf/cm^2", "kPa", "98.0665"),
    ("bar", "kPa", "100"),
    ("bbl", "m^3", "0.1589873"),
    ("BTU", "J", "1055.056"),
    ("kBtu", "kJ", "1055.056"),
    ("BTU*ft/(h*ft^2*degF)", "W/(m*K)", "1.730735"),
    ("BTU*in/(h*ft^2*degF)", "W/(m*K)", "0.1442279"),
    ("BTU/ft^3", "J/m^3", "37258.95"),
    ("BTU/degF", "J/K", "1899.101"),
    ("BTU/degR", "J/K", "1899.101"),
    ("BTU/h", "W", "0.2930711"),
    ("BTU/(h*ft^2*degF)", "W/(m^2*K)", "5.678263"),
    ("BTU/lb", "J/kg", "2326"),
    ("BTU/(lb*degF)", "J/(kg*K)", "4186.8"),
    ("BTU/(ft^2*h)", "W/m^2", "3.154591"),
    ("cfm", "m^3/s", "0.0004719474"),
    ("ft^3", "m^3", "0.02831685"),
    ("gpm", "m^3/s", "0.0000630902"),
    ("gpm", "L/s", "0.0630902"),
    ("g/cm^3", "kg/m^3", "1000"),
    ("ha", "m^2", "10000"),
    ("hp", "W", "745.6999"),
    ("PS", "W", "735.4988"),
    ("in", "cm", "2.54"),
    ("inHg", "Pa", "3386.389"),
    ("inH2O", "Pa", "249.0889"),
    ("in^4", "m^4", "0.0000004162314"),
    ("kcal_IT", "J", "4186.8"),
    ("kcal_th", "J", "4184"),
    ("kcal_th/min", "W", "69.73333"),
    ("kgf", "N", "9.80665"),
    ("km/h", "m/s", "0.2777778"),
    ("kWh", "MJ", "3.6"),
    ("kip", "kN", "4.448222"),
    ("ksi", "kPa", "6894.757"),
    ("kn", "m/s", "0.5144444"),
    ("lm/ft^2", "lx", "10.76391"),
    ("mil", "mm", "0.0254"),
    ("mi", "km", "1.609344"),
    ("nmi", "m", "1852"),
    ("mi/gal", "km/L", "0.4251437"),
    ("mph", "m/s", "0.44704"),
    ("oz/gal", "g/L", "7.489152"),
    ("oz/ft^2", "kg/m^2", "0.3051517"),
    ("P", "Pa*s", "0.1"),
    ("lb", "kg", "0.4535924"),
    ("lb*ft^2", "kg*m^2", "0.04214011"),
    ("lbf", "N", "4.448222"),
    ("ft*lbf", "N*m", "1.355818"),
    ("in*lbf", "N*m", "0.1129848"),
    ("lbf/in", "N/m", "175.1268"),
    ("klf", "N/mm", "14.5939"),
    ("ksf", "kPa", "47.88026"),
    ("lbf/lb", "N/kg", "9.80665"),
    ("psf", "Pa", "47.88026"),
    ("psi", "kPa", "6.894757"),
    ("lb/ft^3", "kg/m^3", "16.01846"),
    ("lb/(ft*h)", "Pa*s", "0.0004133789"),
    ("lb/gal_UK", "kg/m^3", "99.77637"),
    ("rev", "rad", "6.283185"),
    ("rpm", "rad/s", "0.1047198"),
    ("arcsec", "rad", "0.000004848137"),
    ("slug", "kg", "14.5939"),
    ("slug/ft^3", "kg/m^3", "515.3788"),
    ("ft^2/h", "m^2/s", "0.0000258064"),
    ("in^2", "cm^2", "6.4516"),
    ("yd^2", "m^2", "0.8361274"),
    ("St", "m^2/s", "0.0001"),
    ("long_ton", "kg", "1016.047"),
    ("short_ton", "kg", "907.1847"),
    ("t", "kg", "1000"),
    ("therm_EC", "MJ", "105.506"),
    ("therm_US", "MJ", "105.4804"),
    ("TR", "W", "3516.853"),
    ("Torr", "Pa", "133.3224"),
    ("W/in^2", "W/m^2", "1550.003"),
    ("yd", "m", "0.9144"),
]


def unit(text: str) -> Unit:
    found = UnitTable.standard().resolve(text, parse_product(text))
    assert isinstance(found, Unit), found
    return found


@pytest.mark.parametrize(("text", "si_text", "printed"), NIST_SP_811)
def test_size_as_printed(text: str, si_text: str, printed: str) -> None:
    one, si = unit(text), unit(si_text)
    assert one.dimension == si.dimension
    exponent = Decimal(printed).as_tuple().exponent
    assert isinstance(exponent, int)
    half_a_last_digit = 0.5 * 10.0**exponent
    assert one.factor / si.factor == pytest.approx(
        float(printed), rel=1e-15, abs=half_a_last_digit * 1.0000001
    )
