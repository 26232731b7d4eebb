"""The equation system: names in order, knowns, references that fail, units preferred, labels."""

from __future__ import annotations

from textwrap import dedent

import pytest

from eqsheet.diagnostics.source import Source
from eqsheet.model.build import build_system
from eqsheet.model.lowered_cache import LoweredCache
from eqsheet.model.system import EquationSystem
from eqsheet.syntax.parse import parse_document


def build(text: str, cache: LoweredCache | None = None) -> tuple[EquationSystem, list[str]]:
    """The system of a text that can be read, and the codes of what was found."""
    document, diagnostics = parse_document(Source("page", dedent(text).strip("\n")))
    assert not diagnostics
    system, found = build_system(document.statements, cache)
    return system, [d.code for d in found]


def knowns(system: EquationSystem) -> dict[str, float]:
    return {system.names[item.known]: item.value for item in system.equations if item.known >= 0}


def test_quantities_are_numbered_by_name() -> None:
    system, found = build("b = 2*a\na = 1\nZ = b\n_c = Z")
    assert not found
    assert system.names == ("Z", "_c", "a", "b")
    assert [system.number(name) for name in system.names] == [0, 1, 2, 3]
    assert system.number("missing") is None


@pytest.mark.parametrize("step", [1, -1])
def test_the_order_of_lines_does_not_matter(step: int) -> None:
    lines = ["b = 2*a", "a = 1 m", "c^2 = b*a", "c near 1 m", "require c <= 3 m"]
    first, _ = build("\n".join(lines))
    second, _ = build("\n".join(lines[::step]))
    assert first.names == second.names
    assert [(e.formula.tape, e.formula.quantities, e.known) for e in first.equations] == [
        (e.formula.tape, e.formula.quantities, e.known) for e in second.equations
    ]


@pytest.mark.parametrize(
    ("line", "value"),
    [
        ("x = 3 mm", 0.003),
        ("3 mm = x", 0.003),
        ("x = -5 degC", 268.15),
        ("x = 2*pi/4", 1.5707963267948966),
        ("x = const.c/2", 149896229.0),
        ("x = 3 m + 2 cm", 3.02),
        ("x = sqrt(16 m^2)", 4.0),
        ("x = -(3 m)", -3.0),
        ("x = (3 m)", 3.0),
        ("x = 25 %", 0.25),
        ("x = 60 rpm", 6.283185307179586),
        ("x = 5 delta_degC", 5.0),
        ("x = 0", 0.0),
    ],
)
def test_one_name_and_an_expression_without_names_is_a_known(line: str, value: float) -> None:
    system, found = build(line)
    assert not found
    assert knowns(system) == pytest.approx({"x": value}, rel=1e-15)


@pytest.mark.parametrize(
    "line",
    [
        "2*x = 6",
        "x = x",
        "x = y",
        "x + 0 = 3",
        "-x = 3",
        "x = f(2)\ndefine f(a) = a",
        "x = if 1 < 2 then 3 else 4",
    ],
)
def test_anything_else_is_an_equation(line: str) -> None:
    assert knowns(build(line)[0]) == {}


def test_a_known_that_is_no_number() -> None:
    for value in ("1/0", "ln(0)", "sqrt(-1)", "0/0", "exp(1000)"):
        assert build(f"x = {value}")[1] == ["value-not-finite"]


def test_a_broken_statement_is_left_out_and_the_others_stay() -> None:
    system, found = build("x = 3 kgg\ny = 2 m\nz = 2*y")
    assert found == ["unknown-unit"]
    assert system.names == ("y", "z")


def test_names_of_a_broken_statement_are_not_unknown() -> None:
    assert build("x = 3 kgg\ny = 1\nx near 2 m\nrequire x <= 3 m")[1] == ["unknown-unit"]


@pytest.mark.parametrize("line", ["u near 3", "require u <= 3", "show u", "x near u"])
def test_a_name_that_no_equation_has(line: str) -> None:
    assert build(f"x = 2*y\n{line}")[1] == ["unknown-name"]


