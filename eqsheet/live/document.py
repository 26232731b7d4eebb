"""The edited worksheet: its lines, its solution, its history and its file."""

from __future__ import annotations

import os
from dataclasses import dataclass

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.diagnostics.source import Source
from eqsheet.live.files import FileState, state_of, write_atomically
from eqsheet.live.journal import Journal, Recovered
from eqsheet.live.lines import Edit, History, between
from eqsheet.live.moved import Moved, moved
from eqsheet.live.placing import pieces, placed, realigned, section_at, span_of_lines, statement_at
from eqsheet.model.lowered_cache import LoweredCache
from eqsheet.syntax.read import TextFile, read_source
from eqsheet.worksheet.block_memory import BlockMemory
from eqsheet.worksheet.prepare_changed import Unchanged
from eqsheet.worksheet.sheet import Worksheet, read
from eqsheet.worksheet.solution import Solution


class ChangedOnDisk(Exception):
    """The file is no longer what it was when it was read or saved; saving would overwrite somebody's work."""


@dataclass(frozen=True)
class Outcome:
    """What an edit has done.

    Attributes
    ----------
    edit : Edit
    solution : Solution
        Of the new text, solved or not.
    moved : Moved
        Against the last good solution; empty where the new text is not solved.
    """

    edit: Edit
    solution: Solution
    moved: Moved


