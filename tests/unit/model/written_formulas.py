"""Formulas from short texts, for tests of the model that must not depend on the parser.

The texts are Python expressions with ``=`` between the sides; a literal with a unit is written
``2[m/s]``, so that places are offsets in the text. Units are those of `UNITS` and their products.
"""

from __future__ import annotations

import ast
from collections.abc import Sequence
from fractions import Fraction

from eqsheet.diagnostics.source import Source
from eqsheet.model.tape import BINARY_FUNCTIONS, UNARY_FUNCTIONS, Formula, Literal, TapeBuilder
from eqsheet.syntax.nodes import LogicalLine, Show, Statement
from eqsheet.units.dimension import DIMENSIONLESS, Dimension

PRESSURE = Dimension.of({"kg": 1, "m": -1, "s": -2})
TEMPERATURE = Dimension.of({"K": 1})
UNITS: dict[str, tuple[Dimension, float, float, str]] = {
    "m": (Dimension.of({"m": 1}), 1.0, 0.0, "plain"),
    "mm": (Dimension.of({"m": 1}), 1e-3, 0.0, "plain"),
    "s": (Dimension.of({"s": 1}), 1.0, 0.0, "plain"),
    "kg": (Dimension.of({"kg": 1}), 1.0, 0.0, "plain"),
    "mol": (Dimension.of({"mol": 1}), 1.0, 0.0, "plain"),
    "J": (Dimension.of({"kg": 1, "m": 2, "s": -2}), 1.0, 0.0, "plain"),
    "W": (Dimension.of({"kg": 1, "m": 2, "s": -3}), 1.0, 0.0, "plain"),
    "Hz": (Dimension.of({"s": -1}), 1.0, 0.0, "plain"),
    "rpm": (Dimension.of({"s": -1}), 0.10471975511965977, 0.0, "plain"),
    "Pa": (PRESSURE, 1.0, 0.0, "absolute"),
    "bar": (PRESSURE, 1e5, 0.0, "absolute"),
    "barg": (PRESSURE, 1e5, 101325.0, "reading"),
    "K": (TEMPERATURE, 1.0, 0.0, "absolute"),
    "degC": (TEMPERATURE, 1.0, 273.15, "reading"),
    "delta_degC": (TEMPERATURE, 1.0, 0.0, "difference"),
}
COMPARISONS = {ast.Lt: ("lt", False), ast.LtE: ("le", False), ast.Gt: ("lt", True), ast.GtE: ("le", True)}
ARITHMETIC = {ast.Add: "add", ast.Sub: "sub", ast.Mult: "mul", ast.Div: "div"}


