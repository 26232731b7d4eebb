"""Words for dimensions."""

from __future__ import annotations

from eqsheet.units import dimension_names
from eqsheet.units.dimension import DIMENSIONLESS, Dimension
from eqsheet.units.dimension_names import described, dimension_word, suggested_unit
from eqsheet.units.registry import UnitTable
from eqsheet.units.unit import Unit


def test_articles() -> None:
    assert described(Dimension.of({"m": 2})) == "an area"
    assert described(Dimension.of({"kg": 1, "m": 2, "s": -2})) == "an energy or torque"
    assert described(DIMENSIONLESS) == "a plain number"
    assert described(Dimension.of({"EUR": 1})) == "EUR"


def test_no_two_words_share_a_dimension() -> None:
    named = [Dimension.of(exponents) for _, exponents, _ in dimension_names._NAMED]
    assert len(set(named)) == len(named)


def test_each_suggested_unit_is_coherent() -> None:
    """Read back by the unit table, it has the dimension and the factor 1."""
    table = UnitTable.standard()
    for word, exponents, text in dimension_names._NAMED:
        unit = table.resolve(text, _factors(text))
        assert isinstance(unit, Unit), (word, unit)
        assert unit.dimension == Dimension.of(exponents), word
        assert unit.factor == 1.0, word
        assert dimension_word(unit.dimension) == word
        assert suggested_unit(unit.dimension) == text


def _factors(text: str) -> tuple[tuple[str, int], ...]:
    above, _, below = text.partition("/")
    factors = [(symbol, 1) for symbol in above.split("*") if symbol != "1"]
    factors += [(symbol, -1) for symbol in below.strip("()").split("*") if symbol]
    return tuple(
        (symbol.partition("^")[0], sign * int(symbol.partition("^")[2] or 1)) for symbol, sign in factors
    )
