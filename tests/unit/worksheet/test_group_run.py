"""Large families solved as arrays give what the same worksheets written out give."""

import math

import pytest

import eqsheet
from eqsheet.model.equation_group import EquationGroup
from eqsheet.model.system import EquationItem
from eqsheet.review.table import solution_lines, verdict_line
from eqsheet.solve.ladder import DEFAULT_BUDGET
from eqsheet.worksheet.assemble import assemble
from eqsheet.worksheet.many_limits import failing_limits
from eqsheet.worksheet.prepare import prepare
from eqsheet.worksheet.run import run_blocks
from eqsheet.worksheet.solution import Solution

# More members than any test here has, and fewer.
WRITTEN_OUT, AS_ARRAYS = 10**6, 3

CONDUCTION = """
N = 80
L = 1 m
h = L/(N+1)
k = 2 W/(m*K)
for i in 1..N:
    k*(T[i+1] - 2*T[i] + T[i-1])/h^2 + q[i] = 1e-8 W/(m^3*K^4)*T[i]^4
    q[i] = 100 W/m^3 * i
    T[i] near 300 K within 200 K .. 900 K
T[0] = 20 degC
T[N+1] = 350 K
mean = sum(T[i] for i in 1..N)/N
require T[40] <= 4000 K
show T in degC
"""
CHAIN = """
N = 90
x[0] = 1 m
for i in 1..N:
    x[i] = 0.5*x[i-1] + 2 m*sqrt(y[i-1])
    y[i]^2 = 1 + 0.1*i + x[i]/(10 m)
    y[i] near 2
y[0] = 1
"""
LOOPS = """
N = 70
for i in 1..N:
    a[i]*b[i] = 6 + i
    a[i] + b[i] = c[i-1]
    a[i] near 3
    b[i] within 0 .. 5
    c[i] = c[i-1] + 0.01*a[i]
c[0] = 20
total = sum(c[i] for i in 1..N)
"""
TWO_DIMENSIONAL = """
N = 12
h = 1/(N+1)
for i in 1..N, j in 1..N:
    u[i-1, j] + u[i+1, j] + u[i, j-1] + u[i, j+1] - 4*u[i, j] + h^2*exp(u[i, j]) = 0
    u within 0 .. 1
for i in 1..N:
    u[i, 0] = 0
    u[i, N+1] = 0
    u[0, i] = 0
    u[N+1, i] = 0
"""
RING = """
N = 75
for i in 2..N+1:
    p[i-1] - p[i] = 3 Pa*s^2/m^6*Q[i-1]*abs(Q[i-1])
for i in 2..N:
    Q[i] = Q[i-1] - 0.001 m^3/s
p[1] = 2 bar
Q[1] = 0.2 m^3/s
for i in 1..N+1:
    p[i] within 0 bar ..
"""
SQUARES = """
N = 60
for i in 1..N:
    T[i]^2 - 2*T[i]*T[1] + 3 = i
T within 0 .. 50
"""
WITH_CONDITIONS = """
N = 66
for i in 1..N:
    v[i] = 0.01 m/s * i
    Re[i] = v[i]*(20 mm)/(1e-6 m^2/s)
    f[i] = if Re[i] < 2300 then 64/Re[i] else 0.3164/Re[i]^0.25
    dp[i] = f[i]*(1 m)/(20 mm)*(1000 kg/m^3)*v[i]^2/2
"""
RANGES = """
N = 40
define Nu(Re) = 0.023*Re^0.8 valid Re > 1e4
T[0] = 20 degC
for i in 1..N:
    T[i] = T[i-1] + 0.5 K valid T[i] <= 30 degC
    Re[i] = i*600 + T[i]/(1 K)
    h[i] = if Re[i] < 2300 then 3.66 else Nu(Re[i])
    w[i] = h[i]*2 valid h[i] > 1, i < 90
    idle[i] = 3*T[i] valid T[i] < 25 degC
"""
BRANCHES_OF_KNOWNS = """
N = 50
for i in 1..N:
    a[i] = i - 20
    x[i] = if a[i] > 0 then y[i] + 1 else 2*z[i]
    y[i] = if a[i] > 10 and i < 45 then 3 else if a[i] > 0 then 4 else x[i]
    z[i] = if a[i] > 0 then x[i] else 7 - i/10
"""
BRANCHES_OF_UNKNOWNS = """
N = 60
x[0] = 1
for i in 1..N:
    x[i] = if x[i-1] > 4 then x[i-1] - 0.5 else x[i-1] + 0.3
    y[i] = if x[i] > 3 and x[i-1] > 2 then ln(x[i]) else if x[i] > 2 then -1 else sqrt(x[i])
"""
DECIDED_BEFORE = """
N = 70
x[0] = 1
for i in 1..N:
    x[i] = x[i-1] + 0.1
    T[i+1] - 2*T[i] + T[i-1] = if x[i] > 4 then 1e-4*T[i] else 2e-4*(T[i] - 300 K)
    T[i] near 330 K within 200 K .. 900 K
T[0] = 300 K
T[N+1] = 350 K
"""
REGIMES = """
N = 64
for i in 1..N:
    T[i+1] - 2*T[i] + T[i-1] = if T[i] > 320 K then 1e-4*(T[i] - 320 K) else 0 K
    T[i] near 330 K within 200 K .. 900 K
T[0] = 300 K
T[N+1] = 350 K
"""
CURVES = """
N = 45
curve cp(T in degC) in kJ/(kg*K):
    0 4.2
    20 4.18
    50 4.19
    100 4.21
curve size(D in mm) in mm by step:
    10 10
    20 20
    50 50
T[0] = 20 degC
for i in 1..N:
    T[i] = T[i-1] + 0.7 K
    c[i] = cp(T[i])
    d[i] = size(i*1 mm)
    q[i] = if T[i] > 30 degC then cp(T[i-1])*T[i] else c[i]*T[i]
    k[i] = cp(0.5 degC + i*1 K)
"""
CURVES_COUPLED = """
N = 70
curve k(T in degC) in W/(m*K):
    0 0.5
    40 0.7
    100 1.1
for i in 1..N:
    k(T[i])*(T[i+1] - 2*T[i] + T[i-1]) = 1 W/m
    T[i] near 60 degC within 1 degC .. 99 degC
T[0] = 20 degC
T[N+1] = 80 degC
"""
TOLERANCES = """
for i in 1..30:
    L[i] = 20 mm ± 0.1 mm
    A[i] = L[i]^2
"""
TABLE = """
rows pipe: q, L in m, D in mm
    a 1 20 50
    b - 30 80
    c 3 10 25
    d 4 15 32
    "e-1" - 12 40
for p in pipe:
    A[p] = pi*D[p]^2/4
    V[p] = A[p]*L[p]
    require D[p] <= 70 mm
total = sum(V[p] for p in pipe)
q[b] = 2
for p in pipe if p = "e-1":
    q[p]*D[p] = 120 mm
show L in cm
"""
RESULTS = {
    "table": TABLE,
    "ranges": RANGES,
    "branches of knowns": BRANCHES_OF_KNOWNS,
    "branches of unknowns": BRANCHES_OF_UNKNOWNS,
    "branches decided before": DECIDED_BEFORE,
    "regimes": REGIMES,
    "curves": CURVES,
    "curves in a block": CURVES_COUPLED.replace("1 W/m", "1e-3 W*K/(m*K)"),
    "tolerances": TOLERANCES,
    "conduction": CONDUCTION,
    "chain": CHAIN,
    "loops": LOOPS,
    "two dimensions": TWO_DIMENSIONAL,
    "ring": RING,
    "squares": SQUARES,
    "conditions": WITH_CONDITIONS,
}
LIMITS = """
N = 40
T[0] = 20 degC
v_max = 3 m/s
require T[0] <= 90 degC
for i in 1..N:
    T[i] = T[i-1] + 0.5 K
    v[i] = 0.1 m/s * i
    p[i] = 2 barg + i*0.01 bar
    require T[i] <= {reading}
    require 0.05 m/s <= v[i] <= v_max  # erosion
    require v[i]*(2 s) = 0.2 m * i within 1 %
    require T[i] - T[i-1] = 0.5 K within 0.1 K
    require p[i] <= 2.2 barg
    require v[i] > 0 m/s
require v[3] <= 1 m/s
"""


