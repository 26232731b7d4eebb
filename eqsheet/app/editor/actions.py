"""What each command does."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable
from dataclasses import dataclass

from eqsheet.app.editor.help_text import help_lines
from eqsheet.app.editor.keeping import Keeper
from eqsheet.app.editor.listing import listing, numbered, value_words
from eqsheet.app.editor.printer import Printer
from eqsheet.app.editor.prompter import Prompter
from eqsheet.app.editor.telling import edit_lines, moved_lines
from eqsheet.app.editor.words import WORDS, Understood
from eqsheet.diagnostics.diagnostic import Diagnostic, Severity
from eqsheet.diagnostics.source import Span
from eqsheet.live.document import EditedWorksheet, Outcome
from eqsheet.model.lower_statements import known_name
from eqsheet.model.spelling import did_you_mean
from eqsheet.review.table import origin_words, solution_lines, verdict_line
from eqsheet.syntax.lines import split_comment
from eqsheet.syntax.nodes import Statement

MOST_MESSAGES = 4
"""Messages shown in full after an edit."""

# Mistakes in the words of one line, which is where they are mended; structure is mended elsewhere.
_IN_THE_LINE = frozenset(
    (
        "unknown-unit",
        "ambiguous-unit",
        "unit-out-of-range",
        "unit-power",
        "unknown-function",
        "argument-count",
    )
)


@dataclass(frozen=True, slots=True)
class Draft:
    """A text to be brought up at the prompt.

    Attributes
    ----------
    text : str
    line : int or None
        The line of the worksheet it stands in or is to stand in; None for a text that is not in it.
    taken : str
        What becomes of it: ``replace`` the lines, ``insert`` before the line, or ``retype``: it was typed and is
        taken in afresh.
    cursor : int
        Where in the text the cursor stands.
    """

    text: str
    line: int | None
    taken: str
    cursor: int = 0


class Actions:
    """Does what was typed.

    Attributes
    ----------
    draft : Draft or None
        What the next prompt is to bring up.
    """

    def __init__(
        self, document: EditedWorksheet, printer: Printer, prompter: Prompter, keeper: Keeper
    ) -> None:
        self._document = document
        self._printer = printer
        self._prompter = prompter
        self._keeper = keeper
        self.draft: Draft | None = None
        self._told: frozenset[tuple[str, str]] = frozenset()
        self._journal_told = False
        self._does: dict[str, Callable[[Understood], None]] = {
            "type": self._type,
            "line": self._bring_up,
            "replace": self._replace,
            "insert": self._insert,
            "delete": self._delete,
            "off": self._off,
            "on": self._on,
            "undo": lambda _: self._stepped(document.undo, "there is nothing to undo"),
            "redo": lambda _: self._stepped(document.redo, "there is nothing to redo"),
            "list": self._list,
            "find": self._find,
            "results": self._results,
            "changes": self._changes,
            "value": self._value,
            "blocks": self._blocks,
            "messages": self._messages,
            "save": self._save,
            "help": lambda _: printer.lines(help_lines()),
            "neither": self._neither,
        }

    def do(self, meant: Understood) -> None:
        """Do what was typed and say what came of it."""
        count = len(self._document.lines)
        for number in (meant.first, meant.last):
            if number is not None and not 1 <= number <= count + (meant.name == "insert"):
                last = f"the last is {count}" if count else "the worksheet is empty"
                self._printer.say(f"there is no line {number}; {last}")
                return
        self._does[meant.name](meant)

    def greet(self) -> None:
        """What stands at the start: the lines with their values where they fit on the screen, and the verdict."""
        document = self._document
        if document.lines:
            shown = listing(document, range(1, len(document.lines) + 1), self._printer.width())
            if len(shown) + 6 <= self._printer.height():
                self._printer.lines(shown)
            else:
                self._printer.lines(self._overview())
        self._told = _keys(document.solution.diagnostics)
        errors = [d for d in document.solution.diagnostics if d.severity is Severity.ERROR]
        self._left_out(self._printer.diagnostics(errors, MOST_MESSAGES))
        if document.lines:
            self._printer.say(self._verdict())
        else:
            self._printer.say(f"{document.path}: a new worksheet; type its first line")
        self._printer.say("`help` shows what can be typed.")

    def take_draft(self, draft: Draft, typed: str) -> None:
        """Take in a line that was brought up and sent off again."""
        assert draft.line is not None
        document = self._document
        if typed == draft.text:
            self._printer.say(f"line {draft.line} is unchanged")
        elif draft.taken == "retype":
            self._tell(document.retype(typed), "retype")
        elif draft.taken == "insert":
            self._tell(document.insert(draft.line, typed), "replace")
            self.draft = self.draft or Draft("", draft.line + 1 + typed.count("\n"), "insert")
        else:
            first, last = document.lines_of(draft.line)
            self._tell(document.replace(first, last, typed), "replace")

    # --- edits --------------------------------------------------------------------------------------------

    def _type(self, meant: Understood) -> None:
        self._tell(self._document.type(meant.text), "retype")

    def _bring_up(self, meant: Understood) -> None:
        assert meant.first is not None
        first, last = self._document.lines_of(meant.first)
        text = "\n".join(self._document.lines[first - 1 : last])
        if not self._prompter.brings_up:
            self._printer.lines(numbered(first + i, line) for i, line in enumerate(text.split("\n")))
        self.draft = Draft(text, first, "replace", _end_of_code(text))

    def _replace(self, meant: Understood) -> None:
        assert meant.first is not None
        first, last = self._document.lines_of(meant.first)
        self._tell(self._document.replace(first, last, meant.text), "replace")

    def _insert(self, meant: Understood) -> None:
        self._printer.say("an empty line ends it")
        self.draft = Draft("", meant.first, "insert")

    def _delete(self, meant: Understood) -> None:
        assert meant.first is not None
        if meant.last is None:
            first, last = self._document.lines_of(meant.first)
        else:
            first, last = sorted((meant.first, meant.last))
        self._tell(self._document.delete(first, last), "")

    def _off(self, meant: Understood) -> None:
        statement = self._statement(meant, off=False)
        if statement is not None:
            first = statement.line.line
            self._put(first, switched_off(self._document.lines[first - 1]))

    def _on(self, meant: Understood) -> None:
        statement = self._statement(meant, off=True)
        if statement is not None:
            first = statement.line.line
            self._put(first, switched_on(self._document.lines[first - 1]))

    def _put(self, number: int, line: str) -> None:
        self._tell(self._document.replace(number, number, line), "")

    def _statement(self, meant: Understood, off: bool) -> Statement | None:
        """The known of that name, or the statement at that line, that is off or not; said where there is none."""
        statements = self._document.sheet.document.statements
        if meant.first is not None:
            number = self._document.lines_of(meant.first)[0]
            found = [s for s in statements if s.line.line == number and s.off is off]
            if not found:
                self._printer.say(
                    f"line {meant.first} is {'not switched off' if off else 'no statement in use'}"
                )
        else:
            found = [s for s in statements if s.off is off and meant.text in (known_name(s), s.label)]
            if not found:
                state = "switched off" if off else "in use"
                self._printer.say(f"no known of the name `{meant.text}` is {state}")
        if len(found) > 1:
            lines = ", ".join(str(s.line.line) for s in found)
            self._printer.say(f"`{meant.text}` is on lines {lines}; give the number of one")
            return None
        return found[0] if found else None

    def _stepped(self, step: Callable[[], Outcome | None], nothing: str) -> None:
        outcome = step()
        if outcome is None:
            self._printer.say(nothing)
        else:
            self._tell(outcome, "")

    def _tell(self, outcome: Outcome, comes_back: str) -> None:
        """Say what an edit did, and bring its line back where it cannot be read."""
        edit, solution = outcome.edit, outcome.solution
        self._printer.lines(edit_lines(edit.start, edit.old, edit.new))
        self._printer.say(self._verdict())
        self._printer.lines(moved_lines(outcome.moved))
        if not outcome.moved and solution.solved:
            self._printer.say("  no value changed")
        new = [d for d in solution.diagnostics if _key(d) not in self._told or d.severity is Severity.ERROR]
        if solution.solved:
            # A worksheet that is not valid gives fewer warnings; they are no news when it is mended.
            self._told = _keys(solution.diagnostics)
        new = [d for d in new if d.severity is not Severity.NOTE]
        self._left_out(self._printer.diagnostics(new, MOST_MESSAGES))
        if not solution.solved and self._document.good is not None:
            self._printer.say(
                "The values shown are those of before; Ctrl-C clears the line, `undo` takes the change back."
            )
        if self._document.journal_trouble and not self._journal_told:
            self._journal_told = True
            self._printer.say(f"there is no recovery file: {self._document.journal_trouble}")
        lines = range(edit.start + 1, edit.start + 1 + len(edit.new))
        slip = self._slip(lines)
        if comes_back and self._prompter.brings_up and slip is not None:
            text = "\n".join(edit.new)
            start = slip.source.line_starts[edit.start]
            self.draft = Draft(text, edit.start + 1, comes_back, min(slip.end - start, len(text)))

    def _verdict(self) -> str:
        """How the worksheet stands; its name is known to whoever edits it."""
        return verdict_line(self._document.solution).removeprefix(f"{self._document.solution.worksheet}: ")

    def _slip(self, lines: range) -> Span | None:
        """Where the first mistake in the words of one of those lines is."""
        read = self._document.sheet.diagnostics
        found = [d for d in self._document.solution.diagnostics if d.code in _IN_THE_LINE]
        for diagnostic in (*read, *found):
            span = diagnostic.span
            if diagnostic.severity is Severity.ERROR and span is not None and span.line in lines:
                return span
        return None

    def _left_out(self, count: int) -> None:
        if count:
            self._printer.say(f"and {count} more message{'s' * (count != 1)}; `messages` shows all")

    # --- looks --------------------------------------------------------------------------------------------

    def _list(self, meant: Understood) -> None:
        count = len(self._document.lines)
        numbers: Iterable[int] = range(1, count + 1)
        if meant.first is not None:
            around = 5
            first, last = meant.first, meant.last
            numbers = (
                range(max(1, first - around), min(count, first + around) + 1)
                if last is None
                else range(min(first, last), max(first, last) + 1)
            )
        elif meant.text:
            found = self._section(meant.text)
            if found is None:
                self._printer.say(f"no section begins with `{meant.text}`")
                return
            numbers = found
        if not count:
            self._printer.say("the worksheet is empty")
        self._printer.lines(listing(self._document, numbers, self._printer.width()))

    def _section(self, title: str) -> range | None:
        headings = [p for p in self._document.sheet.document.prose if p.title]
        for i, heading in enumerate(headings):
            if heading.title.lower().startswith(title.lower()):
                end = headings[i + 1].line if i + 1 < len(headings) else len(self._document.lines) + 1
                return range(heading.line, end)
        return None

    def _overview(self) -> list[str]:
        """The sections of a worksheet too long for the screen."""
        headings = [p for p in self._document.sheet.document.prose if p.title]
        most = max(self._printer.height() - 8, 3)
        lines = [numbered(p.line, f"{'#' * p.level} {p.title}") for p in headings[:most]]
        if len(headings) > most:
            lines.append(f"      and {len(headings) - most} more sections")
        count = len(self._document.lines)
        return [*lines, f"{count} lines; `list` shows them all, `list 40` some, `list TITLE` a section"]

    def _find(self, meant: Understood) -> None:
        wanted = meant.text.lower()
        found = [i for i, line in enumerate(self._document.lines, 1) if wanted in line.lower()]
        if found:
            self._printer.lines(listing(self._document, found, self._printer.width()))
        else:
            self._printer.say(f"no line holds `{meant.text}`")

    def _results(self, _: Understood) -> None:
        solution = self._document.solution
        self._printer.lines([self._verdict(), "", *solution_lines(solution)])

    def _changes(self, _: Understood) -> None:
        self._printer.lines(moved_lines(self._document.last, most=1_000_000) or ["  nothing has moved"])

    def _value(self, meant: Understood) -> None:
        name = meant.text
        current, good = self._document.solution, self._document.good
        value = current.get(name)
        if value is not None:
            self._printer.say(f"{value_words(value)}  {origin_words(value, current.blocks)}")
        elif good is not None and name in good:
            self._printer.say(f"before: {value_words(good[name])}  {origin_words(good[name], good.blocks)}")
        elif any(name in block.unknowns for block in current.blocks):
            self._printer.say(f"`{name}` has no value yet")
        else:
            self._printer.say(f"no quantity is called `{name}`")
            self._suggest(name, current)
            return
        numbers = [i for i, line in enumerate(self._document.lines, 1) if _mentions(line, name)]
        most = 8
        self._printer.lines(numbered(i, self._document.lines[i - 1]) for i in numbers[:most])
        if len(numbers) > most:
            self._printer.say(f"      and {len(numbers) - most} more; `find {name}` shows them")

    def _blocks(self, _: Understood) -> None:
        from eqsheet.review.order_of_solution import block_lines

        self._printer.lines(block_lines(self._document.solution) or ["there is nothing to solve"])

    def _messages(self, _: Understood) -> None:
        found = self._document.solution.diagnostics
        self._printer.diagnostics(found, len(found))
        if not found:
            self._printer.say("there are no messages")

    def _save(self, meant: Understood) -> None:
        if meant.text:
            self._keeper.save_as(meant.text)
        else:
            self._keeper.save()

    def _neither(self, meant: Understood) -> None:
        short = meant.text if len(meant.text) < 60 else meant.text[:57] + "..."
        self._printer.say(f"`{short}` is no statement, no command and no quantity")
        self._suggest(meant.text, [*self._document.solution, *(w.name for w in WORDS)])
        self.draft = Draft(meant.text, None, "", len(meant.text))

    def _suggest(self, name: str, candidates: Iterable[str]) -> None:
        help = did_you_mean(name, candidates)
        if help:
            self._printer.say(f"  {help}")


_OFF = "off "


def switched_off(line: str) -> str:
    """The line with ``off`` before its statement; its comment keeps its column where there is room.

    >>> switched_off("D = 5 mm       # bore"), switched_off("D = 5 mm")
    ('off D = 5 mm   # bore', 'off D = 5 mm')
    """
    code, comment = split_comment(line)
    indent = line[: len(line) - len(line.lstrip())]
    rest = code[len(indent) :]
    room = len(rest) - len(rest.rstrip())
    if comment is None:
        return f"{indent}{_OFF}{rest}"
    return f"{indent}{_OFF}{rest.rstrip()}{' ' * max(room - len(_OFF), 1)}#{comment}"


def switched_on(line: str) -> str:
    """The line without the first ``off``.

    >>> switched_on("off D = 5 mm   # bore"), switched_on("bore: off D = 5 mm")
    ('D = 5 mm       # bore', 'bore: D = 5 mm')
    """
    code, comment = split_comment(line)
    new = re.sub(r"(?<!\w)off[ \t]+", "", code, count=1)
    return new if comment is None else f"{new}{' ' * (len(code) - len(new))}#{comment}"


def _end_of_code(text: str) -> int:
    """Where the code of the first line ends, which is where most changes are made."""
    return len(split_comment(text.split("\n", 1)[0])[0].rstrip())


def _mentions(line: str, name: str) -> bool:
    return re.search(rf"(?<![\w.]){re.escape(name)}(?![\w.])", line.split("#", 1)[0]) is not None


def _key(diagnostic: Diagnostic) -> tuple[str, str]:
    return diagnostic.code, diagnostic.message


def _keys(diagnostics: Iterable[Diagnostic]) -> frozenset[tuple[str, str]]:
    return frozenset(map(_key, diagnostics))
