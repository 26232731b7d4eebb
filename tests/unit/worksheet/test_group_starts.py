"""Starts of large families: from bounds, from equations, else near the members of the family that have a value."""

from __future__ import annotations

import time

import numpy as np
import pytest

import eqsheet
from eqsheet.model.equation_group import LARGE_FAMILY
from eqsheet.worksheet.curve_ranges import Range
from eqsheet.worksheet.group_equations import GroupedEquations
from eqsheet.worksheet.group_guesses import guess_arrays, work_out_group_guesses
from eqsheet.worksheet.group_starts import BESIDE_ZERO, group_starts
from eqsheet.worksheet.prepare import prepare
from eqsheet.worksheet.starting_values import NEAR_ZERO, SMALL_ANGLE

ROD = """
N = {n}
for i in 1..N:
    (T[i+1] - 2*T[i] + T[i-1])*(N+1)^2 = T[i]^3 + 1
T[0] = 0
T[N+1] = 1
"""


class Starts:
    """The starts of all unknowns of a worksheet, taken as one block."""

    def __init__(self, text: str, ranges: dict[str, Range] | None = None) -> None:
        sheet = eqsheet.parse(text)
        prepared = prepare(sheet.document.statements, (), None, (), 3)
        system = prepared.system
        assert system.firsts is not None
        values = np.full(len(system.names), np.nan)
        values[list(prepared.known_values)] = list(prepared.known_values.values())
        unknowns = np.flatnonzero(np.isnan(values))
        equations = GroupedEquations(system)
        numbers = np.flatnonzero(~equations.known)
        shapes = equations.shapes(numbers, [prepared.formulas[n] for n in numbers if n < equations.written])
        guesses = guess_arrays(work_out_group_guesses(prepared)[0], len(values))
        by_number = {system.names.index(name): span for name, span in (ranges or {}).items()}
        self.names = [system.names[q] for q in unknowns]
        self.start = group_starts(
            shapes,
            unknowns,
            values,
            guesses,
            by_number,
            system.firsts,
            equations.part,
            prepared.dimensions,
        )
        self.blind = {self.names[i] for i in self.start.blind}

    def of(self, family: str, what: str = "values") -> np.ndarray:
        """Starts, or another sequence, of the members of a family."""
        own = [i for i, name in enumerate(self.names) if name.startswith(family + "[")]
        return np.asarray(getattr(self.start, what))[own]


def test_members_start_between_those_that_are_known() -> None:
    starts = Starts(ROD.format(n=50))
    assert ((starts.of("T") > 0.3) & (starts.of("T") < 0.7)).all()
    assert len(set(starts.of("T").tolist())) == 50
    assert len(starts.blind) == 50


def test_members_start_near_the_one_that_is_known() -> None:
    starts = Starts("for i in 1..9:\n    p[i]*p[i] + p[i]*p[i-1] = 2 bar^2/(1 + i)\np[0] = 3 bar")
    assert ((starts.of("p") >= 2.7e5) & (starts.of("p") <= 3.3e5)).all()


def test_members_of_a_family_with_a_known_zero_start_beside_it() -> None:
    starts = Starts("for i in 1..9:\n    a[i] + sin(a[i]) = 0.1*a[i-1] + exp(a[i])\na[0] = 0")
    assert ((starts.of("a") >= BESIDE_ZERO) & (starts.of("a") <= 1.2 * BESIDE_ZERO)).all()


def test_a_family_nothing_is_known_of_starts_at_what_is_typical() -> None:
    starts = Starts("for i in 1..9:\n    T[i]^4 + T[i]*(1 K^3) = 1e9 K^4*i")
    assert ((starts.of("T") >= 300.0) & (starts.of("T") <= 360.0)).all()


def test_angles_that_nothing_is_known_of_start_small() -> None:
    starts = Starts(
        "for i in 1..9:\n    sin(a[i]) + cos(b[i] - a[i]) + sin(b[i]) = 0.1*i\n    tan(a[i])*b[i] = exp(b[i]) + i*b[i]"
    )
    assert ((starts.of("a") > 0.0) & (starts.of("a") <= 1.2 * SMALL_ANGLE)).all()
    # An angle only in the first equation.
    assert (starts.of("b") >= 1.0).all()


