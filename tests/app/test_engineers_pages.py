"""Pages as engineers write them: mixed units, any order of lines, readings, regimes, knowns swapped at will.

Each page is solved as text, and its numbers are worked out a second time in bare SI floats with scipy.
"""

from __future__ import annotations

from math import cos, exp, log, pi, sqrt
from textwrap import dedent

import numpy as np
import pytest
from scipy import constants
from scipy.optimize import brentq, fsolve

import eqsheet

PSI = 4.4482216152605 / 0.0254**2
GPM = 231 * 0.0254**3 / 60


def solve(text: str) -> eqsheet.Solution:
    """Solution of `text`; anything but solved fails with the diagnostics."""
    solution = eqsheet.parse(dedent(text)).solve()
    assert solution.status == "solved", [f"{d.code}: {d.message}" for d in solution.diagnostics]
    return solution


def test_sprinkler_main_in_customary_units() -> None:
    """Hazen-Williams as in NFPA 13, psi for a foot of pipe, a pump's curve and gauge pressures."""
    solution = solve(
        """
        # Fire main, US units throughout
        ambient = 14.2 psi
        define hazen(Q in gpm, d in in, C in 1) in psi/ft = 4.52*Q^1.85/(C^1.85*d^4.87) valid Q >= 20 gpm
        show Q in gpm, p_pump in psig, p_2 in psig, v in ft/s, dp_pipe in psi
        p_1 = 30 psig              # city main
        d = 4.026 in
        L = 350 ft
        L_eq = 46 ft               # fittings
        z = 62 ft                  # top outlet above the pump
        rho = 62.37 lb/ft^3

        p_pump = p_1 + boost
        boost = 110 psi - 1.1e-4 psi/gpm^2 * Q^2
        p_2 = p_pump - dp_pipe - rho*const.g_n*z
        dp_pipe = hazen(Q, d, 120)*(L + L_eq)
        nozzle: Q = 29.84 gpm/psi^(1/2) * 1.25^2*sqrt(p_2 - 0 psig)   # outlet coefficient times bore squared
        v = 4*Q/(pi*d^2)

        Q near 300 gpm within 20 gpm .. 5000 gpm
        p_2 near 60 psig within 0 psig ..
        require v <= 20 ft/s
        require p_2 >= 20 psig
        """
    )

    def outlet(q: float) -> float:
        lost = 4.52 * q**1.85 / (120**1.85 * 4.026**4.87) * 396
        column = 62.37 * 0.45359237 / 0.3048**3 * constants.g * 62 * 0.3048 / PSI
        return 30 + 110 - 1.1e-4 * q**2 - lost - column

    flow = brentq(lambda q: 29.84 * 1.25**2 * sqrt(max(outlet(q), 0.0)) - q, 100, 800, xtol=1e-11)
    assert solution["Q"].value == pytest.approx(flow, rel=1e-9)
    assert solution["p_2"].value == pytest.approx(outlet(flow), rel=1e-8)
    assert solution["p_2"].si == pytest.approx((outlet(flow) + 14.2) * PSI, rel=1e-9)
    assert solution["v"].to("m/s") == pytest.approx(4 * flow * GPM / (pi * (4.026 * 0.0254) ** 2), rel=1e-9)


def test_three_reservoirs_with_flow_either_way() -> None:
    """The middle reservoir may fill or empty, so losses carry the sign of the flow."""
    solution = solve(
        """
        junction: Q_1 + Q_2 + Q_3 = 0
        z_1 - H = r(L_1, D_1)*Q_1*abs(Q_1)
        z_2 - H = r(L_2, D_2)*Q_2*abs(Q_2)
        z_3 - H = r(L_3, D_3)*Q_3*abs(Q_3)
        define r(L, D) = 8*f*L/(pi^2*const.g_n*D^5)
        f = 0.022
        z_1 = 120 m
        z_2 = 85 m
        z_3 = 40 m
        L_1 = 1.2 km
        L_2 = 600 m
        L_3 = 1500 m
        D_1 = 30 cm
        D_2 = 200 mm
        D_3 = 0.25 m
        H within z_3 .. z_1
        Q_* near 0.05 m^3/s
        show Q_1 in L/s, Q_2 in L/s, Q_3 in m^3/h
        """
    )

    def flow(z: float, head: float, length: float, bore: float) -> float:
        resistance = 8 * 0.022 * length / (pi**2 * constants.g * bore**5)
        return float(np.sign(z - head) * sqrt(abs(z - head) / resistance))

    pipes = [(120, 1200, 0.30), (85, 600, 0.20), (40, 1500, 0.25)]
    head = brentq(lambda h: sum(flow(z, h, length, bore) for z, length, bore in pipes), 40, 120, xtol=1e-13)
    for name, (z, length, bore) in zip(("Q_1", "Q_2", "Q_3"), pipes):
        assert solution[name].si == pytest.approx(flow(z, head, length, bore), rel=1e-9), name


