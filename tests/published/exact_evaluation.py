"""The defining property, checked apart from the program: statements evaluated at fifty digits from their text.

An evaluator of syntax nodes of its own (mpmath); of the program it takes the syntax tree, the sizes of units
and the CODATA constants, not the model nor the solver. Each value carries a bound: what it would change by, at
first order, if every number in it changed by its own size, with no cancelling. A residual is judged by it.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

import mpmath

from eqsheet.diagnostics.source import Source
from eqsheet.syntax.nodes import (
    Binary,
    Call,
    Comparison,
    Conditional,
    Definition,
    Equation,
    Expression,
    Guess,
    Logical,
    Number,
    Reference,
    Statement,
    Unary,
    UnitText,
)
from eqsheet.syntax.parse import parse_document
from eqsheet.units.constants import constant
from eqsheet.units.registry import UnitTable
from eqsheet.units.unit import Unit
from eqsheet.worksheet.solution import Solution

DIGITS = 50
# A double is off by up to 1.1e-16 of itself; a residual may be off by as much of its bound, and by a few times
# that where the solution of a block carries the rounding of its equations.
HOLDS = 1e-13
ROUNDING = 1.1e-16
# A start or a solution at a bound may stand past it by rounding.
PAST_BOUND = 1e-9


@dataclass(frozen=True)
class Bounded:
    """A value and its bound (see above); the bound of a literal or a quantity is its size."""

    value: mpmath.mpf
    bound: mpmath.mpf


def statements_of(text: str) -> tuple[Statement, ...]:
    """The statements of a worksheet in force."""
    document, found = parse_document(Source("corpus", text))
    assert not found, found
    return tuple(statement for statement in document.statements if not statement.off)


def residuals(text: str, values: Mapping[str, float], least: Mapping[str, float]) -> list[float]:
    """Of every equation, the difference of its sides over its bound, at SI values by name.

    Parameters
    ----------
    least : mapping of str to float
        By name, the least size a quantity is taken to have; zero where missing.
    """
    statements = statements_of(text)
    definitions = {s.node.name: s.node for s in statements if isinstance(s.node, Definition)}
    found = []
    with mpmath.workdps(DIGITS):
        names = {n: Bounded(mpmath.mpf(v), max(abs(v), least.get(n, 0.0))) for n, v in values.items()}
        evaluator = Evaluator(names, definitions)
        for statement in statements:
            if isinstance(statement.node, Equation):
                left = evaluator.of(statement.node.left)
                right = evaluator.of(statement.node.right)
                bound = max(left.bound, right.bound)
                gap = abs(left.value - right.value)
                found.append(float(gap / bound) if bound else float(gap))
    return found


def within_bounds(text: str, values: Mapping[str, float]) -> bool:
    """Whether all values lie in the bounds that the worksheet's guesses set."""
    with mpmath.workdps(DIGITS):
        evaluator = Evaluator({name: _exactly(value) for name, value in values.items()}, {})
        for statement in statements_of(text):
            guess = statement.node
            if not (isinstance(guess, Guess) and isinstance(guess.target, Reference)):
                continue
            value = values[guess.target.name]
            slack = PAST_BOUND * abs(value)
            if guess.lower is not None and value < evaluator.of(guess.lower).value - slack:
                return False
            if guess.upper is not None and value > evaluator.of(guess.upper).value + slack:
                return False
    return True


def holds(text: str, solution: Solution) -> bool:
    """Whether a solution called solved is one: all equations hold at fifty digits, and all bounds."""
    values = {name: solution[name].si for name in solution}
    return all(r <= HOLDS for r in residuals(text, values, least_sizes(solution))) and within_bounds(
        text, values
    )


def least_sizes(solution: Solution) -> dict[str, float]:
    """For each quantity, the rounding of the largest one of its dimension: nothing smaller is told from zero.

    A bar that stands upright has a tip at x = 0 beside lengths of metres; found as 1e-40 m it is as good.
    """
    largest: dict[str, float] = {}
    for value in solution.values():
        text = value.dimension.text
        largest[text] = max(largest.get(text, 0.0), abs(value.si))
    return {name: ROUNDING * largest[solution[name].dimension.text] for name in solution}


