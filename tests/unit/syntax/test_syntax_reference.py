"""The examples of the language reference are read as it says, and its word lists are those of the grammar."""

from __future__ import annotations

import re

import pytest

from eqsheet.diagnostics.source import Source
from eqsheet.syntax.format import format_document
from eqsheet.syntax.grammar_files import grammar_folder
from eqsheet.syntax.misfit import RESERVED
from eqsheet.syntax.parse import parse_document

REFERENCE = (grammar_folder() / "REFERENCE.md").read_text(encoding="utf-8")
BLOCKS = [
    (REFERENCE.count("\n", 0, found.start()) + 1, found[1], found[2])
    for found in re.finditer(r"^```(eqsheet[^\n]*)\n(.*?)^```$", REFERENCE, re.MULTILINE | re.DOTALL)
]


@pytest.mark.parametrize(("line", "kind", "text"), BLOCKS, ids=[f"line {line}" for line, _, _ in BLOCKS])
def test_example_is_read_as_the_reference_says(line: int, kind: str, text: str) -> None:
    document, diagnostics = parse_document(Source(f"REFERENCE.md, line {line}", text))
    code = kind.partition(" ")[2]
    assert [d.code for d in diagnostics] == ([code] if code else [])
    assert document.statements or code


@pytest.mark.parametrize(("line", "kind", "text"), BLOCKS, ids=[f"line {line}" for line, _, _ in BLOCKS])
def test_examples_are_in_canonical_layout(line: int, kind: str, text: str) -> None:
    if kind == "eqsheet":
        shown = text.replace("3.2bar", "3.2 bar")  # shown without its space on purpose
        assert format_document(Source(f"REFERENCE.md, line {line}", shown)) == shown


def words_below(sentence: str) -> list[str]:
    _, _, rest = REFERENCE.partition(sentence)
    return rest.split("\n\n")[1].split()


def test_reserved_words_are_those_of_the_grammar() -> None:
    assert sorted(words_below("These words cannot be names of quantities:")) == sorted(RESERVED)


@pytest.mark.parametrize("word", words_below("so they may be names as well:"))
def test_words_that_may_be_names_may_be_names_everywhere(word: str) -> None:
    text = f"{word} = 3 m\nx = 2*{word} + {word}[1] - {word}.a\n{word} near 5 m\nshow {word} in m\noff {word} = 4 m"
    text += f"\n{word} within 0 m .. 2 m\nrequire {word} > 2 m\n{word}*2 = y\n{word}: z = 1\nrows s: {word}, b\n    a 1 2"
    assert not parse_document(Source("sheet", text))[1]


@pytest.mark.parametrize("word", sorted(RESERVED))
def test_reserved_words_are_no_names(word: str) -> None:
    assert parse_document(Source("sheet", f"{word} = 3"))[1][0].code == "reserved-word"
    assert parse_document(Source("sheet", f"x = 2*{word} + 1"))[1]
