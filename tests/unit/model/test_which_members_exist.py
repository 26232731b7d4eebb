"""Which members a worksheet makes, and what is said of one that is wanted and not there."""

from __future__ import annotations

import pytest
from both_ways import codes, only, said

import eqsheet
from eqsheet.diagnostics.diagnostic import Diagnostic

FOUR = "for i in 1..4:\n    x[i] = i*1 m\n"
SPECIES = "rows sp: K\n    H2O 0.5\n    CO2 2\n"


def place(found: Diagnostic) -> tuple[int, int]:
    assert found.span is not None
    return found.span.line, found.span.column


@pytest.mark.parametrize(
    ("line", "member"),
    [
        ("total = sum(x[j] for j in 1..5)\ntotal = 30 m", "x[5]"),
        ("low = min(x[j] for j in 0..4)", "x[0]"),
        ("big = sum(sum(x[j] for j in 1..k) for k in 4..6)", "x[5]"),
        ("for k in 1..2:\n    y[k] = sum(x[j] for j in k..5)", "x[5]"),
        ("total = sum(x[j] for j in 1..100)", "x[5]"),
        ("define f(n) = sum(x[j] for j in 1..5) + n\ny = f(2 m)", "x[5]"),
    ],
)
def test_a_sum_over_a_range_makes_no_members(line: str, member: str) -> None:
    assert only(FOUR + line, "no-such-member").message.startswith(f"there is no `{member}`")


@pytest.mark.parametrize("body", ["x[j]", "x[j]^2"])
def test_nor_does_one_over_many(body: str) -> None:
    text = f"for i in 1..1999:\n    x[i] = i*1 m\ntotal = sum({body} for j in 1..2000)"
    assert only(text, "no-such-member").message.startswith("there is no `x[2000]`")


def test_a_limit_and_an_equation_take_the_same_members() -> None:
    in_limit = said(FOUR + "require sum(x[j] for j in 1..5) <= 3 m")
    in_equation = said(FOUR + "y = sum(x[j] for j in 1..5)")
    assert [one.message for one in in_limit] == [one.message for one in in_equation]


def test_members_named_beside_the_sum_exist() -> None:
    text = "for k in 1..3:\n    x[k] + sum(x[j] for j in 1..3) = k*1 m"
    assert codes(text) == []
    # The sum s has s + 3 s = 6 m, so x[3] = 3 m - 1.5 m.
    assert eqsheet.parse(text).solve()["x[3]"].si == pytest.approx(1.5)


def test_a_sum_over_a_set_closes_the_balance() -> None:
    text = SPECIES + "x[H2O] = 0.2\nsum(x[s] for s in sp) = 1"
    assert codes(text) == []
    assert eqsheet.parse(text).solve()["x[CO2]"].si == pytest.approx(0.8)


def test_family_of_named_members_only() -> None:
    text = SPECIES + (
        "for i in 1..3:\n"
        "    y[i, H2O] = 0.5*x[i, H2O]\n"
        "    y[i, CO2] = 2*x[i, CO2]\n"
        "    x[i, H2O] + x[i, CO2] = 1\n"
        "    y[i, H2O] + y[i, CO2] = 1\n"
    )
    assert codes(text) == []
    # 0.5 a + 2 (1 - a) = 1 gives a = 2/3.
    assert eqsheet.parse(text).solve()["x[3, H2O]"].si == pytest.approx(2 / 3)


def test_two_slots_are_decided_each_by_itself() -> None:
    text = SPECIES + "for i in sp:\n    x[i, H2O] = K[i]\n    x[i, CO2] = 2*K[i]\ny = x[H2O, CO2]"
    assert eqsheet.parse(text).solve()["y"].si == 1.0


def test_the_set_with_most_of_the_names_is_taken() -> None:
    text = "rows a: p\n    H2O 1\nrows b: q\n    H2O 1\n    CO2 2\nx[H2O] = 1\nx[CO2] = 2\nx[COO] = 3"
    found = only(text, "no-such-member")
    assert found.message == "`COO` is not a member of `b`"
    assert "CO2" in found.help
    assert place(found) == (8, 3)


def test_a_name_of_no_set() -> None:
    found = said("x[A] = 2\ny = 3 + x[A]")
    assert [one.message for one in found] == [
        "`A` is no index, no whole-number known and no member of a set"
    ] * 2
    assert [place(one) for one in found] == [(1, 3), (2, 11)]


def test_subscripts_that_make_nothing() -> None:
    found = only("for i in 1..6:\n    x[2*i] = i", "no-such-member")
    assert found.message == "there is no `x[2]` (at i = 1)"
    assert found.notes == ("`x` has no members",)


