"""Values into SI and back."""

from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from eqsheet.units.dimension import DIMENSIONLESS, Dimension
from eqsheet.units.unit import Unit

PERCENT = Unit("%", DIMENSIONLESS, 0.01)
CELSIUS = Unit("degC", Dimension.of({"K": 1}), 1.0, 273.15, reading=True)


def test_percent_is_rounded_once() -> None:
    assert PERCENT.to_si(57.0) == 0.57


@given(st.floats(-1e9, 1e9), st.sampled_from([10, 60, 100, 1000, 3600, 10**6, 10**9, 10**12]))
def test_a_whole_share_of_the_si_unit_is_rounded_once(value: float, share: int) -> None:
    unit = Unit("u", DIMENSIONLESS, 1.0 / share)
    assert unit.to_si(value) == float(Fraction(value) / share)
    assert unit.from_si(value) == float(Fraction(value) * share)


@given(st.floats(-1e9, 1e9), st.sampled_from([0.3048, 6894.757293168362, 1000.0, 1.0, 0.45359237]))
def test_any_other_size_is_a_product(value: float, factor: float) -> None:
    unit = Unit("u", DIMENSIONLESS, factor)
    assert unit.to_si(value) == value * factor
    assert unit.from_si(value) == value / factor


def test_origin_belongs_to_readings_and_not_to_differences() -> None:
    assert CELSIUS.to_si(25.0) == 298.15
    assert CELSIUS.from_si(298.15) == pytest.approx(25.0, abs=1e-12)
    assert CELSIUS.difference_from_si(5.0) == 5.0


def _short_numbers() -> st.SearchStrategy[float]:
    """Numbers of up to nine digits, as a person writes them."""
    return st.builds(
        lambda digits, exponent: float(f"{digits}e{exponent}"),
        st.integers(-(10**9), 10**9),
        st.integers(-9, 3),
    ).filter(bool)


@given(
    _short_numbers(), st.sampled_from([0.3048, 0.0254, 6894.757293168362, 1e5, 0.45359237, 1 / 60, 1 / 3.6e6])
)
def test_what_was_written_comes_back(value: float, factor: float) -> None:
    unit = Unit("u", DIMENSIONLESS, factor)
    assert unit.as_written(unit.to_si(value)) == value


@given(
    st.decimals(-200, 2000, places=3, allow_nan=False).map(float),
    st.sampled_from([(1.0, 273.15), (5 / 9, 459.67 * 5 / 9), (6894.757293168362, 101325.0), (1e5, 84e3)]),
)
def test_what_was_read_off_a_scale_comes_back(value: float, scale: tuple[float, float]) -> None:
    unit = Unit("u", DIMENSIONLESS, scale[0], scale[1], reading=True)
    assert unit.as_written(unit.to_si(value)) == value


@given(st.floats(allow_nan=False), st.floats(1e-12, 1e12), st.sampled_from([0.0, 273.15, 101325.0]))
def test_no_value_is_changed_by_being_written(si: float, factor: float, origin: float) -> None:
    """Of a value without a short form too, what is given is as near as dividing gives it."""
    unit = Unit("u", DIMENSIONLESS, factor, origin)
    written = unit.as_written(si)
    assert written == unit.from_si(si) or unit.to_si(written) == si
