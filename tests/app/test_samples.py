"""Every sample is solved as a user would solve it, and its numbers are worked out a second time.

The second calculation is written here in bare SI floats from the published formulas, with scipy's root
finders, closed forms or mpmath, and shares nothing with the program but the knowns, which it repeats. Where
a sample can be both sized and rated, both are checked, by switching one line off and another on.
"""

from __future__ import annotations

from collections.abc import Callable
from math import acos, asin, atan, atan2, cos, cosh, exp, hypot, log, log10, pi, radians, sin, sinh, sqrt
from pathlib import Path

import mpmath
import numpy as np
import pytest
from booster_sample import booster, booster_at_a_flow
from family_samples import FAMILY_SAMPLES
from scipy import constants
from scipy.optimize import brentq

import eqsheet
from eqsheet.app.main import main
from eqsheet.diagnostics.source import Source
from eqsheet.syntax.format import format_document

SAMPLES = Path(__file__).parents[2] / "samples"
G_N = constants.g

Numbers = dict[str, float]


def zero(function: Callable[[float], float], lower: float, upper: float) -> float:
    """The root of `function` between `lower` and `upper`, to rounding level."""
    return float(brentq(function, lower, upper, xtol=1e-300, rtol=8.9e-16, maxiter=500))


def colebrook(reynolds: float, relative_roughness: float) -> float:
    """Friction factor after Colebrook (1939), by bisection in 1/sqrt(f)."""
    y = zero(lambda y: y + 2 * log10(relative_roughness / 3.7 + 2.51 * y / reynolds), 1.0, 20.0)
    return 1 / y**2


# --- penstock ---------------------------------------------------------------------------------------------


def penstock_head_loss(flow: float) -> tuple[float, float, float]:
    """Speed, friction factor and head lost at `flow` in m^3/s."""
    bore, length = 0.25, 420.0
    v = flow / (pi * bore**2 / 4)
    f = colebrook(v * bore / 1.307e-6, 1e-4 / bore)
    return v, f, f * length / bore * v**2 / (2 * G_N)


def penstock() -> Numbers:
    def shaft_power(flow: float) -> float:
        return 0.78 * 999.7 * G_N * flow * (85 - penstock_head_loss(flow)[2])

    flow = zero(lambda q: shaft_power(q) - 50e3, 0.05, 0.15)
    v, f, h_f = penstock_head_loss(flow)
    return {"Q": flow, "v": v, "f": f, "h_f": h_f, "Re": v * 0.25 / 1.307e-6}


def penstock_rated() -> Numbers:
    v, f, h_f = penstock_head_loss(0.1)
    return {"P": 0.78 * 999.7 * G_N * 0.1 * (85 - h_f), "v": v, "f": f, "h_f": h_f}


# --- exchanger --------------------------------------------------------------------------------------------


def exchanger_films(mean_hot: float, mean_cold: float) -> tuple[float, float, float]:
    """Overall coefficient and the two Reynolds numbers at mean temperatures in K."""
    gap, cross_section, conductivity, cp = 2.4e-3, 12 * 2.4e-3 * 0.110, 0.64, 4190.0

    def film(mass_flow: float, temperature: float) -> tuple[float, float]:
        viscosity = 2.414e-5 * 10 ** (247.8 / (temperature - 140))
        reynolds = mass_flow * 2 * gap / (cross_section * viscosity)
        prandtl = cp * viscosity / conductivity
        return 0.30 * reynolds**0.66 * prandtl ** (1 / 3) * conductivity / (2 * gap), reynolds

    hot, re_hot = film(0.42, mean_hot)
    cold, re_cold = film(0.30, mean_cold)
    return 1 / (1 / hot + 0.5e-3 / 15 + 2e-5 + 1 / cold), re_hot, re_cold


