"""Branches held, and the conditions they hang on."""

from __future__ import annotations

from fractions import Fraction

from eqsheet.model.evaluate import evaluate
from eqsheet.model.generate import float_function
from eqsheet.model.specialise import conditions, specialise, specialise_formula
from eqsheet.model.tape import Formula, Literal, Tape, TapeBuilder
from eqsheet.units.dimension import DIMENSIONLESS


def nusselt() -> tuple[Formula, dict[str, int]]:
    """Nu = if Re < 2300 and not 5 <= Pr then 3.66 else c*Re^(4/5), quantities 20 Nu, 21 Re, 22 Pr, 23 c."""
    b = TapeBuilder()

    def number(value: float, start: int) -> int:
        return b.literal(Literal(value, DIMENSIONLESS, "plain", start, start + 4))

    at = {"Nu": b.quantity(20, (0, 2)), "Re": b.quantity(21, (8, 10))}
    at["slow"] = b.apply("lt", at["Re"], number(2300.0, 13), place=(8, 17))
    at["viscous"] = b.apply("le", number(5.0, 26), b.quantity(22, (31, 33)), place=(26, 33))
    condition = b.apply("and", at["slow"], b.apply("not", at["viscous"], place=(22, 33)), place=(8, 33))
    at["laminar"] = number(3.66, 39)
    power = b.apply("power", at["Re"], Fraction(4, 5), place=(51, 59))
    at["turbulent"] = b.apply("mul", b.quantity(23, (49, 50)), power, place=(49, 59))
    at["if"] = b.apply("if", condition, at["laminar"], at["turbulent"], place=(5, 59))
    alike = ((at["Nu"], at["if"]), (at["laminar"], at["turbulent"]))
    return b.formula((at["Nu"], at["if"]), 4, alike, (at["turbulent"],)), at


def test_taken_branch_drops_what_only_the_other_one_used() -> None:
    formula, at = nusselt()
    held = specialise_formula(formula, {at["if"]: True})
    assert held.tape == Tape((("quantity", 0), ("literal", 0)), (0, 1), 1, 1)
    assert held.quantities == (20,)
    assert [one.value for one in held.literals] == [3.66]
    assert held.places == ((0, 2), (39, 43))
    assert held.alike == ((0, 1),)
    assert held.differences == ()
    assert held.statement == 4


def test_other_branch_keeps_its_places_and_pairs() -> None:
    formula, at = nusselt()
    held = specialise_formula(formula, {at["if"]: False})
    assert held.quantities == (20, 21, 23)
    assert held.literals == ()
    right = held.tape.outputs[1]
    assert held.places[right] == (49, 59)
    assert held.alike == ((held.tape.outputs[0], right),)
    assert held.differences == (right,)
    assert float_function(held.tape)(1.0, 32.0, 0.5) == (1.0, 0.5 * 32.0**0.8)


def test_numbers_lead_from_old_to_new_instructions() -> None:
    formula, at = nusselt()
    held = specialise(formula.tape, {at["if"]: False})
    assert held.numbers[at["if"]] == held.numbers[at["turbulent"]] == held.tape.outputs[1]
    assert held.numbers[at["slow"]] is None
    assert held.quantities == (0, 1, 3)


def test_conditions_give_signed_gaps() -> None:
    formula, at = nusselt()
    (condition,) = conditions(formula.tape)
    assert condition.instruction == at["if"]
    assert [c.operation for c in condition.comparisons] == ["lt", "le"]
    literals = [one.value for one in formula.literals]
    gaps = [float_function(c.gap)(0.0, 2000.0, 3.0, 0.1, *literals) for c in condition.comparisons]
    assert gaps == [-300.0, 2.0]
    steps = evaluate(condition.truth, (0.0, 2000.0, 3.0, 0.1), literals)
    assert steps[condition.truth.outputs[0]] is True


def test_if_within_a_branch_can_be_held_with_it_or_alone() -> None:
    b = TapeBuilder()
    x, y, z = (b.quantity(k, (0, 1)) for k in range(3))
    inner = b.apply("if", b.apply("lt", y, z), y, z)
    outer = b.apply("if", b.apply("lt", x, y), inner, x)
    tape = b.tape((outer,))
    assert [c.instruction for c in conditions(tape)] == [inner, outer]
    both = specialise(tape, {inner: False, outer: True})
    assert both.tape.instructions == (("quantity", 0),)
    assert both.quantities == (2,)
    alone = specialise(tape, {outer: True})
    assert [c.comparisons[0].operation for c in conditions(alone.tape)] == ["lt"]
    assert specialise(tape, {inner: True, outer: False}).quantities == (0,)


def test_instructions_become_one_where_holding_makes_them_equal() -> None:
    b = TapeBuilder()
    x, y = b.quantity(0, (0, 1)), b.quantity(1, (0, 1))
    chosen = b.apply("if", b.apply("lt", x, y), x, y)
    tape = b.tape((b.apply("sqrt", chosen), b.apply("sqrt", x)))
    held = specialise(tape, {chosen: True})
    assert held.tape == Tape((("quantity", 0), ("sqrt", 0)), (1, 1), 1, 0)
