"""Diagnostics of dimension inference: clashes, and quantities whose dimension nothing fixes."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error, warning
from eqsheet.diagnostics.shortened import shortened
from eqsheet.model.dimension_blame import Clash, Part
from eqsheet.model.dimension_cures import cure_for
from eqsheet.model.infer_dimensions import DimensionResult, Link
from eqsheet.model.tape import Formula
from eqsheet.syntax.nodes import Statement
from eqsheet.units.dimension import DIMENSIONLESS, Dimension
from eqsheet.units.dimension_names import described, dimension_word, suggested_unit

CLASH = "dimension-clash"
NOT_PLAIN = "dimension-of-argument"
OPEN = "dimension-open"

#: Names listed in one message before the rest is only counted.
MOST_NAMES = 6

#: More suspects than this accuse nobody.
MOST_SUSPECTS = 2

_REMARKS = {
    "sum": "the terms of a sum must have one dimension",
    "difference": "the terms of a difference must have one dimension",
    "comparison": "only quantities of one dimension can be compared",
    "if": "both branches of an `if` must have one dimension",
}


def dimension_diagnostics(
    result: DimensionResult,
    formulas: Sequence[Formula],
    statements: Sequence[Statement],
    names: Sequence[str],
) -> tuple[Diagnostic, ...]:
    """An error for each clash, a warning for each group of quantities without dimension.

    Parameters
    ----------
    formulas
        As given to `infer_dimensions`; ``Formula.statement`` counts in `statements`.
    names
        Of the quantities, by number.
    """
    writer = _Writer(result, formulas, statements, names)
    clashes = [writer.clash(clash) for clash in result.clashes]
    return (*clashes, *writer.open_ones())


class _Writer:
    """Puts numbers of formulas and quantities into the words of the worksheet."""

    def __init__(
        self,
        result: DimensionResult,
        formulas: Sequence[Formula],
        statements: Sequence[Statement],
        names: Sequence[str],
    ) -> None:
        self.result = result
        self.formulas = formulas
        self.statements = statements
        self.names = names

    def statement(self, formula: int) -> Statement:
        return self.statements[self.formulas[formula].statement]

    def text(self, formula: int) -> str:
        return self.statement(formula).line.text

    # --- clashes --------------------------------------------------------------------------------------

    def clash(self, clash: Clash) -> Diagnostic:
        text = self.text(clash.formula)
        formula = self.formulas[clash.formula]
        code = CLASH if clash.against is not None else NOT_PLAIN
        return error(
            code,
            self._headline(clash, shortened(text[slice(*clash.place)])),
            *self._labels(clash),
            notes=self._notes(clash),
            help=cure_for(clash, formula, self.result, self.names, text, self._suspects(clash)),
        )

    def _suspects(self, clash: Clash) -> str:
        """Knowns that may be the culprit, if they are few enough to tell."""
        if len(clash.suspects) > MOST_SUSPECTS:
            return ""
        ways = [
            f"`{self.names[s.quantity]}`{self._on_line(s.formula)} were {described(s.needed)} ({suggested_unit(s.needed)})"
            for s in clash.suspects
        ]
        return f"it would fit if {' or '.join(ways)}" if ways else ""

    def _on_line(self, formula: int) -> str:
        span = self.statement(formula).whole
        return f" on line {span.line}" if span.source.numbered else ""

    def _headline(self, clash: Clash, guilty: str) -> str:
        if clash.found is None or (clash.against is not None and clash.expected is None):
            other = shortened(self.text(clash.formula)[slice(*clash.against)]) if clash.against else ""
            versus = f" and `{other}`" if other else " and what is needed here"
            return f"`{guilty}`{versus} cannot be alike: they differ by a factor in {clash.excess.text}"
        found = _no_unit(clash)
        assert clash.expected is not None
        if clash.against is not None:
            other = shortened(self.text(clash.formula)[slice(*clash.against)])
            return f"`{other}` is {described(clash.expected)}, but `{guilty}` {found}"
        wanted = described(clash.expected)
        if clash.what == "exponent":
            return f"an exponent must be {wanted}, but `{guilty}` {found}"
        if clash.what == "base":
            return (
                f"under an exponent with a quantity in it the base must be {wanted}, but `{guilty}` {found}"
            )
        if clash.what in ("strip", "attach"):
            return f"the formula takes {wanted} here, but `{guilty}` {found}"
        return f"`{clash.what}` takes {wanted}, but `{guilty}` {found}"

    def _labels(self, clash: Clash) -> list[Label]:
        statement = self.statement(clash.formula)
        labels = [Label(statement.span(*clash.place), "" if clash.found is None else _unit_text(clash.found))]
        if clash.other_formula >= 0:
            cited = [part for part in (*clash.innocent, *clash.guilty) if self._is_cited(part, clash)]
            said = (
                f"`{self.names[cited[0].quantity]}` is {described(cited[0].dimension)} by this line"
                if cited and cited[0].dimension is not None
                else ""
            )
            labels.append(Label(self.statement(clash.other_formula).span(*clash.other_place), said))
        if clash.against is not None and clash.against != clash.place:
            said = "" if clash.expected is None else _unit_text(clash.expected)
            labels.append(Label(statement.span(*clash.against), said))
        return labels

    @staticmethod
    def _is_cited(part: Part, clash: Clash) -> bool:
        origin = part.origin
        return origin is not None and (origin.formula, origin.place) == (
            clash.other_formula,
            clash.other_place,
        )

    def _notes(self, clash: Clash) -> tuple[str, ...]:
        notes = [_REMARKS[clash.what]] if clash.what in _REMARKS else []
        parts = {part.quantity: part for part in (*clash.guilty, *clash.innocent)}
        said = [self._part(p) for p in parts.values() if p.dimension is not None and p.quantity != clash.bare]
        if not clash.literal:
            notes.extend(said[:MOST_NAMES])
        return tuple(notes)

    def _part(self, part: Part) -> str:
        assert part.dimension is not None
        facts = [_unit_text(part.dimension)] if dimension_word(part.dimension) else []
        if part.origin is not None:
            span = self.statement(part.origin.formula).whole
            if span.source.numbered:
                facts.append(f"line {span.line}")
        more = f" ({', '.join(facts)})" if facts else ""
        return f"`{self.names[part.quantity]}` is {described(part.dimension)}{more}"

    # --- quantities without dimension -----------------------------------------------------------------

    def open_ones(self) -> list[Diagnostic]:
        """A warning for each group of open quantities; those in doubt because of a clash are left out."""
        doubtful = self._doubtful()
        first: dict[int, Label] = {}
        for formula in self.formulas:
            for instruction, place in zip(formula.tape.instructions, formula.places):
                slot = instruction[1]
                if instruction[0] == "quantity" and isinstance(slot, int):
                    quantity = formula.quantities[slot]
                    if self.result.dimensions[quantity] is None and quantity not in first:
                        first[quantity] = Label(self.statements[formula.statement].span(*place))
        links: dict[int, list[Link]] = {}
        for link in self.result.links:
            links.setdefault(link.powers[0][0], []).append(link)
        return [
            self._open(
                group, [first[q] for q in group if q in first], [x for q in group for x in links.get(q, ())]
            )
            for group in self._groups()
            if not doubtful.intersection(group)
        ]

    def _doubtful(self) -> set[int]:
        """Quantities that are open only because a formula that says more of them was set aside."""
        dimensions = self.result.dimensions
        users: dict[int, list[int]] = {}
        for index, formula in enumerate(self.formulas):
            for quantity in formula.quantities:
                if dimensions[quantity] is None:
                    users.setdefault(quantity, []).append(index)
        queue = [
            q for clash in self.result.clashes for q in self.formulas[clash.formula].quantities if q in users
        ]
        doubtful = set(queue)
        for quantity in queue:
            for index in users[quantity]:
                for other in self.formulas[index].quantities:
                    if other in users and other not in doubtful:
                        doubtful.add(other)
                        queue.append(other)
        return doubtful

    def _groups(self) -> list[list[int]]:
        """The open quantities, those that hang together in one group; ordered by name."""
        leader = {quantity: quantity for quantity in self.result.unknown}

        def find(quantity: int) -> int:
            while leader[quantity] != quantity:
                leader[quantity] = leader[leader[quantity]]
                quantity = leader[quantity]
            return quantity

        for link in self.result.links:
            for other, _ in link.powers[1:]:
                leader[find(other)] = find(link.powers[0][0])
        groups: dict[int, list[int]] = {}
        for quantity in sorted(leader, key=lambda q: self.names[q]):
            groups.setdefault(find(quantity), []).append(quantity)
        return list(groups.values())

    def _open(self, group: list[int], labels: list[Label], links: list[Link]) -> Diagnostic:
        names = [self.names[quantity] for quantity in group]
        shown = _listed(names)
        plural = "s" if len(names) > 1 else ""
        notes = tuple(self._link(link) for link in links[:MOST_NAMES])
        name = names[0]
        return warning(
            OPEN,
            f"nothing fixes the dimension{plural} of {shown}",
            *labels[:MOST_NAMES],
            notes=notes,
            help=f"give {'one of them' if plural else 'it'} a guess with a unit, `{name} near 1 m`, "
            f"or a shown unit, `show {name} in m`",
        )

    def _link(self, link: Link) -> str:
        factors = "*".join(_factor(self.names[quantity], Fraction(power)) for quantity, power in link.powers)
        return f"`{factors}` is {described(link.dimension)}"


def _factor(name: str, power: Fraction) -> str:
    if power == 1:
        return name
    return f"{name}^{power}" if power.denominator == 1 and power > 0 else f"{name}^({power})"


def _listed(names: Sequence[str]) -> str:
    quoted = [f"`{name}`" for name in names[:MOST_NAMES]]
    if len(names) > MOST_NAMES:
        return f"{', '.join(quoted)} and {len(names) - MOST_NAMES} more"
    return quoted[0] if len(quoted) == 1 else f"{', '.join(quoted[:-1])} and {quoted[-1]}"


def _unit_text(dimension: Dimension) -> str:
    return "no unit" if dimension == DIMENSIONLESS else suggested_unit(dimension)


def _no_unit(clash: Clash) -> str:
    assert clash.found is not None
    if clash.literal and clash.found == DIMENSIONLESS:
        return "has no unit"
    return f"is {described(clash.found)}"
