"""Each kind of statement becomes its node, with what was written."""

from __future__ import annotations

from typing import Any

import pytest

from eqsheet.diagnostics.source import Source
from eqsheet.syntax.nodes import (
    Curve,
    Definition,
    Equation,
    Family,
    Guess,
    Include,
    Limit,
    NamePattern,
    NewUnit,
    Rows,
    Shared,
    Show,
    Statement,
    TableRow,
    Template,
    Use,
)
from eqsheet.syntax.parse import parse_document, parse_statement, parsed_text
from eqsheet.syntax.write import write_expression


def node_of(text: str, kind: type) -> Any:
    node = parsed_text(text).node
    assert type(node) is kind
    return node


def statements(text: str) -> tuple[Statement, ...]:
    document, diagnostics = parse_document(Source("sheet", text))
    assert not diagnostics
    return document.statements


def written(*nodes: Any) -> list[str | None]:
    return [None if node is None else write_expression(node) for node in nodes]


def test_equation_of_any_two_expressions() -> None:
    node = node_of("m*cp*(T2 - T1) = Q + 0", Equation)
    assert written(node.left, node.right) == ["m*cp*(T2 - T1)", "Q + 0"]
    assert node.tolerance is None
    assert node.valid == ()


@pytest.mark.parametrize("sign", ["±", "+-"])
def test_known_with_tolerance_and_coverage_factor(sign: str) -> None:
    node = node_of(f"D = 52.5 mm {sign} 0.1 mm (k=2)", Equation)
    assert written(node.tolerance.half_width, node.tolerance.coverage) == ["0.1 mm", "2"]
    assert node_of(f"D = -52.5 {sign} 2 %", Equation).tolerance.coverage is None


def test_validity_of_an_equation() -> None:
    node = node_of("Nu = 0.023*Re^0.8*Pr^0.4 valid Re > 1e4, 0.7 <= Pr <= 160", Equation)
    assert written(*node.valid) == ["Re > 1e4", "0.7 <= Pr <= 160"]


@pytest.mark.parametrize(
    ("text", "parts"),
    [
        ("f near 0.02", ["f", "0.02", None, None]),
        ("f near 0.02 within 0.005 .. 0.1", ["f", "0.02", "0.005", "0.1"]),
        ("f within 0.005..0.1 near 0.02", ["f", "0.02", "0.005", "0.1"]),
        ("T within 0 K ..", ["T", None, "0 K", None]),
        ("T within .. T_in + 20 K", ["T", None, None, "T_in + 20 K"]),
        ("T[3] near T[2]", ["T[3]", "T[2]", None, None]),
        ("T within -5 degC .. 5 degC", ["T", None, "-5 degC", "5 degC"]),
        ("c_* within 0 mol/L ..", ["c_*", None, "0 mol/L", None]),
        ("supply.x_* near 5", ["supply.x_*", "5", None, None]),
        ("near near near", ["near", "near", None, None]),
    ],
)
def test_guess_and_bounds(text: str, parts: list[str | None]) -> None:
    node = node_of(text, Guess)
    assert written(node.target, node.near, node.lower, node.upper) == parts
    assert isinstance(node.target, NamePattern) == ("*" in parts[0])  # type: ignore[operator]  # the target is always there


def test_limit_with_chain_and_with_margin() -> None:
    chain = node_of("require 0.5 m/s <= v <= 2.5 m/s", Limit)
    assert written(chain.condition, chain.within) == ["0.5 m/s <= v <= 2.5 m/s", None]
    relative = node_of("require a = b within 1 %", Limit)
    assert written(relative.condition, relative.within) == ["a = b", "1 %"]
    assert relative.relative
    assert not node_of("require a = b within 2 K", Limit).relative


def test_show_with_and_without_units() -> None:
    items = node_of("show V in L/min, T2 in degC, T, x in 1, L in in", Show).items
    assert [(i.target.dotted, i.unit.text if i.unit else None) for i in items] == [
        *(("V", "L/min"), ("T2", "degC"), ("T", None), ("x", "1"), ("L", "in")),
    ]


def test_definition_with_units_and_validity() -> None:
    node = node_of(
        "define p_sat(T in degC, x) in mmHg = 10^(8.07 - 1730.6/(233.4 + T)) valid 1 degC <= T <= 100 degC",
        Definition,
    )
    assert [(p.name, p.unit.text if p.unit else None) for p in node.parameters] == [
        ("T", "degC"),
        ("x", None),
    ]
    assert (node.name, node.result_unit.text) == ("p_sat", "mmHg")
    assert written(node.body, *node.valid) == [
        *("10^(8.07 - 1730.6/(233.4 + T))", "1 degC <= T <= 100 degC"),
    ]


def test_new_units() -> None:
    assert node_of("new unit EUR", NewUnit).value is None
    assert written(node_of("new unit skid = 48 EUR", NewUnit).value) == ["48 EUR"]


@pytest.mark.parametrize(
    ("text", "label", "off"),
    [
        ("T = 3", "", False),
        ("off T = 3", "", True),
        ("energy: T = 3", "energy", False),
        ("off energy: T = 3", "energy", True),
        ("energy : off T = 3", "energy", True),
        ("off = 3", "", False),
        ("off near 3", "", False),
    ],
)
def test_label_and_off_in_either_order(text: str, label: str, off: bool) -> None:
    parsed = parsed_text(text)
    assert (parsed.label, parsed.off) == (label, off)


