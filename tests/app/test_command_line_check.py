"""``eqsheet check`` and ``eqsheet blocks``: verdicts, and the order of solution."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from eqsheet.app.main import main

LOOP = """\
dP = f*(L/D)*rho*v^2/2
1/sqrt(f) = -2*log10(eps/(3.7*D) + 2.51/(Re*sqrt(f))) valid Re > 4000
Re = rho*v*D/mu
Q = v*pi*D^2/4
dP = 24 kPa
L = 120 m
D = 52.5 mm
eps = 0.045 mm
rho = 998 kg/m^3
mu = 1 mPa*s
f near 0.02
v near 1 m/s
"""


@pytest.fixture
def loop(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> str:
    monkeypatch.chdir(tmp_path)
    Path("loop.eqsheet").write_text(LOOP, encoding="utf-8")
    return "loop.eqsheet"


def test_check_says_one_line_where_all_is_well(loop: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["check", loop]) == 0
    assert capsys.readouterr() == ("loop.eqsheet: solved\n", "")


def test_check_prints_no_table_but_the_limits_that_fail(
    loop: str, capsys: pytest.CaptureFixture[str]
) -> None:
    limits = ["--with", "require v <= 0.5 m/s", "--with", "require Q <= 5 L/s"]
    assert main(["check", loop, *limits]) == 1
    out = capsys.readouterr().out
    assert "v <= 0.5 m/s" in out
    assert "Q <= 5 L/s" not in out
    assert "eps" not in out


def test_leaving_a_validity_range_fails_the_check_but_not_the_solution(
    loop: str, capsys: pytest.CaptureFixture[str]
) -> None:
    thick = ["--with", "mu = 100 mPa*s"]
    assert main(["solve", loop, *thick]) == 0
    assert "warning: the solution leaves the range `Re > 4000`" in capsys.readouterr().err
    assert main(["check", loop, *thick]) == 1
    assert "[outside-validity]" in capsys.readouterr().err
    assert main(["check", loop, *thick, "--json"]) == 1
    assert json.loads(capsys.readouterr().out)["status"] == "solved"


def test_blocks_in_order_with_lines_method_and_origin(loop: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["blocks", loop]) == 0
    first, second = capsys.readouterr().out.splitlines()
    assert first.split()[:10] == ["1", "Re,", "f,", "v", "lines", "1,", "2,", "3", "3", "together,"]
    assert first.endswith("from D, L, dP, eps, mu, rho")
    assert second.split() == ["2", "Q", "line", "4", "closed", "form", "from", "D,", "v"]


def test_blocks_as_json(loop: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["blocks", loop, "--json"]) == 0
    found = json.loads(capsys.readouterr().out)
    assert list(found) == ["format", "worksheet", "status", "blocks", "diagnostics"]
    first, second = found["blocks"]
    assert sorted(first) == ["after", "depends", "lines", "method", "number", "solved", "unknowns"]
    assert (first["unknowns"], first["lines"], first["after"]) == (["Re", "f", "v"], [1, 2, 3], [])
    assert (second["unknowns"], second["lines"], second["after"]) == (["Q"], [4], [1])
    assert second["depends"] == ["D", "v"]
    assert second["method"] == "closed form"


def test_blocks_follow_the_knowns(loop: str, capsys: pytest.CaptureFixture[str]) -> None:
    """With the flow given instead of the pressure drop, the loop falls apart into single steps."""
    swapped = ["--free", "dP", "--with", "Q = 2 L/s", "--json"]
    assert main(["blocks", loop, *swapped]) == 0
    found = json.loads(capsys.readouterr().out)
    assert found["blocks"][0]["unknowns"] == ["v"]
    assert all(len(b["unknowns"]) == 1 for b in found["blocks"])
    assert found["blocks"][-1]["unknowns"] == ["dP"]


def test_blocks_after_a_failed_one_are_not_reached(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = tmp_path / "stuck.eqsheet"
    path.write_text("x^2 = -1\ny = 2*x\nz = 3\nw = 2*z\n", encoding="utf-8")
    assert main(["blocks", str(path), "--json"]) == 4
    found = json.loads(capsys.readouterr().out)
    assert {b["unknowns"][0]: b["solved"] for b in found["blocks"]} == {"x": False, "y": False, "w": True}
    assert next(b for b in found["blocks"] if b["unknowns"] == ["y"])["method"] is None
