"""The syntax tree: frozen nodes that say what was written, not what it means.

Offsets ``start`` and ``end`` of every node count characters from the start of its *logical line's text*, so
that the tree of an unchanged line can be used again wherever the line now stands; `Statement.span` turns
them into places of the source.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from typing import TypeAlias

from eqsheet.diagnostics.source import Source, Span

# --- units as written -------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class UnitFactor:
    """One symbol of a unit with its exponent, `/` already turned into a negative exponent."""

    start: int
    end: int
    symbol: str
    exponent: Fraction


@dataclass(frozen=True, slots=True)
class UnitText:
    """A unit as written: ``W/(m^2*K)`` has the factors W, m^-2, K^-1."""

    start: int
    end: int
    text: str
    factors: tuple[UnitFactor, ...]


# --- expressions ------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Number:
    """A literal: digits as written, and the unit directly after them or None.

    ``negated`` is true where a sign stands directly before a literal with a unit (``-5 degC``): the sign
    belongs to the number as read, which matters for units with an origin. ``text`` is without that sign;
    ``start`` is the sign's place. A sign before a plain number stays a `Unary`.
    """

    start: int
    end: int
    text: str
    unit: UnitText | None = None
    negated: bool = False


@dataclass(frozen=True, slots=True)
class Reference:
    """A name in an expression: ``v``, ``T[i-1]``, ``supply.dP``, ``p[l].Q``, ``const.R``.

    ``owner`` is the reference before the dot, if there is one. ``subscripts`` is None where no bracket
    stands.
    """

    start: int
    end: int
    name: str
    subscripts: tuple[Expression, ...] | None = None
    owner: Reference | None = None

    @property
    def dotted(self) -> str:
        """The name with its owners, without subscripts: ``supply.dP``."""
        return self.name if self.owner is None else f"{self.owner.dotted}.{self.name}"


@dataclass(frozen=True, slots=True)
class Text:
    """A quoted member name, ``"NH4+"``; only inside subscripts and filters."""

    start: int
    end: int
    value: str


@dataclass(frozen=True, slots=True)
class Unary:
    """``-x``, ``+x`` or ``not c``; operator is ``-``, ``+`` or ``not``."""

    start: int
    end: int
    operator: str
    operand: Expression


@dataclass(frozen=True, slots=True)
class Binary:
    """``a + b`` and so on; operator is one of ``+ - * / ^``, at ``operator_start``."""

    start: int
    end: int
    operator: str
    operator_start: int
    left: Expression
    right: Expression


@dataclass(frozen=True, slots=True)
class Comparison:
    """A chain ``a <= b < c``: one more operand than operators; operators are ``< <= > >= =``."""

    start: int
    end: int
    operators: tuple[str, ...]
    operands: tuple[Expression, ...]


@dataclass(frozen=True, slots=True)
class Logical:
    """``a and b and c`` or ``a or b``; operator is ``and`` or ``or``."""

    start: int
    end: int
    operator: str
    operands: tuple[Expression, ...]


@dataclass(frozen=True, slots=True)
class Call:
    """``name(arguments)``; a built-in function, a definition or a curve."""

    start: int
    end: int
    name: str
    name_end: int
    arguments: tuple[Expression, ...]


@dataclass(frozen=True, slots=True)
class Conditional:
    """``if condition then a else b``."""

    start: int
    end: int
    condition: Expression
    then: Expression
    otherwise: Expression


@dataclass(frozen=True, slots=True)
class Range:
    """``first..last``, whole numbers, both ends included."""

    start: int
    end: int
    first: Expression
    last: Expression


@dataclass(frozen=True, slots=True)
class IndexClause:
    """``i in 1..N`` or ``s in species``."""

    start: int
    end: int
    index: str
    over: Range | Reference


@dataclass(frozen=True, slots=True)
class Aggregate:
    """``sum(body for i in 1..N if filter)``; function is ``sum prod min max``."""

    start: int
    end: int
    function: str
    body: Expression
    clauses: tuple[IndexClause, ...]
    filter: Expression | None = None


Expression: TypeAlias = (
    Number | Reference | Text | Unary | Binary | Comparison | Logical | Call | Conditional | Aggregate
)

# --- statements -------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Tolerance:
    """``± 0.1 mm``, ``± 2 %``, ``± 0.1 mm (k=2)``; ``coverage`` is the k as written or None."""

    start: int
    end: int
    half_width: Number
    coverage: Number | None = None


@dataclass(frozen=True, slots=True)
class Equation:
    """``left = right`` with its tolerance (on a known) and its validity conditions."""

    start: int
    end: int
    left: Expression
    right: Expression
    tolerance: Tolerance | None = None
    valid: tuple[Expression, ...] = ()


@dataclass(frozen=True, slots=True)
class NamePattern:
    """A name with ``*`` in a guess: ``c_*`` or ``supply.x_*``."""

    start: int
    end: int
    pattern: str


@dataclass(frozen=True, slots=True)
class Guess:
    """``target near value within lower .. upper``; any part may be missing, not all."""

    start: int
    end: int
    target: Reference | NamePattern
    near: Expression | None = None
    lower: Expression | None = None
    upper: Expression | None = None


@dataclass(frozen=True, slots=True)
class Limit:
    """``require condition`` with an optional ``within`` for ``a = b``.

    ``relative`` is true where ``within`` was written in percent.
    """

    start: int
    end: int
    condition: Expression
    within: Expression | None = None
    relative: bool = False


@dataclass(frozen=True, slots=True)
class ShowItem:
    """One quantity of a `Show` and the unit wanted, if any."""

    start: int
    end: int
    target: Reference
    unit: UnitText | None = None


@dataclass(frozen=True, slots=True)
class Show:
    """``show V in L/min, T2 in degC``."""

    start: int
    end: int
    items: tuple[ShowItem, ...]


@dataclass(frozen=True, slots=True)
class Parameter:
    """A parameter of a definition or curve, with its built-in unit if it has one."""

    start: int
    end: int
    name: str
    unit: UnitText | None = None


@dataclass(frozen=True, slots=True)
class Definition:
    """``define f(a in m) in Pa = body valid ...``; units all None for a plain definition."""

    start: int
    end: int
    name: str
    name_end: int
    parameters: tuple[Parameter, ...]
    result_unit: UnitText | None
    body: Expression
    valid: tuple[Expression, ...] = ()


@dataclass(frozen=True, slots=True)
class NewUnit:
    """``new unit EUR`` or ``new unit skid = 48 EUR``."""

    start: int
    end: int
    symbol: str
    value: Number | None = None


@dataclass(frozen=True, slots=True)
class Family:
    """Head of ``for i in 1..N if filter:``; the group is the statement's ``body``."""

    start: int
    end: int
    clauses: tuple[IndexClause, ...]
    filter: Expression | None = None


