"""Time to differentiate and compile equations, and to call what comes out.

The ten-operation equations are all of different shapes, so that no memory of shapes helps; real worksheets
share many.
"""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from itertools import product
from random import Random
from typing import Any

import pytest

from eqsheet.model.block_code import block_code
from eqsheet.model.derive import equation_partials
from eqsheet.model.generate import float_function
from eqsheet.model.tape import Literal, Tape, TapeBuilder
from eqsheet.units.dimension import DIMENSIONLESS

SHAPES = 200


def equation(random: Random) -> Tape:
    """An equation of ten operations, typical of a worksheet: products, quotients, sums, a power, a
    function."""
    b = TapeBuilder()
    pool = [b.quantity(k, (0, 0)) for k in range(4)]
    pool += [b.literal(Literal(v, DIMENSIONLESS, "plain", 0, 1)) for v in (1.3, 0.7)]
    unused = pool[:]
    random.shuffle(unused)
    operations = ["mul"] * 4 + [
        "div",
        "add",
        "sub",
        "sub",
        "power",
        random.choice(["sqrt", "exp", "ln", "abs"]),
    ]
    random.shuffle(operations)

    def operand() -> int:
        return unused.pop() if unused else random.choice(pool)

    for operation in operations:
        if operation == "power":
            index = b.apply("power", operand(), random.choice([Fraction(2), Fraction(5, 2), Fraction(7, 4)]))
        elif operation in ("mul", "div", "add", "sub"):
            index = b.apply(operation, operand(), operand())
        else:
            index = b.apply(operation, operand())
        pool.append(index)
        unused.insert(0, index)
    right = b.apply("add", unused[-1], unused[-2]) if len(unused) > 1 else unused[-1]
    return b.tape((pool[0], right))


def shapes(count: int) -> list[Tape]:
    """`count` different tapes."""
    random = Random(7)
    found: dict[Tape, None] = {}
    while len(found) < count:
        found[equation(random)] = None
    return list(found)


@pytest.fixture(scope="module")
def tapes() -> list[Tape]:
    return shapes(SHAPES)


def test_differentiate_and_compile(benchmark: Any, tapes: list[Tape]) -> None:
    derive: Callable[..., Tape] = equation_partials.__wrapped__
    generate: Callable[..., Any] = float_function.__wrapped__

    def all_shapes() -> list[Any]:
        return [generate(derive(tape, (0, 1))) for tape in tapes]

    functions = benchmark(all_shapes)
    assert len(functions) == SHAPES
    if benchmark.stats:
        benchmark.extra_info["microseconds an equation"] = benchmark.stats["mean"] / SHAPES * 1e6


def test_compile_values_only(benchmark: Any, tapes: list[Tape]) -> None:
    generate: Callable[..., Any] = float_function.__wrapped__
    functions = benchmark(lambda: [generate(tape) for tape in tapes])
    assert len(functions) == SHAPES


CHAIN = 6


def chain() -> tuple[list[tuple[Tape, tuple[int, ...]]], list[float], list[float]]:
    """A ring of `CHAIN` coupled equations x_i^2 = x_(i+1)*p + q, as (tape, quantities), x and p."""
    equations = []
    for i, (square, _) in enumerate(product(range(CHAIN), range(1))):
        b = TapeBuilder()
        x, after, p = b.quantity(0, (0, 0)), b.quantity(1, (0, 0)), b.quantity(2, (0, 0))
        q = b.literal(Literal(1.0, DIMENSIONLESS, "plain", 0, 1))
        tape = b.tape((b.apply("power", x, Fraction(2)), b.apply("add", b.apply("mul", after, p), q)))
        equations.append((tape, (square, (i + 1) % CHAIN, CHAIN)))
    return equations, [1.5] * CHAIN, [0.5] + [1.0] * CHAIN


def test_call_block_as_one_function(benchmark: Any) -> None:
    equations, x, p = chain()
    code, _ = block_code(equations, range(CHAIN))
    residuals, slopes = benchmark(code.linearise, x, p)
    assert residuals[0] == 1.5**2 - 1.5 * 0.5 - 1.0
    assert len(slopes) == 2 * CHAIN


def test_call_block_equation_by_equation(benchmark: Any) -> None:
    equations, x, p = chain()
    values = [*x, p[0]]
    kernels = [
        (float_function(equation_partials(tape, (0, 1))), quantities) for tape, quantities in equations
    ]

    def evaluate() -> list[tuple[float, ...]]:
        return [f(*[values[q] for q in quantities], 1.0) for f, quantities in kernels]

    rows = benchmark(evaluate)
    assert rows[0] == (1.5**2 - 1.5 * 0.5 - 1.0, 3.0, -0.5)
