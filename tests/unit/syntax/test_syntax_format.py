"""Layout of worksheets."""

from __future__ import annotations

import pytest

from eqsheet.diagnostics.source import Source
from eqsheet.syntax.format import format_document
from eqsheet.syntax.meaning import same_meaning
from eqsheet.syntax.parse import parsed_text
from eqsheet.syntax.write import write_expression

LAYOUT = {
    "blanks round signs": ("x=a+b -c*d", "x = a + b - c*d"),
    "products as the author chose": ("x = a * b/c *d", "x = a * b/c * d"),
    "products after a unit": ("x = 10 bar/ L + 6 kW*(a)", "x = 10 bar / L + 6 kW * (a)"),
    "no blanks round a power": ("x = a ^ 2 ^ -b", "x = a^2^-b"),
    "signs": ("x = - a * - 5 K + + b", "x = -a * -5 K + +b"),
    "a blank before a unit": ("D=52.5mm±0.1mm (k = 2)", "D = 52.5 mm ± 0.1 mm (k=2)"),
    "brackets and commas": ("x = f( a ,b )+( c )", "x = f(a, b) + (c)"),
    "subscripts": ("T[ i - 1 ]=x[i+1,s]", "T[i-1] = x[i+1, s]"),
    "signs in subscripts": ("x = T[i + -1]", "x = T[i + -1]"),
    "ranges": ("for i in 1 .. N - 1 if i!=3 :\n  x[i]=1", "for i in 1..N-1 if i != 3:\n    x[i] = 1"),
    "bounds": ("f near 1 within 0..1", "f near 1 within 0 .. 1"),
    "open bounds": ("f within 0 K..", "f within 0 K .."),
    "range in a bound": ("f within sum(i for i in 1 .. 3)..9", "f within sum(i for i in 1..3) .. 9"),
    "labels": ("energy :Q=1", "energy: Q = 1"),
    "new unit": ("new   unit  EUR", "new unit EUR"),
    "show": ("show V   in L/min,T2 in degC", "show V in L/min, T2 in degC"),
    "members": ("x = supply . dP", "x = supply.dP"),
    "comments": ("x = 1 #bore", "x = 1  # bore"),
    "prose stays": ("#prose   \n## Title", "#prose\n## Title"),
    "blank lines": ("\n\nx = 1\n\n\n\n\ny = 2\n\n", "x = 1\n\n\ny = 2"),
    "line breaks stay": ("x = a+ # one\n        b\n  -c", "x = a +  # one\n    b\n    - c"),
    "four blanks a level": (
        "for i in 1..2:\n  # note\n  for j in 1..2:\n     x[i,j]=1\n\n  y[i]=2\nz=3",
        "for i in 1..2:\n    # note\n    for j in 1..2:\n        x[i, j] = 1\n\n    y[i] = 2\nz = 3",
    ),
    "columns of a table stay": (
        "rows s:  a,b\n  H2O    1  -\n    N2  10  2  # x\nx=1",
        "rows s: a, b\n    H2O    1  -\n      N2  10  2  # x\nx = 1",
    ),
    "broken statements stay": ("x  =  2 3\ny=1", "x  =  2 3\ny = 1"),
    "unsure indentation stays": ("x=1\n  y=2", "x = 1\n  y = 2"),
    "empty": ("\n \n", ""),
}


@pytest.mark.parametrize("name", LAYOUT)
def test_layout(name: str) -> None:
    before, after = LAYOUT[name]
    once = format_document(Source("sheet", before))
    assert once == (after + "\n" if after else "")
    assert format_document(Source("sheet", once)) == once


WRITTEN = {
    "(a + b)*c": "(a + b)*c",
    "a + (b*c)": "a + b*c",
    "a - (b - c)": "a - (b - c)",
    "(a*b)/(c*d)": "a*b/(c*d)",
    "(2^3)^2": "(2^3)^2",
    "(-x)^2": "(-x)^2",
    "-(x^2)": "-x^2",
    "10 bar / L": "10 bar / L",
    "a*5 W/(m^2*K) / L": "a*5 W/(m^2*K) / L",
    "10 bar/(L + 2)": "10 bar / (L + 2)",
    "10 bar * 2": "10 bar*2",
    "-(5 degC)": "-(5 degC)",
    "(5 m)^2": "(5 m)^2",
    "2*(if a < b then 1 else 2)": "2*(if a < b then 1 else 2)",
    "sum(T[i] for i in 1..N-1 if i != 3)": "sum(T[i] for i in 1..N - 1 if not i = 3)",
}


@pytest.mark.parametrize("text", WRITTEN)
def test_expression_is_written_with_no_more_brackets_than_needed(text: str) -> None:
    node = parsed_text(f"y = {text}").node.right  # type: ignore[union-attr]  # an equation
    assert write_expression(node) == WRITTEN[text]
    assert same_meaning(parsed_text(f"y = {WRITTEN[text]}").node.right, node)  # type: ignore[union-attr]  # an equation


def test_meaning_differs_where_anything_but_places_differs() -> None:
    one = parsed_text("x = a + 2 m").node
    for other in ("x = a + 2 mm", "x = a - 2 m", "x = b + 2 m", "x = a + 2.0 m", "x = a + 2 m valid a > 0"):
        assert not same_meaning(one, parsed_text(other).node)
    assert same_meaning(one, parsed_text("x=(a)+2m").node)