@pytest.mark.parametrize("reading", ["90 degC", "30 degC", "T[0] + 15 K"])
def test_limits_are_judged_the_same(reading: str) -> None:
    text = LIMITS.format(reading=reading)
    written, arrays = solved(text, WRITTEN_OUT), solved(text, AS_ARRAYS)
    assert arrays.status == written.status == "outside-limits"
    assert len(arrays.limits) == len(written.limits) == 6 * 40 + 2
    for found, expected in zip(arrays.limits, written.limits):
        assert (found.text, found.line, found.unit) == (expected.text, expected.line, expected.unit)
        assert found.holds == expected.holds
        assert (found.margin is None) == (expected.margin is None)
        assert math.isclose(found.margin or 0.0, expected.margin or 0.0, rel_tol=1e-12, abs_tol=1e-12)
        assert math.isclose(found.slack, expected.slack, rel_tol=1e-12, abs_tol=1e-12)
    assert solution_lines(arrays) == solution_lines(written)
    assert verdict_line(arrays) == verdict_line(written)
    assert failing_limits(arrays.limits) == failing_limits(written.limits) > 0


def test_limits_on_members_that_were_not_found_are_left_out() -> None:
    text = "for i in 1..20:\n    y[i] = i - 5\n    x[i] = sqrt(y[i])\n    require x[i] <= 2\n"
    written, arrays = solved(text, WRITTEN_OUT), solved(text, AS_ARRAYS)
    assert 0 < len(written.limits) < 20
    assert [limit.text for limit in arrays.limits] == [limit.text for limit in written.limits]
    assert [limit.holds for limit in arrays.limits] == [limit.holds for limit in written.limits]


