"""Nodes of expressions from the parts of productions: one function an alias of the grammar.

Each takes the values of all parts of its production, punctuation included, and gives a node or a `Slip`.
A bracket leaves no node of its own: the node inside is widened to the bracket's place.
"""

from __future__ import annotations

from dataclasses import replace
from typing import Any, TypeVar

from eqsheet.syntax.automaton import Action, Token
from eqsheet.syntax.literal import plain_name
from eqsheet.syntax.nodes import (
    Aggregate,
    Binary,
    Call,
    Comparison,
    Conditional,
    Expression,
    IndexClause,
    Logical,
    Number,
    Range,
    Reference,
    Text,
    Unary,
)
from eqsheet.syntax.operands import NEEDS_A_LOOK, as_condition, as_number
from eqsheet.syntax.slip import Slip

AGGREGATES = ("sum", "prod", "min", "max")

Parts = list[Any]

_F = TypeVar("_F", bound=Action)

ACTIONS: dict[str, Action] = {}


def _action(function: _F) -> _F:
    ACTIONS[function.__name__] = function
    return function


# --- lists ------------------------------------------------------------------------------------------------


@_action
def one(v: Parts) -> Parts:
    return [v[0]]


@_action
def more(v: Parts) -> Parts:
    v[0].append(v[2])
    return v[0]  # type: ignore[no-any-return]  # the list that `one` began


# --- expressions ------------------------------------------------------------------------------------------


@_action
def conditional(v: Parts) -> Conditional:
    return Conditional(v[0].start, v[5].end, as_condition(v[1]), as_number(v[3]), as_number(v[5]))


@_action
def binary(v: Parts) -> Binary:
    left, operator, right = v
    if type(left) in NEEDS_A_LOOK or type(right) in NEEDS_A_LOOK:
        as_number(left)
        as_number(right)
    return Binary(left.start, right.end, operator.text, operator.start, left, right)


@_action
def power(v: Parts) -> Binary:
    base, operator, exponent = v
    if type(exponent) is Number and exponent.unit is not None and exponent.unit.end == exponent.end:
        raise Slip(
            "unit-in-exponent",
            f"`{exponent.unit.text}` stands in the exponent here",
            exponent.unit.start,
            exponent.unit.end,
            f"write `1e3 {exponent.unit.text}` for a thousand; put brackets round an exponent with a unit",
        )
    if type(base) is Number and base.unit is not None and base.unit.end == base.end:
        raise Slip(
            "power-after-unit",
            f"it is not clear whether the power belongs to `{base.unit.text}` or to the whole number",
            operator.start,
            operator.end,
            "put brackets round the number to raise it, `(5 m)^2`; a power of the unit is a whole number or a "
            "bracketed fraction without a space, `5 m^2` or `5 m^(1/2)`",
        )
    return binary(v)


@_action
def unary(v: Parts) -> Unary:
    sign, operand = v
    operand = as_condition(operand) if sign.text == "not" else as_number(operand)
    return Unary(sign.start, operand.end, sign.text, operand)


@_action
def bracket(v: Parts) -> Expression:
    node = v[1]
    start, end = v[0].start, v[2].end
    if type(node) is Binary:
        return Binary(start, end, node.operator, node.operator_start, node.left, node.right)
    if type(node) is Text:
        as_number(node)
    return replace(node, start=start, end=end)  # type: ignore[no-any-return]  # of the node's own type


def as_text(token: Token) -> Text:
    """The quoted name that `token` holds."""
    return Text(token.start, token.end, token.text[1:-1])


@_action
def text(v: Parts) -> Text:
    return as_text(v[0])


@_action
def reference(v: Parts) -> Reference:
    token = v[0]
    return Reference(token.start, token.end, plain_name(token.text))


@_action
def reference_subscripts(v: Parts) -> Reference:
    return Reference(v[0].start, v[3].end, plain_name(v[0].text), tuple(v[2]))


@_action
def member(v: Parts) -> Reference:
    return Reference(v[0].start, v[2].end, plain_name(v[2].text), None, v[0])


@_action
def member_subscripts(v: Parts) -> Reference:
    return Reference(v[0].start, v[5].end, plain_name(v[2].text), tuple(v[4]), v[0])


@_action
def call(v: Parts) -> Call:
    name = v[0]
    return Call(name.start, v[3].end, plain_name(name.text), name.end, tuple(as_number(a) for a in v[2]))


def _aggregate(v: Parts, condition: Expression | None) -> Aggregate:
    name = v[0]
    if name.text not in AGGREGATES:
        raise Slip(
            "not-an-aggregate",
            f"`{name.text}` cannot be taken over a set",
            name.start,
            name.end,
            "over a set there are `sum`, `prod`, `min` and `max`",
        )
    return Aggregate(name.start, v[-1].end, name.text, as_number(v[2]), tuple(v[4]), condition)


@_action
def aggregate(v: Parts) -> Aggregate:
    return _aggregate(v, None)


@_action
def aggregate_filter(v: Parts) -> Aggregate:
    return _aggregate(v, as_condition(v[6]))


@_action
def clause_over(v: Parts) -> IndexClause:
    over = v[2]
    if type(over) is not Reference or over.subscripts is not None:
        raise Slip(
            "index-set",
            "an index runs over a range or over a set of rows",
            over.start,
            over.end,
            "write `for i in 1..N` or `for s in species`",
        )
    return IndexClause(v[0].start, over.end, plain_name(v[0].text), over)


@_action
def clause_range(v: Parts) -> IndexClause:
    for bound in (v[2], v[4]):
        if type(bound) is Number and (bound.unit is not None or not bound.text.isdigit()):
            raise Slip(
                "range-not-whole",
                "a range runs over whole numbers",
                bound.start,
                bound.end,
                "write whole numbers without units, as in `1..10`",
            )
    limits = Range(v[2].start, v[4].end, as_number(v[2]), as_number(v[4]))
    return IndexClause(v[0].start, v[4].end, plain_name(v[0].text), limits)


# --- conditions -------------------------------------------------------------------------------------------


@_action
def logical(v: Parts) -> Logical:
    left, operator, right = v
    as_condition(left)
    as_condition(right)
    # a and b and c is one node; (a and b) and c, widened to its bracket, stays as written
    if type(left) is Logical and left.operator == operator.text and left.end == left.operands[-1].end:
        return Logical(left.start, right.end, operator.text, (*left.operands, right))
    return Logical(left.start, right.end, operator.text, (left, right))


def _member_oras_number(node: Expression) -> Expression:
    return node if type(node) is Text else as_number(node)


@_action
def comparison(v: Parts) -> Comparison | Unary:
    left, operator, right = v
    pair = (_member_oras_number(left), _member_oras_number(right))
    if operator.text == "!=":
        equal = Comparison(left.start, right.end, ("=",), pair)
        return Unary(left.start, right.end, "not", equal)
    return Comparison(left.start, right.end, (operator.text,), pair)


@_action
def comparison_more(v: Parts) -> Comparison:
    chain, operator, right = v
    if type(chain) is not Comparison or operator.text == "!=":
        raise Slip(
            "unequal-in-chain",
            "`!=` cannot stand in a chain of comparisons",
            operator.start,
            operator.end,
            "join two comparisons with `and`",
        )
    operators = (*chain.operators, operator.text)
    return Comparison(chain.start, right.end, operators, (*chain.operands, _member_oras_number(right)))
