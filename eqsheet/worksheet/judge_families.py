"""Limits on large families judged as arrays, by the rules of `judge`."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from eqsheet.model.array_evidence import ArrayEvidence, evaluate_arrays_with_evidence
from eqsheet.model.equation_group import BoundFormula, EquationGroup, LimitGroup
from eqsheet.model.evaluate import ROUNDING, evaluate_arrays
from eqsheet.model.system import LimitItem
from eqsheet.model.tape import Tape, operands_of
from eqsheet.worksheet.judge import difference_text, judge_limit, limit_side, operands_compared, slack_unit
from eqsheet.worksheet.limit_reports import JudgedFamily, LimitReports
from eqsheet.worksheet.prepare import Prepared
from eqsheet.worksheet.run import Run
from eqsheet.worksheet.solution import BranchReport, LimitReport

Array = NDArray[np.float64]


def judge_limits_of_families(prepared: Prepared, run: Run) -> LimitReports:
    """As `judge_limits`."""
    values, errors = np.array(run.values), np.array(run.errors)
    parts: list[LimitReport | JudgedFamily] = []
    for part in prepared.system.limit_parts:
        if isinstance(part, LimitItem):
            report = judge_limit(prepared, run, part)
            parts += [] if report is None else [report]
        else:
            judged = _judged(prepared, part, values, errors)
            parts += [judged] if len(judged) else []
    return LimitReports(parts)


def _judged(prepared: Prepared, group: LimitGroup, values: Array, errors: Array) -> JudgedFamily:
    bound, item = group.bound, group.item(0)
    there = np.flatnonzero(np.isfinite(values[bound.numbers]).all(axis=1))
    evidence = _evidence(bound, there, values, errors)
    judged = np.isfinite(evidence.values).all(axis=0)
    if not judged.all():
        there = there[judged]
        evidence = _evidence(bound, there, values, errors)
    operands = operands_compared(item)
    unit, relative = slack_unit(prepared, item)
    holds = np.ones(len(there), dtype=bool)
    slack, scale = np.full(len(there), np.inf), np.ones(len(there))
    for position, operator in enumerate(item.operators):
        own, size, room = _link(item, operator, operands, position, evidence)
        holds &= own >= -room
        # What is no number fails, and counts as the smallest.
        smaller = ~(own >= slack)
        slack, scale = np.where(smaller, own, slack), np.where(smaller, size, scale)
    # Past the limit by rounding alone is at the limit.
    slack = np.where(holds, np.maximum(slack, 0.0), slack)
    with np.errstate(all="ignore"):
        margin = np.where((scale != 0.0) & relative, slack / np.abs(scale), np.nan)
    entries = there.tolist()
    return JudgedFamily(
        prepared.system.statements[item.place.statement],
        lambda entry: group.text(entries[entry]),
        holds,
        margin,
        slack,
        unit,
        difference_text(unit.text, prepared),
    )


def _evidence(bound: BoundFormula, there: NDArray[np.int64], values: Array, errors: Array) -> ArrayEvidence:
    numbers = bound.numbers[there].T
    return evaluate_arrays_with_evidence(
        bound.formula.tape,
        tuple(values[numbers]),
        bound.literals_of(there),
        tuple(errors[numbers]),
        len(there),
    )


def _link(
    item: LimitItem, operator: str, operands: tuple[int, ...], position: int, evidence: ArrayEvidence
) -> tuple[Array, Array, Array]:
    """Slack of one comparison, the limit it is relative to, and the forward error of its sides."""
    left, right = evidence.values[position], evidence.values[position + 1]
    room = evidence.errors[position] + evidence.errors[position + 1] + _as_typed(left) + _as_typed(right)
    if operator == "=":
        allowed = np.abs(evidence.values[-1])
        if item.relative:
            allowed = allowed * np.abs(right)
        return allowed - np.abs(left - right), allowed, room
    side = limit_side(item, operands[position], operands[position + 1])
    limit = left if side == operands[position] else right
    return (right - left if operator in ("<", "<=") else left - right), limit, room


def _as_typed(value: Array) -> Array:
    return np.where(value == np.floor(value), 0.0, 2.0 * ROUNDING * np.abs(value))


def branches_of_family(prepared: Prepared, run: Run, group: EquationGroup) -> list[BranchReport]:
    """Which branches the members take, each told once with the number of members: see `branches_taken`."""
    bound = group.as_written
    values = np.array(run.values)
    there = np.flatnonzero(np.isfinite(values[bound.numbers]).all(axis=1))
    tape = bound.formula.tape
    with np.errstate(all="ignore"):
        results = evaluate_arrays(tape, list(values[bound.numbers[there].T]), bound.literals_of(there))
    statement = prepared.system.statements[group.place.statement]
    found: list[tuple[int, int, BranchReport]] = []
    for condition, reached in _reached(tape, results, len(there)).items():
        truth = np.broadcast_to(np.asarray(results[condition], dtype=float), (len(there),))
        start, end = bound.formula.places[condition]
        text = " ".join(statement.line.text[start:end].split())
        for holds in (True, False):
            alike = np.flatnonzero(reached & (truth == float(holds)))
            if len(alike):
                first = int(there[alike[0]])
                report = BranchReport(statement, text, holds, group.member(first), len(alike))
                found.append((first, condition, report))
    return [report for _, _, report in sorted(found, key=lambda one: one[:2])]


def _reached(tape: Tape, results: Sequence[Any], members: int) -> dict[int, NDArray[np.bool_]]:
    """The instructions that are conditions, in order, and for which members the outputs pass through them."""
    use = [np.zeros(members, dtype=bool) for _ in tape.instructions]
    for output in tape.outputs:
        use[output][:] = True
    reached: dict[int, NDArray[np.bool_]] = {}
    for i in range(len(use) - 1, -1, -1):
        if tape.instructions[i][0] != "if":
            for operand in operands_of(tape.instructions[i]):
                use[operand] |= use[i]
            continue
        _, condition, a, b = tape.instructions[i]
        truth = np.asarray(results[condition], dtype=float)
        use[condition] |= use[i]
        use[a] |= use[i] & (truth == 1.0)
        use[b] |= use[i] & (truth != 1.0)
        reached[condition] = reached.get(condition, np.zeros(members, dtype=bool)) | use[i]
    return dict(sorted(reached.items()))
