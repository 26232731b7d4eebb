"""The registry of diagnostic codes: one page of explanation a code.

A page ``pages/<code>.md`` holds: a first line ``# code: what it is``, why it is so, a block fenced as
``eqsheet-wrong`` with a worksheet that gives the code, the cure, and a block fenced as ``eqsheet`` with the
same worksheet mended. Tests run both. Where no worksheet of readable length can give the code, the page has
no blocks, and its last paragraph is the cure.

``python -m eqsheet.diagnostics.codes`` prints the reference of all codes.
"""

from __future__ import annotations

import sys
from dataclasses import dataclass
from functools import cache
from pathlib import Path

PAGES = Path(__file__).resolve().with_name("pages")
_WRONG, _MENDED = "eqsheet-wrong", "eqsheet"


@dataclass(frozen=True, slots=True)
class CodePage:
    """What is written about one code.

    Attributes
    ----------
    code : str
    summary : str
        What it is, in one line.
    why, cure : str
        Markdown.
    wrong, mended : str
        Worksheets: one that gives the code, and the same without the fault; both empty where none can.
    """

    code: str
    summary: str
    why: str
    wrong: str
    cure: str
    mended: str


def read_page(text: str) -> CodePage:
    """The page written as `text`.

    Raises
    ------
    ValueError
        A part is missing or stands out of order.
    """
    title, _, rest = text.partition("\n")
    code, colon, summary = title.removeprefix("# ").partition(": ")
    if not title.startswith("# ") or not colon:
        raise ValueError("the first line must read '# code: what it is'")
    if "```" in rest:
        why, wrong, rest = _split_at_block(rest, _WRONG)
        cure, mended, rest = _split_at_block(rest, _MENDED)
    else:
        why, _, cure = rest.strip().rpartition("\n\n")
        wrong = mended = rest = ""
    if not why or not cure or rest.strip():
        raise ValueError("a page is: title, why, wrong worksheet, cure, mended worksheet, and no more")
    return CodePage(code, summary.strip(), why, wrong, cure, mended)


def _split_at_block(text: str, fence: str) -> tuple[str, str, str]:
    """Text before the first block fenced as `fence`, the block, and the text after it."""
    before, opened, rest = text.partition(f"```{fence}\n")
    block, closed, after = rest.partition("```\n")
    if not opened or not closed:
        raise ValueError(f"there is no block fenced as {fence}")
    return before.strip(), block, after


def codes() -> tuple[str, ...]:
    """All codes, sorted."""
    return tuple(sorted(path.stem for path in PAGES.glob("*.md")))


@cache
def page(code: str) -> CodePage | None:
    """The page about `code`, or None if there is no such code.

    Raises
    ------
    ValueError
        The page is not as it should be.
    """
    path = PAGES / f"{code}.md"
    if code not in codes():
        return None
    try:
        found = read_page(path.read_text(encoding="utf-8"))
    except ValueError as fault:
        raise ValueError(f"{path.name}: {fault}") from fault
    if found.code != code:
        raise ValueError(f"{path.name}: its title is about {found.code}")
    return found


def reference() -> str:
    """The reference of all codes in Markdown, as in ``grammar/DIAGNOSTICS.md``."""
    parts = [
        "# Diagnostics",
        "Every message carries a code. Below, for each: what it means, a worksheet that gives it, the\n"
        "cure, and the worksheet mended. Written by `python -m eqsheet.diagnostics.codes` from the\n"
        "pages in `eqsheet/diagnostics/pages`.",
    ]
    for code in codes():
        about = page(code)
        assert about is not None
        parts += [f"## {about.code}", f"{about.summary[:1].upper()}{about.summary[1:]}.", about.why]
        if about.wrong:
            parts += [f"```\n{about.wrong}```", about.cure, f"```\n{about.mended}```"]
        else:
            parts.append(about.cure)
    return "\n\n".join(parts) + "\n"


if __name__ == "__main__":
    sys.stdout.write(reference())
