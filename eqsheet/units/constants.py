"""Physical constants of the worksheet language, ``const.R`` and so on."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

from eqsheet.units.codata import VALUES
from eqsheet.units.dimension import Dimension

# name: (entry of the CODATA list, exponents of the base units, what it is)
CODATA_ENTRIES: dict[str, tuple[str, dict[str, int], str]] = {
    "c": ("speed of light in vacuum", {"m": 1, "s": -1}, "speed of light in vacuum"),
    "h": ("Planck constant", {"kg": 1, "m": 2, "s": -1}, "Planck constant"),
    "hbar": ("reduced Planck constant", {"kg": 1, "m": 2, "s": -1}, "reduced Planck constant"),
    "e": ("elementary charge", {"A": 1, "s": 1}, "elementary charge"),
    "k_B": ("Boltzmann constant", {"kg": 1, "m": 2, "s": -2, "K": -1}, "Boltzmann constant"),
    "N_A": ("Avogadro constant", {"mol": -1}, "Avogadro constant"),
    "R": ("molar gas constant", {"kg": 1, "m": 2, "s": -2, "K": -1, "mol": -1}, "molar gas constant"),
    "F": ("Faraday constant", {"A": 1, "s": 1, "mol": -1}, "Faraday constant"),
    "sigma": ("Stefan-Boltzmann constant", {"kg": 1, "s": -3, "K": -4}, "Stefan-Boltzmann constant"),
    "G": ("Newtonian constant of gravitation", {"m": 3, "kg": -1, "s": -2}, "constant of gravitation"),
    "g_n": ("standard acceleration of gravity", {"m": 1, "s": -2}, "standard acceleration of free fall"),
    "atm": ("standard atmosphere", {"kg": 1, "m": -1, "s": -2}, "standard atmosphere"),
    "eps_0": (
        "vacuum electric permittivity",
        {"A": 2, "s": 4, "kg": -1, "m": -3},
        "electric constant (permittivity of vacuum)",
    ),
    "mu_0": (
        "vacuum mag. permeability",
        {"kg": 1, "m": 1, "s": -2, "A": -2},
        "magnetic constant (permeability of vacuum)",
    ),
    "m_e": ("electron mass", {"kg": 1}, "electron mass"),
    "m_p": ("proton mass", {"kg": 1}, "proton mass"),
    "u": ("atomic mass constant", {"kg": 1}, "atomic mass constant"),
    "Wien": ("Wien wavelength displacement law constant", {"m": 1, "K": 1}, "Wien displacement constant"),
}


@dataclass(frozen=True, slots=True)
class Constant:
    """A physical constant in SI base units.

    Attributes
    ----------
    name : str
        Without the ``const.`` before it.
    value : float
    dimension : Dimension
    description : str
    """

    name: str
    value: float
    dimension: Dimension
    description: str


@cache
def constant(name: str) -> Constant | None:
    """The constant called `name`, or None.

    The values are those of CODATA as `scipy.constants` carries them, copied into `eqsheet.units.codata` at
    development time.

    >>> constant("R").dimension.text
    'kg*m^2/(s^2*K*mol)'
    """
    entry = CODATA_ENTRIES.get(name)
    if entry is None:
        return None
    codata_name, exponents, description = entry
    return Constant(name, VALUES[codata_name], Dimension.of(dict(exponents)), description)


def constant_names() -> tuple[str, ...]:
    """Names of all constants, sorted."""
    return tuple(sorted(CODATA_ENTRIES))
