"""Compressible flow of a perfect gas, gamma = 1.4, against the tables of NACA Report 1135 (1953).

The table values are quoted from memory, with the digits the tables print; half a unit of the last printed
place is the tolerance. Each result is also put back into the closed relation it came from, written here a
second time.
"""

from __future__ import annotations

from collections.abc import Callable
from math import asin, atan, cos, degrees, pi, radians, sin, sqrt, tan

import pytest

import eqsheet

Solve = Callable[[str], eqsheet.Solution]


def test_normal_shock_from_the_three_balances(solved: Solve) -> None:
    """NACA 1135, table II at M1 = 2: M2 0.5774, p2/p1 4.500, rho2/rho1 2.667, T2/T1 1.688, pt2/pt1 0.7209."""
    solution = solved(
        """
        # Air at 40 kPa and -20 degC meets a shock; nothing but the balances of mass, momentum and energy.
        show u2 in m/s, p2 in kPa, T2 in degC
        kappa = 1.4
        R = 287.05 J/(kg*K)
        cp = kappa*R/(kappa - 1)
        p1 = 40 kPa
        T1 = -20 degC
        M1 = 2
        u1 = M1*sqrt(kappa*R*T1)
        rho1 = p1/(R*T1)

        mass: rho1*u1 = rho2*u2
        momentum: p1 + rho1*u1^2 = p2 + rho2*u2^2
        energy: cp*T1 + u1^2/2 = cp*T2 + u2^2/2
        p2 = rho2*R*T2
        M2 = u2/sqrt(kappa*R*T2)

        # Without a shock the balances hold too: the bounds ask for the slower flow.
        u2 near u1/3 within 0 m/s .. 0.9*u1
        rho2 near 3*rho1 within rho1 ..
        p2 near 4*p1 within p1 ..
        T2 near 1.5*T1 within T1 ..

        ratio_p = p2/p1
        ratio_rho = rho2/rho1
        ratio_T = T2/T1
        ratio_pt = ratio_p*((1 + (kappa - 1)/2*M2^2)/(1 + (kappa - 1)/2*M1^2))^(kappa/(kappa - 1))
        """
    )
    printed = {"M2": 0.5774, "ratio_p": 4.500, "ratio_rho": 2.667, "ratio_T": 1.688, "ratio_pt": 0.7209}
    for name, value in printed.items():
        assert solution[name].value == pytest.approx(value, abs=0.501e-4 if value < 1 else 0.501e-3), name
    assert solution["ratio_p"].value == pytest.approx(4.5, rel=1e-12)
    assert solution["ratio_rho"].value == pytest.approx(8 / 3, rel=1e-12)
    assert solution["M2"].value == pytest.approx(1 / sqrt(3), rel=1e-12)
    assert solution["T2"].to("degC") == pytest.approx(253.15 * 1.6875 - 273.15, rel=1e-11)


@pytest.mark.parametrize(
    ("area_ratio", "bounds", "mach"),
    [
        (1.3398, "M near 0.3 within 0.01 .. 1", 0.50),
        (2.0351, "M near 0.3 within 0.01 .. 1", 0.30),
        (1.6875, "M near 2.5 within 1 .. 10", 2.00),
        (4.2346, "M near 2.5 within 1 .. 10", 3.00),
    ],
)
def test_area_ratio_on_the_branch_the_bounds_ask_for(
    solved: Solve, area_ratio: float, bounds: str, mach: float
) -> None:
    """NACA 1135, table I: A/A* 1.340 and 2.035 below Mach 1, 1.688 and 4.235 above; one digit more here."""
    solution = solved(
        f"""
        kappa = 1.4
        A = {area_ratio} * A_throat
        A_throat = 25 cm^2
        ratio = A/A_throat
        ratio = 1/M*((1 + (kappa - 1)/2*M^2)/((kappa + 1)/2))^((kappa + 1)/(2*(kappa - 1)))
        {bounds}
        """
    )
    m = solution["M"].value
    assert m == pytest.approx(mach, abs=2e-4)
    assert ((1 + 0.2 * m**2) / 1.2) ** 3 / m == pytest.approx(area_ratio, rel=1e-12)
    assert solution["A"].to("cm^2") == pytest.approx(25 * area_ratio, rel=1e-14)


@pytest.mark.parametrize(
    ("branch", "wave_angle"),
    [
        ("beta near 40 deg within 30 deg .. 65 deg", 39.31),
        ("beta near 80 deg within 65 deg .. 90 deg", 83.70),
    ],
    ids=["weak", "strong"],
)
def test_oblique_shock_at_a_wedge_of_ten_degrees(solved: Solve, branch: str, wave_angle: float) -> None:
    """NACA 1135, chart 2 and equation 138: M1 = 2, wedge 10 deg gives waves of 39.31 deg and 83.70 deg."""
    solution = solved(
        f"""
        M1 = 2
        kappa = 1.4
        delta = 10 deg
        wedge: tan(delta) = 2/tan(beta)*(M1^2*sin(beta)^2 - 1)/(M1^2*(kappa + cos(2*beta)) + 2)
        {branch}
        show beta in deg
        p_ratio = 1 + 2*kappa/(kappa + 1)*((M1*sin(beta))^2 - 1)
        """
    )
    beta = solution["beta"].si
    assert degrees(beta) == pytest.approx(wave_angle, abs=0.005)
    assert solution["beta"].value == pytest.approx(degrees(beta), rel=1e-14)
    # The same wave from its normal component: rho2/rho1 = tan(beta)/tan(beta - delta).
    squeeze = 2.4 * (2 * sin(beta)) ** 2 / (0.4 * (2 * sin(beta)) ** 2 + 2)
    assert tan(beta) / tan(beta - radians(10)) == pytest.approx(squeeze, rel=1e-11)


def test_expansion_fan_turned_backwards(solved: Solve) -> None:
    """NACA 1135, table I: the Prandtl-Meyer angle is 26.38 deg at M = 2 and 49.76 deg at M = 3."""
    solution = solved(
        """
        kappa = 1.4
        define nu(M) = sqrt((kappa + 1)/(kappa - 1))*atan(sqrt((kappa - 1)/(kappa + 1)*(M^2 - 1)))
          - atan(sqrt(M^2 - 1)) valid M >= 1
        M1 = 2
        turn = nu(M2) - nu(M1)
        turn = 23.38 deg
        M2 near M1 + 0.5 within 1 .. 20
        nu1 = nu(M1)
        show nu1 in deg
        """
    )
    assert solution["nu1"].to("deg") == pytest.approx(26.38, abs=0.005)
    assert solution["M2"].value == pytest.approx(3.0, abs=1e-3)

    def prandtl_meyer(m: float) -> float:
        return sqrt(6) * atan(sqrt((m * m - 1) / 6)) - (pi / 2 - asin(1 / m))

    turned = prandtl_meyer(solution["M2"].value) - prandtl_meyer(2.0)
    assert degrees(turned) == pytest.approx(23.38, rel=1e-11)
    assert cos(turned) > 0
