"""Units over all symbols of the list: algebra, conversion there and back, agreement with a units library."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

import pint
from hypothesis import given
from hypothesis import strategies as st

from eqsheet.units import resolve
from eqsheet.units.dimension import DIMENSIONLESS, SI_BASES, Dimension
from eqsheet.units.display import default_unit, format_value, parse_product
from eqsheet.units.registry import UnitTable, as_difference
from eqsheet.units.unit import Unit

STANDARD = UnitTable.standard()
ROUNDING = 4 * 2.0**-52

# `Nm^3` already bears an exponent; it is compared in tests of its own.
SYMBOLS = sorted(symbol for symbol in STANDARD.known_symbols() if "^" not in symbol)

symbols = st.sampled_from(SYMBOLS)
exponents = st.integers(-3, 3).filter(bool)
products = st.lists(st.tuples(symbols, exponents), min_size=1, max_size=4)


def unit(factors: list[tuple[str, int]]) -> Unit:
    text = "*".join(f"{symbol}^{power}" for symbol, power in factors)
    found = STANDARD.resolve(text, [(symbol, Fraction(power)) for symbol, power in factors])
    assert isinstance(found, Unit), found
    return found


def close(a: float, b: float) -> bool:
    return abs(a - b) <= ROUNDING * max(abs(a), abs(b))


# --- algebra ----------------------------------------------------------------------------------------------


@given(products, products)
def test_a_times_b_over_b_is_a(a: list[tuple[str, int]], b: list[tuple[str, int]]) -> None:
    inverse = [(symbol, -power) for symbol, power in b]
    product, alone = unit(a + b + inverse), unit([*a, ("m", 1), ("m", -1)])
    assert product.dimension == alone.dimension
    assert product.factor == alone.factor


@given(products)
def test_order_of_factors_does_not_matter(factors: list[tuple[str, int]]) -> None:
    one, other = unit([*factors, ("m", 1)]), unit([("m", 1), *reversed(factors)])
    assert one.dimension == other.dimension
    assert one.factor == other.factor


dimensions = st.dictionaries(
    st.sampled_from([*SI_BASES, "EUR"]), st.fractions(-4, 4, max_denominator=4).filter(bool), max_size=4
).map(lambda exponents: Dimension.of(dict(exponents)))


@given(dimensions, dimensions)
def test_dimensions_form_a_group(a: Dimension, b: Dimension) -> None:
    assert a * b / b == a
    assert a * b == b * a
    assert a / a == DIMENSIONLESS


@given(dimensions, st.fractions(-4, 4, max_denominator=6).filter(bool))
def test_powers_of_dimensions_undo(a: Dimension, power: Fraction) -> None:
    assert (a**power) ** (1 / power) == a


whole_dimensions = st.dictionaries(
    st.sampled_from([*SI_BASES, "EUR"]), exponents, min_size=1, max_size=4
).map(lambda exponents: Dimension.of(dict(exponents)))


@given(whole_dimensions)
def test_the_text_of_a_dimension_reads_back(dimension: Dimension) -> None:
    found = STANDARD.resolve(dimension.text, parse_product(dimension.text))
    assert isinstance(found, Unit)
    assert (found.dimension, found.factor) == (dimension, 1.0)


@given(whole_dimensions, st.sampled_from(["plain", "reading", "difference"]))
def test_the_default_unit_has_the_dimension(dimension: Dimension, kind: str) -> None:
    assert default_unit(dimension, kind, STANDARD).dimension == dimension


# --- values -----------------------------------------------------------------------------------------------

sizes = st.floats(1e-9, 1e9)


@given(symbols, st.one_of(sizes, sizes.map(lambda size: -size)))
def test_there_and_back(symbol: str, value: float) -> None:
    found = STANDARD.lookup(symbol)
    assert found is not None
    there = found.to_si(value)
    largest = max(abs(there), abs(found.origin)) / found.factor
    assert abs(found.from_si(there) - value) <= ROUNDING * max(largest, abs(value))


@given(symbols, sizes)
def test_a_difference_has_no_origin(symbol: str, value: float) -> None:
    found = STANDARD.lookup(symbol)
    assert found is not None
    assert as_difference(found).to_si(0.0) == 0.0
    assert close(found.difference_from_si(as_difference(found).to_si(value)), value)


@given(st.floats(allow_nan=False, allow_infinity=False), st.integers(1, 6))
def test_a_shown_number_is_the_number_to_the_digits_asked_for(value: float, digits: int) -> None:
    shown = float(format_value(value, digits))
    assert shown == float(f"{value:.{digits - 1}e}")


@given(st.floats(allow_nan=False, allow_infinity=False))
def test_a_shown_number_carries_no_idle_zeros(value: float) -> None:
    mantissa = format_value(value).partition("e")[0]
    assert not ("." in mantissa and mantissa.endswith(("0", ".")))
    assert mantissa != "-0"


# --- against a units library ------------------------------------------------------------------------------

_REGISTRY: Any = pint.UnitRegistry()
_PINT_PREFIXES = {
    "f": "femto", "p": "pico", "n": "nano", "µ": "micro", "u": "micro", "m": "milli", "c": "centi",
    "d": "deci", "da": "deca", "h": "hecto", "k": "kilo", "M": "mega", "G": "giga", "T": "tera",
    "P": "peta", "E": "exa",
}  # fmt: skip
_BASE_NAMES = {
    "kilogram": "kg", "meter": "m", "second": "s", "ampere": "A", "kelvin": "K", "mole": "mol",
    "candela": "cd",
}  # fmt: skip
_LIBRARY_NAMES = {
    row["symbol"]: row["pint"] for row in resolve.read_list()["unit"] if row.get("pint", "").isidentifier()
}


def library_forms() -> dict[str, str]:
    """Our symbols whose unit the library has under a name of its own, prefixed as the library does it."""
    forms = {}
    for symbol, name in _LIBRARY_NAMES.items():
        if STANDARD.lookup(symbol) is not None and name != "dimensionless":
            forms[symbol] = name
        for prefix, long_prefix in _PINT_PREFIXES.items():
            if STANDARD.lookup(prefix + symbol) is not None and prefix + symbol not in _LIBRARY_NAMES:
                forms[prefix + symbol] = long_prefix + name
    return forms


FORMS = library_forms()


def test_most_of_the_list_is_compared() -> None:
    assert len(FORMS) > 250


@given(st.lists(st.tuples(st.sampled_from(sorted(FORMS)), exponents), min_size=1, max_size=4))
def test_a_compound_is_what_the_library_makes_of_it(factors: list[tuple[str, int]]) -> None:
    theirs = _REGISTRY.Quantity(1.0)
    for symbol, power in factors:
        theirs = theirs * _REGISTRY.Quantity(1.0, FORMS[symbol]).to_base_units() ** power
    theirs = theirs.to_base_units()
    ours = unit([*factors, ("m", 1), ("m", -1)])
    assert abs(ours.factor / theirs.magnitude - 1.0) <= 1e-13
    named = {_BASE_NAMES[base]: Fraction(power) for base, power in theirs.unit_items() if base in _BASE_NAMES}
    assert dict(ours.dimension) == {base: power for base, power in named.items() if power}