def test_tolerances() -> None:
    def half(line: str) -> tuple[float, float | None]:
        (item,) = build(line)[0].equations
        assert item.tolerance is not None
        return item.tolerance.half_width, item.tolerance.coverage

    assert half("x = 52.5 mm ± 0.1 mm") == (pytest.approx(1e-4), None)
    assert half("x = 52.5 mm +- 100 um (k=2)") == (pytest.approx(1e-4), 2.0)
    assert half("x = 50 mm ± 2 %") == (pytest.approx(1e-3), None)
    assert half("x = -50 mm ± 2 %") == (pytest.approx(1e-3), None)
    # of a value in %, percent are points
    assert half("x = 80 % ± 2 %") == (pytest.approx(0.02), None)
    # of a reading, a difference
    assert half("x = 20 degC ± 0.5 degC") == (pytest.approx(0.5), None)
    assert half("x = 20 degC ± 0.9 degF") == (pytest.approx(0.5), None)


@pytest.mark.parametrize(
    ("line", "code"),
    [
        ("x = 20 degC ± 2 %", "tolerance-form"),
        ("x = 5 mm ± 1 s", "tolerance-unit"),
        ("x = 5 ± 1 mm", "tolerance-unit"),
        ("x = 5 mm ± 1 mm (k=0)", "tolerance-form"),
    ],
)
def test_slips_in_a_tolerance(line: str, code: str) -> None:
    assert build(line)[1] == [code]


def test_units_preferred() -> None:
    system, _ = build(
        """
        a = 1 cm
        b = 2*a
        c = 3*a
        d = 4*a
        show a in mm
        b near 2 dm
        require c <= 3 um
        off d = 5 km
        """
    )
    assert {system.names[q]: unit.text for q, unit in system.units.items()} == {
        "a": "mm",
        "b": "dm",
        "c": "um",
        "d": "km",
    }
    assert {system.names[q]: unit and unit.text for q, unit in system.shown.items()} == {"a": "mm"}


def test_a_label_stands_once() -> None:
    assert build("a: x = 1\na: y = 2")[1] == ["label-twice"]
    assert build("x: x = 1\ny: y = x")[1] == []


def test_new_units_in_any_order() -> None:
    system, found = build("x = 2 crate\nnew unit crate = 3 box\nnew unit box = 4 carton\nnew unit carton")
    assert not found
    assert knowns(system) == {"x": 24.0}


@pytest.mark.parametrize("lines", ["new unit EUR", "new unit token\nnew unit token"])
def test_a_new_unit_that_is_there_already_is_noted(lines: str) -> None:
    system, found = build(f"{lines}\nx = 2 {lines.split()[-1]}")
    assert found == ["unit-known"]
    assert knowns(system) == {"x": 2.0}


@pytest.mark.parametrize(
    ("lines", "code"),
    [
        ("new unit m", "unit-redefined"),
        ("new unit box = 2 crate", "unknown-unit"),
        ("new unit p = 2 q\nnew unit q = 2 p", "unknown-unit"),
        ("new unit EUR\nnew unit box = 2 EUR\nnew unit box = 3 EUR", "unit-redefined"),
    ],
)
def test_slips_in_a_new_unit(lines: str, code: str) -> None:
    assert code in build(lines + "\nx = 1")[1]


def test_the_cache_serves_the_same_text_wherever_it_stands() -> None:
    cache = LoweredCache()
    before, _ = build("x = 2*y\ny = 3 m", cache)
    after, _ = build("z = 1\ny = 3 m\nx = 2*y", cache)
    fresh, _ = build("z = 1\ny = 3 m\nx = 2*y")
    assert after.names == fresh.names
    assert [(e.formula, e.place, e.known) for e in after.equations] == [
        (e.formula, e.place, e.known) for e in fresh.equations
    ]
    assert before.names == ("x", "y")


@pytest.mark.parametrize(
    ("first", "second", "value"),
    [
        ("new unit box = 2 m\nx = 1 box", "new unit box = 3 m\nx = 1 box", 3.0),
        ("ambient = 100 kPa\nx = 0 barg", "ambient = 90 kPa\nx = 0 barg", 90e3),
    ],
)
def test_the_cache_forgets_where_units_change(first: str, second: str, value: float) -> None:
    cache = LoweredCache()
    build(first, cache)
    assert knowns(build(second, cache)[0])["x"] == pytest.approx(value)
