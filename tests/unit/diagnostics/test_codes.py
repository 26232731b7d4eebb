"""Every code has its page, and every page its code."""

from __future__ import annotations

import ast
from collections.abc import Iterator
from pathlib import Path

import pytest

import eqsheet.diagnostics.codes as registry
from eqsheet.diagnostics.codes import codes, page, read_page, reference

PACKAGE = Path(registry.__file__).resolve().parents[1]
REFERENCE = PACKAGE.parent / "grammar" / "DIAGNOSTICS.md"


def trees() -> Iterator[ast.Module]:
    for path in sorted(PACKAGE.rglob("*.py")):
        yield ast.parse(path.read_text(encoding="utf-8"), str(path))


def takes_a_code(definition: ast.AST) -> bool:
    """Whether the first thing a function takes, or the first field of a class, is called `code`."""
    if isinstance(definition, ast.FunctionDef):
        names = [argument.arg for argument in definition.args.args if argument.arg not in ("self", "cls")]
        return names[:1] == ["code"] and definition.name not in ("page", "explain")
    if isinstance(definition, ast.ClassDef):
        fields = [
            s.target.id
            for s in definition.body
            if isinstance(s, ast.AnnAssign) and isinstance(s.target, ast.Name)
        ]
        return fields[:1] == ["code"]
    return False


def literal_codes() -> set[str]:
    """Every text that stands as first argument where a code is taken."""
    parsed = list(trees())
    makers = {
        node.name
        for tree in parsed
        for node in ast.walk(tree)
        if isinstance(node, ast.FunctionDef | ast.ClassDef) and takes_a_code(node)
    }
    found: set[str] = set()
    for tree in parsed:
        for node in ast.walk(tree):
            if not isinstance(node, ast.Call):
                continue
            called = node.func.attr if isinstance(node.func, ast.Attribute) else getattr(node.func, "id", "")
            named = [keyword.value for keyword in node.keywords if keyword.arg == "code"]
            for argument in (node.args[:1] or named) if called in makers else ():
                found |= {
                    part.value
                    for part in ast.walk(argument)
                    if isinstance(part, ast.Constant) and isinstance(part.value, str)
                }
    return found


def test_codes_are_found_in_the_source() -> None:
    assert {"unknown-unit", "ambiguous-unit"} <= literal_codes()


def test_every_code_has_a_page() -> None:
    assert sorted(literal_codes() - set(codes())) == []


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
    assert found.wrong != found.mended


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
