"""The examples of a Markdown file: its first worksheet, and console blocks run beside it.

``python tests/app/readme_examples.py`` rewrites the output shown in README.md and DEVELOPERS.md.
"""

from __future__ import annotations

import io
import os
import re
import shlex
import sys
import tempfile
from contextlib import chdir, redirect_stderr, redirect_stdout
from pathlib import Path
from unittest.mock import patch

from eqsheet.app.main import main

ROOT = Path(__file__).resolve().parents[2]
PAGES = ("README.md", "DEVELOPERS.md")
CONSOLE = re.compile(r"```console\n(.*?)```\n", re.DOTALL)
WORKSHEET = re.compile(r"Save this as `([\w.]+)`:\n\n```eqsheet\n(.*?)```\n", re.DOTALL)


def worksheets(page: str) -> dict[str, str]:
    """The worksheets that a page asks to be saved, by file name."""
    return dict(WORKSHEET.findall(page))


def consoles(page: str) -> list[str]:
    """The console blocks of a page, each with commands and what they print."""
    return CONSOLE.findall(page)


def with_output(page: str) -> str:
    """The page with what its commands print now."""
    files = worksheets(page)

    def again(match: re.Match[str]) -> str:
        commands = [line[2:] for line in match[1].splitlines() if line.startswith("$ ")]
        return "```console\n" + "".join(f"$ {c}\n{output_of(c, files)}" for c in commands) + "```\n"

    return CONSOLE.sub(again, page)


def output_of(command: str, files: dict[str, str]) -> str:
    """What a command prints in a folder with the files: standard output, then standard error."""
    program, *arguments = shlex.split(command)
    if program != "eqsheet":
        raise ValueError(f"{command} is no command of ours")
    out, err = io.StringIO(), io.StringIO()
    with (
        patch.dict(os.environ, COLUMNS="100"),
        tempfile.TemporaryDirectory() as folder,
        chdir(folder),
        redirect_stdout(out),
        redirect_stderr(err),
    ):
        for name, text in files.items():
            Path(name).write_text(text, encoding="utf-8")
        main(arguments)
    return (out.getvalue() + err.getvalue()).rstrip("\n") + "\n"


if __name__ == "__main__":
    for name in PAGES:
        file = ROOT / name
        file.write_text(with_output(file.read_text(encoding="utf-8")), encoding="utf-8")
        print(f"{file.name}: output brought up to date", file=sys.stderr)
