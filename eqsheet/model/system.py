"""The equation system: what a worksheet means, in numbered quantities and formulas.

Everything is immutable. Quantities are numbered in order of their names, so that nothing downstream depends
on the order of the lines.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from eqsheet.model.tape import Formula
from eqsheet.syntax.nodes import Statement
from eqsheet.units.registry import UnitTable
from eqsheet.units.unit import Unit

if TYPE_CHECKING:
    from eqsheet.model.equation_group import EquationGroup, GuessGroup, LimitGroup
    from eqsheet.model.indexing import Codes
    from eqsheet.model.units_like_names import UnitLikeName


@dataclass(frozen=True, slots=True)
class Place:
    """A piece of a statement: its number in `EquationSystem.statements`, start and end in its logical line."""

    statement: int
    start: int
    end: int


@dataclass(frozen=True, slots=True)
class Validity:
    """A validity condition of an equation or of a definition it uses.

    Attributes
    ----------
    formula : Formula
        One output, the truth of the condition; its quantities in worksheet numbers.
    text : str
        The condition as written.
    place : Place
        Where the user should look: the condition itself, or the call of the definition that carries it.
    guards : tuple of Guard
        Branches of the equation that must be taken for the condition to matter.
    """

    formula: Formula
    text: str
    place: Place
    guards: tuple[Guard, ...] = ()


@dataclass(frozen=True, slots=True)
class Guard:
    """A condition (a formula with one truth output) and the branch it selects."""

    formula: Formula
    branch: bool


@dataclass(frozen=True, slots=True)
class ToleranceOfKnown:
    """Half-width in SI of a known's tolerance, and its coverage factor if it was given as expanded."""

    half_width: float
    coverage: float | None
    text: str


@dataclass(frozen=True, slots=True)
class EquationItem:
    """One equation, which may be a known.

    Attributes
    ----------
    formula : Formula
        Outputs (left, right).
    place : Place
        The equation without label and comment.
    known : int
        Number of the quantity it sets if it is a known, else -1.
    value : float
        SI value of the known; nan for other equations.
    tolerance : ToleranceOfKnown or None
    valid : tuple of Validity
    member : str
        In a family or an instance, what tells it from the others of its statement: ``supply, i = 3``.
    """

    formula: Formula
    place: Place
    known: int = -1
    value: float = float("nan")
    tolerance: ToleranceOfKnown | None = None
    valid: tuple[Validity, ...] = ()
    member: str = ""


@dataclass(frozen=True, slots=True)
class GuessItem:
    """A guess for one quantity.

    Attributes
    ----------
    quantity : int
    place : Place
        The guess without label and comment.
    exact : bool
        False where a pattern (``c_*``) matched the name, so that a guess by name goes first.
    formula : Formula or None
        One output for each of `roles`; takes knowns only, besides the quantity itself (for its dimension).
    roles : tuple of str
        ``near``, ``lower``, ``upper``, those that were written.
    """

    quantity: int
    place: Place
    exact: bool
    formula: Formula
    roles: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class LimitItem:
    """A design limit: a chain of comparisons, or an equality within a distance.

    Attributes
    ----------
    formula : Formula
        One output an operand of the chain; where ``within`` is set its distance is the last output.
    operators : tuple of str
        ``< <= > >= =`` between the operands.
    relative : bool
        The distance is relative to the right side.
    text : str
        As written, without ``require``.
    unit : Unit or None
        Unit of the first literal among the operands, for the slack.
    """

    formula: Formula
    operators: tuple[str, ...]
    within: bool
    relative: bool
    text: str
    place: Place
    unit: Unit | None


@dataclass(frozen=True, slots=True)
class EquationSystem:
    """A worksheet's meaning.

    Attributes
    ----------
    statements : tuple of Statement
        Those in use, in the order of the text; places refer to them by number.
    names : sequence of str
        Names of the quantities, sorted; a quantity's number is its index.
    first_places : sequence of Place
        Where each quantity is first named in an equation.
    equations : sequence of EquationItem
        Knowns and others, ordered by knowns first, then by the names they hold, then by their text. Those of
        `groups` stand last, group by group.
    guesses : sequence of GuessItem
    limits : sequence of LimitItem
        In the order of the text.
    shown : mapping of int to (Unit or None)
        Quantities named by `show`, in that order.
    units : mapping of int to Unit
        Unit in which each quantity is preferably shown: `show`, known, guess, limit in that order.
    unit_table : UnitTable
    ambient : float
        Ambient pressure in Pa on which gauge pressures stand.
    uses_gauge : bool
        Whether a gauge unit occurs, so that the ambient pressure must be stated.
    shows : tuple of Formula
        ``show ... in`` as formulas that hold the quantity and its unit alike, for the dimensions.
    families : sequence of int
        For each quantity the number of the first member of its family; empty where there are no families.
    groups : tuple of EquationGroup
        Statements of large families, kept as arrays.
    guess_groups : tuple of GuessGroup
        Likewise; their guesses are among `guesses`.
    guesses_apart : tuple of GuessItem
        Where there are such groups, the guesses that are in none.
    firsts : ndarray or None
        Where there are groups: numbers of the first members of all families and of the plain quantities,
        ascending. Sequences over quantities and equations are then made item by item when asked for.
    limit_parts : tuple of (LimitItem or LimitGroup)
        The limits in their order, those on large families as arrays.
    units_like_names : tuple of UnitLikeName
        Literals whose unit ends in the name of a quantity or an index.
    """

    statements: tuple[Statement, ...]
    names: Sequence[str]
    first_places: Sequence[Place]
    equations: Sequence[EquationItem]
    guesses: Sequence[GuessItem]
    limits: Sequence[LimitItem]
    shown: Mapping[int, Unit | None]
    units: Mapping[int, Unit]
    unit_table: UnitTable
    ambient: float
    uses_gauge: bool
    shows: tuple[Formula, ...] = ()
    families: Sequence[int] = ()
    groups: tuple[EquationGroup, ...] = ()
    guess_groups: tuple[GuessGroup, ...] = ()
    firsts: Codes | None = None
    guesses_apart: tuple[GuessItem, ...] = ()
    limit_parts: tuple[LimitItem | LimitGroup, ...] = ()
    units_like_names: tuple[UnitLikeName, ...] = ()

    @property
    def written(self) -> Sequence[EquationItem]:
        """The equations that stand before those of the groups."""
        if not self.groups:
            return self.equations
        return self.equations[: len(self.equations) - sum(map(len, self.groups))]

    @property
    def written_guesses(self) -> Sequence[GuessItem]:
        """The guesses that are in no group, in order."""
        return self.guesses_apart if self.guess_groups else self.guesses

    def number(self, name: str) -> int | None:
        """Number of the quantity of that name, or None."""
        try:
            # Sequences of names made on demand find a name without a search.
            return self.names.index(name)
        except ValueError:
            return None