WRONG = {
    "a cell twice": TABLE + "L[c] = 3 m\n",
    "a cell outside its bounds": TABLE + "L within 12 m .. 40 m\n",
    "a column of another dimension": TABLE + "L[a] = 3*D[a] + 2 K\n",
    "outside a curve": CURVES.replace("0.7 K", "3 K"),
    "a branch without value": BRANCHES_OF_UNKNOWNS.replace("ln(x[i])", "ln(2 - x[i])"),
    "a condition without value": BRANCHES_OF_UNKNOWNS.replace("x[i] > 2 then", "sqrt(2.5 - x[i]) > 0 then"),
    "one equation missing": CONDUCTION.replace("T[0] = 20 degC", ""),
    "one equation too many": CONDUCTION + "T[30] = 400 K\n",
    "a known twice": CONDUCTION + "q[7] = 3 W/m^3\n",
    "a false check": CHAIN + "x[0] = 2*y[0]*(1 m)\n",
    "no solution": CONDUCTION.replace("+ q[i] =", "+ q[i] = 1e9 W/m^3*sqrt(-1 - (T[i]/(1 K))^2) +"),
    "dimensions": CONDUCTION.replace("- 2*T[i]", "- 2*q[i]"),
    "guesses twice": CONDUCTION + "T[3] near 310 K\n",
    "empty bounds": CONDUCTION.replace("within 200 K .. 900 K", "within 900 K .. 200 K"),
    "closed form outside its bounds": CHAIN + "x[50] within 100 m .. 200 m\n",
    "no closed form": CHAIN.replace("0.1*i", "0.1*i - 300"),
}


def solved(text: str, large_family: int) -> Solution:
    """The solution with statements of at least so many members kept as arrays."""
    sheet = eqsheet.parse(text)
    prepared = prepare(sheet.document.statements, sheet.diagnostics, large_family=large_family)
    run = run_blocks(prepared, DEFAULT_BUDGET) if prepared.valid_text else None
    return assemble("<text>", prepared, run, {})


