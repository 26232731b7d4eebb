"""Curves and surfaces in worksheets: forwards, backwards, in families, and outside their range."""

from __future__ import annotations

from pathlib import Path

import pytest
from scipy.interpolate import PchipInterpolator
from scipy.optimize import brentq
from solving import errors, lines, only, solve, values

import eqsheet
from eqsheet.live.document import EditedWorksheet, open_text
from eqsheet.syntax.read import TextFile

HEAD = """
curve head(Q in m^3/h) in m:
    0   32
    10  30.5
    20  26
    30  18
"""
ETA = """
surface eta(Q in m^3/h, n in rpm) in %:
        1450  2900
    10  52    48
    20  61    66
    30  60    70
"""
BORE = """
curve bore(d in mm) in mm by step:
    20  21.6
    25  27.2
    32  35.9
"""
PUMP = PchipInterpolator([0, 10, 20, 30], [32, 30.5, 26, 18])
PER_HOUR = 1 / 3600


def test_read_forwards() -> None:
    found = values(
        solve(HEAD + ETA + BORE + "H = head(15 m^3/h)\ne = eta(25 m^3/h, 1450 rpm)\nD = bore(23 mm)")
    )
    assert found["H"] == pytest.approx(float(PUMP(15)), rel=1e-12)
    assert found["e"] == pytest.approx(
        float(PchipInterpolator([10, 20, 30], [0.52, 0.61, 0.60])(25)), rel=1e-12
    )
    assert found["D"] == pytest.approx(0.0272, rel=1e-15)


@pytest.mark.parametrize("by", ["", " by line"])
def test_read_backwards_in_closed_form(by: str) -> None:
    solution = solve(HEAD.replace("in m:", f"in m{by}:") + "H = 28 m\nH = head(Q)")
    assert solution.status == "solved"
    assert solution.blocks[0].method == "closed form"
    expected = 10 + 10 * 2.5 / 4.5 if by else brentq(lambda q: PUMP(q) - 28, 10, 20, xtol=1e-14)
    assert solution["Q"].to("m^3/h") == pytest.approx(expected, rel=1e-12)


def test_operating_point_without_a_guess() -> None:
    solution = solve(HEAD + "H = head(Q)\nH = 12 m + k*Q^2\nk = 0.04 m*h^2/m^6")
    q = brentq(lambda q: PUMP(q) - 12 - 0.04 * q * q, 0, 30, xtol=1e-14)
    assert solution.status == "solved"
    assert solution["Q"].to("m^3/h") == pytest.approx(q, rel=1e-12)
    assert solution["H"].to("m") == pytest.approx(float(PUMP(q)), rel=1e-12)


def test_a_search_starts_inside_the_range_of_an_argument_that_is_an_expression() -> None:
    text = HEAD + "H = 2*head(Q/n*s)\nH = 20 m + k*Q^2\nk = 0.01 m*h^2/m^6\nn = 3\ns = 2"
    q = brentq(lambda q: 2 * PUMP(2 * q / 3) - 20 - 0.01 * q * q, 0, 45, xtol=1e-14)
    assert solve(text)["Q"].to("m^3/h") == pytest.approx(q, rel=1e-12)


def test_bounds_and_guesses_choose_the_side_of_a_peak() -> None:
    text = "curve eff(Q in L/s) in %:\n    0 0\n    10 50\n    20 65\n    30 40\n60 % = eff(Q)\n"
    curve = PchipInterpolator([0, 10, 20, 30], [0, 50, 65, 40])
    left = brentq(lambda q: curve(q) - 60, 0, 20, xtol=1e-14)
    right = brentq(lambda q: curve(q) - 60, 20, 30, xtol=1e-14)
    assert solve(text)["Q"].to("L/s") == pytest.approx(left, rel=1e-12)
    assert solve(text + "Q near 28 L/s")["Q"].to("L/s") == pytest.approx(right, rel=1e-12)
    assert solve(text + "Q within 20 L/s ..")["Q"].to("L/s") == pytest.approx(right, rel=1e-12)


def test_a_surface_is_read_backwards_in_either_argument() -> None:
    first = solve(ETA + "58 % = eff\neff = eta(Q, 2000 rpm)\nQ within 10 m^3/h .. 20 m^3/h")
    again = solve(ETA + f"e = eta({first['Q'].to('m^3/h')!r} m^3/h, 2000 rpm)")
    assert again["e"].si == pytest.approx(0.58, rel=1e-12)
    second = solve(ETA + "e = eta(25 m^3/h, n)\ne = 65 %")
    again = solve(ETA + f"e = eta(25 m^3/h, {second['n'].to('rpm')!r} rpm)")
    assert again["e"].si == pytest.approx(0.65, rel=1e-12)


