"""The generated tables agree with the published list and the libraries they come from."""

from __future__ import annotations

import pytest

from eqsheet.units import resolve
from eqsheet.units.registry import UnitTable


def test_the_table_is_what_the_list_and_pint_give() -> None:
    assert resolve.TABLE.read_text(encoding="utf-8") == resolve.table_text()


def test_the_constants_are_what_scipy_gives() -> None:
    assert resolve.CODATA.read_text(encoding="utf-8") == resolve.codata_text()


def test_every_way_to_write_a_unit_is_found_again() -> None:
    """The list expanded at development time is the list the program looks up."""
    forms = resolve.written_forms(resolve.read_list())
    table = UnitTable.standard()
    for written, symbol in forms.items():
        found, plain = table.lookup(written), table.lookup(symbol)
        assert found is not None, written
        if plain is not None:
            assert found.dimension == plain.dimension, written
    assert {form for form in forms if not form.startswith("u")} == set(table.known_symbols())


def test_every_symbol_can_be_written_in_a_worksheet() -> None:
    published = resolve.read_list()
    words = [*resolve.written_forms(published), *published["spelling"], *published["ambiguous"]]
    odd = [word for word in words if not word.isidentifier() and word not in ("%", "Nm^3", "Sm^3")]
    assert odd == []


def test_two_units_written_alike_are_noticed() -> None:
    published = {
        "unit": [
            {"symbol": "in", "prefixes": "m"},
            {"symbol": "min"},
        ],
        "alias": [],
        "spelling": {},
        "ambiguous": {},
    }
    with pytest.raises(ValueError, match="min would be both in and min"):
        resolve.written_forms(published)


def test_a_refused_spelling_that_is_a_unit_is_noticed() -> None:
    published = {"unit": [{"symbol": "m"}], "alias": [], "spelling": {"m": "km"}, "ambiguous": {}}
    with pytest.raises(ValueError, match="m is both refused and a unit"):
        resolve.written_forms(published)


def test_every_number_in_the_list_names_its_source() -> None:
    """An expression with a number that is more than a count of 10 carries where it is from."""
    for unit in resolve.read_list()["unit"]:
        expression = unit.get("pint", "")
        if any(digit in expression for digit in "123456789") and "H2O" not in expression:
            without_powers = expression.replace("**2", "").replace("**3", "").replace("1000 *", "")
            if any(digit in without_powers for digit in "123456789"):
                assert unit.get("source"), unit["symbol"]
