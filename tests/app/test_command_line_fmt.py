"""``eqsheet fmt``: the file as a whole, its line ends and marks, and writing in one step."""

from __future__ import annotations

import io
import os
from pathlib import Path

import pytest

from eqsheet.app.main import main
from eqsheet.diagnostics.source import Source
from eqsheet.syntax.format import format_document

UNTIDY = "D=52.5 mm#bore\nv  =  Q/( pi*D^2/4 )\n\n\n## Flow\nQ = 3 L/s\n"
TIDY = format_document(Source("untidy.eqsheet", UNTIDY))
MARK = b"\xef\xbb\xbf"


@pytest.fixture
def file(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    Path("untidy.eqsheet").write_bytes(UNTIDY.encode())
    return Path("untidy.eqsheet")


def test_the_example_is_untidy() -> None:
    assert TIDY != UNTIDY
    assert "v = Q/(pi*D^2/4)" in TIDY.splitlines()


def test_a_file_is_tidied_in_place(file: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["fmt", str(file)]) == 0
    assert file.read_text(encoding="utf-8") == TIDY
    assert capsys.readouterr() == ("", "")


def test_check_names_the_file_and_changes_nothing(file: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["fmt", "--check", str(file)]) == 1
    assert capsys.readouterr().out == "untidy.eqsheet: not tidy\n"
    assert file.read_bytes() == UNTIDY.encode()
    main(["fmt", str(file)])
    assert main(["fmt", "--check", str(file)]) == 0
    assert capsys.readouterr().out == ""


@pytest.mark.parametrize("mark", [b"", MARK], ids=["no mark", "byte order mark"])
@pytest.mark.parametrize("end", [b"\n", b"\r\n"], ids=["lf", "crlf"])
def test_line_ends_and_mark_are_kept(file: Path, mark: bytes, end: bytes) -> None:
    file.write_bytes(mark + UNTIDY.encode().replace(b"\n", end))
    assert main(["fmt", str(file)]) == 0
    assert file.read_bytes() == mark + TIDY.encode().replace(b"\n", end)


def test_a_tidy_file_is_not_written_at_all(file: Path) -> None:
    file.write_text(TIDY, encoding="utf-8", newline="")
    os.utime(file, ns=(10**18, 10**18))
    before = file.stat()
    assert main(["fmt", str(file)]) == 0
    after = file.stat()
    assert (after.st_mtime_ns, after.st_ino) == (before.st_mtime_ns, before.st_ino)


def test_standard_input_goes_to_standard_output(
    file: Path, monkeypatch: pytest.MonkeyPatch, capfdbinary: pytest.CaptureFixture[bytes]
) -> None:
    monkeypatch.setattr(
        "sys.stdin", io.TextIOWrapper(io.BytesIO(MARK + UNTIDY.replace("\n", "\r\n").encode()))
    )
    assert main(["fmt", "-"]) == 0
    assert capfdbinary.readouterr().out == MARK + TIDY.replace("\n", "\r\n").encode()


def test_permissions_and_a_symbolic_link_are_kept(file: Path) -> None:
    file.chmod(0o640)
    Path("link.eqsheet").symlink_to(file)
    assert main(["fmt", "link.eqsheet"]) == 0
    assert Path("link.eqsheet").is_symlink()
    assert file.read_text(encoding="utf-8") == TIDY
    assert file.stat().st_mode & 0o777 == 0o640


@pytest.mark.parametrize("step", ["os.replace", "os.fsync", "tempfile.mkstemp"])
def test_a_file_that_cannot_be_written_stays_as_it_was(
    file: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str], step: str
) -> None:
    def full(*_: object, **__: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(step, full)
    assert main(["fmt", str(file)]) == 73
    assert capsys.readouterr().err == "eqsheet: untidy.eqsheet cannot be written: No space left on device\n"
    assert os.listdir() == ["untidy.eqsheet"]
    assert file.read_bytes() == UNTIDY.encode()


def test_no_permission_to_write(
    file: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setattr("os.access", lambda *_: False)
    assert main(["fmt", str(file)]) == 73
    assert capsys.readouterr().err == "eqsheet: untidy.eqsheet cannot be written: Permission denied\n"
    assert os.listdir() == ["untidy.eqsheet"]


def test_a_broken_line_stays_and_is_reported_and_the_others_are_tidied(
    file: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    file.write_text("x=3 m\ny = (4\nz=5 m\n", encoding="utf-8")
    assert main(["fmt", str(file)]) == 3
    assert "y = (4" in file.read_text(encoding="utf-8").splitlines()
    assert "x = 3 m" in file.read_text(encoding="utf-8").splitlines()
    assert ":2:5: error: " in capsys.readouterr().err


def test_check_too_reports_a_broken_line(file: Path, capsys: pytest.CaptureFixture[str]) -> None:
    file.write_text("x=3 m\ny = (4\n", encoding="utf-8")
    assert main(["fmt", "--check", str(file)]) == 3
    shown = capsys.readouterr()
    assert shown.out == "untidy.eqsheet: not tidy\n"
    assert ":2:5: error: " in shown.err
    assert file.read_text(encoding="utf-8") == "x=3 m\ny = (4\n"


def test_of_several_files_the_worst_status(file: Path) -> None:
    assert main(["fmt", "missing.eqsheet", str(file)]) == 66
    assert file.read_text(encoding="utf-8") == TIDY
