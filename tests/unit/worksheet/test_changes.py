"""Changes for one run: statements put in, knowns switched off; the worksheet itself stays as it is."""

from __future__ import annotations

import pytest
from solving import errors, only, solve, values

import eqsheet

PIPE = """
## Pipe
Q = 2 L/s      # wanted
D = 50 mm      # bore
off v = 1 m/s
Q = v*pi*D^2/4
"""


def test_a_known_is_replaced_in_its_place() -> None:
    solution = solve(PIPE, changes=("D = 60 mm",))
    assert solution["v"].si == pytest.approx(2e-3 / (3.141592653589793 * 0.06**2 / 4))
    statement = solution["D"].statement
    assert statement is not None
    assert statement.description == "bore"
    assert solution["D"].line is None


def test_a_description_of_its_own_counts() -> None:
    statement = solve(PIPE, changes=("D = 60 mm   # next size",))["D"].statement
    assert statement is not None
    assert statement.description == "next size"


@pytest.mark.parametrize("change", ["60 mm = D", "D = 6 cm ± 1 mm", "bore: D = 60 mm"])
def test_any_form_of_a_known_replaces(change: str) -> None:
    assert solve(PIPE, changes=(change,))["D"].si == pytest.approx(0.06)


def test_the_last_of_two_changes_counts() -> None:
    assert solve(PIPE, changes=("D = 60 mm", "D = 70 mm"))["D"].si == pytest.approx(0.07)


def test_an_equation_with_names_is_added() -> None:
    assert solve(PIPE, changes=("D = 2*r", "show r in mm"))["r"].value == pytest.approx(25.0)


def test_a_known_that_is_off_is_not_replaced_but_joined() -> None:
    solution = solve(PIPE, changes=("v = 1 m/s",))
    assert errors(solution) == ["equation-always-false"]


def test_freeing_and_giving_swaps_the_problem() -> None:
    solution = solve(PIPE, changes=("v = 1 m/s",), free=("Q",))
    assert solution.status == "solved"
    assert solution["Q"].value == pytest.approx(1.9634954084936207)
    assert solution["Q"].unit == "L/s"


def test_freeing_what_is_given_for_this_run() -> None:
    """Free first, then put in: the order of the options does not matter."""
    assert solve(PIPE, changes=("D = 60 mm",), free=("D",))["D"].si == pytest.approx(0.06)


@pytest.mark.parametrize(
    ("name", "help"),
    [("v", "it is already an unknown"), ("d", "did you mean `D`?"), ("nothing", "")],
)
def test_only_knowns_can_be_freed(name: str, help: str) -> None:
    solution = solve(PIPE, free=(name,))
    found = only(solution, "not-a-known")
    assert (found.help, solution.status) == (help, "invalid")


@pytest.mark.parametrize(
    ("change", "code"),
    [("", "no-statement"), ("D = ", "side-missing"), ("a = 1\nb = 2", "one-statement")],
)
def test_a_change_that_is_no_statement(change: str, code: str) -> None:
    assert code in errors(solve(PIPE, changes=(change,)))


def test_the_worksheet_itself_is_unchanged() -> None:
    sheet = eqsheet.parse(PIPE)
    before = values(sheet.solve())
    sheet.solve(changes=["D = 60 mm"], free=["Q"])
    assert values(sheet.solve()) == before
