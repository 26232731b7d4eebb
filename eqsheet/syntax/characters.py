"""Characters that come with text pasted from documents, and what to write instead."""

from __future__ import annotations

import re
from unicodedata import category, name, normalize

from eqsheet.syntax.slip import Slip

_CURES = {
    "\u00d7": "write `*` for a product",
    "\u22c5": "write `*` for a product",
    "\u2219": "write `*` for a product",
    "\u2022": "write `*` for a product",
    "\u2217": "write `*` for a product",
    "\u00f7": "write `/` for a quotient",
    "\u2215": "write `/` for a quotient",
    "\u2044": "write `/` for a quotient",
    "\u2212": "write a hyphen, `-`, for minus",
    "\u2010": "write a hyphen, `-`, for minus",
    "\u2011": "write a hyphen, `-`, for minus",
    "\u2013": "write a hyphen, `-`, for minus; `..` for a range",
    "\u2014": "write a hyphen, `-`, for minus",
    "\u2213": "write `±` or `+-`",
    "\u2264": "write `<=`",
    "\u2265": "write `>=`",
    "\u2260": "write `!=`",
    "\u2248": "write `=`; in a limit, `require a = b within 1 %`",
    "\u2261": "write `=`",
    "\u221a": "write `sqrt( )`",
    "\u2211": "write `sum(... for i in 1..N)`",
    "\u221e": "leave the bound out: `within 0 ..`",
    "\u2026": "write `..` for a range",
    "\u00b0": "write `degC`, `degF` or `deg` after the number",
    "\u2103": "write `degC`",
    "\u2109": "write `degF`",
    "\u2018": 'write `"` round names of members',
    "\u2019": 'write `"` round names of members; a quantity may be called `x_prime`',
    "\u201c": 'write `"`',
    "\u201d": 'write `"`',
    "\u201e": 'write `"`',
    "\u2032": "a quantity may be called `x_prime`; minutes of arc are `arcmin`",
    "\u2033": "inches are `in`; seconds of arc are `arcsec`",
    "\u20ac": "make a unit of your own: `new unit EUR`",
    "\u00a3": "make a unit of your own: `new unit GBP`",
    "\u00a5": "make a unit of your own: `new unit JPY`",
    "\u2030": "write the number in `%`",
    "\u2225": "write the formula out: `1/(1/a + 1/b)`",
    "\u00b2": "write `^2`",
    "\u00b3": "write `^3`",
    "\u00b9": "write `^1`",
    "\u207b": "write `^-` and the digits",
    "\u207a": "write `^` and the digits",
    "\u2202": "write out the derivative as an equation",
    "\ufffd": "save the file as UTF-8",
    "\ufeff": "delete it",
    "\u200b": "delete it",
    "\u00ad": "delete it",
}
_NOT_ASCII = re.compile(r'"[^"\n]*"|#[^\n]*|[^\x00-\x7f]')
_ALLOWED = "±·"
_LETTERS = frozenset(("Lu", "Ll", "Lt", "Lm", "Lo", "Mn", "Mc"))


def refuse_foreign_characters(text: str) -> None:
    """Raises a `Slip` at the first character of a logical line that has no place in the language.

    Letters of every script may stand in names, `±` before a tolerance and `·` inside a unit; quoted names
    and comments hold what they like.
    """
    for found in _NOT_ASCII.finditer(text):
        character = found.group()
        if len(character) > 1 or character[0] in '"#' or character in _ALLOWED:
            continue
        plain = normalize("NFKC", character)
        if category(character) in _LETTERS and not plain.isascii():
            continue
        raise Slip(
            "foreign-character",
            f"{_described(character)} cannot stand here",
            found.start(),
            found.end(),
            _cure(character, plain),
        )


def _described(character: str) -> str:
    known = name(character, "").lower()
    visible = character.isprintable() and not character.isspace()
    shown = f"the character `{character}`" if visible else f"an invisible character (U+{ord(character):04X})"
    return f"{shown} ({known})" if known else shown


def _cure(character: str, plain: str) -> str:
    if character in _CURES:
        return _CURES[character]
    if character.isspace():
        return "replace it by an ordinary space"
    kind = category(character)
    if kind == "No" and plain.replace("\u2044", "/").isascii():
        written = plain.replace("\u2044", "/")
        below = name(character, "").startswith("SUBSCRIPT")
        return (
            f"write `{written}` in the name, as in `T{written}`"
            if below
            else (f"write `({written})`" if "/" in written else f"write `^{written}`")
        )
    if plain.isascii() and plain.isprintable():
        return f"write `{plain}`"
    if kind == "Nd":
        return "write the digits 0 to 9"
    if kind == "Cf":
        return "delete it"
    return "leave it out; other characters belong in comments or in quoted names"
