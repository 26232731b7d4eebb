"""Sums and products of thousands of terms, written flat, go through every stage."""

from __future__ import annotations

import math
from pathlib import Path

import pytest

import eqsheet
from eqsheet.diagnostics.source import Source
from eqsheet.live.document import EditedWorksheet, open_text
from eqsheet.syntax.format import format_document
from eqsheet.syntax.nodes import Equation
from eqsheet.syntax.parse import parsed_text
from eqsheet.syntax.read import TextFile
from eqsheet.syntax.write import write_expression

TERMS = 2_400


def test_a_sum_of_knowns_is_solved_forwards_and_backwards() -> None:
    names = [f"a{i}" for i in range(TERMS)]
    values = "".join(f"{name} = {i} m\n" for i, name in enumerate(names) if i)
    forwards = eqsheet.parse(f"y = {' + '.join(names)}\na0 = 0 m\n{values}").solve()
    assert forwards["y"].si == sum(range(TERMS))
    backwards = eqsheet.parse(f"y = {'+'.join(names)}\ny = {sum(range(TERMS)) + 7} m\n{values}").solve()
    assert backwards["a0"].si == pytest.approx(7.0, rel=1e-12)


def test_a_long_equation_is_solved_by_iteration() -> None:
    text = f"{TERMS} = {'+'.join(['x^2', 'sin(x)/x'] * (TERMS // 2))}\nx near 1"
    x = eqsheet.parse(text).solve()["x"].si
    assert x**2 + math.sin(x) / x == pytest.approx(2.0, rel=1e-12)


def test_a_long_product_is_solved() -> None:
    text = f"y = {'*'.join(['a', 'b'] * (TERMS // 2))}\na = 2\nb = 0.5"
    assert eqsheet.parse(text).solve()["y"].si == 1.0


def test_long_sums_in_every_statement() -> None:
    run = " + ".join(["x"] * TERMS)
    text = f"""x = 1
define f(x) = {run}
y = f(2)
require {run} <= {TERMS}
z near {run}
z = {run}
p = 2^({"+".join(["1"] * 40)} - {"-".join(["1"] * 38)})
w[{"+".join(["1"] * TERMS)}] = 3
"""
    solution = eqsheet.parse(text).solve()
    assert solution.status == "solved"
    assert solution["y"].si == 2 * TERMS
    assert solution["p"].si == 2.0 ** (40 - 38)
    assert solution[f"w[{TERMS}]"].si == 3.0


def test_a_clash_in_a_long_sum_points_at_its_term() -> None:
    text = "\n".join([f"y = {' + '.join(['a'] * TERMS)} + b", "a = 2 m", "b = 3 kg", "y = 4 m"])
    solution = eqsheet.parse(text).solve()
    clashes = [d for d in solution.diagnostics if d.code == "dimension-clash"]
    assert [d.span.text for d in clashes if d.span] == ["b"]
    assert all(len(line) < 200 for d in clashes for line in (d.message, d.help or "", *d.notes))


def test_a_long_sum_of_readings_is_refused() -> None:
    solution = eqsheet.parse(f"T = 20 degC\ny = {'+'.join(['T'] * TERMS)}\ndT = 5 K").solve()
    assert [d.code for d in solution.diagnostics] == ["sum-of-readings"]


def test_a_long_sum_is_written_and_laid_out() -> None:
    text = f"y = {'+'.join(['a*b', '(c - d)/2'] * (TERMS // 4))}"
    equation = parsed_text(text).node
    assert isinstance(equation, Equation)
    assert write_expression(equation.right) == " + ".join(["a*b", "(c - d)/2"] * (TERMS // 4))
    laid_out = format_document(Source("sheet", text))
    assert laid_out.split() == f"y = {' + '.join(['a*b', '(c - d)/2'] * (TERMS // 4))}".split()


def test_a_worksheet_with_a_long_definition_is_solved_again_after_an_edit(tmp_path: Path) -> None:
    lines = [f"define f(x) = {'+'.join(['x'] * TERMS)}", "a = 2", f"y = f(a) + {'+'.join(['a'] * TERMS)}"]
    path = tmp_path / "long.eqsheet"
    path.write_text("\n".join(lines), encoding="utf-8")
    file = open_text(str(path))
    assert isinstance(file, TextFile)
    sheet = EditedWorksheet(file, str(path))
    assert sheet.solution["y"].si == 4 * TERMS
    sheet.type("a = 3")
    assert sheet.solution["y"].si == 6 * TERMS
