"""Names that a slip may have meant: other case, one letter away, or two letters in long names."""

from __future__ import annotations

from collections.abc import Iterable


def edit_distance(a: str, b: str, limit: int) -> int:
    """Number of letters to insert, drop, change or swap with their neighbour; `limit` + 1 if more.

    The restricted Damerau-Levenshtein distance (Damerau, Comm. ACM 7 (1964) 171).

    >>> edit_distance("T_out", "T_uot", 2), edit_distance("rho", "mu", 1)
    (1, 2)
    """
    if abs(len(a) - len(b)) > limit:
        return limit + 1
    before: list[int] = []
    row = list(range(len(b) + 1))
    for i, x in enumerate(a, 1):
        above, row = row, [i] + [0] * len(b)
        for j, y in enumerate(b, 1):
            row[j] = min(above[j] + 1, row[j - 1] + 1, above[j - 1] + (x != y))
            if i > 1 and j > 1 and x == b[j - 2] and a[i - 2] == y:
                row[j] = min(row[j], before[j - 2] + 1)
        before = above
        if min(row) > limit:
            return limit + 1
    return row[-1]


def close_names(name: str, candidates: Iterable[str], most: int = 3) -> tuple[str, ...]:
    """The candidates that `name` may be a slip for, nearest first, ties by name.

    >>> close_names("Flow", ["flow", "slow", "T"])
    ('flow', 'slow')
    """
    found: list[tuple[int, str]] = []
    limit = 1 if len(name) < 6 else 2
    for candidate in candidates:
        if candidate == name:
            continue
        if candidate.casefold() == name.casefold():
            found.append((0, candidate))
        elif len(name) > 2 and len(candidate) > 1:
            distance = edit_distance(name, candidate, limit)
            if distance <= limit:
                found.append((distance, candidate))
    return tuple(candidate for _, candidate in sorted(found)[:most])


def did_you_mean(name: str, candidates: Iterable[str]) -> str:
    """A sentence of help naming close candidates, or an empty text."""
    close = close_names(name, candidates)
    if not close:
        return ""
    return "did you mean " + " or ".join(f"`{c}`" for c in close) + "?"
