"""Which branch each condition of a worksheet takes at its solution."""

from __future__ import annotations

import math

from eqsheet.model.branches import conditions_met
from eqsheet.model.specialise import conditions
from eqsheet.worksheet.prepare import Prepared
from eqsheet.worksheet.run import Run
from eqsheet.worksheet.solution import BranchReport


def branches_taken(prepared: Prepared, run: Run) -> tuple[BranchReport, ...]:
    """A report for each condition that decides an equation, in the order of the text.

    Equations with a quantity that was not found are left out.
    """
    system = prepared.system
    found: dict[tuple[int, int], BranchReport] = {}
    for item in system.written:
        formula = item.formula
        if not conditions(formula.tape):
            continue
        if not all(math.isfinite(run.values[q]) for q in formula.quantities):
            continue
        statement = system.statements[item.place.statement]
        for instruction, holds in conditions_met(formula, lambda q: run.values[q]):
            start, end = formula.places[instruction]
            text = " ".join(statement.line.text[start:end].split())
            report = BranchReport(statement, text, holds, item.member)
            found[item.place.statement, len(found)] = report
    for group in system.groups:
        if conditions(group.as_written.formula.tape):
            from eqsheet.worksheet.judge_families import branches_of_family

            for report in branches_of_family(prepared, run, group):
                found[group.place.statement, len(found)] = report
    return tuple(report for _, report in sorted(found.items(), key=lambda pair: pair[0]))
