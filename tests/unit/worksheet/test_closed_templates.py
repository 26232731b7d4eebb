"""A template means the same wherever it is used: no index around its `use` reaches into it."""

from __future__ import annotations

from solving import errors, lines, only, solve, values

COIL = """
    template coil:
        B = c*n
        c = 2
"""


def test_an_index_around_a_use_is_no_value_of_a_local_name() -> None:
    solution = solve(COIL + "    for n in 1..3:\n        use coil as s[n]\n")
    assert errors(solution) == ["under-determined"]
    assert "`s[1].n`" in only(solution, "under-determined").message


def test_a_template_sets_a_name_that_is_an_index_around_it() -> None:
    solution = solve(COIL + "        n = 10\n    for n in 1..3:\n        use coil as s[n]\n")
    assert values(solution) == {f"s[{i}].{name}": v for i in (1, 2, 3) for name, v in zip("Bcn", (20, 2, 10))}


def test_the_left_name_of_an_instances_line_is_the_instances() -> None:
    text = (
        COIL + "    for n in 1..2:\n        use coil as s[n]:\n            n = 10*n\n            n near 5\n"
    )
    found = values(solve(text))
    assert (found["s[1].n"], found["s[2].n"], found["s[2].B"]) == (10, 20, 40)


def test_an_index_over_a_set_is_no_member_inside_a_template() -> None:
    text = """
        rows branch: L in m
            A 10
            B 20
        template pipe:
            r = k/D
            k = 0.05 mm
            D = 50 mm
        for k in branch:
            use pipe as p[k]
    """
    found = values(solve(text))
    assert found["p[A].r"] == found["p[B].r"] == 0.05 / 50


def test_a_template_may_use_the_letter_of_an_index_around_it() -> None:
    text = """
        template stages:
            for i in 1..2:
                T[i] = T[i-1] + d*i
            T[0] = 100 K
            total = sum(T[i] for i in 1..2)
        for i in 1..3:
            use stages as c[i]:
                d = i*1 K
    """
    found = values(solve(text))
    assert [found[f"c[{i}].T[2]"] for i in (1, 2, 3)] == [103, 106, 109]
    assert [found[f"c[{i}].total"] for i in (1, 2, 3)] == [204, 208, 212]


def test_templates_inside_templates_keep_their_indices_apart() -> None:
    text = """
        template inner:
            w = sum(D*j for j in 1..2)
        template outer:
            for j in 1..2:
                use inner as q[j]:
                    D = j*E
        for j in 1..2:
            use outer as o[j]:
                E = 10*j
    """
    found = values(solve(text))
    assert {(i, j): found[f"o[{i}].q[{j}].w"] for i in (1, 2) for j in (1, 2)} == {
        (i, j): 3 * j * 10 * i for i in (1, 2) for j in (1, 2)
    }


def test_a_sum_in_a_template_that_needs_its_members_counts_for_each_instance() -> None:
    text = """
        template chain:
            for k in 1..3:
                S[k] = sum(x[i] for i in 1..k)
            for i in 1..3:
                x[i] = d*i
        for i in 1..2:
            use chain as c[i]:
                d = i
    """
    found = values(solve(text))
    assert [found[f"c[2].S[{k}]"] for k in (1, 2, 3)] == [2, 6, 12]


def test_an_index_around_a_use_may_not_bear_the_name_of_a_quantity_there() -> None:
    text = COIL + "    m = 4\n    for m in 1..3:\n        use coil as s[m]:\n            n = 1\n"
    assert lines(only(solve(text), "index-is-quantity")) == [5]


def test_a_faulty_range_in_a_template_is_told_once() -> None:
    text = """
        template t:
            for i in 1..M:
                x[i] = 1
        for i in 1..3:
            use t as u[i]
        use t as v
    """
    assert errors(solve(text)) == ["range-not-whole"]
