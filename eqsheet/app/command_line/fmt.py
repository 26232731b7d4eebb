"""``eqsheet fmt``: tidy text, written back in one step or not at all."""

from __future__ import annotations

import sys
from collections.abc import Sequence

from eqsheet.app import exit_status
from eqsheet.app.command_line.output import print_diagnostics
from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.live.files import write_atomically
from eqsheet.syntax.format import format_document
from eqsheet.syntax.parse import parse_document
from eqsheet.syntax.read import TextFile, read_source


def run_fmt(files: Sequence[str]) -> int:
    """Tidy each file in place; ``-`` goes from standard input to standard output."""
    return exit_status.worst([_tidy(file) for file in files])


def run_fmt_check(files: Sequence[str]) -> int:
    """Name the files that are not tidy, and change nothing; 1 if there is one."""
    return exit_status.worst([_check(file) for file in files])


def _read(file: str) -> tuple[TextFile, str] | int:
    source = read_source(file)
    if isinstance(source, Diagnostic):
        print_diagnostics([source])
        return exit_status.UNREADABLE
    return source, format_document(source)


def _tidy(file: str) -> int:
    found = _read(file)
    if isinstance(found, int):
        return found
    source, text = found
    if file == "-":
        sys.stdout.buffer.write(source.encoded(text))
    elif text != source.text:
        try:
            write_atomically(file, source.encoded(text))
        except OSError as trouble:
            print(f"eqsheet: {file} cannot be written: {trouble.strerror or trouble}", file=sys.stderr)
            return exit_status.UNWRITABLE
    # Broken lines are left as they are, and said to be so.
    diagnostics = parse_document(source)[1]
    print_diagnostics(diagnostics)
    return exit_status.INVALID if diagnostics else exit_status.SOLVED


def _check(file: str) -> int:
    found = _read(file)
    if isinstance(found, int):
        return found
    source, text = found
    diagnostics = parse_document(source)[1]
    print_diagnostics(diagnostics)
    tidy = text == source.text
    if not tidy:
        print(f"{source.name}: not tidy")
    if diagnostics:
        return exit_status.INVALID
    return exit_status.SOLVED if tidy else exit_status.OUTSIDE_LIMITS