def exchanger_at(outlet: float) -> Numbers:
    """All results for a tap-water outlet of `outlet` in K, the area from the logarithmic mean instead of
    NTU."""
    c_hot, c_cold, t_hot, t_cold = 0.42 * 4190, 0.30 * 4190, 351.15, 281.15
    heat = c_cold * (outlet - t_cold)
    back = t_hot - heat / c_hot
    u, re_hot, re_cold = exchanger_films((t_hot + back) / 2, (t_cold + outlet) / 2)
    ends = (t_hot - outlet, back - t_cold)
    mean = (ends[0] - ends[1]) / log(ends[0] / ends[1])
    area = heat / (u * mean)
    return {
        "Q": heat, "T_ho": back, "T_co": outlet, "A": area, "U": u, "Re_h": re_hot, "Re_c": re_cold,
        "NTU": u * area / c_cold, "eff": heat / (c_cold * (t_hot - t_cold)),
    }  # fmt: skip


def exchanger() -> Numbers:
    return exchanger_at(zero(lambda t: exchanger_at(t)["A"] - 0.80, 300.0, 345.0))


def exchanger_sized() -> Numbers:
    return exchanger_at(328.15)


# --- snowmelt ---------------------------------------------------------------------------------------------


def snowmelt_at(supply: float) -> Numbers:
    """All results for a supply temperature in K; unknowns are the speed and the mean temperature."""
    rho, cp, bore, length, loops, ground = 1035.0, 3700.0, 0.020, 90.0, 8, 275.15
    section = pi * bore**2 / 4

    def results(v: float, mean: float) -> tuple[Numbers, float]:
        viscosity = 1e-6 * 6.0 * exp(-0.033 * (mean - 273.15))
        reynolds = v * bore / viscosity
        f = 64 / reynolds if reynolds < 2300 else 0.3164 / reynolds**0.25
        flow = loops * v * section
        head = 8.0 * (1 - (flow * 3600 / 11.3) ** 2)
        heat = loops * length * (mean - ground) / 0.5
        lost = (f * length / bore + 12) * v**2 / (2 * G_N)
        numbers = {
            "V": flow, "v": v, "Re": reynolds, "f": f, "nu": viscosity, "H": head, "P": heat, "T_m": mean,
            "T_r": 2 * mean - supply, "T_s": supply, "m_melt": 0.85 * heat / (150 * 334e3),
            "P_el": rho * G_N * head * flow / 0.45,
        }  # fmt: skip
        return numbers, head - lost

    def mean_at(v: float) -> float:
        # The slab takes what the water gives off: linear in the mean temperature.
        given, taken = rho * loops * v * section * cp * 2, loops * length / 0.5
        return (given * supply + taken * ground) / (given + taken)

    v = zero(lambda v: results(v, mean_at(v))[1], 0.4, 1.2)
    return results(v, mean_at(v))[0]


def snowmelt() -> Numbers:
    return snowmelt_at(303.15)


def snowmelt_rated() -> Numbers:
    return snowmelt_at(zero(lambda t: snowmelt_at(t)["P"] - 30e3, 285.0, 320.0))


# --- solar ------------------------------------------------------------------------------------------------


def solar() -> Numbers:
    gap, boltzmann = 1.121 * constants.e, constants.k
    r_s, r_p, reference = 0.30, 300.0, 298.15

    def saturation(t: float) -> float:
        return 6.0e-10 * (t / reference) ** 3 * exp(gap / boltzmann * (1 / reference - 1 / t))

    def excess(junction: float, i: float, light: float, t: float) -> float:
        return light - saturation(t) * (exp(junction / (1.62 * t / reference)) - 1) - junction / r_p - i

    t = 268.15 + 25.0 / 800.0 * 900.0
    light = 0.9 * (9.45 + 4.7e-3 * (t - reference))
    v_oc = zero(lambda v: excess(v, 0.0, light, t), 20.0, 60.0)
    v_cold = zero(lambda v: excess(v, 0.0, 0.9 * 9.45, 248.15), 20.0, 60.0)
    i_sc = zero(lambda i: excess(i * r_s, i, light, t), 0.0, 20.0)

    # Most power, in the junction voltage u: I(u) is explicit, V = u - I R_s, and d(V I)/du = 0.
    scale, dark = 1.62 * t / reference, saturation(t)

    def slope(u: float) -> float:
        i = light - dark * (exp(u / scale) - 1) - u / r_p
        di = -dark / scale * exp(u / scale) - 1 / r_p
        return (1 - di * r_s) * i + (u - i * r_s) * di

    u = zero(slope, 20.0, v_oc)
    i = light - dark * (exp(u / scale) - 1) - u / r_p
    v = u - i * r_s
    return {
        "T_c": t, "I": i, "V": v, "P": 12 * v * i, "V_str": 12 * v, "V_oc": v_oc, "I_sc": i_sc,
        "V_cold": v_cold, "FF": v * i / (v_oc * i_sc),
    }  # fmt: skip


