"""Second calculations of the samples with families, tables and templates, in bare SI floats.

They share nothing with the program but the data, which they repeat, and go other ways than it does: loop flows
instead of nodal pressures, marching along the slices, bus voltages as complex numbers.
"""

from __future__ import annotations

from collections.abc import Callable
from math import log10, pi, sqrt
from typing import Any

import numpy as np
from scipy import constants
from scipy.optimize import brentq, fsolve

Numbers = dict[str, float]
G_N = constants.g


# --- snow-melt network ------------------------------------------------------------------------------------

BRANCHES = {
    "B1": ("pumproom", "yard", 18, 50),
    "B2": ("yard", "ramp", 22, 25),
    "B3": ("yard", "court", 15, 40),
    "B4": ("ramp", "steps", 12, 32),
    "B5": ("steps", "terrace", 10, 25),
    "B6": ("court", "terrace", 19, 25),
    "B7": ("terrace", "door", 8, 20),
    "B8": ("court", "garage", 24, 20),
    "B9": ("garage", "door", 26, 16),
    "B10": ("yard", "garage", 31, 32),
    "B11": ("pumproom", "ramp", 34, 32),
}
SLABS = {"yard": 0, "ramp": 14e3, "steps": 6e3, "terrace": 12e3, "door": 5e3, "court": 16e3, "garage": 11e3}
HEIGHTS = {"yard": 0, "ramp": 0.4, "steps": 1.8, "terrace": 2.1, "door": 2.1, "court": 0.9, "garage": 0.2}
# Independent loops, each as branches with the sense in which they are gone through.
LOOPS = (
    {"B1": 1, "B2": 1, "B11": -1},
    {"B2": 1, "B4": 1, "B5": 1, "B3": -1, "B6": -1},
    {"B3": 1, "B8": 1, "B10": -1},
    {"B6": 1, "B7": 1, "B8": -1, "B9": -1},
)


def snowmelt_loss(branch: str, flow: float) -> float:
    """Loss of pressure in a branch after Darcy and Weisbach, friction of Swamee and Jain (1976)."""
    _, _, length, bore = BRANCHES[branch]
    d = bore / 1000
    v = flow / (pi * d**2 / 4)
    f = 0.25 / log10(7e-6 / (3.7 * d) + 5.74 / (abs(v) * d / 1.2e-6) ** 0.9) ** 2
    return f * length / d * 1025 * v * abs(v) / 2


def snowmelt_network() -> Numbers:
    """By loop flows: a tree carries what the slabs take, and a flow round each loop balances its losses."""
    taken = {name: power / (1025 * 3850 * 7) for name, power in SLABS.items()}
    tree = {"yard": "B1", "ramp": "B11", "court": "B3", "garage": "B10", "steps": "B4", "terrace": "B6"}
    tree["door"] = "B7"
    ends = {name: BRANCHES[branch][0] for name, branch in tree.items()}
    carried = dict.fromkeys(BRANCHES, 0.0)
    for name in SLABS:
        here = name
        while here != "pumproom":
            carried[tree[here]] += taken[name]
            here = ends[here]

    def flows(loops: np.ndarray[Any, Any]) -> dict[str, float]:
        result = dict(carried)
        for loop, flow in zip(LOOPS, loops):
            for branch, sense in loop.items():
                result[branch] += sense * flow
        return result

    def unbalanced(loops: np.ndarray[Any, Any]) -> list[float]:
        now = flows(loops)
        return [sum(sense * snowmelt_loss(b, now[b]) for b, sense in loop.items()) / 1e3 for loop in LOOPS]

    start = np.array([1e-4, 1e-4, 2e-4, 1e-4])
    found, _, status, message = fsolve(unbalanced, start, xtol=1e-13, full_output=True)
    assert status == 1 or max(map(abs, unbalanced(found))) < 1e-9, message
    now = flows(found)
    pressures = {"pumproom": 260e3}
    for name in ("yard", "ramp", "court", "garage", "steps", "terrace", "door"):
        before = ends[name]
        rise = HEIGHTS[name] - HEIGHTS.get(before, 0.0)
        pressures[name] = pressures[before] - snowmelt_loss(tree[name], now[tree[name]]) - 1025 * G_N * rise
    return {
        **{f"V[{b}]": v for b, v in now.items()},
        **{f"p[{n}]": p for n, p in pressures.items()},
        "P[pumproom]": -64e3,
    }


# --- heating pipes ----------------------------------------------------------------------------------------


def heating_pipe(flow: float, bore: float, length: float, zeta: float) -> tuple[float, float, float]:
    """Speed, friction factor after Colebrook (1939) and loss of pressure."""
    rho, mu = 972.0, 0.355e-3
    v = flow / (pi * bore**2 / 4)
    reynolds = rho * v * bore / mu
    y = brentq(lambda y: y + 2 * log10(5e-5 / (3.7 * bore) + 2.51 * y / reynolds), 1, 20, xtol=1e-14)
    f = 1 / y**2
    return v, f, (f * length / bore + zeta) * rho * v**2 / 2


