"""Nodes of statements from the parts of productions: one function an alias of the grammar.

Each takes the values of all parts of its production, punctuation included, and gives a node or a `Slip`.
"""

from __future__ import annotations

from collections.abc import Callable
from itertools import pairwise
from typing import Any, NamedTuple, TypeVar

from eqsheet.syntax import build_expressions
from eqsheet.syntax.automaton import Action, Token
from eqsheet.syntax.build_expressions import as_text
from eqsheet.syntax.literal import number, plain_name, signed_number, unit
from eqsheet.syntax.nodes import (
    Column,
    Comparison,
    Curve,
    Definition,
    Equation,
    Expression,
    Family,
    Guess,
    Include,
    Limit,
    NamePattern,
    NewUnit,
    Number,
    Parameter,
    Reference,
    Rows,
    Shared,
    Show,
    ShowItem,
    StatementNode,
    Template,
    Tolerance,
    Unary,
    UnitText,
    Use,
)
from eqsheet.syntax.operands import as_condition, as_number
from eqsheet.syntax.slip import Slip

Parts = list[Any]


class Parsed(NamedTuple):
    """A statement's node with its label and whether the word ``off`` stands before it."""

    node: StatementNode
    label: str = ""
    off: bool = False


_F = TypeVar("_F", bound=Action)

ACTIONS: dict[str, Action] = dict(build_expressions.ACTIONS)


def _action(function: _F) -> _F:
    ACTIONS[function.__name__] = function
    return function


# --- statements -------------------------------------------------------------------------------------------


@_action
def plain(v: Parts) -> Parsed:
    return Parsed(v[0])


@_action
def switched_off(v: Parts) -> Parsed:
    return Parsed(v[1], off=True)


def _label(token: Token) -> str:
    return plain_name(token.text[:-1].rstrip())


@_action
def labelled(v: Parts) -> Parsed:
    return Parsed(v[1], _label(v[0]))


@_action
def off_labelled(v: Parts) -> Parsed:
    return Parsed(v[2], _label(v[1]), off=True)


@_action
def labelled_off(v: Parts) -> Parsed:
    return Parsed(v[2], _label(v[0]), off=True)


@_action
def equation(v: Parts) -> Equation:
    return Equation(v[0].start, v[2].end, as_number(v[0]), as_number(v[2]))


def _is_literal(node: Expression) -> bool:
    if type(node) is Unary and node.operator in "+-":
        node = node.operand
    return type(node) is Number


@_action
def equation_tolerance(v: Parts) -> Equation:
    left, _, right, given = v
    if type(left) is not Reference or not _is_literal(right):
        raise Slip(
            "tolerance-not-on-known",
            "a tolerance needs a name on the left and one number on the right",
            given.start,
            given.end,
            "write it as `D = 52.5 mm ± 0.1 mm`, with the number worked out",
        )
    return Equation(left.start, given.end, left, right, given)


@_action
def equation_valid(v: Parts) -> Equation:
    conditions = tuple(v[3])
    return Equation(v[0].start, conditions[-1].end, as_number(v[0]), as_number(v[2]), None, conditions)


@_action
def tolerance(v: Parts) -> Tolerance:
    return Tolerance(v[0].start, v[1].end, v[1])


@_action
def tolerance_coverage(v: Parts) -> Tolerance:
    name = v[3]
    if name.text != "k":
        raise Slip(
            "coverage-factor",
            f"`{name.text}` is not known after a tolerance",
            name.start,
            name.end,
            "an expanded uncertainty is written with its coverage factor: `(k=2)`",
        )
    return Tolerance(v[0].start, v[6].end, v[1], v[5])


@_action
def valid(v: Parts) -> Parts:
    conditions: Parts = v[1]
    for written, following in pairwise(conditions):
        if type(written) is Number and following.start == written.end + 1:
            raise Slip(
                "decimal-comma",
                "a number has a comma for a decimal point",
                written.start,
                written.end + 1,
                "write a point in numbers; conditions stand apart by a comma and a space",
            )
    return [as_condition(condition) for condition in conditions]