@dataclass(frozen=True, slots=True)
class Column:
    """A column of `Rows`: ``M in g/mol``, or ``a of bus`` (``of`` names the set its cells are members of)."""

    start: int
    end: int
    name: str
    unit: UnitText | None = None
    of: str | None = None


@dataclass(frozen=True, slots=True)
class Cell:
    """One cell of an inline table: the text, unquoted where ``quoted``."""

    start: int
    end: int
    text: str
    quoted: bool = False


@dataclass(frozen=True, slots=True)
class TableRow:
    """One indented row of a table; a statement of its own inside the group of `Rows`, `Curve`, `Surface`."""

    start: int
    end: int
    cells: tuple[Cell, ...]


@dataclass(frozen=True, slots=True)
class Rows:
    """Head of ``rows species: z, M in g/mol`` or ``rows bus from "bus.csv"``.

    Once a file is read, ``heading`` is its first line as a statement, and places in ``columns`` count in it.
    """

    start: int
    end: int
    name: str
    columns: tuple[Column, ...]
    path: Text | None = None
    heading: Statement | None = None


@dataclass(frozen=True, slots=True)
class Curve:
    """Head of ``curve head(Q in m^3/h) in m by line:``; two parameters make it a ``surface``.

    ``interpolation`` is ``smooth``, ``line`` or ``step``.
    """

    start: int
    end: int
    name: str
    name_end: int
    parameters: tuple[Parameter, ...]
    result_unit: UnitText | None
    interpolation: str
    path: Text | None = None


@dataclass(frozen=True, slots=True)
class Template:
    """Head of ``template pipe:``."""

    start: int
    end: int
    name: str


@dataclass(frozen=True, slots=True)
class Shared:
    """``shared rho, mu`` inside a template."""

    start: int
    end: int
    names: tuple[Reference, ...]


@dataclass(frozen=True, slots=True)
class Use:
    """``use pipe as supply`` or ``use pipe as p[l]``, with an optional group."""

    start: int
    end: int
    template: str
    instance: Reference


@dataclass(frozen=True, slots=True)
class Include:
    """``include "glycol.eqsheet"``."""

    start: int
    end: int
    path: Text


StatementNode: TypeAlias = (
    Equation
    | Guess
    | Limit
    | Show
    | Definition
    | NewUnit
    | Family
    | Rows
    | TableRow
    | Curve
    | Template
    | Shared
    | Use
    | Include
)


@dataclass(frozen=True, slots=True)
class LogicalLine:
    """A statement's text, from its first to its last character, without indentation and end comment.

    Attributes
    ----------
    text : str
        As in the source; a continued statement keeps its line ends and inner comments.
    offset : int
        Offset of its first character in the source.
    line : int
        Number of its first physical line, from 1.
    indent : int
        Columns of indentation before it.
    comment : str
        The comment that ends its last physical line, without ``#`` and outer space; empty if none.
    """

    text: str
    offset: int
    line: int
    indent: int
    comment: str = ""


@dataclass(frozen=True, slots=True)
class Statement:
    """One statement in its place.

    Attributes
    ----------
    node : StatementNode
    line : LogicalLine
    source : Source
    label : str
        Its label, empty if none.
    off : bool
        Switched off by the word ``off``, itself or through the group it stands in.
    description, origin, assumption : str
        From the end comment: the text before ``source:`` / ``assume:``, and those two notes; empty if none.
    section : str
        Title of the section it stands in, empty before the first.
    body : tuple of Statement
        The indented group below it; empty for statements without one.
    """

    node: StatementNode
    line: LogicalLine
    source: Source
    label: str = ""
    off: bool = False
    description: str = ""
    origin: str = ""
    assumption: str = ""
    section: str = ""
    body: tuple[Statement, ...] = ()

    def span(self, start: int, end: int) -> Span:
        """Place in the source of the characters `start` to `end` of the logical line."""
        return Span(self.source, self.line.offset + start, self.line.offset + end)

    @property
    def whole(self) -> Span:
        """Place of the whole statement."""
        return self.span(0, len(self.line.text))


@dataclass(frozen=True, slots=True)
class Prose:
    """A comment alone on its line, or a section heading (``title`` set, ``level`` from the number of #).

    ``text`` is without the ``#`` and one space after it; a heading's is its title.
    """

    line: int
    text: str
    title: str = ""
    level: int = 0


@dataclass(frozen=True, slots=True)
class Document:
    """A whole text: its statements in order (broken ones left out) and its prose."""

    source: Source
    statements: tuple[Statement, ...]
    prose: tuple[Prose, ...]
