"""Definitions whose parameters stand in brackets, used with indices, members and whole numbers."""

from __future__ import annotations

import pytest
from both_ways import codes, only, prepared, said

import eqsheet

NODES = "rows node: z in m\n    A 10\n    B 20\ndefine f(n) = z[n] + 1 m\n"


def value(text: str, name: str) -> float:
    solution = eqsheet.parse(text).solve()
    assert solution.status == "solved", solution.diagnostics
    return solution[name].si


@pytest.mark.parametrize(
    ("lines", "name", "expected"),
    [
        ("for n in node:\n    T[n] = f(n)", "T[B]", 21.0),
        ("for k in node:\n    T[k] = f(k)", "T[B]", 21.0),
        ("y = f(A) + f(B)", "y", 32.0),
        ("y = sum(f(k) for k in node)", "y", 32.0),
        ("define g(x, m) = x*f(m)\nfor k in node:\n    S[k] = g(2, k)", "S[A]", 22.0),
        ("define h(m) = if m = A then 5 m else f(m)\nfor k in node:\n    S[k] = h(k)", "S[A]", 5.0),
        ("define h(m) = if m = A then 5 m else f(m)\nfor k in node:\n    S[k] = h(k)", "S[B]", 21.0),
    ],
)
def test_members_of_a_set(lines: str, name: str, expected: float) -> None:
    assert codes(NODES + lines) == []
    assert value(NODES + lines, name) == expected


def test_indices_and_numbers_of_a_range() -> None:
    text = (
        "N = 3\ndefine bend(i) = T[i-1] - 2*T[i] + T[i+1]\n"
        "for k in 1..N:\n    bend(k) = 0 K\nT[0] = 300 K\nT[N+1] = 400 K\nd = bend(2) + T[3]"
    )
    assert codes(text) == []
    assert value(text, "T[2]") == pytest.approx(350.0)
    assert value(text, "d") == pytest.approx(375.0)


def test_a_parameter_in_brackets_and_as_a_number() -> None:
    text = "define f(i) = i*x[i]\nfor k in 1..3:\n    x[k] = k\n    y[k] = f(k)\nw = f(2)"
    assert codes(text) == []
    assert [value(text, name) for name in ("y[3]", "w")] == [9.0, 4.0]


def test_large_families_stay_arrays() -> None:
    text = "define f(i) = 2*x[i]\nfor k in 1..3000:\n    x[k] = k\n    y[k] = f(k) + 1"
    assert [len(group) for group in prepared(text, 1000).system.groups] == [3000, 3000]


def test_an_index_of_the_definition_does_not_take_the_argument() -> None:
    text = (
        "define f(n) = sum(x[n, i] for i in 1..2)\nfor i in 1..2, j in 1..2:\n    x[i, j] = i + 10*j\n"
        "for i in 1..2:\n    y[i] = f(i)"
    )
    assert only(text, "index-twice").message == "`f` has an index `i` of its own"


def test_what_is_no_member_is_said_at_the_use() -> None:
    found = said(NODES + "y = 2*f(C)")
    assert [one.code for one in found] == ["no-such-member"]
    assert found[0].span is not None
    assert found[0].span.text == "f(C)"


def test_a_member_is_no_number_in_a_definition_either() -> None:
    text = NODES + "define g(m) = 2*m\nfor k in node:\n    S[k] = g(k)"
    assert only(text, "member-as-number").message == "`k` is a member of `node`, not a number"
