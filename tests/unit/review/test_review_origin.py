"""The table of results says where each value comes from and what it is."""

from __future__ import annotations

from pathlib import Path

import eqsheet
from eqsheet.review.table import origin_words, solution_lines

PAGE = """\
D = 80 mm                # bore
Q = v*pi*D^2/4           # flow
h = f*v^2/D              # head lost
f = 0.02 + 0.1 m/s / v   # friction
h + v^2/(1 m) = 3 m^2/s^2 / (1 m)
v near 1 m/s             # mean speed
show Q in L/s
"""


def row(name: str) -> str:
    lines = [line for line in solution_lines(eqsheet.parse(PAGE).solve()) if line.split()[:1] == [name]]
    assert len(lines) == 1
    return lines[0]


def test_a_known_and_a_line_of_its_own() -> None:
    assert "given, line 1" in row("D")
    assert row("D").endswith("bore")
    assert " line 2 " in row("Q")
    assert row("Q").endswith("flow")


def test_unknowns_of_one_block_are_told_apart_by_their_own_lines() -> None:
    assert "lines 3, 4, 5" in row("h")
    assert row("h").endswith("head lost")
    assert row("f").endswith("friction")


def test_an_unknown_without_a_line_of_its_own_is_described_by_its_guess() -> None:
    assert row("v").endswith("mean speed")


def test_many_lines_are_not_listed_but_the_own_one_is_named() -> None:
    page = PAGE.replace("h + v^2/(1 m)", "g + v^2/(1 m)") + "g = h*(1 + 0.1 s/m * v)   # head again\n"
    lines = solution_lines(eqsheet.parse(page).solve())
    (again,) = (line for line in lines if line.split()[:1] == ["g"])
    assert "line 8 with 3 more" in again
    assert again.endswith("head again")
    (speed,) = (line for line in lines if line.split()[:1] == ["v"])
    assert "4 lines, 3 to 8" in speed


def test_the_line_of_a_table_names_its_file(tmp_path: Path) -> None:
    (tmp_path / "pipes.csv").write_text("pipe,L in m\nA,3\nB,4\n", encoding="utf-8")
    sheet = tmp_path / "net.eqsheet"
    sheet.write_text(
        'rows pipe from "pipes.csv"\ntotal = sum(L[l] for l in pipe)\nw = 2 m\n', encoding="utf-8"
    )
    solution = eqsheet.load(sheet).solve()
    assert origin_words(solution["L[B]"], solution.blocks) == "given, line 3 of pipes.csv"
    assert origin_words(solution["w"], solution.blocks) == "given, line 3"
