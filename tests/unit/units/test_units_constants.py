"""Physical constants against the CODATA library and against each other."""

from __future__ import annotations

import math
import subprocess
import sys
from typing import Any

import pint
import pytest
import scipy.constants

from eqsheet.units.constants import CODATA_ENTRIES, constant, constant_names


@pytest.mark.parametrize("name", constant_names())
def test_value_is_that_of_codata(name: str) -> None:
    found = constant(name)
    assert found is not None
    assert found.value == scipy.constants.value(CODATA_ENTRIES[name][0])


@pytest.mark.parametrize("name", constant_names())
def test_dimension_is_that_of_the_codata_unit(name: str) -> None:
    """The unit text of the CODATA list, read by a units library, has our dimension."""
    found = constant(name)
    assert found is not None
    text = scipy.constants.unit(CODATA_ENTRIES[name][0]).replace(" ", "*")
    registry: Any = pint.UnitRegistry()
    theirs = registry.parse_expression(text).to_base_units().unit_items()
    symbols = {
        "kilogram": "kg",
        "meter": "m",
        "second": "s",
        "ampere": "A",
        "kelvin": "K",
        "mole": "mol",
    }
    assert {symbols[base]: power for base, power in theirs} == pytest.approx(
        {base: float(power) for base, power in found.dimension}
    )


def test_constants_agree_with_each_other() -> None:
    value = {name: constant(name).value for name in constant_names()}  # type: ignore[union-attr]  # all exist
    assert value["R"] == pytest.approx(value["k_B"] * value["N_A"], rel=1e-14)
    assert value["F"] == pytest.approx(value["e"] * value["N_A"], rel=1e-14)
    assert value["hbar"] == pytest.approx(value["h"] / (2 * math.pi), rel=1e-15)
    assert value["eps_0"] * value["mu_0"] * value["c"] ** 2 == pytest.approx(1.0, rel=1e-10)
    stefan = 2 * math.pi**5 * value["k_B"] ** 4 / (15 * value["h"] ** 3 * value["c"] ** 2)
    assert value["sigma"] == pytest.approx(stefan, rel=1e-14)


def test_an_unknown_constant_is_none() -> None:
    assert constant("Z") is None


def test_looking_up_imports_no_library() -> None:
    program = (
        "import sys; from eqsheet.units.constants import constant; constant('R');"
        "sys.exit(bool({'scipy', 'numpy', 'pint'} & set(sys.modules)))"
    )
    assert subprocess.run([sys.executable, "-c", program], check=False).returncode == 0
