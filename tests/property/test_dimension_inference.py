"""Dimension inference against a units library, against exact linear algebra, and against reordering."""

from __future__ import annotations

import random
from dataclasses import dataclass, replace
from fractions import Fraction

import pint
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st

from eqsheet.model.infer_dimensions import infer_dimensions
from eqsheet.model.tape import Formula, Literal, TapeBuilder
from eqsheet.units.dimension import DIMENSIONLESS, SI_BASES, Dimension

registry = pint.UnitRegistry()
PINT_BASES = {
    "[mass]": "kg",
    "[length]": "m",
    "[time]": "s",
    "[current]": "A",
    "[temperature]": "K",
    "[substance]": "mol",
    "[luminosity]": "cd",
}
PINT_UNITS = {
    "kg": registry.kilogram,
    "m": registry.meter,
    "s": registry.second,
    "A": registry.ampere,
    "K": registry.kelvin,
    "mol": registry.mole,
    "cd": registry.candela,
}
exponents = st.integers(-3, 3)
powers = st.sampled_from([Fraction(2), Fraction(-1), Fraction(1, 2), Fraction(3, 2), Fraction(-2, 3)])


def dimension_of(value: pint.Quantity) -> Dimension:
    """Our dimension of a value of the units library, whose exponents may be floats."""
    return Dimension.of(
        {
            PINT_BASES[base]: Fraction(power).limit_denominator(10_000)
            for base, power in value.dimensionality.items()
        }
    )


@dataclass
class Written:
    """An expression in both worlds: our instruction, and the units library's value."""

    instruction: int
    value: pint.Quantity


def literal(builder: TapeBuilder, dimension: Dimension) -> int:
    return builder.literal(Literal(2.0, dimension, "plain", 0, 1))


@st.composite
def worksheets(draw: st.DrawFn) -> tuple[list[Formula], int, list[Dimension]]:
    """Knowns, and equations that define one quantity each by an expression of earlier ones, all well dimensioned.

    Gives the formulas, the number of quantities and the dimensions by the units library.
    """
    formulas: list[Formula] = []
    values: list[pint.Quantity] = []
    for number in range(draw(st.integers(1, 4))):
        unit = registry.dimensionless
        for base in draw(st.lists(st.sampled_from(SI_BASES), max_size=3)):
            unit = unit * PINT_UNITS[base] ** draw(exponents)
        values.append(2.0 * unit)
        builder = TapeBuilder()
        quantity = builder.quantity(number, (0, 1))
        known = literal(builder, dimension_of(values[-1]))
        formulas.append(builder.formula((quantity, known), number, ((quantity, known),)))
    for number in range(len(values), len(values) + draw(st.integers(1, 4))):
        builder = TapeBuilder()
        whole = draw_expression(draw, builder, values, 3)
        quantity = builder.quantity(number, (0, 1))
        values.append(whole.value)
        pair = (quantity, whole.instruction)
        formulas.append(builder.formula(pair, number, (pair,)))
    return formulas, len(values), [dimension_of(value) for value in values]


def draw_expression(
    draw: st.DrawFn, builder: TapeBuilder, values: list[pint.Quantity], depth: int
) -> Written:
    if depth == 0:
        number = draw(st.integers(0, len(values) - 1))
        return Written(builder.quantity(number, (0, 1)), values[number])
    a = draw_expression(draw, builder, values, depth - 1)
    match draw(st.sampled_from(["mul", "div", "power", "sqrt", "add", "max", "exp", "neg", "zero", "leaf"])):
        case "mul":
            b = draw_expression(draw, builder, values, depth - 1)
            return Written(builder.apply("mul", a.instruction, b.instruction), a.value * b.value)
        case "div":
            b = draw_expression(draw, builder, values, depth - 1)
            return Written(builder.apply("div", a.instruction, b.instruction), a.value / b.value)
        case "power":
            power = draw(powers)
            return Written(builder.apply("power", a.instruction, power), a.value**power)
        case "sqrt":
            return Written(builder.apply("sqrt", a.instruction), a.value**0.5)
        case "add" | "max" as operation:
            same = literal(builder, dimension_of(a.value))
            return Written(builder.apply(operation, a.instruction, same), a.value)
        case "exp":
            ratio = builder.apply("div", a.instruction, literal(builder, dimension_of(a.value)))
            return Written(builder.apply("exp", ratio), 1.0 * registry.dimensionless)
        case "neg":
            return Written(builder.apply("neg", a.instruction), a.value)
        case "zero":
            return Written(builder.apply("add", builder.constant(Fraction(0)), a.instruction), a.value)
    return a


@given(worksheets())
@settings(deadline=None, max_examples=150)
def test_dimensions_are_those_of_the_units_library(
    worksheet: tuple[list[Formula], int, list[Dimension]],
) -> None:
    formulas, quantities, expected = worksheet
    result = infer_dimensions(formulas, quantities)
    assert result.clashes == ()
    assert list(result.dimensions) == expected


