"""Sums, products and extremes over many members, made of parts, give what written out they give."""

from __future__ import annotations

import math

import pytest

import eqsheet
from eqsheet.diagnostics.diagnostic import Severity
from eqsheet.model import lower
from eqsheet.model.aggregate_parts import FAN, MANY, is_part
from eqsheet.review.table import solution_lines

# Sums of so many members and more are made of parts in these tests; none is.
IN_PARTS, WRITTEN_OUT = 3, 10**9


def solved(text: str, many: int, monkeypatch: pytest.MonkeyPatch) -> eqsheet.Solution:
    with monkeypatch.context() as patched:
        patched.setattr(lower, "MANY", many)
        return eqsheet.parse(text).solve()


MEMBERS = """
N = {n}
for i in 1..N:
    x[i] = 20 degC + i*0.5 K
    a[i] = 1 + i/100
x[0] = 300 K
"""
AGGREGATES = {
    "sum": "S = sum(a[i] for i in 1..N)\n",
    "mean of readings": "T = sum(x[i] for i in 1..{n})/{n}\nrequire T <= 90 degC\n",
    "difference of sums": "D = sum(x[i] for i in 1..N) - sum(x[i-1] for i in 1..N)\n",
    "expression": "S = sum(a[i]*a[i-1] + i for i in 2..N)\n",
    "product": "P = prod(a[i] for i in 1..N)\n",
    "largest": "T = max(x[i] for i in 1..N)\nT_low = min(x[i] for i in 1..N if i > 3)\n",
    "two indices": "S = sum(a[i]/a[j] for i in 1..N, j in 1..4 if i != j)\n",
    "nested": "S = sum(a[i]*sum(a[j] for j in 1..N) for i in 1..N)\n",
    "in a family": "for k in 1..3:\n    y[k] = k*sum(a[i] for i in 1..N) + sum(k*a[i] for i in 1..N)\n",
    "the same twice": "S = sum(a[i] for i in 1..N)\nM = sum(a[i] for i in 1..N)/N\n",
    "limit": "require sum(a[i] for i in 1..N) <= 1000\n",
    "of a plain quantity": "b = 3 m\nL = sum(b for i in 1..N)\n",
    "definition": "define f(u) = u^2 valid u < 1.05\nS = sum(f(a[i]) for i in 1..N)\n",
    "branch": "S = if a[1] > 0 then sum(a[i] for i in 1..N) else sum(sqrt(-a[i]) for i in 1..N)\n",
    "backwards": "300 = sum(a[i] for i in 1..N) + c\n",
    "unknown inside": "500 = sum(a[i]*c for i in 1..N)\n",
}


@pytest.mark.parametrize("count", [FAN - 1, FAN, FAN + 1, FAN**2, FAN**2 + FAN + 1])
@pytest.mark.parametrize("name", AGGREGATES)
def test_parts_give_what_one_formula_gives(name: str, count: int, monkeypatch: pytest.MonkeyPatch) -> None:
    text = MEMBERS.format(n=count) + AGGREGATES[name].format(n=count)
    parts, whole = solved(text, IN_PARTS, monkeypatch), solved(text, WRITTEN_OUT, monkeypatch)
    assert whole.solved
    assert parts.status == whole.status, parts.diagnostics
    assert list(parts) == list(whole)
    for quantity, expected in whole.items():
        found = parts[quantity]
        assert math.isclose(found.si, expected.si, rel_tol=1e-12), quantity
        assert (found.unit, found.kind, found.line) == (expected.unit, expected.kind, expected.line)
    assert [(limit.text, limit.holds) for limit in parts.limits] == [
        (limit.text, limit.holds) for limit in whole.limits
    ]
    assert solution_lines(parts) == solution_lines(whole)
    assert [d.code for d in parts.diagnostics] == [d.code for d in whole.diagnostics]


INSTANCES = """
rows pipe: L in m
    a 20
    b 30
template line:
    for i in 1..40:
        dp[i] = 2 Pa/m * L * i
    total = sum(dp[i] for i in 1..40)
for p in pipe:
    use line as run[p]:
        L = L[p]
use line as apart:
    L = 12 m
"""


