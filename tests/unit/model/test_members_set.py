"""Members that a change for one run sets must be there."""

from __future__ import annotations

import pytest

import eqsheet
from eqsheet.diagnostics.diagnostic import Diagnostic, Severity

TEXT = """\
N = {n}
for i in 1..N:
    x[i] = 2*i
rows pipe: L in m
    a 3
    b 4
total = sum(x[i] for i in 1..N)
V = L[a]*2
"""


def errors(change: str, n: int) -> list[Diagnostic]:
    solution = eqsheet.parse(TEXT.format(n=n)).solve([change])
    return [d for d in solution.diagnostics if d.severity is Severity.ERROR]


@pytest.mark.parametrize("n", [5, 2000])
@pytest.mark.parametrize("member", ["x[0]", "x[{}]", "x[-7]"])
def test_a_member_that_no_line_mentions_is_refused(member: str, n: int) -> None:
    name = member.format(n + 1)
    (found,) = errors(f"{name} = 3", n)
    assert found.code == "no-such-member"
    assert f"`{name}`" in found.message
    assert found.notes == (f"the members run from `x[1]` to `x[{n}]`",)
    assert found.span is not None and found.span.source.name == "--with"


@pytest.mark.parametrize("n", [5, 2000])
@pytest.mark.parametrize("change", ["x[3] = 3", "L[b] = 3 m", "z[1] = 3", "c = 5 m"])
def test_members_that_are_there_and_new_quantities_are_set(change: str, n: int) -> None:
    assert errors(change, n) == []


def test_a_cell_left_unknown_may_be_set() -> None:
    text = "rows pipe: L in m, D in mm\n    a 3 20\n    b 4 -\n"
    assert eqsheet.parse(text).solve(["D[b] = 30 mm"]).status == "solved"


def test_a_member_that_another_line_needs_may_be_added() -> None:
    solution = eqsheet.parse("for i in 1..5:\n    T[i] = T[i-1] + 1 K\n").solve(["T[0] = 20 degC"])
    assert solution.status == "solved"
    assert solution["T[5]"].to("degC") == pytest.approx(25.0)
