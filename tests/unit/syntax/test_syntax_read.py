"""Files are read as text, or a diagnostic says why not."""

from __future__ import annotations

import io
import sys
from pathlib import Path

import pytest

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.syntax import read
from eqsheet.syntax.read import TextFile, decoded, read_source


def refused(found: TextFile | Diagnostic) -> str:
    assert isinstance(found, Diagnostic)
    assert found.code == "unreadable-file"
    assert "\n" not in found.message
    return found.message


def test_text_with_mark_and_carriage_returns_goes_back_as_it_was(tmp_path: Path) -> None:
    content = b"\xef\xbb\xbfx = 1\r\ny = \xc2\xb5\r\n"
    path = tmp_path / "a.eqsheet"
    path.write_bytes(content)
    source = read_source(str(path))
    assert isinstance(source, TextFile)
    assert source.text == "x = 1\ny = \u00b5\n"
    assert source.carriage_returns
    assert source.byte_order_mark
    assert source.encoded(source.text) == content


def test_plain_text_goes_back_as_it_was() -> None:
    source = decoded("a", b"x = 1\n")
    assert isinstance(source, TextFile)
    assert source.encoded(source.text) == b"x = 1\n"


def test_standard_input(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(b"x = 1")))
    source = read_source("-")
    assert isinstance(source, TextFile)
    assert (source.name, source.text) == ("<stdin>", "x = 1")


def test_empty_file_is_an_empty_text(tmp_path: Path) -> None:
    (tmp_path / "a").write_bytes(b"")
    source = read_source(str(tmp_path / "a"))
    assert isinstance(source, TextFile)
    assert source.text == ""


def test_what_cannot_be_read_is_said(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    assert "no such file" in refused(read_source(str(tmp_path / "none")))
    assert "directory" in refused(read_source(str(tmp_path)))
    assert "no name of a file" in refused(read_source("a\x00b"))
    assert "binary" in refused(decoded("a", b"x = 1\x00\x01"))
    assert "UTF-8 text (line 2)" in refused(decoded("a", b"x = 1\ny = \xe9"))
    monkeypatch.setattr(read, "LARGEST_FILE", 10)
    (tmp_path / "big").write_bytes(b"x" * 11)
    assert "larger than" in refused(read_source(str(tmp_path / "big")))


@pytest.mark.parametrize(
    "failure", [PermissionError(13, "Permission denied"), OSError(5, "Input/output error")]
)
def test_failures_of_the_system_are_said(failure: OSError, monkeypatch: pytest.MonkeyPatch) -> None:
    def fail(path: str) -> bytes:
        raise failure

    monkeypatch.setattr(read, "_content", fail)
    message = refused(read_source("a"))
    assert "permission" in message or "input/output error" in message
