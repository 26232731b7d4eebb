"""Which words count as close."""

from __future__ import annotations

import pytest

from eqsheet.units.suggest import closest, is_one_slip_away


@pytest.mark.parametrize(
    ("written", "known", "close"),
    [
        ("gpn", "gpm", True),
        ("gp", "gpm", True),
        ("gppm", "gpm", True),
        ("pgm", "gpm", True),
        ("gmp", "gpm", True),
        ("xpm", "gpm", True),
        ("gpmx", "gpm", True),
        ("gpm", "gpm", False),
        ("gxy", "gpm", False),
        ("mpg", "gpm", False),
        ("g", "gpm", False),
        ("", "g", True),
        ("ab", "cd", False),
        ("ab", "ba", True),
        ("abxy", "bay", False),
    ],
)
def test_one_slip(written: str, known: str, close: bool) -> None:
    assert is_one_slip_away(written, known) is close
    assert is_one_slip_away(known, written) is close


def test_same_length_comes_first_then_the_name() -> None:
    assert closest("bat", ["bart", "bar", "at", "cat", "dog"]) == ("bar", "cat", "at")


def test_one_letter_is_close_to_nothing() -> None:
    assert closest("x", ["y", "xy"]) == ()
