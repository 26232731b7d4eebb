"""Findings that many members share, told once.

What is wrong with one member of a family, or one instance of a template, is mostly wrong with all of them. Such
findings have one code and one place, and differ in the names of members alone.
"""

from __future__ import annotations

import re
from collections.abc import Collection, Sequence
from dataclasses import replace

from eqsheet.diagnostics.diagnostic import Diagnostic
from eqsheet.worksheet.places import quoted

_QUOTED = re.compile(r"`([^`]*)`")
_NUMBER = re.compile(r"(?<![\w.])[-+]?\d+(\.\d+)?(e[-+]?\d+)?")


def fold_alike(diagnostics: Sequence[Diagnostic], names: Sequence[str]) -> list[Diagnostic]:
    """The diagnostics with all but the first of those alike left out; the first names the others' members.

    Parameters
    ----------
    diagnostics : sequence of Diagnostic
    names : sequence of str
        Of all quantities.
    """
    groups: dict[object, list[Diagnostic]] = {}
    for number, diagnostic in enumerate(diagnostics):
        groups.setdefault(number if diagnostic.span is None else _shape(diagnostic), []).append(diagnostic)
    if len(groups) == len(diagnostics):
        return list(diagnostics)
    known = frozenset(name for name in names if "[" in name or "." in name)
    return [one for group in groups.values() for one in _folded(group, known)]


def _shape(diagnostic: Diagnostic) -> tuple[object, ...]:
    """What findings alike have in common: all but names and numbers in the headline."""
    headline = _NUMBER.sub("#", _QUOTED.sub("`", diagnostic.message))
    return diagnostic.code, diagnostic.severity, diagnostic.span, headline


def _folded(group: list[Diagnostic], known: Collection[str]) -> list[Diagnostic]:
    first, *others = group
    named = [_member_of(one, known) for one in group]
    if not others or None in named:
        return group
    names = dict.fromkeys(name for name in named[1:] if name is not None and name != named[0])
    if not names:
        return [first]
    return [replace(first, notes=(*first.notes, f"the same is so of {quoted(names)}"))]


def _member_of(diagnostic: Diagnostic, known: Collection[str]) -> str | None:
    """The first member that a finding names."""
    texts = (diagnostic.message, *(label.text for label in diagnostic.labels), *diagnostic.notes)
    return next((name for name in _QUOTED.findall(" ".join(texts)) if name in known), None)
