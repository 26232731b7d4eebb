"""Dimensions of whole worksheets."""

from __future__ import annotations

from dataclasses import replace

from written_formulas import formulas

from eqsheet.model.infer_dimensions import DimensionResult, infer_dimensions
from eqsheet.units.dimension import Dimension


def inferred(*texts: str, minor: tuple[int, ...] = ()) -> tuple[DimensionResult, list[str]]:
    found, names = formulas(texts)
    return infer_dimensions(found, len(names), minor=minor), names


def dimensions(*texts: str) -> dict[str, str | None]:
    result, names = inferred(*texts)
    assert result.clashes == ()
    return {n: None if d is None else d.text for n, d in zip(names, result.dimensions)}


def test_an_equation_passes_dimensions_on() -> None:
    assert dimensions("D = 0.05[m]", "A = 3*D**2/4", "Q = 2[m**3/s]", "Q = A*v")["v"] == "m/s"


def test_roots_give_rational_exponents() -> None:
    assert dimensions("x = 2[m]", "y = x**(2/3)", "z = sqrt(y)") == {"x": "m", "y": "m^(2/3)", "z": "m^(1/3)"}


def test_a_power_is_undone() -> None:
    assert dimensions("y = 2[m**2]", "y = x**3")["x"] == "m^(2/3)"


def test_a_product_links_what_it_leaves_free() -> None:
    """x*y = 6 m^2 alone fixes neither; it does say that their product is an area."""
    result, _ = inferred("x*y = 6[m**2]")
    assert result.dimensions == (None, None)
    assert result.unknown == (0, 1)
    (link,) = result.links
    assert link.powers == ((0, 1), (1, 1))
    assert link.dimension.text == "m^2"


def test_one_more_line_fixes_both() -> None:
    assert dimensions("x*y = 6[m**2]", "x = 2[m]") == {"x": "m", "y": "m"}


def test_two_lines_can_fix_two_only_together() -> None:
    assert dimensions("x*y = 6[m**2]", "x/y = 1") == {"x": "m", "y": "m"}
    assert dimensions("x*y = 6[m**2]", "y*z = 1[s]", "x*z = 5[m*s]") == {
        "x": "m^(3/2)",
        "y": "m^(1/2)",
        "z": "s/m^(1/2)",
    }


def test_functions_fix_their_arguments() -> None:
    assert dimensions("y = exp(t/tau)", "t = 3[s]") == {"y": "1", "t": "s", "tau": "s"}


def test_a_general_power_is_plain_throughout() -> None:
    assert dimensions("y = a**n") == {"y": "1", "a": "1", "n": "1"}


def test_zero_says_nothing() -> None:
    assert dimensions("x = 0", "y > 0") == {"x": None, "y": None}


def test_zero_does_not_hinder() -> None:
    assert dimensions("x = 2[m]", "y = max(x, 0)", "z = 0 + y") == {"x": "m", "y": "m", "z": "m"}


def test_conditions_count() -> None:
    assert dimensions("y = 3[m] if x > 2[s] else z") == {"y": "m", "x": "s", "z": "m"}


def test_given_dimensions_are_used() -> None:
    found, names = formulas(["y = 2*x"])
    result = infer_dimensions(found, len(names), {1: Dimension.of({"m": 1})})
    assert [d.text for d in result.dimensions if d is not None] == ["m", "m"]


def test_a_known_is_the_preferred_origin() -> None:
    """p follows from its known and from an equation; the known is named, whichever line is first."""
    lines = ["q = 3[bar]", "p + q = r", "p = 2[bar]"]
    for order in ([0, 1, 2], [1, 2, 0], [2, 1, 0]):
        texts = [lines[i] for i in order]
        result, names = inferred(*texts)
        origin = result.origins[names.index("p")]
        assert origin is not None
        assert texts[origin.formula] == "p = 2[bar]"
        assert texts[origin.formula][slice(*origin.place)] == "2[bar]"


def test_the_origin_of_a_worked_out_dimension_is_its_equation() -> None:
    texts = ["Q = 2[m**3/s]", "A = 1[m**2]", "Q = A*v"]
    result, names = inferred(*texts)
    origin = result.origins[names.index("v")]
    assert origin is not None
    assert texts[origin.formula][slice(*origin.place)] == "Q = A*v"


def test_no_formulas_and_no_quantities() -> None:
    result = infer_dimensions([], 0)
    assert result.dimensions == () and result.clashes == ()


def test_every_dimension_of_a_long_chain_is_found() -> None:
    result = _inferred_together(_chain(2_000))
    assert result.unknown == () and result.clashes == ()


def test_a_clash_in_a_long_chain_is_told_where_it_is() -> None:
    texts = [*_chain(2_000), "x1000 = 3[kg]"]
    result = _inferred_together(texts)
    assert [texts[c.formula] for c in result.clashes] == ["x1000 = 3[kg]"]


def test_hundreds_of_unknowns_that_hang_together() -> None:
    """Products of neighbours round a ring of odd length fix all members only together: each is m^(1/2)."""
    count = 401
    texts = [f"x{i}*x{(i + 1) % count} = 5[m]" for i in range(count)]
    result = _inferred_together(texts)
    assert {d.text for d in result.dimensions if d is not None} == {"m^(1/2)"}
    assert result.unknown == ()


def _chain(count: int) -> list[str]:
    shapes = [
        "x{0} = x{1} + 2*x{2}",
        "x{0} = sqrt(x{1}*x{2})",
        "x{0} = max(x{1}, x{2})*exp(x0/x0)",
        "x{0} = x{1} + 2[m]",
    ]
    return ["x0 = 1[m]", *(shapes[i % 4].format(i, i - 1, max(0, i - 2)) for i in range(1, count))]


def _inferred_together(texts: list[str]) -> DimensionResult:
    """The result, tapes being shared as the model shares them."""
    found, names = formulas(texts)
    shared = {f.tape: f.tape for f in found}
    return infer_dimensions([replace(f, tape=shared[f.tape]) for f in found], len(names))
