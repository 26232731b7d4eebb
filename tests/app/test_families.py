"""Families, tables and templates as a user meets them: on the command line and from Python."""

from __future__ import annotations

import json
import time
from pathlib import Path

import pytest

import eqsheet
from eqsheet.app.main import main
from eqsheet.diagnostics.diagnostic import Severity


def solve(text: str, *changes: str, free: tuple[str, ...] = ()) -> eqsheet.Solution:
    return eqsheet.parse(text).solve(changes=list(changes), free=list(free))


def solved(text: str, *changes: str, free: tuple[str, ...] = ()) -> eqsheet.Solution:
    solution = solve(text, *changes, free=free)
    assert solution.solved, [d.message for d in solution.diagnostics]
    return solution


def errors(text: str, *changes: str, free: tuple[str, ...] = ()) -> list[tuple[str, int, str]]:
    """Code, line and guilty text of each error."""
    found = []
    for d in solve(text, *changes, free=free).diagnostics:
        if d.severity is Severity.ERROR:
            assert d.span is not None
            found.append((d.code, d.span.line, d.span.text))
    return found


CHAIN = """\
N = 5
for i in 1..N:
    T[i] - T[i-1] = 2 K
T[0] = 300 K
"""

TABLES = """\
rows node: z in m
    A 1
    B 2
    C 4
rows line: a of node, b of node, k
    L1 A B 1
    L2 B C 2
    L3 A C 3
"""

PIPES = """\
template pipe:
    shared rho
    dP = f*(L/D)*rho*v^2/2
    v = Q/(pi*D^2/4)
    f = 0.02
    L = 10 m
    v near 1 m/s within 0 m/s ..
    require v <= 2.5 m/s
rho = 1000 kg/m^3
"""


# --- families ---------------------------------------------------------------------------------------------


def test_members_are_shown_under_their_own_names() -> None:
    solution = solved(CHAIN)
    assert {name: value.si for name, value in solution.items() if name != "N"} == {
        f"T[{i}]": pytest.approx(300 + 2 * i) for i in range(6)
    }


def test_the_size_is_changed_for_one_run() -> None:
    solution = solved(CHAIN, "N = 200")
    assert solution["T[200]"].si == pytest.approx(700)
    assert "T[201]" not in solution


def test_a_member_is_changed_and_freed_for_one_run() -> None:
    assert solved(CHAIN, "T[0] = 310 K")["T[5]"].si == pytest.approx(320)
    assert solved(CHAIN, "T[5] = 300 K", free=("T[0]",))["T[0]"].si == pytest.approx(290)


def test_no_members_at_all_is_told() -> None:
    solution = solve(CHAIN, "N = 0")
    assert [d.code for d in solution.diagnostics] == ["empty-family"]
    assert solution.status == "solved"


@pytest.mark.parametrize("size", ["1000000000", "1e9", "1e15"])
def test_a_family_too_large_is_refused_at_once(size: str) -> None:
    begin = time.perf_counter()
    found = errors(CHAIN.replace("N = 5", f"N = {size}"))
    assert time.perf_counter() - begin < 1
    assert found == [("family-too-large", 2, "i in 1..N")]


def test_nested_families_too_large_are_refused_before_they_are_made() -> None:
    text = "for i in 1..100000:\n    for k in 1..100000:\n        x[i, k] = 1\n"
    begin = time.perf_counter()
    assert errors(text) == [("family-too-large", 2, "k in 1..100000")]
    assert time.perf_counter() - begin < 2


@pytest.mark.parametrize("size", ["2.5", "5 m", "1e300", "M"])
def test_a_size_that_is_no_whole_number(size: str) -> None:
    assert ("range-not-whole", 2, "N") in errors(CHAIN.replace("N = 5", f"N = {size}"))


def test_a_negative_size_gives_no_members() -> None:
    text = "N = -3\nfor i in 1..N:\n    x[i] = 1\ny = 2\n"
    assert [d.code for d in solved(text).diagnostics] == ["empty-family"]


@pytest.mark.parametrize(
    ("clauses", "expected"),
    [
        ("i in 1..4 if i != 3", [1, 2, 4]),
        ("i in 1..4 if i > 1 and i < 4", [2, 3]),
        ("i in 1..4 if i = 1 or i = 4", [1, 4]),
        ("i in 1..4 if not i = 1", [2, 3, 4]),
        ("i in 1..4 if 2 <= i < 4", [2, 3]),
        ("i in -1..1", [-1, 0, 1]),
        ("i in N..N+1", [2, 3]),
    ],
)
def test_ranges_and_filters(clauses: str, expected: list[int]) -> None:
    solution = solved(f"N = 2\nfor {clauses}:\n    x[i] = 3*i + 1\n")
    assert [name for name in solution if name != "N"] == [f"x[{i}]" for i in expected]
    assert [solution[f"x[{i}]"].si for i in expected] == [3 * i + 1 for i in expected]