def _exactly(value: float) -> Bounded:
    exact = mpmath.mpf(value)
    return Bounded(exact, abs(exact))


class Evaluator:
    """Values of expressions at given quantities."""

    def __init__(self, names: Mapping[str, Bounded], definitions: Mapping[str, Definition]) -> None:
        self.names = names
        self.definitions = definitions

    def of(self, node: Expression) -> Bounded:
        """Value of an expression that is no condition."""
        if isinstance(node, Number):
            return self._number(node)
        if isinstance(node, Reference):
            return self._reference(node)
        if isinstance(node, Unary):
            inner = self.of(node.operand)
            return Bounded(-inner.value, inner.bound) if node.operator == "-" else inner
        if isinstance(node, Binary):
            return _ARITHMETIC[node.operator](self.of(node.left), self.of(node.right))
        if isinstance(node, Call):
            return self._call(node)
        if isinstance(node, Conditional):
            return self.of(node.then if self.holds(node.condition) else node.otherwise)
        raise NotImplementedError(type(node).__name__)

    def holds(self, node: Expression) -> bool:
        """Whether a condition holds."""
        if isinstance(node, Logical):
            every = (self.holds(operand) for operand in node.operands)
            return all(every) if node.operator == "and" else any(every)
        if isinstance(node, Unary):
            return not self.holds(node.operand)
        assert isinstance(node, Comparison)
        values = [self.of(operand).value for operand in node.operands]
        return all(_COMPARED[o](a, b) for o, a, b in zip(node.operators, values, values[1:]))

    def _number(self, node: Number) -> Bounded:
        value = mpmath.mpf(node.text)
        if node.negated:
            value = -value
        if node.unit is not None:
            value = _to_si(value, _unit(node.unit))
        return Bounded(value, abs(value))

    def _reference(self, node: Reference) -> Bounded:
        if node.owner is not None:
            found = constant(node.name)
            assert node.owner.name == "const" and found is not None
            return _exactly(found.value)
        if node.name == "pi":
            return Bounded(+mpmath.pi, mpmath.mpf(0))
        return self.names[node.name]

    def _call(self, node: Call) -> Bounded:
        arguments = [self.of(argument) for argument in node.arguments]
        definition = self.definitions.get(node.name)
        if definition is None:
            return _FUNCTIONS[node.name](*arguments)
        inner: dict[str, Bounded] = {} if definition.result_unit else dict(self.names)
        for parameter, argument in zip(definition.parameters, arguments):
            inner[parameter.name] = _plain(argument, parameter.unit)
        result = Evaluator(inner, self.definitions).of(definition.body)
        if definition.result_unit is None:
            return result
        unit = _unit(definition.result_unit)
        return Bounded(_to_si(result.value, unit), result.bound * _factor(unit))


def _plain(argument: Bounded, text: UnitText | None) -> Bounded:
    """Plain number of an argument in a parameter's unit."""
    if text is None:
        return argument
    unit = _unit(text)
    return Bounded((argument.value - _decimal(unit.origin)) / _factor(unit), argument.bound / _factor(unit))


def _unit(text: UnitText) -> Unit:
    unit = UnitTable.standard().resolve(text.text, tuple((f.symbol, f.exponent) for f in text.factors))
    assert isinstance(unit, Unit), text.text
    return unit


def _to_si(value: mpmath.mpf, unit: Unit) -> mpmath.mpf:
    return value * _factor(unit) + _decimal(unit.origin)


def _factor(unit: Unit) -> mpmath.mpf:
    """Factor of a unit: its shortest decimal, or one over a whole number where that is the double."""
    whole = round(1.0 / unit.factor)
    if unit.factor < 1.0 and 1.0 / whole == unit.factor:
        return 1 / mpmath.mpf(whole)
    return _decimal(unit.factor)


