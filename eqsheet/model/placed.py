"""Statements in the places where they count: in families, and in instances of templates.

Takes: the statements of a worksheet with their groups. Gives: one flat list, in which a statement of a template
stands once for each `use`, with the scope that tells what its names mean there.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field, replace

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error
from eqsheet.model.families import FamilyReference, Path, makes_members
from eqsheet.model.lower_statements import known_name
from eqsheet.model.reserved_names import reserved_name
from eqsheet.model.spelling import did_you_mean
from eqsheet.model.written_nodes import canonical, renamed
from eqsheet.syntax import nodes as syntax

# Templates inside templates multiply; more statements than this are a slip.
MOST_PLACED = 2_000_000
# Behind the name of an index that a template cannot name, with the depth of the scope it is of.
_HIDDEN = "'"
_IN_INSTANCE = (syntax.Equation, syntax.Guess)
_TOP_LEVEL_ONLY = (
    syntax.Definition,
    syntax.NewUnit,
    syntax.Rows,
    syntax.Curve,
    syntax.Template,
    syntax.Include,
)


@dataclass(frozen=True)
class Scope:
    """What names mean at a place.

    Attributes
    ----------
    path, written, nodes
        Path and subscripts of the instance, put before every local name; empty for the worksheet itself. Indices
        in `nodes` are hidden ones, except in the scope of a line in the group of a `use`.
    heads : tuple of Statement
        The `for` lines around the `use`, outermost first, those in the same scope.
    shared : frozenset of str
        Names that mean the same as around the instance.
    around : Scope or None
    use : Statement or None
        The line that makes the instance.
    """

    path: Path = ()
    written: tuple[str, ...] = ()
    nodes: tuple[syntax.Expression, ...] = ()
    shared: frozenset[str] = frozenset()
    around: Scope | None = None
    heads: tuple[syntax.Statement, ...] = ()
    use: syntax.Statement | None = None

    @property
    def depth(self) -> int:
        """How many instances it is inside of."""
        return 0 if self.around is None else self.around.depth + 1

    def resolve(self, key: str | FamilyReference) -> str | FamilyReference:
        """The quantity that a name or reference stands for here."""
        first = key if isinstance(key, str) else key.path[0][0]
        scope = self
        while scope.around is not None and first in scope.shared:
            scope = scope.around
        if not scope.path:
            return key
        if isinstance(key, str):
            return FamilyReference(
                (*scope.path, (key, 0)), scope.written, scope.nodes, inherited=len(scope.nodes)
            )
        return FamilyReference(
            (*scope.path, *key.path),
            (*scope.written, *key.written),
            (*scope.nodes, *key.nodes),
            key.fixed,
            key.place,
            len(scope.nodes) + key.inherited,
            key.whole,
        )

    @property
    def text(self) -> str:
        """The instance's name, for messages."""
        return ".".join(name for name, _ in self.path)


WORKSHEET = Scope()


@dataclass(frozen=True)
class Placed:
    """A statement in one of its places.

    Attributes
    ----------
    statement : Statement
    scope : Scope
        For its names.
    instance : Scope or None
        For a line in the group of a `use`: the instance, whose name stands on the left.
    heads : tuple of Statement
        The `for` lines around it in its own scope, outermost first.
    """

    statement: syntax.Statement
    scope: Scope = WORKSHEET
    instance: Scope | None = None
    heads: tuple[syntax.Statement, ...] = ()

    @property
    def plain(self) -> bool:
        """Whether it stands for itself alone: in no family and no instance."""
        return not self.heads and self.scope is WORKSHEET and self.instance is None


def hidden_index(name: str, depth: int) -> str:
    """What an index of a scope is called in the domains of the instances inside it.

    >>> hidden_index("i", 0)
    "i'0"
    """
    return f"{name}{_HIDDEN}{depth}"


def is_hidden(name: str) -> bool:
    """Whether an index is one that no line can name."""
    return _HIDDEN in name


def visible_name(index: str) -> str:
    """What a hidden index is called where it can be named.

    >>> visible_name("i'0")
    'i'
    """
    return index.partition(_HIDDEN)[0]


