"""Readings and differences of whole worksheets."""

from __future__ import annotations

from dataclasses import replace

import pytest
from written_formulas import formulas, statements

from eqsheet.diagnostics.diagnostic import Diagnostic, Severity
from eqsheet.model.check_units import UnitCheck, check_units

READINGS = ["T1 = 20[degC]", "T2 = 25[degC]"]


def checked(*texts: str) -> tuple[UnitCheck, list[str]]:
    found, names = formulas(texts)
    return check_units(found, statements(texts), names), names


def kinds(*texts: str) -> dict[str, str]:
    """Kinds by name of a worksheet without errors."""
    check, names = checked(*texts)
    assert [d.message for d in check.diagnostics if d.severity is Severity.ERROR] == []
    return dict(zip(names, check.kinds.kinds, strict=True))


def only(*texts: str) -> Diagnostic:
    check, _ = checked(*texts)
    (diagnostic,) = (d for d in check.diagnostics if d.code != "dimension-open")
    return diagnostic


def test_means_of_readings_are_readings() -> None:
    assert kinds(*READINGS, "Tm = (T1 + T2)/2")["Tm"] == "reading"
    assert kinds(*READINGS, "Tm = 0.3*T1 + 0.7*T2")["Tm"] == "reading"
    assert kinds(*READINGS, "T3 = 30[degC]", "Tm = (T1 + T2 + T3)/3")["Tm"] == "reading"


def test_extrapolation_is_a_reading() -> None:
    assert kinds(*READINGS, "T3 = 2*T2 - T1")["T3"] == "reading"


def test_a_difference_that_is_wanted() -> None:
    assert kinds(*READINGS, "T2 = T1 + dT")["dT"] == "difference"
    assert kinds(*READINGS, "T2 = dT + T1")["dT"] == "difference"
    assert kinds(*READINGS, "dT = T2 - T1")["dT"] == "difference"


def test_a_reading_from_a_difference() -> None:
    assert kinds("T1 = 20[degC]", "dT = 5[delta_degC]", "T2 = T1 + dT")["T2"] == "reading"


def test_kinds_travel_through_chains_in_any_order() -> None:
    lines = ["T1 = 20[degC]", "T3 = T2 + 2[K]", "T2 = T1 + 5[K]", "d = T3 - T1", "e = 2*d"]
    for order in (lines, lines[::-1]):
        found = kinds(*order)
        assert (found["T2"], found["T3"], found["d"], found["e"]) == (
            "reading",
            "reading",
            "difference",
            "difference",
        )


def test_heat_over_a_difference_from_a_reading_is_fine() -> None:
    assert kinds("T = 80[degC]", "Q = 4[W/K]*(T - 25[degC])")["Q"] == "plain"


def test_an_ideal_gas_takes_readings() -> None:
    assert kinds("T = 20[degC]", "V = 2[m**3]", "n = 3[mol]", "p*V = n*8.314[J/mol/K]*T")["p"] == "unknown"


def test_ratios_of_pressures_are_fine() -> None:
    assert kinds("p1 = 3[barg]", "p2 = 1[barg]", "r = p1/p2", "p2 = 0.53*p1")["r"] == "plain"


def test_a_critical_pressure_ratio_says_nothing_of_kinds() -> None:
    assert kinds("p1 = 3[barg]", "p2 = 0.53*p1")["p2"] == "unknown"


def test_pressure_drops() -> None:
    found = kinds(
        "p1 = 3[barg]",
        "rho = 998[kg/m**3]",
        "v = 2[m/s]",
        "dp = rho*v**2/2",
        "p2 = p1 - dp",
        "p2 = 2.9[barg]",
    )
    assert found["dp"] == "difference"


HEATER = ["T1 = 20[degC]", "Q = 3[W]", "C = 2[W/K]"]


def test_a_term_of_other_quantities_is_presumed_a_difference() -> None:
    assert kinds(*HEATER, "T2 = T1 + Q/C")["T2"] == "reading"
    assert kinds(*HEATER, "T1 = T2 - Q/C")["T2"] == "reading"
    assert kinds("p1 = 3[barg]", "h = 2[m]", "g = 3[kg/m**2/s**2]", "p2 = p1 - g*h")["p2"] == "reading"


def test_what_is_presumed_is_never_refused() -> None:
    """Q/C could be less a reading, for all one can tell, and d the difference it is used as."""
    found = kinds(*HEATER, "d = T1 + Q/C", "T3 = 9[degC]", "T1 = T3 + d")
    assert found["d"] == "difference"


def test_absolute_values_can_be_either() -> None:
    assert kinds("T1 = 300[K]", "dT = 5[K]", "T2 = T1 + dT") == {
        "T1": "unknown",
        "dT": "unknown",
        "T2": "unknown",
    }
    assert kinds("T1 = 300[K]", "T2 = T1 + 5[K]", "T2 = 30[degC]")["T2"] == "reading"


def test_an_absolute_base_plus_a_difference() -> None:
    """300 K is the reading here, and a difference there."""
    assert (
        kinds("T = 40[degC]", "dT = 5[delta_degC]", "T = 300[K] + dT", "T2 = 300[K] + T")["T2"] == "reading"
    )


def test_a_reading_written_in_the_line_itself_is_blamed_first() -> None:
    wrong = only("T1 = 20[degC]", "T2 - T1 = 5[degC]")
    assert wrong.code == "reading-as-difference"
    assert wrong.labels[0].span.text == "5[degC]"


