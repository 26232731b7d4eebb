"""Hiebert's chemical equilibria from 1x, 10x and 100x their starts, amounts kept positive; checked at 50 digits."""

from __future__ import annotations

import mpmath
import numpy as np
import pytest
from hiebert import PROBLEMS, Published, propane, propane_in_logarithms, propane_in_roots, six_species
from plain_problem import plain_problem
from solver_figures import FACTORS, PATIENT, RESIDUAL, SINGLE, distance_to_root, residual_at_50_digits

from eqsheet.solve.ladder import solve_block
from eqsheet.solve.outcome import Outcome


def solved(published: Published, factor: float) -> Outcome:
    """The outcome from a multiple of the start, every unknown but logarithms bounded by zero."""
    start = factor * np.array(published.start, dtype=float)
    lower = None if published.formulas is propane_in_logarithms else np.zeros(start.size)
    problem = plain_problem(published.formulas, start, lower, magnitude=np.maximum(np.abs(start), 1.0))
    outcome = solve_block(problem, PATIENT)
    assert outcome.solved, outcome.full
    assert published.formulas is propane_in_logarithms or (outcome.x > 1e-20).all()
    assert residual_at_50_digits(published.formulas, outcome.x, problem) <= RESIDUAL
    assert distance_to_root(published.formulas, outcome.x) <= SINGLE
    return outcome


@pytest.mark.parametrize("factor", FACTORS)
@pytest.mark.parametrize("published", PROBLEMS, ids=[p.name for p in PROBLEMS])
def test_a_composition_without_negative_amounts_is_found(published: Published, factor: int) -> None:
    solved(published, factor)


def test_two_species_by_hand() -> None:
    """x2 = 10, hence x1 = 50000/10."""
    assert solved(PROBLEMS[0], 1).x == pytest.approx((5000, 10), rel=1e-14)


def test_the_other_reading_of_six_species_has_the_root_printed_with_it() -> None:
    """The one without negative amounts of the three printed in NLtoolbox (src/tests, Hiebert's problem)."""
    reading = next(p for p in PROBLEMS if p.name == "six species, other reading")
    printed = (
        0.82644628099181424635970070847176598631923570438011e-4,
        0.82644628099181424635970070847176598631923570438011e-3,
        0.90909090909186147186147038862875597975247651584838e-4,
        0.90909090909004329004329220681057415048840725181878e-4,
        54.999999999999999818181818181182181818181817073593074,
        0.18181818181781818181818292640692640295982173534745e-15,
    )
    assert solved(reading, 1).x == pytest.approx(printed, rel=1e-9)


def test_six_species_by_a_cubic() -> None:
    """Everything follows from x3; what is left of the third balance is a cubic in it, with one positive root."""
    with mpmath.workdps(50):
        # x1 = 10 x3/(1 + 110000 x3), from x2 = 10 x1 and x4 = 0.001 - 11 x1.
        thousandth, big = mpmath.mpf(1) / 1000, 55 * mpmath.mpf(10) ** 14
        a, b = mpmath.mpf(110000), big
        # 11 x1 + x3 + x5 = 55.001 with x5 = 55 b x3/(1 + b x3), times both denominators.
        left = 55 + thousandth
        cubic = [
            a * b,
            110 * b + a + b + 55 * a * b - left * a * b,
            110 + 1 + 55 * b - left * (a + b),
            -left,
        ]
        roots = mpmath.polyroots(cubic, maxsteps=500, extraprec=500)
        (x3,) = (mpmath.re(root) for root in roots if mpmath.re(root) > 0)
        x1 = 10 * x3 / (1 + a * x3)
        x5 = 55 * b * x3 / (1 + b * x3)
        expected = [float(v) for v in (x1, 10 * x1, x3, thousandth - 11 * x1, x5, 55 - x5)]
    near = next(p for p in PROBLEMS if p.formulas is six_species)
    assert solved(near, 1).x == pytest.approx(expected, rel=1e-9)


def test_propane_has_one_composition_in_all_three_forms() -> None:
    """The unknowns themselves, their logarithms and their roots, as the coding offers them."""
    by_form = {p.formulas: solved(p, 1).x for p in PROBLEMS}
    amounts = by_form[propane]
    assert np.exp(by_form[propane_in_logarithms]) == pytest.approx(amounts, rel=1e-10)
    assert by_form[propane_in_roots] ** 2 == pytest.approx(amounts, rel=1e-10)
