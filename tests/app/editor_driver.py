"""Runs an editing session with scripted answers and gathers what it says."""

from __future__ import annotations

from collections.abc import Iterable

from eqsheet.app.editor.printer import Printer
from eqsheet.app.editor.session import Session
from eqsheet.diagnostics.terminal import PLAIN
from eqsheet.live.document import EditedWorksheet, open_text
from eqsheet.live.journal import Journal
from eqsheet.syntax.read import TextFile

CTRL_C, CTRL_D = "^C", "^D"


class ScriptedPrompter:
    """Answers in order; remembers what was brought up."""

    def __init__(self, answers: Iterable[str], brings_up: bool = True) -> None:
        self.brings_up = brings_up
        self._answers = iter(answers)
        self.asked: list[tuple[str, str]] = []

    def ask(self, prompt: str, text: str = "", cursor: int = 0) -> str:
        assert 0 <= cursor <= len(text)
        self.asked.append((prompt, text))
        return self._next()

    def choose(self, question: str) -> str:
        self.asked.append((question, ""))
        return self._next()

    def _next(self) -> str:
        answer = next(self._answers, None)
        assert answer is not None, "the script has ended and the editor still asks"
        if answer == CTRL_C:
            raise KeyboardInterrupt
        if answer == CTRL_D:
            raise EOFError
        return answer


class Driven:
    """A finished session: its document, exit status, all it said, and what it asked."""

    def __init__(self, path: str, answers: Iterable[str], brings_up: bool = True, height: int = 60) -> None:
        file = open_text(path)
        assert isinstance(file, TextFile)
        self.document = EditedWorksheet(file, path, Journal(path))
        said: list[str] = []
        self.prompter = ScriptedPrompter(answers, brings_up)
        printer = Printer(said.append, PLAIN, lambda: 100, lambda: height)
        self.status = Session(self.document, printer, self.prompter).run()
        self.said = "\n".join(said)
        self.asked = self.prompter.asked