class EditedWorksheet:
    """A worksheet while it is edited.

    Parameters
    ----------
    file : TextFile
        The text it starts from, and how its file is written.
    path : str
        Where it is saved.

    >>> sheet = EditedWorksheet(TextFile("pipe", "v = Q/A\\nQ = 3 L/s   # pump\\nA = 12 cm^2"), "pipe")
    >>> outcome = sheet.type("Q = 6 L/s")
    >>> outcome.edit.new
    ('Q = 6 L/s   # pump',)
    >>> [(c.new.name, round(c.old.value, 9), round(c.new.value, 9)) for c in outcome.moved.changes]
    [('Q', 3.0, 6.0), ('v', 2.5, 5.0)]
    >>> sheet.undo().edit.new
    ('Q = 3 L/s   # pump',)
    """

    def __init__(self, file: TextFile, path: str, journal: Journal | None = None) -> None:
        self.path = path
        self._file = file
        self._on_disk: FileState = state_of(path)
        self._journal = journal
        self._history = History()
        self._cache = LoweredCache()
        self._memory = BlockMemory()
        self._earlier: Unchanged | None = None
        text = file.text
        # A last line without an end is kept so; otherwise the split would show an empty line that is none.
        self._ends = text.endswith("\n") or not text
        self._lines: tuple[str, ...] = tuple(text.removesuffix("\n").split("\n")) if text else ()
        self._saved = self._lines
        self._section: str | None = None
        self._sheet: Worksheet
        self.solution: Solution
        self.good: Solution | None = None
        self.last: Moved = Moved()
        self._solve()

    # --- what it is now -----------------------------------------------------------------------------------

    @property
    def lines(self) -> tuple[str, ...]:
        """The lines, without their ends."""
        return self._lines

    @property
    def sheet(self) -> Worksheet:
        """The worksheet as read from the lines."""
        return self._sheet

    @property
    def memory(self) -> BlockMemory:
        """The blocks solved so far."""
        return self._memory

    @property
    def unsaved(self) -> bool:
        """Whether the lines differ from what was last read or saved."""
        return self._lines != self._saved

    @property
    def journal_trouble(self) -> str:
        """Why the recovery file cannot be written; empty while it can."""
        return "" if self._journal is None else self._journal.trouble

    def lines_of(self, number: int) -> tuple[int, int]:
        """First and last number (from 1) of the lines of the statement that line `number` is part of.

        Raises
        ------
        IndexError
            There is no such line.
        """
        self._check(number)
        statement = statement_at(self._sheet.document, number - 1)
        if statement is None:
            return number, number
        first, last = span_of_lines(statement, self._lines)
        return first + 1, last + 1

    # --- edits --------------------------------------------------------------------------------------------

    def type(self, text: str) -> Outcome:
        """Take in what was typed: each statement in place of the one it is about, else at the end of its section.

        All of `text` is one edit.
        """
        before = self._lines
        parts = pieces(text)
        for part in parts[:-1]:
            self._lines = placed(part, self._lines, self._sheet.document, self._section).applied(self._lines)
            self._sheet = self._read()
        edit = placed(parts[-1] if parts else text, self._lines, self._sheet.document, self._section)
        if len(parts) > 1:
            edit = between(before, edit.applied(self._lines))
            self._lines = before
        return self._do(edit)

    def replace(self, first: int, last: int, text: str) -> Outcome:
        """Put `text` (one line or more) in place of the lines `first` to `last`, numbers from 1.

        Raises
        ------
        IndexError
            There are no such lines.
        """
        self._check(first)
        self._check(last)
        new = text.split("\n")
        new[-1] = realigned(new[-1], self._lines[last - 1])
        return self._do(Edit(first - 1, self._lines[first - 1 : last], tuple(new)))

    def insert(self, number: int, text: str) -> Outcome:
        """Put `text` before line `number`; a number one past the last line puts it at the end."""
        if not 1 <= number <= len(self._lines) + 1:
            raise IndexError(number)
        return self._do(Edit(number - 1, (), tuple(text.split("\n"))))

    def delete(self, first: int, last: int) -> Outcome:
        """Take the lines `first` to `last` out."""
        self._check(first)
        self._check(last)
        return self._do(Edit(first - 1, self._lines[first - 1 : last], ()))

    def retype(self, text: str) -> Outcome:
        """Take back the last edit and take in `text` instead of what it typed."""
        back = self._history.back()
        assert back is not None
        edit, self._history = back
        self._change(edit)
        self._sheet = self._read()
        return self.type(text)

    def recover(self, found: Recovered) -> Outcome:
        """Take up what a recovery file holds, edit by edit; as one edit where the file has been changed since."""
        if found.base == self._lines and found.edits:
            for edit in found.edits[:-1]:
                self._history = self._history.after(edit)
                self._change(edit)
            return self._do(found.edits[-1])
        return self._do(between(self._lines, found.lines))

    def undo(self) -> Outcome | None:
        """Take the last edit back; None where there is none."""
        return self._step(self._history.back())

    def redo(self) -> Outcome | None:
        """Do again what was last taken back; None where there is nothing."""
        return self._step(self._history.forth())

    def _step(self, found: tuple[Edit, History] | None) -> Outcome | None:
        if found is None:
            return None
        edit, self._history = found
        return self._finish(edit)

    def _do(self, edit: Edit) -> Outcome:
        self._history = self._history.after(edit)
        return self._finish(edit)

    def _finish(self, edit: Edit) -> Outcome:
        self._change(edit)
        before = self.good
        self._solve()
        document = self._sheet.document
        self._section = section_at(document, edit.start + max(len(edit.new) - 1, 0))
        difference = moved(before, self.solution) if self.solution.solved else Moved()
        if self.solution.solved:
            self.last = difference
        return Outcome(edit, self.solution, difference)

    def _change(self, edit: Edit) -> None:
        before = self._lines
        self._lines = edit.applied(before)
        if self._journal is not None:
            self._journal.add(before, edit)
            if not self.unsaved:
                self._journal.remove()

    def _check(self, number: int) -> None:
        if not 1 <= number <= len(self._lines):
            raise IndexError(number)

    # --- solving ------------------------------------------------------------------------------------------

    def _read(self) -> Worksheet:
        return read(Source(self._file.name, self._text()), self._cache, self._memory, self._earlier)

    def _solve(self) -> None:
        self._sheet = self._read()
        self._earlier = None  # an interrupted computation leaves nothing to build upon
        self.solution = self._sheet.solve()
        self._earlier = self._sheet.unchanged
        if self.solution.solved:
            self.good = self.solution

    def _text(self) -> str:
        text = "\n".join(self._lines)
        return text + "\n" if self._ends and self._lines else text

    # --- the file -----------------------------------------------------------------------------------------

    def changed_on_disk(self) -> bool:
        """Whether the file is no longer what it was when it was read or saved."""
        return not self._on_disk.unchanged(self.path)

    def save(self) -> None:
        """Write the file in one step.

        Raises
        ------
        ChangedOnDisk
            The file has been changed by somebody else; `overwrite` writes it all the same.
        OSError
            It cannot be written; nothing is lost.
        """
        if self.changed_on_disk():
            raise ChangedOnDisk
        self.overwrite()

    def overwrite(self) -> None:
        """Write the file in one step, whatever it holds now.

        Raises
        ------
        OSError
            It cannot be written; nothing is lost.
        """
        self._write(self.path)

    def save_as(self, path: str) -> None:
        """Write the file at `path`, whatever it holds now, and edit that one from then on.

        Raises
        ------
        OSError
            It cannot be written; nothing is lost, and the file edited stays the same.
        """
        self._write(path)
        self.path = path
        if self._journal is not None:
            self._journal = Journal(path)

    def _write(self, path: str) -> None:
        write_atomically(path, self._file.encoded(self._text()))
        self._on_disk = state_of(path)
        self._saved = self._lines
        if self._journal is not None:
            self._journal.remove()

    def without_journal(self) -> None:
        """Write no recovery file: what is there belongs to somebody else."""
        self._journal = None

    def leave(self) -> None:
        """Keep the recovery file for the next start and stop writing it."""
        if self._journal is not None:
            self._journal.leave()

    def drop(self) -> None:
        """Give up what is not saved: the recovery file goes."""
        if self._journal is not None:
            self._journal.remove()


def open_text(path: str) -> TextFile | Diagnostic:
    """The text at `path`, an empty one where there is no file yet, or why it cannot be read."""
    if not os.path.lexists(path):
        return TextFile(path, "")
    return read_source(path)
