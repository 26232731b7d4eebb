"""The twenty equations of loop_20.eqsheet as an engineer would write them by hand.

A residual function, scipy's root finder, and pint for the units. It is written with care: residuals divided
by typical magnitudes and a good guess for every unknown, so that the root finder has a fair chance.
"""

from __future__ import annotations

from math import exp, log, log10, pi, sqrt

import pint
from scipy.optimize import root

ureg = pint.UnitRegistry()
Q_ = ureg.Quantity


def si(value: float, unit: str) -> float:
    return float(Q_(value, unit).to_base_units().magnitude)


D = si(40, "mm")
L = si(120, "m")
eps = si(0.05, "mm")
K = 22
rho = si(1030, "kg/m^3")
cp = si(3.80, "kJ/(kg*K)")
k = si(0.45, "W/(m*K)")
mu_0 = si(2.6, "mPa*s")
T_0 = si(293.15, "K")
B = si(2300, "K")
p_0 = si(95, "kPa")
a_p = si(6.0e9, "Pa*s^2/m^6")
eta = 0.45
n = 12
d = si(10, "mm")
A_1 = si(3.2, "m^2")
A_2 = si(3.8, "m^2")
R_1 = si(0.18, "K/kW")
R_2 = si(0.15, "K/kW")
m_h = si(1.10, "kg/s")
T_h1 = si(78, "degC")
m_c = si(1.45, "kg/s")
T_c1 = si(12, "degC")
cp_w = si(4.19, "kJ/(kg*K)")

# name: guess, unit of the guess, unit to print
UNKNOWNS = {
    "V": (75, "L/min", "L/min"),
    "v": (1, "m/s", "m/s"),
    "m": (1.3, "kg/s", "kg/s"),
    "Re": (25000, "", ""),
    "f": (0.03, "", ""),
    "dp": (80, "kPa", "kPa"),
    "P": (200, "W", "W"),
    "T_m": (320, "K", "degC"),
    "mu": (1.5, "mPa*s", "mPa*s"),
    "Pr": (13, "", ""),
    "Re_t": (9000, "", ""),
    "Nu": (90, "", ""),
    "h": (4, "kW/(m^2*K)", "kW/(m^2*K)"),
    "UA_1": (4, "kW/K", "kW/K"),
    "UA_2": (5, "kW/K", "kW/K"),
    "Q": (110, "kW", "kW"),
    "T_1": (60, "degC", "degC"),
    "T_2": (35, "degC", "degC"),
    "T_h2": (50, "degC", "degC"),
    "T_c2": (30, "degC", "degC"),
}
GUESS = [si(value, unit) for value, unit, _ in UNKNOWNS.values()]


def logmean(a: float, b: float) -> float:
    if abs(a - b) < 1e-6 * abs(a):
        return (a + b) / 2
    return (a - b) / log(a / b)


def residuals(x: list[float]) -> list[float]:
    V, v, m, Re, f, dp, P, T_m, mu, Pr, Re_t, Nu, h, UA_1, UA_2, Q, T_1, T_2, T_h2, T_c2 = x
    return [
        (V - v * pi * D**2 / 4) / 1e-3,
        m - rho * V,
        (Re - rho * v * D / mu) / 1e4,
        1 / sqrt(f) + 2 * log10(eps / (3.7 * D) + 2.51 / (Re * sqrt(f))),
        (dp - (f * L / D + K) * rho * v**2 / 2) / 1e4,
        (dp - p_0 + a_p * V**2) / 1e4,
        (P - dp * V / eta) / 100,
        (T_m - (T_1 + T_2) / 2) / 10,
        (mu - mu_0 * exp(B * (1 / T_m - 1 / T_0))) / 1e-3,
        (Pr - cp * mu / k) / 10,
        (Re_t - 4 * m / (n * pi * d * mu)) / 1e4,
        (Nu - 0.023 * Re_t**0.8 * Pr**0.4) / 100,
        (h - Nu * k / d) / 1e3,
        (1 / UA_1 - 1 / (h * A_1) - R_1) / 1e-4,
        (1 / UA_2 - 1 / (h * A_2) - R_2) / 1e-4,
        (Q - m_h * cp_w * (T_h1 - T_h2)) / 1e5,
        (Q - UA_1 * logmean(T_h1 - T_1, T_h2 - T_2)) / 1e5,
        (Q - m * cp * (T_1 - T_2)) / 1e5,
        (Q - UA_2 * logmean(T_1 - T_c2, T_2 - T_c1)) / 1e5,
        (Q - m_c * cp_w * (T_c2 - T_c1)) / 1e5,
    ]


def find_root() -> dict[str, float]:
    """The unknowns in SI units."""
    solution = root(residuals, GUESS, method="hybr", tol=1e-12)
    if not solution.success:
        raise RuntimeError(solution.message)
    return dict(zip(UNKNOWNS, solution.x.tolist()))


def main() -> None:
    values = find_root()
    for name, (_, unit, shown) in UNKNOWNS.items():
        base = Q_(1, unit).to_base_units().units if unit != "degC" else ureg.kelvin
        print(f"{name:6} {Q_(values[name], base).to(shown):.6g~P}")


if __name__ == "__main__":
    main()
