"""Dimensions in words, for messages: pressure, speed, power."""

from __future__ import annotations

from fractions import Fraction

from eqsheet.units.dimension import DIMENSIONLESS, Dimension

# word -> (exponents, a unit to suggest)
_NAMED: tuple[tuple[str, dict[str, int | Fraction], str], ...] = (
    ("length", {"m": 1}, "m"),
    ("area", {"m": 2}, "m^2"),
    ("volume", {"m": 3}, "m^3"),
    ("second moment of area", {"m": 4}, "m^4"),
    ("wave number or curvature", {"m": -1}, "1/m"),
    ("time", {"s": 1}, "s"),
    ("frequency or angular speed", {"s": -1}, "1/s"),
    ("mass", {"kg": 1}, "kg"),
    ("temperature", {"K": 1}, "K"),
    ("electric current", {"A": 1}, "A"),
    ("amount of substance", {"mol": 1}, "mol"),
    ("luminous intensity", {"cd": 1}, "cd"),
    ("speed", {"m": 1, "s": -1}, "m/s"),
    ("acceleration", {"m": 1, "s": -2}, "m/s^2"),
    ("volume flow", {"m": 3, "s": -1}, "m^3/s"),
    ("mass flow", {"kg": 1, "s": -1}, "kg/s"),
    ("molar flow", {"mol": 1, "s": -1}, "mol/s"),
    ("mass flux", {"kg": 1, "m": -2, "s": -1}, "kg/(m^2*s)"),
    ("density", {"kg": 1, "m": -3}, "kg/m^3"),
    ("specific volume", {"kg": -1, "m": 3}, "m^3/kg"),
    ("mass per length", {"kg": 1, "m": -1}, "kg/m"),
    ("mass per area", {"kg": 1, "m": -2}, "kg/m^2"),
    ("force", {"kg": 1, "m": 1, "s": -2}, "N"),
    ("stiffness or surface tension", {"kg": 1, "s": -2}, "N/m"),
    ("pressure", {"kg": 1, "m": -1, "s": -2}, "Pa"),
    ("pressure gradient", {"kg": 1, "m": -2, "s": -2}, "Pa/m"),
    ("energy or torque", {"kg": 1, "m": 2, "s": -2}, "J"),
    ("power", {"kg": 1, "m": 2, "s": -3}, "W"),
    ("heat flux", {"kg": 1, "s": -3}, "W/m^2"),
    ("power per length", {"kg": 1, "m": 1, "s": -3}, "W/m"),
    ("momentum", {"kg": 1, "m": 1, "s": -1}, "kg*m/s"),
    ("moment of inertia", {"kg": 1, "m": 2}, "kg*m^2"),
    ("dynamic viscosity", {"kg": 1, "m": -1, "s": -1}, "Pa*s"),
    ("kinematic viscosity or diffusivity", {"m": 2, "s": -1}, "m^2/s"),
    ("specific energy", {"m": 2, "s": -2}, "J/kg"),
    ("specific heat capacity", {"m": 2, "s": -2, "K": -1}, "J/(kg*K)"),
    ("heat capacity", {"kg": 1, "m": 2, "s": -2, "K": -1}, "J/K"),
    ("molar heat capacity", {"kg": 1, "m": 2, "s": -2, "K": -1, "mol": -1}, "J/(mol*K)"),
    ("molar energy", {"kg": 1, "m": 2, "s": -2, "mol": -1}, "J/mol"),
    ("molar mass", {"kg": 1, "mol": -1}, "kg/mol"),
    ("concentration", {"mol": 1, "m": -3}, "mol/m^3"),
    ("thermal conductivity", {"kg": 1, "m": 1, "s": -3, "K": -1}, "W/(m*K)"),
    ("heat transfer coefficient", {"kg": 1, "s": -3, "K": -1}, "W/(m^2*K)"),
    ("heat conductance", {"kg": 1, "m": 2, "s": -3, "K": -1}, "W/K"),
    ("thermal resistance", {"kg": -1, "m": -2, "s": 3, "K": 1}, "K/W"),
    ("coefficient of thermal expansion", {"K": -1}, "1/K"),
    ("temperature gradient", {"K": 1, "m": -1}, "K/m"),
    ("electric charge", {"A": 1, "s": 1}, "A*s"),
    ("voltage", {"kg": 1, "m": 2, "s": -3, "A": -1}, "V"),
    ("electric resistance", {"kg": 1, "m": 2, "s": -3, "A": -2}, "Ohm"),
    ("electric conductance", {"kg": -1, "m": -2, "s": 3, "A": 2}, "S"),
    ("capacitance", {"kg": -1, "m": -2, "s": 4, "A": 2}, "A*s/V"),
    ("inductance", {"kg": 1, "m": 2, "s": -2, "A": -2}, "H"),
    ("magnetic flux", {"kg": 1, "m": 2, "s": -2, "A": -1}, "Wb"),
    ("magnetic flux density", {"kg": 1, "s": -2, "A": -1}, "T"),
    ("electric field", {"kg": 1, "m": 1, "s": -3, "A": -1}, "V/m"),
    ("resistivity", {"kg": 1, "m": 3, "s": -3, "A": -2}, "Ohm*m"),
    ("power per volume", {"kg": 1, "m": -1, "s": -3}, "W/m^3"),
    ("thermal insulance", {"kg": -1, "s": 3, "K": 1}, "m^2*K/W"),
    ("molar volume", {"mol": -1, "m": 3}, "m^3/mol"),
    ("molality", {"mol": 1, "kg": -1}, "mol/kg"),
    ("angular acceleration", {"s": -2}, "1/s^2"),
    ("current density", {"A": 1, "m": -2}, "A/m^2"),
)

_WORDS = {Dimension.of(exponents): word for word, exponents, _ in _NAMED}
_UNITS = {Dimension.of(exponents): unit for _, exponents, unit in _NAMED}


def dimension_word(dimension: Dimension) -> str:
    """The usual word for the dimension, empty where there is none.

    >>> dimension_word(Dimension.of({"m": 1, "s": -1}))
    'speed'
    """
    return _WORDS.get(dimension, "")


def described(dimension: Dimension) -> str:
    """The dimension as it reads after "is": with its article where it has a word, else in base units.

    >>> described(Dimension.of({"kg": 1, "m": -1, "s": -2})), described(Dimension.of({"kg": 1, "m": -5}))
    ('a pressure', 'kg/m^5')
    """
    if dimension == DIMENSIONLESS:
        return "a plain number"
    word = dimension_word(dimension)
    if not word:
        return dimension.text
    return f"{_article(word)} {word}"


def suggested_unit(dimension: Dimension) -> str:
    """A coherent SI unit to write a value of the dimension in.

    >>> suggested_unit(Dimension.of({"kg": 1, "m": -1, "s": -2}))
    'Pa'
    """
    return _UNITS.get(dimension, dimension.text)


def _article(word: str) -> str:
    return "an" if word[0] in "aeiou" else "a"
