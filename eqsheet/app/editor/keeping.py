"""Saving, quitting and recovering: the questions that keep work from being lost."""

from __future__ import annotations

import os
import time

from eqsheet.app.editor.printer import Printer
from eqsheet.app.editor.prompter import Prompter
from eqsheet.live.document import ChangedOnDisk, EditedWorksheet
from eqsheet.live.journal import Recovered

_YES, _NO = ("yes", "y"), ("no", "n")


class Keeper:
    """Keeps a worksheet's file.

    Attributes
    ----------
    write_failed : bool
        The last attempt to save failed.
    """

    def __init__(self, document: EditedWorksheet, printer: Printer, prompter: Prompter) -> None:
        self._document = document
        self._printer = printer
        self._prompter = prompter
        self.write_failed = False

    def save(self) -> bool:
        """Write the file, asking where somebody else has changed it; whether it is saved."""
        document = self._document
        try:
            document.save()
        except ChangedOnDisk:
            there = "has been changed" if os.path.lexists(document.path) else "has been removed"
            if not self._yes(
                f"{document.path} {there} by somebody else since it was read. Overwrite it? yes or no:"
            ):
                self._printer.say("not saved; `save as FILE` writes it to another file")
                return False
            try:
                document.overwrite()
            except OSError as failure:
                return self._failed(failure)
        except OSError as failure:
            return self._failed(failure)
        return self._saved()

    def save_as(self, path: str) -> bool:
        """Write another file, which is the one edited from then on."""
        document = self._document
        same = os.path.realpath(path) == os.path.realpath(document.path)
        if same:
            return self.save()
        if os.path.lexists(path) and not self._yes(f"{path} is there already. Overwrite it? yes or no:"):
            self._printer.say("not saved")
            return False
        try:
            document.save_as(path)
        except OSError as failure:
            return self._failed(failure, path)
        return self._saved()

    def may_quit(self) -> bool:
        """Whether to leave now: nothing is unsaved, or the answer says so."""
        document = self._document
        if not document.unsaved:
            document.drop()
            return True
        try:
            answer = self._ask("There are unsaved changes. Save them? yes, no, or stay:", ("stay", "s"))
        except KeyboardInterrupt:
            answer = "stay"
        except EOFError:
            # A second Ctrl-D, or a terminal that has gone: leave, and lose nothing.
            self.input_ended()
            return True
        if answer in _YES:
            if not self.save():
                return False
            document.drop()
            return True
        if answer in _NO:
            document.drop()
            return True
        return False

    def input_ended(self) -> None:
        """Leave where there is no more input to answer a question: unsaved changes stay in the recovery file."""
        document = self._document
        if not document.unsaved:
            document.drop()
            return
        document.leave()
        if document.journal_trouble:
            self._printer.say(f"unsaved changes of {document.path} are lost: {document.journal_trouble}")
        else:
            self._printer.say(
                f"the changes are not saved; `eqsheet edit {document.path}` at a terminal offers them again"
            )

    def offer(self, found: Recovered) -> bool | None:
        """Ask whether to take up what was not saved last time; None where there is no answer."""
        when = time.strftime("%d %B %Y at %H:%M", time.localtime(found.written))
        count = len(found.edits)
        changes = "1 change" if count == 1 else f"{count} changes"
        said = f"{changes} of {when} {'was' if count == 1 else 'were'} not saved."
        try:
            return self._ask(f"{said} Take up the work again? yes or no:", ()) in _YES
        except (EOFError, KeyboardInterrupt):
            return None

    def _saved(self) -> bool:
        self.write_failed = False
        count = len(self._document.lines)
        self._printer.say(f"saved {self._document.path}, {count} line{'s' * (count != 1)}")
        return True

    def _failed(self, failure: OSError, path: str = "") -> bool:
        self.write_failed = True
        reason = failure.strerror or type(failure).__name__
        self._printer.say(f"{path or self._document.path} cannot be written: {reason}; nothing is lost")
        return False

    def _yes(self, question: str) -> bool:
        try:
            return self._ask(question, ()) in _YES
        except (EOFError, KeyboardInterrupt):
            return False

    def _ask(self, question: str, others: tuple[str, ...]) -> str:
        """An answer that is one of those possible; asked again until it is."""
        while True:
            answer = self._prompter.choose(question)
            if answer in (*_YES, *_NO, *others):
                return answer
