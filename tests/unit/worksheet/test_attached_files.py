"""Files that a worksheet names: included worksheets and tables."""

from __future__ import annotations

import os
import time
from pathlib import Path

import pytest

import eqsheet


def written(folder: Path, **files: str) -> Path:
    """The worksheet `main` of a folder with more files; double underscores in names are folders."""
    for name, text in files.items():
        stem, _, ending = name.rpartition("_")
        path = folder / (stem.replace("__", "/") + "." + ending)
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(text, encoding="utf-8")
    return folder / "main.eqsheet"


def solve(folder: Path, **files: str) -> eqsheet.Solution:
    return eqsheet.load(written(folder, **files)).solve()


def codes(solution: eqsheet.Solution) -> list[str]:
    return [d.code for d in solution.diagnostics if d.severity.value == "error"]


def test_statements_of_another_file(tmp_path: Path) -> None:
    solution = solve(
        tmp_path, main_eqsheet='include "g.eqsheet"\nm = rho*3 m^3\n', g_eqsheet="rho = 998 kg/m^3\n"
    )
    assert solution["m"].si == pytest.approx(2994)


def test_templates_of_another_file(tmp_path: Path) -> None:
    solution = solve(
        tmp_path,
        main_eqsheet='use pipe as p:\n    D = 2 m\ninclude "lib/t.eqsheet"\n',
        lib__t_eqsheet="template pipe:\n    A = D^2\n",
    )
    assert solution["p.A"].si == 4


def test_a_file_included_twice_counts_once(tmp_path: Path) -> None:
    solution = solve(
        tmp_path,
        main_eqsheet='include "a.eqsheet"\ninclude "b.eqsheet"\nx = a + b\n',
        a_eqsheet='include "b.eqsheet"\na = b + 1\n',
        b_eqsheet="b = 2\n",
    )
    assert solution["x"].si == 5