def test_eccentrically_loaded_column() -> None:
    """Secant formula (Timoshenko and Gere, Theory of Elastic Stability): load at which the edge yields."""
    solution = solve(
        """
        sigma_y = 36 ksi
        E = 29e3 ksi
        A = 11.5 in^2
        r = 2.54 in
        c = 4.0 in
        e = 3/4 * 1 in             # eccentricity
        L = 15 ft
        yield: sigma_y = P/A*(1 + e*c/r^2/cos(L/(2*r)*sqrt(P/(E*A))))
        euler: P_cr = pi^2*E*A*r^2/L^2
        P near P_cr/4 within 0 kip .. 0.99*P_cr
        reserve = P_cr/P
        show P in kip, P_cr in kip
        """
    )

    def stress(load: float) -> float:
        return load / 11.5 * (1 + 0.75 * 4 / 2.54**2 / cos(180 / 5.08 * sqrt(load / (29e3 * 11.5)))) - 36

    euler = pi**2 * 29e3 * 11.5 * 2.54**2 / 180**2
    load = brentq(stress, 1.0, 0.99 * euler, xtol=1e-12)
    assert solution["P"].value == pytest.approx(load, rel=1e-10)
    assert solution["P_cr"].value == pytest.approx(euler, rel=1e-13)
    assert solution["P"].to("kN") == pytest.approx(load * 4.4482216152605, rel=1e-10)


def test_thermistor_that_warms_itself() -> None:
    """Resistance by the B equation, power by the divider, temperature by the power: one loop."""
    solution = solve(
        """
        ## Thermistor in a divider
        U = 12 V
        R_s = 470 Ohm
        R_25 = 1 kOhm
        B = 3950 K
        T_25 = 25 degC
        T_a = -10 degC
        G_th = 3.5 mW/K            # dissipation constant

        R = R_25*exp(B*(1/T - 1/T_25))
        U_T = U*R/(R + R_s)
        P = U_T^2/R
        P = G_th*(T - T_a)
        T near T_a + 10 K within T_a .. 150 degC
        rise = T - T_a
        show T in degC, P in mW, U_T in V, rise in delta_degC
        """
    )

    def power(t: float) -> float:
        r = 1000 * exp(3950 * (1 / t - 1 / 298.15))
        return 144 * r / (r + 470) ** 2

    t = brentq(lambda t: power(t) - 3.5e-3 * (t - 263.15), 263.15, 400, xtol=1e-13)
    assert solution["T"].value == pytest.approx(t - 273.15, abs=1e-8)
    assert solution["rise"].value == pytest.approx(t - 263.15, abs=1e-8)
    assert solution["P"].to("W") == pytest.approx(power(t), rel=1e-9)


@pytest.mark.parametrize(
    ("ice", "temperature", "left"), [("0.05 kg", None, 0.0), ("0.6 kg", 0.0, None), ("5 kg", None, 5.0)]
)
def test_ice_in_water_in_each_regime(ice: str, temperature: float | None, left: float | None) -> None:
    """All melted, some melted, all frozen: the heat decides, and the page need not be told."""
    solution = solve(
        f"""
        m_i = {ice}
        T_i = -18 degC
        m_w = 1 kg
        T_w = 20 degC
        c_i = 2.1 kJ/(kg*K)
        c_w = 4.19 kJ/(kg*K)
        L_f = 334 kJ/kg
        T_0 = 0 degC
        # Heat content above ice at T_0
        H = m_i*c_i*(T_i - T_0) + m_w*(L_f + c_w*(T_w - T_0))
        m = m_i + m_w
        H_melt = m*L_f
        T = if H < 0 then T_0 + H/(m*c_i) else if H > H_melt then T_0 + (H - H_melt)/(m*c_w) else T_0
        m_left = if H < 0 then m else if H > H_melt then 0 kg else m*(1 - H/H_melt)
        show T in degC, m_left in g
        """
    )
    mass = float(ice.split()[0])
    heat = mass * 2100 * -18 + 334e3 + 4190 * 20
    if temperature is None and left == 0.0:
        temperature = (heat - (mass + 1) * 334e3) / ((mass + 1) * 4190)
    elif temperature is None:
        temperature, left = 0.0, (mass + 1) - heat / 334e3
    else:
        left = (mass + 1) - heat / 334e3
    assert left is not None
    assert solution["T"].value == pytest.approx(temperature, abs=1e-9)
    assert solution["m_left"].to("kg") == pytest.approx(left, abs=1e-12)


