"""Verdicts on the square problems of Moré, Garbow and Hillstrom from 1x, 10x and 100x their starts."""

import pytest
from more_garbow_hillstrom import PROBLEMS
from solver_figures import FACTORS, run


@pytest.mark.parametrize("factor", FACTORS)
@pytest.mark.parametrize("published", PROBLEMS, ids=[p.name for p in PROBLEMS])
def test_the_verdict_is_right_at_50_digits(published, factor):
    result = run(published, factor)
    assert not result.false_success
    assert result.right, result.outcome.full


@pytest.mark.parametrize(
    ("number", "root"),
    [
        # Values as the paper prints them.
        (1, (1, 1)),
        (2, (5, 4)),
        (3, (1.098e-5, 9.106)),
        (7, (1, 0, 0)),
        (13, (0, 0, 0, 0)),
    ],
)
def test_the_published_root_is_the_one_found(number, root):
    published = next(p for p in PROBLEMS if p.number == number)
    x = run(published, 1).outcome.x
    assert x == pytest.approx(root, rel=5e-4, abs=1e-9)