def test_instances_have_parts_of_their_own(monkeypatch: pytest.MonkeyPatch) -> None:
    text = INSTANCES
    parts, whole = solved(text, IN_PARTS, monkeypatch), solved(text, WRITTEN_OUT, monkeypatch)
    assert whole.solved
    for name in ("run[a].total", "run[b].total", "apart.total"):
        assert math.isclose(parts[name].si, whole[name].si, rel_tol=1e-13)
    assert list(parts) == list(whole)


COUPLED = """
N = 80
T_0 = 300 K
for i in 1..N:
    T[i+1] - 2*T[i] + T[i-1] = 0.01*(T[i] - T_m) + 1e-5 1/K*(T[i] - T_0)^2
    T[i] near 330 K within 200 K .. 900 K
T[0] = 300 K
T[N+1] = 350 K
T_m = sum(T[i] for i in 1..N)/N
T_m near 330 K
"""


@pytest.mark.parametrize("guess", ["T_m near 330 K\n", ""])
def test_a_mean_that_acts_back_on_its_members(guess: str, monkeypatch: pytest.MonkeyPatch) -> None:
    text = COUPLED.replace("T_m near 330 K\n", guess)
    parts, whole = solved(text, IN_PARTS, monkeypatch), solved(text, WRITTEN_OUT, monkeypatch)
    assert whole.status == parts.status == "solved"
    for quantity, expected in whole.items():
        assert math.isclose(parts[quantity].si, expected.si, rel_tol=1e-12), quantity
    assert [d.code for d in parts.diagnostics] == [d.code for d in whole.diagnostics]


def test_a_sum_over_a_hundred_thousand_members() -> None:
    text = "N = 100000\nfor i in 1..N:\n    q[i] = 0.001 L/s * i\nQ = sum(q[i] for i in 1..N)\n"
    solution = eqsheet.parse(text).solve()
    assert solution.status == "solved"
    # The sum of the first N whole numbers.
    assert math.isclose(solution["Q"].to("L/s"), 0.001 * 100_000 * 100_001 / 2, rel_tol=1e-13)
    assert solution["Q"].digits >= 13
    assert solution["Q"].line == 4
    assert not any(map(is_part, solution))


def test_a_sum_of_unlike_quantities_names_the_line(monkeypatch: pytest.MonkeyPatch) -> None:
    text = MEMBERS.format(n=40) + "S = 3 m + sum(a[i] for i in 1..N)\n"
    (found,) = [d for d in solved(text, IN_PARTS, monkeypatch).diagnostics if d.severity is Severity.ERROR]
    (expected,) = [
        d for d in solved(text, WRITTEN_OUT, monkeypatch).diagnostics if d.severity is Severity.ERROR
    ]
    assert found.code == "dimension-clash"
    assert (found.message, found.labels) == (expected.message, expected.labels)


@pytest.mark.parametrize("function", ["sum", "prod", "max"])
def test_too_many_members_are_refused_at_once(function: str) -> None:
    solution = eqsheet.parse(f"x = {function}(i^2 for i in 1..1000000000)\n").solve()
    (found,) = [d for d in solution.diagnostics if d.severity is Severity.ERROR]
    assert found.code == "family-too-large"
    assert "1,000,000,000" in found.message


def test_a_pattern_does_not_match_parts() -> None:
    text = f"for i in 1..{MANY}:\n    q[i] = i\ns = sum(q[i] for i in 1..{MANY})\ns* within 1 .. 1e9\n"
    assert eqsheet.parse(text).solve().status == "solved"


@pytest.mark.parametrize(
    "line",
    ["a[i] = 2 + w", "a[i] = 2*b"],
    ids=["one equation missing", "one equation too many"],
)
def test_verdicts_speak_of_quantities_of_the_worksheet(line: str, monkeypatch: pytest.MonkeyPatch) -> None:
    text = f"for i in 1..40:\n    {line}\nQ = sum(a[i] for i in 1..40)\n"
    if "w" not in line:
        text += "b = 1\nQ = 90\n"
    said = [
        [(d.code, d.message, d.help) for d in solved(text, many, monkeypatch).diagnostics]
        for many in (IN_PARTS, WRITTEN_OUT)
    ]
    assert said[0] == said[1] != []
