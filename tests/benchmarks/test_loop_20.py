"""Twenty coupled equations: worksheet and hand-written script give the same answers."""

from __future__ import annotations

import subprocess
from typing import Any

import pytest
import script_20
from measure import LOOP, NOT_FOR_SOLVE, SCRIPT_COMMAND, SOLVE_COMMAND, packages_imported_by_solve

import eqsheet


def test_warm_solve_gives_the_answers_of_the_script(benchmark: Any) -> None:
    sheet = eqsheet.parse(LOOP.read_text(encoding="utf-8"))
    solution = benchmark(sheet.solve)
    expected = script_20.find_root()
    assert len(expected) == 20
    # The script's root finder judges its step by the norm of all unknowns; nine digits are sure in each.
    assert {name: solution[name].si for name in expected} == pytest.approx(expected, rel=1e-9)


def test_script_finds_a_root(benchmark: Any) -> None:
    values = benchmark(script_20.find_root)
    assert max(map(abs, script_20.residuals(list(values.values())))) < 1e-9


def test_program_run_cold(benchmark: Any) -> None:
    done = benchmark(subprocess.run, SOLVE_COMMAND, check=True, capture_output=True, text=True)
    assert "103.66" in done.stdout


def test_script_run_cold(benchmark: Any) -> None:
    done = benchmark(subprocess.run, SCRIPT_COMMAND, check=True, capture_output=True, text=True)
    assert "103.663 kW" in done.stdout


def test_solve_imports_no_package_it_does_not_need() -> None:
    imported = packages_imported_by_solve()
    assert "eqsheet" in imported
    assert not imported & set(NOT_FOR_SOLVE)
