"""The worksheet: a text that has been read, and everything that can be asked of it."""

from __future__ import annotations

import time
from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from types import MappingProxyType

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.diagnostics.source import Source, Span
from eqsheet.model.lowered_cache import LoweredCache
from eqsheet.solve.ladder import DEFAULT_BUDGET
from eqsheet.solve.trail import Budget
from eqsheet.syntax.nodes import Document
from eqsheet.syntax.parse import parse_document
from eqsheet.worksheet.assemble import assemble
from eqsheet.worksheet.attached_files import attach_files
from eqsheet.worksheet.between_blocks import run_between_blocks
from eqsheet.worksheet.block_memory import BlockMemory
from eqsheet.worksheet.changes import apply_changes
from eqsheet.worksheet.collection import CollectionPutOff
from eqsheet.worksheet.prepare import Prepared, prepare
from eqsheet.worksheet.prepare_changed import Unchanged, prepare_changed, unchanged
from eqsheet.worksheet.prepare_edited import prepare_edited
from eqsheet.worksheet.solution import Solution

# Of a worksheet that is prepared already.
NO_TIME = MappingProxyType({"model": 0.0, "structure": 0.0})


@dataclass
class _Kept:
    """What is kept between calls: the worksheet prepared without changes, and whether changes were asked for."""

    unchanged: Unchanged | None = None
    changed: bool = False


@dataclass(frozen=True)
class Worksheet:
    """A worksheet as read. Reading one never runs code.

    Attributes
    ----------
    source : Source
    document : Document
    diagnostics : tuple of Diagnostic
        What reading the text alone has found; `solve` finds more.
    """

    source: Source
    document: Document
    diagnostics: tuple[Diagnostic, ...]
    timing: float = 0.0
    cache: LoweredCache = field(default_factory=LoweredCache, repr=False, compare=False)
    memory: BlockMemory | None = field(default=None, repr=False, compare=False)
    earlier: Unchanged | None = field(default=None, repr=False, compare=False)
    _kept: _Kept = field(default_factory=_Kept, init=False, repr=False, compare=False)

    @property
    def name(self) -> str:
        """Name of the file."""
        return self.source.name

    @property
    def unchanged(self) -> Unchanged | None:
        """What has been prepared of it, for `read` after an edit; None where nothing has."""
        return self._kept.unchanged

    def prepare(self, changes: Sequence[str] = (), free: Sequence[str] = ()) -> Prepared:
        """Everything up to the order of solution, before any number is computed; parameters as in `solve`."""
        kept = self._kept
        if changes and not free:
            if kept.unchanged is None and kept.changed:
                # Asked a second time, so more will follow, and all of them go faster from what is unchanged.
                self.prepare()
            kept.changed = True
        if kept.unchanged is not None and not free:
            if not changes:
                return kept.unchanged.prepared
            begin = time.perf_counter()
            again = prepare_changed(kept.unchanged, changes, self.cache)
            if again is not None:
                return replace(again, timing={"model": time.perf_counter() - begin, "structure": 0.0})
        if not changes and not free and not self.diagnostics and self.earlier is not None:
            begin = time.perf_counter()
            edited = prepare_edited(self.earlier, self.document.statements, self.cache)
            if edited is not None:
                kept.unchanged = replace(self.earlier, prepared=replace(edited, timing=NO_TIME))
                return replace(edited, timing={"model": time.perf_counter() - begin, "structure": 0.0})
        statements, freed, found = apply_changes(self.document.statements, changes, free)
        if not statements and not self.diagnostics:
            found = (*found, _empty(self.source))
        prepared = prepare(statements, (*self.diagnostics, *found), self.cache, freed)
        if not changes and not free:
            kept.unchanged = unchanged(replace(prepared, timing=NO_TIME))
        return prepared

    def solve(
        self,
        changes: Sequence[str] = (),
        free: Sequence[str] = (),
        budget: Budget = DEFAULT_BUDGET,
    ) -> Solution:
        """Solve the worksheet.

        Parameters
        ----------
        changes : sequence of str
            Statements for this call only: each replaces the known of its name, or is added.
        free : sequence of str
            Names of knowns to switch off for this call only.
        budget : Budget
            What one block may cost.

        Returns
        -------
        Solution
            Also where something is wrong: see its `status` and `diagnostics`.

        >>> import eqsheet
        >>> sheet = eqsheet.parse("v = Q/A\\nQ = 3 L/s\\nA = 12 cm^2")
        >>> round(sheet.solve()["v"].to("m/s"), 9)
        2.5
        >>> round(sheet.solve(changes=["Q = 6 L/s"])["v"].to("m/s"), 9)
        5.0
        """
        with CollectionPutOff():
            prepared = self.prepare(changes, free)
            begin = time.perf_counter()
            run = run_between_blocks(prepared, budget, self.memory) if prepared.valid_text else None
            solved_in = time.perf_counter() - begin
            timing = {"parse": self.timing, **prepared.timing, "solve": solved_in}
            return assemble(self.name, prepared, run, timing)


def _empty(source: Source) -> Diagnostic:
    return error(
        "empty-worksheet",
        f"there is no statement in {source.name}",
        Label(Span(source, 0, 0)),
        help="a worksheet holds equations and knowns, one a line: `v = Q/A`",
    )


def parse(text: str, name: str = "<text>") -> Worksheet:
    """The worksheet that `text` holds.

    Parameters
    ----------
    text : str
    name : str
        What messages call it.

    >>> parse("x = 2 m").document.statements[0].line.text
    'x = 2 m'
    """
    return read(Source(name, text.replace("\r\n", "\n").removeprefix("\ufeff")))


def read(
    source: Source,
    cache: LoweredCache | None = None,
    memory: BlockMemory | None = None,
    earlier: Unchanged | None = None,
) -> Worksheet:
    """The worksheet of a source.

    Parameters
    ----------
    source : Source
    cache : LoweredCache, optional
        See `build_system`.
    memory : BlockMemory, optional
        Blocks solved in an earlier state of the worksheet.
    earlier : Unchanged, optional
        What was prepared of the state just before, with the same `cache`: see `Worksheet.unchanged`.
    """
    begin = time.perf_counter()
    document, diagnostics = parse_document(source)
    statements, found = attach_files(document.statements, source.name)
    if found or statements != document.statements:
        document = replace(document, statements=statements)
        diagnostics = (*diagnostics, *found)
    taken = time.perf_counter() - begin
    return Worksheet(source, document, diagnostics, taken, cache or LoweredCache(), memory, earlier)