def test_paths_are_relative_to_the_worksheet_not_to_where_the_program_runs(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = written(tmp_path / "sheets", main_eqsheet='include "g.eqsheet"\n', g_eqsheet="rho = 2\n")
    monkeypatch.chdir(tmp_path)
    assert eqsheet.load(Path("sheets/main.eqsheet")).solve()["rho"].si == 2
    assert eqsheet.load(path).solve()["rho"].si == 2


@pytest.mark.parametrize(
    "files",
    [
        {"main_eqsheet": 'x = 1\ninclude "main.eqsheet"\n'},
        {"main_eqsheet": 'x = 1\ninclude "a.eqsheet"\n', "a_eqsheet": 'include "main.eqsheet"\n'},
        {
            "main_eqsheet": 'x = 1\ninclude "a.eqsheet"\n',
            "a_eqsheet": 'include "b.eqsheet"\n',
            "b_eqsheet": 'y = 2\ninclude "a.eqsheet"\n',
        },
    ],
    ids=["itself", "through another", "not by way of the worksheet"],
)
def test_a_circle_of_includes(tmp_path: Path, files: dict[str, str]) -> None:
    solution = solve(tmp_path, **files)
    assert codes(solution) == ["include-cycle"]


def test_the_circle_is_told_file_by_file(tmp_path: Path) -> None:
    (found,) = solve(
        tmp_path, main_eqsheet='include "a.eqsheet"\n', a_eqsheet='x = 1\ninclude "main.eqsheet"\n'
    ).diagnostics
    assert "main.eqsheet includes a.eqsheet includes main.eqsheet" in found.message
    assert found.span is not None
    assert (os.path.basename(found.span.source.name), found.span.line) == ("a.eqsheet", 2)


@pytest.mark.parametrize(
    "path", ["../other.eqsheet", "/etc/hostname", "~/x.eqsheet", "a/../../x.eqsheet", "a\\b.csv"]
)
def test_files_outside_are_refused(tmp_path: Path, path: str) -> None:
    written(tmp_path, other_eqsheet="x = 1\n")
    solution = solve(tmp_path / "sheets", main_eqsheet=f'y = 1\ninclude "{path}"\n')
    assert codes(solution) == ["path-not-inside"]


def test_a_link_to_the_outside_is_refused(tmp_path: Path) -> None:
    written(tmp_path, other_eqsheet="x = 1\n")
    (tmp_path / "sheets").mkdir()
    (tmp_path / "sheets" / "in.eqsheet").symlink_to(tmp_path / "other.eqsheet")
    solution = solve(tmp_path / "sheets", main_eqsheet='y = 1\ninclude "in.eqsheet"\n')
    assert codes(solution) == ["path-not-inside"]


@pytest.mark.parametrize(
    "text", ['include "gone.eqsheet"\n', 'rows n from "gone.csv"\n', 'include "folder"\n']
)
def test_what_cannot_be_read_is_told_where_it_is_named(tmp_path: Path, text: str) -> None:
    (tmp_path / "folder").mkdir()
    (found,) = solve(tmp_path, main_eqsheet="x = 1\n" + text).diagnostics
    assert found.code == "unreadable-attachment"
    assert found.span is not None
    assert found.span.line == 2


def test_slips_in_an_included_file_are_placed_there(tmp_path: Path) -> None:
    solution = solve(tmp_path, main_eqsheet='include "a.eqsheet"\nx = 1\n', a_eqsheet="y = 2 m\nz = = 3\n")
    (found,) = solution.diagnostics
    assert found.span is not None
    assert (os.path.basename(found.span.source.name), found.span.line) == ("a.eqsheet", 2)


def test_lines_of_an_included_file_are_told_from_the_worksheets_own(tmp_path: Path) -> None:
    solution = solve(tmp_path, main_eqsheet='include "a.eqsheet"\nx = 1\n', a_eqsheet="x = 2\n")
    (found,) = solution.diagnostics
    assert "line 2 and line 1 of " in found.message


NETWORK = """\
rows node from "nodes.csv"
rows line from "lines.csv"
for l in line:
    I[l] = (V[a[l]] - V[b[l]])/r[l]
V[B] = 10 V
"""


def test_tables_from_files(tmp_path: Path) -> None:
    solution = solve(
        tmp_path,
        main_eqsheet=NETWORK,
        nodes_csv="node; V in V\nA; 12\nB; -\n",
        lines_csv='line, a of node, b of node, r in Ohm\r\n"L 1", A, B, 4\r\n',
    )
    assert solution['I["L 1"]'].si == 0.5


@pytest.mark.parametrize(
    ("nodes", "code", "line", "guilty"),
    [
        ("node, V in V\nA, 12\nB\n", "row-length", 3, "B"),
        ("node, V in V\nA, 12, 3\nB, -\n", "row-length", 2, "A, 12, 3"),
        ("node, V in V\nA, 12\nB, -\nA, 3\n", "member-twice", 4, "A"),
        ("node, V in V\nA,\nB, -\n", "cell-not-a-number", 2, ""),
        ("node; V in V\nA; 1,5\nB; -\n", "cell-not-a-number", 2, "1,5"),
        ("node, V in V\nA, twelve\nB, -\n", "cell-not-a-number", 2, "twelve"),
        ("node, V in V\nA, nan\nB, -\n", "cell-not-a-number", 2, "nan"),
        ("node, V in V\nA, 1e999\nB, -\n", "cell-not-a-number", 2, "1e999"),
        ("node, V in parsec\nA, 12\nB, -\n", "unknown-unit", 1, "parsec"),
        ("node in V, V in V\nA, 12\nB, -\n", "csv-heading", 1, "node in V"),
        ("node, V in V, a of nodes\nA, 12, B\nB, -, A\n", "unknown-index-set", 1, "a of nodes"),
        ("node, V in V, c of node\nA, 12, C\nB, -, A\n", "no-such-member", 2, "C"),
        ("node, V in V, V in V\nA, 12, 3\nB, -, 3\n", "column-twice", 1, "V in V"),
        ("node, V in V\nA, 12\nB, -\n, 3\n", "member-name", 4, ", 3"),
    ],
)
def test_slips_in_a_table_name_file_row_and_column(
    tmp_path: Path, nodes: str, code: str, line: int, guilty: str
) -> None:
    solution = solve(
        tmp_path,
        main_eqsheet=NETWORK,
        nodes_csv=nodes,
        lines_csv="line, a of node, b of node, r in Ohm\nL1, A, B, 4\n",
    )
    found = next(d for d in solution.diagnostics if d.code == code)
    assert found.span is not None
    assert os.path.basename(found.span.source.name) == "nodes.csv"
    assert (found.span.line, found.span.text) == (line, guilty)
    if code == "cell-not-a-number":
        assert found.notes == ("row `A`, column `V`",)


def test_a_decimal_comma_is_told_as_one(tmp_path: Path) -> None:
    solution = solve(tmp_path, main_eqsheet='rows n from "n.csv"\n', n_csv="n; v\nA; 1,5\n")
    assert "write 1.5" in solution.diagnostics[0].help


def test_many_slips_of_one_kind_are_counted(tmp_path: Path) -> None:
    solution = solve(
        tmp_path,
        main_eqsheet='rows n from "n.csv"\n',
        n_csv="n, v\n" + "".join(f"A{i}\n" for i in range(1000)),
    )
    said = [d for d in solution.diagnostics if d.code == "row-length"]
    assert len(said) == 5
    assert said[-1].notes == ("there are 995 more of this kind in `n`",)


def test_a_file_of_100_megabytes_is_refused_at_once(tmp_path: Path) -> None:
    with (tmp_path / "big.csv").open("wb") as file:
        file.write(b"n, v\nA, 1\n")
        file.truncate(100_000_000)
    begin = time.perf_counter()
    solution = solve(tmp_path, main_eqsheet='x = 1\nrows n from "big.csv"\n')
    assert time.perf_counter() - begin < 2
    assert codes(solution) == ["unreadable-attachment"]
    assert "larger than" in solution.diagnostics[0].message
    assert "leave out the columns and rows" in solution.diagnostics[0].help


def test_what_is_no_text_is_refused(tmp_path: Path) -> None:
    written(tmp_path, main_eqsheet='x = 1\nrows n from "n.csv"\n')
    (tmp_path / "n.csv").write_bytes(b"n, v\nA, \xff\xfe\n")
    assert codes(eqsheet.load(tmp_path / "main.eqsheet").solve()) == ["unreadable-attachment"]


def test_switched_off_nothing_is_read(tmp_path: Path) -> None:
    solution = solve(tmp_path, main_eqsheet='x = 1\noff include "gone.eqsheet"\noff rows n from "gone.csv"\n')
    assert solution.status == "solved"


@pytest.mark.parametrize("text", ['include "pipe"\n', 'rows n from "pipe"\n'])
def test_a_pipe_is_no_file_and_is_not_waited_for(tmp_path: Path, text: str) -> None:
    os.mkfifo(tmp_path / "pipe")
    solution = solve(tmp_path, main_eqsheet=f"x = 1\n{text}")
    assert codes(solution) == ["unreadable-attachment"]
    assert "a pipe or a device" in solution.diagnostics[0].message


def test_the_first_heading_word_is_the_name_of_the_set(tmp_path: Path) -> None:
    solution = solve(tmp_path, main_eqsheet='rows pipe from "nodes.csv"\n', nodes_csv="node, L in m\nA, 1\n")
    assert codes(solution) == ["csv-heading"]
    assert solution.diagnostics[0].span is not None
    assert solution.diagnostics[0].span.text == "node"
    assert "`pipe`" in solution.diagnostics[0].message


@pytest.mark.parametrize(
    "table",
    [
        "n, {long} v\nA, 1\n",
        "n, v\nA, {long}\n",
        "n, v\n{long}, x\n",
        "n, v\n{long}, 1\n{long}, 2\n",
        "n, v of n\nA, {long}\n",
    ],
)
def test_long_cells_are_not_told_in_full(tmp_path: Path, table: str) -> None:
    solution = solve(tmp_path, main_eqsheet='rows n from "n.csv"\n', n_csv=table.format(long="w" * 100_000))
    assert codes(solution)
    for found in solution.diagnostics:
        assert all(len(text) < 300 for text in (found.message, found.help, *found.notes))


def test_a_decimal_comma_between_commas_is_guessed(tmp_path: Path) -> None:
    solution = solve(
        tmp_path,
        main_eqsheet='rows pipe from "p.csv"\ncurve h(Q in L/s) in m from "h.csv"\nx = h(1 L/s)\n',
        p_csv="pipe, L in m, D in mm\np1,2,5,100\n",
        h_csv="Q,H\n0,32\n1,5,30\n",
    )
    assert [d.code for d in solution.diagnostics] == ["row-length"] * 2
    assert {d.help.partition(":")[0] for d in solution.diagnostics} == {
        "if 2,5 is one number, write 2.5",
        "if 1,5 is one number, write 1.5",
    }


@pytest.mark.parametrize(
    ("cell", "cure"),
    [
        ("2 m", "`in m`"),
        ("1 000", "write 1000"),
        ("1'000.5", "write 1000.5"),
        ("1/2", "write 0.5"),
        ("−5", "write -5"),
        (".5", "write 0.5"),
        ("5.", "write 5"),
        ("１２", "digits 0 to 9"),
        ("none", "write `-`"),
    ],
)
def test_the_cure_of_a_cell_fits_what_it_holds(tmp_path: Path, cell: str, cure: str) -> None:
    solution = solve(tmp_path, main_eqsheet='rows n from "n.csv"\n', n_csv=f"n, v\nA, {cell}\n")
    assert codes(solution) == ["cell-not-a-number"]
    assert cure in solution.diagnostics[0].help


@pytest.mark.parametrize(
    ("heading", "cure"),
    [
        ("L [m]", "`L in m`"),
        ("D (mm)", "`D in mm`"),
        ("T in °C", "`T in degC`"),
        ("rho kg/m3", "`rho in kg/m^3`"),
        ("flow rate [m³/h]", "`flow_rate in m^3/h`"),
        ("pipe length", "`name in UNIT`"),
    ],
)
def test_the_cure_of_a_heading_is_the_heading(tmp_path: Path, heading: str, cure: str) -> None:
    solution = solve(tmp_path, main_eqsheet='rows n from "n.csv"\n', n_csv=f"n, {heading}\nA, 1\n")
    assert codes(solution) == ["csv-heading"]
    assert cure in solution.diagnostics[0].help


@pytest.mark.parametrize(
    ("named", "cure"),
    [("b.eqsheet", "write `lib/b.eqsheet`"), ("lib/bb.eqsheet", "`b.eqsheet`"), ("zz", "worksheet's folder")],
)
def test_where_a_missing_file_may_be(tmp_path: Path, named: str, cure: str) -> None:
    solution = solve(
        tmp_path,
        main_eqsheet='include "lib/a.eqsheet"\n',
        lib__a_eqsheet=f'include "{named}"\n',
        lib__b_eqsheet="y = 1\n",
    )
    assert codes(solution) == ["unreadable-attachment"]
    assert cure in solution.diagnostics[0].help