class _Writer:
    def __init__(self, names: list[str], offset: int) -> None:
        self.names = names
        self.offset = offset
        self.builder = TapeBuilder()

    def place(self, node: ast.expr) -> tuple[int, int]:
        assert node.end_col_offset is not None
        return node.col_offset + self.offset, node.end_col_offset + self.offset

    def write(self, node: ast.expr) -> int:
        match node:
            case ast.Name(name):
                return self.builder.quantity(number_of(self.names, name), self.place(node))
            case ast.Constant(value):
                if isinstance(value, int) and 0 <= value <= 12:
                    return self.builder.constant(Fraction(value), self.place(node))
                start, end = self.place(node)
                return self.builder.literal(Literal(float(value), DIMENSIONLESS, "plain", start, end))
            case ast.Subscript(ast.Constant(value), unit):
                return self.literal(node, float(value), unit)
            case ast.UnaryOp(ast.USub(), ast.Subscript(ast.Constant(value), unit)):
                return self.literal(node, -float(value), unit)
            case ast.UnaryOp(ast.USub(), operand):
                return self.apply("neg", node, self.write(operand))
            case ast.BinOp(left, ast.Pow(), right):
                exponent = _exact(right)
                if exponent is not None:
                    return self.builder.apply("power", self.write(left), exponent, place=self.place(node))
                return self.apply("pow", node, self.write(left), self.write(right))
            case ast.BinOp(left, operator, right):
                return self.apply(ARITHMETIC[type(operator)], node, self.write(left), self.write(right))
            case ast.Compare(left, [operator], [right]):
                operation, swapped = COMPARISONS[type(operator)]
                operands = [self.write(left), self.write(right)]
                return self.apply(operation, node, *(operands[::-1] if swapped else operands))
            case ast.IfExp(test, then, otherwise):
                return self.apply("if", node, self.write(test), self.write(then), self.write(otherwise))
            case ast.Call(ast.Name(name), arguments):
                assert name in UNARY_FUNCTIONS or name in BINARY_FUNCTIONS, name
                return self.apply(name, node, *[self.write(argument) for argument in arguments])
        raise AssertionError(f"the test text holds {ast.dump(node)}")

    def apply(self, operation: str, node: ast.expr, *operands: int) -> int:
        return self.builder.apply(operation, *operands, place=self.place(node))

    def literal(self, node: ast.expr, value: float, unit: ast.expr) -> int:
        text = ast.unparse(unit).replace(" ", "")
        start, end = self.place(node)
        if text in UNITS:
            dimension, factor, origin, kind = UNITS[text]
            return self.builder.literal(Literal(value * factor + origin, dimension, kind, start, end, text))
        return self.builder.literal(Literal(value, unit_dimension(unit), "plain", start, end, text))


def unit_dimension(node: ast.expr) -> Dimension:
    match node:
        case ast.Name(name):
            return UNITS[name][0]
        case ast.BinOp(left, ast.Mult(), right):
            return unit_dimension(left) * unit_dimension(right)
        case ast.BinOp(left, ast.Div(), right):
            return unit_dimension(left) / unit_dimension(right)
        case ast.BinOp(left, ast.Pow(), ast.Constant(power)):
            assert isinstance(power, int)
            return unit_dimension(left) ** power
        case ast.Constant(1):
            return DIMENSIONLESS
    raise AssertionError(ast.dump(node))


def _exact(node: ast.expr) -> Fraction | None:
    match node:
        case ast.Constant(int(value)):
            return Fraction(value)
        case ast.UnaryOp(ast.USub(), operand):
            inner = _exact(operand)
            return None if inner is None else -inner
        case ast.BinOp(left, ast.Div(), right):
            a, b = _exact(left), _exact(right)
            return None if a is None or b is None else a / b
    return None


def number_of(names: list[str], name: str) -> int:
    if name not in names:
        names.append(name)
    return names.index(name)


def formula(text: str, names: list[str], statement: int = 0) -> Formula:
    """The formula of an equation ``left = right`` or of a comparison; new names are appended to `names`."""
    sides = text.split(" = ")
    if len(sides) == 1:
        writer = _Writer(names, 0)
        output = writer.write(ast.parse(text, mode="eval").body)
        return writer.builder.formula((output,), statement)
    writer = _Writer(names, 0)
    left = writer.write(ast.parse(sides[0], mode="eval").body)
    writer.offset = len(sides[0]) + 3
    right = writer.write(ast.parse(sides[1], mode="eval").body)
    return writer.builder.formula((left, right), statement, ((left, right),))


def formulas(texts: Sequence[str]) -> tuple[list[Formula], list[str]]:
    """The formulas of `texts` and the names of their quantities, in order of first sight."""
    names: list[str] = []
    return [formula(text, names, number) for number, text in enumerate(texts)], names


def statements(texts: Sequence[str]) -> list[Statement]:
    """Statements that give the texts their places, one a line; their nodes are of no matter."""
    source = Source("test.eqsheet", "\n".join(texts))
    node = Show(0, 0, ())
    return [
        Statement(node, LogicalLine(text, source.line_starts[i], i + 1, 0), source)
        for i, text in enumerate(texts)
    ]