def test_an_equation_tells_one_family_from_another() -> None:
    starts = Starts("""
for i in 1..9:
    y[i] = 3*x[i] + 1
    x[i]^2 + sin(y[i-1]) = y[i-1]*exp(x[i]) + i
y[0] = 2
x[3] near 0.25
""")
    np.testing.assert_allclose(starts.of("y"), 3.0 * starts.of("x") + 1.0)
    assert starts.of("x")[2] == 0.25
    # Those that follow from starts are not blind.
    assert starts.blind == {f"x[{i}]" for i in range(1, 10) if i != 3}


def test_a_family_is_no_chain() -> None:
    # Each member told from the one before would start a million times larger.
    starts = Starts("for i in 1..9:\n    z[i] = 1e6*z[i-1]\nz[0] = 1")
    assert starts.of("z")[0] == 1e6
    assert starts.of("z")[1:].max() <= 1e6


def test_a_start_that_equations_make_zero_is_near_zero() -> None:
    starts = Starts(
        "for i in 1..5:\n    d[i] = a[i] - b\n    a[i]^2 + d[i]*a[i] = 9 + d[i]^3\n    a near 3\nb = 3"
    )
    assert ((starts.of("d") > 0.0) & (starts.of("d") <= 2.0 * NEAR_ZERO)).all()
    assert not starts.blind


def test_starts_stay_inside_bounds() -> None:
    starts = Starts("""
for i in 1..6:
    a[i] = b[i] - 100
    b[i] + sin(b[i]) = a[i]*a[i] + c[i]
    c[i]^2 = 2*a[i] + i
    a within 2 ..
    b near 5
    c within 1 .. 400
""")
    assert (starts.of("a") > 2.0).all()
    # Bounds of a wide ratio are divided by their ratio.
    assert ((starts.of("c") > 400.0**0.3) & (starts.of("c") < 400.0**0.7)).all()
    assert starts.of("a", "lower").tolist() == [2.0] * 6
    assert starts.of("b", "upper").tolist() == [np.inf] * 6


def test_ranges_of_curves_narrow_where_to_start_and_no_bounds() -> None:
    text = "for i in 1..4:\n    a[i]^2 = 2 + i + a[i]*sin(a[i])\n    a near 50 within 0 .. 100"
    starts = Starts(text, {"a[2]": (10.0, 20.0)})
    assert starts.of("a")[[0, 2, 3]].tolist() == [50.0] * 3
    assert 10.0 < starts.of("a")[1] < 20.0
    assert starts.of("a", "upper").tolist() == [100.0] * 4


def test_an_unknown_that_starts_at_zero_has_a_size() -> None:
    starts = Starts("""
for i in 1..4:
    a[i] + sin(a[i]) = 0.1*i
    b[i] + sin(b[i]) = 0.1*i
    a near 0 within -7 .. 5
    b near 0
""")
    assert starts.of("a").tolist() == [0.0] * 4
    assert starts.of("a", "magnitude").tolist() == [7.0] * 4
    assert starts.of("b", "magnitude").tolist() == [1.0] * 4


@pytest.mark.parametrize("n", [LARGE_FAMILY + 1, 20 * LARGE_FAMILY])
def test_a_rod_needs_no_guess(n: int) -> None:
    begin = time.process_time()
    solution = eqsheet.parse(ROD.format(n=n)).solve()
    # Telling each member from all before it took minutes.
    assert time.process_time() - begin < 5.0
    assert solution.status == "solved"
    assert solution.blocks[-1].iterations <= 5
    (said,) = [d for d in solution.diagnostics if d.code == "started-without-guess"]
    assert said.message.startswith("`T[1]`, `T[2]`, `T[3]`")
    assert f"and {n - 7} more" in said.message


def test_parts_of_a_large_sum_follow_from_its_members() -> None:
    text = f"N = {LARGE_FAMILY + 100}\nfor i in 1..N:\n    x[i]^3 + x[i] = 0.001*i + 0.01*S\nS = sum(x[i] for i in 1..N)/N"
    solution = eqsheet.parse(text).solve()
    assert solution.status == "solved"
    (said,) = [d for d in solution.diagnostics if d.code == "started-without-guess"]
    assert "sum" not in said.message
    # The sum has an equation of its own, which tells it.
    assert said.message.startswith("`x[1]`, `x[2]`")