def test_in_definitions_and_families() -> None:
    text = (
        HEAD
        + "define pair(q) = 2*head(q/2)\nfor p in 1..3:\n    H[p] = pair(p*10 m^3/h)\n    H[p] = 2*head(Q[p])"
    )
    found = values(solve(text))
    for p in (1, 2, 3):
        assert found[f"H[{p}]"] == pytest.approx(2 * float(PUMP(5 * p)), rel=1e-12)
        assert found[f"Q[{p}]"] == pytest.approx(5 * p * PER_HOUR, rel=1e-11)


def test_readings_go_in_and_come_out_as_readings() -> None:
    text = "curve boiling(p in barg) in degC by line:\n    0 100\n    1 120\nT = boiling(0.5 barg)\n"
    assert solve(text)["T"].to("degC") == pytest.approx(110.0, rel=1e-12)
    assert solve(text + "p2 = 0.25 barg\nT2 = boiling(p2)")["T2"].to("degC") == pytest.approx(
        105.0, rel=1e-12
    )
    assert errors(solve(text + "T1 = boiling(0.2 barg)\ndT = T - T1\ndT = boiling(0.1 barg)")) == [
        "difference-as-reading"
    ]
    viscosity = "curve nu(T in degC) in mm^2/s:\n    0 1.8\n    20 1.0\n    40 0.66\n"
    assert solve(viscosity + "n = nu(20 degC)")["n"].to("mm^2/s") == pytest.approx(1.0, rel=1e-12)
    assert errors(solve(viscosity + "dT = 30 degC - 10 degC\nn = nu(dT)")) == ["difference-as-reading"]


def test_a_clash_of_dimensions_names_the_curve() -> None:
    found = only(solve(HEAD + "H = head(3 m)"), "dimension-of-argument")
    assert "`head` takes a volume flow" in found.message
    assert lines(found) == [6]
    assert errors(solve(HEAD + "H = head(3 m^3/h, 2)")) == ["argument-count"]


@pytest.mark.parametrize(
    "known", ["H = head(40 m^3/h)", "Q = 40 m^3/h\nH = head(Q)", "Q = 4 m^3/h\nH = head(10*Q)"]
)
def test_a_known_argument_outside_the_range_is_placed(known: str) -> None:
    solution = solve(HEAD + known)
    assert solution.status == "unsolved"
    found = only(solution, "outside-curve")
    assert found.message == "`head` is read at Q = 40 m^3/h, outside its range 0 .. 30 m^3/h"
    assert found.span is not None
    assert found.span.text in known
    assert "H" not in solution


def test_an_end_of_the_range_belongs_to_it() -> None:
    found = values(solve(HEAD + "Q = 2*15 m^3/h\nH = head(Q)\nH0 = head(0 m^3/h)"))
    assert found["H"] == pytest.approx(18.0, rel=1e-15)
    assert found["H0"] == 32.0


def test_a_branch_not_taken_may_lie_outside() -> None:
    text = HEAD + "Q = 40 m^3/h\nH = if Q > 30 m^3/h then 0 m else head(Q)"
    assert values(solve(text))["H"] == 0.0


def test_limits_and_guesses_outside_the_range() -> None:
    solution = solve(HEAD + "Q = 40 m^3/h\nrequire head(Q) > 2 m")
    assert errors(solution) == ["outside-curve"]
    assert solution.limits == ()
    assert errors(solve(HEAD + "H = head(Q)\nH = 20 m\nH near head(50 m^3/h)")) == ["outside-curve"]


def test_no_solution_within_the_range_says_where_the_curve_ends() -> None:
    found = only(solve(HEAD + "H = head(Q)\nH = 5 m + 0.001 m*h^2/m^6 * Q^2"), "no-solution")
    assert any("`head` has values for Q in 0 .. 30 m^3/h" in note for note in found.notes)
    assert any("stopped at its end, Q = 30 m^3/h" in note for note in found.notes)


def test_steps_are_not_read_backwards() -> None:
    found = only(solve(BORE + "bore(d) = 27.2 mm"), "step-read-backwards")
    assert found.message == "`d` cannot be found from `bore`, which goes by steps"


def test_a_size_is_chosen_within_a_loop() -> None:
    # The bore wanted depends on the speed, the speed on the bore chosen.
    text = BORE + "v = Q/(pi*D^2/4)\nQ = 0.6 L/s\nD = bore(d)\nd = 22 mm + 1 mm*s/m * v\nD near 27 mm"
    found = values(solve(text))
    assert found["D"] == pytest.approx(0.0272, rel=1e-12)
    assert found["d"] == pytest.approx(
        0.022 + 0.001 * 0.6e-3 / (3.141592653589793 * 0.0272**2 / 4), rel=1e-12
    )


