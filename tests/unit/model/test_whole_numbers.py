"""Whole numbers of templates, and those worked out from others, as sizes of ranges."""

from __future__ import annotations

import pytest
from both_ways import codes, only

import eqsheet

HEATER = """\
template heater:
    N = 3
    for i in 1..N:
        T[i] - T[i-1] = dT
    T[0] = T_in
    T_out = T[N]
    T_last_but_one = T[N-1]
    rise = sum(dT for i in 1..N)
    for i in 1..N:
        y[i] = if i = N then 1 else 0
"""
USES = """\
use heater as a:
    T_in = 300 K
    dT = 2 K
    N = 5
use heater as b:
    T_in = a.T_out
    dT = 1 K
"""


def value(text: str, name: str, *changes: str) -> float:
    solution = eqsheet.parse(text).solve(changes=changes)
    assert solution.status == "solved", solution.diagnostics
    return solution[name].si


def test_each_instance_has_its_own_range() -> None:
    text = HEATER + USES
    assert codes(text) == []
    names = list(eqsheet.parse(text).solve().quantities)
    assert [sum(name.startswith(f"{one}.T[") for name in names) for one in "ab"] == [6, 4]
    assert value(text, "a.T_out") == pytest.approx(310.0)
    assert value(text, "b.T_out") == pytest.approx(313.0)
    assert value(text, "a.T_last_but_one") == pytest.approx(308.0)
    assert [value(text, f"{one}.rise") for one in "ab"] == [pytest.approx(10.0), pytest.approx(3.0)]
    assert [value(text, f"a.y[{i}]") for i in (4, 5)] == [0.0, 1.0]
    assert [value(text, f"b.y[{i}]") for i in (2, 3)] == [0.0, 1.0]


def test_a_change_for_one_run() -> None:
    assert value(HEATER + USES, "b.T_out", "b.N = 7") == pytest.approx(317.0)


def test_the_worksheets_own_number_of_that_name_is_another() -> None:
    text = "N = 2\nfor i in 1..N:\n    z[i] = i\n" + HEATER + USES
    assert codes(text) == []
    assert value(text, "a.T_out") == pytest.approx(310.0)


def test_a_group_takes_the_number_from_the_worksheet() -> None:
    text = HEATER + "stages = 4\nuse heater as c:\n    T_in = 300 K\n    dT = 2 K\n    N = stages"
    assert value(text, "c.T_out") == pytest.approx(308.0)


def test_a_shared_number() -> None:
    text = "template t:\n    shared N\n    for i in 1..N:\n        x[i] = i\n    y = x[N]\nN = 4\nuse t as u"
    assert value(text, "u.y") == 4.0


def test_instances_of_a_family_with_one_number() -> None:
    text = "template t:\n    N = 3\n    for i in 1..N:\n        x[i] = i\n    y = x[N]\nfor k in 1..2:\n    use t as u[k]"
    assert codes(text) == []
    assert value(text, "u[2].y") == 3.0


def test_a_number_that_differs_from_instance_to_instance_is_none() -> None:
    text = (
        "N = 2\ntemplate t:\n    N = 3\n    for i in 1..N:\n        x[i] = i\n"
        "for k in 1..2:\n    use t as u[k]:\n        N = k\nfor i in 1..N:\n    z[i] = i"
    )
    assert only(text, "range-not-whole").message == "`N` is not a known whole number"


def test_a_number_worked_out_from_others() -> None:
    text = "N = 2\nM = 2*N + 1\nK = M - 1\nfor i in 1..M:\n    x[i] = i\ny = x[K] + x[M]"
    assert codes(text) == []
    assert value(text, "y") == 9.0
    assert value(text, "y", "N = 3") == 13.0


def test_lines_that_go_in_a_circle_are_no_numbers() -> None:
    found = only("M = 2*N\nN = M - 1\nfor i in 1..M:\n    x[i] = i", "range-not-whole")
    assert found.message == "`M` is not a known whole number"
