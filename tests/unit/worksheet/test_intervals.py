"""Bounds carried through equations hold every solution, and prove where there is none."""

from __future__ import annotations

import math
from collections.abc import Sequence

import pytest
from solving import only, solve

import eqsheet
from eqsheet.worksheet.interval import increasing, meet, over, plus, raised, reciprocal, root, times
from eqsheet.worksheet.intervals import Narrowed, narrowed

OPEN = (-math.inf, math.inf)
POSITIVE = (0.0, math.inf)


def narrow(
    text: str, bounds: dict[str, tuple[float, float]]
) -> tuple[Narrowed, dict[str, tuple[float, float]]]:
    """The unknowns' ranges of a worksheet of equations in numbers, taken as one block."""
    prepared = eqsheet.parse(text).prepare()
    names: Sequence[str] = prepared.system.names
    unknowns = range(len(names))
    given = [bounds.get(name, OPEN) for name in names]
    found = narrowed(unknowns, prepared.formulas, [math.nan] * len(names), given)
    return found, dict(zip(names, found.ranges))


def holds(interval: tuple[float, float], low: float, high: float) -> bool:
    """Whether the interval is that from low to high, but for its widening."""
    return interval == pytest.approx((low, high), rel=1e-9) and interval[0] <= low and interval[1] >= high


def test_sums_and_products_narrow_positive_unknowns() -> None:
    """From x + y = 5 with both positive, each is below 5; then x*y = 6 keeps each above 6/5."""
    found, ranges = narrow("x + y = 5\nx*y = 6\n", {"x": POSITIVE, "y": POSITIVE})
    assert found.empty == -1
    assert ranges["x"][0] >= 1.199 and ranges["x"][1] <= 3.81
    assert ranges["x"][0] <= 2.0 and ranges["x"][1] >= 3.0


def test_monotone_functions_are_turned_back() -> None:
    _, ranges = narrow("ln(x) = y\ny + z = 1\nsqrt(z) = w\n", {"w": (0.0, 2.0)})
    assert holds(ranges["z"], 0.0, 4.0)
    assert holds(ranges["y"], -3.0, 1.0)
    assert holds(ranges["x"], math.exp(-3.0), math.e)


@pytest.mark.parametrize(
    "text",
    [
        "x^2 + y^2 = -1\nx - y = 0.5",
        "y = x^2 + 2\ny = 1 - x^2",
        "exp(x) + y = 1\ny = 2 + exp(x)",
        "sin(x)*cos(y) = 1.2\nx + y = 1",
        "y = sqrt(x)\nx = -2 - y",
    ],
)
def test_what_has_no_solution_is_proven_to_have_none(text: str) -> None:
    found, _ = narrow(text, {})
    assert found.empty >= 0
    assert only(solve(text), "no-solution").message.startswith("there is no solution")


def test_nothing_is_proven_that_is_not_certain() -> None:
    """The curves touch at x = 0; parallel lines are out of reach of ranges."""
    assert narrow("y = x^2 + 1\ny = 1 - x^2\n", {})[0].empty == -1
    assert narrow("x + y = 1\nx + y = 2\n", {})[0].empty == -1


def test_the_message_says_what_is_certain_and_by_which_line() -> None:
    found = only(solve("x^2 + y^2 = -1\nx - y = 0.5"), "no-solution")
    assert "this is certain: no values satisfy line 1" in found.notes
    assert found.help.startswith("no start value helps")


def test_products_with_zero_and_infinity() -> None:
    assert times((0.0, 0.0), OPEN) == (0.0, 0.0)
    assert plus((-math.inf, 0.0), (0.0, math.inf)) == OPEN
    assert times((1e-200, 1e-200), (1e-200, 1e-200))[1] > 0.0


def test_quotients_by_what_holds_zero() -> None:
    assert reciprocal((0.0, 0.0)) is None
    assert over((1.0, 1.0), (-1.0, 1.0)) == OPEN
    inverse = reciprocal((0.0, 2.0))
    assert inverse is not None and holds((inverse[0], 1.0), 0.5, 1.0) and inverse[1] == math.inf


