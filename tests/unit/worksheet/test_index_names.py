"""An index has one meaning where it is used, and a shared name one for all instances."""

from __future__ import annotations

import pytest
from solving import errors, lines, only, solve, values

SPECIES = """
    rows species: K
        n 2
        s 3
"""


@pytest.mark.parametrize(
    ("head", "why"),
    [
        ("for n in species", "a member of `species`"),
        ("for species in species", "an index set"),
        ("for species in 1..2", "an index set"),
        ("for pi in 1..2", "`pi` is the number"),
        ("for const in 1..2", "the physical constants"),
    ],
)
def test_an_index_bears_no_name_that_means_something_else(head: str, why: str) -> None:
    index = head.split()[1]
    solution = solve(SPECIES + f"    {head}:\n        y[{index}] = 2\n    z = y[s]\n")
    assert errors(solution) == ["index-name-taken"]
    found = only(solution, "index-name-taken")
    assert lines(found) == [4]
    assert why in found.message


def test_an_index_of_a_sum_bears_none_either() -> None:
    assert errors(solve(SPECIES + "    y = sum(K[n] for n in species)\n")) == ["index-name-taken"]


def test_a_member_of_another_set_is_no_hindrance() -> None:
    found = values(
        solve(SPECIES + "    rows node: z\n        A 1\n    for n in node:\n        y[n] = z[n]*2\n")
    )
    assert found["y[A]"] == 2


@pytest.mark.parametrize("body", ["sum(x[i] for i in 1..3)", "sum(x[i]*k for k in 1..2, i in 1..3)"])
def test_a_sum_takes_no_index_of_its_family(body: str) -> None:
    solution = solve(f"for i in 1..3:\n    x[i] = i\n    y[i] = {body}\n")
    assert errors(solution) == ["index-twice"]
    assert lines(only(solution, "index-twice")) == [3]


def test_sums_inside_sums_take_no_index_twice() -> None:
    assert errors(solve("y = sum(sum(i for i in 1..3) for i in 1..2)")) == ["index-twice"]


@pytest.mark.parametrize(
    "use", ["for i in 1..2:\n    y[i] = 2*total(1)\n", "y[2] = sum(total(1) for i in 1..2)\n"]
)
def test_the_index_of_a_definition_is_its_own(use: str) -> None:
    text = "define total(q) = q*sum(x[i] for i in 1..3)\nfor j in 1..3:\n    x[j] = j\n"
    assert values(solve(text + use))["y[2]"] == 12


PIPE = """
    template pipe:
        shared rho
        m = rho*v
    use pipe as s:
        v = 2 m/s
"""


@pytest.mark.parametrize("line", ["rho = 800 kg/m^3", "rho near 800 kg/m^3"])
def test_a_line_of_an_instance_sets_nothing_that_is_shared(line: str) -> None:
    solution = solve(PIPE + f"        {line}\n    use pipe as t:\n        v = 2 m/s\n")
    found = only(solution, "shared-in-instance")
    assert lines(found) == [6]
    assert "`rho`" in found.message


def test_a_shared_name_on_the_right_is_no_slip() -> None:
    assert values(solve(PIPE.replace("2 m/s", "rho*1 m^4/(kg*s)") + "    rho = 3 kg/m^3\n"))["s.m"] == 9
