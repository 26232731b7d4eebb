"""Sizes of the published units, resolved by the units library pint into the table the program reads.

Run at development time, after a change of ``grammar/units.toml`` or of the names in ``constants.py``::

    python -m eqsheet.units.resolve

It writes ``table.py`` and, with the physical constants of `scipy.constants`, ``codata.py`` beside this
module.
Tests run the same and compare, so tables and lists cannot part. Neither library is imported when the program
runs: that would take longer than solving a worksheet.

The library computes in exact fractions here. Where a size holds pi, the list says so and the power of pi is
kept beside the fraction, so that ``rev/rev`` is exactly 1 and ``rpm`` is correctly rounded.
"""

from __future__ import annotations

import tomllib
from fractions import Fraction
from pathlib import Path
from typing import Any

from eqsheet.units.constants import CODATA_ENTRIES

LIST = Path(__file__).resolve().parents[2] / "grammar" / "units.toml"
TABLE = Path(__file__).resolve().with_name("table.py")
CODATA = Path(__file__).resolve().with_name("codata.py")

# SI Brochure, 9th edition (2019), table 7, as far as any unit of the list takes them.
PREFIXES = {
    "f": -15, "p": -12, "n": -9, "µ": -6, "m": -3, "c": -2, "d": -1,
    "da": 1, "h": 2, "k": 3, "M": 6, "G": 9, "T": 12, "P": 15, "E": 18,
}  # fmt: skip

_PINT_BASES = {
    "kilogram": "kg",
    "meter": "m",
    "second": "s",
    "ampere": "A",
    "kelvin": "K",
    "mole": "mol",
    "candela": "cd",
}

_PLAIN_NUMBERS = ("radian", "steradian")

_KEYS = {
    "symbol", "trade", "name", "pint", "prefixes", "source", "pi", "origin", "difference", "sense", "bare",
    "base",
}  # fmt: skip


def read_list(path: Path = LIST) -> dict[str, Any]:
    """The published list, as read from its file, with its keys checked.

    Raises
    ------
    ValueError
        A unit carries a key the list does not define.
    """
    published = tomllib.loads(path.read_text(encoding="utf-8"))
    for unit in published["unit"]:
        if unknown := set(unit) - _KEYS:
            raise ValueError(f"{unit['symbol']}: unknown keys {sorted(unknown)}")
    return published


def _exact_registry() -> Any:
    import pint

    return pint.UnitRegistry(non_int_type=Fraction)


def _size(unit: dict[str, Any], registry: Any) -> tuple[Fraction, tuple[tuple[str, int], ...]]:
    """Ratio to SI base units (without its power of pi) and exponents of the base units."""
    if unit.get("base"):
        return Fraction(1), ((unit["symbol"], 1),)
    base = registry.parse_expression(unit["pint"]).to_base_units()
    ratio = Fraction(base.magnitude)
    if unit.get("pi"):
        ratio /= Fraction(registry.parse_expression("pi").to_base_units().magnitude)
    exponents = {}
    for name, power in base.unit_items():
        if name in _PLAIN_NUMBERS:
            continue
        if Fraction(power).denominator != 1:
            raise ValueError(f"{unit['symbol']}: broken power of {name}")
        exponents[_PINT_BASES[name]] = int(power)
    return ratio, tuple((base, exponents[base]) for base in sorted(exponents))


def written_forms(published: dict[str, Any]) -> dict[str, str]:
    """Every way to write a unit, prefixed and aliased, with the unit it belongs to.

    Raises
    ------
    ValueError
        Two units would be written alike, or a refused spelling is a unit.
    """
    forms: dict[str, str] = {}

    def add(written: str, owner: str) -> None:
        if written in forms:
            raise ValueError(f"{written} would be both {forms[written]} and {owner}")
        forms[written] = owner

    by_symbol = {unit["symbol"]: unit for unit in published["unit"]}
    names = [(symbol, symbol) for symbol in by_symbol]
    names += [(alias["symbol"], alias["unit"]) for alias in published["alias"]]
    for written, symbol in names:
        unit = by_symbol[symbol]
        if unit.get("bare", True):
            add(written, symbol)
        for prefix in unit.get("prefixes", "").split():
            add(prefix + written, symbol)
            if prefix == "µ":
                add("u" + written, symbol)
    for refused in (*published["spelling"], *published["ambiguous"]):
        if refused in forms:
            raise ValueError(f"{refused} is both refused and a unit, {forms[refused]}")
    return forms


def table_text() -> str:
    """Text of ``table.py`` as the list and the units library give it."""
    published = read_list()
    written_forms(published)
    registry = _exact_registry()
    lines = [
        '"""The published units, resolved. Written by `python -m eqsheet.units.resolve`; do not edit."""',
        "",
        "# fmt: off",
        "# ruff: noqa: E501  (one unit a line, as wide as its description)",
        "",
        "# prefix: power of ten",
        f"PREFIXES: dict[str, int] = {PREFIXES!r}",
        "",
        "# symbol: (ratio to SI base units, power of pi, exponents of the bases, origin, sense, difference,",
        "#          usable without prefix, prefixes, trade, name)",
        "Row = tuple[str, int, tuple[tuple[str, int], ...], str, str, bool, bool, tuple[str, ...], str, str]",
        "UNITS: dict[str, Row] = {",
    ]
    for unit in published["unit"]:
        ratio, exponents = _size(unit, registry)
        row = (
            str(ratio),
            unit.get("pi", 0),
            exponents,
            unit.get("origin", ""),
            unit.get("sense", ""),
            unit.get("difference", False),
            unit.get("bare", True),
            tuple(unit.get("prefixes", "").split()),
            unit["trade"],
            unit["name"],
        )
        lines.append(f"    {unit['symbol']!r}: {row!r},")
    lines += ["}", "", "# another way to write: symbol", "ALIASES: dict[str, str] = {"]
    lines += [f"    {alias['symbol']!r}: {alias['unit']!r}," for alias in published["alias"]]
    lines += ["}", "", "# refused way to write: what to write", "SPELLINGS: dict[str, str] = {"]
    lines += [f"    {written!r}: {instead!r}," for written, instead in published["spelling"].items()]
    lines += ["}", "", "# refused symbol: (why, help)", "AMBIGUOUS: dict[str, tuple[str, str]] = {"]
    lines += [
        f"    {written!r}: ({entry['why']!r}, {entry['help']!r}),"
        for written, entry in published["ambiguous"].items()
    ]
    lines += ["}", ""]
    return "\n".join(lines)


def _literal(value: float) -> str:
    """`value` as the code formatter writes it."""
    return repr(float(value)).replace("e+", "e")


def codata_text() -> str:
    """Text of ``codata.py``: the entries of the CODATA list that ``constants.py`` names."""
    from scipy.constants import value

    entries = [entry for entry, _, _ in CODATA_ENTRIES.values()]
    lines = [
        '"""Values of the CODATA list in SI units. Written by `python -m eqsheet.units.resolve`."""',
        "",
        "VALUES: dict[str, float] = {",
        *(f'    "{entry}": {_literal(value(entry))},' for entry in entries),
        "}",
        "",
    ]
    return "\n".join(lines)


def main() -> None:
    """Write both files."""
    TABLE.write_text(table_text(), encoding="utf-8")
    CODATA.write_text(codata_text(), encoding="utf-8")


if __name__ == "__main__":
    main()
