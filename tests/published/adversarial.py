"""Worksheets that have no solution to be found: no root, a continuum of roots, singular everywhere, noise.

Invented, all of them; what is true of each is seen by the eye and said beside it.
"""

from __future__ import annotations

NO_ROOT = {
    "sum of squares below zero": "x^2 + y^2 = -1\nx - y = 0.5\n",
    "curves that miss": "y = x^2 + 2\ny = 1 - x^2\nx near 0.5\n",
    "curves that miss closely": "y = x^2 + 1.001\ny = 1 - x^2\nx near 0.5\n",
    "exponential below zero": "exp(x) + y = 1\ny = 2 + exp(x)\n",
    "logarithm of what must be negative": "ln(x) = y\nx = -1 - y^2\nx near 1\n",
    "root of what must be negative": "y = sqrt(x)\nx = -2 - y\nx near 1\n",
    "sine beyond one": "sin(x)*cos(y) = 1.2\nx + y = 1\n",
    "balance that cannot close": "T = 300 K + 50 K * exp(-U/T)\nT = 500 K + U/10\nU near 1 K within 0 K ..\nT near 400 K\n",
    "heat against a lower bound": (
        "Q = 2 kW/K * (T - 300 K)\nQ = 5 kW - 1 kW/K * (T - 300 K)\nT near 290 K within 200 K .. 295 K\n"
    ),
    "flow beyond choking": "1/x*((1 + 0.2*x^2)/1.2)^3 = 0.9\nx near 0.5 within 0 ..\n",
    "no speed for the power": "F = 100 N + 2 kg/m * v^2\nF = 80 N - 1 kg/m * v^2\nv near 5 m/s within 0 m/s ..\n",
    "asymptote": "x*y = 1\ny = exp(-x) - 1/x\nx near 2 within 0.1 ..\n",
    "exponentials that never meet": "a = exp(t)\na = t\n",
    "mean below the smaller": "m = (a + b)/2\na*b = 4\nm = 1\na near 1 within 0 ..\nb near 3 within 0 ..\n",
    "double condition": "x = if x < 1 then 2 else 0\n",
    "jump": "x + y = 3\ny = if x < 1 then 5 else 0.5\nx near 2 within 0 .. 2\n",
}

CONTINUUM = {
    "the same line twice": "x + y = 1\n2*x + 2*y = 2\n",
    "a product squared": "x*y = 4\nx^2*y^2 = 16\nx near 1 within 0 ..\ny near 3 within 0 ..\n",
    "a circle twice": "x^2 + y^2 = 4\n3*x^2 + 3*y^2 = 12\nx near 1\ny near 1\n",
    "balance written twice": "a + b + c = 6\na + b = 6 - c\na*b = 2\na near 1\nb near 2\nc near 3\n",
    "angles by their sum": "sin(x + y) = 0.5\ncos(x + y) = sqrt(0.75)\nx near 0.2\ny near 0.2\n",
    "logarithm and product": "ln(x) + ln(y) = ln(6)\nx*y = 6\nx near 1 within 0 ..\ny near 2 within 0 ..\n",
}

SINGULAR = {
    "one sum in two functions": "exp(x + y) = 3\n(x + y)^2 = 2\n",
    "one product in two functions": "x*y = 2\nln(x*y) = 1\nx near 1 within 0 ..\ny near 1 within 0 ..\n",
    "parallel lines": "x + y = 1\nx + y = 2\n",
    "parallel planes": "x + y + z = 1\nx + y + z = 3\nx - y = z^2\n",
    "flat everywhere": "y = x - x + 3\ny = 4\n",
    "ratio fixed twice": "a/b = 2\na = 3*b\na near 1 within 0.1 ..\nb near 1 within 0.1 ..\n",
}

NOISE = {
    "steps below": "x = 2 + abs(sin(1e6*y)) + 1e-3*sin(1e9*x)\ny = -x + 1e-3*sin(1e7*y)\nx^2 + y^2 + z^2 = -1\n",
    "a comb that does not reach": "sin(1e5*x) + 1e-6*x^2 = 3\nx near 1 within -100 .. 100\n",
    "a comb of two": "sin(1e4*x*y) = 1.5 + x^2\nx + y = 2 + 0.01*sin(1e5*y)\n",
}

ALL = {**NO_ROOT, **CONTINUUM, **SINGULAR, **NOISE}
