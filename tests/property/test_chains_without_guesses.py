"""Chains of equations started without a guess: whatever is called solved is a solution.

Each equation of a chain can be turned into a closed form for the next unknown, so that one blind start tells all others
and may run away by many powers of ten. Residuals are worked out here, from formulas of their own, at fifty digits.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

import mpmath
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import eqsheet
from eqsheet.solve.trail import Budget

Number = mpmath.mpf
# A residual may be as large as the rounding of its terms and of the unknowns makes it, a few times over.
HOLDS = 1e-13
# Many chains have no solution, and the search for one is not what is tested.
SMALL = Budget(seconds=0.3)


class Link(NamedTuple):
    """An equation between neighbours a, b, c with data k, q: its text, and the terms that must add up to zero.

    ``largest`` is the power of ten up to which k and the ends go.
    """

    text: str
    terms: Callable[[Number, Number, Number, Number, Number], list[Number]]
    largest: int = 2


LINKS = {
    "radiation": Link(
        "{a} - 2*{b} + {c} = {k}*{b}^4 - {q}", lambda a, b, c, k, q: [a, -2 * b, c, -k * b**4, q]
    ),
    "fin": Link("{a} - 2*{b} + {c} = {k}*{b}^3", lambda a, b, c, k, q: [a, -2 * b, c, -k * b**3]),
    "heat of reaction": Link(
        "{a} - 2*{b} + {c} + {k}*exp({b})/64 = 0",
        lambda a, b, c, k, q: [a, -2 * b, c, k * mpmath.exp(b) / 64],
        -1,
    ),
    "weirs": Link(
        "{k}*({a}^1.5 - {b}^1.5) = {q}*({b} - {c}) + 0.01",
        lambda a, b, c, k, q: [
            k * mpmath.power(a, 1.5),
            -k * mpmath.power(b, 1.5),
            -q * b,
            q * c,
            -mpmath.mpf("0.01"),
        ],
    ),
    "stages": Link(
        "{a} - {b} = {k}*{b}^2 + {q}*({b} - {c})", lambda a, b, c, k, q: [a, -b, -k * b**2, -q * b, q * c]
    ),
    "ratios": Link("{a}/{b} - {b}/{c} = {k}*{b}^2", lambda a, b, c, k, q: [a / b, -b / c, -k * b**2]),
    "pipes": Link(
        "({a} - {b})*abs({a} - {b}) = ({b} - {c})*abs({b} - {c}) + {q}",
        lambda a, b, c, k, q: [(a - b) * abs(a - b), -(b - c) * abs(b - c), -q],
    ),
}


class Chain(NamedTuple):
    """A chain: its links, data and ends as written, and whether unknowns are bounded at zero."""

    link: str
    length: int
    k: str
    q: str
    first: str
    last: str
    bounded: bool

    @property
    def text(self) -> str:
        """The worksheet."""
        lines = [f"u0 = {self.first}", f"u{self.length + 1} = {self.last}"]
        lines += [
            LINKS[self.link].text.format(a=f"u{i - 1}", b=f"u{i}", c=f"u{i + 1}", k=self.k, q=self.q)
            for i in range(1, self.length + 1)
        ]
        if self.bounded:
            lines.append("u* within 0 ..")
        return "\n".join(lines) + "\n"

    def worst(self, values: list[float]) -> float:
        """The largest residual relative to the largest of its terms and of what each unknown changes of it."""
        with mpmath.workdps(50):
            u = [mpmath.mpf(v) for v in values]
            u[0], u[-1] = mpmath.mpf(self.first), mpmath.mpf(self.last)
            k, q = mpmath.mpf(self.k), mpmath.mpf(self.q)
            found = []
            for a, b, c in zip(u, u[1:], u[2:]):
                terms = LINKS[self.link].terms(a, b, c, k, q)
                size = max(abs(t) for t in terms)
                found.append(abs(mpmath.fsum(terms)) / max(size, self._change(a, b, c, k, q)))
            return float(max(found))

    def _change(self, a: Number, b: Number, c: Number, k: Number, q: Number) -> Number:
        """How far the residual moves for a relative change of one of the three unknowns, at most."""
        at = mpmath.fsum(LINKS[self.link].terms(a, b, c, k, q))
        part = mpmath.mpf("1e-20")
        moved = [
            LINKS[self.link].terms(
                a * (1 + part * (j == 0)), b * (1 + part * (j == 1)), c * (1 + part * (j == 2)), k, q
            )
            for j in range(3)
        ]
        return max(abs(mpmath.fsum(terms) - at) / part for terms in moved)


def decimals(least: int, most: int) -> st.SearchStrategy[str]:
    """Numbers with three digits, of any size between two powers of ten."""
    return st.builds(lambda m, e: f"{m / 100:.2f}e{e}", st.integers(100, 999), st.integers(least, most))


def chains(link: str) -> st.SearchStrategy[Chain]:
    """Chains of one kind of link."""
    return st.builds(
        Chain,
        st.just(link),
        st.integers(3, 9),
        decimals(-3, LINKS[link].largest),
        decimals(-2, 1),
        decimals(-1, LINKS[link].largest),
        decimals(-1, LINKS[link].largest),
        st.booleans(),
    )


def check(chain: Chain) -> None:
    """What is called solved holds, within the bounds, and every digit given is there."""
    solution = eqsheet.parse(chain.text).solve(budget=SMALL)
    if not solution.solved:
        return
    found = [solution[f"u{i}"].si for i in range(chain.length + 2)]
    assert chain.worst(found) <= HOLDS, chain.text
    assert not chain.bounded or min(found) >= 0.0
    assert all(value != 0.0 for value in found), chain.text


@pytest.mark.parametrize("link", LINKS)
def test_what_is_called_solved_holds(link: str) -> None:
    @settings(max_examples=25, deadline=None, derandomize=True)
    @given(chains(link))
    def holds(chain: Chain) -> None:
        check(chain)

    holds()


def test_a_chain_once_called_solved_at_any_point() -> None:
    """The blind start told sizes up to 1e66, against which every residual was as good as zero."""
    chain = Chain("weirs", 8, "3.0502", "0.027", "0.1", "12.48", True)
    solution = eqsheet.parse(chain.text).solve()
    assert solution.solved
    found = [solution[f"u{i}"] for i in range(10)]
    assert chain.worst([value.si for value in found]) <= HOLDS
    assert min(value.digits for value in found) >= 12


def test_the_check_tells_a_wrong_point() -> None:
    """The point that was called solved, to two digits."""
    chain = Chain("weirs", 8, "3.0502", "0.027", "0.1", "12.48", True)
    assert chain.worst([0.1, 0.09, 0.09, 0.08, 0.07, 0.06, 0.05, 0.05, 0.2, 12.48]) > 1e-3
