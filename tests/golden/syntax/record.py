"""Writes what the syntax layer says of the pages in this folder; run it after a change and read the difference.

python tests/golden/syntax/record.py
"""

from __future__ import annotations

from pathlib import Path

from eqsheet.syntax.format import format_document
from eqsheet.syntax.parse import parse_document
from eqsheet.syntax.read import TextFile, decoded

FOLDER = Path(__file__).parent


def page(path: Path) -> TextFile:
    """The page at `path`, named without its folder."""
    source = decoded(path.name, path.read_bytes())
    assert isinstance(source, TextFile)
    return source


def messages(path: Path) -> str:
    """All diagnostics of a page, two lines each."""
    lines = []
    for diagnostic in parse_document(page(path))[1]:
        span = diagnostic.span
        assert span is not None
        lines.append(f"{span.line}:{span.column} {span.text!r} {diagnostic.code}: {diagnostic.message}")
        lines.append(f"    {diagnostic.help}")
    return "\n".join(lines) + "\n"


def tidy(path: Path) -> str:
    """A page in canonical layout."""
    return format_document(page(path))


RECORDINGS = {
    "slips.messages": lambda: messages(FOLDER / "slips.eqsheet"),
    "untidy.messages": lambda: messages(FOLDER / "untidy.eqsheet"),
    "untidy.tidy": lambda: tidy(FOLDER / "untidy.eqsheet"),
}

if __name__ == "__main__":
    for name, recording in RECORDINGS.items():
        (FOLDER / name).write_text(recording(), encoding="utf-8")