# --- cableway ---------------------------------------------------------------------------------------------


def cableway() -> Numbers:
    span, rise, weight, stiffness = 640.0, 210.0, 5.4 * G_N, 66e6
    unstressed = 678.2 * (1 + 1.2e-5 * -30)

    def at(a: float) -> tuple[Numbers, float]:
        # Closed form of the inclined catenary: S^2 - h^2 = (2 a sinh(l/2a))^2, mid-span from the slope.
        chord = 2 * a * sinh(span / (2 * a))
        length = hypot(chord, rise)
        middle = a * np.arctanh(rise / length)
        x_a, x_b = middle - span / 2, middle + span / 2
        horizontal = weight * a
        stretch = horizontal / stiffness * (span / 2 + a / 4 * (sinh(2 * x_b / a) - sinh(2 * x_a / a)))
        force_b = horizontal * cosh(x_b / a)
        sag = a * (cosh(x_a / a) + cosh(x_b / a)) / 2 - a * cosh(middle / a)
        numbers = {
            "a": a, "x_A": x_a, "x_B": x_b, "S": length, "dS": stretch, "F_H": horizontal, "F_B": force_b,
            "F_A": horizontal * cosh(x_a / a), "beta_A": atan(sinh(x_a / a)), "sag": sag,
            "safety": 900e3 / force_b,
        }  # fmt: skip
        return numbers, unstressed + stretch - length

    return at(zero(lambda a: at(a)[1], 500.0, 20000.0))[0]


# --- roof -------------------------------------------------------------------------------------------------


def roof_at(depth: float) -> Numbers:
    span, apart, width, modulus = 7.2, 1.25, 0.160, 11500e6
    snow = 0.8 * (60 - 35) / 30 * 5200
    dead = 900 * apart + 420 * G_N * width * depth
    live = snow * apart
    design = 1.35 * dead + 1.5 * live
    stiffness = modulus * width * depth**3 / 12
    w_dead, w_live = (5 * load * span**4 / (384 * stiffness) for load in (dead, live))
    return {
        "h": depth, "s": snow, "q_d": design, "w_s": w_live, "w_fin": 1.6 * w_dead + 1.12 * w_live,
        "sigma": 0.75 * design * span**2 / (width * depth**2), "tau": 0.75 * design * span / (0.67 * width *
        depth),
    }  # fmt: skip


def roof() -> Numbers:
    return roof_at(zero(lambda depth: roof_at(depth)["w_fin"] - 7.2 / 250, 0.1, 1.5))


def roof_checked() -> Numbers:
    return roof_at(0.440)


# --- flue -------------------------------------------------------------------------------------------------


