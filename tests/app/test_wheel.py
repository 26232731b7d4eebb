"""An installed wheel works by itself: built from the checkout, installed into a fresh environment, run elsewhere."""

from __future__ import annotations

import json
import os
import subprocess
import sys
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
QUIET = ("--quiet", "--disable-pip-version-check")


def call(*command: str | Path, cwd: Path) -> str:
    """Standard output of a command that must succeed, run without a way to the checkout."""
    clean = {name: value for name, value in os.environ.items() if name != "PYTHONPATH"}
    done = subprocess.run(
        [str(part) for part in command],
        capture_output=True,
        text=True,
        cwd=cwd,
        env=clean,
        timeout=300,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    return done.stdout


@pytest.fixture(scope="module")
def wheel(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("wheel")
    call(sys.executable, "-m", "pip", "wheel", *QUIET, "--no-deps", "-w", folder, ROOT, cwd=folder)
    (found,) = folder.glob("eqsheet-*.whl")
    return found


def test_what_the_wheel_carries(wheel: Path) -> None:
    names = set(zipfile.ZipFile(wheel).namelist())
    assert {
        "eqsheet/py.typed",
        "eqsheet/LICENSE",
        "eqsheet/grammar/eqsheet.lark",
        "eqsheet/grammar/units.toml",
        "eqsheet/diagnostics/pages/under-determined.md",
    } <= names
    assert {name.split("/")[0].split("-")[0] for name in names} == {"eqsheet"}


def test_a_sample_is_solved_from_another_directory(wheel: Path, tmp_path: Path) -> None:
    environment = tmp_path / "environment"
    call(sys.executable, "-m", "venv", environment, cwd=tmp_path)
    programs = environment / ("Scripts" if os.name == "nt" else "bin")
    call(programs / "python", "-m", "pip", "install", *QUIET, wheel, cwd=tmp_path)
    elsewhere = tmp_path / "elsewhere"
    elsewhere.mkdir()
    sample = ROOT / "samples" / "penstock.eqsheet"
    solution = json.loads(call(programs / "eqsheet", "solve", "--json", sample, cwd=elsewhere))
    assert solution["status"] == "solved"
    # P = eta*rho*g*Q*(H - h_f), worked out by hand from the knowns of the sample and the flow found.
    flow, lost = (solution["quantities"][name]["si"] for name in ("Q", "h_f"))
    assert 0.78 * 999.7 * 9.80665 * flow * (85 - lost) == pytest.approx(50e3, rel=1e-12)
    assert call(programs / "eqsheet", "--version", cwd=elsewhere) == "eqsheet 0.1.0\n"
    page = "from eqsheet.diagnostics.codes import page; print(page('under-determined').code)"
    assert call(programs / "python", "-c", page, cwd=elsewhere) == "under-determined\n"
