"""Words close to a mistyped one."""

from __future__ import annotations

from collections.abc import Iterable


def is_one_slip_away(written: str, known: str) -> bool:
    """Whether one slip makes `written` of `known`: a letter left out, added, changed, or two swapped.

    The slips are those of Damerau (A technique for computer detection and correction of spelling errors,
    Communications of the ACM 7(3), 1964, page 171).

    >>> [is_one_slip_away(word, "gpm") for word in ("gpn", "gp", "gppm", "gmp", "mpg")]
    [True, True, True, True, False]
    """
    if written == known or abs(len(written) - len(known)) > 1:
        return False
    shorter = min(len(written), len(known))
    same = 0
    while same < shorter and written[same] == known[same]:
        same += 1
    rest, other = written[same:], known[same:]
    return (
        rest[1:] == other[1:]
        or rest[1:] == other
        or rest == other[1:]
        or (rest[:2] == other[1::-1] and len(other) > 1 and rest[2:] == other[2:])
    )


def closest(written: str, known: Iterable[str], most: int = 3) -> tuple[str, ...]:
    """At most `most` of `known` one slip away from `written`, same length first, then by name.

    A word of one letter is one slip away from every other and gets no suggestion; a word of two only those
    with a letter in common.
    """
    if len(written) < 2:
        return ()
    near = [word for word in known if len(word) > 1 and is_one_slip_away(written, word)]
    return tuple(sorted(near, key=lambda word: (len(word) != len(written), word))[:most])
