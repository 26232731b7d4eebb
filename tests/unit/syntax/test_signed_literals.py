"""A sign before a literal: its exponent is never taken for a unit."""

from __future__ import annotations

import pytest

from eqsheet.diagnostics.source import Source
from eqsheet.syntax.nodes import Equation, Number, Unary
from eqsheet.syntax.parse import parse_document


@pytest.mark.parametrize("text", ["-1.5e-05", "-1e-5", "-2E-7", "-4.7e-12"])
def test_exponent_of_a_signed_plain_number(text: str) -> None:
    document, diagnostics = parse_document(Source("page", f"x = {text}"))
    assert not diagnostics
    node = document.statements[0].node
    assert isinstance(node, Equation)
    assert isinstance(node.right, Unary)
    assert isinstance(node.right.operand, Number)
    assert (node.right.operand.text, node.right.operand.unit) == (text[1:], None)


def test_exponent_of_a_signed_number_with_a_unit() -> None:
    document, diagnostics = parse_document(Source("page", "x = -1.5e-5 eV"))
    assert not diagnostics
    node = document.statements[0].node
    assert isinstance(node, Equation)
    assert isinstance(node.right, Number)
    assert node.right.negated
    assert node.right.unit is not None
    assert (node.right.text, node.right.unit.text) == ("1.5e-5", "eV")
