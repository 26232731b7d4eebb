"""The public result: a mapping of quantities with evidence, limits and diagnostics."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.solve.outcome import Outcome
from eqsheet.syntax.nodes import Statement
from eqsheet.units.dimension import Dimension
from eqsheet.units.registry import UnitTable
from eqsheet.units.unit import Unit
from eqsheet.worksheet.shown_units import in_unit
from eqsheet.worksheet.unit_text import resolve_text


@dataclass(frozen=True, slots=True)
class QuantityValue:
    """One quantity of a solution.

    Attributes
    ----------
    name : str
    si : float
        Value in SI base units; a reading on its absolute scale (K, Pa).
    unit : str
        Unit in which `value` is.
    kind : str
        ``plain``, ``reading`` or ``difference``.
    known : bool
        Set by a line of its own, not solved for.
    block : int or None
        Number of the block that gave it, from 1; None for a known.
    statement : Statement or None
        The line that sets it; of a block, the line that has it alone on a side, else the first line.
    error : float
        Estimated error in SI, from rounding and the conditioning of the equations alone.
    digits : int
        Decimal digits that can be trusted on that ground, 0 to 15.
    tolerance : str
        The tolerance of a known as written, ``± 0.1 mm``; empty if there is none.
    """

    name: str
    si: float
    kind: str
    known: bool
    block: int | None
    statement: Statement | None
    error: float
    digits: int
    shown_in: Unit
    unit_table: UnitTable
    tolerance: str = ""

    @property
    def unit(self) -> str:
        """The unit in which `value` is, as written; ``1`` for a plain number."""
        return self.shown_in.text or "1"

    @property
    def value(self) -> float:
        """The value in `unit`: a reading with its origin, a difference without."""
        return self._in(self.shown_in)

    @property
    def dimension(self) -> Dimension:
        """Dimension of the quantity."""
        return self.shown_in.dimension

    @property
    def line(self) -> int | None:
        """Number of the line of `statement`, from 1; None where lines mean nothing (``--with``)."""
        if self.statement is None or not self.statement.source.numbered:
            return None
        return self.statement.line.line

    def to(self, unit: str) -> float:
        """The value in another unit.

        Parameters
        ----------
        unit : str
            As in a worksheet: ``"L/min"``, ``"degC"``; ``""`` or ``"1"`` for a plain number.

        Raises
        ------
        ValueError
            If there is no such unit or it does not fit the quantity's dimension.
        """
        wanted = resolve_text(self.unit_table, unit)
        if wanted.dimension != self.shown_in.dimension:
            raise ValueError(
                f"`{self.name}` is in {self.unit}, which cannot be converted to {unit or 'a plain number'}"
            )
        return self._in(wanted)

    def _in(self, unit: Unit) -> float:
        return in_unit(unit, self.kind, self.si)


@dataclass(frozen=True, slots=True)
class BlockReport:
    """One block of the order of solution.

    Attributes
    ----------
    number : int
        From 1, in order of solution; knowns have no block.
    unknowns : sequence of str
    statements : sequence of Statement
        Its equations, in the order of the text.
    depends : sequence of str
        Quantities from elsewhere that its equations use, knowns included, sorted.
    after : tuple of int
        Blocks it depends on directly.
    method : str
        ``closed form``, ``linear``, ``bracketing``, ``newton`` ...; empty while it is not solved.
    iterations : int
    residual : float
        Largest residual relative to the size of its equation.
    condition : float
        Condition estimate of the scaled Jacobian; 1 for a closed form.
    solved : bool
    outcome : Outcome or None
        The solver's own account, attempt by attempt; None for closed forms.
    """

    number: int
    unknowns: Sequence[str]
    statements: Sequence[Statement]
    depends: Sequence[str]
    after: tuple[int, ...]
    method: str = ""
    iterations: int = 0
    residual: float = 0.0
    condition: float = 1.0
    solved: bool = False
    outcome: Outcome | None = field(default=None, repr=False, compare=False)

    @property
    def lines(self) -> tuple[int, ...]:
        """Line numbers of its equations."""
        return tuple(dict.fromkeys(s.line.line for s in self.statements if s.source.numbered))


@dataclass(frozen=True, slots=True)
class BranchReport:
    """How a condition of an ``if`` stands at the solution, and with it which branch is taken.

    Attributes
    ----------
    statement : Statement
    text : str
        The condition as written; for one inside a definition the call that brings it in.
    holds : bool
        The branch after ``then`` is taken where it holds, else the other.
    member : str
        In a family or an instance, which member.
    count : int
        How many members of a large family it speaks of, of which `member` is the first.
    """

    statement: Statement
    text: str
    holds: bool
    member: str = ""
    count: int = 1

    @property
    def line(self) -> int | None:
        """Number of its line, from 1."""
        return self.statement.line.line if self.statement.source.numbered else None


@dataclass(frozen=True, slots=True)
class LimitReport:
    """How a limit stands at the solution.

    Attributes
    ----------
    statement : Statement
    text : str
        As written, without ``require``.
    holds : bool
        Within the forward error of its sides.
    margin : float or None
        Distance to the limit relative to the limit, negative where it fails; None for a limit of zero, a
        reading or a gauge pressure.
    slack : float
        The same distance in `unit`.
    unit : str
    left : float
        Value of the compared side in SI, for messages.
    """

    statement: Statement
    text: str
    holds: bool
    margin: float | None
    slack: float
    unit: str

    @property
    def line(self) -> int | None:
        """Number of its line, from 1."""
        return self.statement.line.line if self.statement.source.numbered else None


@dataclass(frozen=True)
class Solution(Mapping[str, QuantityValue]):
    """What solving a worksheet gave: a mapping from names to values, in order of showing.

    Attributes
    ----------
    worksheet : str
        Name of the file.
    status : str
        ``solved``, ``outside-limits``, ``invalid`` or ``unsolved``.
    quantities : mapping of str to QuantityValue
        What is known or was found; of an ill-posed worksheet its well-determined part.
    blocks : sequence of BlockReport
    limits : sequence of LimitReport
    diagnostics : tuple of Diagnostic
    best : mapping of str to QuantityValue
        Best point of a failed block; never mixed with `quantities`.
    timing : mapping of str to float
        Seconds spent in each stage.
    statements : tuple of Statement
        All statements of the worksheet as solved, those switched off included.
    branches : sequence of BranchReport
        Which branch each condition takes.
    """

    worksheet: str
    status: str
    quantities: Mapping[str, QuantityValue]
    blocks: Sequence[BlockReport] = ()
    limits: Sequence[LimitReport] = ()
    diagnostics: tuple[Diagnostic, ...] = ()
    best: Mapping[str, QuantityValue] = field(default_factory=dict)
    timing: Mapping[str, float] = field(default_factory=dict)
    statements: tuple[Statement, ...] = ()
    branches: Sequence[BranchReport] = ()

    @property
    def solved(self) -> bool:
        """Whether every block was solved and the worksheet is valid; limits may still fail."""
        return self.status in ("solved", "outside-limits")

    def __getitem__(self, name: str) -> QuantityValue:
        return self.quantities[name]

    def __iter__(self) -> Iterator[str]:
        return iter(self.quantities)

    def __len__(self) -> int:
        return len(self.quantities)
