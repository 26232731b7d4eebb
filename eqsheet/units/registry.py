"""Units by their symbols: the published list, and what a worksheet adds to it."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from fractions import Fraction
from functools import lru_cache
from types import MappingProxyType

from eqsheet.units.dimension import DIMENSIONLESS, SI_BASES, Dimension
from eqsheet.units.suggest import closest
from eqsheet.units.table import ALIASES, AMBIGUOUS, PREFIXES, SPELLINGS, UNITS
from eqsheet.units.unit import Unit

STANDARD_ATMOSPHERE = 101325.0
"""Ambient pressure in Pa where a worksheet states none: the standard atmosphere (10th CGPM, 1954)."""

LARGEST_EXPONENT = 24
"""Beyond this an exponent in a unit is a slip, and exact powers of the sizes would grow without use."""

_SMALLEST_FACTOR, _LARGEST_FACTOR = 1e-290, 1e290  # so that a value times its factor has room in a float

# 50 decimals, so that a size is correctly rounded whatever power of pi is in it (OEIS A000796).
_PI = Fraction("3.14159265358979323846264338327950288419716939937511")

# Look-alikes of one character: Greek mu for micro, ohm sign for capital omega.
_LOOKALIKES = str.maketrans({"\u03bc": "\u00b5", "\u2126": "\u03a9"})

# Volumes of gas at reference conditions: one symbol of which ^3 is a part.
_GAS_VOLUMES = {"Nm": "Nm^3", "Sm": "Sm^3"}


@dataclass(frozen=True, slots=True)
class UnitProblem:
    """Why a unit as written is none.

    Attributes
    ----------
    code : str
        Code of the diagnostic: ``unknown-unit``, ``ambiguous-unit``, ``unit-out-of-range``; for a new unit
        ``unit-redefined`` or ``new-unit-value``.
    index : int
        Which factor of the unit is at fault, from 0.
    message, help : str
        Headline and cure.
    """

    code: str
    index: int
    message: str
    help: str


@dataclass(frozen=True, slots=True)
class _Atom:
    """A unit of one symbol; its size is ``ratio * pi**pi_power``, exactly."""

    dimension: Dimension
    ratio: Fraction
    pi_power: int = 0
    origin: float = 0.0
    reading: bool = False
    difference: bool = False
    sense: str = ""


@dataclass(frozen=True, eq=False)
class UnitTable:
    """The units one worksheet may use; immutable, each change gives a new table.

    Attributes
    ----------
    ambient : float
        Ambient pressure in Pa, the origin of gauge pressures.
    added : mapping
        What ``new unit`` added, by symbol.

    >>> table = UnitTable.standard()
    >>> table.resolve("kg/m^3", (("kg", Fraction(1)), ("m", Fraction(-3)))).factor
    1.0
    >>> table.resolve("lbs", (("lbs", Fraction(1)),)).help
    'write `lb`'
    """

    ambient: float = STANDARD_ATMOSPHERE
    added: Mapping[str, _Atom] = field(default_factory=lambda: MappingProxyType({}))
    _atoms: dict[str, _Atom | None] = field(default_factory=dict, repr=False)
    _resolved: dict[str, Unit | UnitProblem] = field(default_factory=dict, repr=False)

    @staticmethod
    def standard() -> UnitTable:
        """The published list at the standard atmosphere."""
        return _standard()

    # --- a worksheet's own units --------------------------------------------------------------------------

    def with_ambient(self, pressure: float) -> UnitTable:
        """The same units with gauge pressures standing on `pressure` (Pa)."""
        return UnitTable(pressure, self.added)

    def with_base(self, symbol: str) -> UnitTable | UnitProblem:
        """The table with a base unit of its own; a currency of the list is accepted as it is."""
        base = Dimension.of({symbol: 1})
        known = self._atom(symbol)
        if known is not None and known.dimension == base and symbol not in SI_BASES:
            return self
        return self._with(symbol, _Atom(base, Fraction(1)))

    def with_multiple(self, symbol: str, count: float, unit: Unit) -> UnitTable | UnitProblem:
        """The table with `symbol` for `count` times `unit`."""
        if unit.reading:
            return UnitProblem(
                "new-unit-value",
                0,
                f"a new unit cannot be a reading in `{unit.text}`",
                "use a unit without an origin, such as `K` or `bar`",
            )
        factor = count * unit.factor
        if not _SMALLEST_FACTOR < factor < _LARGEST_FACTOR:
            return UnitProblem(
                "new-unit-value",
                0,
                f"the size of the new unit `{symbol}` must be positive and finite",
                "",
            )
        atom = _Atom(unit.dimension, Fraction(factor), difference=unit.difference, sense=unit.sense)
        return self._with(symbol, atom)

    def with_unit(self, symbol: str, unit: Unit | None, count: float = 1.0) -> UnitTable | UnitProblem:
        """The table after ``new unit symbol = count unit``, or ``new unit symbol`` where `unit` is None."""
        return self.with_base(symbol) if unit is None else self.with_multiple(symbol, count, unit)

    def _with(self, symbol: str, atom: _Atom) -> UnitTable | UnitProblem:
        if self._atom(symbol) is not None or symbol in _GAS_VOLUMES:
            row = UNITS.get(symbol)
            known = self.meaning(symbol)
            return UnitProblem(
                "unit-redefined",
                0,
                f"`{symbol}` is already a unit{f' ({known})' if known else ''}",
                "convert currencies by a known, such as `rate = 1.05 EUR/CHF`"
                if row is not None and row[8] == "Money"
                else "choose another symbol, or leave the line out",
            )
        return UnitTable(self.ambient, MappingProxyType({**self.added, symbol: atom}))

    # --- look-ups -----------------------------------------------------------------------------------------

    def meaning(self, symbol: str) -> str:
        """What a symbol of the published list is, in words; empty for a prefixed one and for all others."""
        row = UNITS.get(symbol)
        return "" if row is None else row[9]

    def lookup(self, symbol: str) -> Unit | None:
        """The unit of one symbol, prefixed or not; None if there is none (refused spellings included)."""
        atom = self._atom(symbol)
        return None if atom is None else _unit_of(symbol, atom)

    def resolve(self, text: str, factors: Sequence[tuple[str, Fraction]]) -> Unit | UnitProblem:
        """The unit written as `text`, a product of powers of symbols.

        In a compound unit, and raised to a power, a reading unit stands for a difference: ``W/(m^2*degC)`` is
        watt per square metre and kelvin, ``mbarg/m`` is millibar per metre. Answers are kept by `text`.

        Parameters
        ----------
        text : str
            As written; becomes `Unit.text`.
        factors : sequence of (symbol, exponent)
            Exponents of symbols after ``/`` are negative.
        """
        answer = self._resolved.get(text)
        if answer is None:
            answer = self._resolved[text] = self._resolve(text, factors)
        return answer

    def _resolve(self, text: str, factors: Sequence[tuple[str, Fraction]]) -> Unit | UnitProblem:
        atoms: list[tuple[_Atom, Fraction]] = []
        for index, (symbol, exponent) in enumerate(factors):
            if symbol in _GAS_VOLUMES and abs(exponent) == 3:
                symbol, exponent = _GAS_VOLUMES[symbol], exponent / 3
            atom = self._atom(symbol)
            if atom is None:
                return self._refusal(symbol, index)
            if abs(exponent) > LARGEST_EXPONENT:
                return UnitProblem(
                    "unit-out-of-range",
                    index,
                    f"the exponent {exponent} of `{symbol}` is beyond {LARGEST_EXPONENT}",
                    "check the exponent",
                )
            atoms.append((atom, exponent))
        if len(atoms) == 1 and atoms[0][1] == 1:
            return _unit_of(text, atoms[0][0])
        factor = _product(atoms)
        if not _SMALLEST_FACTOR < factor < _LARGEST_FACTOR:
            return UnitProblem(
                "unit-out-of-range", 0, f"the size of `{text}` is out of range", "check the exponents"
            )
        dimension = DIMENSIONLESS
        for atom, exponent in atoms:
            dimension = dimension * atom.dimension**exponent
        return Unit(text, dimension, factor, sense=_compound_sense(dimension, atoms))

    def _atom(self, symbol: str) -> _Atom | None:
        if symbol in self._atoms:
            return self._atoms[symbol]
        atom = self.added.get(symbol) or _published_atom(symbol, self.ambient)
        self._atoms[symbol] = atom
        return atom

    # --- what there is, and what could be meant -----------------------------------------------------------

    def known_symbols(self) -> tuple[str, ...]:
        """Every symbol that is a unit here, prefixed ones included, sorted."""
        return tuple(sorted({*_published_symbols(), *self.added}))

    def _refusal(self, symbol: str, index: int) -> UnitProblem:
        symbol = symbol.translate(_LOOKALIKES)
        if symbol in AMBIGUOUS:
            why, cure = AMBIGUOUS[symbol]
            return UnitProblem("ambiguous-unit", index, f"`{symbol}` is not a unit here: {why}", cure)
        cure = self._cure(symbol)
        return UnitProblem("unknown-unit", index, f"unknown unit `{symbol}`", cure)

    def _cure(self, symbol: str) -> str:
        if symbol in SPELLINGS:
            return f"write `{SPELLINGS[symbol]}`"
        stem = symbol.rstrip("0123456789")
        if stem != symbol and self._atom(stem) is not None:
            return f"write `{stem}^{symbol[len(stem) :]}`"
        same_but_case = [known for known in self.known_symbols() if known.lower() == symbol.lower()]
        if same_but_case:
            return f"case counts in units: write {_either(same_but_case)}"
        for cut in range(1, len(symbol)):
            if self._atom(symbol[:cut]) is not None and self._atom(symbol[cut:]) is not None:
                return f"write `{symbol[:cut]}*{symbol[cut:]}`"
        near = closest(symbol, self.known_symbols())
        meant = f"write {_either(near)}, or " if near else ""
        return f"{meant}make it a unit of the worksheet: `new unit {symbol}`"


def as_difference(unit: Unit) -> Unit:
    """`unit` as it counts after ``±`` and for differences: without origin.

    >>> as_difference(UnitTable.standard().lookup("degC")).to_si(5.0)
    5.0
    """
    return replace(unit, origin=0.0, reading=False, difference=True) if unit.reading else unit


@lru_cache(maxsize=1)
def _standard() -> UnitTable:
    return UnitTable()


def _unit_of(text: str, atom: _Atom) -> Unit:
    factor = _product([(atom, Fraction(1))])
    return Unit(text, atom.dimension, factor, atom.origin, atom.reading, atom.difference, atom.sense)


def _product(atoms: Iterable[tuple[_Atom, Fraction]]) -> float:
    """Size of a product of powers, correctly rounded where all exponents are whole; inf if too large."""
    exact, pi_power, broken = Fraction(1), Fraction(0), 1.0
    try:
        for atom, exponent in atoms:
            pi_power += atom.pi_power * exponent
            if exponent.denominator == 1:
                exact *= atom.ratio**exponent.numerator
            else:
                broken *= math.pow(atom.ratio, exponent)
        if pi_power.denominator == 1:
            return float(exact * _PI**pi_power.numerator) * broken
        return float(exact) * broken * math.pow(math.pi, pi_power)
    except OverflowError:
        return math.inf


def _compound_sense(dimension: Dimension, atoms: Sequence[tuple[_Atom, Fraction]]) -> str:
    """``rotation`` for an angle per time, else nothing."""
    angles = [exponent for atom, exponent in atoms if atom.sense == "angle"]
    others = [atom.sense for atom, _ in atoms if atom.sense not in ("", "angle")]
    per_time = dimension == (("s", Fraction(-1)),)
    return "rotation" if per_time and angles == [1] and not others else ""


def _published_atom(symbol: str, ambient: float) -> _Atom | None:
    symbol = symbol.translate(_LOOKALIKES)
    ten = Fraction(1)
    row = UNITS.get(ALIASES.get(symbol, symbol))
    if row is not None and not row[6]:
        row = None
    if row is None:
        for length in (1, 2):
            prefix = "µ" if symbol[:length] == "u" else symbol[:length]
            rest = symbol[length:]
            candidate = UNITS.get(ALIASES.get(rest, rest))
            if candidate is not None and prefix in candidate[7]:
                row, ten = candidate, Fraction(10) ** PREFIXES[prefix]
                break
    if row is None:
        return None
    ratio, pi_power, bases, origin, sense, difference = row[:6]
    zero = ambient if origin == "ambient" else float(Fraction(origin or 0))
    return _Atom(
        Dimension.of(dict(bases)), Fraction(ratio) * ten, pi_power, zero, origin != "", difference, sense
    )


@lru_cache(maxsize=1)
def _published_symbols() -> frozenset[str]:
    symbols: set[str] = set()
    for written in (*UNITS, *ALIASES):
        row = UNITS[ALIASES.get(written, written)]
        if row[6]:
            symbols.add(written)
        symbols.update(prefix + written for prefix in row[7])
    return frozenset(symbols)


def _either(choices: Sequence[str]) -> str:
    return " or ".join(f"`{choice}`" for choice in choices)