@dataclass
class _Work:
    templates: Mapping[str, syntax.Statement]
    diagnostics: list[Diagnostic]
    placed: list[Placed] = field(default_factory=list)
    instances: dict[str, syntax.Statement] = field(default_factory=dict)
    unfolding: tuple[str, ...] = ()


def place_statements(
    statements: Sequence[syntax.Statement], diagnostics: list[Diagnostic]
) -> tuple[Placed, ...]:
    """All equations, guesses, limits and shown units in their places; slips are added to `diagnostics`."""
    templates: dict[str, syntax.Statement] = {}
    for statement in statements:
        node = statement.node
        if isinstance(node, syntax.Template):
            other = templates.setdefault(node.name, statement)
            if other is not statement:
                diagnostics.append(
                    error(
                        "template-twice",
                        f"there are two templates `{node.name}`",
                        Label(statement.whole, "again here"),
                        Label(other.whole, "first here"),
                    )
                )
    work = _Work(templates, diagnostics)
    _walk(statements, WORKSHEET, (), frozenset(), work)
    return tuple(work.placed)


def _walk(
    statements: Iterable[syntax.Statement],
    scope: Scope,
    heads: tuple[syntax.Statement, ...],
    overridden: frozenset[str],
    work: _Work,
) -> None:
    for statement in statements:
        node = statement.node
        if statement.off:
            continue
        if isinstance(node, syntax.Family):
            _walk(statement.body, scope, (*heads, statement), overridden, work)
        elif isinstance(node, syntax.Use):
            _unfold(statement, node, scope, heads, work)
        elif isinstance(node, _TOP_LEVEL_ONLY):
            if scope is not WORKSHEET or heads:
                _refuse(work, statement, "this statement stands at the margin only, not inside a group")
        elif isinstance(node, syntax.Shared):
            if scope is WORKSHEET:
                _refuse(work, statement, "`shared` stands inside a template")
        elif isinstance(node, syntax.TableRow):
            continue
        elif _sets(statement) not in overridden:
            work.placed.append(Placed(statement, scope, None, heads))


def _unfold(
    statement: syntax.Statement,
    node: syntax.Use,
    scope: Scope,
    heads: tuple[syntax.Statement, ...],
    work: _Work,
) -> None:
    """The statements of a template as those of an instance."""
    template = work.templates.get(node.template)
    here = Label(statement.whole)
    if template is None or template.off:
        work.diagnostics.append(
            error(
                "unknown-template",
                f"there is no template `{node.template}`",
                here,
                help=did_you_mean(node.template, work.templates)
                or f"write `template {node.template}:` and its lines",
            )
        )
        return
    if node.template in work.unfolding:
        work.diagnostics.append(
            error(
                "template-uses-itself", f"the template `{node.template}` uses itself{_way(node, work)}", here
            )
        )
        return
    if len(work.placed) > MOST_PLACED:
        work.diagnostics.append(error("worksheet-too-large", "templates make too many statements", here))
        return
    slip = _name_slip(statement, node.instance)
    if slip is not None:
        work.diagnostics.append(slip)
        return
    instance = _instance_scope(statement, node, scope, heads, template)
    for subscript in instance.nodes[len(scope.nodes) :]:
        if not makes_members(subscript, _indices_of(heads)):
            work.diagnostics.append(
                error(
                    "subscript-form",
                    f"`{statement.line.text[subscript.start : subscript.end]}` makes no instances",
                    Label(statement.span(subscript.start, subscript.end)),
                    help="in the brackets of an instance stand indices by themselves, members and whole numbers",
                )
            )
            return
    if work.instances.setdefault(instance.text, statement) is not statement:
        work.diagnostics.append(
            error(
                "instance-twice",
                f"there are two instances `{instance.text}`",
                Label(statement.whole, "again here"),
                Label(work.instances[instance.text].whole, "first here"),
            )
        )
        return
    own: set[str] = set()
    for line in statement.body:
        if line.off:
            continue
        if not isinstance(line.node, _IN_INSTANCE):
            _refuse(work, line, "in the group of a `use` stand knowns, equations and guesses")
            continue
        target = line.node.left if isinstance(line.node, syntax.Equation) else line.node.target
        if isinstance(target, syntax.Reference) and (first := _first_name(target)) in instance.shared:
            work.diagnostics.append(_shared_in_instance(line, target, first, instance))
            continue
        if isinstance(line.node, syntax.Guess):
            own.add(_sets(line))
        elif isinstance(target, syntax.Reference) and target.owner is None and target.subscripts is None:
            own.add(target.name)
        work.placed.append(Placed(line, scope, instance, heads))
    outer = work.unfolding
    work.unfolding = (*outer, node.template)
    _walk(template.body, _closed(instance), (), frozenset(own), work)
    work.unfolding = outer


