"""AC power flow of the IEEE test systems with 14 and 30 buses, as worksheets with `rows`.

Data and published solution of the 14-bus system: IEEE common data format, Power Systems Test Case Archive of the
University of Washington, as PYPOWER holds them (voltages with three decimals, angles with two). The 30-bus
system is PYPOWER's; there the reference is that library's own power flow, which also gives both to more digits.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from pypower.api import case14, case30, ppoption, runpf

import eqsheet

SLACK, GENERATOR = 3, 2

EQUATIONS = """\
for l in line:
    g[l] = r[l]/(r[l]^2 + x[l]^2)
    s[l] = x[l]/(r[l]^2 + x[l]^2)
    theta[l] = delta[a[l]] - delta[b[l]]
    P_a[l] = g[l]*(V[a[l]]/t[l])^2 - V[a[l]]*V[b[l]]/t[l]*(g[l]*cos(theta[l]) - s[l]*sin(theta[l]))
    P_b[l] = g[l]*V[b[l]]^2 - V[a[l]]*V[b[l]]/t[l]*(g[l]*cos(theta[l]) + s[l]*sin(theta[l]))
    Q_a[l] = (s[l] - c[l]/2)*(V[a[l]]/t[l])^2 - V[a[l]]*V[b[l]]/t[l]*(s[l]*cos(theta[l]) + g[l]*sin(theta[l]))
    Q_b[l] = (s[l] - c[l]/2)*V[b[l]]^2 - V[a[l]]*V[b[l]]/t[l]*(s[l]*cos(theta[l]) - g[l]*sin(theta[l]))
for n in bus:
    P_g[n] - P_d[n] = sum(P_a[l] for l in line if a[l] = n) + sum(P_b[l] for l in line if b[l] = n)
    Q_g[n] - Q_d[n] + B_s[n]*V[n]^2 = sum(Q_a[l] for l in line if a[l] = n) + sum(Q_b[l] for l in line if b[l] = n)
V near 1 within 0.5 .. 1.5
delta near 0 deg within -90 deg .. 90 deg
theta near 0 deg within -90 deg .. 90 deg
"""


def worksheet(case: dict[str, Any]) -> str:
    """The case as text: two tables and the power flow in per-unit values."""
    base = case["baseMVA"]
    fed: dict[int, complex] = {}
    for bus, p, q in case["gen"][:, :3]:
        fed[int(bus)] = fed.get(int(bus), 0) + complex(p, q) / base
    held = {int(row[0]): row[5] for row in case["gen"]}
    lines = ["rows bus: V, delta in deg, P_g, Q_g, P_d, Q_d, B_s"]
    for row in case["bus"]:
        bus, kind = int(row[0]), int(row[1])
        voltage = repr(float(held[bus])) if kind in (SLACK, GENERATOR) else "-"
        angle = repr(float(row[8])) if kind == SLACK else "-"
        active = "-" if kind == SLACK else repr(fed.get(bus, 0j).real)
        reactive = "-" if kind in (SLACK, GENERATOR) else repr(fed.get(bus, 0j).imag)
        loads = (repr(float(row[i]) / base) for i in (2, 3, 5))
        lines.append("    " + " ".join((f"N{bus}", voltage, angle, active, reactive, *loads)))
    lines.append("rows line: a of bus, b of bus, r, x, c, t")
    for number, row in enumerate(case["branch"]):
        values = (repr(float(v)) for v in (*row[2:5], row[8] or 1.0))
        lines.append("    " + " ".join((f"L{number}", f"N{int(row[0])}", f"N{int(row[1])}", *values)))
    return "\n".join(lines) + "\n" + EQUATIONS


def without(text: str, *guessed: str) -> str:
    """The text without the guesses of these families."""
    lines = (line for line in text.splitlines() if not line.startswith(tuple(f"{g} near" for g in guessed)))
    return "\n".join(lines) + "\n"


def solved(case: dict[str, Any]) -> tuple[np.ndarray[Any, Any], np.ndarray[Any, Any], eqsheet.Solution]:
    """Voltages, angles in degrees, and the whole solution."""
    solution = eqsheet.parse(worksheet(case)).solve()
    assert solution.status == "solved", [d.message for d in solution.diagnostics]
    buses = [int(row[0]) for row in case["bus"]]
    return (
        np.array([solution[f"V[N{n}]"].si for n in buses]),
        np.array([solution[f"delta[N{n}]"].to("deg") for n in buses]),
        solution,
    )


def test_ieee_14_bus_against_the_published_solution() -> None:
    voltages, angles, solution = solved(case14())
    published = case14()["bus"]
    assert abs(voltages - published[:, 7]).max() < 1.5e-3  # bus 4 is printed as 1.019, and is 1.0177
    assert abs(angles - published[:, 8]).max() < 0.025
    # The printed reactive powers do not belong to the printed voltages to all their digits; the slack's power does.
    assert solution["P_g[N1]"].si * 100 == pytest.approx(232.4, abs=0.05)


@pytest.mark.parametrize("case", [case14, case30], ids=["14 buses", "30 buses"])
def test_power_flow_against_the_library(case: Any) -> None:
    voltages, angles, solution = solved(case())
    reference, converged = runpf(case(), ppoption(VERBOSE=0, OUT_ALL=0, PF_TOL=1e-12))
    assert converged
    assert abs(voltages - reference["bus"][:, 7]).max() < 1e-10
    assert abs(angles - reference["bus"][:, 8]).max() < 1e-8
    slack = int(reference["gen"][0, 0])
    assert solution[f"P_g[N{slack}]"].si * 100 == pytest.approx(reference["gen"][0, 1], abs=1e-8)
    for bus, _, reactive in reference["gen"][:, :3]:
        assert solution[f"Q_g[N{int(bus)}]"].si * 100 == pytest.approx(reactive, abs=1e-8)


@pytest.mark.parametrize("guessed", [("theta",), ("theta", "delta")], ids=" and ".join)
@pytest.mark.parametrize("case", [case14, case30], ids=["14 buses", "30 buses"])
def test_angles_need_no_guess(case: Any, guessed: tuple[str, ...]) -> None:
    """The same voltages as with guesses: the operating point, and no other solution of the equations."""
    voltages, _, _ = solved(case())
    solution = eqsheet.parse(without(worksheet(case()), *guessed)).solve()
    assert solution.status == "solved", [d.message for d in solution.diagnostics]
    again = np.array([solution[f"V[N{int(row[0])}]"].si for row in case()["bus"]])
    assert abs(again - voltages).max() < 1e-10
