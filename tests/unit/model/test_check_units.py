"""Worksheets as an engineer would write them: what the check of units says about the whole text."""

from __future__ import annotations

import pytest

import eqsheet
from eqsheet.diagnostics.diagnostic import Diagnostic

UNIT_CODES = ("dimension-", "sum-of-", "reading-", "difference-", "rpm-")

NOZZLE = "p1 = 6 barg\np2 = 1 barg\ndp = p1 - p2\nrho = 998 kg/m^3\nv = sqrt(2*dp/rho)\n"
EXCHANGER = """\
T_in = 60 degC
T_a = 20 degC
T_out near 40 degC within 20 degC .. 60 degC
m = 2 kg/s
cp = 4.18 kJ/(kg*K)
UA = 3 kW/K
Q = m*cp*(T_in - T_out)
Q = UA*logmean(T_in - T_a, T_out - T_a)
"""
FRICTION = """\
D = 50 mm
L = 10 m
rho = 998 kg/m^3
mu = 1 mPa*s
Q = 2 L/s
A = pi*D^2/4
v = Q/A
f = 0.316/Re^0.25
dP = f*(L/D)*rho*v^2/2
show dP in kPa
"""
BRANCHES = """\
Q = 2000 m^3/h
D_2 = 250 mm
Q = Q_1 + Q_2
dp = f_1*L_1/D_1*rho/2*v_1^2
dp = f_2*L_2/D_2*rho/2*v_2^2
Q_1 = v_1*pi*D_1^2/4
Q_2 = v_2*pi*D_2^2/4
f_1 = 0.316*(nu/(v_1*D_1))^0.25
f_2 = 0.316*(nu/(v_2*D_2))^0.25
nu = 15e-6 m^2/s
rho = 1.2 kg/m^3
L_1 = 40 m
"""
RADIATION = "T = 20 degC\nTs = 5 degC\nA = 2 m^2\nQ = 0.9*const.sigma*A*(T^4 - Ts^4)\n"


def findings(text: str) -> list[Diagnostic]:
    return [d for d in eqsheet.parse(text).solve().diagnostics if d.code.startswith(UNIT_CODES)]


@pytest.mark.parametrize(
    "text",
    [
        NOZZLE + "require dp <= 6 bar\nshow p1 in bara, dp in bar\n",
        EXCHANGER + "require T_out = 40 degC within 2 K\nshow T_out in degF\n",
        FRICTION + "Re = rho*v*D/mu\n",
        RADIATION,
        "P = 3 kW\nn = 1450 rpm\nM = P/n\n",
        "T1 = 20 degC\nT2 = T1 + 5 K\nT3 = max(T1, T2) + 3 K\nx = (T3 - T1)/(T2 - T1)\n",
    ],
)
def test_sound_worksheets_pass(text: str) -> None:
    assert findings(text) == []


@pytest.mark.parametrize(
    ("text", "code", "guilty", "line"),
    [
        (NOZZLE + "require dp <= 6 barg\n", "reading-as-difference", "6 barg", 6),
        (EXCHANGER + "require T_out = 40 degC within 2 degC\n", "reading-as-difference", "2 degC", 9),
        (FRICTION + "Re = rho*v/mu\n", "dimension-clash", "rho*v/mu", 11),
        (RADIATION + "Q2 = 5 W/(m^2*K)*A*(T + 3 degC)\n", "sum-of-readings", "3 degC", 5),
        ("F = 3 kN\nA = 2 cm^2\ns = F*A\nrequire s <= 200 MPa\n", "dimension-clash", "F*A", 3),
        ("v near 2 m\nv = 3 m/s\n", "dimension-clash", "2 m", 1),
        ("U = 0.6 V\nV_T = 25 mV\nx = exp(U)\n", "dimension-of-argument", "U", 3),
        ("L = 2 m\np = 10 bar/L\nq = p*3\nrequire q < 20 bar\n", "dimension-clash", "10 bar/L", 2),
        (BRANCHES + "D_1 = 3 kg\nL_2 = 30 m\n", "dimension-clash", "3 kg", 13),
        (BRANCHES + "D_1 = 315\nL_2 = 30 m\n", "dimension-clash", "315", 13),
        ("ambient = 84 kPa\np = 2 barg\np_abs = p + ambient\n", "reading-made-absolute", "ambient", 3),
    ],
)
def test_a_slip_is_found_where_it_was_made(text: str, code: str, guilty: str, line: int) -> None:
    (found,) = findings(text)
    assert found.code == code
    assert found.span is not None
    assert (found.span.text, found.span.line) == (guilty, line)
