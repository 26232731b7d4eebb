"""What is said of blocks that cannot be solved: the reason itself, and nothing that contradicts it."""

from __future__ import annotations

import pytest
from solving import only, solve

# A heat exchanger that would have to heat the cold side above the hot inlet (data invented).
CROSSED = """
m1 = 1 kg/s
m2 = 0.5 kg/s
cp = 4.18 kJ/(kg*K)
Th_in = 80 degC
Tc_in = 20 degC
Tc_out = 90 degC
Q = m2*cp*(Tc_out - Tc_in)
Q = m1*cp*(Th_in - Th_out)
Q = U*A*logmean(Th_in - Tc_out, Th_out - Tc_in)
U = 500 W/(m^2*K)
"""


def test_a_part_without_a_value_whatever_the_unknown_is_named_itself() -> None:
    found = only(solve(CROSSED), "no-solution")
    assert found.message.startswith("`A` cannot be found: `logmean(Th_in - Tc_out, Th_out - Tc_in)` takes")
    assert "`Th_in - Tc_out` is -10 K" in found.notes
    assert not any("best point" in note or "without a guess" in note for note in found.notes)
    assert found.help == "check the values it uses, and the lines they come from"


def test_a_value_that_rests_on_noise_is_said_to() -> None:
    """The two lines are one line but for the last digits, so that x = 0 comes out as some 1e-7."""
    found = only(solve("x + y = 2\nx + 1.0000000001*y = 2.0000000002\nz = 1/(x - 1e-9)"), "no-solution")
    assert found.message == "no value to rely on: `z` from line 3"
    assert "no digit of `x`, which it uses, is good" in found.notes


def test_a_flow_beyond_the_choked_one_ends_at_the_choked_one() -> None:
    """The mass flow through a section is largest at Mach 1."""
    text = """
        p0 = 5 bar
        T0 = 300 K
        A = 1 cm^2
        R = 287 J/(kg*K)
        g = 1.4
        m = 0.2 kg/s
        m = A*p0/sqrt(R*T0)*sqrt(g)*M*(1+(g-1)/2*M^2)^(-(g+1)/(2*(g-1)))
        """
    found = only(solve(text), "no-solution")
    assert "no step brings the sides closer together" in found.message
    assert "best point: M = 1" in found.notes


def test_a_detached_shock_is_no_matter_of_the_bounds() -> None:
    """Deflected by 35 deg at Mach 2.5 a shock detaches; angles a thousand turns away are no remedy."""
    text = """
        M = 2.5
        th = 35 deg
        g = 1.4
        tan(th) = 2/tan(b)*(M^2*sin(b)^2 - 1)/(M^2*(g + cos(2*b)) + 2)
        b near 37 deg within 0 deg .. 90 deg
        """
    found = only(solve(text), "no-solution")
    assert "no step brings the sides closer together" in found.message
    # The largest deflection is at a shock angle of 64.8 deg (theta-beta-M relation, from memory).
    (best,) = [note for note in found.notes if note.startswith("best point: b = ")]
    assert float(best.split()[4]) == pytest.approx(64.8, abs=0.1)
    assert not any("outside the bounds" in note for note in found.notes)


def test_a_bound_is_rested_on_only_where_it_is_reached() -> None:
    """A network that cannot carry the flow: told by its lines, pressures start far too high."""
    text = """
        p0 = 5 bar
        k = 1e6 Pa*s^2/L^2
        q1 = 1 L/s
        q2 = 2 L/s
        q3 = 1.5 L/s
        p0 - p1 = k*Q01*abs(Q01)
        p1 - p2 = k*Q12*abs(Q12)
        p2 - p3 = k*Q23*abs(Q23)
        p1 - p3 = k*Q13*abs(Q13)
        Q01 = Q12 + Q13 + q1
        Q12 = Q23 + q2
        Q13 + Q23 = q3
        p3 within 0 bar ..
        p2 within 0 bar ..
        p1 within 0 bar ..
        """
    solution = solve(text)
    found = only(solution, "no-solution")
    for name in ("p1", "p2", "p3"):
        if any(note.startswith(f"`{name}` rests on its lower bound") for note in found.notes):
            assert solution.best[name].si < 1.0


def test_in_a_branch_that_is_taken_for_sure_too() -> None:
    found = only(solve("a + 1 = 3*a\nb = -2\ny = if a > 0 then sqrt(b) else 1"), "no-solution")
    assert found.message == "`y` has no value: `sqrt(b)` takes the square root of a negative number"


@pytest.mark.parametrize(
    "line, message",
    [
        (
            "1.35 = if a < b then c else 1.35",
            "no single solution: the equations leave a combination of unknowns free: `c` from line 3",
        ),
        ("1.35 = if a > b then 1.3 else c", "no solution with the values found before: `c` from line 3"),
    ],
)
def test_an_unknown_that_only_the_other_branch_holds(line: str, message: str) -> None:
    """The branch is settled by what other lines give: a is 1 and b a little less."""
    assert only(solve(f"b/a = 0.986\na^3 + a = 2\n{line}"), "no-solution").message == message
