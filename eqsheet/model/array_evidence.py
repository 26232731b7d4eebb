"""Values, sizes and error bounds of a tape over arrays of members: `evaluate_with_evidence` for families.

The rules are those of `evaluate`, operation by operation; what has no rule here is taken entry by entry from
there, so that the two cannot differ in meaning.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

from eqsheet.model.evaluate import evaluate_arrays, evaluate_with_evidence
from eqsheet.model.functions import as_float
from eqsheet.model.tape import Tape

Array: TypeAlias = NDArray[np.float64]

ROUNDING = 2.0**-53
_UNDERFLOW = 2.0**-1074
_TRUTH = frozenset({"lt", "le", "eq", "and", "or", "not"})


@dataclass(frozen=True)
class ArrayEvidence:
    """Per output of the tape: values, sizes and error bounds, each of shape (members,)."""

    values: tuple[Array, ...]
    sizes: tuple[Array, ...]
    errors: tuple[Array, ...]


def evaluate_arrays_with_evidence(
    tape: Tape,
    quantities: Sequence[Array],
    literals: Sequence[Array | float],
    errors: Sequence[Array],
    members: int,
) -> ArrayEvidence:
    """Evidence of the outputs of a tape.

    Parameters
    ----------
    quantities, literals
        Values in SI, an array (members,) each; literals may be plain floats.
    errors
        Bound of the absolute error of each quantity, as arrays (members,).
    """
    instructions = tape.instructions
    if any(i[0] not in _RULES and i[0] not in _LEAVES and i[0] not in _TRUTH for i in instructions):
        return _entry_by_entry(tape, quantities, literals, errors, members)
    with np.errstate(all="ignore"):
        raw = evaluate_arrays(tape, quantities, literals)
        values = [np.broadcast_to(np.asarray(v), (members,)) for v in raw]
        sizes: list[Any] = []
        bounds: list[Any] = []
        for i, instruction in enumerate(instructions):
            operation = instruction[0]
            v = values[i]
            size: Any
            bound: Any
            if operation in _TRUTH:
                size, bound = 0.0, 0.0
            elif operation == "quantity":
                size, bound = np.abs(v), np.abs(errors[instruction[1]])
            elif operation in _LEAVES:
                size, bound = np.abs(v), _rounding(v) if operation == "const" else _as_typed(v)
            else:
                size, bound = _RULES[operation](instruction, v, values, sizes, bounds)
            sizes.append(size)
            bounds.append(bound)
    wide = [
        tuple(np.array(np.broadcast_to(np.asarray(column[o], dtype=float), (members,))) for o in tape.outputs)
        for column in (values, sizes, bounds)
    ]
    return ArrayEvidence(wide[0], wide[1], wide[2])


_LEAVES = frozenset({"quantity", "literal", "const"})


def _entry_by_entry(
    tape: Tape,
    quantities: Sequence[Array],
    literals: Sequence[Array | float],
    errors: Sequence[Array],
    members: int,
) -> ArrayEvidence:
    found = [np.empty((3, members)) for _ in tape.outputs]
    own = [np.broadcast_to(np.asarray(literal, dtype=float), (members,)) for literal in literals]
    for entry in range(members):
        evidence = evaluate_with_evidence(
            tape,
            [float(q[entry]) for q in quantities],
            [float(literal[entry]) for literal in own],
            [float(e[entry]) for e in errors],
        )
        for column, o in zip(found, tape.outputs):
            column[:, entry] = float(evidence.values[o]), evidence.sizes[o], evidence.errors[o]
    return ArrayEvidence(*(tuple(column[k] for column in found) for k in range(3)))


def _rounding(v: Array, units: float = 1.0) -> Array:
    return np.where(v != 0.0, units * (ROUNDING * np.abs(v) + _UNDERFLOW), 0.0)


def _as_typed(v: Array) -> Array:
    """As `as_typed` of `evaluate`."""
    return np.where(v % 1.0 != 0.0, 2.0 * ROUNDING * np.abs(v), 0.0)


def _product(a: Any, b: Any) -> Any:
    """a*b where nothing, 0, outweighs anything, even infinity."""
    return np.where((np.asarray(a) == 0.0) | (np.asarray(b) == 0.0), 0.0, np.multiply(a, b))


def _sum(instruction: Any, v: Array, values: Any, sizes: Any, bounds: Any) -> tuple[Any, Any]:
    _, a, b = instruction
    size = np.maximum(np.maximum(sizes[a], sizes[b]), np.abs(v))
    return size, bounds[a] + bounds[b] + _rounding(v)


def _neg(instruction: Any, v: Array, values: Any, sizes: Any, bounds: Any) -> tuple[Any, Any]:
    return sizes[instruction[1]], bounds[instruction[1]]


def _mul(instruction: Any, v: Array, values: Any, sizes: Any, bounds: Any) -> tuple[Any, Any]:
    _, a, b = instruction
    error = (
        _product(np.abs(values[a]), bounds[b])
        + _product(np.abs(values[b]), bounds[a])
        + _product(bounds[a], bounds[b])
    )
    return _product(sizes[a], sizes[b]), error + _rounding(v)


def _div(instruction: Any, v: Array, values: Any, sizes: Any, bounds: Any) -> tuple[Any, Any]:
    _, a, b = instruction
    below = np.abs(values[b])
    room = below - bounds[b]
    spread = bounds[a] + _product(np.abs(v), bounds[b])
    error = np.where(spread == 0.0, 0.0, np.where(room > 0.0, spread / room, np.inf))
    return _product(sizes[a] / below, sizes[b] / below), error + _rounding(v)


def _power(instruction: Any, v: Array, values: Any, sizes: Any, bounds: Any) -> tuple[Any, Any]:
    _, a, exponent = instruction
    r = as_float(exponent)
    base = np.abs(values[a])
    slope = abs(r) * np.abs(np.power(base, r - 1.0))
    ratio = np.where(base > 0.0, sizes[a] / base, 1.0)
    own = np.abs(v) * np.power(ratio, abs(r))
    size = np.where(v == 0.0, np.power(sizes[a], r) if r > 0 else 0.0, own)
    inexact: Any = 0.0
    if r != exponent:
        inexact = np.where(base > 0.0, np.abs(r * v * np.log(base)) * ROUNDING, 0.0)
    return size, _product(slope, bounds[a]) + _rounding(v, 4.0) + inexact


def _strip(instruction: Any, v: Array, values: Any, sizes: Any, bounds: Any) -> tuple[Any, Any]:
    _, a, unit = instruction
    factor = abs(unit.factor)
    rounding = _rounding(values[a] - unit.origin) / factor if unit.origin else 0.0
    size = np.maximum(np.maximum(sizes[a], abs(unit.origin)) / factor, np.abs(v))
    return size, bounds[a] / factor + rounding + _rounding(v)


def _attach(instruction: Any, v: Array, values: Any, sizes: Any, bounds: Any) -> tuple[Any, Any]:
    _, a, unit = instruction
    factor = abs(unit.factor)
    rounding = _rounding(values[a] * factor) if unit.origin else 0.0
    size = np.maximum(np.maximum(sizes[a] * factor, abs(unit.origin)), np.abs(v))
    return size, bounds[a] * factor + rounding + _rounding(v)


def _smaller(instruction: Any, v: Array, values: Any, sizes: Any, bounds: Any) -> tuple[Any, Any]:
    _, a, b = instruction
    first = v == values[a]
    own = np.where(first, bounds[a], bounds[b])
    # Which one is chosen is not in doubt where they are further apart than both errors.
    sure = np.abs(values[a] - values[b]) > bounds[a] + bounds[b]
    return np.where(first, sizes[a], sizes[b]), np.where(sure, own, np.maximum(bounds[a], bounds[b]))


def _if(instruction: Any, v: Array, values: Any, sizes: Any, bounds: Any) -> tuple[Any, Any]:
    _, c, a, b = instruction
    taken = np.asarray(values[c], dtype=float) == 1.0
    return np.where(taken, sizes[a], sizes[b]), np.where(taken, bounds[a], bounds[b])


def _abs(instruction: Any, v: Array, values: Any, sizes: Any, bounds: Any) -> tuple[Any, Any]:
    return sizes[instruction[1]], bounds[instruction[1]]


def _sqrt(instruction: Any, v: Array, values: Any, sizes: Any, bounds: Any) -> tuple[Any, Any]:
    a = instruction[1]
    base = values[a]
    reach = np.sqrt(np.maximum(base - bounds[a], 0.0))
    spread = np.minimum(bounds[a] / (v + reach), np.sqrt(bounds[a]))
    spread = np.where(np.asarray(bounds[a]) == 0.0, 0.0, spread)
    ratio = np.where(base != 0.0, sizes[a] / np.abs(base), 1.0)
    size = np.where(v == 0.0, np.sqrt(sizes[a]), np.abs(v) * np.sqrt(ratio))
    return size, spread + _rounding(v)


def _function(slope: Callable[[Array, Array], Array]) -> Callable[..., tuple[Any, Any]]:
    def rule(instruction: Any, v: Array, values: Any, sizes: Any, bounds: Any) -> tuple[Any, Any]:
        a = instruction[1]
        steep = np.abs(slope(values[a], v))
        return np.maximum(np.abs(v), _product(steep, sizes[a])), _product(steep, bounds[a]) + _rounding(
            v, 4.0
        )

    return rule


_RULES: dict[str, Callable[..., tuple[Any, Any]]] = {
    "add": _sum,
    "sub": _sum,
    "neg": _neg,
    "mul": _mul,
    "div": _div,
    "power": _power,
    "strip": _strip,
    "attach": _attach,
    "min": _smaller,
    "max": _smaller,
    "if": _if,
    "abs": _abs,
    "sqrt": _sqrt,
    "exp": _function(lambda a, v: v),
    "ln": _function(lambda a, v: 1.0 / a),
    "log10": _function(lambda a, v: 1.0 / (a * math.log(10.0))),
    "sin": _function(lambda a, v: np.cos(a)),
    "cos": _function(lambda a, v: np.sin(a)),
    "tan": _function(lambda a, v: 1.0 + v * v),
    "sinh": _function(lambda a, v: np.cosh(a)),
    "cosh": _function(lambda a, v: np.sinh(a)),
    "tanh": _function(lambda a, v: 1.0 - v * v),
    "atan": _function(lambda a, v: 1.0 / (1.0 + a * a)),
}
