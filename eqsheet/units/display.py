"""How results are shown to people: the unit where none was asked for, and the number.

The unit follows from the dimension alone, never from the magnitude: a result that creeps from 0.9 m to 1.1 m
must not change its unit between two versions of a worksheet.
"""

from __future__ import annotations

import math
from fractions import Fraction
from functools import lru_cache

from eqsheet.units.dimension import DIMENSIONLESS, SI_BASES, Dimension
from eqsheet.units.registry import UnitTable
from eqsheet.units.unit import Unit

# Coherent SI throughout, so that no factor hides in a result, but for kPa (stress and pressure share it) and
# g/mol. Where the trades use one dimension for two things (torque and energy) the one listed serves for both.
DEFAULT_UNITS = (
    ("length", "m"),
    ("area", "m^2"),
    ("volume, section modulus", "m^3"),
    ("second moment of area", "m^4"),
    ("time", "s"),
    ("speed", "m/s"),
    ("acceleration", "m/s^2"),
    ("volume flow", "m^3/s"),
    ("kinematic viscosity, diffusivity", "m^2/s"),
    ("mass", "kg"),
    ("mass flow", "kg/s"),
    ("mass flux", "kg/(m^2*s)"),
    ("density", "kg/m^3"),
    ("specific volume", "m^3/kg"),
    ("mass per length", "kg/m"),
    ("mass per area", "kg/m^2"),
    ("moment of inertia", "kg*m^2"),
    ("temperature", "K"),
    ("force", "N"),
    ("stiffness, surface tension, line load", "N/m"),
    ("specific weight, pressure gradient", "Pa/m"),
    ("pressure, stress", "kPa"),
    ("dynamic viscosity", "Pa*s"),
    ("linear flow resistance", "Pa*s/m^3"),
    ("quadratic flow resistance", "Pa*s^2/m^6"),
    ("energy, torque", "J"),
    ("power", "W"),
    ("heat flux, irradiance", "W/m^2"),
    ("power per length", "W/m"),
    ("power per volume", "W/m^3"),
    ("heat transfer coefficient", "W/(m^2*K)"),
    ("thermal conductivity", "W/(m*K)"),
    ("thermal conductance", "W/K"),
    ("thermal resistance", "K/W"),
    ("thermal insulance", "m^2*K/W"),
    ("temperature gradient", "K/m"),
    ("rate of temperature change", "K/s"),
    ("heat capacity, entropy", "J/K"),
    ("specific heat capacity", "J/(kg*K)"),
    ("volumetric heat capacity", "J/(m^3*K)"),
    ("specific energy, enthalpy", "J/kg"),
    ("amount of substance", "mol"),
    ("molar flow, katalytic activity", "mol/s"),
    ("concentration", "mol/m^3"),
    ("molar flux", "mol/(m^2*s)"),
    ("rate of reaction", "mol/(m^3*s)"),
    ("molality", "mol/kg"),
    ("molar mass", "g/mol"),
    ("molar volume", "m^3/mol"),
    ("molar energy", "J/mol"),
    ("molar heat capacity", "J/(mol*K)"),
    ("current", "A"),
    ("charge", "A*s"),
    ("voltage", "V"),
    ("resistance", "Ohm"),
    ("resistance squared", "Ohm^2"),
    ("voltage squared", "V^2"),
    ("conductance", "S"),
    ("capacitance", "A*s/V"),
    ("inductance", "H"),
    ("magnetic flux", "Wb"),
    ("flux density", "T"),
    ("electric field", "V/m"),
    ("magnetic field", "A/m"),
    ("current density", "A/m^2"),
    ("resistivity", "Ohm*m"),
    ("conductivity", "S/m"),
    ("permittivity", "A*s/(V*m)"),
    ("permeability", "H/m"),
    ("temperature coefficient of voltage", "V/K"),
    ("luminous intensity, luminous flux", "cd"),
    ("luminance, illuminance", "cd/m^2"),
)

# A price is shown per what the trades buy: energy by the kilowatt-hour, power by the kilowatt, time by the
# hour; anything else per its unit of the table above, if that is a single symbol or power.
PRICED_BY = (("energy", "kWh"), ("power", "kW"), ("time", "h"))

_PLAIN = Unit("", DIMENSIONLESS, 1.0)