def test_a_broken_curve_is_told_once() -> None:
    assert errors(
        solve(HEAD.replace("30.5", "none") + "H = head(3 m^3/h)\nG = head(4 m^3/h)\nrequire G > 3 m")
    ) == ["cell-not-a-number"]


def test_lines_edited_see_the_curve_as_it_is_now() -> None:
    sheet = eqsheet.parse(HEAD + "H = head(Q)\nQ = 15 m^3/h")
    before = sheet.solve()["H"].si
    assert sheet.solve(changes=["Q = 20 m^3/h"])["H"].si == pytest.approx(26.0)
    other = eqsheet.worksheet.sheet.read(
        eqsheet.parse(HEAD.replace("30.5", "31") + "H = head(Q)\nQ = 15 m^3/h").source, sheet.cache
    )
    assert other.solve()["H"].si > before


CSV = {
    "pump.csv": "Q in m^3/h,H in m\n0,32\n10,30.5\n20,26\n30,18\n",
    "eta.csv": "Q in m^3/h;1450;2900\n10;52;48\n20;61;66\n30;60;70\n",
}


def in_folder(folder: Path, text: str, **files: str) -> eqsheet.Solution:
    for name, content in (*CSV.items(), *((f"{name}.csv", content) for name, content in files.items())):
        (folder / name).write_text(content, encoding="utf-8")
    (folder / "sheet.eqsheet").write_text(text, encoding="utf-8")
    return eqsheet.load(folder / "sheet.eqsheet").solve()


FROM_FILES = (
    'curve head(Q in m^3/h) in m from "pump.csv"\n'
    'surface eta(Q in m^3/h, n in rpm) in % from "eta.csv"\n'
    "H = head(15 m^3/h)\ne = eta(25 m^3/h, 2000 rpm)\n"
)


def test_a_file_gives_what_the_same_rows_in_the_worksheet_give(tmp_path: Path) -> None:
    inline = values(solve(HEAD + ETA + "H = head(15 m^3/h)\ne = eta(25 m^3/h, 2000 rpm)"))
    assert values(in_folder(tmp_path, FROM_FILES)) == inline
    assert values(in_folder(tmp_path, FROM_FILES, eta=CSV["eta.csv"].replace("Q in m^3/h", ""))) == inline


@pytest.mark.parametrize(
    ("content", "code", "place"),
    [
        ("Q in m^3/h,H in m\n0,32\n10,30.5,1\n", "row-length", "10,30.5,1"),
        ('Q in m^3/h,H in m\n0,32\n10,"30,5"\n', "cell-not-a-number", '"30,5"'),
        ("Q in m^3/h,H in m\n0,32\n10,\n", "cell-not-a-number", ""),
        ("Q in m^3/h,H in m\n0,32\n10,30\n10,29\n", "curve-not-increasing", "10"),
        ("Q in L/s,H in m\n0,32\n10,30\n", "csv-heading", "Q in L/s"),
        ("Q in m^3/h,H in mm\n0,32\n10,30\n", "csv-heading", "H in mm"),
    ],
)
def test_what_is_wrong_in_a_file_is_placed_there(tmp_path: Path, content: str, code: str, place: str) -> None:
    solution = in_folder(tmp_path, FROM_FILES, pump=content)
    assert errors(solution) == [code]
    span = only(solution, code).span
    assert span is not None
    assert span.source.name.endswith("pump.csv")
    assert span.text == place


def test_a_missing_file_is_told_once(tmp_path: Path) -> None:
    assert errors(in_folder(tmp_path, FROM_FILES.replace("pump.csv", "none.csv"))) == [
        "unreadable-attachment"
    ]


def test_results_are_shown_in_the_units_of_the_heading() -> None:
    solution = solve(HEAD + "H = head(Q)\nH = 12 m + k*Q^2\nk = 0.04 m*h^2/m^6\nG = head(10 m^3/h)")
    assert {name: solution[name].unit for name in "HQG"} == {"H": "m", "Q": "m^3/h", "G": "m"}
    # Any unit written for the quantity itself counts more.
    assert solve(HEAD + "20 m = head(Q)\nQ near 5 L/s")["Q"].unit == "L/s"


def test_the_ambient_pressure_is_told_where_a_curve_gives_gauge_pressures() -> None:
    text = "curve vessel(V in L) in barg:\n    0 0\n    50 2\np = vessel(20 L)"
    assert [d.code for d in solve(text).diagnostics] == ["ambient-pressure"]