@_action
def guess_near(v: Parts) -> Guess:
    return Guess(v[0].start, v[2].end, v[0], as_number(v[2]))


@_action
def guess_within(v: Parts) -> Guess:
    lower, upper, end = v[2]
    return Guess(v[0].start, end, v[0], None, lower, upper)


@_action
def guess_near_within(v: Parts) -> Guess:
    lower, upper, end = v[4]
    return Guess(v[0].start, end, v[0], as_number(v[2]), lower, upper)


@_action
def guess_within_near(v: Parts) -> Guess:
    lower, upper, _ = v[2]
    return Guess(v[0].start, v[4].end, v[0], as_number(v[4]), lower, upper)


@_action
def pattern(v: Parts) -> NamePattern:
    return NamePattern(v[0].start, v[0].end, plain_name(v[0].text))


@_action
def bound_below(v: Parts) -> Parts:
    return [as_number(v[0]), None, v[1].end]


@_action
def bound_above(v: Parts) -> Parts:
    return [None, as_number(v[1]), v[1].end]


@_action
def bounds(v: Parts) -> Parts:
    return [as_number(v[0]), as_number(v[2]), v[2].end]


def _has_equality(node: Expression) -> bool:
    return type(node) is Comparison and "=" in node.operators


@_action
def limit(v: Parts) -> Limit:
    condition = as_condition(v[1])
    if _has_equality(condition):
        raise Slip(
            "limit-equality",
            "a limit with `=` needs to say how close is close enough",
            condition.start,
            condition.end,
            "add `within` and a margin (`require a = b within 1 %`), or use `<=` or `>=`",
        )
    return Limit(v[0].start, condition.end, condition)


@_action
def limit_within(v: Parts) -> Limit:
    condition, within = as_condition(v[1]), as_number(v[3])
    if type(condition) is not Comparison or condition.operators != ("=",):
        raise Slip(
            "limit-within",
            "`within` in a limit belongs to one `=` of two sides",
            v[2].start,
            within.end,
            "write `require a = b within 1 %`, or leave `within` out",
        )
    relative = type(within) is Number and within.unit is not None and within.unit.text == "%"
    return Limit(v[0].start, within.end, condition, within, relative)


@_action
def show(v: Parts) -> Show:
    return Show(v[0].start, v[1][-1].end, tuple(v[1]))


@_action
def show_item(v: Parts) -> ShowItem:
    return ShowItem(v[0].start, v[0].end, v[0])


@_action
def show_item_unit(v: Parts) -> ShowItem:
    return ShowItem(v[0].start, v[2].end, v[0], v[2])


class _Head(NamedTuple):
    start: int
    name: Token
    parameters: tuple[Parameter, ...]
    unit: UnitText | None
    keyword: str
    end: int


@_action
def head(v: Parts) -> _Head:
    result = v[6] if len(v) > 6 else None
    return _Head(v[0].start, v[1], tuple(v[3]), result, v[0].text, v[-1].end)


ACTIONS["head_unit"] = ACTIONS["curve_head"] = ACTIONS["curve_head_unit"] = head


def _definition(head: _Head, body: Expression, end: int, conditions: Parts) -> Definition:
    return Definition(
        head.start,
        end,
        plain_name(head.name.text),
        head.name.end,
        head.parameters,
        head.unit,
        as_number(body),
        tuple(conditions),
    )


@_action
def definition(v: Parts) -> Definition:
    return _definition(v[0], v[2], v[2].end, [])


@_action
def definition_valid(v: Parts) -> Definition:
    return _definition(v[0], v[2], v[3][-1].end, v[3])


@_action
def parameter(v: Parts) -> Parameter:
    return Parameter(v[0].start, v[0].end, plain_name(v[0].text))


