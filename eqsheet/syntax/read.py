"""Files to sources: reading with every failure a diagnostic."""

from __future__ import annotations

import os
import stat
import sys
from dataclasses import dataclass

from eqsheet.diagnostics.diagnostic import Diagnostic, Severity
from eqsheet.diagnostics.source import Source
from eqsheet.syntax.bounds import LARGEST_FILE

_MARK = b"\xef\xbb\xbf"


@dataclass(frozen=True)
class TextFile(Source):
    """A source with what is needed to write its file back as it was.

    Attributes
    ----------
    carriage_returns : bool
        Lines end in ``\\r\\n``.
    byte_order_mark : bool
        The file begins with one.
    """

    carriage_returns: bool = False
    byte_order_mark: bool = False

    def encoded(self, text: str) -> bytes:
        """`text` as bytes with this file's line ends and byte order mark."""
        if self.carriage_returns:
            text = text.replace("\n", "\r\n")
        return (_MARK if self.byte_order_mark else b"") + text.encode("utf-8")


def read_source(path: str) -> TextFile | Diagnostic:
    """The text of the file at `path`, or of standard input where `path` is ``-``.

    Gives a diagnostic of code ``unreadable-file`` where there is no text to be had: no such file, a
    directory, no permission, larger than the bound, or not UTF-8 text.
    """
    name = "<stdin>" if path == "-" else path
    try:
        content = _content(path)
    except OSError as failure:
        return _unreadable(name, _reason(failure))
    except ValueError:  # a path with a null character in it
        return _unreadable(name, "this is no name of a file")
    if len(content) > LARGEST_FILE:
        return _unreadable(
            name,
            f"it is larger than {LARGEST_FILE // 1024**2} MB",
            "a worksheet reads its data from CSV files",
        )
    return decoded(name, content)


def read_regular_file(path: str) -> TextFile | Diagnostic:
    """The text of a file that a worksheet names: as `read_source`, of a file on disk only.

    A pipe or a device may never come to an end, and opening a pipe waits for somebody to write to it.
    """
    try:
        mode = os.stat(path).st_mode
    except (OSError, ValueError):
        return read_source(path)
    if not (stat.S_ISREG(mode) or stat.S_ISDIR(mode)):
        return _unreadable(path, "it is a pipe or a device, not a file")
    return read_source(path)


def decoded(name: str, content: bytes) -> TextFile | Diagnostic:
    """The source that `content`, the bytes of a file, holds, or a diagnostic where it is not text."""
    marked = content.startswith(_MARK)
    if b"\x00" in content:
        return _unreadable(name, "it is a binary file, not text")
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError as failure:
        line = content.count(b"\n", 0, failure.start) + 1
        return _unreadable(name, f"it is not UTF-8 text (line {line})", "save it with the encoding UTF-8")
    carriage_returns = "\r\n" in text
    text = text.replace("\r\n", "\n").replace("\r", "\n")
    return TextFile(name, text, carriage_returns=carriage_returns, byte_order_mark=marked)


def _content(path: str) -> bytes:
    if path == "-":
        if sys.stdin is None:
            raise OSError("standard input is closed")
        return sys.stdin.buffer.read(LARGEST_FILE + 1)
    with open(path, "rb") as file:
        if stat.S_ISDIR(os.fstat(file.fileno()).st_mode):
            raise IsADirectoryError
        return file.read(LARGEST_FILE + 1)


def _reason(failure: OSError) -> str:
    if isinstance(failure, FileNotFoundError):
        return "there is no such file"
    if isinstance(failure, IsADirectoryError):
        return "it is a directory"
    if isinstance(failure, PermissionError):
        return "there is no permission to read it"
    return (failure.strerror or str(failure) or type(failure).__name__).lower()


def _unreadable(name: str, reason: str, help: str = "") -> Diagnostic:
    return Diagnostic(
        "unreadable-file", Severity.ERROR, f"cannot read {name}: {reason}", (), (), help, file=name
    )
