"""Families and limits over them in the table of results."""

from __future__ import annotations

from typing import Any

import pytest

import eqsheet
from eqsheet.review.folding import MOST_MEMBERS, family_name
from eqsheet.review.json_form import solution_data
from eqsheet.review.table import solution_lines
from eqsheet.worksheet import assemble
from eqsheet.worksheet.solution import QuantityValue


def table(text: str) -> list[str]:
    return [" ".join(line.split()) for line in solution_lines(eqsheet.parse(text).solve())]


@pytest.mark.parametrize(
    ("name", "family"),
    [("T", "T"), ("T[3]", "T"), ('x[3, "NH4+"]', "x"), ("p[P12].dP", "p.dP"), ('z["a]b"].v', "z.v")],
)
def test_the_name_of_a_family(name: str, family: str) -> None:
    assert family_name(name) == family


CHAIN = """\
N = {}
for i in 1..N:
    T[i] - T[i-1] = 2 K
T[0] = 300 K
show T in degC
"""


def test_a_small_family_is_shown_member_by_member() -> None:
    lines = table(CHAIN.format(MOST_MEMBERS))
    assert sum(line.startswith("T[") for line in lines) == MOST_MEMBERS + 1


def test_a_large_family_is_one_line_and_its_known_members_stand_apart() -> None:
    lines = table(CHAIN.format(40))
    assert "T 28.85 .. 106.85 degC line 3 40 members, smallest T[1], largest T[40]" in lines
    assert "T[0] 26.85 degC given, line 4" in lines
    assert sum(line.startswith("T") for line in lines) == 2


def test_members_that_are_all_alike_need_no_range() -> None:
    assert "x 3 m given, line 2 20 members" in [
        line.replace("all ", "") for line in table("for i in 1..20:\n    x[i] = 3 m\n")
    ]


def test_members_with_units_of_their_own_stand_by_themselves() -> None:
    text = "for i in 1..20:\n    x[i] = i*1 m\n    y[i] = 2*x[i]\nshow x[1] in cm, x[20] in km\n"
    lines = table(text)
    assert any(line.startswith("x 100 .. 1900 cm") for line in lines)
    assert any(line.startswith("x[20] 0.02 km") for line in lines)


LIMITS = """\
for i in 1..30:
    x[i] = i*1 m
    require x[i] <= {} m  # clearance
"""


def test_a_limit_over_a_large_family_shows_its_worst_member() -> None:
    (line,) = [line for line in table(LIMITS.format(40)) if "<=" in line]
    assert "(i = 30)" in line
    assert "holds" in line
    assert line.endswith("worst of 30, clearance")


def test_the_failing_members_are_counted() -> None:
    (line,) = [line for line in table(LIMITS.format(20)) if "<=" in line]
    assert "FAILS" in line
    assert "worst of 30, of which 10 fail" in line


def test_the_object_for_programs_holds_every_member_and_every_limit() -> None:
    data = solution_data(eqsheet.parse(LIMITS.format(20)).solve())
    assert len(data["quantities"]) == 30
    assert len(data["limits"]) == 30


def test_statements_switched_off_in_groups_are_shown() -> None:
    text = "for i in 1..2:\n    x[i] = 2\n    off x[i] = 3\noff for k in 1..2:\n    y[k] = 2\n"
    lines = table(text)
    assert lines[lines.index("Switched off") + 1 :] == ["x[i] = 3 line 3", "for k in 1..2 line 4"]


def test_a_large_family_is_shown_without_making_its_members(monkeypatch: pytest.MonkeyPatch) -> None:
    made = []
    make = assemble._value

    def counted(prepared: Any, run: Any, own: Any, quantity: int, si: float, error: float) -> QuantityValue:
        made.append(quantity)
        return make(prepared, run, own, quantity, si, error)

    monkeypatch.setattr(assemble, "_value", counted)
    (line,) = [line for line in table(CHAIN.format(5000)) if line.startswith("T 28.85 .. ")]
    assert line.endswith("degC line 3 5,000 members, smallest T[1], largest T[5000]")
    assert 0 < len(made) < 20