def test_every_line_is_marked_at_its_own_subscript() -> None:
    text = "rows s: x\n    A 1\n    B 2\ny = 2 + x[C]\nz = 5*x[C]\nshow x[C]\nx[C] near 2\nrequire 3 <= x[C]"
    assert [place(one) for one in said(text)] == [(4, 11), (5, 9), (6, 8), (7, 3), (8, 16)]


def test_subscript_of_an_instance_is_marked_with_the_quantity() -> None:
    text = (
        "rows s: z\n    A 1\n    B 2\ntemplate t:\n    dP = 2*v\nfor l in s:\n    use t as p[l]:\n        v = z[l]\n"
        "y = p[C].dP"
    )
    found = only(text, "no-such-member")
    assert found.message == "`C` is not a member of `s`"
    assert place(found) == (9, 7)


def test_an_argument_named_before_is_marked_at_the_call() -> None:
    text = (
        "curve head(Q in m^3/h) in m:\n    0 32\n    30 18\nQ = 35 m^3/h\n"
        "G = if Q <= 30 m^3/h then 0 m else head(Q)"
    )
    (found,) = eqsheet.parse(text).solve().diagnostics
    assert found.code == "outside-curve"
    assert place(found) == (5, 36)


def test_one_name_has_one_number_of_subscripts() -> None:
    found = only(
        "for i in 1..3:\n    x[i] = 2*i\nfor i in 1..3, j in 1..3:\n    x[i, j] = 2*i",
        "family-without-subscript",
    )
    assert found.message == "`x` is a family with 1 subscript"
    assert place(found) == (4, 5)


def test_a_member_of_two_sets_beside_a_table() -> None:
    assert place(only(SPECIES + "y = 2*K[H2O, CO2]", "family-without-subscript")) == (4, 7)


def test_a_local_name_is_a_family_or_is_not() -> None:
    text = "template t:\n    x = 2\n    y = 3*x\n    z = x[1]\nuse t as u"
    found = only(text, "not-a-family")
    assert found.message == "`u.x` is not a family, so it takes no subscript"
    assert place(found) == (4, 9)


@pytest.mark.parametrize(
    ("text", "note"),
    [
        (
            "for i in 1..5:\n    T[i+1] - T[i] = 2 K\nT[1] = 300 K\ny = T[7]",
            "the members are `T[1]` to `T[5]` and `T[7]`",
        ),
        ("x[1] = 3\nfor i in 1..2:\n    y[i] = x[i-1]*2", "the only member is `x[1]`"),
        (
            "for i in 1..3 if i != 2:\n    x[i] = 2\nfor i in 1..3:\n    y[i] = 2*x[i+0]",
            "the members are `x[1]` and `x[3]`",
        ),
        (
            SPECIES + "for i in 1..2, s in sp:\n    T[i, s] = T[i-1, s] + K[s]\nT[0, H2O] = 1",
            "there are 5 members, from `T[0, H2O]` to `T[2, CO2]`",
        ),
        (
            SPECIES + "for s in sp if s = CO2:\n    w[s] = K[s]\nrequire w[H2O] >= 0",
            "the only member is `w[CO2]`",
        ),
    ],
)
def test_the_members_that_are_there(text: str, note: str) -> None:
    notes = [one.notes for one in said(text) if one.code == "no-such-member"]
    assert notes[0] == (note,)


@pytest.mark.parametrize(
    ("line", "cure"),
    [
        ("w = x[2]", 'a member named by a number stands in quotes: `"2"`'),
        ("w = sum(x[k] for k in s if k = 3)", 'a member named by a number stands in quotes: `"3"`'),
        (
            "for i in 1..3:\n    w[i] = x[i]",
            'write a member ("1", "2", "3"), an index `in s`, or a column `of s`',
        ),
        (
            "for k in s, i in 1..2:\n    w[i] = x[k]\n    v[k] = w[k]",
            "write a whole number, or an index over a range: `for i in 1..N`",
        ),
    ],
)
def test_cure_for_members_mixed_with_numbers(line: str, cure: str) -> None:
    (found,) = [
        one for one in said("rows s: x\n    1 10\n    2 20\n    3 30\n" + line) if one.code == "index-mixed"
    ]
    assert found.help == cure


@pytest.mark.parametrize("line", ["show a", "y = a", "z = 2*a[A]", "require a >= 3", "a[A] = 3"])
def test_a_column_of_members_is_no_quantity(line: str) -> None:
    found = only("rows s: a of s, v\n    A B 2\n    B A 3\n" + line, "member-as-number")
    assert found.message == "`a` names members of `s`, so it is no quantity"
