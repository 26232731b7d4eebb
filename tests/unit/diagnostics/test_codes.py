"""Every code has its page, and every page its code."""

from __future__ import annotations

import ast
import re
from collections.abc import Iterator
from pathlib import Path

import pytest

import eqsheet.diagnostics.codes as registry
from eqsheet.diagnostics.codes import codes, page, read_page, reference

PACKAGE = Path(registry.__file__).resolve().parents[1]
REFERENCE = PACKAGE.parent / "grammar" / "DIAGNOSTICS.md"

# What no worksheet of a few lines can show: what is wrong with other files, an argument of the command line, and
# the limits that keep time and memory bounded.
WITHOUT_WORKSHEETS = {
    "csv-empty",
    "csv-heading",
    "csv-quotes",
    "csv-too-many",
    "formula-too-large",
    "include-cycle",
    "member-name",
    "nested-too-deeply",
    "no-statement",
    "not-a-known",
    "one-statement",
    "path-not-inside",
    "statement-too-long",
    "too-many-broken",
    "too-many-statements",
    "unreadable-attachment",
    "unreadable-file",
    "worksheet-too-large",
}


def trees() -> Iterator[ast.Module]:
    for path in sorted(PACKAGE.rglob("*.py")):
        yield ast.parse(path.read_text(encoding="utf-8"), str(path))


def first_taken(definition: ast.AST) -> str:
    """Name of the first thing a function or a class takes when called; empty if none."""
    if isinstance(definition, ast.FunctionDef):
        names = [argument.arg for argument in definition.args.args if argument.arg not in ("self", "cls")]
        return names[0] if names else ""
    if isinstance(definition, ast.ClassDef):
        for part in definition.body:
            if isinstance(part, ast.FunctionDef) and part.name == "__init__":
                return first_taken(part)
            if isinstance(part, ast.AnnAssign) and isinstance(part.target, ast.Name):
                return part.target.id
    return ""


def texts_in(expression: ast.AST, constants: dict[str, str]) -> Iterator[str]:
    """The texts an expression may come to: literals and constants of a module, not parts of an f-string."""
    if isinstance(expression, ast.Constant) and isinstance(expression.value, str):
        yield expression.value
    elif isinstance(expression, ast.Name) and expression.id in constants:
        yield constants[expression.id]
    elif isinstance(expression, ast.IfExp):
        yield from texts_in(expression.body, constants)
        yield from texts_in(expression.orelse, constants)


def code_of_a_row(node: ast.AST) -> str:
    """The code of a row (code, message, help) of a table of messages; empty if `node` is none."""
    if not isinstance(node, ast.Tuple) or len(node.elts) != 3:
        return ""
    texts = [
        part.value for part in node.elts if isinstance(part, ast.Constant) and isinstance(part.value, str)
    ]
    return texts[0] if len(texts) == 3 and re.fullmatch("[a-z]+(-[a-z]+)+", texts[0]) else ""


def codes_in_the_source() -> set[str]:
    """Every code that is given where a function or class takes a `code` first."""
    parsed = list(trees())
    nodes = [node for tree in parsed for node in ast.walk(tree)]
    makers = {
        node.name
        for node in nodes
        if isinstance(node, ast.FunctionDef | ast.ClassDef)
        and first_taken(node) == "code"
        and node.name != "page"
    }
    constants = {
        statement.targets[0].id: statement.value.value
        for tree in parsed
        for statement in tree.body
        if isinstance(statement, ast.Assign)
        and isinstance(statement.targets[0], ast.Name)
        and isinstance(statement.value, ast.Constant)
        and isinstance(statement.value.value, str)
    }
    found = {code for node in nodes if (code := code_of_a_row(node))}
    for node in nodes:
        if isinstance(node, ast.Call):
            called = node.func.attr if isinstance(node.func, ast.Attribute) else getattr(node.func, "id", "")
            if called in makers:
                named = [keyword.value for keyword in node.keywords if keyword.arg == "code"]
                for argument in node.args[:1] or named:
                    found |= set(texts_in(argument, constants))
    return found


def test_codes_are_found_in_the_source() -> None:
    assert {"unknown-unit", "ambiguous-unit"} <= codes_in_the_source()


def test_every_code_has_a_page() -> None:
    assert sorted(codes_in_the_source() - set(codes())) == []


def test_every_page_is_of_a_code_in_use() -> None:
    """A code may reach its diagnostic through a variable, so any text of the source counts."""
    texts = {
        node.value
        for tree in trees()
        for node in ast.walk(tree)
        if isinstance(node, ast.Constant) and isinstance(node.value, str)
    }
    assert sorted(set(codes()) - texts) == []


@pytest.mark.parametrize("code", codes())
def test_every_page_has_its_parts(code: str) -> None:
    found = page(code)
    assert found is not None
    assert found.summary
    assert found.wrong != found.mended or code in WITHOUT_WORKSHEETS


def test_worksheets_are_left_out_only_where_none_can_be_shown() -> None:
    without = {code for code in codes() if (found := page(code)) is not None and not found.wrong}
    assert sorted(without - WITHOUT_WORKSHEETS) == []


def test_no_such_code_has_no_page() -> None:
    assert page("no-such-code") is None
    assert page("../codes") is None


def test_the_reference_is_current() -> None:
    """Mended by ``python -m eqsheet.diagnostics.codes > grammar/DIAGNOSTICS.md``."""
    assert REFERENCE.read_text(encoding="utf-8") == reference()


PAGE = """\
# too-long: it is too long

Why.

```eqsheet-wrong
a = 1
```

Cure.

```eqsheet
b = 2
```
"""


def test_read_page() -> None:
    found = read_page(PAGE)
    assert (found.code, found.summary) == ("too-long", "it is too long")
    assert (found.why, found.cure) == ("Why.", "Cure.")
    assert (found.wrong, found.mended) == ("a = 1\n", "b = 2\n")


def test_a_page_without_worksheets_ends_in_the_cure() -> None:
    found = read_page("# gone: it is gone\n\nWhy.\n\nMore why.\n\nCure.\n")
    assert (found.why, found.cure) == ("Why.\n\nMore why.", "Cure.")
    assert (found.wrong, found.mended) == ("", "")


@pytest.mark.parametrize(
    ("broken", "fault"),
    [
        (PAGE.replace("# too-long: ", ""), "first line"),
        (PAGE.replace("Why.", ""), "a page is"),
        (PAGE.replace("Cure.", ""), "a page is"),
        (PAGE.replace("eqsheet-wrong", "text"), "fenced as eqsheet-wrong"),
        (PAGE + "More.\n", "a page is"),
    ],
)
def test_a_broken_page_is_refused(broken: str, fault: str) -> None:
    with pytest.raises(ValueError, match=fault):
        read_page(broken)
