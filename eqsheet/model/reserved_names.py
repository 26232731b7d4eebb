"""Names that mean something in every worksheet, so that nothing in one can bear them."""

from __future__ import annotations

from collections.abc import Mapping

from eqsheet.diagnostics.diagnostic import Diagnostic, Label, error

# What each of them is, in a sentence.
RESERVED: Mapping[str, str] = {
    "pi": "`pi` is the number",
    "const": "`const` holds the physical constants",
}
CODE = "reserved-name"


def reserved_name(name: str, what: str, here: Label) -> Diagnostic | None:
    """That a name is reserved and `what` (an instance, a column) cannot bear it; None for any other name."""
    if name not in RESERVED:
        return None
    return error(CODE, f"{RESERVED[name]}, so no {what} can be called so", here, help="choose another name")
