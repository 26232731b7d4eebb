"""The program as a process: pipes, interrupts, streams that take nothing, colours."""

from __future__ import annotations

import os
import pty
import signal
import subprocess
import time
from pathlib import Path

import pytest
from running import COMMAND, environment, run

LONG = "".join(f"x{i} = {i} m\n" for i in range(4000))
WARNED = "Nu = 0.023*Re^0.8 valid Re > 1e4\nRe = 5000\n"


@pytest.fixture
def warned(tmp_path: Path) -> Path:
    path = tmp_path / "warned.eqsheet"
    path.write_text(WARNED, encoding="utf-8")
    return path


def test_a_reader_that_leaves(tmp_path: Path) -> None:
    """As in ``eqsheet solve long.eqsheet | head -c 1``, with more output than a pipe holds."""
    (tmp_path / "long.eqsheet").write_text(LONG, encoding="utf-8")
    process = subprocess.Popen(
        [*COMMAND, "solve", "long.eqsheet", "--json"],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        cwd=tmp_path,
        env=environment(),
    )
    assert process.stdout is not None
    assert process.stderr is not None
    assert process.stdout.read(1) == b"{"
    process.stdout.close()
    assert process.stderr.read() == b"eqsheet: output cannot be written: its reader has gone\n"
    assert process.wait(60) == 73


def test_a_device_that_is_full(warned: Path) -> None:
    with open("/dev/full", "wb") as full:
        done = subprocess.run(
            [*COMMAND, "solve", str(warned), "--json"],
            stdout=full,
            stderr=subprocess.PIPE,
            env=environment(),
            timeout=60,
            check=False,
        )
    assert done.returncode == 73
    assert done.stderr == b"eqsheet: output cannot be written: No space left on device\n"


@pytest.mark.parametrize(("closed", "status"), [(1, 73), (2, 0)], ids=["standard output", "standard error"])
def test_a_stream_that_is_closed(warned: Path, closed: int, status: int) -> None:
    done = subprocess.run(
        ["sh", "-c", f'exec "$@" {closed}>&-', "sh", *COMMAND, "solve", str(warned), "--json"],
        capture_output=True,
        env=environment(),
        timeout=60,
        check=False,
    )
    assert done.returncode == status
    expected = b"eqsheet: output cannot be written: standard output is closed\n" if closed == 1 else b""
    assert done.stderr == expected
    assert done.stdout.startswith(b"{") == (closed == 2)


def test_standard_input_that_is_closed() -> None:
    done = subprocess.run(
        ["sh", "-c", 'exec "$@" <&-', "sh", *COMMAND, "solve", "-"],
        capture_output=True,
        env=environment(),
        timeout=60,
        check=False,
    )
    assert done.returncode == 66
    assert done.stderr.startswith(b"<stdin>: error: cannot read <stdin>: ")


def test_an_interrupt_while_solving(tmp_path: Path, warned: Path) -> None:
    """The warning of the first file says that the program is at work; the second takes many seconds."""
    slow = tmp_path / "slow.eqsheet"
    slow.write_text("".join(f"x{i} = x{i + 1} + 1 m\n" for i in range(60_000)), encoding="utf-8")
    process = subprocess.Popen(
        [*COMMAND, "solve", str(warned), str(slow)],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        env=environment(),
    )
    assert process.stderr is not None
    assert b"[outside-validity]" in process.stderr.readline()
    time.sleep(0.3)
    process.send_signal(signal.SIGINT)
    rest = process.stderr.read()
    assert process.wait(60) == 130
    assert rest.endswith(b"\neqsheet: interrupted\n")
    assert b"Traceback" not in rest


def on_a_terminal(warned: Path, **changes: str) -> bytes:
    """What the program writes to standard error where that is a terminal."""
    outside, inside = pty.openpty()
    process = subprocess.Popen(
        [*COMMAND, "solve", str(warned)],
        stdout=subprocess.DEVNULL,
        stderr=inside,
        env=environment(**{"TERM": "xterm", "NO_COLOR": "", **changes}),
    )
    os.close(inside)
    assert process.wait(60) == 0
    written = os.read(outside, 10_000)
    os.close(outside)
    return written


def test_colour_on_a_terminal(warned: Path) -> None:
    assert b"\x1b[1;33mwarning\x1b[0m" in on_a_terminal(warned)


def test_no_colour_where_it_is_not_wanted(warned: Path) -> None:
    assert b"\x1b" not in on_a_terminal(warned, NO_COLOR="1")
    assert b"\x1b" not in run("solve", str(warned), NO_COLOR="").stderr


def test_an_encoding_without_the_signs(tmp_path: Path) -> None:
    """A terminal that knows ASCII only gets escapes, not a failure."""
    path = tmp_path / "greek.eqsheet"
    path.write_text("η = 0.8 # Wirkungsgrad für Öl\nx = η*2\n", encoding="utf-8")
    done = run("solve", str(path), PYTHONIOENCODING="ascii")
    assert done.returncode == 0
    assert b"\\u03b7" in done.stdout


def test_a_name_of_a_file_that_is_no_text(tmp_path: Path) -> None:
    name = os.fsdecode(b"caf\xe9.eqsheet")
    assert run("solve", name, cwd=tmp_path).returncode == 66
    (tmp_path / name).write_text("x = 1 m\n", encoding="utf-8")
    assert run("solve", name, cwd=tmp_path).returncode == 0
    assert run("solve", name, "--json", cwd=tmp_path).returncode == 0
