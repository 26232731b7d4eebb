"""Walking meets every expression once, parents first."""

from __future__ import annotations

from dataclasses import fields, is_dataclass
from typing import Any

import pytest

from eqsheet.syntax.nodes import NamePattern, Number, Range, Reference, Text, UnitText
from eqsheet.syntax.parse import parsed_text
from eqsheet.syntax.walk import children, walk

STATEMENTS = (
    "D = -52.5 mm ± 0.1 mm (k=2)",
    "Nu = 0.023*Re^0.8*Pr^0.4 valid Re > 1e4, 0.7 <= Pr <= 160",
    'f near g(a, b) within x[i, "NH4+"] .. supply.p[l].Q',
    "c_* within 0 mol/L ..",
    "require not a = b and c < d or e >= -f",
    "require a = b within 1 %",
    "show V in L/min, T[2]",
    "define p(T in degC) in mmHg = if T < 3 then 10^T else sum(k for k in 1..N-1, j in s if k != j) valid T > 1 degC",
    "for i in 1..N if i > 3:",
    "shared rho, mu",
    "use pipe as p[l]",
    "new unit EUR",
    "template pipe:",
)


def expressions_below(value: Any) -> list[Any]:
    """All nodes in the fields of `value`, found without knowing the kinds; units, patterns and ranges left out."""
    if isinstance(value, tuple):
        return [node for part in value for node in expressions_below(part)]
    if not is_dataclass(value) or isinstance(value, (UnitText, NamePattern)):
        return []
    inner = [node for f in fields(value) for node in expressions_below(getattr(value, f.name))]
    return inner if isinstance(value, Range) or type(value).__name__ == "Parameter" else [value, *inner]


@pytest.mark.parametrize("text", STATEMENTS)
def test_walk_meets_every_node_once(text: str) -> None:
    node = parsed_text(text).node
    met = list(walk(node))
    assert sorted(map(id, met)) == sorted(map(id, expressions_below(node)))
    order = {id(n): i for i, n in enumerate(met)}
    assert all(order[id(n)] < order[id(below)] for n in met for below in children(n))


def test_leaves_have_no_children() -> None:
    assert children(Number(0, 0, "1")) == children(Text(0, 0, "a")) == children(Reference(0, 0, "x")) == ()
