"""A template that nothing uses is checked all the same, as far as that does not depend on its use."""

from __future__ import annotations

import pytest
from solving import errors, lines, solve


@pytest.mark.parametrize(
    ("body", "code"),
    [
        ("x = 2*y + 3 m + 2 kg", "dimension-clash"),
        ("x = sin(3 m)", "dimension-of-argument"),
        ("x = 3 furlongs", "unknown-unit"),
        ("x = sinus(2)", "unknown-function"),
        ("define f(a) = a", "misplaced-statement"),
        ("use t as u", "template-uses-itself"),
    ],
)
def test_slips_in_it_are_told(body: str, code: str) -> None:
    solution = solve(f"z = 3\ntemplate t:\n    k = 1\n    {body}\n")
    assert errors(solution) == [code]
    assert lines(solution.diagnostics[0])[0] == 4


@pytest.mark.parametrize(
    "body",
    [
        "x = y",
        "for i in 1..N:\n        x[i] = i",
        "shared N\n    for i in 1..N:\n        x[i] = i",
        "for i in 1..2:\n        x[i] = T[i-1]",
        "shared pump\n    x = pump.P",
        "shared rho\n    require rho <= 3 kg/m^3",
        "x = head(y) + width(3 m) + K[A]\n    B = 3 crate",
    ],
)
def test_what_its_use_decides_is_none(body: str) -> None:
    around = "curve head(Q in L/s) in m:\n    0 3\n    4 1\ndefine width(a) = 2*a\nnew unit crate\nrows s: K in m\n    A 1\n"
    assert errors(solve(f"{around}template t:\n    {body}\n")) == []


def test_a_template_used_in_an_unused_one_is_looked_at_once() -> None:
    text = "z = 1\ntemplate outer:\n    use inner as i\ntemplate inner:\n    x = 1 m + 1 s\n"
    assert errors(solve(text)) == ["dimension-clash"]


def test_a_template_in_use_is_looked_at_where_it_is_used() -> None:
    text = "template outer:\n    use inner as i\ntemplate inner:\n    x = 1 m + 1 s\nuse outer as o\n"
    assert errors(solve(text)) == ["dimension-clash"]


def test_one_switched_off_is_not_looked_at() -> None:
    assert errors(solve("z = 1\noff template t:\n    x = 1 m + 1 s\n")) == []