def flue() -> Numbers:
    pressure, height, bore, outside, cp = 79.5e3, 5.5, 0.130, 268.15, 1080.0
    wood = 3.5 / 3600
    section = pi * bore**2 / 4

    def at(m: float) -> tuple[Numbers, float]:
        collar = 293.15 + 0.25 * wood * 4.0 * 3.6e6 / (m * cp)
        cooling = 2.5 * pi * bore * height / (m * cp)
        mean = outside + (collar - outside) * (1 - exp(-cooling)) / cooling
        rho = pressure / (290.0 * mean)
        v = m / (rho * section)
        reynolds = 4 * m / (pi * bore * 1.458e-6 * mean**1.5 / (mean + 110.4))
        rough = (-1.8 * log10((1e-3 / (3.7 * bore)) ** 1.11 + 6.9 / reynolds)) ** -2
        f = 64 / reynolds if reynolds < 2300 else rough
        draught = G_N * height * (pressure / (287.05 * outside) - rho)
        stove = 12.0 * (m / 0.012) ** 2
        numbers = {
            "m": m, "T_e": collar, "T_m": mean, "T_o": outside + (collar - outside) * exp(-cooling), "v": v,
            "Re": reynolds, "f": f, "dp": draught, "dp_stove": stove, "ratio": (m - wood) / (4.8 * wood),
        }  # fmt: skip
        return numbers, draught - stove - (f * height / bore + 2.5) * rho * v**2 / 2

    return at(zero(lambda m: at(m)[1], 9e-3, 30e-3))[0]


# --- drying -----------------------------------------------------------------------------------------------


def drying() -> Numbers:
    pressure, outside = 79.5e3, 265.15

    def saturation(t: float) -> float:
        return 611.2 * exp(17.62 * (t - 273.15) / (243.12 + t - 273.15))

    def humidity(vapour: float) -> float:
        return 0.622 * vapour / (pressure - vapour)

    def airflow(t: float) -> float:
        rho_o, rho_i = pressure / (287.05 * outside), pressure / (287.05 * t)
        return sqrt(2 * (0.6 * 0.030) ** 2 * G_N * 5.0 * (rho_o - rho_i) / (1 / rho_o + 1 / rho_i))

    def vapour(t: float) -> float:
        rate = 0.09 / 3600 / 100
        before = humidity(0.8 * saturation(outside))
        return zero(
            lambda p: airflow(t) * (humidity(p) - before) - rate * (saturation(t) - p), 0.0, saturation(t)
        )

    def evaporated(t: float) -> float:
        return 0.09 / 3600 / 100 * (saturation(t) - vapour(t))

    t = zero(
        lambda t: (airflow(t) * 1006 + 40) * (t - outside) + evaporated(t) * 2.45e6 - 3000.0, 270.0, 320.0
    )
    p_v = vapour(t)
    gamma = log(p_v / 611.2)
    return {
        "T_i": t, "m": airflow(t), "p_v": p_v, "phi_i": p_v / saturation(t), "m_w": evaporated(t),
        "V": airflow(t) * 287.05 * t / pressure, "T_dew": 273.15 + 243.12 * gamma / (17.62 - gamma),
        "T_w": t - 1.1 / 8 * (t - outside), "x_i": humidity(p_v),
    }  # fmt: skip


# --- linkage ----------------------------------------------------------------------------------------------


def linkage() -> Numbers:
    a, b, c, d, crank, speed = 0.040, 0.140, 0.100, 0.150, radians(40), 55 * 2 * pi / 60
    # Two circles about the crank pin and the far pivot: law of cosines in the triangle they make.
    to_pivot = (d - a * cos(crank), -a * sin(crank))
    diagonal = hypot(*to_pivot)
    theta_b = atan2(to_pivot[1], to_pivot[0]) + acos((b**2 + diagonal**2 - c**2) / (2 * b * diagonal))
    pin = (a * cos(crank) + b * cos(theta_b), a * sin(crank) + b * sin(theta_b))
    theta_c = atan2(pin[1], pin[0] - d)
    w_b, w_c = np.linalg.solve(
        [[-b * sin(theta_b), c * sin(theta_c)], [b * cos(theta_b), -c * cos(theta_c)]],
        [a * speed * sin(crank), -a * speed * cos(crank)],
    )
    mu = theta_c - theta_b
    return {
        "theta_b": theta_b, "theta_c": theta_c, "w_b": w_b, "w_c": w_c, "v_c": c * w_c, "mu": mu,
        "M_a": 12 * w_c / speed, "F_b": 12 / (c * sin(mu)),
    }  # fmt: skip


