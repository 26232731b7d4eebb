"""What is said while a formula is lowered: findings at the text in question, or at the use of a definition.

Inside a definition that is written out, every finding and every instruction stands where the definition is used: that
is where the engineer can change something.
"""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import replace
from typing import Never

from eqsheet.model.findings import Finding
from eqsheet.model.spelling import did_you_mean
from eqsheet.model.while_lowering import Place2, Poisoned
from eqsheet.syntax import nodes as syntax
from eqsheet.units.registry import UnitProblem

# What joins the members of an aggregate that is no function of two values.
_OPERATORS = {"sum": "+", "prod": "*"}


class LoweringFindings:
    """The findings of one formula.

    Attributes
    ----------
    findings : list of Finding
    text : str
        The logical line that nodes are of: the formula's own, or that of a definition being written out.
    """

    def __init__(self, text: str) -> None:
        self.findings: list[Finding] = []
        self.text = text
        self._fixed_place: Place2 | None = None

    def _place(self, node: syntax.Expression | syntax.UnitText | syntax.UnitFactor) -> Place2:
        return self._fixed_place or (node.start, node.end)

    def _note_finding(self, finding: Finding) -> None:
        if self._fixed_place is not None:
            finding = replace(finding, start=self._fixed_place[0], end=self._fixed_place[1])
        self.findings.append(finding)

    def _refuse(self, code: str, message: str, node: syntax.Expression, help: str = "") -> Never:
        self.findings.append(Finding(code, message, *self._place(node), help))
        raise Poisoned

    def _refuse_count(self, node: syntax.Call, needed: int) -> Never:
        given = len(node.arguments)
        self._refuse(
            "argument-count",
            f"`{node.name}` takes {needed} argument{'s' * (needed != 1)}, not {given}",
            node,
        )

    def _refuse_logarithm(self, node: syntax.Call) -> Never:
        self._refuse(
            "log-ambiguous",
            "`log` does not say which logarithm is meant",
            _name_of(node),
            help="write `ln` for the natural or `log10` for the decimal logarithm",
        )

    def _refuse_quantity_as_function(self, node: syntax.Call) -> Never:
        argument = self.text[node.name_end : node.end] if self._fixed_place is None else "(...)"
        self._refuse(
            "quantity-as-function",
            f"`{node.name}` is a quantity, not a function",
            _name_of(node),
            help=f"to multiply, write `{node.name}*{argument}`",
        )

    def _refuse_without_members(self, node: syntax.Call) -> Never:
        """A sum, product or extreme that is written like a function of one value, or a sum like one of several."""
        (first, *others) = node.arguments
        term = self.text[first.start : first.end] if self._fixed_place is None else "..."
        if isinstance(first, syntax.Reference) and first.subscripts is None and first.owner is None:
            term = f"{term}[i]"
        help = f"write `{node.name}({term} for i in ...)` with a range, `1..N`, or a set"
        if node.name in _OPERATORS:
            sign = _OPERATORS[node.name]
            help = (
                f"write the operator, `a {sign} b`"
                if others
                else f"{help}; of a few values write `a {sign} b`"
            )
        else:
            help = f"{help}, or give two values or more"
        self._refuse(
            "members-missing", f"`{node.name}` does not say over which members it runs", _name_of(node), help
        )

    def _refuse_unknown_function(self, node: syntax.Call, known: Collection[str]) -> Never:
        self._refuse(
            "unknown-function",
            f"there is no function `{node.name}`",
            _name_of(node),
            help=did_you_mean(node.name, known)
            or f"write `define {node.name}(...) = ...`, or `{node.name}*(...)` to multiply",
        )

    def _note_unit(
        self, problem: UnitProblem, unit: syntax.UnitText, place: syntax.UnitText | syntax.UnitFactor
    ) -> None:
        symbol = unit.factors[problem.index].symbol if unit.factors else ""
        start, end = self._place(place)
        help, cure = problem.help, ""
        if symbol.isidentifier():
            cure = "put spaces around the operator before it" if problem.index else "write `*` before it"
        if problem.code == "unknown-unit" and cure:
            help = f"{help}; if `{symbol}` is to be a quantity, {cure}"
        self.findings.append(
            Finding(problem.code, problem.message, start, end, help, symbol=symbol, cure_if_quantity=cure)
        )


def _name_of(node: syntax.Call) -> syntax.Reference:
    return syntax.Reference(node.start, node.name_end, node.name)
