"""What README.md and DEVELOPERS.md show is what the program prints, and what they promise is there."""

from __future__ import annotations

import doctest
import re
from pathlib import Path

import pytest
from readme_examples import PAGES, ROOT, consoles, with_output, worksheets

README = (ROOT / "README.md").read_text(encoding="utf-8")


@pytest.mark.parametrize("name", PAGES)
def test_the_output_shown_is_the_program_s(name: str) -> None:
    """Brought up to date by ``python tests/app/readme_examples.py``; read the difference before committing it."""
    page = (ROOT / name).read_text(encoding="utf-8")
    assert consoles(page)
    assert with_output(page) == page


def test_the_python_example(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    for name, text in worksheets(README).items():
        (tmp_path / name).write_text(text, encoding="utf-8")
    example = "\n".join(re.findall(r"```python\n(.*?)```", README, re.DOTALL))
    test = doctest.DocTestParser().get_doctest(example, {}, "README", "README.md", 0)
    assert test.examples
    assert doctest.DocTestRunner().run(test).failed == 0


@pytest.mark.parametrize("name", PAGES)
def test_files_named_are_there(name: str) -> None:
    page = (ROOT / name).read_text(encoding="utf-8")
    named = set(re.findall(r"\b(?:eqsheet|grammar|samples|tests)/[\w./]*\w", page))
    assert named
    assert sorted(path for path in named if not (ROOT / path).exists()) == []


def test_exit_statuses_are_those_of_the_program() -> None:
    from eqsheet.app import exit_status

    rows = {int(number) for number in re.findall(r"^\| (\d+) \|", README, re.MULTILINE)}
    constants = {
        value for name, value in vars(exit_status).items() if name.isupper() and isinstance(value, int)
    }
    assert rows == constants


def test_there_is_one_line_that_runs_the_tests() -> None:
    """The checks of a change run this very line."""
    (line,) = re.findall(r"^python3 -m venv .*pytest.*$", README, re.MULTILINE)
    assert ".[tests]" in line


def test_the_tour_of_the_pipeline() -> None:
    page = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    example = "\n".join(re.findall(r"```python\n(.*?)```", page, re.DOTALL))
    names = {"worksheets": worksheets(page)}
    test = doctest.DocTestParser().get_doctest(example, names, "DEVELOPERS", "DEVELOPERS.md", 0)
    assert len(test.examples) > 10
    assert doctest.DocTestRunner().run(test).failed == 0