@pytest.mark.parametrize(
    ("line", "text"),
    [
        (4, "    10  31"),
        (2, "curve head(Q in m^3/h) in m by line:"),
        (2, "curve head(Q in L/s) in m:"),
        (8, "Q = 16 m^3/h"),
    ],
)
def test_an_edited_curve_gives_what_it_gives_when_read_anew(tmp_path: Path, line: int, text: str) -> None:
    path = tmp_path / "pump.eqsheet"
    path.write_text(HEAD + "H = head(Q)\nQ = 15 m^3/h\n", encoding="utf-8")
    file = open_text(str(path))
    assert isinstance(file, TextFile)
    sheet = EditedWorksheet(file, str(path))
    edited = sheet.replace(line, line, text).solution
    assert values(edited) == values(eqsheet.parse("\n".join(sheet.lines)).solve())
    assert values(edited)["H"] != values(solve(HEAD + "H = head(Q)\nQ = 15 m^3/h"))["H"]


def test_in_templates_and_in_simultaneous_blocks_of_surfaces() -> None:
    text = (
        HEAD + ETA + "template pump:\n    H = head(Q)*m\n    H = 12 m + k*Q^2*(1 + eta(Q, n))\n"
        "    n = 2000 rpm + 10 rpm/m * H\n    m = 1\n"
        "use pump as a:\n    k = 0.04 m*h^2/m^6\nuse pump as b:\n    k = 0.02 m*h^2/m^6\n    m = 0.9"
    )
    found = solve(text)
    assert found.status == "solved"
    for name, k, m in (("a", 0.04, 1.0), ("b", 0.02, 0.9)):
        q, h, n = (
            found[f"{name}.{part}"].to(unit) for part, unit in (("Q", "m^3/h"), ("H", "m"), ("n", "rpm"))
        )
        # Between the speeds 1450 and 2900, the first and last of two, the surface is straight along n.
        low, high = (PchipInterpolator([10, 20, 30], column)(q) for column in ([52, 61, 60], [48, 66, 70]))
        eta = (low + (high - low) * (n - 1450) / 1450) / 100
        assert h == pytest.approx(m * float(PUMP(q)), rel=1e-10)
        assert h == pytest.approx(12 + k * q * q * (1 + eta), rel=1e-10)
        assert n == pytest.approx(2000 + 10 * h, rel=1e-10)


def test_a_loop_through_steps_without_a_solution_is_said_to_be_one() -> None:
    # A bore of 21.6 mm asks for 27.2 mm, and that for 21.6 mm again.
    found = only(solve(BORE + "D = bore(d)\nd = 46 mm - D\nD within 10 mm .. 60 mm"), "no-solution")
    assert any("`bore` has values for d in .. 32 mm; it goes by steps" in note for note in found.notes)


@pytest.mark.parametrize("start", [21.6, 27.2, 35.9])
def test_the_size_that_agrees_with_itself_is_found_from_any_other(start: float) -> None:
    # 21.6 mm asks for 35.9 mm and that for 21.6 mm; 27.2 mm asks for itself.
    solution = solve(BORE + f"D = bore(d)\nd = 43.5 mm - 0.7*D\nD near {start} mm")
    assert solution.status == "solved"
    assert values(solution) == pytest.approx({"D": 0.0272, "d": 0.0435 - 0.7 * 0.0272}, rel=1e-12)


def test_a_size_in_a_loop_outside_the_range_is_no_solution() -> None:
    assert errors(solve(BORE + "D = bore(d)\nd = 33 mm + 0.1*D")) == ["no-solution"]


@pytest.mark.parametrize(
    ("use", "told"),
    [
        ("P = shaft(50 Hz)", ["50 Hz"]),
        ("P = shaft(f/2)\nf = 50 Hz", ["f/2", "50 Hz"]),
        ("P = shaft(2*pi*f)\nf = 50 Hz", []),
        ("P = shaft(1450 rpm)", []),
        ("P = shaft(60 1/s)", []),
        ("n = 20 Hz\nspeed(x) = n\nx = 30 %", ["n", "speed(x)", "20 Hz"]),
    ],
)
def test_a_frequency_where_a_curve_has_a_speed(use: str, told: list[str]) -> None:
    solution = solve(
        "curve shaft(n in rpm) in W:\n    0 0\n    4000 10\n"
        "curve speed(x in %) in rpm:\n    0 0\n    100 3000\n" + use
    )
    found = [d for d in solution.diagnostics if d.code == "rpm-against-hz"]
    assert [label.span.text for d in found for label in d.labels] == told
