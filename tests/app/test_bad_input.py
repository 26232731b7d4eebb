"""Input that is no worksheet, or far too much of one: one clear line, the right status, bounded time and memory."""

from __future__ import annotations

import resource
import subprocess
import time
from pathlib import Path

import pytest
from running import COMMAND, environment

from eqsheet.app.main import main
from eqsheet.worksheet.load import UnreadableFile

# Far above what is needed, far below what a runaway would take.
MEMORY = 2 * 1024**3
SECONDS = 60.0

LONG = {
    "a line of 100,000 digits": ("x = " + "1" * 100_000, "statement-too-long"),
    "a line of 100,000 characters": ("x = " + " + ".join(["1 m"] * 16_700), "statement-too-long"),
    "10,000 brackets": ("x = " + "(" * 10_000 + "1" + ")" * 10_000, "statement-too-long"),
    "5,000 brackets": ("x = " + "(" * 5_000 + "1" + ")" * 5_000, "nested-too-deeply"),
    "10,000 brackets left open": ("x = " + "(" * 10_000, "nested-too-deeply"),
    "10,000 signs": ("x = " + "-" * 10_000 + "1", "nested-too-deeply"),
    "3,000 powers": ("x = " + "2^" * 3_000 + "1", "nested-too-deeply"),
    "3,000 signs between brackets": ("x = " + "(1 -" * 3_000 + "1" + ")" * 3_000, "nested-too-deeply"),
    "1,000 conditions": ("x = " + "if 1 < 2 then 1 else " * 900 + "1", "nested-too-deeply"),
    "a number too large": ("x = 1e400", "number-out-of-range"),
    "a number too small": ("x = 1e-400 m", "number-out-of-range"),
    "a number of 5,000 digits": ("x = " + "9" * 5_000, "number-out-of-range"),
    "a number that would lose digits": ("x = 1.23e-320", "number-out-of-range"),
    "a number that would lose digits in SI": ("x = 1e-300 nm^2", "number-out-of-range"),
    "a number too large in SI": ("x = 1e308 km", "number-too-large"),
    "a comment of 100,000 characters": ("# " + "a" * 100_000, "empty-worksheet"),
    "100,000 empty lines": ("\n" * 100_000, "empty-worksheet"),
    "more statements than are read": ("".join(f"x{i} = 1\n" for i in range(150_000)), "too-many-statements"),
    "50,000 broken lines": ("x = (\n" * 50_000, "too-many-broken"),
    "an exponent that is huge": ("x = 2^(2^(2^(2^(2^2))))", "value-not-finite"),
}


@pytest.mark.parametrize("case", LONG)
def test_too_much_is_refused_at_once(tmp_path: Path, case: str, capsys: pytest.CaptureFixture[str]) -> None:
    text, code = LONG[case]
    path = tmp_path / "page.eqsheet"
    path.write_text(text, encoding="utf-8")
    begin = time.perf_counter()
    assert main(["solve", str(path)]) == 3
    assert time.perf_counter() - begin < SECONDS
    err = capsys.readouterr().err
    assert f"[{code}]" in err
    assert max(map(len, err.splitlines())) < 500


def limited(text: bytes, path: Path) -> subprocess.CompletedProcess[bytes]:
    """The program on a file of its own, with a bound on memory."""
    path.write_bytes(text)
    return subprocess.run(
        [*COMMAND, "solve", path.name],
        capture_output=True,
        cwd=path.parent,
        env=environment(OPENBLAS_NUM_THREADS="1"),
        timeout=SECONDS,
        preexec_fn=lambda: resource.setrlimit(resource.RLIMIT_AS, (MEMORY, MEMORY)),
        check=False,
    )


@pytest.mark.parametrize(
    ("text", "message"),
    [
        (b"x = 1 m\n" * 1_250_000, b"it is larger than 8 MB"),
        (bytes(range(256)) * 4_000, b"it is a binary file, not text"),
        (b"x = 1 m # caf\xe9\n", b"it is not UTF-8 text (line 1)"),
    ],
    ids=["10 MB", "binary", "another encoding"],
)
def test_no_worksheet(tmp_path: Path, text: bytes, message: bytes) -> None:
    begin = time.perf_counter()
    done = limited(text, tmp_path / "page.eqsheet")
    assert time.perf_counter() - begin < SECONDS
    assert (done.returncode, done.stdout) == (66, b"")
    first, *more = done.stderr.splitlines()
    assert first.startswith(b"page.eqsheet: error: cannot read page.eqsheet: ")
    assert message in first
    assert all(line.startswith(b"  help: ") or not line for line in more)


def test_a_large_text_takes_bounded_memory(tmp_path: Path) -> None:
    done = limited(b"x = (\n" * 200_000, tmp_path / "page.eqsheet")
    assert done.returncode == 3
    assert b"Traceback" not in done.stderr


def test_a_file_that_vanishes(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    path = tmp_path / "page.eqsheet"
    path.write_text("x = 1 m\n", encoding="utf-8")
    path.unlink()
    assert main(["solve", str(path)]) == 66
    assert "there is no such file" in capsys.readouterr().err


def test_no_permission(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    def refuse(*_: object, **__: object) -> None:
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr("builtins.open", refuse)
    assert main(["solve", "page.eqsheet"]) == 66
    assert (
        capsys.readouterr().err.splitlines()[0] == "page.eqsheet: error: cannot read page.eqsheet: "
        "there is no permission to read it [unreadable-file]"
    )


def test_a_name_that_is_no_name(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["solve", "a\0b.eqsheet"]) == 66
    assert "this is no name of a file" in capsys.readouterr().err


def test_a_device_that_never_ends() -> None:
    """A name of an endless file is refused for its size, or for what it holds."""
    import eqsheet

    with pytest.raises(UnreadableFile):
        eqsheet.load("/dev/zero")
