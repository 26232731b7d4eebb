"""What a symbol and a compound text stand for, and what is said of those that are none."""

from __future__ import annotations

import math
from fractions import Fraction

import pytest

from eqsheet.units.dimension import DIMENSIONLESS, Dimension
from eqsheet.units.display import parse_product
from eqsheet.units.registry import UnitProblem, UnitTable, as_difference
from eqsheet.units.unit import Unit

STANDARD = UnitTable.standard()
PI = Fraction("3.141592653589793238462643383279502884")


def unit(text: str, table: UnitTable = STANDARD) -> Unit:
    found = table.resolve(text, parse_product(text))
    assert isinstance(found, Unit), found
    return found


def problem(text: str, table: UnitTable = STANDARD) -> UnitProblem:
    found = table.resolve(text, parse_product(text))
    assert isinstance(found, UnitProblem), found
    return found


def symbol(text: str, table: UnitTable = STANDARD) -> Unit:
    found = table.lookup(text)
    assert found is not None
    return found


def changed(table: UnitTable | UnitProblem) -> UnitTable:
    assert isinstance(table, UnitTable), table
    return table


@pytest.mark.parametrize(
    ("text", "factor"),
    [
        ("kg", 1.0),
        ("g/cm^3", 1000.0),
        ("km/h", 1 / 3.6),
        ("in", 0.0254),
        ("ft^2", 0.09290304),
        ("kWh", 3.6e6),
        ("L/min", 1e-3 / 60),
        ("N/mm^2", 1e6),
        ("µm", 1e-6),
        ("EUR/kWh", 1 / 3.6e6),
        ("rpm", float(PI / 30)),
        ("rev/rev", 1.0),
        ("deg", float(PI / 180)),
        ("mi^2/acre", 640.0),
        ("%", 0.01),
    ],
)
def test_sizes_are_correctly_rounded(text: str, factor: float) -> None:
    assert unit(text).factor == factor


def test_a_broken_power_raises_size_and_dimension() -> None:
    found = STANDARD.resolve("cm^(1/2)", (("cm", Fraction(1, 2)),))
    assert isinstance(found, Unit)
    assert found.factor == pytest.approx(0.1, rel=1e-15)
    assert found.dimension == Dimension.of({"m": Fraction(1, 2)})


def test_a_broken_power_of_an_angle() -> None:
    found = STANDARD.resolve("rev^(1/2)", (("rev", Fraction(1, 2)),))
    assert isinstance(found, Unit)
    assert found.factor == pytest.approx(math.sqrt(2 * math.pi), rel=1e-15)


@pytest.mark.parametrize(("one", "other"), [("µF", "\u03bcF"), ("µF", "uF"), ("Ω", "\u2126"), ("kΩ", "kOhm")])
def test_look_alike_characters_are_one_unit(one: str, other: str) -> None:
    assert symbol(one).factor == symbol(other).factor
    assert symbol(one).dimension == symbol(other).dimension


def test_text_is_kept_as_written() -> None:
    assert unit("l/min").text == "l/min"
    assert symbol("kΩ").text == "kΩ"


# --- readings ---------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "value", "si"),
    [
        ("degC", 25.0, 298.15),
        ("degC", -40.0, 233.15),
        ("degF", 32.0, 273.15),
        ("degF", 212.0, 373.15),
        ("barg", 2.0, 301325.0),
        ("psig", 0.0, 101325.0),
        ("kPag", -1.325, 100000.0),
        ("bara", 2.0, 200000.0),
        ("degR", 491.67, 273.15),
    ],
)
def test_reading_and_its_si_value(text: str, value: float, si: float) -> None:
    assert symbol(text).to_si(value) == pytest.approx(si, rel=1e-14)
    assert symbol(text).from_si(si) == pytest.approx(value, abs=1e-11)


def test_only_units_with_an_origin_are_readings() -> None:
    readings = {text for text in STANDARD.known_symbols() if symbol(text).reading}
    assert readings == {
        "degC", "degF", "barg", "mbarg", "Pag", "kPag", "MPag", "psig",
    }  # fmt: skip


def test_inside_a_compound_a_reading_unit_is_a_difference() -> None:
    found = unit("W/(m^2*degC)")
    assert (found.origin, found.reading, found.factor) == (0.0, False, 1.0)
    assert found.dimension == unit("W/(m^2*K)").dimension


def test_gauge_pressure_in_a_compound_is_a_difference() -> None:
    found = unit("mbarg/m")
    assert (found.origin, found.reading, found.factor) == (0.0, False, 100.0)


def test_a_power_of_a_reading_unit_is_of_its_difference() -> None:
    assert unit("degC^4").origin == 0.0
    assert not unit("degC^4").reading