def _decimal(value: float) -> mpmath.mpf:
    return mpmath.mpf(repr(value))


def _power(base: Bounded, exponent: Bounded) -> Bounded:
    value = base.value**exponent.value
    by_base = abs(exponent.value * value / base.value) * base.bound if base.value else abs(value)
    by_exponent = abs(value * mpmath.log(base.value)) * exponent.bound if base.value > 0 else 0
    return Bounded(value, by_base + (0 if exponent.value == int(exponent.value) else by_exponent))


def _quotient(a: Bounded, b: Bounded) -> Bounded:
    return Bounded(a.value / b.value, a.bound / abs(b.value) + abs(a.value / b.value**2) * b.bound)


_ARITHMETIC: dict[str, Callable[[Bounded, Bounded], Bounded]] = {
    "+": lambda a, b: Bounded(a.value + b.value, a.bound + b.bound),
    "-": lambda a, b: Bounded(a.value - b.value, a.bound + b.bound),
    "*": lambda a, b: Bounded(a.value * b.value, a.bound * abs(b.value) + b.bound * abs(a.value)),
    "/": _quotient,
    "^": _power,
}
_COMPARED: dict[str, Callable[[mpmath.mpf, mpmath.mpf], bool]] = {
    "<": lambda a, b: bool(a < b),
    "<=": lambda a, b: bool(a <= b),
    ">": lambda a, b: bool(a > b),
    ">=": lambda a, b: bool(a >= b),
    "=": lambda a, b: bool(a == b),
}


def _smooth(
    of: Callable[[mpmath.mpf], mpmath.mpf], slope: Callable[[mpmath.mpf], mpmath.mpf]
) -> Callable[[Bounded], Bounded]:
    def apply(argument: Bounded) -> Bounded:
        return Bounded(of(argument.value), abs(slope(argument.value)) * argument.bound)

    return apply


def _logmean(a: Bounded, b: Bounded) -> Bounded:
    value = a.value if a.value == b.value else (a.value - b.value) / mpmath.log(a.value / b.value)
    return Bounded(value, abs(value) / abs(a.value) * a.bound + abs(value) / abs(b.value) * b.bound)


def _chosen(choose: Callable[[Sequence[mpmath.mpf]], mpmath.mpf]) -> Callable[..., Bounded]:
    def apply(*arguments: Bounded) -> Bounded:
        value = choose([a.value for a in arguments])
        return next(a for a in arguments if a.value == value)

    return apply


_FUNCTIONS: dict[str, Callable[..., Bounded]] = {
    "sqrt": _smooth(mpmath.sqrt, lambda x: 1 / (2 * mpmath.sqrt(x)) if x else mpmath.mpf(0)),
    "exp": _smooth(mpmath.exp, mpmath.exp),
    "ln": _smooth(mpmath.log, lambda x: 1 / x),
    "log10": _smooth(mpmath.log10, lambda x: 1 / (x * mpmath.log(10))),
    "sin": _smooth(mpmath.sin, mpmath.cos),
    "cos": _smooth(mpmath.cos, mpmath.sin),
    "tan": _smooth(mpmath.tan, lambda x: 1 / mpmath.cos(x) ** 2),
    "asin": _smooth(mpmath.asin, lambda x: 1 / mpmath.sqrt(1 - x * x)),
    "acos": _smooth(mpmath.acos, lambda x: 1 / mpmath.sqrt(1 - x * x)),
    "atan": _smooth(mpmath.atan, lambda x: 1 / (1 + x * x)),
    "sinh": _smooth(mpmath.sinh, mpmath.cosh),
    "cosh": _smooth(mpmath.cosh, mpmath.sinh),
    "tanh": _smooth(mpmath.tanh, lambda x: 1 / mpmath.cosh(x) ** 2),
    "abs": _smooth(abs, lambda x: mpmath.mpf(1)),
    "min": _chosen(min),
    "max": _chosen(max),
    "logmean": _logmean,
}