def heating_pipes() -> Numbers:
    north = ("north", (0.022, 26.0, 6.0), (0.022, 31.0, 6.0))
    south = ("south", (0.028, 38.0, 6.0), (0.028, 35.0, 9.0))
    numbers: Numbers = {}
    for name, supply, back in (north, south):

        def spare(
            flow: float,
            supply: tuple[float, float, float] = supply,
            back: tuple[float, float, float] = back,
        ) -> float:
            return 15e3 - 2.5e3 - heating_pipe(flow, *supply)[2] - heating_pipe(flow, *back)[2]

        flow = float(brentq(spare, 1e-5, 1e-2, xtol=1e-18, rtol=1e-14))
        numbers[f"V_{name}"] = flow
        numbers[f"P_{name}"] = 972 * 4200 * flow * 15
        for end, pipe in (("supply", supply), ("return", back)):
            v, f, loss = heating_pipe(flow, *pipe)
            numbers |= {f"{name}_{end}.v": v, f"{name}_{end}.f": f, f"{name}_{end}.dp": loss}
    return numbers


# --- regenerator ------------------------------------------------------------------------------------------


def regenerator() -> Numbers:
    """By marching: with the air's outlet guessed, slice after slice from the hot end gives the air's inlet."""
    slices, gas_flow, air_flow = 40, 0.055, 0.050
    conductance = 140.0 / slices

    def cp_gas(t: float) -> float:
        return 1042 + 0.23 * (t - 273.15)

    def cp_air(t: float) -> float:
        return 1004 + 0.11 * (t - 273.15)

    def march(air_out: float) -> tuple[list[float], list[float]]:
        gas, air = [420 + 273.15], [air_out]
        for _ in range(slices):
            g = g2 = gas[-1]
            a = a2 = air[-1]
            # Heat and temperatures of a slice depend on each other; steps in turn shrink about tenfold each.
            for _ in range(60):
                heat = conductance * ((g + g2) / 2 - (a + a2) / 2)
                g2 = g - heat / (gas_flow * cp_gas((g + g2) / 2))
                a2 = a - heat / (air_flow * cp_air((a + a2) / 2))
            gas.append(g2)
            air.append(a2)
        return gas, air

    air_out = float(brentq(lambda t: march(t)[1][-1] - 268.15, 500.0, 680.0, xtol=1e-11))
    gas, air = march(air_out)
    recovered = sum(
        air_flow * cp_air((warm + cold) / 2) * (warm - cold) for warm, cold in zip(air, air[1:], strict=False)
    )
    return {
        "T_out": gas[-1],
        "T_air": air[0],
        "T_g[20]": gas[20],
        "T_a[20]": air[20],
        "Q_sum": recovered,
        "eps": (air[0] - 268.15) / (420 + 5),
    }


# --- island grid ------------------------------------------------------------------------------------------

BUSES = ("turbine", "solar", "lodge", "lift", "workshop", "spa", "pump")
LINES = (
    ("T1", "turbine", "lodge", 280, 0.193, 0.075),
    ("T2", "turbine", "lift", 350, 0.193, 0.075),
    ("T3", "lodge", "solar", 90, 0.320, 0.077),
    ("T4", "lodge", "workshop", 120, 0.524, 0.078),
    ("T5", "lift", "workshop", 150, 0.524, 0.078),
    ("T6", "lodge", "spa", 60, 0.524, 0.078),
    ("T7", "spa", "pump", 110, 1.150, 0.082),
)
LOADS = {"lodge": 26e3 + 8e3j, "lift": 21e3 + 11e3j, "workshop": 9e3 + 5e3j, "spa": 12e3 + 3e3j}
LOADS["pump"] = 4e3 + 2e3j


def island_grid() -> Numbers:
    """With complex voltages: an admittance matrix, and currents of the loads repeated until they settle."""
    at = {name: i for i, name in enumerate(BUSES)}
    admittance = np.zeros((7, 7), dtype=complex)
    for _, a, b, length, r, x in LINES:
        y = 1 / (complex(r, x) * length / 1000)
        i, k = at[a], at[b]
        admittance[i, i] += y
        admittance[k, k] += y
        admittance[i, k] -= y
        admittance[k, i] -= y

    def voltages(reactive: float) -> np.ndarray[Any, Any]:
        power = np.array([18e3 + 1j * reactive, *(-LOADS[name] for name in BUSES[2:])])
        u = np.full(7, 405, dtype=complex)
        for _ in range(300):
            current = np.conj(power / u[1:])
            u[1:] = np.linalg.solve(admittance[1:, 1:], current - admittance[1:, 0] * u[0])
        return u

    reactive = float(brentq(lambda q: abs(voltages(q)[1]) - 402, -20e3, 40e3, xtol=1e-9, rtol=1e-14))
    u = voltages(reactive)
    fed = u * np.conj(admittance @ u)
    currents = {}
    for name, a, b, length, r, x in LINES:
        currents[name] = abs((u[at[a]] - u[at[b]]) / (complex(r, x) * length / 1000)) / sqrt(3)
    return {
        **{f"U[{n}]": abs(u[at[n]]) for n in BUSES},
        **{f"delta[{n}]": float(np.angle(u[at[n]])) for n in BUSES[1:]},
        **{f"I[{n}]": i for n, i in currents.items()},
        "P[turbine]": float(fed[0].real),
        "Q[turbine]": float(fed[0].imag),
        "Q[solar]": reactive,
        "loss": float(fed.sum().real),
    }


FAMILY_SAMPLES: dict[str, Callable[[], Numbers]] = {
    "snowmelt_network": snowmelt_network,
    "heating_pipes": heating_pipes,
    "regenerator": regenerator,
    "island_grid": island_grid,
}
