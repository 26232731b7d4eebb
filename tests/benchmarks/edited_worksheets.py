"""Worksheets for timing edits: one loop of twenty coupled equations, and fifty such loops side by side."""

from __future__ import annotations

from measure import LOOP

from eqsheet.app.editor.actions import Actions
from eqsheet.app.editor.keeping import Keeper
from eqsheet.app.editor.printer import Printer
from eqsheet.app.editor.prompter import PlainPrompter
from eqsheet.app.editor.words import understood
from eqsheet.diagnostics.source import Source
from eqsheet.diagnostics.terminal import PLAIN
from eqsheet.live.document import EditedWorksheet
from eqsheet.syntax.nodes import Reference
from eqsheet.syntax.parse import parse_document
from eqsheet.syntax.read import TextFile
from eqsheet.syntax.walk import walk


def loops(count: int) -> str:
    """`count` copies of the loop, each with names of its own: twenty equations each."""
    text = LOOP.read_text(encoding="utf-8")
    # Pipes of different length, so that no loop has the solution of another.
    return "\n".join(
        _renamed(text.replace("120 m ", f"{119 + i} m "), f"_{i:02}") for i in range(1, count + 1)
    )


def _renamed(text: str, ending: str) -> str:
    """The worksheet with `ending` after every name of a quantity."""
    document, found = parse_document(Source("loop", text))
    assert not found
    ends = [
        statement.line.offset + node.end
        for statement in document.statements
        for node in walk(statement.node)
        if isinstance(node, Reference) and node.name != "pi"
    ]
    for end in sorted(set(ends), reverse=True):
        text = text[:end] + ending + text[end:]
    return text


class Shown:
    """An edited worksheet whose every answer is written to memory, as the editor would write it to the screen."""

    def __init__(self, text: str) -> None:
        self.document = EditedWorksheet(TextFile("edited", text), "edited")
        assert self.document.solution.solved, self.document.solution.diagnostics
        self.said: list[str] = []
        printer = Printer(self.said.append, PLAIN, lambda: 100, lambda: 40)
        prompter = PlainPrompter(None, self.said.append, echo=False)  # type: ignore[arg-type]  # never asked
        self._actions = Actions(self.document, printer, prompter, Keeper(self.document, printer, prompter))

    def type(self, text: str) -> str:
        """Type a statement; what is said to it."""
        self.said.clear()
        self._actions.do(understood(text, ()))
        return "\n".join(self.said)