@lru_cache(maxsize=512)
def parse_product(text: str) -> tuple[tuple[str, Fraction], ...]:
    """Factors of a unit text of the simple form of the tables above: ``A*s/(V*m)``.

    >>> parse_product("W/(m^2*K)")
    (('W', Fraction(1, 1)), ('m', Fraction(-2, 1)), ('K', Fraction(-1, 1)))
    """
    above, _, below = text.partition("/")
    factors = []
    for part, sign in ((above, 1), (below.strip("()"), -1)):
        for factor in part.split("*") if part not in ("", "1") else ():
            symbol, _, power = factor.partition("^")
            factors.append((symbol, sign * Fraction(power or 1)))
    return tuple(factors)


def _unit(table: UnitTable, text: str) -> Unit:
    unit = table.resolve(text, parse_product(text))
    if not isinstance(unit, Unit):
        raise LookupError(f"the table of default units names {text!r}: {unit.message}")
    return unit


_by_dimension: dict[Dimension, str] = {}
_priced_by: dict[Dimension, str] = {}


def _fill_tables(table: UnitTable) -> None:
    for _, text in DEFAULT_UNITS:
        _by_dimension.setdefault(_unit(table, text).dimension, text)
    for _, text in PRICED_BY:
        _priced_by[_unit(table, text).dimension] = text


def default_unit(dimension: Dimension, kind: str, table: UnitTable) -> Unit:
    """The unit a result is shown in where the worksheet names none.

    Parameters
    ----------
    dimension : Dimension
    kind : str
        ``reading`` shows a temperature in degC and a pressure in kPaa (kilopascal absolute); every other kind
        shows K and kPa.
    table : UnitTable

    Returns
    -------
    Unit
        With empty text for a plain number; a product of base units for a dimension that is in no table, so
        1/s never becomes Hz.

    >>> default_unit(Dimension.of({"kg": 1, "m": -1, "s": -2}), "plain", UnitTable.standard()).text
    'kPa'
    >>> default_unit(Dimension.of({"s": -1}), "plain", UnitTable.standard()).text
    '1/s'
    """
    if not dimension:
        return _PLAIN
    if not _by_dimension:
        _fill_tables(UnitTable.standard())
    text = _by_dimension.get(dimension)
    if text is None:
        return _money_unit(dimension, table) or Unit(dimension.text, dimension, 1.0)
    if kind == "reading" and text in ("K", "kPa"):
        text = "degC" if text == "K" else "kPaa"
    return _unit(table, text)


def _money_unit(dimension: Dimension, table: UnitTable) -> Unit | None:
    """``EUR/kWh`` and the like; None for what is no price."""
    own = [(base, power) for base, power in dimension if base not in SI_BASES]
    if len(own) != 1 or own[0][1] != 1:
        return None
    goods = Dimension.of({own[0][0]: 1}) / dimension
    text = _priced_by.get(goods) or _by_dimension.get(goods)
    if text is None or "/" in text or "*" in text:
        return None
    return _unit(table, f"{own[0][0]}/{text}")


MOST_DIGITS = 6
"""Digits a table shows at most: more than any instrument on site gives, few enough to read."""


def format_value(value: float, digits: int = MOST_DIGITS) -> str:
    """`value` for people: at most six significant digits and never more than `digits` known to be good.

    Trailing zeros are dropped. Plain notation from 0.0001 up to a million, else with an exponent as a
    worksheet would write it.

    >>> [format_value(v) for v in (52.5, 0.000123456789, 1234567.0, -0.0, 2e-9, 999999.7)]
    ['52.5', '0.000123457', '1.23457e6', '0', '2e-9', '1e6']
    >>> format_value(0.31831, 2)
    '0.32'
    """
    if not math.isfinite(value):
        return "inf" if value > 0 else "-inf" if value < 0 else "nan"
    if value == 0.0:
        return "0"
    digits = max(1, min(digits, MOST_DIGITS))
    mantissa, _, exponent = f"{value:.{digits - 1}e}".partition("e")
    power = int(exponent)
    if -4 <= power < 6:
        rounded = float(f"{mantissa}e{exponent}")
        plain = f"{rounded:.{max(0, digits - 1 - power)}f}"
        return plain.rstrip("0").rstrip(".") if "." in plain else plain
    mantissa = mantissa.rstrip("0").rstrip(".") if "." in mantissa else mantissa
    return f"{mantissa}e{power}"
