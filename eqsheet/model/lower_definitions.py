"""Definitions: collected by name, and checked once in their own lines."""

from __future__ import annotations

import re
from collections.abc import Collection, Iterable, Iterator, Mapping, Sequence

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.model.findings import Finding
from eqsheet.model.lower import AGGREGATE_NAMES, FUNCTION_NAMES, Lowering
from eqsheet.model.reserved_names import reserved_name
from eqsheet.model.scope import Context, NameTable
from eqsheet.model.while_lowering import Poisoned
from eqsheet.syntax import nodes as syntax


def collect_definitions(
    statements: Sequence[syntax.Statement], diagnostics: list[Diagnostic]
) -> Mapping[str, syntax.Statement]:
    """Definitions by name; a name taken twice or by a built-in function is reported, the first one kept."""
    found: dict[str, syntax.Statement] = {}
    for statement in statements:
        node = statement.node
        if not isinstance(node, syntax.Definition):
            continue
        start = node.name_end - len(node.name)
        here = Label(statement.span(start, node.name_end))
        reserved = reserved_name(node.name, "definition", here)
        if reserved is not None:
            diagnostics.append(reserved)
        elif node.name in FUNCTION_NAMES or node.name in AGGREGATE_NAMES:
            diagnostics.append(
                error(
                    "definition-of-built-in",
                    f"`{node.name}` is a built-in function",
                    here,
                    help="give the definition another name",
                )
            )
        elif node.name in found:
            other = found[node.name]
            diagnostics.append(
                error(
                    "defined-twice", f"`{node.name}` is defined twice", here, Label(other.whole, "first here")
                )
            )
        elif (slip := parameter_slip(statement, node.parameters)) is not None:
            diagnostics.append(slip)
        elif (problem := _unit_problem(node)) is not None:
            diagnostics.append(problem.at(statement))
        else:
            found[node.name] = statement
    return found


def parameter_slip(statement: syntax.Statement, parameters: Sequence[syntax.Parameter]) -> Diagnostic | None:
    """What is wrong with the names of the parameters of a definition, curve or surface, if anything."""
    seen: set[str] = set()
    for parameter in parameters:
        here = Label(statement.span(parameter.start, parameter.end))
        reserved = reserved_name(parameter.name, "parameter", here)
        if reserved is not None:
            return reserved
        if parameter.name in seen:
            return error("parameter-twice", f"the parameter `{parameter.name}` stands twice", here)
        seen.add(parameter.name)
    return None


def _unit_problem(node: syntax.Definition) -> Finding | None:
    """That only some of the parameters and the result have built-in units, if so."""
    with_units = [p for p in node.parameters if p.unit is not None]
    if node.result_unit is None and with_units:
        return Finding(
            "definition-half-with-units",
            f"`{node.name}` has a parameter with a built-in unit, but its result has none",
            node.start,
            node.name_end,
            "write the unit of the result too: `define f(T in degC) in mmHg = ...` (`in 1` for a plain number)",
        )
    if node.result_unit is not None and len(with_units) < len(node.parameters):
        bare = next(p for p in node.parameters if p.unit is None)
        return Finding(
            "definition-half-with-units",
            f"the parameter `{bare.name}` of the empirical formula `{node.name}` has no unit",
            bare.start,
            bare.end,
            f"write `{bare.name} in UNIT` (`{bare.name} in 1` for a plain number)",
        )
    return None


def check_definition(statement: syntax.Statement, context: Context) -> tuple[Finding, ...]:
    """What is wrong with a definition, found in its own line with stand-ins for the parameters.

    A use of the definition would find the same, but point at the use.
    """
    node = statement.node
    assert isinstance(node, syntax.Definition)
    work = Lowering(context, NameTable(), statement.line.text)
    try:
        work.try_body(node)
    except Poisoned:
        return tuple(work.findings)
    return ()


def _all(statements: Iterable[syntax.Statement]) -> Iterator[syntax.Statement]:
    """Statements with those in their groups: a definition in a group is no definition, but a name to be found."""
    for statement in statements:
        yield statement
        if isinstance(statement.node, syntax.Family | syntax.Template | syntax.Use):
            yield from _all(statement.body)


def without_echoes(
    diagnostics: Sequence[Diagnostic],
    told: Sequence[Diagnostic],
    statements: Sequence[syntax.Statement],
    kept: Collection[str],
) -> tuple[Diagnostic, ...]:
    """The diagnostics without those at uses of a broken definition or curve, which its own line has told already.

    Parameters
    ----------
    told : sequence of Diagnostic
        What is wrong with definitions, said in their own lines; among `diagnostics`.
    kept : collection of str
        Names of definitions and curves that can be used; a use of any other is an unknown function only because
        its line is broken.
    """
    named = {s.node.name for s in _all(statements) if isinstance(s.node, syntax.Definition | syntax.Curve)}
    lost = named.difference(kept)
    if not told and not lost:
        return tuple(diagnostics)
    own = {id(diagnostic) for diagnostic in told}
    echoes = {(diagnostic.code, diagnostic.message) for diagnostic in told}
    echoes |= {("unknown-function", f"there is no function `{name}`") for name in lost}
    # The same slip in a line without such a use is a slip of its own.
    uses = re.compile(rf"({'|'.join(map(re.escape, named))})\s*(\(|$)")
    return tuple(
        [
            d
            for d in diagnostics
            if id(d) in own
            or (d.code, d.message) not in echoes
            or d.span is None
            or not uses.match(d.span.text)
        ]
    )
