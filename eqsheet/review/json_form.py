"""A solution as one JSON object (format 1)."""

from __future__ import annotations

import json
import math
from typing import Any

from eqsheet.diagnostics.json import as_data
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


def _quantity(value: QuantityValue) -> dict[str, Any]:
    return {
        "value": _finite(value.value),
        "unit": value.unit,
        "si": _finite(value.si),
        "kind": value.kind,
        "from": "known" if value.known else "block",
        "block": value.block,
        "line": value.line,
        "digits": value.digits,
    }


def _block(block: BlockReport) -> dict[str, Any]:
    return {
        "number": block.number,
        "unknowns": list(block.unknowns),
        "lines": list(block.lines),
        "method": block.method,
        "iterations": block.iterations,
        "residual": _finite(block.residual),
    }


def _limit(limit: LimitReport) -> dict[str, Any]:
    return {
        "line": limit.line,
        "text": limit.text,
        "holds": limit.holds,
        "margin": None if limit.margin is None else _finite(limit.margin),
        "slack": _finite(limit.slack),
        "unit": limit.unit,
    }


def _finite(value: float) -> float | None:
    return value if math.isfinite(value) else None