def test_even_powers_have_roots_on_both_sides() -> None:
    square = raised((-2.0, 1.0), 2.0)
    assert square is not None and holds(square, 0.0, 4.0)
    both = root((4.0, 9.0), 2.0, OPEN)
    assert both is not None and holds(both, -3.0, 3.0)
    right = root((4.0, 9.0), 2.0, POSITIVE)
    assert right is not None and holds(right, 2.0, 3.0)
    assert root((-9.0, -4.0), 2.0, OPEN) is None
    odd = root((-8.0, 27.0), 3.0, OPEN)
    assert odd is not None and holds(odd, -2.0, 3.0)


def test_outside_its_domain_a_function_has_no_range() -> None:
    assert increasing(math.sqrt, (-2.0, -1.0), POSITIVE) is None
    assert meet((0.0, 1.0), (2.0, 3.0)) is None


@pytest.mark.parametrize(
    "text",
    ["exp(x) = 0", "10^x = 0", "3*exp(-x) = 0", "exp(x) + exp(2*x) = 0", "2^(x^2) = 0.5", "0.5^x = -1"],
)
def test_what_a_power_only_tends_to_is_never_reached(text: str) -> None:
    """exp(x) underflows to 0 in floats, so that a search sees it satisfied; no number satisfies it."""
    assert narrow(text, {})[0].empty == 0
    message = only(solve(text), "no-solution")
    assert message.message.startswith("there is no solution")
    assert "this is certain: no values satisfy line 1" in message.notes
    assert not any("0 against 0" in note or "-1149" in note for note in message.notes)


def test_powers_of_a_constant_narrow_their_exponent() -> None:
    _, ranges = narrow("10^x = y", {"y": (0.01, 1000.0)})
    assert holds(ranges["x"], -2.0, 3.0)


def test_infinity_alone_is_nothing() -> None:
    assert meet((-math.inf, 0.0), (-math.inf, -math.inf)) is None
    assert meet((2.0, 2.0), (1.0, 3.0)) == (2.0, 2.0)


@pytest.mark.parametrize(
    "condition", ["x > 0", "0 < x", "not (x <= 0)", "x > 0 and y > -5", "x >= 0 or x > 3"]
)
def test_a_branch_narrows_where_the_other_cannot_be_taken(condition: str) -> None:
    """With y in 1 .. 2 only the first branch serves, and x is in 1 .. 4; with y open nothing is known of x."""
    text = f"y = if {condition} then sqrt(x) else -sqrt(-x)\n"
    _, ranges = narrow(text, {"y": (1.0, 2.0)})
    assert holds(ranges["x"], 1.0, 4.0)
    found, ranges = narrow(text, {})
    assert found.empty == -1 and ranges["x"] == OPEN and ranges["y"] == OPEN


def test_a_condition_narrows_where_its_branch_is_taken() -> None:
    text = "y = if x < 3 and 1 <= x then -1 else 1\n"
    _, ranges = narrow(text, {"y": (-2.0, 0.0)})
    assert holds(ranges["x"], 1.0, 3.0)
    assert narrow(text, {"y": (-2.0, 0.0), "x": (4.0, 5.0)})[0].empty == 0
    _, ranges = narrow("y = if x < 3 or x > 7 then -1 else 1\n", {"y": (0.0, 2.0)})
    assert holds(ranges["x"], 3.0, 7.0)


def test_a_proof_for_values_found_before_is_worded_as_one() -> None:
    """The other roots of the first lines would not do either, but that is not what bounds prove."""
    found = only(
        solve("(a-1)*(a-3) = 0\nb^2 + a*b = 4\na near 1.2\nb near 0.8\nsqrt(c) = a*b - 3.2"), "no-solution"
    )
    assert found.message == "no solution with the values found before: `c` from line 5"
    assert "with a = 1, b = 1.5616 this is certain: no values satisfy line 5" in found.notes
    assert found.help is not None and "may lead `a` and `b` to another solution" in found.help