def test_wet_bulb_temperature() -> None:
    """Psychrometer after WMO Guide No. 8: e = e_w(T_w) - A p (T - T_w) with A = 6.53e-4 1/K."""
    solution = solve(
        """
        define e_w(T in degC) in hPa = 6.112*exp(17.62*T/(243.12 + T)) valid -45 degC <= T <= 60 degC
        T = 77 degF
        RH = 45 %
        p = 0.87 atm
        A = 6.53e-4 1/K
        e = RH*e_w(T)
        e = e_w(T_w) - A*p*(T - T_w)
        e = e_w(T_d)
        T_w near T - 5 K within T - 30 K .. T
        T_d near T - 10 K within T - 60 K .. T
        spread = T - T_d
        show T_w in degC, T_d in degF, spread in delta_degF, e in hPa
        """
    )

    def magnus(t: float) -> float:
        return 6.112 * exp(17.62 * t / (243.12 + t))

    vapour = 0.45 * magnus(25.0)
    wet = brentq(lambda t: magnus(t) - 6.53e-4 * 881.5275 * (25 - t) - vapour, 0, 25, xtol=1e-13)
    ratio = log(vapour / 6.112)
    dew = 243.12 * ratio / (17.62 - ratio)
    assert solution["T_w"].value == pytest.approx(wet, abs=1e-8)
    assert solution["T_d"].value == pytest.approx(1.8 * dew + 32, abs=1e-8)
    assert solution["spread"].value == pytest.approx(1.8 * (25 - dew), abs=1e-8)


def test_two_stage_compressor_with_intercooling_between() -> None:
    """Intermediate pressure at which both stages take the same power; cost of a year."""
    solution = solve(
        """
        q = 120 Nm^3/h             # at 0 degC and 1 atm
        M = 28.96 g/mol
        n = 1.4
        cp = n/(n - 1)*const.R
        eta = 72 %
        T_1 = 15 degC
        T_2 = 35 degC              # after the intercooler
        p_0 = 0 barg
        p_2 = 13 barg
        define head(T, ratio) = cp*T*(ratio^((n - 1)/n) - 1)/eta
        P_1 = q*head(T_1, p_1/p_0)
        P_2 = q*head(T_2, p_2/p_1)
        same: P_1 = P_2
        T_1o - T_1 = head(T_1, p_1/p_0)/cp
        T_2o - T_2 = head(T_2, p_2/p_1)/cp
        p_1 near sqrt(p_0*p_2) within p_0 .. p_2
        cost = (P_1 + P_2)*6000 h/yr*0.18 EUR/kWh
        require T_2o <= 250 degC
        show p_1 in barg, P_1 in kW, T_1o in degC, T_2o in degC, cost in EUR/yr
        """
    )
    low, high, k = 101325.0, 101325.0 + 13e5, 0.4 / 1.4

    def lift(t: float, ratio: float) -> float:
        return t * (ratio**k - 1) / 0.72

    between = brentq(lambda p: lift(288.15, p / low) - lift(308.15, high / p), low, high, xtol=1e-7)
    moles = 120 * 101325 / (constants.R * 273.15) / 3600
    stage = moles * 3.5 * constants.R * lift(288.15, between / low)
    assert solution["p_1"].value == pytest.approx((between - 101325) / 1e5, rel=1e-9)
    assert solution["P_1"].to("W") == pytest.approx(stage, rel=1e-9)
    assert solution["T_2o"].value == pytest.approx(35 + lift(308.15, high / between), rel=1e-9)
    assert solution["cost"].value == pytest.approx(2 * stage / 1e3 * 6000 * 0.18, rel=1e-9)


def test_belt_drive_with_open_belt_length() -> None:
    """Centre distance from a stock belt length; sheave speeds in rpm; slip left out."""
    solution = solve(
        """
        n_1 = 1450 rpm
        n_2 = 520 rpm
        d_1 = 5 in
        d_1*n_1 = d_2*n_2
        L = 2240 mm                # stock length
        open_belt: L = 2*a*cos(phi) + pi*(d_1 + d_2)/2 + phi*(d_2 - d_1)
        sin(phi) = (d_2 - d_1)/(2*a)
        a near 2*d_2 within d_2/2 + d_1/2 .. 2 m
        phi near 10 deg within 0 deg .. 60 deg
        wrap = 180 deg - 2*phi
        v = d_1/2*n_1
        require wrap >= 120 deg
        require v <= 30 m/s
        show a in mm, wrap in deg, d_2 in mm, v in m/s
        """
    )
    d_1 = 0.127
    d_2 = d_1 * 1450 / 520

    def residuals(x: np.ndarray) -> list[float]:
        return [
            2 * x[0] * cos(x[1]) + pi * (d_1 + d_2) / 2 + x[1] * (d_2 - d_1) - 2.24,
            2 * x[0] * np.sin(x[1]) - (d_2 - d_1),
        ]

    a, phi = fsolve(residuals, [0.7, 0.17], xtol=1e-14)
    assert solution["a"].si == pytest.approx(a, rel=1e-10)
    assert solution["wrap"].value == pytest.approx(180 - 360 * phi / pi, rel=1e-10)
    assert solution["v"].value == pytest.approx(d_1 / 2 * 1450 * 2 * pi / 60, rel=1e-12)
