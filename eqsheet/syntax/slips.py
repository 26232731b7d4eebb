"""What was meant where a statement does not fit the grammar: common slips, each with its cure."""

from __future__ import annotations

from collections.abc import Callable

from eqsheet.syntax import slip_forms, slip_signs
from eqsheet.syntax.expected import in_words
from eqsheet.syntax.misfit import Misfit
from eqsheet.syntax.slip import Slip, Unexpected

# Asked in this order; the first that knows the slip names it. Signs come before forms, because a sign of
# another notation leaves the form around it broken too.
_RULES: tuple[Callable[[Misfit], Slip | None], ...] = (
    slip_signs.brackets,
    slip_signs.tolerances,
    slip_signs.numbers,
    slip_signs.units,
    slip_signs.foreign_signs,
    slip_signs.quotes,
    slip_forms.patterns,
    slip_forms.file_names,
    slip_forms.conditionals,
    slip_forms.reserved_words,
    slip_forms.colons,
    slip_forms.comparisons,
    slip_forms.equations,
    slip_forms.misspelt_words,
    slip_forms.products,
    slip_forms.operands,
)

_FORMS = {
    "SHOW": "show V in L/min, T2 in degC",
    "REQUIRE": "require v <= 2.5 m/s",
    "DEFINE": "define area(d) = pi*d^2/4",
    "NEW": "new unit EUR",
    "NEW_UNIT": "new unit EUR or new unit skid = 48 EUR",
    "FOR": "for i in 1..N: or for s in species:",
    "ROWS": "rows species: z, M in g/mol",
    "CURVE": "curve head(Q in m^3/h) in m:",
    "SURFACE": "surface eta(Q in m^3/h, n in rpm) in %:",
    "TEMPLATE": "template pipe:",
    "SHARED": "shared rho, mu",
    "USE": "use pipe as supply",
    "INCLUDE": 'include "glycol.eqsheet"',
    "OFF": "off T = 55 degC",
}


def _quoted(form: str) -> str:
    return " or ".join(f"`{one}`" for one in form.split(" or "))


def slip_of(text: str, unexpected: Unexpected) -> Slip:
    """The slip behind `unexpected` in the logical line `text`."""
    misfit = Misfit(text, unexpected.position, frozenset(unexpected.expected), unexpected.before)
    for rule in _RULES:
        slip = rule(misfit)
        if slip is not None:
            return slip
    words = in_words(misfit.expected)
    form = _FORMS.get(misfit.first) or _FORMS.get(misfit.text.split(None, 1)[0].upper(), "")
    help = f"here can stand {words}" if words else ""
    if form:
        help += ("; " if help else "") + f"the statement reads {_quoted(form)}"
    return misfit.here(
        "cannot-be-read",
        "the statement ends too early" if misfit.at_end else f"`{misfit.thing}` cannot stand here",
        help,
    )
