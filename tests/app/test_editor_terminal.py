"""The editor on a terminal: with scripted keys and a dummy screen, with standard input, and once for real."""

from __future__ import annotations

import os
import shlex
import shutil
import subprocess
import sys
import threading
import time
from pathlib import Path

import pytest
from prompt_toolkit.input import create_pipe_input
from prompt_toolkit.output import DummyOutput

import eqsheet
from eqsheet.app.editor.completer import WorksheetCompleter
from eqsheet.app.editor.printer import Printer
from eqsheet.app.editor.prompter import TerminalPrompter
from eqsheet.app.editor.session import Session, names_of, units_of
from eqsheet.diagnostics.terminal import PLAIN
from eqsheet.live.document import EditedWorksheet, open_text
from eqsheet.live.journal import recovery_path
from eqsheet.syntax.read import TextFile

ROOT = Path(eqsheet.__file__).parents[1]
ENTER, TAB, CTRL_C, CTRL_D, BACKSPACE, UP = "\r", "\t", "\x03", "\x04", "\x7f", "\x1b[A"
PIPE = """\
D_pipe = 50 mm    # bore
v = Q/(pi*D_pipe^2/4)
Q = 3 L/s
"""


@pytest.fixture
def path(tmp_path):
    file = tmp_path / "pipe.eqsheet"
    file.write_text(PIPE)
    return str(file)


def typed(path, *keys):
    """Text of the file after a session with those keys, and what was said.

    Between two pieces of keys the editor has time to react, as it has with a person: completion and history
    do not wait for keys, and keys do not wait for them.
    """
    file = open_text(path)
    assert isinstance(file, TextFile)
    document = EditedWorksheet(file, path)
    said: list[str] = []
    printer = Printer(said.append, PLAIN, lambda: 100, lambda: 60)
    completer = WorksheetCompleter(lambda: names_of(document), lambda: units_of(document))
    with create_pipe_input() as device:
        hands = threading.Thread(target=_type_slowly, args=(device, keys))
        hands.start()
        prompter = TerminalPrompter(completer, device, DummyOutput())
        assert Session(document, printer, prompter).run() == 0
        hands.join()
    with open(path, encoding="utf-8") as stream:
        return stream.read(), "\n".join(said)


def _type_slowly(device, keys):
    for piece in keys:
        device.send_text(piece)
        time.sleep(1.0 if len(keys) > 1 else 0.0)
    device.close()  # so that a session that wants more keys ends, and does not wait for ever


def test_keys_change_a_known_and_save(path):
    text, said = typed(path, f"D_pipe = 60 mm{ENTER}save{ENTER}quit{ENTER}")
    assert text == PIPE.replace("50 mm", "60 mm")
    assert "1.52789  ->  1.06103  m/s" in said


def test_tab_completes_the_only_name(path):
    text, _ = typed(path, f"D_{TAB}", f" = 60 m{TAB}", f"m{ENTER}save{ENTER}quit{ENTER}")
    assert text == PIPE.replace("50 mm", "60 mm")


def test_line_brought_up_has_the_cursor_at_the_end_of_its_code(path):
    text, _ = typed(path, f"1{ENTER}{BACKSPACE * 5}70 mm{ENTER}save{ENTER}quit{ENTER}")
    assert text == PIPE.replace("50 mm", "70 mm")


def test_wrong_line_comes_back_with_the_cursor_behind_the_mistake(path):
    text, said = typed(path, f"D_pipe = 70 mmm{ENTER}{BACKSPACE}{ENTER}save{ENTER}quit{ENTER}")
    assert "unknown unit `mmm`" in said
    assert text == PIPE.replace("50 mm", "70 mm")


def test_statement_over_several_lines(path):
    text, _ = typed(path, f"w = (1 m +{ENTER}  2 m){ENTER}save{ENTER}quit{ENTER}")
    assert text == PIPE + "w = (1 m +\n  2 m)\n"


def test_ctrl_c_clears_the_line(path):
    text, _ = typed(path, f"D_pipe = 99{CTRL_C}Q = 4 L/s{ENTER}save{ENTER}quit{ENTER}")
    assert text == PIPE.replace("3 L/s", "4 L/s")


def test_ctrl_d_asks_before_it_quits(path):
    text, _ = typed(path, f"Q = 4 L/s{ENTER}{CTRL_D}yes{ENTER}")
    assert text == PIPE.replace("3 L/s", "4 L/s")


def test_earlier_lines_are_brought_back_by_the_arrow(path):
    text, _ = typed(
        path, f"Q = 4 L/s{ENTER}v{ENTER}", f"{UP}{UP}", f"{BACKSPACE * 5}5 L/s{ENTER}save{ENTER}quit{ENTER}"
    )
    assert text == PIPE.replace("3 L/s", "5 L/s")