def test_nested_families_with_dependent_ranges_and_several_indices() -> None:
    nested = "for i in 1..3:\n    for k in 1..i:\n        a[i, k] = i + 10*k\n"
    at_once = "for i in 1..3, k in 1..i:\n    a[i, k] = i + 10*k\n"
    expected = {f"a[{i}, {k}]": float(i + 10 * k) for i in (1, 2, 3) for k in range(1, i + 1)}
    for text in (nested, at_once):
        assert {name: value.si for name, value in solved(text).items()} == expected


def test_aggregates() -> None:
    text = (
        "for i in 1..3, k in 1..i:\n    a[i, k] = i + 10*k\n"
        "total = sum(a[i, k] for i in 1..3, k in 1..i if i != k)\n"
        "product = prod(a[i, 1] for i in 1..3)\n"
        "low = min(a[3, k] for k in 1..3)\nhigh = max(a[3, k] for k in 1..3)\nnone = sum(a[i, 1] for i in 1..0)\n"
        "one = prod(a[i, 1] for i in 1..0)\n"
    )
    solution = solved(text)
    assert solution["total"].si == 12 + 13 + 23
    assert solution["product"].si == 11 * 12 * 13
    assert (solution["low"].si, solution["high"].si) == (13, 33)
    assert (solution["none"].si, solution["one"].si) == (0, 1)


@pytest.mark.parametrize(
    ("text", "found"),
    [
        ("for i in 1..3:\n    T[i] - T[i-1] = 2 K\n", ("no-such-member", 2, "T[i-1]")),
        (TABLES + "y = z[D]\n", ("no-such-member", 9, "D")),
        (TABLES + 'y = z["A B"]\n', ("no-such-member", 9, '"A B"')),
        (TABLES + "for i in 1..3:\n    x[i] = z[i]\n", ("index-mixed", 10, "i")),
        (TABLES + "for l in line:\n    x[l] = z[l]\n", ("index-mixed", 10, "l")),
        (TABLES + "for l in line:\n    x[l] = z[k[l]]\n", ("subscript-form", 10, "k[l]")),
        (TABLES + "for n in node if z[n] > 1 m:\n    x[n] = 1\n", ("filter-form", 9, "z[n]")),
        (TABLES + "y = z\n", ("family-without-subscript", 9, "z")),
        (TABLES + "y = z[A, B]\n", ("family-without-subscript", 9, "z[A, B]")),
        (TABLES + "y = z[1.5]\n", ("subscript-form", 9, "1.5")),
        (TABLES + "for n in nodes:\n    x[n] = 1\n", ("unknown-index-set", 9, "nodes")),
        ("for i in 1..3:\n    for i in 1..2:\n        x[i] = 1\n", ("index-twice", 2, "i in 1..2")),
        ("i = 3\nfor i in 1..3:\n    x[i] = 2*i\n", ("index-is-quantity", 2, "i in 1..3")),
        ("k = 3\nx[1] = 2\ny = sum(x[k] for k in 1..1)\n", ("index-is-quantity", 3, "k in 1..1")),
        (TABLES + "for n in node:\n    x[n] = 2*n\n", ("member-as-number", 10, "n")),
        ("z[1] = 2\ny = min(z[i] for i in 1..0)\n", ("empty-aggregate", 2, "min(z[i] for i in 1..0)")),
    ],
)  # fmt: skip
def test_slips_are_placed_and_alone(text: str, found: tuple[str, int, str]) -> None:
    assert errors(text) == [found]


def test_a_missing_member_is_named_with_its_index() -> None:
    (found,) = solve("for i in 1..3:\n    T[i] - T[i-1] = 2 K\n").diagnostics
    assert found.message == "there is no `T[0]` (at i = 1)"
    assert found.notes == ("the members run from `T[1]` to `T[3]`",)


def test_a_clash_of_dimensions_is_told_once_for_a_family() -> None:
    text = "for i in 1..1000:\n    T[i] - T[i-1] = 2 m\nT[0] = 300 K\n"
    assert [code for code, _, _ in errors(text)] == ["dimension-clash"]


# --- all members ------------------------------------------------------------------------------------------


def test_a_bare_family_in_show_near_and_within_means_all_members() -> None:
    text = "for i in 1..3:\n    x[i]^2 = i*1 m^2\nx near -1 m\nx[2] near 1.5 m\nx within -9 m .. 9 m\nshow x in cm\n"
    solution = solved(text)
    assert [solution[f"x[{i}]"].value for i in (1, 2, 3)] == [
        pytest.approx(-100),
        pytest.approx(100 * 2**0.5),
        pytest.approx(-100 * 3**0.5),
    ]
    assert {value.unit for value in solution.values()} == {"cm"}