@given(worksheets(), st.integers(0, 10**6))
@settings(deadline=None, max_examples=60)
def test_order_of_lines_and_numbers_of_quantities_do_not_matter(
    worksheet: tuple[list[Formula], int, list[Dimension]], seed: int
) -> None:
    formulas, quantities, expected = worksheet
    shuffler = random.Random(seed)
    numbers = list(range(quantities))
    shuffler.shuffle(numbers)
    shuffled = [replace(f, quantities=tuple(numbers[q] for q in f.quantities)) for f in formulas]
    shuffler.shuffle(shuffled)
    result = infer_dimensions(shuffled, quantities)
    assert [result.dimensions[numbers[q]] for q in range(quantities)] == expected


@given(worksheets(), st.floats(1e-6, 1e6))
@settings(deadline=None, max_examples=30)
def test_the_size_of_units_does_not_matter(
    worksheet: tuple[list[Formula], int, list[Dimension]], factor: float
) -> None:
    formulas, quantities, expected = worksheet
    rescaled = [
        replace(f, literals=tuple(replace(x, value=x.value * factor) for x in f.literals)) for f in formulas
    ]
    assert list(infer_dimensions(rescaled, quantities).dimensions) == expected


@given(worksheets(), st.data())
@settings(deadline=None, max_examples=60)
def test_a_wrong_unit_is_noticed_where_the_quantity_is_fixed_otherwise(
    worksheet: tuple[list[Formula], int, list[Dimension]], data: st.DataObject
) -> None:
    """A second known with another unit for any quantity of a consistent worksheet is a contradiction."""
    formulas, quantities, expected = worksheet
    quantity = data.draw(st.integers(0, quantities - 1))
    builder = TapeBuilder()
    pair = (builder.quantity(quantity, (0, 1)), literal(builder, expected[quantity] * Dimension.of({"m": 1})))
    result = infer_dimensions([*formulas, builder.formula(pair, quantities, (pair,))], quantities)
    assert result.clashes


@st.composite
def products(draw: st.DrawFn) -> tuple[list[list[int]], list[int], int]:
    """Random systems ``product of x_j^a_ij = b_i metres``, consistent or not."""
    unknowns = draw(st.integers(1, 5))
    rows = draw(
        st.lists(st.lists(st.integers(-2, 2), min_size=unknowns, max_size=unknowns), min_size=1, max_size=6)
    )
    right = draw(st.lists(st.integers(-2, 2), min_size=len(rows), max_size=len(rows)))
    return rows, right, unknowns


def product_formula(row: list[int], metres: int, statement: int) -> Formula:
    builder = TapeBuilder()
    whole = builder.constant(Fraction(3))
    for number, power in enumerate(row):
        if power:
            factor = builder.apply("power", builder.quantity(number, (0, 1)), Fraction(power))
            whole = builder.apply("mul", whole, factor)
    pair = (whole, literal(builder, Dimension.of({"m": metres})))
    return builder.formula(pair, statement, (pair,))


@given(products())
@settings(deadline=None, max_examples=200)
def test_the_verdict_and_the_unifier_are_those_of_exact_linear_algebra(
    system: tuple[list[list[int]], list[int], int],
) -> None:
    """Consistent if and only if the ranks agree; an unknown is fixed if its unit vector is in the row space."""
    rows, right, unknowns = system
    matrix = sympy.Matrix(rows)
    augmented = matrix.row_join(sympy.Matrix(right))
    result = infer_dimensions(
        [product_formula(row, b, i) for i, (row, b) in enumerate(zip(rows, right, strict=True))], unknowns
    )
    consistent = matrix.rank() == augmented.rank()
    assert (result.clashes == ()) == consistent
    if not consistent:
        return
    for unknown in range(unknowns):
        unit = sympy.Matrix([[1 if j == unknown else 0 for j in range(unknowns)]])
        fixed = matrix.col_join(unit).rank() == matrix.rank()
        assert (result.dimensions[unknown] is not None) == fixed
    exponent = [dict(d or DIMENSIONLESS).get("m", Fraction(0)) for d in result.dimensions]
    if result.unknown == ():
        for row, b in zip(rows, right, strict=True):
            assert sum(a * e for a, e in zip(row, exponent, strict=True)) == b
    for link in result.links:
        powers = [Fraction(0)] * unknowns
        for quantity, power in link.powers:
            powers[quantity] = Fraction(power)
        stacked = augmented.col_join(
            sympy.Matrix([[*map(sympy.Rational, powers), sympy.Rational(dict(link.dimension).get("m", 0))]])
        )
        assert stacked.rank() == augmented.rank()


@given(products())
@settings(deadline=None, max_examples=100)
def test_what_is_left_after_the_clashes_is_consistent(
    system: tuple[list[list[int]], list[int], int],
) -> None:
    rows, right, unknowns = system
    formulas = [product_formula(row, b, i) for i, (row, b) in enumerate(zip(rows, right, strict=True))]
    blamed = {clash.formula for clash in infer_dimensions(formulas, unknowns).clashes}
    rest = [f for i, f in enumerate(formulas) if i not in blamed]
    assert infer_dimensions(rest, unknowns).clashes == ()
    for index in blamed:
        assert infer_dimensions([*rest, formulas[index]], unknowns).clashes != ()