@pytest.mark.parametrize("name", RESULTS)
def test_values_and_their_accounts_are_the_same(name: str) -> None:
    written, arrays = solved(RESULTS[name], WRITTEN_OUT), solved(RESULTS[name], AS_ARRAYS)
    assert written.solved, written.diagnostics
    assert arrays.status == written.status
    assert list(arrays) == list(written)
    for quantity, expected in written.items():
        found = arrays[quantity]
        assert math.isclose(found.si, expected.si, rel_tol=1e-12, abs_tol=1e-14), quantity
        assert (found.unit, found.kind, found.known, found.block) == (
            expected.unit,
            expected.kind,
            expected.known,
            expected.block,
        ), quantity
        assert found.line == expected.line, quantity
        assert abs(found.digits - expected.digits) <= 1, quantity
    assert arrays.diagnostics == written.diagnostics
    assert [limit.holds for limit in arrays.limits] == [limit.holds for limit in written.limits]


SECTIONS = """
## Loads
N = 30
for i in 1..N:
    F[i] = 2 kN * i
F[0] = 1 kN
## Displacements
x[0] = 0 mm
for i in 1..N:
    x[i] = x[i-1] + F[i]/(3 kN/mm)
show x[3]
"""


@pytest.mark.parametrize("text", [*RESULTS.values(), SECTIONS], ids=[*RESULTS, "sections"])
def test_the_table_is_the_same(text: str) -> None:
    assert solution_lines(solved(text, AS_ARRAYS)) == solution_lines(solved(text, WRITTEN_OUT))


@pytest.mark.parametrize("name", RESULTS)
def test_blocks_are_the_same(name: str) -> None:
    written, arrays = solved(RESULTS[name], WRITTEN_OUT), solved(RESULTS[name], AS_ARRAYS)
    assert len(arrays.blocks) == len(written.blocks)
    for found, expected in zip(arrays.blocks, written.blocks):
        assert (found.number, found.after, found.method, found.solved) == (
            expected.number,
            expected.after,
            expected.method,
            expected.solved,
        )
        assert tuple(found.unknowns) == tuple(expected.unknowns)
        assert tuple(found.depends) == tuple(expected.depends)
        assert found.lines == expected.lines


@pytest.mark.parametrize("name", WRONG)
def test_what_is_wrong_is_said_the_same(name: str) -> None:
    written, arrays = solved(WRONG[name], WRITTEN_OUT), solved(WRONG[name], AS_ARRAYS)
    assert written.status in ("invalid", "unsolved"), written.diagnostics
    assert arrays.status == written.status
    assert [(d.code, d.message, d.span) for d in arrays.diagnostics] == [
        (d.code, d.message, d.span) for d in written.diagnostics
    ]
    assert list(arrays) == list(written)


def test_a_name_of_a_member_is_found_as_it_is_written_only() -> None:
    arrays = solved(TWO_DIMENSIONAL, AS_ARRAYS)
    assert arrays["u[3, 4]"].name == "u[3, 4]"
    for name in ("u[3,4]", "u[03, 4]", "u[3]", "u[99, 1]", "u", "w[1]"):
        with pytest.raises(KeyError):
            arrays[name]


@pytest.mark.parametrize("name", sorted(set(RESULTS) - {"conditions"}))
def test_members_of_a_sound_worksheet_are_not_written_out(name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    written: list[int] = []
    item = EquationGroup.item

    def noted(group: EquationGroup, entry: int) -> EquationItem:
        written.append(entry)
        return item(group, entry)

    monkeypatch.setattr(EquationGroup, "item", noted)
    sheet = eqsheet.parse(RESULTS[name])
    prepared = prepare(sheet.document.statements, sheet.diagnostics, large_family=AS_ARRAYS)
    assemble("<text>", prepared, run_blocks(prepared, DEFAULT_BUDGET), {})
    assert prepared.system.groups
    # One for the account of a block is nothing; one a member would be.
    assert len(written) < 10