def test_a_pattern_takes_all_members_of_the_families_that_match() -> None:
    text = "for i in 1..2:\n    c_a[i]^2 = 4\n    c_b[i]^2 = 9\nc_* within .. 0\n"
    assert [v.si for v in solved(text).values()] == [-2, -2, -3, -3]


def test_guesses_by_index() -> None:
    text = "for i in 1..2:\n    x[i]^2 = 4\n    x[i] near 3*(2*i - 3)\n"
    assert [v.si for v in solved(text).values()] == [-2, 2]


def test_limits_over_a_family_are_judged_member_by_member() -> None:
    text = "for i in 1..3:\n    x[i] = i*1 m\n    require x[i] <= 2 m\n"
    solution = solved(text)
    assert [(limit.text, limit.holds) for limit in solution.limits] == [
        ("x[i] <= 2 m (i = 1)", True),
        ("x[i] <= 2 m (i = 2)", True),
        ("x[i] <= 2 m (i = 3)", False),
    ]


# --- rows -------------------------------------------------------------------------------------------------


def test_members_through_a_column_and_in_filters() -> None:
    text = TABLES + (
        "for l in line:\n    dz[l] = z[b[l]] - z[a[l]]\n"
        "for n in node:\n    out[n] = sum(k[l] for l in line if a[l] = n)\n"
    )
    solution = solved(text)
    assert [solution[f"dz[L{i}]"].si for i in (1, 2, 3)] == [1, 2, 3]
    assert [solution[f"out[{n}]"].si for n in "ABC"] == [4, 2, 0]


def test_a_cell_left_unknown_and_one_changed_for_one_run() -> None:
    text = "rows bus: P in kW, Q in kvar\n    B1 10 -\n    B2 -  5\nQ[B1] = 3 kvar\nP[B1] + P[B2] = 12 kW\n"
    assert solved(text)["P[B2]"].to("kW") == pytest.approx(2)
    assert solved(text, "P[B1] = 11 kW")["P[B2]"].to("kW") == pytest.approx(1)
    turned = solved(text, "P[B2] = 4 kW", free=("P[B1]",))
    assert turned["P[B1]"].to("kW") == pytest.approx(8)


def test_quoted_members() -> None:
    text = 'rows species: z\n    "NH4+" 0.1\n    "SO4 2-" 0.9\ny = z["NH4+"] + z["SO4 2-"]\n'
    assert solved(text)["y"].si == 1
    assert solved(text, 'z["NH4+"] = 0.3')["y"].si == pytest.approx(1.2)


def test_readings_in_a_column() -> None:
    text = "rows room: T in degC\n    hall 18\n    bath 24\ndT = T[bath] - T[hall]\n"
    solution = solved(text)
    assert solution["dT"].si == pytest.approx(6)
    assert solution["T[bath]"].value == pytest.approx(24)


# --- templates --------------------------------------------------------------------------------------------


def test_instances_have_knowns_guesses_and_limits_of_their_own() -> None:
    text = PIPES + (
        "use pipe as supply:\n    D = 50 mm\n    Q = 2 L/s\n"
        "use pipe as back:\n    D = 50 mm\n    dP = supply.dP\n    L = 2*supply.L\n    f = 0.03\n    v near 0.5 m/s\n"
    )
    solution = solved(text)
    v = 2e-3 / (3.141592653589793 * 0.05**2 / 4)
    assert solution["supply.v"].si == pytest.approx(v)
    assert solution["back.v"].si == pytest.approx(v / 3**0.5)
    assert (solution["back.L"].si, solution["back.f"].si, solution["supply.f"].si) == (20, 0.03, 0.02)
    assert [limit.text for limit in solution.limits] == ["v <= 2.5 m/s (supply)", "v <= 2.5 m/s (back)"]


def test_a_known_of_an_instance_is_changed_and_freed_for_one_run() -> None:
    text = PIPES + "use pipe as p:\n    D = 50 mm\n    Q = 2 L/s\n"
    assert solved(text, "p.D = 100 mm")["p.v"].si == pytest.approx(solved(text)["p.v"].si / 4)
    assert solved(text, "p.v = 1 m/s", free=("p.D",))["p.D"].si == pytest.approx(
        (8e-3 / 3.141592653589793) ** 0.5
    )


def test_instances_in_a_family() -> None:
    text = PIPES + (
        "rows line: D_l in mm, Q_l in L/s\n    A 50 2\n    B 60 8\n"
        "for l in line:\n    use pipe as p[l]:\n        D = D_l[l]\n        Q = Q_l[l]\n"
        "total = sum(p[l].dP for l in line)\nshow p.dP in kPa\n"
    )
    solution = solved(text)
    assert solution["total"].si == pytest.approx(solution["p[A].dP"].si + solution["p[B].dP"].si)
    assert solution["p[B].dP"].unit == "kPa"
    assert [limit.text for limit in solution.limits] == ["v <= 2.5 m/s (p[A])", "v <= 2.5 m/s (p[B])"]
    assert [limit.holds for limit in solution.limits] == [True, False]


