"""Worksheets of many explicit one-line equations of varied shapes, with the answers worked out beside them.

Each line is a random expression of lengths and ratios over earlier names; its value is computed by plain
floats while the line is written, so that the answers come from outside the program.
"""

from __future__ import annotations

import math
import random
from collections.abc import Callable

Term = tuple[str, float]
"""Text of an expression and its value in SI."""

REACH = 40
"""A line refers to one of that many lines before it: a long chain, and no name used by thousands."""


class Writer:
    """Writes one worksheet; every length stays positive and below some metres, every ratio in 0 .. 2."""

    def __init__(self, seed: int) -> None:
        self.draw = random.Random(seed)
        self.lengths: list[Term] = [("x_0", 1.25)]
        self.ratios: list[Term] = [("r_0", 0.5)]

    def length(self, depth: int) -> Term:
        """An expression with the dimension of a length."""
        if depth == 0:
            return self.draw.choice(self.lengths[-REACH:])
        shapes: list[Callable[[int], Term]] = [
            self._sum,
            self._scaled,
            self._geometric_mean,
            self._diagonal,
            self._literal,
            self._saturated,
            self._mean_length,
            self._quotient,
        ]
        return self.draw.choice(shapes)(depth - 1)

    def ratio(self, depth: int) -> Term:
        """A dimensionless expression."""
        if depth == 0:
            return self.draw.choice(self.ratios[-REACH:])
        shapes: list[Callable[[int], Term]] = [
            self._share,
            self._wave,
            self._decay,
            self._bell,
            self._average,
            self._logarithm,
            self._power,
            self._number,
        ]
        return self.draw.choice(shapes)(depth - 1)

    def _sum(self, depth: int) -> Term:
        (a, x), (b, y) = self.length(depth), self.length(depth)
        return f"({a} + {b})", x + y

    def _scaled(self, depth: int) -> Term:
        (a, x), (b, y) = self.ratio(depth), self.length(depth)
        return f"{a}*{b}", x * y

    def _geometric_mean(self, depth: int) -> Term:
        (a, x), (b, y) = self.length(depth), self.length(depth)
        return f"sqrt({a}*{b})", math.sqrt(x * y)

    def _diagonal(self, depth: int) -> Term:
        (a, x), (b, y) = self.length(depth), self.length(depth)
        return f"({_base(a)}^2 + {_base(b)}^2)^0.5", math.hypot(x, y)

    def _literal(self, depth: int) -> Term:
        (a, x), digits = self.length(depth), self.draw.randint(100, 999)
        unit, factor = self.draw.choice([("mm", 1e-3), ("cm", 1e-2)])
        return f"({a} + {digits} {unit})", x + digits * factor

    def _saturated(self, depth: int) -> Term:
        a, x = self.length(depth)
        return f"4 m * tanh({a}/(3 m))", 4 * math.tanh(x / 3)

    def _mean_length(self, depth: int) -> Term:
        (a, x), (b, y) = self.length(depth), self.length(depth)
        return f"({a} + 2*{b})/3", (x + 2 * y) / 3

    def _quotient(self, depth: int) -> Term:
        (a, x), (b, y) = self.length(depth), self.ratio(depth)
        return f"{a}/(0.8 + {b})", x / (0.8 + y)

    def _share(self, depth: int) -> Term:
        (a, x), (b, y) = self.length(depth), self.length(depth)
        return f"{a}/({a} + {b})", x / (x + y)

    def _wave(self, depth: int) -> Term:
        a, x = self.length(depth)
        return f"(1 + 0.5*sin({a}/(1 m)))", 1 + 0.5 * math.sin(x)

    def _decay(self, depth: int) -> Term:
        a, x = self.ratio(depth)
        return f"exp(-{a})", math.exp(-x)

    def _bell(self, depth: int) -> Term:
        a, x = self.ratio(depth)
        return f"1/(1 + {_base(a)}^2)", 1 / (1 + x**2)

    def _average(self, depth: int) -> Term:
        (a, x), (b, y) = self.ratio(depth), self.ratio(depth)
        return f"({a} + {b})/2", (x + y) / 2

    def _logarithm(self, depth: int) -> Term:
        a, x = self.ratio(depth)
        return f"ln(1.2 + {a})", math.log(1.2 + x)

    def _power(self, depth: int) -> Term:
        a, x = self.ratio(depth)
        exponent = self.draw.choice(["0.8", "1.25", "0.4"])
        return f"(0.1 + {a})^{exponent}/2", (0.1 + x) ** float(exponent) / 2

    def _number(self, depth: int) -> Term:
        (a, x), digits = self.ratio(depth), self.draw.randint(10, 99)
        return f"0.{digits}*{a}", digits / 100 * x

    def add_line(self, number: int) -> str:
        """The next line; what it defines can be used from now on."""
        (depth,) = self.draw.choices([1, 2, 3], weights=[5, 3, 1])
        if self.draw.random() < 0.5:
            text, value = self.length(depth)
            # Kept within metres, and away from zero, so that a long chain neither grows nor dies out.
            line, term = self.draw.choice(
                [
                    (f"0.3 m + 2 m * tanh({text}/(2 m))", 0.3 + 2 * math.tanh(value / 2)),
                    (f"5 m - 4.5 m * exp(-{text}/(4 m))", 5 - 4.5 * math.exp(-value / 4)),
                    (f"sqrt(0.1 m^2 + {text}*(0.5 m))", math.sqrt(0.1 + value * 0.5)),
                ]
            )
            self.lengths.append((f"x_{number}", term))
            return f"x_{number} = {line}"
        text, value = self.ratio(depth)
        line, term = self.draw.choice(
            [
                (f"0.2 + 0.6*{text}", 0.2 + 0.6 * value),
                (f"sqrt(0.3 + {text}/4)", math.sqrt(0.3 + value / 4)),
            ]
        )
        self.ratios.append((f"r_{number}", term))
        return f"r_{number} = {line}"


def _base(text: str) -> str:
    """`text` as the base of a power: in brackets unless it is a name."""
    return text if text.isidentifier() else f"({text})"


def one_line_worksheet(size: int, seed: int = 1) -> tuple[str, dict[str, float]]:
    """A worksheet of `size` explicit equations after two knowns, and the SI values of all quantities."""
    writer = Writer(seed)
    lines = ["x_0 = 1.25 m", "r_0 = 0.5", *(writer.add_line(i) for i in range(1, size + 1))]
    return "\n".join(lines) + "\n", dict(writer.lengths + writer.ratios)
