"""Literals: numbers with their units, and names, from their text."""

from __future__ import annotations

import math
import re
import sys
from fractions import Fraction
from functools import lru_cache
from unicodedata import normalize

from eqsheet.syntax.nodes import Number, UnitFactor, UnitText
from eqsheet.syntax.slip import Slip

_DIGITS = re.compile(r"[0-9]+(?:\.[0-9]+)?(?:[eE][+-]?[0-9]+)?")
_UNIT_PART = re.compile(r"(?P<symbol>[^\W\d_]\w*|%)(?:\^(?P<power>-?[0-9.]+|\([^)]*\)))?|[*·/()]|1")
# Beyond this no unit means anything, and factors leave the range of floating point.
LARGEST_UNIT_POWER = 24


def plain_name(text: str) -> str:
    """The name in one spelling: composed letters, and one micro sign and one ohm sign for both of each.

    >>> plain_name("µ") == plain_name("μ") == "μ"
    True
    """
    if text.isascii():
        return text
    return normalize("NFC", text).replace("\u00b5", "\u03bc")


def number(start: int, end: int, text: str) -> Number:
    """The node of a literal with its unit, if there is one.

    Raises
    ------
    Slip
        A value outside the range of floating point, or a power the unit cannot have.
    """
    digits = _DIGITS.match(text)
    assert digits is not None, text  # the terminal starts with them
    stop = digits.end()
    if stop == len(text):
        _check_range(start, text)
        return Number(start, end, text)
    written = digits.group()
    _check_range(start, written)
    if text[stop] == " ":
        stop += 1
    symbols = text[stop:]
    if symbols == "1":  # what looked like 1/K is no unit
        raise Slip(
            "implied-product",
            "two things side by side do not multiply",
            start,
            end,
            f"write `{written}*1`",
        )
    return Number(start, end, written, unit(start + stop, end, symbols))


def signed_number(start: int, end: int, text: str) -> Number:
    """The node of a literal with unit and the sign before it."""
    rest = text[1:].lstrip()
    plain = number(end - len(rest), end, rest)
    return Number(start, end, plain.text, plain.unit, text[0] == "-")


def _check_range(start: int, written: str) -> None:
    if len(written) < 20 and "e" not in written and "E" not in written:
        return
    value = float(written)
    # Below the normal range digits are lost one after another: 1.23e-322 would be kept as 1.24e-322.
    small = value < sys.float_info.min and re.search("[1-9]", re.split("[eE]", written)[0]) is not None
    if math.isinf(value) or small:
        raise Slip(
            "number-out-of-range",
            f"{written if len(written) < 30 else written[:27] + '...'} is too "
            + ("small" if small else "large")
            + " for floating-point arithmetic",
            start,
            start + len(written),
            "numbers lie between about 2.3e-308 and 1.7e308 in size; choose another unit",
        )


def unit(start: int, end: int, text: str) -> UnitText:
    """The node of a unit.

    Raises
    ------
    Slip
        A power that is a decimal fraction, has no value, or is out of all proportion.
    """
    factors = tuple(
        UnitFactor(start + first, start + last, symbol, exponent)
        for first, last, symbol, exponent in _factors(text, start)
    )
    return UnitText(start, end, text, factors)


def _factors(text: str, start: int) -> tuple[tuple[int, int, str, Fraction], ...]:
    try:
        return _relative_factors(text)
    except Slip as slip:  # remembered places count from the unit's start
        raise Slip(slip.code, slip.message, slip.start + start, slip.end + start, slip.help) from None


@lru_cache(maxsize=2048)
def _relative_factors(text: str) -> tuple[tuple[int, int, str, Fraction], ...]:
    factors = []
    sign = outer = 1
    for part in _UNIT_PART.finditer(text):
        symbol = part["symbol"]
        if symbol is None:
            mark = part.group()
            if mark == "(":
                outer = sign
            elif mark == ")":
                outer = 1
            elif mark == "/":
                sign = -outer
            elif mark != "1":
                sign = outer
            continue
        exponent = Fraction(1)
        if part["power"] is not None:
            exponent = _power(part["power"], part.start("power"), part.end("power"))
        factors.append((part.start(), part.end(), plain_name(symbol), sign * exponent))
    return tuple(factors)


def _power(written: str, start: int, end: int) -> Fraction:
    digits = written.strip("()")
    if "." in digits:
        raise Slip(
            "unit-power",
            f"a unit cannot have the power `{digits}`",
            start,
            end,
            f"write it as a bracketed fraction, `^({Fraction(digits)})`"
            if len(digits) < 8
            else "write it as a bracketed fraction, `^(1/2)`",
        )
    above, _, below = digits.partition("/")
    if len(digits) > 12 or (below and int(below) == 0) or abs(int(above)) > LARGEST_UNIT_POWER:
        raise Slip(
            "unit-power",
            "a unit cannot have this power",
            start,
            end,
            f"powers of units are fractions up to {LARGEST_UNIT_POWER}",
        )
    return Fraction(int(above), int(below or 1))