@_action
def parameter_unit(v: Parts) -> Parameter:
    return Parameter(v[0].start, v[2].end, plain_name(v[0].text), v[2])


@_action
def new_unit(v: Parts) -> NewUnit:
    return NewUnit(v[0].start, v[1].end, plain_name(v[1].text))


@_action
def new_unit_value(v: Parts) -> NewUnit:
    return NewUnit(v[0].start, v[3].end, plain_name(v[1].text), v[3])


@_action
def family(v: Parts) -> Family:
    return Family(v[0].start, v[2].end, tuple(v[1]))


@_action
def family_filter(v: Parts) -> Family:
    return Family(v[0].start, v[4].end, tuple(v[1]), as_condition(v[3]))


@_action
def rows_bare(v: Parts) -> Rows:
    return Rows(v[0].start, v[2].end, plain_name(v[1].text), ())


@_action
def rows(v: Parts) -> Rows:
    return Rows(v[0].start, v[3][-1].end, plain_name(v[1].text), tuple(v[3]))


@_action
def rows_from(v: Parts) -> Rows:
    return Rows(v[0].start, v[3].end, plain_name(v[1].text), (), as_text(v[3]))


@_action
def column(v: Parts) -> Column:
    return Column(v[0].start, v[0].end, plain_name(v[0].text))


@_action
def column_unit(v: Parts) -> Column:
    return Column(v[0].start, v[2].end, plain_name(v[0].text), v[2])


@_action
def column_of(v: Parts) -> Column:
    return Column(v[0].start, v[2].end, plain_name(v[0].text), None, plain_name(v[2].text))


_INTERPOLATIONS = ("line", "step")


def _curve(head: _Head, by: Token | None, path: Token | None, end: int) -> Curve:
    if by is not None and by.text not in _INTERPOLATIONS:
        raise Slip(
            "interpolation",
            f"a curve cannot be read `by {by.text}`",
            by.start,
            by.end,
            "write `by line` (straight between points), `by step` (next value up), or nothing (smooth)",
        )
    wanted = 1 if head.keyword == "curve" else 2
    if len(head.parameters) != wanted:
        raise Slip(
            "curve-arguments",
            f"a {head.keyword} takes {'one argument' if wanted == 1 else 'two arguments'}",
            head.parameters[0].start,
            head.parameters[-1].end,
            "a curve has one argument, a surface two",
        )
    return Curve(
        head.start,
        end,
        plain_name(head.name.text),
        head.name.end,
        head.parameters,
        head.unit,
        by.text if by is not None else "smooth",
        as_text(path) if path is not None else None,
    )


@_action
def curve(v: Parts) -> Curve:
    return _curve(v[0], None, None, v[-1].end)


@_action
def curve_by(v: Parts) -> Curve:
    return _curve(v[0], v[2], None, v[-1].end)


@_action
def curve_from(v: Parts) -> Curve:
    return _curve(v[0], None, v[2], v[-1].end)


@_action
def curve_by_from(v: Parts) -> Curve:
    return _curve(v[0], v[2], v[4], v[-1].end)


@_action
def curve_from_by(v: Parts) -> Curve:
    return _curve(v[0], v[4], v[2], v[-1].end)


@_action
def template(v: Parts) -> Template:
    return Template(v[0].start, v[2].end, plain_name(v[1].text))


@_action
def shared(v: Parts) -> Shared:
    return Shared(v[0].start, v[1][-1].end, tuple(v[1]))


@_action
def use(v: Parts) -> Use:
    return Use(v[0].start, v[-1].end, plain_name(v[1].text), v[3])


@_action
def include(v: Parts) -> Include:
    return Include(v[0].start, v[1].end, as_text(v[1]))


TERMINALS: dict[str, Callable[[int, int, str], Any]] = {
    "NUMBER": number,
    "SIGNED_NUMBER": signed_number,
    "UNIT": unit,
}
