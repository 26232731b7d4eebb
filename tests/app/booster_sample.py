"""Second calculation of the booster pump, in bare SI floats, with scipy's interpolation for its curves."""

from __future__ import annotations

from bisect import bisect_left
from math import log10, pi, sqrt

import numpy as np
from scipy import constants
from scipy.interpolate import CubicHermiteSpline, PchipInterpolator
from scipy.optimize import brentq

Numbers = dict[str, float]
G_N, RHO, NU, AMBIENT = constants.g, 999.8, 1.386e-6, 80.5e3
SPEED, RATED = 2750.0, 2900.0
BORES = [0.0273, 0.0360, 0.0419, 0.0531, 0.0689]

# Flows in m^3/h, as on the data sheet.
HEAD = PchipInterpolator([0, 3, 6, 9, 12, 15], [62.0, 61.0, 58.0, 52.5, 44.0, 32.0])
FLOWS, SPEEDS = [3, 6, 9, 12, 15], [2300, 2600, 2900]
EFFICIENCIES = np.array([[36, 34, 32], [53, 52, 50], [58, 60, 60], [52, 57, 61], [38, 47, 54]]) / 100


def efficiency(flow: float) -> float:
    """At `flow` in m^3/h and the speed set: monotone cubics along the speeds, then along the flows."""
    values = PchipInterpolator(SPEEDS, EFFICIENCIES, axis=1)(SPEED)
    along = PchipInterpolator(FLOWS, EFFICIENCIES, axis=0)(FLOWS, 1)
    slopes = PchipInterpolator(SPEEDS, along, axis=1)(SPEED)
    return float(CubicHermiteSpline(FLOWS, values, slopes)(flow))


def pumped(flow: float) -> float:
    """Head at `flow` in m^3/h by the affinity laws."""
    return float(HEAD(flow * RATED / SPEED)) * (SPEED / RATED) ** 2


def pipe(flow: float) -> tuple[float, float, float, float]:
    """Bore, speed, friction factor and head lost at `flow` in m^3/h."""
    least = sqrt(4 * (9 / 3600) / (pi * 1.4))
    bore = BORES[bisect_left(BORES, least)]
    v = flow / 3600 / (pi * bore**2 / 4)
    rough, reynolds = 1e-4 / (3.7 * bore), v * bore / NU
    y = brentq(lambda y: y + 2 * log10(rough + 2.51 * y / reynolds), 1.0, 20.0, xtol=1e-300, rtol=8.9e-16)
    return bore, v, y**-2, (180 / bore / y**2 + 12) * v**2 / (2 * G_N)


def results(flow: float) -> Numbers:
    """All results at `flow` in m^3/h; the lift is what the pump's head leaves for it."""
    bore, v, f, lost = pipe(flow)
    head, inlet = pumped(flow), AMBIENT + 0.3e5
    return {
        "Q": flow / 3600, "H": head, "D": bore, "v": v, "f": f, "h_f": lost, "eta": efficiency(flow),
        "P": RHO * G_N * flow / 3600 * head / (efficiency(flow) * 0.82), "p_d": inlet + RHO * G_N * head,
        "npsh_a": (inlet - 1070) / (RHO * G_N) + v**2 / (2 * G_N), "z": head - lost - 0.7e5 / (RHO * G_N),
    }  # fmt: skip


def booster() -> Numbers:
    """The flow at the lift surveyed."""
    return results(brentq(lambda q: results(q)["z"] - 34, 3.0, 14.0, xtol=1e-300, rtol=8.9e-16))


def booster_at_a_flow() -> Numbers:
    """The lift reached at 8 m^3/h."""
    return results(8.0)
