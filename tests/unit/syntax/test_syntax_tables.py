"""The kept tables are those of the grammar, and others are never used."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

from eqsheet.syntax import tables
from eqsheet.syntax.grammar_files import grammar_folder, grammar_text


def test_kept_tables_are_what_lark_computes_now() -> None:
    text = grammar_text()
    computed = tables.computed_tables(text)
    assert tables.kept_tables(text) == computed
    assert tables.KEPT.read_text(encoding="utf-8") == tables.written_tables(text, computed)


def test_tables_of_another_grammar_are_computed() -> None:
    other = grammar_text() + "\n// changed\n"
    assert tables.kept_tables(other) is None


def test_without_kept_tables_they_are_computed(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(tables, "KEPT", tmp_path / "none.json")
    assert tables.kept_tables(grammar_text()) is None
    assert tables.tables().productions


def test_a_production_of_several_parts_needs_an_alias() -> None:
    with pytest.raises(ValueError, match="needs an alias"):
        tables.computed_tables('start: A A\nA: "a"\n')


def test_parsing_does_not_load_the_parser_generator() -> None:
    program = "import sys; from eqsheet.syntax.parse import parsed_text; parsed_text('x = 1'); print('lark' in sys.modules)"
    run = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, check=True)
    assert run.stdout == "False\n"


def test_grammar_folder_is_found() -> None:
    assert (grammar_folder() / "eqsheet.lark").is_file()
