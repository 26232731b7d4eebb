"""The editor: asks for a line, does what it says, tells what that did."""

from __future__ import annotations

import shutil
import sys
from collections.abc import Iterable
from typing import TYPE_CHECKING

from eqsheet.app import exit_status
from eqsheet.app.colours import palette_for
from eqsheet.app.editor.actions import Actions, Draft
from eqsheet.app.editor.keeping import Keeper
from eqsheet.app.editor.printer import Printer
from eqsheet.app.editor.prompter import Prompter, for_this_terminal
from eqsheet.app.editor.words import understood
from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.live.document import EditedWorksheet, open_text
from eqsheet.live.journal import Journal, discard_recovery, is_in_use, read_recovery
from eqsheet.units.registry import UnitTable

if TYPE_CHECKING:
    from eqsheet.app.editor.completer import WorksheetCompleter

PROMPT = "> "
NOTHING = Draft("", None, "")


def run_edit(path: str) -> int:
    """Edit the worksheet at `path` at the terminal; the exit status."""
    if path == "-":
        print("eqsheet: a worksheet to edit must be a file; give its name", file=sys.stderr)
        return exit_status.WRONG_USAGE
    file = open_text(path)
    if isinstance(file, Diagnostic):
        Printer(_to_errors, palette_for(sys.stderr), _width, _height).diagnostics([file], 1)
        return exit_status.UNREADABLE
    journal = None if is_in_use(path) else Journal(path)
    document = EditedWorksheet(file, path, journal)
    printer = Printer(print, palette_for(sys.stdout), _width, _height)

    def completer() -> WorksheetCompleter:
        from eqsheet.app.editor.completer import WorksheetCompleter

        return WorksheetCompleter(lambda: names_of(document), lambda: units_of(document))

    prompter = for_this_terminal(completer)
    if journal is None:
        printer.say("another editor has this worksheet open; changes made here have no recovery file")
    return Session(document, printer, prompter).run()


def _to_errors(text: str) -> None:
    print(text, file=sys.stderr)


def _width() -> int:
    return shutil.get_terminal_size().columns


def _height() -> int:
    return shutil.get_terminal_size().lines


def names_of(document: EditedWorksheet) -> set[str]:
    """Names of the quantities and definitions in the worksheet as it is now."""
    known = document.good or document.solution
    names = {*document.solution, *known}
    for block in document.solution.blocks:
        names.update(block.unknowns)
    names.update(getattr(s.node, "name", "") for s in document.solution.statements)
    return names - {""}


def units_of(document: EditedWorksheet) -> Iterable[str]:
    """Symbols of all units, those of the worksheet included."""
    for value in document.solution.values():
        return value.unit_table.known_symbols()
    return UnitTable.standard().known_symbols()


class Session:
    """One editing session, from the first prompt to quitting."""

    def __init__(self, document: EditedWorksheet, printer: Printer, prompter: Prompter) -> None:
        self._document = document
        self._printer = printer
        self._prompter = prompter
        self._keeper = Keeper(document, printer, prompter)
        self._actions = Actions(document, printer, prompter, self._keeper)

    def run(self) -> int:
        """Ask until told to quit; the exit status."""
        self._recover()
        self._actions.greet()
        while True:
            try:
                if self._one():
                    break
            except KeyboardInterrupt:
                # During a computation; the prompt's own are dealt with where it asks.
                self._printer.say("interrupted; the lines are changed, the values are those of before")
        return exit_status.UNWRITABLE if self._keeper.write_failed else exit_status.SOLVED

    def _one(self) -> bool:
        """Ask once and do what was typed; whether to leave."""
        draft = self._actions.draft or NOTHING
        self._actions.draft = None
        prompt = PROMPT if draft.line is None else f"{draft.line}> "
        try:
            typed = self._prompter.ask(prompt, draft.text, draft.cursor)
        except KeyboardInterrupt:
            return False
        except EOFError:
            if not self._prompter.brings_up:
                self._keeper.input_ended()
                return True
            return self._keeper.may_quit()
        if not typed.strip():
            return False
        meant = understood(typed, names_of(self._document))
        # A command is obeyed wherever it is typed: no line of a worksheet reads like one.
        if draft.line is not None and meant.name in ("type", "value", "neither"):
            self._actions.take_draft(draft, typed)
            return False
        if meant.name == "quit":
            return self._keeper.may_quit()
        self._actions.do(meant)
        return False

    def _recover(self) -> None:
        """Offer what a session that was cut off has left."""
        path = self._document.path
        if is_in_use(path):
            return
        found = read_recovery(path)
        if found is None:
            return
        if found.lines == self._document.lines:
            discard_recovery(path)
            return
        # A script cannot know of the question; what was left stays for whoever sits at a terminal.
        taken = self._keeper.offer(found) if self._prompter.brings_up else None
        if taken is None:
            self._printer.say("changes that were not saved last time are left in their recovery file")
            self._document.without_journal()
        elif taken:
            self._document.recover(found)
        else:
            discard_recovery(path)