@pytest.mark.parametrize(
    "before",
    [
        "A = pi*(2.0)^2/4",
        "p + A = 4\np - A = 2",
        "exp(A) + 1 = 3",
        "A*exp(A) = 3",
        "A^2 = 4\nA within 0 ..",
        "sin(w) = 0.5\nA = 2 + w^2",
    ],
)
def test_a_proof_that_holds_whatever_was_found_before_is_one_of_the_worksheet(before: str) -> None:
    found = only(solve(f"{before}\nx^2 = -A"), "no-solution")
    assert found.message.startswith("there is no solution")
    assert any(note.startswith("this is certain: no values") for note in found.notes)


def test_what_follows_in_one_way_from_a_value_that_may_differ_may_differ() -> None:
    text = "(a-1)*(a-3) = 0\nb^2 + a*b = 4\na near 1.2\nb near 0.8\nv = a*b\nsqrt(c) = v - 3.2"
    found = only(solve(text), "no-solution")
    assert found.message == "no solution with the values found before: `c` from line 6"
    assert found.help is not None and "may lead `v` to another solution" in found.help


def test_a_wave_narrows_its_argument_within_the_turns_given() -> None:
    """sin(x) = 1/2 for x from 0 to 2: only pi/6; from 2 to 9: from 5 pi/6 to 17 pi/6; cos(y) = 0 from 1 to 4: pi/2."""
    _, ranges = narrow("sin(x) = 0.5\n", {"x": (0.0, 2.0)})
    assert ranges["x"] == pytest.approx((math.pi / 6, math.pi / 6), rel=1e-9)
    _, ranges = narrow("sin(x) = 0.5\n", {"x": (2.0, 9.0)})
    assert ranges["x"] == pytest.approx((5 * math.pi / 6, 17 * math.pi / 6), rel=1e-9)
    _, ranges = narrow("cos(y) = 0\n", {"y": (1.0, 4.0)})
    assert ranges["y"] == pytest.approx((math.pi / 2, math.pi / 2), rel=1e-9)
    _, ranges = narrow("tan(y) = 1\n", {"y": (2.0, 4.0)})
    assert ranges["y"] == pytest.approx((5 * math.pi / 4, 5 * math.pi / 4), rel=1e-9)


@pytest.mark.parametrize(
    ("text", "bounds"),
    [
        ("sin(x) = 0.5", {"x": (1.0, 2.0)}),
        ("cos(x) = -0.2", {"x": (-1.0, 1.0)}),
        ("tan(x) = 5", {"x": (0.0, 1.0)}),
        ("x^1.8 = 3", {"x": (2.0, math.inf)}),
        ("max(x, y) = 2", {"x": (3.0, 4.0), "y": (0.0, 1.0)}),
        ("cosh(x) = 2", {"x": (-1.0, 1.0)}),
    ],
)
def test_what_no_part_of_a_range_gives_is_proven_impossible(
    text: str, bounds: dict[str, tuple[float, float]]
) -> None:
    assert narrow(text + "\n", bounds)[0].empty == 0


def test_powers_of_what_may_be_zero_are_turned_back() -> None:
    """x^1.8 = 3 + y with y to 4 leaves x from 3^(1/1.8) to 7^(1/1.8), by a constant exponent and by a known one."""
    expected = (3.0 ** (1 / 1.8), 7.0 ** (1 / 1.8))
    bounds = {"x": POSITIVE, "y": (0.0, 4.0), "n": (1.8, 1.8)}
    for power in ("x^1.8", "x^n"):
        assert narrow(f"{power} = 3 + y\n", bounds)[1]["x"] == pytest.approx(expected, rel=1e-9)


def test_a_curve_narrows_what_it_is_read_at() -> None:
    """Head of a pump between 10 and 20 m: on the falling part only, by the points of the curve (data invented)."""
    text = """
curve head(Q in L/s) in m by line:
    0 30
    4 25
    8 10
H = head(Q)
"""
    _, ranges = narrow(text, {"Q": (0.0, math.inf), "H": (10.0, 20.0)})
    assert ranges["Q"] == pytest.approx((4e-3 + 4e-3 / 3, 8e-3), rel=1e-9)
    assert narrow(text, {"Q": (6e-3, 7e-3), "H": (20.0, 24.0)})[0].empty == 0