# --- insulation -------------------------------------------------------------------------------------------


def insulation_at(thickness: float) -> Numbers:
    r_1, pipe, air, conductivity = 0.0603 / 2, 343.15, 278.15, 0.040
    r_2 = r_1 + thickness
    price, hours, share = 0.13 / 3.6e6, 5500 * 3600.0, 0.04 * 1.04**15 / (1.04**15 - 1)

    def film(surface: float) -> float:
        radiation = 0.90 * constants.sigma * (surface**4 - air**4) / (surface - air)
        return radiation + 1.32 * ((surface - air) / (2 * r_2)) ** 0.25

    surface = zero(
        lambda t: conductivity * (pipe - t) / log(r_2 / r_1) - r_2 * film(t) * (t - air),
        air + 1e-9,
        pipe - 1e-9,
    )
    q = 2 * pi * conductivity * (pipe - surface) / log(r_2 / r_1)
    heat = price * q * 85 * hours
    wool = share * 85 * (1400 * pi * (r_2**2 - r_1**2) + 14)
    bare_film = 2 * pi * conductivity * (pipe - air) / log((r_1 + 0.040) / r_1)
    return {
        "t": thickness, "T_s": surface, "h": film(surface), "q": q, "K_heat": heat, "K_wool": wool,
        "K": heat + wool, "saving": price * hours * 85 * (bare_film - q),
    }  # fmt: skip


def insulation() -> Numbers:
    def slope(thickness: float) -> float:
        """Derivative of the yearly cost, film held, differentiated by mpmath instead of by hand."""
        film = insulation_at(thickness)["h"]
        share = 0.04 * 1.04**15 / (1.04**15 - 1)

        def cost(r_2: mpmath.mpf) -> mpmath.mpf:
            resistance = mpmath.log(r_2 / (0.0603 / 2)) / 0.040 + 1 / (film * r_2)
            heat = 0.13 / 3.6e6 * 5500 * 3600 * 2 * mpmath.pi * 65 / resistance
            return heat + share * 1400 * mpmath.pi * r_2**2

        with mpmath.workdps(40):
            return float(mpmath.diff(cost, 0.0603 / 2 + thickness))

    return insulation_at(zero(slope, 0.005, 0.3))


def insulation_given() -> Numbers:
    return insulation_at(0.040)


# --- feeder -----------------------------------------------------------------------------------------------


def feeder() -> Numbers:
    sent, power, apparent, length = 400 / sqrt(3), 38e3, 42e3, 310e-3
    reactive = sqrt(apparent**2 - power**2)
    reactance = 0.077 * length

    def core(current: float) -> tuple[float, float]:
        temperature = 285.15 + 58 * (current / 119) ** 2
        return temperature, 0.524 * length * (1 + 0.00393 * (temperature - 293.15))

    def received(resistance: float) -> float:
        # |U_s|^2 = (U + (R P + X Q)/3U)^2 + ((X P - R Q)/3U)^2: a quadratic in U^2, the upper root is meant.
        along = (resistance * power + reactance * reactive) / 3
        across = (reactance * power - resistance * reactive) / 3
        half = sent**2 / 2 - along
        return sqrt(half + sqrt(half**2 - along**2 - across**2))

    current = zero(lambda i: apparent / (3 * received(core(i)[1])) - i, 30.0, 119.0)
    temperature, resistance = core(current)
    voltage = received(resistance)
    across = (reactance * power - resistance * reactive) / (3 * voltage)
    return {
        "U": sqrt(3) * voltage, "I": current, "drop": 1 - sqrt(3) * voltage / 400, "T": temperature,
        "R": resistance, "loss": 3 * resistance * current**2, "Q": reactive, "delta": asin(across / sent),
    }  # fmt: skip


# --- the checks -------------------------------------------------------------------------------------------

