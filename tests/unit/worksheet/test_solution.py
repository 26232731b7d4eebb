"""The public result: values, units, kinds, evidence and blocks."""

from __future__ import annotations

from pathlib import Path

import pytest
from solving import solve

import eqsheet
from eqsheet.worksheet.load import UnreadableFile


def test_values_come_in_the_unit_of_show_known_guess_limit_or_table() -> None:
    solution = solve(
        """
        a = 12 cm^2
        b = 2*a
        c = 3*a
        d = 4*a
        e = 5*a
        show b in mm^2
        c near 30 cm^2
        require d <= 1 dm^2
        b near 1 m^2
        """
    )
    assert {name: value.unit for name, value in solution.items()} == {
        "b": "mm^2",
        "a": "cm^2",
        "c": "cm^2",
        "d": "dm^2",
        "e": "m^2",
    }


def test_a_known_switched_off_still_tells_the_unit() -> None:
    assert solve("off Q = 3 L/s\nQ = v*A\nv = 1 m/s\nA = 2 cm^2")["Q"].unit == "L/s"


def test_order_is_that_of_show_then_of_the_text() -> None:
    assert list(solve("a = 1\nb = 2\nc = a + d\nd = b\nshow d, b")) == ["d", "b", "a", "c"]


def test_kinds_are_shown() -> None:
    solution = solve("T = 20 degC\nT2 = T + dT\ndT = 5 K\nL = 3 m\nshow T2 in degF, dT in degC")
    assert {n: v.kind for n, v in solution.items()} == {
        "T2": "reading",
        "dT": "difference",
        "T": "reading",
        "L": "plain",
    }
    assert solution["T2"].value == pytest.approx(77.0)
    assert solution["dT"].value == pytest.approx(5.0)
    assert solution["T"].to("K") == pytest.approx(293.15)


def test_to_another_unit() -> None:
    v = solve("v = 36 km/h")["v"]
    assert v.to("m/s") == pytest.approx(10.0)
    assert v.to("mi/h") == pytest.approx(36 / 1.609344)
    with pytest.raises(ValueError, match="cannot be converted to kg"):
        v.to("kg")
    with pytest.raises(ValueError, match="flurbs"):
        v.to("flurbs")
    assert solve("x = 25 %")["x"].to("1") == pytest.approx(0.25)


def test_gauge_pressures_stand_on_the_ambient_pressure() -> None:
    text = "p = 2 barg\nq = p\nshow q in bara"
    assert solve(text)["q"].value == pytest.approx(3.01325)
    assert solve("ambient = 84 kPa\n" + text)["q"].value == pytest.approx(2.84)
    notes = [d.message for d in solve(text).diagnostics if d.code == "ambient-pressure"]
    assert notes == ["gauge pressures stand on the standard atmosphere, 101.325 kPa"]


@pytest.mark.parametrize(
    "line", ["ambient = 1 barg", "ambient = 3 m", "ambient = 2*x\nx = 1 bar", "ambient = 84"]
)
def test_ambient_must_be_an_absolute_pressure(line: str) -> None:
    assert "ambient-form" in [d.code for d in solve(line).diagnostics]


def test_where_a_value_is_from() -> None:
    solution = solve("a = 3 m ± 1 mm # given\nb = 2*a # doubled\nc^2 = b*1 m\nc near 1 m")
    a, b = solution["a"], solution["b"]
    assert (a.known, a.block, a.line, a.tolerance) == (True, None, 1, "± 1 mm")
    assert (b.known, b.block, b.line, b.tolerance) == (False, 1, 2, "")
    assert b.statement is not None and b.statement.description == "doubled"
    assert solution["c"].block == 2


def test_digits_speak_of_cancellation() -> None:
    """1e8 + 1 - 1e8 keeps eight digits of sixteen."""
    solution = solve("a = 123456789.123\nb = 123456788.123\nc = a - b\nd = a*b")
    assert solution["d"].digits >= 14
    assert 6 <= solution["c"].digits <= 8


def test_blocks_tell_lines_method_and_order() -> None:
    solution = solve("x + y = 3\nx - y = 1\nz = x*y\nk = 2")
    first, second = solution.blocks
    assert (first.unknowns, first.lines, first.method, first.after) == (("x", "y"), (1, 2), "linear", ())
    assert (second.unknowns, second.lines, second.method) == (("z",), (3,), "closed form")
    assert (second.after, second.depends) == ((1,), ("x", "y"))
    assert all(block.solved and block.residual < 1e-14 for block in solution.blocks)


def test_a_solution_is_a_mapping() -> None:
    solution = solve("a = 1\nb = 2*a")
    assert len(solution) == 2
    assert "b" in solution and "q" not in solution
    with pytest.raises(KeyError):
        solution["q"]
    with pytest.raises(TypeError):
        solution.quantities["a"] = solution["b"]  # type: ignore[index]  # the claim is that it cannot be done


def test_load_and_parse(tmp_path: Path) -> None:
    path = tmp_path / "a.eqsheet"
    path.write_bytes(b"\xef\xbb\xbfx = 2 m\r\ny = 2*x\r\n")
    assert eqsheet.load(path).solve()["y"].si == 4.0
    assert eqsheet.parse("\ufeffx = 2 m\r\ny = 2*x\r\n").solve()["y"].si == 4.0
    with pytest.raises(UnreadableFile) as caught:
        eqsheet.load(tmp_path / "missing.eqsheet")
    assert caught.value.diagnostic.code == "unreadable-file"
    assert isinstance(caught.value, OSError)


@pytest.mark.parametrize("text", ["", "\n\n", "# only words\n## and a section\n"])
def test_an_empty_worksheet_is_not_valid(text: str) -> None:
    solution = eqsheet.parse(text).solve()
    assert (solution.status, dict(solution)) == ("invalid", {})
    assert [d.code for d in solution.diagnostics] == ["empty-worksheet"]


def test_off_takes_a_statement_out() -> None:
    solution = solve("x = 1 m\noff x = 2 m\noff require x >= 5 m\ny = 2*x\noff broken = x + 1 s")
    assert solution.status == "solved"
    assert {n: v.si for n, v in solution.items()} == {"x": 1.0, "y": 2.0}


@pytest.mark.parametrize(
    ("value", "unit"),
    [(1.5, "in"), (12.1, "degF"), (0.3, "psig"), (3.9, "L/min"), (9.3, "%"), (38.7, "rpm"), (0.1, "degC")],
)
def test_a_known_comes_back_as_it_was_written(value: float, unit: str) -> None:
    known = eqsheet.parse(f"x = {value} {unit}").solve()["x"]
    assert known.value == value
    assert known.to(unit) == value


def test_a_difference_comes_back_as_it_was_written() -> None:
    known = eqsheet.parse("dT = 12.1 delta_degF\nT = 20 degC\nT_2 = T + dT\nshow dT in degF").solve()["dT"]
    assert (known.kind, known.value) == ("difference", 12.1)
