"""Heat exchangers: effectiveness both ways, and a worked example of a textbook."""

from __future__ import annotations

from collections.abc import Callable
from math import log, pi

import pytest

import eqsheet

Solve = Callable[[str], eqsheet.Solution]

COUNTERFLOW = """
define effectiveness(N, C) = (1 - exp(-N*(1 - C)))/(1 - C*exp(-N*(1 - C))) valid C < 1
eff = effectiveness(NTU, C_r)
"""

# Kays and London, Compact Heat Exchangers, table of counterflow effectiveness (from memory): NTU, C_r,
# effectiveness.
TABLE = [(1.0, 0.5, 0.565), (2.0, 0.5, 0.775)]


@pytest.mark.parametrize(("ntu", "ratio", "effectiveness"), TABLE)
def test_effectiveness_forwards_and_backwards(
    solved: Solve, ntu: float, ratio: float, effectiveness: float
) -> None:
    forwards = solved(f"{COUNTERFLOW}\nNTU = {ntu}\nC_r = {ratio}")
    assert forwards["eff"].value == pytest.approx(effectiveness, abs=0.0006)
    back = solved(
        f"{COUNTERFLOW}\neff = {forwards['eff'].value!r}\nC_r = {ratio}\nNTU near 0.7 within 0 .. 20"
    )
    assert back["NTU"].value == pytest.approx(ntu, rel=1e-11)
    stream = solved(
        f"{COUNTERFLOW}\neff = {forwards['eff'].value!r}\nNTU = {ntu}\nC_r near 0.4 within 0 .. 0.99"
    )
    assert stream["C_r"].value == pytest.approx(ratio, rel=1e-9)


def test_oil_cooler(solved: Solve) -> None:
    """Incropera and DeWitt, Fundamentals of Heat and Mass Transfer, example 11.1 (from memory).

    Water in the tube, oil in the annulus, counterflow: q = 8524 W, water leaves at 40.2 degC, tube Reynolds
    number 14050, U = 38.1 W/(m^2 K), length 65.9 m. Properties as printed there.
    """
    solution = solved(
        """
        ## Wanted
        show L in m, T_co in degC, q in W, U in W/(m^2*K)

        ## Streams
        m_c = 0.2 kg/s                     # water
        m_h = 0.1 kg/s                     # oil
        cp_c = 4178 J/(kg*K)
        cp_h = 2131 J/(kg*K)
        T_ci = 30 degC
        T_hi = 100 degC
        T_ho = 60 degC
        q = m_h*cp_h*(T_hi - T_ho)
        q = m_c*cp_c*(T_co - T_ci)

        ## Films
        D_i = 25 mm
        D_o = 45 mm
        mu = 725e-6 N*s/m^2
        k_c = 0.625 W/(m*K)
        k_h = 0.138 W/(m*K)
        Re = 4*m_c/(pi*D_i*mu)
        h_i*D_i/k_c = 0.023*Re^(4/5)*4.85^0.4 valid Re >= 10000      # Dittus-Boelter
        h_o*(D_o - D_i)/k_h = 5.63         # laminar annulus
        1/U = 1/h_i + 1/h_o

        ## Length
        q = U*pi*D_i*L*logmean(T_hi - T_co, T_ho - T_ci)
        """
    )
    assert solution["q"].value == pytest.approx(8524, abs=0.5)
    assert solution["T_co"].value == pytest.approx(40.2, abs=0.05)
    assert solution["Re"].value == pytest.approx(14050, abs=5)
    assert solution["U"].value == pytest.approx(38.1, abs=0.1)
    assert solution["L"].value == pytest.approx(65.9, abs=0.2)
    outlet = 30 + 8524 / (0.2 * 4178)
    inner = 0.625 / 0.025 * 0.023 * (0.8 / (pi * 0.025 * 725e-6)) ** 0.8 * 4.85**0.4
    overall = 1 / (1 / inner + 0.020 / (5.63 * 0.138))
    mean = ((100 - outlet) - 30) / log((100 - outlet) / 30)
    assert solution["L"].value == pytest.approx(8524 / (overall * pi * 0.025 * mean), rel=1e-12)


def test_equal_ends_of_a_counterflow_exchanger(solved: Solve) -> None:
    """Kays and London: equal capacities, the same difference at both ends, eff = NTU/(1 + NTU)."""
    solution = solved(
        """
        C = 2 kW/K
        UA = 5 kW/K
        T_hi = 90 degC
        T_ci = 20 degC
        Q = C*(T_hi - T_ho)
        Q = C*(T_co - T_ci)
        Q = UA*logmean(T_hi - T_co, T_ho - T_ci)
        T_ho near 40 degC within T_ci .. T_hi
        T_co near 70 degC within T_ci .. T_hi
        Q near 100 kW
        """
    )
    assert solution["Q"].to("kW") == pytest.approx(2 * 70 * 2.5 / 3.5, rel=1e-10)
    assert solution["T_co"].to("degC") == pytest.approx(20 + 50, rel=1e-10)