def _first_name(reference: syntax.Reference) -> str:
    """The name that a reference begins with."""
    while reference.owner is not None:
        reference = reference.owner
    return reference.name


def _shared_in_instance(
    line: syntax.Statement, target: syntax.Reference, name: str, instance: Scope
) -> Diagnostic:
    return error(
        "shared-in-instance",
        f"`{name}` is shared, so it is no quantity of `{instance.text}` alone",
        Label(line.span(target.start, target.end)),
        help=f"write this line outside the group, where it counts for all, or take `{name}` out of `shared`",
    )


def _sets(statement: syntax.Statement) -> str:
    """What a line of an instance's group puts in its place: a known of that name, or a guess for it."""
    node = statement.node
    if isinstance(node, syntax.Guess) and isinstance(node.target, syntax.Reference):
        return f"near {canonical(node.target, {})}"
    return known_name(statement) or ""


def _way(node: syntax.Use, work: _Work) -> str:
    """Through which other templates a template uses itself; empty where it does so directly."""
    between = work.unfolding[work.unfolding.index(node.template) + 1 :]
    return "".join((", by way of ", " and ".join(f"`{name}`" for name in between))) if between else ""


def _name_slip(statement: syntax.Statement, name: syntax.Reference) -> Diagnostic | None:
    """What is wrong with the name of an instance, if anything."""
    here = Label(statement.span(name.start, name.end))
    if name.owner is not None:
        return error(
            "instance-name",
            "the name of an instance has no dot",
            here,
            help=f"write `{name.dotted.replace('.', '_')}`, or put the `use` into the template of `{name.owner.dotted}`",
        )
    return reserved_name(name.name, "instance", here)


def _instance_scope(
    statement: syntax.Statement,
    node: syntax.Use,
    scope: Scope,
    heads: tuple[syntax.Statement, ...],
    template: syntax.Statement,
) -> Scope:
    """The scope of an instance as seen by the lines of its group, which may name the indices around it."""
    chain: list[syntax.Reference] = []
    step: syntax.Reference | None = node.instance
    while step is not None:
        chain.append(step)
        step = step.owner
    path, written, nodes = list(scope.path), list(scope.written), list(scope.nodes)
    for part in reversed(chain):
        subscripts = part.subscripts or ()
        path.append((part.name, len(subscripts)))
        written.extend(canonical(s, {}) for s in subscripts)
        nodes.extend(subscripts)
    shared = frozenset(
        reference.name
        for line in template.body
        if isinstance(line.node, syntax.Shared) and not line.off
        for reference in line.node.names
    )
    return Scope(tuple(path), tuple(written), tuple(nodes), shared, scope, heads, statement)


def _indices_of(heads: Iterable[syntax.Statement]) -> list[str]:
    """The indices of some `for` lines."""
    return [c.index for h in heads if isinstance(h.node, syntax.Family) for c in h.node.clauses]


def _closed(instance: Scope) -> Scope:
    """The scope of an instance as seen by the lines of its template, which cannot name the indices around it."""
    if not instance.nodes or instance.around is None:
        return instance
    depth = instance.around.depth
    names = {index: hidden_index(index, depth) for index in _indices_of(instance.heads)}
    return replace(instance, nodes=renamed(instance.nodes, names))


def _refuse(work: _Work, statement: syntax.Statement, message: str) -> None:
    diagnostics = error("misplaced-statement", message, Label(statement.whole))
    if diagnostics not in work.diagnostics:
        work.diagnostics.append(diagnostics)
