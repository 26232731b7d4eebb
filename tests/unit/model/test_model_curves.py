"""Curves and surfaces read from the lines of a worksheet, and what is said of bad tables."""

from __future__ import annotations

from textwrap import dedent

import pytest

import eqsheet
from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.model.curves import collect_curves
from eqsheet.model.interpolant import Interpolant
from eqsheet.model.unit_statements import collect_units


def read(text: str, definitions: tuple[str, ...] = ()) -> tuple[dict[str, Interpolant], list[Diagnostic]]:
    statements = eqsheet.parse(dedent(text)).document.statements
    diagnostics: list[Diagnostic] = []
    units = collect_units(statements, diagnostics)
    return dict(collect_curves(statements, definitions, units, diagnostics)), diagnostics


def only(text: str, definitions: tuple[str, ...] = ()) -> Diagnostic:
    curves, (diagnostic,) = read(text, definitions)
    assert not curves
    return diagnostic


def guilty(diagnostic: Diagnostic) -> tuple[str, int]:
    assert diagnostic.span is not None
    return diagnostic.span.text, diagnostic.span.line


def test_a_curve_in_si() -> None:
    curves, diagnostics = read(
        """
        curve vapour(T in degC) in mbar:
            0   6.1
            20  23.4
            40  73.8
        """
    )
    assert not diagnostics
    (curve,) = curves.values()
    assert curve.axes == ((273.15, 293.15, 313.15),)
    assert [piece[0] for piece in curve.pieces] == pytest.approx([610.0, 2340.0])
    assert curve.heading.arguments == ("T",)
    assert [d.text for d in (*curve.heading.dimensions, curve.heading.dimension)] == ["K", "kg/(m*s^2)"]


def test_a_surface_has_its_second_argument_across() -> None:
    curves, diagnostics = read(
        """
        surface eta(Q in L/s, n in 1/s) in %:
               10  20  30
            1  50  55  60
            2  70  75  80
        """
    )
    assert not diagnostics
    surface = curves["eta"]
    assert surface.axes == ((0.001, 0.002), (10.0, 20.0, 30.0))
    assert surface.function(0.002, 10.0) == pytest.approx(0.7)
    assert surface.function(0.001, 30.0) == pytest.approx(0.6)


def test_numbers_without_units_and_negative_arguments() -> None:
    curves, diagnostics = read("curve k(x) by line:\n    -1.5  2e3\n    +2    -4\n")
    assert not diagnostics
    assert curves["k"].axes == ((-1.5, 2.0),)
    assert curves["k"].function(-1.5) == 2000.0


@pytest.mark.parametrize(
    ("rows", "code", "place", "line"),
    [
        (["0 32", "10 30.5 4"], "row-length", "10 30.5 4", 3),
        (["0 32", "10"], "row-length", "10", 3),
        (["0 32", "10 x"], "cell-not-a-number", "x", 3),
        (["0 32", "10 -"], "cell-not-a-number", "-", 3),
        (["0 32", '10 "30"'], "cell-not-a-number", '"30"', 3),
        (["0 32", "10 1e400"], "cell-not-a-number", "1e400", 3),
        (["0 32", "20 26", "10 30.5"], "curve-not-increasing", "10", 4),
        (["0 32", "10 30.5", "10 30.5"], "curve-not-increasing", "10", 4),
        (["0 32"], "curve-too-few-points", "curve head(Q in m^3/h) in m:", 1),
    ],
)
def test_bad_rows_of_a_curve(rows: list[str], code: str, place: str, line: int) -> None:
    found = only("curve head(Q in m^3/h) in m:\n" + "".join(f"    {row}\n" for row in rows))
    assert found.code == code
    assert guilty(found) == (place, line)


@pytest.mark.parametrize(
    ("rows", "code", "place", "line"),
    [
        (["1450 2900", "10 52"], "row-length", "10 52", 3),
        (["1450", "10 52", "20 60"], "curve-too-few-points", "surface eta(Q in m^3/h, n in rpm) in %:", 1),
        (["1450 2900", "10 52 48"], "curve-too-few-points", "surface eta(Q in m^3/h, n in rpm) in %:", 1),
        (["2900 1450", "10 52 48", "20 61 66"], "curve-not-increasing", "1450", 2),
        (["1450 2900", "20 52 48", "10 61 66"], "curve-not-increasing", "10", 4),
        (["1450 high", "10 52 48", "20 61 66"], "cell-not-a-number", "high", 2),
    ],
)
def test_bad_rows_of_a_surface(rows: list[str], code: str, place: str, line: int) -> None:
    found = only("surface eta(Q in m^3/h, n in rpm) in %:\n" + "".join(f"    {row}\n" for row in rows))
    assert found.code == code
    assert guilty(found) == (place, line)


CURVE = "curve {}(Q in m^3/h) in m:\n    0 32\n    10 30\n"


def test_names_are_those_of_functions() -> None:
    assert only(CURVE.format("sqrt")).code == "definition-of-built-in"
    assert only(CURVE.format("head"), ("head",)).code == "defined-twice"
    curves, (twice,) = read(CURVE.format("head") + CURVE.format("head"))
    assert list(curves) == ["head"]
    assert twice.code == "defined-twice"
    assert [label.span.line for label in twice.labels] == [4, 1]


def test_an_unknown_unit_is_placed_in_the_heading() -> None:
    found = only(CURVE.format("head").replace("in m:", "in metres:"))
    assert (found.code, guilty(found)) == ("unknown-unit", ("metres", 1))


def test_a_curve_switched_off_is_none() -> None:
    assert read("off " + CURVE.format("head")) == ({}, [])


def test_a_curve_of_very_many_points_is_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("eqsheet.model.curves.MOST_POINTS", 2)
    assert read(CURVE.format("head"))[1] == []
    assert only(CURVE.format("head") + "    20 28\n").code == "worksheet-too-large"
