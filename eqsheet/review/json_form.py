"""A solution as one JSON object (format 1)."""

from __future__ import annotations

import json
import math
from typing import Any

from eqsheet.diagnostics.json import as_data
from eqsheet.syntax.nodes import Statement
from eqsheet.worksheet.solution import BlockReport, LimitReport, QuantityValue, Solution

FORMAT = 1


def solution_text(solution: Solution) -> str:
    """The object on one line; never holds NaN or infinity."""
    return json.dumps(solution_data(solution), ensure_ascii=False, allow_nan=False)


def solution_data(solution: Solution) -> dict[str, Any]:
    """The object as a dict."""
    return {
        "format": FORMAT,
        "worksheet": solution.worksheet,
        "status": solution.status,
        "quantities": {name: _quantity(value) for name, value in solution.items()},
        "blocks": [_block(block) for block in solution.blocks if block.solved],
        "limits": [_limit(limit) for limit in solution.limits],
        "diagnostics": [as_data(diagnostic) for diagnostic in solution.diagnostics],
        "best": {name: _finite(value.value) for name, value in solution.best.items()},
        "timing": {stage: round(seconds, 7) for stage, seconds in solution.timing.items()},
    }


def _file(statement: Statement | None) -> dict[str, Any]:
    """The file that a line stands in, where that is not the worksheet itself."""
    if statement is None or not statement.source.attached:
        return {}
    return {"file": statement.source.name}


def _quantity(value: QuantityValue) -> dict[str, Any]:
    return {
        "value": _finite(value.value),
        "unit": value.unit,
        "si": _finite(value.si),
        "kind": value.kind,
        "from": "known" if value.known else "block",
        "block": value.block,
        "line": value.line,
        **_file(value.statement),
        "digits": value.digits,
    }


def _block(block: BlockReport) -> dict[str, Any]:
    return {
        "number": block.number,
        "unknowns": list(block.unknowns),
        **_lines(block),
        "method": block.method,
        "iterations": block.iterations,
        "residual": _finite(block.residual),
    }


def _lines(block: BlockReport) -> dict[str, Any]:
    """The lines of a block, with their files where one of these is not the worksheet itself."""
    if not any(statement.source.attached for statement in block.statements):
        return {"lines": list(block.lines)}
    places = dict.fromkeys((s.line.line, s.source.name) for s in block.statements if s.source.numbered)
    return {"lines": [line for line, _ in places], "files": [file for _, file in places]}


def _limit(limit: LimitReport) -> dict[str, Any]:
    return {
        "line": limit.line,
        **_file(limit.statement),
        "text": limit.text,
        "holds": limit.holds,
        "margin": None if limit.margin is None else _finite(limit.margin),
        "slack": _finite(limit.slack),
        "unit": limit.unit,
    }


def _finite(value: float) -> float | None:
    return value if math.isfinite(value) else None
