"""Where answers come from: a terminal with line editing, or plain lines of standard input."""

from __future__ import annotations

import re
import sys
from collections.abc import Callable
from typing import TYPE_CHECKING, Protocol, TextIO

from eqsheet.app.editor.incomplete import is_incomplete

if TYPE_CHECKING:
    from prompt_toolkit import PromptSession
    from prompt_toolkit.completion import Completer
    from prompt_toolkit.input import Input
    from prompt_toolkit.output import Output

# What a paste may bring and a text file must not hold.
_CONTROL = re.compile(r"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f]")


class Prompter(Protocol):
    """Asks for a text.

    Attributes
    ----------
    brings_up : bool
        Whether a text can be brought up for editing; else it is only shown.
    """

    brings_up: bool

    def ask(self, prompt: str, text: str = "", cursor: int = 0) -> str:
        """A statement or a command, `text` brought up first with the cursor at that place.

        Raises
        ------
        EOFError
            Ctrl-D, or there is no more input.
        KeyboardInterrupt
            Ctrl-C.
        """

    def choose(self, question: str) -> str:
        """The answer to a question, in small letters; same exceptions."""


class TerminalPrompter:
    """A terminal with line editing, completion by Tab, and history."""

    brings_up = True

    def __init__(
        self, completer: Completer, device: Input | None = None, screen: Output | None = None
    ) -> None:
        from prompt_toolkit import PromptSession
        from prompt_toolkit.filters import Condition
        from prompt_toolkit.history import InMemoryHistory
        from prompt_toolkit.lexers import DynamicLexer
        from prompt_toolkit.styles import Style

        from eqsheet.app.editor.lexer import WorksheetLexer

        session: PromptSession[str]
        self._session = session = PromptSession(
            history=InMemoryHistory(),
            completer=completer,
            complete_while_typing=False,
            lexer=DynamicLexer(WorksheetLexer),
            style=Style.from_dict({"keyword": "bold", "comment": "italic"}),
            multiline=Condition(lambda: is_incomplete(session.default_buffer.text)),
            prompt_continuation=lambda width, number, wrapped: " " * width,
            input=device,
            output=screen,
        )
        self._questions: PromptSession[str] = PromptSession(input=device, output=screen)

    def ask(self, prompt: str, text: str = "", cursor: int = 0) -> str:
        """See `Prompter`."""
        from prompt_toolkit.document import Document

        return clean(self._session.prompt(prompt, default=Document(text, cursor)))

    def choose(self, question: str) -> str:
        """See `Prompter`."""
        return self._questions.prompt(question + " ").strip().lower()


class PlainPrompter:
    """Lines of a stream, for scripts and for terminals that can do no more."""

    brings_up = False

    def __init__(self, stream: TextIO, write: Callable[[str], None], echo: bool) -> None:
        self._stream = stream
        self._write = write
        self._echo = echo

    def ask(self, prompt: str, text: str = "", cursor: int = 0) -> str:
        """See `Prompter`."""
        lines = [self._line(prompt)]
        while is_incomplete("\n".join(lines)):
            try:
                lines.append(self._line(" " * len(prompt)))
            except EOFError:
                break
        return clean("\n".join(lines))

    def choose(self, question: str) -> str:
        """See `Prompter`."""
        return self._line(question + " ").strip().lower()

    def _line(self, prompt: str) -> str:
        self._write(prompt)
        try:
            line = self._stream.readline()
        except KeyboardInterrupt:
            self._write("\n")
            raise
        if self._echo:
            # A script's input is not on the screen; with it the output reads like a session.
            self._write(line if line.endswith("\n") else line + "\n")
        if not line:
            raise EOFError
        return line.rstrip("\r\n")


def clean(text: str) -> str:
    """`text` without what no worksheet may hold: control characters and broken encoding.

    >>> clean("D = 5\\x00 mm\\r\\n# a")
    'D = 5 mm\\n# a'
    """
    text = text.replace("\r\n", "\n").replace("\r", "\n")
    return _CONTROL.sub("", text).encode("utf-8", "replace").decode("utf-8")


def for_this_terminal(completer: Callable[[], Completer]) -> Prompter:
    """The prompter for standard input and output as they are."""
    import os

    interactive = sys.stdin.isatty() and sys.stdout.isatty()
    if interactive and os.environ.get("TERM", "dumb") != "dumb":
        return TerminalPrompter(completer())

    def write(text: str) -> None:
        sys.stdout.write(text)
        sys.stdout.flush()

    return PlainPrompter(sys.stdin, write, echo=not sys.stdin.isatty())
