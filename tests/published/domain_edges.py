"""Equations that leave their domain a short way from the root: logarithms, roots, quotients, powers.

Each is a formula of the trade with invented data; no root is recorded here, the tests work them out.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass


@dataclass(frozen=True)
class Edge:
    """One system.

    Attributes
    ----------
    name : str
    formulas : callable
        (list of n numbers, module of functions) to the list of n residuals.
    size : tuple of float
        Order of magnitude of each unknown; starts are spread over six decades round it.
    lower : tuple of float
        Bounds an engineer would state: 0 for what cannot be negative, else -inf.
    """

    name: str
    formulas: Callable
    size: tuple[float, ...]
    lower: tuple[float, ...]


INF = float("inf")


def edge(name, size, formulas, lower=None):
    """An `Edge`; one number for `size` makes one unknown."""
    sizes = size if isinstance(size, tuple) else (size,)
    return Edge(name, formulas, sizes, (0.0,) * len(sizes) if lower is None else lower)


EDGES = (
    edge("logarithm and line", 1.6, lambda x, m: [m.log(x[0]) + x[0] / 50 - 0.5]),
    edge("logarithm, no bound", 1.6, lambda x, m: [m.log(x[0]) + x[0] / 50 - 0.5], (-INF,)),
    edge(
        "Colebrook",
        0.02,
        lambda x, m: [1 / m.sqrt(x[0]) + 2 * m.log(1e-4 / 3.7 + 2.51 / (1e5 * m.sqrt(x[0]))) / 2.302585093],
    ),
    edge("friction velocity", 0.4, lambda x, m: [10 / x[0] - m.log(x[0] * 0.5 / 1e-3) / 0.41]),
    edge(
        "Antoine backwards", 350, lambda x, m: [m.log(760.0 + 0 * x[0]) - 18.3036 + 3816.44 / (x[0] - 46.13)]
    ),
    edge("log mean", 30, lambda x, m: [(80 - x[0]) / m.log(80 / x[0]) - 45]),
    edge("diode", 0.6, lambda x, m: [1e-12 * (m.exp(x[0] / 0.02585) - 1) - (5 - x[0]) / 1000], (-INF,)),
    edge("weir", 0.3, lambda x, m: [1.84 * (2 - 0.2 * x[0]) * x[0] ** 1.5 - 0.7]),
    edge(
        "Manning",
        0.8,
        lambda x, m: [
            (3 * x[0]) * (3 * x[0] / (3 + 2 * x[0])) ** (2 / 3) * m.sqrt(1e-3 + 0 * x[0]) / 0.013 - 6
        ],
    ),
    edge("specific energy, deep", 1.5, lambda x, m: [x[0] + 4 / (2 * 9.81 * x[0] ** 2) - 1.8]),
    edge("Joukowsky time", 2.0, lambda x, m: [x[0] * m.exp(-x[0]) - 0.2]),
    edge("radiation", 500, lambda x, m: [5.67e-8 * 0.8 * (x[0] ** 4 - 293**4) + 12 * (x[0] - 293) - 6000]),
    edge("orifice", 0.6, lambda x, m: [x[0] ** 2 / m.sqrt(1 - x[0] ** 4) - 0.4]),
    edge("Kepler", 1.0, lambda x, m: [x[0] - 0.9 * m.sin(x[0]) - 0.5], (-INF,)),
    edge("catenary", 200, lambda x, m: [x[0] * (m.exp(50 / x[0]) + m.exp(-50 / x[0])) / 2 - x[0] - 8]),
    edge("interest", 0.05, lambda x, m: [1000 * (1 - (1 + x[0]) ** -10) / x[0] - 7500]),
    edge("Langmuir", 0.3, lambda x, m: [5 * x[0] / (1 + 2 * x[0]) + x[0] - 1.2]),
    edge("pH of a weak acid", 1e-3, lambda x, m: [x[0] ** 2 / (0.1 - x[0]) - 1.8e-5]),
    edge(
        "Redlich-Kwong volume",
        2e-3,
        lambda x, m: [8.314 * 350 / (x[0] - 2.97e-5) - 6.46 / (18.7083 * x[0] * (x[0] + 2.97e-5)) - 1e6],
    ),
    edge("isentropic area ratio", 0.3, lambda x, m: [((1 + 0.2 * x[0] ** 2) / 1.2) ** 3 / x[0] - 2.0]),
    edge("choked pressure", 0.5, lambda x, m: [m.sqrt(1 - x[0] ** 0.2857) * x[0] ** 0.714 - 0.2]),
    edge("fin efficiency", 1.0, lambda x, m: [(1 - m.exp(-2 * x[0])) / (1 + m.exp(-2 * x[0])) / x[0] - 0.6]),
    edge("sag and slope", 0.3, lambda x, m: [m.atan(x[0]) + x[0] - 0.55], (-INF,)),
    edge(
        "transfer units", 1.5, lambda x, m: [(1 - m.exp(-0.4 * x[0])) / (1 - 0.6 * m.exp(-0.4 * x[0])) - 0.62]
    ),
    edge("Nusselt film", 5e-4, lambda x, m: [x[0] ** 3 * 9.81 * 1e6 / (3 * 1e-3) - 0.05 / 0.3]),
    edge("bearing", 0.7, lambda x, m: [m.sqrt(1 - x[0] ** 2) * (1 - x[0]) ** 2 / x[0] ** 2 - 0.05]),
    edge("Michaelis and feed", 0.2, lambda x, m: [2 * (1 - x[0]) - 0.5 * x[0] / (0.01 + x[0])]),
    edge(
        "film and pipe",
        (0.02, 2.0),
        lambda x, m: [
            1 / m.sqrt(x[0]) + 0.8686 * m.log(1e-4 / 3.7 + 2.51e-6 / (0.05 * x[1] * m.sqrt(x[0]))),
            x[0] * 100 / 0.05 * 500 * x[1] ** 2 - 80000,
        ],
    ),
    edge(
        "flash of two",
        (0.4, 0.5),
        lambda x, m: [
            0.5 / (1 + 1.2 * x[0]) + 0.5 / (1 - 0.7 * x[0]) - 1,
            x[1] - 0.5 * 2.2 / (1 + 1.2 * x[0]),
        ],
    ),
    edge("pump and valve", (3.0, 12.0), lambda x, m: [x[1] - 40 + 3 * x[0] ** 2, x[0] - 0.9 * m.sqrt(x[1])]),
    edge(
        "exchanger outlets",
        (50.0, 35.0),
        lambda x, m: [
            1.1 * 4190 * (78 - x[0]) - 1.45 * 4190 * (x[1] - 12),
            1.1 * 4190 * (78 - x[0]) - 4000 * ((78 - x[1]) - (x[0] - 12)) / m.log((78 - x[1]) / (x[0] - 12)),
        ],
    ),
    edge(
        "reservoirs",
        (20.0, 0.5, 0.3),
        lambda x, m: [50 - x[0] - 100 * x[1] ** 2, x[0] - 10 - 80 * x[2] ** 2, x[1] - x[2] - 0.05],
    ),
    edge(
        "acid and water",
        (1e-4, 1e-10, 1e-3),
        lambda x, m: [x[0] * x[1] - 1e-14, x[0] - x[1] - x[2], x[0] * x[2] / (0.01 - x[2]) - 1.8e-5],
    ),
    edge(
        "nozzle",
        (0.7, 280.0),
        lambda x, m: [x[1] * (1 + 0.2 * x[0] ** 2) - 300, x[0] * m.sqrt(1.4 * 287 * x[1]) - 250],
    ),
    edge(
        "settling",
        (0.05, 20.0),
        lambda x, m: [
            x[1] - x[0] * 1e-3 * 1000 / 1e-3,
            x[0] ** 2 - 4 / 3 * 9.81 * 1e-3 * 1.65 / (24 / x[1] + 6 / (1 + m.sqrt(x[1])) + 0.4),
        ],
    ),
    edge(
        "solar loss",
        (360.0, 5.0),
        lambda x, m: [
            800 * 0.75 - x[1] * (x[0] - 293),
            x[1] - 3 - 0.8 * 5.67e-8 * (x[0] ** 4 - 293**4) / (x[0] - 293),
        ],
    ),
    edge(
        "mixing line",
        (0.3, 30.0),
        lambda x, m: [
            x[0]
            - 0.622
            * 0.6
            * m.exp(17.3 * x[1] / (x[1] + 237))
            * 611
            / (101325 - 0.6 * 611 * m.exp(17.3 * x[1] / (x[1] + 237))),
            1005 * x[1] + x[0] * (2.5e6 + 1870 * x[1]) - 80000,
        ],
    ),
    edge("string and arc", (1.2, 10.0), lambda x, m: [2 * x[1] * m.sin(x[0] / 2) - 11, x[1] * x[0] - 12]),
    edge(
        "two valves",
        (5.0, 2.0),
        lambda x, m: [m.sqrt(10 - x[0]) - m.sqrt(x[0] - x[1]), m.sqrt(x[0] - x[1]) - 1.2 * m.sqrt(x[1])],
    ),
    edge(
        "cable thermal",
        (60.0, 1.2),
        lambda x, m: [x[0] - 20 - 40 * x[1] ** 2 * (1 + 0.004 * (x[0] - 20)), m.log(x[1]) + x[0] / 100 - 0.8],
    ),
)
