"""The text of the grammar file, in a checkout as in an installed package."""

from __future__ import annotations

from pathlib import Path

_PACKAGE = Path(__file__).resolve().parent.parent


def grammar_folder() -> Path:
    """The folder that holds the grammar, the language reference and the table of units.

    An installed package carries it inside (``eqsheet/grammar``); in a checkout it stands beside the package.

    Raises
    ------
    FileNotFoundError
        Where neither exists: the installation is broken.
    """
    for folder in (_PACKAGE / "grammar", _PACKAGE.parent / "grammar"):
        if (folder / "eqsheet.lark").is_file():
            return folder
    raise FileNotFoundError(f"the grammar is missing from the installation at {_PACKAGE}")


def grammar_text() -> str:
    """The grammar of one statement."""
    return (grammar_folder() / "eqsheet.lark").read_text(encoding="utf-8")
