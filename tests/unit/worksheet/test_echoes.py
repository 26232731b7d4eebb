"""A broken line is told once: what misses its names elsewhere is not told again."""

from __future__ import annotations

import pytest
from solving import errors, solve


@pytest.mark.parametrize(
    ("broken", "use"),
    [
        ("x = (3 m", "x near 2 m"),
        ("x = (3 m", "require x <= 4 m"),
        ("x = (3 m", "show x in mm"),
        ("define f(a) = (a", "y = f(2)"),
        ("define f(a) = a > 1", "y = 1 + f(2)"),
    ],
)
def test_names_of_a_broken_line_are_not_missed(broken: str, use: str) -> None:
    assert len(errors(solve(f"{broken}\nz = 1\n{use}"))) == 1


def test_other_names_are() -> None:
    assert sorted(errors(solve("x = (3 m\nz = 1\nw near 2 m"))) == ["bracket-not-closed", "unknown-name"]
