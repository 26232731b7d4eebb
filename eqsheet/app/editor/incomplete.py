"""Whether what is typed goes on in the next line."""

from __future__ import annotations

import re

from eqsheet.diagnostics.source import Source
from eqsheet.syntax.lines import logical_lines

_HEAD = re.compile(r"\s*(?:off\s+)?(?:for|rows|curve|surface|template|use)\b")


def is_incomplete(text: str) -> bool:
    """Whether the statement being typed wants another line; an empty line always ends it.

    >>> [is_incomplete(text) for text in ("a = (b", "a = b +", "a = b", "a = (b\\n", "for i in 1..3:")]
    [True, True, False, False, True]
    """
    *_, last = text.split("\n")
    if not last.strip():
        return False
    code = text.split("\n", 1)[0].split("#", 1)[0].rstrip()
    if code.endswith(":") and _HEAD.match(code):
        return True
    # Would a line that cannot begin anything be taken in as its continuation?
    probe = logical_lines(Source("typed", f"{text}\n0"))
    return len(probe.logical) > 0 and probe.logical[-1].text.endswith("\n0")