def test_as_difference_drops_the_origin() -> None:
    found = as_difference(symbol("degF"))
    assert (found.origin, found.reading, found.difference) == (0.0, False, True)
    assert found.to_si(9.0) == pytest.approx(5.0, rel=1e-15)


def test_as_difference_leaves_other_units_alone() -> None:
    assert as_difference(symbol("bar")) is not None
    assert as_difference(symbol("bar")) == symbol("bar")


def test_delta_units_are_differences_only() -> None:
    assert symbol("delta_degC").difference
    assert not symbol("K").difference


def test_gauge_pressures_stand_on_the_ambient_pressure() -> None:
    lodge = STANDARD.with_ambient(84000.0)
    assert symbol("barg", lodge).to_si(1.0) == 184000.0
    assert symbol("degC", lodge).to_si(0.0) == 273.15
    assert symbol("barg").to_si(1.0) == 201325.0, "the table it came from is unchanged"


# --- gas, angle, rotation ---------------------------------------------------------------------------------


def test_normal_cubic_metre_is_an_amount_of_gas() -> None:
    """Molar volume of an ideal gas at 273.15 K, 101.325 kPa: 22.41396954e-3 m^3/mol (CODATA 2018)."""
    found = STANDARD.resolve("Nm^3/h", (("Nm", Fraction(3)), ("h", Fraction(-1))))
    assert isinstance(found, Unit)
    assert found.dimension == Dimension.of({"mol": 1, "s": -1})
    assert found.factor * 3600 == pytest.approx(1 / 22.41396954e-3, rel=1e-9)


def test_normal_cubic_metre_below_the_line() -> None:
    found = STANDARD.resolve("kWh/Nm^3", (("kWh", Fraction(1)), ("Nm", Fraction(-3))))
    assert isinstance(found, Unit)
    assert found.dimension == unit("J/mol").dimension


def test_newton_metre_needs_its_operator() -> None:
    assert problem("Nm").code == "ambiguous-unit"
    assert "N*m" in problem("Nm").help
    assert problem("Nm^2").code == "ambiguous-unit"
    assert problem("kNm").help == "write `kN*m`"
    assert unit("N*m").factor == 1.0


@pytest.mark.parametrize(
    ("text", "sense"),
    [
        ("rpm", "rotation"),
        ("rad/s", "rotation"),
        ("rev/min", "rotation"),
        ("deg/s", "rotation"),
        ("Hz", "frequency"),
        ("kHz", "frequency"),
        ("1/s", ""),
        ("deg", "angle"),
        ("N*m/rad", ""),
        ("rad^2/s^2", ""),
        ("m/s", ""),
    ],
)
def test_sense_tells_rotation_from_frequency(text: str, sense: str) -> None:
    assert unit(text).sense == sense


def test_angles_and_parts_are_plain_numbers() -> None:
    for text in ("rad", "deg", "rev", "sr", "%", "ppm", "permille", "pu"):
        assert symbol(text).dimension == DIMENSIONLESS


# --- refusals ---------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("written", "help_starts"),
    [
        ("lbs", "write `lb`"),
        ("sec", "write `s`"),
        ("hr", "write `h`"),
        ("kgs", "write `kg`"),
        ("KW", "case counts in units: write `kW`"),
        ("kw", "case counts in units: write `kW`"),
        ("Kg", "case counts in units: write `kg`"),
        ("mtr", "write `m`"),
        ("ltr", "write `L`"),
        ("bars", "write `bar`"),
        ("degrees", "write `deg`"),
        ("mmWC", "write `mmH2O`"),
        ("m3", "write `m^3`"),
        ("cm2", "write `cm^2`"),
        ("Pas", "write `Pa*s`"),
        ("gpn", "write `gon` or `gpm`, or make it"),
        ("acfm", "write `cfm`"),
        ("kips", "write `kip`"),
        ("MGD", "write `1e6 gal/d`"),
        ("ton_ref", "write `TR`"),
        ("widget", "make it a unit of the worksheet: `new unit widget`"),
    ],
)
def test_help_for_an_unknown_unit(written: str, help_starts: str) -> None:
    found = problem(written)
    assert found.code == "unknown-unit"
    assert found.help.startswith(help_starts)


@pytest.mark.parametrize(
    ("written", "named"),
    [
        ("ton", "short_ton"),
        ("cal", "cal_th"),
        ("C", "degC"),
        ("F", "degF"),
        ("R", "degR"),
        ("k", "const.k_B"),
        ("therm", "therm_US"),
        ("MMBtu", "1e6 Btu"),
        ("ft_head", "ftH2O"),
        ("bhp", "9.81 kW"),
        ("scfh", "Nm^3/h"),
    ],
)
def test_ambiguous_symbols_are_refused_with_the_choices(written: str, named: str) -> None:
    found = problem(written)
    assert found.code == "ambiguous-unit"
    assert named in found.help
    assert STANDARD.lookup(written) is None


