"""The unit and the number a result is shown with."""

from __future__ import annotations

import math

import pytest

from eqsheet.units.dimension import DIMENSIONLESS, Dimension
from eqsheet.units.display import DEFAULT_UNITS, PRICED_BY, default_unit, format_value, parse_product
from eqsheet.units.registry import UnitTable
from eqsheet.units.unit import Unit

STANDARD = UnitTable.standard()


def dimension(text: str) -> Dimension:
    found = STANDARD.resolve(text, parse_product(text))
    assert isinstance(found, Unit), found
    return found.dimension


def shown(text: str, kind: str = "plain") -> str:
    return default_unit(dimension(text), kind, STANDARD).text


@pytest.mark.parametrize(
    ("dimension_of", "unit"),
    [
        ("mm", "m"),
        ("L/min", "m^3/s"),
        ("bar", "kPa"),
        ("kWh", "J"),
        ("N*m", "J"),
        ("hp", "W"),
        ("BTU/(h*ft^2*degF)", "W/(m^2*K)"),
        ("cP", "Pa*s"),
        ("kg/mol", "g/mol"),
        ("BTU/lb", "J/kg"),
        ("kOhm", "Ohm"),
        ("µF", "A*s/V"),
    ],
)
def test_unit_by_dimension(dimension_of: str, unit: str) -> None:
    assert shown(dimension_of) == unit


def test_frequency_is_not_shown_as_hertz() -> None:
    assert shown("Hz") == "1/s"
    assert shown("rpm") == "1/s"


def test_a_plain_number_has_an_empty_unit() -> None:
    found = default_unit(DIMENSIONLESS, "plain", STANDARD)
    assert (found.text, found.factor) == ("", 1.0)


@pytest.mark.parametrize(
    ("dimension_of", "kind", "unit"),
    [
        ("K", "reading", "degC"),
        ("K", "difference", "K"),
        ("K", "plain", "K"),
        ("bar", "reading", "kPaa"),
        ("bar", "difference", "kPa"),
        ("m", "reading", "m"),
    ],
)
def test_readings_have_units_of_their_own(dimension_of: str, kind: str, unit: str) -> None:
    assert shown(dimension_of, kind) == unit


def test_a_dimension_outside_the_table_is_shown_in_base_units() -> None:
    found = default_unit(Dimension.of({"m": 5, "K": -2}), "plain", STANDARD)
    assert (found.text, found.factor) == ("m^5/K^2", 1.0)


@pytest.mark.parametrize(
    ("dimension_of", "unit"),
    [
        ("EUR", "EUR"),
        ("EUR/J", "EUR/kWh"),
        ("EUR/W", "EUR/kW"),
        ("EUR/yr", "EUR/h"),
        ("EUR/t", "EUR/kg"),
        ("USD/ft^2", "USD/m^2"),
    ],
)
def test_prices(dimension_of: str, unit: str) -> None:
    assert shown(dimension_of) == unit


def test_a_price_per_something_compound_is_in_base_units() -> None:
    assert shown("EUR*h/kg") == "s*EUR/kg"


def test_an_own_base_unit_is_priced_alike() -> None:
    table = STANDARD.with_base("skid")
    assert isinstance(table, UnitTable)
    found = default_unit(Dimension.of({"skid": 1, "s": -1}), "plain", table)
    assert (found.text, found.factor) == ("skid/h", 1 / 3600)


def test_the_tables_name_each_dimension_once() -> None:
    texts = [text for _, text in (*DEFAULT_UNITS, *PRICED_BY)]
    dimensions = [dimension(text) for _, text in DEFAULT_UNITS]
    assert len(set(texts)) == len(texts)
    assert len(set(dimensions)) == len(dimensions)


# --- numbers ----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("value", "digits", "text"),
    [
        (1.82, 15, "1.82"),
        (2.0, 15, "2"),
        (1 / 3, 15, "0.333333"),
        (1 / 3, 3, "0.333"),
        (0.0001, 15, "0.0001"),
        (0.00009999999, 15, "0.0001"),
        (0.000099, 15, "9.9e-5"),
        (999999.4, 15, "999999"),
        (999999.6, 15, "1e6"),
        (1234567.0, 15, "1.23457e6"),
        (101325.0, 15, "101325"),
        (123456.0, 3, "123000"),
        (-2.5e-9, 15, "-2.5e-9"),
        (1.5e300, 15, "1.5e300"),
        (0.0, 15, "0"),
        (-0.0, 15, "0"),
        (9.9996, 4, "10"),
        (52.5, 0, "50"),
        (100.0, 15, "100"),
    ],
)
def test_format_value(value: float, digits: int, text: str) -> None:
    assert format_value(value, digits) == text


def test_what_is_no_number_is_said_in_words() -> None:
    assert [format_value(v) for v in (math.inf, -math.inf, math.nan)] == ["inf", "-inf", "nan"]