def test_family_with_filter_and_body() -> None:
    (family,) = statements(
        'for i in 1..N, s in species if i != 3 and s = "NH4+":\n    T[i] = 1\n    x[s] = 2'
    )
    assert isinstance(family.node, Family)
    assert [c.index for c in family.node.clauses] == ["i", "s"]
    assert written(family.node.filter) == ['not i = 3 and s = "NH4+"']
    assert [b.line.line for b in family.body] == [2, 3]


def test_rows_with_units_members_and_unknown_cells() -> None:
    (rows,) = statements('rows line: a of bus, M in g/mol, r  # data\n  "NH4+" A -\n   L2 -1.5 2 # second')
    assert isinstance(rows.node, Rows)
    assert [(c.name, c.of, c.unit.text if c.unit else None) for c in rows.node.columns] == [
        *(("a", "bus", None), ("M", None, "g/mol"), ("r", None, None)),
    ]
    cells = [[(c.text, c.quoted) for c in b.node.cells] for b in rows.body if isinstance(b.node, TableRow)]
    assert cells == [
        [("NH4+", True), ("A", False), ("-", False)],
        [("L2", False), ("-1.5", False), ("2", False)],
    ]
    assert rows.body[1].description == "second"
    assert rows.body[0].span(*_place(rows.body[0])).text == '"NH4+"'


def _place(statement: Statement) -> tuple[int, int]:
    assert isinstance(statement.node, TableRow)
    return statement.node.cells[0].start, statement.node.cells[0].end


def test_rows_from_a_file_and_rows_of_names_alone() -> None:
    assert node_of('rows bus from "bus.csv"', Rows).path.value == "bus.csv"
    (rows,) = statements("rows species:\n    H2O\n    CO2")
    assert len(rows.body) == 2


@pytest.mark.parametrize(
    ("text", "interpolation", "path"),
    [
        ("curve head(Q in m^3/h) in m:", "smooth", None),
        ("curve head(Q in m^3/h) in m by line:", "line", None),
        ("curve head(Q) by step:", "step", None),
        ('curve head(Q in m^3/h) in m from "pump.csv"', "smooth", "pump.csv"),
        ('curve head(Q in m^3/h) in m by line from "pump.csv"', "line", "pump.csv"),
        ('curve head(Q in m^3/h) in m from "pump.csv" by line', "line", "pump.csv"),
        ("surface eta(Q in m^3/h, n in rpm) in %:", "smooth", None),
    ],
)
def test_curves_and_surfaces(text: str, interpolation: str, path: str | None) -> None:
    node = node_of(text, Curve)
    assert node.interpolation == interpolation
    assert (node.path.value if node.path else None) == path


def test_a_row_that_begins_with_a_sign_is_a_row_of_its_own() -> None:
    (curve,) = statements("curve k(T in degC) in 1:\n    -10 0.5\n    -5  -\n    +0  0.7")
    assert [[c.text for c in b.node.cells] for b in curve.body if isinstance(b.node, TableRow)] == [
        *(["-10", "0.5"], ["-5", "-"], ["+0", "0.7"]),
    ]


def test_template_shared_use_and_include() -> None:
    template, use, include = statements(
        'template pipe:\n    shared rho, mu\n    L = 3 m\nuse pipe as p[l]:\n    L = L_run[l]\ninclude "glycol.eqsheet"'
    )
    assert isinstance(template.node, Template)
    assert isinstance(template.body[0].node, Shared)
    assert isinstance(use.node, Use)
    assert isinstance(include.node, Include)
    assert [r.name for r in template.body[0].node.names] == ["rho", "mu"]
    assert (use.node.template, written(use.node.instance)) == ("pipe", ["p[l]"])
    assert include.node.path.value == "glycol.eqsheet"


def test_off_reaches_into_the_group() -> None:
    (family,) = statements("off for i in 1..3:\n    x[i] = 1\n    for j in 1..2:\n        y[i, j] = 2")
    assert family.off
    assert family.body[0].off
    assert family.body[1].body[0].off


def test_description_source_and_assumption() -> None:
    (known,) = statements("D = 52.5 mm  # bore; source: drawing P-104 rev B; assume: clean")
    assert (known.description, known.origin, known.assumption) == ("bore", "drawing P-104 rev B", "clean")


def test_sections_reach_to_the_next() -> None:
    first, second, third = statements("a = 1\n## Pipe run\nb = 2\n# prose\n### Fittings\nc = 3")
    assert [first.section, second.section, third.section] == ["", "Pipe run", "Fittings"]


def test_prose_keeps_text_and_level() -> None:
    document, _ = parse_document(Source("sheet", "# A *pipe*\n##  Data \n#######"))
    assert [(p.line, p.text, p.title, p.level) for p in document.prose] == [
        *((1, "A *pipe*", "", 0), (2, "Data", "Data", 2), (3, "######", "", 0)),
    ]


def test_one_statement_alone() -> None:
    statement, diagnostics = parse_statement(Source("--with", "D = 60 mm", numbered=False))
    assert statement is not None
    assert not diagnostics
    assert [d.code for d in parse_statement(Source("--with", ""))[1]] == ["no-statement"]
    assert [d.code for d in parse_statement(Source("--with", "a = 1\nb = 2"))[1]] == ["one-statement"]
    assert parse_statement(Source("--with", "a == 1"))[0] is None
