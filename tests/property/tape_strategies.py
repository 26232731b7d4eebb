"""Random tapes and values for them."""

from __future__ import annotations

from fractions import Fraction

from hypothesis import strategies as st

from eqsheet.model.tape import BINARY_FUNCTIONS, UNARY_FUNCTIONS, Literal, Tape, TapeBuilder
from eqsheet.units.dimension import DIMENSIONLESS, Dimension
from eqsheet.units.unit import Unit

QUANTITIES = 3
PLACE = (0, 0)
POWERS = [Fraction(p) for p in ("2", "3", "4", "-1", "-2", "1/2", "-1/2", "3/2", "1/3", "0")]
ARITHMETIC = ("neg", "add", "sub", "mul", "div")
UNITS = [
    Unit("degF", Dimension.of({"K": 1}), 5 / 9, 459.67 * 5 / 9, reading=True),
    Unit("mm", Dimension.of({"m": 1}), 1e-3),
]


def literal(value: float) -> Literal:
    """A dimensionless literal."""
    return Literal(value, DIMENSIONLESS, "plain", 0, 1)


@st.composite
def tapes(draw: st.DrawFn, steps: int = 9, branching: bool = True) -> Tape:
    """A tape of three quantities, one literal and two outputs (left, right)."""
    b = TapeBuilder()
    pool = [b.quantity(10 + k, PLACE) for k in range(QUANTITIES)]
    pool += [b.literal(literal(1.7)), b.constant(Fraction(2)), b.constant(Fraction(1, 3))]
    kinds = ["arithmetic"] * 5 + ["unary", "binary", "power", "pow", "unit"] + ["if"] * branching

    def operand() -> int:
        # Half of the time one of the latest, so that expressions grow deep.
        return draw(st.sampled_from(pool[-3:] if draw(st.booleans()) else pool))

    for _ in range(draw(st.integers(1, steps))):
        kind = draw(st.sampled_from(kinds))
        if kind == "arithmetic":
            operation = draw(st.sampled_from(ARITHMETIC))
            used = [operand()] if operation == "neg" else [operand(), operand()]
            pool.append(b.apply(operation, *used))
        elif kind == "unary":
            pool.append(b.apply(draw(st.sampled_from(UNARY_FUNCTIONS)), operand()))
        elif kind == "binary":
            pool.append(b.apply(draw(st.sampled_from(BINARY_FUNCTIONS)), operand(), operand()))
        elif kind == "power":
            pool.append(b.apply("power", operand(), draw(st.sampled_from(POWERS))))
        elif kind == "pow":
            pool.append(b.apply("pow", operand(), operand()))
        elif kind == "unit":
            pool.append(
                b.apply(draw(st.sampled_from(["strip", "attach"])), operand(), draw(st.sampled_from(UNITS)))
            )
        else:
            condition = b.apply(draw(st.sampled_from(["lt", "le"])), operand(), operand())
            joint = draw(st.sampled_from(["plain", "and", "or", "not"]))
            if joint in ("and", "or"):
                condition = b.apply(joint, condition, b.apply("lt", operand(), operand()))
            elif joint == "not":
                condition = b.apply("not", condition)
            pool.append(b.apply("if", condition, operand(), operand()))
    return b.tape((pool[-1], operand()))


def values() -> st.SearchStrategy[tuple[float, ...]]:
    """Values for the quantities and the literal of `tapes`, of moderate size and both signs."""
    one = st.floats(0.2, 3.0).flatmap(lambda size: st.sampled_from([size, size, -size]))
    return st.tuples(*[one] * (QUANTITIES + 1))
