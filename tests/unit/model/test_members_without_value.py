"""A known member without a finite value is an error, as a known without one is."""

from __future__ import annotations

import pytest
from both_ways import codes, only, said

import eqsheet


@pytest.mark.parametrize("members", [3, 2000])
def test_member_is_named_with_the_reason(members: int) -> None:
    found = only(f"for i in 1..{members}:\n    z[i] = 1 m/(2 - i)", "value-not-finite")
    assert found.message == "`z[2]` has no value: `1 m/(2 - i)` divides by zero"
    assert "`(2 - i)` is 0" in found.notes
    assert found.span is not None
    assert found.span.text == "1 m/(2 - i)"


def test_many_members_are_counted() -> None:
    found = only("for i in 1..40:\n    w[i] = 10^(i*200)", "value-not-finite")
    assert found.message.startswith("`w[2]` has no value")
    assert "39 of the 40 members have no value" in found.notes


def test_lines_that_use_the_member_are_not_blamed() -> None:
    text = "for i in 1..3:\n    z[i] = sqrt(i - 2)*1 m\n    y[i] = z[i]*2"
    assert only(text, "value-not-finite").message.startswith("`z[1]` has no value: `sqrt(i - 2)` takes")


def test_member_of_an_instance_is_named() -> None:
    text = "template t:\n    y = 2*z\nfor i in 1..3:\n    use t as p[i]:\n        z = 1 m/(2 - i)"
    assert only(text, "value-not-finite").message.startswith("`p[2].z` has no value")


def test_set_and_index_together() -> None:
    text = "rows node: h\n    A 1\n    B 2\nfor n in node, i in 0..1:\n    z[n, i] = ln(i)"
    found = only(text, "value-not-finite")
    assert found.message == "`z[A, 0]` has no value: `ln(i)` takes the logarithm of zero"
    assert "this is at n = A, i = 0" in found.notes
    assert "2 of the 4 members have no value" in found.notes


def test_finite_members_are_silent() -> None:
    text = "for i in 1..3:\n    z[i] = 1 m/(4 - i)"
    assert codes(text) == []
    assert said(text) == []
    assert eqsheet.parse(text).solve()["z[3]"].si == 1.0