def test_a_product_with_a_difference_stays_one() -> None:
    assert kinds("d = 5[delta_degC]", "w = 2.5", "x = w*d")["x"] == "difference"


def test_zero_is_of_no_kind() -> None:
    assert kinds("T = 20[degC]", "d = max(dT, 0)", "dT = T - 15[degC]")["d"] == "difference"


def test_reading_plus_reading() -> None:
    wrong = only("T1 = 20[degC]", "T2 = T1 + 2[degC]")
    assert wrong.code == "sum-of-readings"
    assert [label.span.text for label in wrong.labels] == ["2[degC]", "20[degC]", "T1 + 2[degC]"]
    assert "for a difference" in wrong.help


def test_two_readings_in_one_known() -> None:
    assert only("T = 20[degC] + 5[degC]").code == "sum-of-readings"


def test_reading_plus_reading_inside_a_product() -> None:
    assert only("T = 20[degC]", "Q = 3[W/K]*(T + 2[degC])").code == "sum-of-readings"


def test_a_sum_of_known_readings_names_their_lines() -> None:
    wrong = only(*READINGS, "dT = 5[degC]", "T2 = T1 + dT")
    assert wrong.code == "sum-of-readings"
    assert [(label.span.line, label.span.text) for label in wrong.labels] == [
        (4, "T1 + dT"),
        (1, "20[degC]"),
        (3, "5[degC]"),
    ]
    assert "delta_degC" in wrong.help


def test_a_difference_given_as_a_reading() -> None:
    wrong = only(*READINGS, "dT = 5[degC]", "dT = T2 - T1")
    assert wrong.code == "reading-as-difference"
    assert [(label.span.line, label.span.text) for label in wrong.labels[:2]] == [
        (3, "5[degC]"),
        (4, "T2 - T1"),
    ]


def test_a_pressure_drop_given_as_a_gauge_pressure() -> None:
    wrong = only("p1 = 2[barg]", "dp = 0.5[barg]", "p2 = 1[barg]", "p2 = p1 - dp")
    assert wrong.code == "reading-as-difference"
    assert wrong.labels[0].span.text == "0.5[barg]"


def test_the_known_that_two_lines_speak_against() -> None:
    wrong = only(*READINGS, "dT = 5[degC]", "T2 = T1 + dT", "T3 = 12[degC]", "T1 = T3 + dT")
    assert wrong.labels[0].span.text == "5[degC]"


def test_a_limit_on_a_difference_given_as_a_reading() -> None:
    texts = [*READINGS, "dT_min = 5[degC]", "T2 - T1 > dT_min"]
    found, names = formulas(texts)
    (wrong,) = check_units(found, statements(texts), names, minor=[3]).diagnostics
    assert wrong.code == "reading-as-difference"
    assert wrong.labels[0].span.text == "5[degC]"


def test_a_difference_compared_with_a_reading() -> None:
    wrong = only("T = 20[degC]", "d = 5[delta_degC]", "T < d")
    assert wrong.code == "difference-as-reading"
    assert wrong.labels[0].span.text == "d"


def test_a_reading_as_half_width() -> None:
    """The `within` of a limit must be a difference."""
    found, names = formulas(["T = 20[degC]", "T = 2[degC]"])
    within = found[1]
    literal = within.tape.outputs[1]
    found[1] = replace(within, differences=(literal,))
    check = check_units(found, statements(["T = 20[degC]", "T = 2[degC]"]), names)
    assert [d.code for d in check.diagnostics] == ["reading-as-difference"]


@pytest.mark.parametrize("literal", ["273.15[K]", "273[K]", "273.2[K]"])
def test_an_offset_that_counts_twice_is_warned_of(literal: str) -> None:
    warned = only("T = 20[degC]", f"V = 2[m**3/K]*(T + {literal})")
    assert warned.code == "reading-made-absolute"
    assert warned.severity is Severity.WARNING
    assert warned.labels[0].span.text == literal


def test_one_atmosphere_added_to_a_gauge_pressure_is_warned_of() -> None:
    assert only("p = 2[barg]", "pa = p + 101325[Pa]").code == "reading-made-absolute"


def test_the_ambient_pressure_added_to_a_gauge_pressure_is_warned_of() -> None:
    warned = only("ambient = 0.84[bar]", "p = 2[barg]", "pa = p + ambient")
    assert warned.code == "reading-made-absolute"
    assert warned.labels[0].span.text == "ambient"


def test_an_offset_added_to_an_absolute_temperature_is_no_slip() -> None:
    check, _ = checked("T = 20[K]", "T2 = T + 273.15[K]")
    assert check.diagnostics == ()


def test_independent_misuses_are_all_reported() -> None:
    check, _ = checked("T1 = 20[degC]", "T2 = T1 + 2[degC]", "p1 = 2[barg]", "p2 = p1 + 1[barg]")
    assert [d.code for d in check.diagnostics] == ["sum-of-readings", "sum-of-readings"]


def test_lines_that_clash_in_dimension_are_left_out() -> None:
    check, _ = checked("T1 = 20[degC]", "T1 = 3[m] + 2[degC]", "d = T1 - 5[degC]")
    assert [d.code for d in check.diagnostics] == ["dimension-clash"]


def test_results_say_plain_where_the_kind_is_not_known() -> None:
    check, _ = checked("T = 300[K]")
    assert check.kinds.kinds == ("unknown",)
    assert check.kinds[0] == "plain"
