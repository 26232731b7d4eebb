"""The page of units is generated, and current."""

from __future__ import annotations

from eqsheet.units.reference import reference
from eqsheet.units.resolve import LIST
from eqsheet.units.table import AMBIGUOUS, SPELLINGS, UNITS


def test_the_page_in_the_grammar_folder_is_current() -> None:
    """Mended by ``python -m eqsheet.units.reference > grammar/UNITS.md``."""
    assert LIST.with_name("UNITS.md").read_text(encoding="utf-8") == reference()


def test_every_unit_and_every_refusal_is_on_the_page() -> None:
    page = reference()
    assert [symbol for symbol in UNITS if f"| `{symbol}` |" not in page] == []
    assert [symbol for symbol in AMBIGUOUS if f"| `{symbol}` |" not in page] == []
    assert [written for written in SPELLINGS if f"`{written}` (" not in page] == []