def test_templates_inside_templates() -> None:
    text = (
        "template valve:\n    shared rho\n    dP = K*rho*v^2/2\n    K = 3\n"
        "template run:\n    shared rho\n    use valve as one:\n        v = v\n"
        "    use valve as two:\n        v = v\n        K = 5\n    dP = one.dP + two.dP\n    v = Q/A\n    A = 0.01 m^2\n"
        "rho = 1000 kg/m^3\nuse run as r:\n    Q = 10 L/s\n"
    )
    solution = solved(text)
    assert solution["r.dP"].si == pytest.approx(4000)
    assert solution["r.two.K"].si == 5


@pytest.mark.parametrize(
    ("text", "found"),
    [
        ("template a:\n    use a as b\n    x = 1\nuse a as c\n", ("template-uses-itself", 2, "use a as b")),
        (
            "template a:\n    use b as b\n    x = 1\ntemplate b:\n    use a as q\n    y = 2\nuse a as c\n",
            ("template-uses-itself", 5, "use a as q"),
        ),
        (PIPES + "use pip as p\n", ("unknown-template", 10, "use pip as p")),
        ("template a:\n    x = 1\nuse a as p\nuse a as p\n", ("instance-twice", 4, "use a as p")),
        (
            "template a:\n    x = 1\ntemplate a:\n    x = 2\nuse a as p\n",
            ("template-twice", 3, "template a:"),
        ),
        ("template a:\n    x = 1\nuse a as p\ny = p.z\n", ("no-such-quantity", 4, "p.z")),
        ("template a:\n    x = 1\nuse a as p\ny = q.x\n", ("unknown-instance", 4, "q.x")),
        ("for i in 1..2:\n    new unit EUR\n    x[i] = i\n", ("misplaced-statement", 2, "new unit EUR")),
        ("x = 1\nshared x\n", ("misplaced-statement", 2, "shared x")),
    ],
)
def test_slips_of_templates(text: str, found: tuple[str, int, str]) -> None:
    assert found in errors(text)
    assert len(errors(text)) == 1


def test_a_failure_names_the_instance_and_the_line_of_the_template() -> None:
    text = "template t:\n    x^2 = -y\n    y = 1\nuse t as good:\n    y = -4\nuse t as bad\n"
    (found,) = [d for d in solve(text).diagnostics if d.severity is Severity.ERROR]
    assert (found.code, found.span and found.span.line) == ("no-solution", 2)
    assert "`bad.x`" in found.message
    assert "good" not in found.message


# --- verdicts ---------------------------------------------------------------------------------------------


def test_what_is_free_is_told_once_for_all_members() -> None:
    (found,) = solve("for i in 1..100:\n    a[i] + b[i] = 2\n").diagnostics
    assert found.code == "under-determined"
    assert "`a[1]` and `b[1]`" in found.message
    assert any("`a[2]`" in note and "92 more" in note for note in found.notes)


def test_one_too_many_is_told_with_members_and_lines() -> None:
    (found,) = solve(CHAIN + "T[5] = 320 K\n").diagnostics
    assert found.code == "contradicting-equations"
    assert "lines 3, 4 and 5" in found.message
    assert any("`T[0]`" in note for note in found.notes)
    assert "`T[0]` or `T[5]`" in found.help


def test_a_member_without_solution_is_named() -> None:
    text = "for i in 1..4:\n    x[i]^2 = 3 - i\n    x[i] near 1\n"
    found = [d for d in solve(text).diagnostics if d.severity is Severity.ERROR]
    assert [d.code for d in found] == ["no-solution"]
    assert "`x[4]` from line 2" in found[0].message


# --- command line -----------------------------------------------------------------------------------------


def test_the_command_line_takes_members(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    Path("net.eqsheet").write_text(
        "rows pipe: D in mm\n    P12 100\n    P13 150\nfor p in pipe:\n    A[p] = pi*D[p]^2/4\n",
        encoding="utf-8",
    )
    assert main(["solve", "net.eqsheet", "--json", "--with", "D[P12] = 200 mm"]) == 0
    data = json.loads(capsys.readouterr().out)
    assert data["quantities"]["D[P12]"]["value"] == 200
    assert data["quantities"]["D[P12]"]["line"] is None
    assert data["quantities"]["A[P13]"]["line"] == 5
    assert main(["solve", "net.eqsheet", "--free", "D[P99]"]) == 3
    assert "`D[P99]` is not set" in capsys.readouterr().err