def test_control_characters_of_a_paste_never_reach_the_file(path):
    text, _ = typed(path, f"\x1b[200~R = 5 mm\x00\x07\x1b[201~{ENTER}save{ENTER}quit{ENTER}")
    assert text == PIPE + "R = 5 mm\n"


def test_paste_of_several_lines_takes_in_each_statement(path):
    text, _ = typed(path, f"\x1b[200~Q = 4 L/s\nD_pipe = 60 mm\x1b[201~{ENTER}save{ENTER}quit{ENTER}")
    assert text == PIPE.replace("3 L/s", "4 L/s").replace("50 mm", "60 mm")


def run(path, script, **environment):
    return subprocess.run(
        [sys.executable, "-m", "eqsheet", "edit", path],
        input=script,
        capture_output=True,
        text=True,
        cwd=ROOT,
        env={**os.environ, **environment},
        timeout=60,
        check=False,
    )


@pytest.mark.parametrize("terminal", ["dumb", "xterm", ""])
def test_standard_input_is_a_script(path, terminal):
    done = run(path, "Q = 4 L/s\nw = (1 m +\n 2 m)\nw\nsave\nquit\n", TERM=terminal)
    assert (done.returncode, done.stderr) == (0, "")
    assert "w = 3 m  given, line 4" in done.stdout
    assert "\x1b" not in done.stdout
    with open(path, encoding="utf-8") as file:
        assert file.read() == PIPE.replace("3 L/s", "4 L/s") + "w = (1 m +\n 2 m)\n"


@pytest.mark.parametrize(
    "script",
    [
        "",
        "Q = 4 L/s",
        "quit",
        "Q = 4 L/s\nquit\n",
        "Q = (4 L/s\n",
        "12\n",
        "insert 1\n",
        "\x00\n",
        "\udcff\n",
    ],
)
def test_script_that_ends_anywhere_gives_no_traceback(path, script):
    done = subprocess.run(
        [sys.executable, "-m", "eqsheet", "edit", path],
        input=script.encode("utf-8", "surrogateescape"),
        capture_output=True,
        cwd=ROOT,
        timeout=60,
        check=False,
    )
    assert done.returncode == 0
    assert done.stderr == b""
    with open(path, encoding="utf-8") as file:
        assert file.read() == PIPE


class Screen:
    """A program running in a terminal of its own."""

    def __init__(self, folder, command):
        self._socket = str(folder / "tmux")
        self._tmux("new-session", "-d", "-x", "100", "-y", "40", "-c", str(ROOT), command)
        self._tmux("set-option", "-g", "remain-on-exit", "on")

    def _tmux(self, *arguments):
        done = subprocess.run(
            ["tmux", "-S", self._socket, "-f", "/dev/null", *arguments],
            capture_output=True,
            text=True,
            check=True,
        )
        return done.stdout

    def shows(self, text, within=30.0):
        """The screen once it shows `text`."""
        until = time.monotonic() + within
        while time.monotonic() < until:
            screen = self._tmux("capture-pane", "-p")
            if text in screen:
                return screen
            time.sleep(0.05)
        raise AssertionError(f"{text!r} does not appear on\n{screen}")

    def type(self, *keys):
        self._tmux("send-keys", *keys)

    def end(self):
        self._tmux("kill-server")


# The only test that may be left out: it needs a terminal multiplexer, which not every machine has, and all it
# checks but the terminal itself is checked above with scripted keys.
@pytest.mark.skipif(shutil.which("tmux") is None, reason="tmux is not installed")
@pytest.mark.parametrize("terminal", ["screen", "dumb"])
def test_session_in_a_real_terminal(path, tmp_path, terminal):
    command = [sys.executable, "-m", "eqsheet", "edit", path]
    screen = Screen(tmp_path, f"env TERM={terminal} {shlex.join(command)}; echo status $?; sleep 60")
    try:
        screen.shows("`help` shows what can be typed.")
        screen.type("Q = 4 L/s", "Enter")
        assert "Q  " in screen.shows("+33.3%")
        screen.type("D_pipe = = 3", "Enter")
        screen.shows("The values shown are those of before")
        screen.type("C-c")
        time.sleep(0.5)  # a terminal drops what is typed right after it
        screen.type("undo", "Enter")
        screen.shows("gone  D_pipe = = 3")
        assert os.path.exists(recovery_path(path))
        screen.type("save", "Enter")
        screen.shows("saved ")
        screen.type("quit", "Enter")
        screen.shows("status 0")
    finally:
        screen.end()
    with open(path, encoding="utf-8") as file:
        assert file.read() == PIPE.replace("3 L/s", "4 L/s")
    assert not os.path.exists(recovery_path(path))
