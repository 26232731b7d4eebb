"""`pi` and `const` mean one thing everywhere, and an instance has a name without a dot."""

from __future__ import annotations

import pytest
from solving import errors, lines, only, solve

TEMPLATE = "template t:\n    x = 2\n"


@pytest.mark.parametrize(
    ("text", "line", "what"),
    [
        ("const = 3\n", 1, "quantity"),
        ("x = 1\nconst near 3\n", 2, "quantity"),
        ("for i in 1..2:\n    pi[i] = 2\n", 2, "quantity"),
        (TEMPLATE + "use t as pi\n", 3, "instance"),
        (TEMPLATE + "for i in 1..2:\n    use t as const[i]\n", 4, "instance"),
        ("rows s: v, pi\n    A 1 2\n", 1, "column"),
        ("rows s: v, const of s\n    A 1 A\n", 1, "column"),
        ("curve pi(x):\n    1 2\n    2 3\n", 1, "curve"),
        ("curve h(pi):\n    1 2\n    2 3\n", 1, "parameter"),
        ("define const(x) = 2*x\n", 1, "definition"),
        ("define f(pi) = 2*pi\n", 1, "parameter"),
    ],
)
def test_nothing_in_a_worksheet_bears_a_reserved_name(text: str, line: int, what: str) -> None:
    solution = solve(text)
    found = only(solution, "reserved-name")
    assert errors(solution) == ["reserved-name"]
    assert lines(found) == [line]
    assert f"no {what} can" in found.message


def test_the_arguments_of_a_surface_have_different_names() -> None:
    solution = solve("surface h(a in m, a in m):\n      1 2\n    1 1 2\n    2 1 2\n")
    assert errors(solution) == ["parameter-twice"]


def test_an_instance_has_a_name_of_its_own() -> None:
    found = only(solve(TEMPLATE + "use t as a.b\n"), "instance-name")
    assert lines(found) == [3]
    assert "`a_b`" in found.help