AS_WRITTEN: dict[str, Callable[[], Numbers]] = {
    "penstock": penstock,
    "exchanger": exchanger,
    "snowmelt": snowmelt,
    "solar": solar,
    "cableway": cableway,
    "roof": roof,
    "flue": flue,
    "drying": drying,
    "linkage": linkage,
    "insulation": insulation,
    "feeder": feeder,
    "booster": booster,
    **FAMILY_SAMPLES,
}

SWITCHED: list[tuple[str, str, str, Callable[[], Numbers]]] = [
    ("penstock", "P = 50 kW", "Q = 100 L/s", penstock_rated),
    ("exchanger", "A = 0.80 m^2", "T_co = 55 degC", exchanger_sized),
    ("snowmelt", "T_s = 30 degC", "P = 30 kW", snowmelt_rated),
    ("roof", "sagging: w_fin", "depth: h", roof_checked),
    ("insulation", "least: price", "given: t", insulation_given),
    ("booster", "z = 34 m", "Q = 8 m^3/h", booster_at_a_flow),
]


def agrees(solution: eqsheet.Solution, expected: Numbers) -> None:
    """Every expected SI value is met to eight digits."""
    differences = {
        name: solution[name].si / value - 1
        for name, value in expected.items()
        if abs(solution[name].si - value) > 1e-8 * abs(value)
    }
    assert not differences


def test_every_sample_has_a_second_calculation() -> None:
    assert {path.stem for path in SAMPLES.glob("*.eqsheet")} == set(AS_WRITTEN)


@pytest.mark.parametrize("name", AS_WRITTEN)
def test_sample_agrees_with_the_second_calculation(name: str) -> None:
    solution = eqsheet.load(SAMPLES / f"{name}.eqsheet").solve()
    assert solution.status == "solved", [d.message for d in solution.diagnostics]
    assert all(limit.holds for limit in solution.limits)
    agrees(solution, AS_WRITTEN[name]())


@pytest.mark.parametrize(("name", "on", "off", "calculation"), SWITCHED, ids=[case[0] for case in SWITCHED])
def test_sample_is_turned_round_by_switching_two_lines(
    name: str, on: str, off: str, calculation: Callable[[], Numbers]
) -> None:
    text = (SAMPLES / f"{name}.eqsheet").read_text(encoding="utf-8")
    assert text.count(f"\n{on}") == 1
    assert text.count(f"\noff {off}") == 1
    text = text.replace(f"\n{on}", f"\noff {on}").replace(f"\noff {off}", f"\n{off}")
    solution = eqsheet.parse(text, str(SAMPLES / f"{name}.eqsheet")).solve()
    assert solution.status in ("solved", "outside-limits"), [d.message for d in solution.diagnostics]
    agrees(solution, calculation())


@pytest.mark.parametrize("name", AS_WRITTEN)
def test_sample_carries_the_caution_and_says_its_data_are_invented(name: str) -> None:
    words = " ".join((SAMPLES / f"{name}.eqsheet").read_text(encoding="utf-8").replace("#", " ").split())
    assert "Check by a qualified person; local codes govern." in words
    assert "The lodge and its data are invented." in words


@pytest.mark.parametrize(
    "name", ["snowmelt", "cableway", "flue", "drying", "exchanger", "feeder", "booster", *FAMILY_SAMPLES]
)
def test_sample_has_a_block_of_four_or_more_simultaneous_unknowns(name: str) -> None:
    solution = eqsheet.load(SAMPLES / f"{name}.eqsheet").solve()
    assert max(len(block.unknowns) for block in solution.blocks) >= 4


@pytest.mark.parametrize("name", AS_WRITTEN)
def test_sample_passes_the_check_from_another_directory(
    name: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    assert main(["check", str(SAMPLES / f"{name}.eqsheet")]) == 0
    said = capsys.readouterr()
    assert "solved" in said.out
    assert said.err == "" or all(word not in said.err for word in ("error:", "warning:"))


@pytest.mark.parametrize("name", AS_WRITTEN)
def test_sample_is_tidy(name: str) -> None:
    text = (SAMPLES / f"{name}.eqsheet").read_text(encoding="utf-8")
    assert format_document(Source(name, text)) == text
