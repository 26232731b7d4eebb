"""Tapes interpreted one instruction at a time: values, their sizes and bounds of their errors.

This is the judge of a solution: it reads the tape of the statement itself, not the simplified and compiled
one that the solver used. It never raises outside a domain; such an instruction is nan, or infinite where that
is the limit (1/0, overflow, ln 0).
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from eqsheet.model.functions import BINARY, UNARY, as_float
from eqsheet.model.interpolant import INVERSE_SLOPE, Interpolant
from eqsheet.model.interpolation import rounding_scale, value_or_nan
from eqsheet.model.tape import Tape, operands_of

INTERPOLATED = frozenset(("curve", "surface"))
# Half the spacing of floats around 1: the largest relative error of one rounding.
ROUNDING = 2.0**-53
# Below the normal range a rounding is bounded by this instead.
UNDERFLOW = 5e-324


def evaluate(tape: Tape, quantities: Sequence[float], literals: Sequence[float]) -> list[Any]:
    """Value of each instruction: a float, or a truth value for comparisons and what is made of them.

    A comparison with nan, and an ``if`` that depends on it, is nan.

    Parameters
    ----------
    tape : Tape
    quantities, literals : sequence of float
        Values in SI, in the tape's numbering.
    """
    values: list[Any] = []
    instructions: tuple[tuple[Any, ...], ...] = tape.instructions
    for instruction in instructions:
        operation = instruction[0]
        if operation == "quantity":
            values.append(float(quantities[instruction[1]]))
        elif operation == "literal":
            values.append(float(literals[instruction[1]]))
        elif operation == "const":
            values.append(as_float(instruction[1]))
        elif operation in OF_ATTRIBUTE:
            values.append(OF_ATTRIBUTE[operation](values[instruction[1]], instruction[2]))
        elif operation in INTERPOLATED:
            values.append(value_or_nan(instruction[-1], *[values[i] for i in instruction[1:-1]]))
        else:
            values.append(STEPS[operation](*[values[i] for i in instruction[1:]]))
    return values


def evaluate_arrays(tape: Tape, quantities: Sequence[Any], literals: Sequence[Any]) -> list[Any]:
    """`evaluate` for arrays of cases: each value, quantity and literal a float or an array."""
    import numpy as np

    from eqsheet.model.array_functions import ARRAY_OPERATIONS as steps

    values: list[Any] = []
    instructions: tuple[tuple[Any, ...], ...] = tape.instructions
    with np.errstate(all="ignore"):
        for instruction in instructions:
            operation = instruction[0]
            if operation == "quantity":
                values.append(quantities[instruction[1]])
            elif operation == "literal":
                values.append(literals[instruction[1]])
            elif operation == "const":
                values.append(as_float(instruction[1]))
            elif operation == "power":
                values.append(steps["pow"](values[instruction[1]], as_float(instruction[2])))
            elif operation == "strip":
                values.append((values[instruction[1]] - instruction[2].origin) / instruction[2].factor)
            elif operation == "attach":
                values.append(values[instruction[1]] * instruction[2].factor + instruction[2].origin)
            elif operation in INTERPOLATED:
                values.append(instruction[-1].array_function(*[values[i] for i in instruction[1:-1]]))
            else:
                values.append(steps[operation](*[values[i] for i in instruction[1:]]))
    return values


def used_instructions(tape: Tape, values: Sequence[Any]) -> list[bool]:
    """For each instruction, whether the outputs depend on it with the branches that `values` take."""
    used = [False] * len(tape.instructions)
    for i in tape.outputs:
        used[i] = True
    instructions: tuple[tuple[Any, ...], ...] = tape.instructions
    for i in range(len(used) - 1, -1, -1):
        if not used[i]:
            continue
        instruction = instructions[i]
        operation = instruction[0]
        if operation == "if":
            _, condition, a, b = instruction
            used[condition] = True
            used[a if values[condition] else b] = True
        elif operation in ("and", "or"):
            _, a, b = instruction
            used[a] = True
            used[b] = used[b] or bool(values[a]) == (operation == "and")
        else:
            for j in operands_of(instruction):
                used[j] = True
    return used


def first_nonfinite(tape: Tape, values: Sequence[Any]) -> int | None:
    """The first instruction that is nan or infinite, of those the outputs depend on; None if there is none.

    A branch not taken does not count.
    """
    if all(math.isfinite(value) for value in values):
        return None
    used = used_instructions(tape, values)
    for i, value in enumerate(values):
        if used[i] and not math.isfinite(value):
            return i
    return None


# --- one operation ----------------------------------------------------------------------------------------


def _guarded(function: Callable[..., float]) -> Callable[..., float]:
    def step(*values: float) -> float:
        try:
            return function(*values)
        except (ValueError, ZeroDivisionError):
            return math.nan
        except OverflowError:
            return math.inf

    return step


def divide(a: float, b: float) -> float:
    """a / b, infinite for a/0."""
    if b == 0.0:
        return math.nan if a == 0.0 or a != a else math.copysign(math.inf, a) * math.copysign(1.0, b)
    return a / b


def raised(a: float, b: float) -> float:
    """a to the power b; nan where that is not real, infinite for a negative power of 0."""
    try:
        return math.pow(a, b)
    except ValueError:
        return math.inf if a == 0.0 else math.nan
    except OverflowError:
        return -math.inf if a < 0.0 and b % 2.0 == 1.0 else math.inf


def _root(a: float) -> float:
    return math.sqrt(a) if a >= 0.0 else math.nan


# The same products and roots that generated code writes, so that both give the same float.
# Numerator and denominator are the key, since hashing a fraction takes longer than the power.
_POWERS: dict[tuple[int, int], Callable[[float], float]] = {
    (2, 1): lambda a: a * a,
    (3, 1): lambda a: a * a * a,
    (-1, 1): lambda a: divide(1.0, a),
    (-2, 1): lambda a: divide(1.0, a * a),
    (1, 2): _root,
    (-1, 2): lambda a: divide(1.0, _root(a)),
    (3, 2): lambda a: a * _root(a),
}


def exact_power(a: float, r: Fraction) -> float:
    """a to an exact power, by products and roots where generated code uses them; see `raised`."""
    short = _POWERS.get((r.numerator, r.denominator))
    return short(a) if short else raised(a, as_float(r))


def _ln(a: float) -> float:
    return -math.inf if a == 0.0 else UNARY["ln"].value(a)


def _log10(a: float) -> float:
    return -math.inf if a == 0.0 else UNARY["log10"].value(a)


def _sinh(a: float) -> float:
    try:
        return math.sinh(a)
    except OverflowError:
        return math.copysign(math.inf, a)


STEPS: dict[str, Callable[..., Any]] = {
    "neg": lambda a: -a,
    "add": lambda a, b: a + b,
    "sub": lambda a, b: a - b,
    "mul": lambda a, b: a * b,
    "div": divide,
    "pow": raised,
    # What is compared with nan is neither true nor false but nan, lest an `if` hide it.
    "lt": lambda a, b: a < b if a == a and b == b else math.nan,
    "le": lambda a, b: a <= b if a == a and b == b else math.nan,
    "eq": lambda a, b: a == b if a == a and b == b else math.nan,
    "and": lambda a, b: b if a and a == a else a,
    "or": lambda a, b: a if a else b,
    "not": lambda a: not a if a == a else a,
    "if": lambda c, a, b: (a if c else b) if c == c else math.nan,
    **{name: _guarded(function.value) for name, function in UNARY.items()},
    **{name: _guarded(function) for name, function in BINARY.items()},
    "ln": _guarded(_ln),
    "log10": _guarded(_log10),
    "sinh": _sinh,
}
OF_ATTRIBUTE: dict[str, Callable[[float, Any], float]] = {
    "power": exact_power,
    "strip": lambda a, unit: (a - unit.origin) / unit.factor,
    "attach": lambda a, unit: a * unit.factor + unit.origin,
}


# --- evidence ---------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Evidence:
    """Values of all instructions of a tape, and how far they can be relied on.

    Attributes
    ----------
    values : tuple
        As from `evaluate`.
    sizes : tuple of float
        Size propagated through the expression; 0 for truth values. A sum has the size of its largest term, a
        product the product of the sizes, a power the power of the size; see `evaluate_with_evidence`.
    errors : tuple of float
        Bound of the absolute error of each value, from the errors put in and the rounding of every operation;
        0 for truth values. First order in the errors put in, so exact only for small ones.
    """

    values: tuple[Any, ...]
    sizes: tuple[float, ...]
    errors: tuple[float, ...]


def evaluate_with_evidence(
    tape: Tape,
    quantities: Sequence[float],
    literals: Sequence[float],
    errors: Sequence[float] | None = None,
) -> Evidence:
    """Value, size and error bound of each instruction.

    Parameters
    ----------
    tape : Tape
    quantities, literals : sequence of float
        Values in SI.
    errors : sequence of float, optional
        Bound of the absolute error of each quantity; zero if left out.

    Notes
    -----
    Literals are decimal numbers rounded to floats (`as_typed`).

    The error bound is a running one (Higham, Accuracy and Stability of Numerical Algorithms, 2nd edition,
    2002, chapter 3): each operation hands on the errors of its operands to first order and adds its own
    rounding.

    The size of a sum is that of its largest term or of itself, so size/|value| tells how much was
    cancelled. Further on that ratio is carried along: product and quotient multiply the ratios of their
    operands, a power raises it to the power's magnitude. The size of f(a) is the larger of |f(a)| and
    |f'(a)|*size(a), what f makes of a change of a by its size. ``min``, ``max`` and ``if`` have the size of
    the one chosen; ``hypot`` and ``logmean`` the larger one of their operands'. Sizes of dimensioned values
    scale with their units.
    """
    values: list[Any] = []
    sizes: list[float] = []
    bounds: list[float] = []
    instructions: tuple[tuple[Any, ...], ...] = tape.instructions
    for instruction in instructions:
        operation = instruction[0]
        # Most instructions are one of the first six, which are written out: this is the inner loop of a judgement.
        if operation == "quantity":
            v = float(quantities[instruction[1]])
            size, error = abs(v), 0.0 if errors is None else abs(errors[instruction[1]])
        elif operation == "mul":
            _, i, j = instruction
            a, b, a_size, b_size = values[i], values[j], sizes[i], sizes[j]
            v = a * b
            size = a_size * b_size if a_size and b_size else 0.0
            error = product_error(a, bounds[i], b, bounds[j]) + _product_rounding(v, a, b)
        elif operation == "literal":
            v = float(literals[instruction[1]])
            size, error = abs(v), as_typed(v)
        elif operation == "const":
            v = as_float(instruction[1])
            size, error = abs(v), 0.0 if is_exact(instruction[1], v) else rounding_of(v)
        elif operation == "add" or operation == "sub":
            _, i, j = instruction
            a, b = values[i], values[j]
            v = a + b if operation == "add" else a - b
            size = max(sizes[i], sizes[j], abs(v))
            error = bounds[i] + bounds[j] + (ROUNDING * abs(v) + UNDERFLOW if v else 0.0)
        elif operation in TRUTH:
            v = STEPS[operation](*[values[i] for i in instruction[1:]])
            size, error = 0.0, 0.0
        elif operation in UNARY:
            i = instruction[1]
            v = STEPS[operation](values[i])
            size, error = unary_evidence(operation, v, values[i], sizes[i], bounds[i])
        elif operation in OF_ATTRIBUTE:
            _, i, attribute = instruction
            v = OF_ATTRIBUTE[operation](values[i], attribute)
            size, error = EVIDENCE[operation](v, values[i], sizes[i], bounds[i], attribute)
        elif operation in INTERPOLATED:
            operands = instruction[1:-1]
            arguments = [values[i] for i in operands]
            v = value_or_nan(instruction[-1], *arguments)
            size, error = interpolated_evidence(
                v, instruction[-1], arguments, [sizes[i] for i in operands], [bounds[i] for i in operands]
            )
        elif operation == "if":
            _, c, i, j = instruction
            v = STEPS["if"](values[c], values[i], values[j])
            chosen = i if values[c] else j
            size, error = sizes[chosen], bounds[chosen]
        elif operation == "neg":
            i = instruction[1]
            v, size, error = -values[i], sizes[i], bounds[i]
        else:
            _, i, j = instruction
            a, b = values[i], values[j]
            v = STEPS[operation](a, b)
            size, error = EVIDENCE[operation](v, a, sizes[i], bounds[i], b, sizes[j], bounds[j])
        values.append(v)
        sizes.append(size)
        bounds.append(error)
    return Evidence(tuple(values), tuple(sizes), tuple(bounds))


# Whole numbers up to here are floats.
_WHOLE = 2**53
TRUTH = frozenset({"lt", "le", "eq", "and", "or", "not"})
# Roundings of a curve in units of 2^-53 of the sizes of its terms: four products and sums, and the distance
# from the point before.
_CURVE_UNITS = 16.0


def as_typed(value: float) -> float:
    """How far a float may be from the decimal number that was typed: rounded once, and once more to SI."""
    return 2.0 * ROUNDING * abs(value) if value % 1.0 else 0.0


def is_exact(constant: Any, value: float) -> bool:
    """Whether `value` stands for the constant exactly; one that comes as a float, such as pi, is rounded."""
    if not math.isfinite(value):
        return True
    if isinstance(constant, float):
        return not value % 1.0
    above, below = constant.numerator, constant.denominator
    if below == 1 and -_WHOLE <= above <= _WHOLE:
        return True
    # In lowest terms a fraction is a float only if its denominator is a power of two.
    return not below & (below - 1) and Fraction(constant) == Fraction(value)


def rounding_of(v: float, units: float = 1.0) -> float:
    """Bound of the error that rounding makes in v, in `units` of half a last place."""
    return units * (ROUNDING * abs(v) + UNDERFLOW) if v else 0.0


def _product(a: float, b: float) -> float:
    """a*b where nothing, 0, outweighs anything, even infinity."""
    return a * b if a and b else 0.0


def unary_evidence(operation: str, v: float, a: float, size: float, error: float) -> tuple[float, float]:
    """Size and error bound of a function's value v, from its argument a and that one's size and error."""
    function = UNARY[operation]
    if operation == "sqrt":
        # The slope is infinite at 0, where the root of the size and of the error say more.
        reach = math.sqrt(max(a - error, 0.0)) if a == a else math.nan
        spread = min(divide(error, v + reach), math.sqrt(error)) if error else 0.0
        return _safe_power(v, divide(size, abs(a)) if a else 1.0, 0.5, size), spread + rounding_of(v)
    if operation in ("abs", "neg"):
        return size, error
    try:
        slope = abs(function.slope(a, v))
    except (ValueError, ZeroDivisionError, OverflowError):
        slope = math.inf
    return max(abs(v), _product(slope, size)), _product(slope, error) + rounding_of(v, function.units)


def interpolated_evidence(
    v: float, interpolant: Interpolant, arguments: list[float], sizes: list[float], errors: list[float]
) -> tuple[float, float]:
    """Size and error bound of the value v of a curve or surface."""
    size, error = abs(v), rounding_of(rounding_scale(interpolant, *arguments), _CURVE_UNITS)
    if interpolant.is_stepped:
        return size, error
    if interpolant.shape == INVERSE_SLOPE:
        # Written on derivative tapes only, as `_of_logmean_slope`.
        return size, math.inf if any(errors) else error
    for slope, own_size, own_error in zip(interpolant.partials, sizes, errors):
        steepness = abs(value_or_nan(slope, *arguments))
        size = max(size, _product(steepness, own_size))
        error += _product(steepness, own_error)
    return size, error


def _safe_power(v: float, ratio: float, r: float, size: float) -> float:
    """|v|*ratio^|r|, and size^r where the base is 0."""
    if v == 0.0:
        return raised(size, r) if size and r > 0 else 0.0
    return abs(v) * raised(ratio, abs(r))


def _of_power(v: float, a: float, size: float, error: float, exponent: Fraction) -> tuple[float, float]:
    r = as_float(exponent)
    slope = abs(r) * abs(raised(a, r - 1.0))
    # The exponent itself is rounded where it is no float; its effect is |ln a| times that.
    inexact = 0.0 if is_exact(exponent, r) or not a else abs(r * v * math.log(abs(a))) * ROUNDING
    bound = _product(slope, error) + rounding_of(v, 4.0) + inexact
    return _safe_power(v, divide(size, abs(a)) if a else 1.0, r, size), bound


def _of_strip(v: float, a: float, size: float, error: float, unit: Any) -> tuple[float, float]:
    factor = abs(unit.factor)
    rounding = rounding_of(a - unit.origin) / factor if unit.origin else 0.0
    own_size = max(size, abs(unit.origin)) / factor
    return max(own_size, abs(v)), error / factor + rounding + rounding_of(v)


def _of_attach(v: float, a: float, size: float, error: float, unit: Any) -> tuple[float, float]:
    factor = abs(unit.factor)
    rounding = rounding_of(a * factor) if unit.origin else 0.0
    return max(size * factor, abs(unit.origin), abs(v)), error * factor + rounding + rounding_of(v)


def product_error(a: float, a_error: float, b: float, b_error: float) -> float:
    """What the errors of two factors make of their product."""
    if not a_error and not b_error:
        return 0.0
    return _product(abs(a), b_error) + _product(abs(b), a_error) + _product(a_error, b_error)


def _product_rounding(v: float, a: float, b: float) -> float:
    return rounding_of(v) if v else (UNDERFLOW if a and b else 0.0)


def _of_quotient(
    v: float, a: float, a_size: float, a_error: float, b: float, b_size: float, b_error: float
) -> tuple[float, float]:
    below = abs(b)
    room = below - b_error
    spread = a_error + _product(abs(v), b_error)
    error = (spread / room if room > 0.0 else math.inf) if spread else 0.0
    size = _product(divide(a_size, below), divide(b_size, below)) if a_size else 0.0
    return size, error + (rounding_of(v) if v or not a else UNDERFLOW)


def _of_general_power(
    v: float, a: float, a_size: float, a_error: float, b: float, b_size: float, b_error: float
) -> tuple[float, float]:
    log = abs(math.log(abs(a))) if a else 0.0
    base_slope = abs(b) * abs(raised(a, b - 1.0)) if b else 0.0
    error = _product(base_slope, a_error) + _product(abs(v) * log, b_error) + rounding_of(v, 4.0)
    size = _safe_power(v, divide(a_size, abs(a)) if a else 1.0, b, a_size)
    return max(size, _product(abs(v) * log, b_size)), error


def _of_smaller(
    v: float, a: float, a_size: float, a_error: float, b: float, b_size: float, b_error: float
) -> tuple[float, float]:
    size, own = (a_size, a_error) if v == a else (b_size, b_error)
    # Which one is chosen is not in doubt where they are further apart than both errors.
    return size, own if abs(a - b) > a_error + b_error else max(a_error, b_error)


def _of_hypot(
    v: float, a: float, a_size: float, a_error: float, b: float, b_size: float, b_error: float
) -> tuple[float, float]:
    if v == 0.0:
        return 0.0, math.hypot(a_error, b_error)
    error = (abs(a) * a_error + abs(b) * b_error) / v + rounding_of(v, 2.0)
    return max(a_size, b_size, abs(v)), error


def _of_angle(
    v: float, y: float, y_size: float, y_error: float, x: float, x_size: float, x_error: float
) -> tuple[float, float]:
    square = x * x + y * y
    if square == 0.0:
        return abs(v), math.inf if y_error or x_error else 0.0
    size = (abs(x) * y_size + abs(y) * x_size) / square
    error = (abs(x) * y_error + abs(y) * x_error) / square
    return max(abs(v), size), error + rounding_of(v, 4.0)


def _of_logmean(
    v: float, a: float, a_size: float, a_error: float, b: float, b_size: float, b_error: float
) -> tuple[float, float]:
    slope = STEPS["logmean_slope"]
    error = _product(abs(slope(a, b)), a_error) + _product(abs(slope(b, a)), b_error)
    # Difference, sum, quotient, atanh or ln, and the last quotient round in turn.
    return max(a_size, b_size), error + rounding_of(v, 12.0)


def _of_logmean_slope(
    v: float, a: float, a_size: float, a_error: float, b: float, b_size: float, b_error: float
) -> tuple[float, float]:
    # Written on derivative tapes only, which are no statements to be judged.
    return abs(v), math.inf if a_error or b_error else rounding_of(v, 64.0)


EVIDENCE: dict[str, Callable[..., tuple[float, float]]] = {
    "power": _of_power,
    "strip": _of_strip,
    "attach": _of_attach,
    "div": _of_quotient,
    "pow": _of_general_power,
    "min": _of_smaller,
    "max": _of_smaller,
    "hypot": _of_hypot,
    "atan2": _of_angle,
    "logmean": _of_logmean,
    "logmean_slope": _of_logmean_slope,
}
