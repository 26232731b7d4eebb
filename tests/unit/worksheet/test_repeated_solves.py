"""What is kept and written out for a worksheet solved again and again leaves no trace in its solutions."""

from __future__ import annotations

import math
from concurrent.futures import ThreadPoolExecutor

import pytest

import eqsheet
from eqsheet.solve import ladder
from eqsheet.worksheet import solve_block
from eqsheet.worksheet.block_order import blocks_in_order
from eqsheet.worksheet.block_plan import plan_of
from eqsheet.worksheet.guesses import constant_guesses
from eqsheet.worksheet.repeated_blocks import _SOLVES_WORTH_WRITING

# Two pipes in parallel share a flow: three unknowns solved together, and two that follow.
PIPES = """
Q = 12 L/s
k_1 = {k_1} Pa*s^2/m^6
k_2 = 9e8 Pa*s^2/m^6
rho = 998 kg/m^3
Q_1 + Q_2 = Q
dp = k_1*Q_1^2 + 2e5 Pa*s/m^3 * Q_1
dp = k_2*Q_2^1.9*(1 m^3/s)^0.1
P = dp*Q
h = dp/(rho*const.g_n)
Q_1 near 5 L/s within 0 L/s ..
Q_2 within 0 L/s .. 12 L/s
"""
OFTEN = _SOLVES_WORTH_WRITING + 4


def outcome(solution: eqsheet.Solution) -> dict[str, tuple[float, float, int]]:
    """Value, error and digits of each quantity."""
    assert solution.solved
    return {name: (v.si, v.error, v.digits) for name, v in solution.items()}


def test_solved_often_is_solved_alike_to_the_last_bit() -> None:
    sheet = eqsheet.parse(PIPES.format(k_1="4e8"))
    first = outcome(sheet.solve())
    for _ in range(OFTEN):
        again = sheet.solve()
        assert outcome(again) == first
        assert again.blocks[0].method == "newton"


def test_changed_after_often_is_that_of_a_fresh_worksheet() -> None:
    sheet = eqsheet.parse(PIPES.format(k_1="4e8"))
    for _ in range(OFTEN):
        sheet.solve()
    for value in ("1e8", "6.5e8", "3e9"):
        changed = sheet.solve([f"k_1 = {value} Pa*s^2/m^6"])
        assert outcome(changed) == outcome(eqsheet.parse(PIPES.format(k_1=value)).solve())


def test_often_takes_the_written_step(monkeypatch: pytest.MonkeyPatch) -> None:
    sheet = eqsheet.parse(PIPES.format(k_1="5e8"))
    taken = []
    walk = ladder.written_newton

    def counted(*arguments: object) -> object:
        found = walk(*arguments)  # type: ignore[arg-type]  # passed on as they come
        taken.append(found)
        return found

    monkeypatch.setattr(ladder, "written_newton", counted)
    for _ in range(OFTEN):
        sheet.solve()
    assert len(taken) >= 3
    assert None not in taken


def test_starts_are_told_alike_from_what_is_kept(monkeypatch: pytest.MonkeyPatch) -> None:
    sheet = eqsheet.parse(PIPES.format(k_1="7e8"))
    starts = []
    tell = solve_block.starting_values

    def kept(*arguments: object) -> object:
        start = tell(*arguments)  # type: ignore[arg-type]  # passed on as they come
        starts.append(start)
        return start

    monkeypatch.setattr(solve_block, "starting_values", kept)
    for _ in range(OFTEN):
        sheet.solve()
    assert starts[-1].assumed == starts[0].assumed
    assert starts[-1].values == pytest.approx(starts[0].values, rel=1e-14)
    assert starts[-1].magnitude == pytest.approx(starts[0].magnitude, rel=1e-14)
    assert (starts[-1].lower, starts[-1].upper) == (starts[0].lower, starts[0].upper)


def test_guesses_of_knowns_are_worked_out_each_time() -> None:
    sheet = eqsheet.parse("a = 2 m\nx^3 + x/1 m^-2 = 3*a^3\nx near 2*a")
    prepared = sheet.prepare()
    assert constant_guesses(prepared.system, prepared.kinds) is None
    literal = eqsheet.parse("a = 2 m\nx^3 + x/1 m^-2 = 3*a^3\nx near 4 m").prepare()
    kept = constant_guesses(literal.system, literal.kinds)
    assert kept is not None
    assert kept is constant_guesses(literal.system, literal.kinds)
    assert list(kept.near.values()) == [4.0]


def test_guess_outside_its_bounds_is_told_each_time() -> None:
    sheet = eqsheet.parse("x*y = 6 m^2\nx + y = 5 m\nx near 9 m within 0 m .. 2.5 m")
    for _ in range(3):
        assert "guess-outside-bounds" in [d.code for d in sheet.solve().diagnostics]


def test_plans_are_told_apart_by_the_formulas_themselves() -> None:
    prepared = eqsheet.parse(PIPES.format(k_1="4e8")).prepare()
    block = blocks_in_order(prepared)[0]
    formulas = [prepared.formulas[e] for e in block.equations]
    plan = plan_of(formulas, block.unknowns)
    assert plan is plan_of(list(formulas), block.unknowns)
    assert plan.plain
    assert not plan.linear
    other = eqsheet.parse(PIPES.format(k_1="4e8")).prepare()
    assert plan is not plan_of([other.formulas[e] for e in block.equations], block.unknowns)


def test_knowns_have_no_block_in_the_order() -> None:
    blocks = blocks_in_order(eqsheet.parse(PIPES.format(k_1="4e8")).prepare())
    assert [block.number for block in blocks] == [1, 2, 3]
    assert [len(block.unknowns) for block in blocks] == [3, 1, 1]
    assert blocks[1].after == (1,)


def test_parts_of_a_solution_are_made_once() -> None:
    solution = eqsheet.parse(PIPES.format(k_1="4e8")).solve()
    assert solution["dp"] is solution["dp"]
    assert solution.blocks[0] is solution.blocks[0]
    assert math.isfinite(solution["P"].value)


def test_worksheets_solved_in_threads_keep_their_own_values() -> None:
    values = [f"{k}e8" for k in range(1, 9)]
    wanted = [outcome(eqsheet.parse(PIPES.format(k_1=value)).solve()) for value in values]
    sheets = [eqsheet.parse(PIPES.format(k_1=value)) for value in values]
    with ThreadPoolExecutor(4) as pool:
        for _ in range(OFTEN):
            found = list(pool.map(lambda sheet: outcome(sheet.solve()), sheets))
            assert found == wanted