def test_a_prefix_makes_the_bare_refusal_harmless() -> None:
    assert symbol("µF").factor == 1e-6
    assert symbol("mC").dimension == unit("A*s").dimension


def test_units_take_only_their_own_prefixes() -> None:
    assert STANDARD.lookup("kin") is None
    assert STANDARD.lookup("Mm") is None
    assert STANDARD.lookup("kmm") is None


def test_the_problem_names_the_factor_at_fault() -> None:
    assert problem("kg/(m^2*sec)").index == 2


def test_exponents_out_of_range() -> None:
    assert problem("m^100").code == "unit-out-of-range"
    assert problem("TW^24*TW^24").code == "unit-out-of-range"
    assert problem("pm^24*pm^24").code == "unit-out-of-range"


def test_no_symbols_is_no_unit_but_a_plain_number() -> None:
    assert unit("1").dimension == DIMENSIONLESS
    assert unit("1").factor == 1.0


# --- a worksheet's own units ------------------------------------------------------------------------------


def test_new_base_unit_has_a_dimension_of_its_own() -> None:
    table = changed(STANDARD.with_base("person"))
    assert unit("L/person", table).dimension == Dimension.of({"m": 3, "person": -1})
    assert STANDARD.lookup("person") is None, "the table it came from is unchanged"


def test_new_multiple_is_a_number_of_a_unit() -> None:
    table = changed(STANDARD.with_multiple("skid", 48.0, symbol("EUR")))
    assert symbol("skid", table).factor == 48.0
    assert unit("skid/h", table).dimension == unit("EUR/h").dimension


def test_with_unit_makes_either() -> None:
    assert symbol("pcs", changed(STANDARD.with_unit("pcs", None))).factor == 1.0
    assert symbol("dozen", changed(STANDARD.with_unit("dozen", symbol("pu"), 12.0))).factor == 12.0


def test_own_units_take_no_prefix() -> None:
    assert changed(STANDARD.with_base("person")).lookup("kperson") is None


def test_a_listed_currency_may_be_declared() -> None:
    assert STANDARD.with_base("EUR") is STANDARD


def test_declaring_the_same_base_twice_changes_nothing() -> None:
    table = changed(STANDARD.with_base("person"))
    assert table.with_base("person") is table


@pytest.mark.parametrize("taken", ["kg", "m", "bar", "kN", "Ω", "Nm"])
def test_units_of_the_list_are_not_redefined(taken: str) -> None:
    found = STANDARD.with_base(taken)
    assert isinstance(found, UnitProblem)
    assert found.code == "unit-redefined"


def test_a_refused_symbol_may_be_given_a_meaning() -> None:
    table = changed(STANDARD.with_multiple("ton", 907.18474, symbol("kg")))
    assert unit("ton/h", table).factor == pytest.approx(907.18474 / 3600, rel=1e-15)


@pytest.mark.parametrize("count", [0.0, -1.0, math.inf, math.nan])
def test_a_new_unit_is_a_positive_size(count: float) -> None:
    found = STANDARD.with_multiple("skid", count, symbol("EUR"))
    assert isinstance(found, UnitProblem)
    assert found.code == "new-unit-value"


def test_a_new_unit_has_no_origin() -> None:
    found = STANDARD.with_multiple("step", 5.0, symbol("degC"))
    assert isinstance(found, UnitProblem)
    assert found.code == "new-unit-value"


def test_ambient_keeps_the_own_units() -> None:
    table = changed(STANDARD.with_base("person")).with_ambient(84000.0)
    assert table.lookup("person") is not None


# --- look-ups are kept ------------------------------------------------------------------------------------


def test_an_answer_is_kept_by_its_text() -> None:
    table = UnitTable()
    assert table.resolve("W/m^2", parse_product("W/m^2")) is table.resolve("W/m^2", ())


def test_every_known_symbol_is_a_unit() -> None:
    symbols = STANDARD.known_symbols()
    assert len(symbols) > 300
    assert all(STANDARD.lookup(text) is not None for text in symbols)


def test_a_currency_is_converted_by_a_rate_not_made_anew() -> None:
    table = UnitTable.standard()
    euro = table.resolve("EUR", (("EUR", Fraction(1)),))
    assert isinstance(euro, Unit)
    found = table.with_unit("CHF", euro, 1.05)
    assert isinstance(found, UnitProblem)
    assert "rate" in found.help
