"""Slips of signs: operators of other notations, brackets, numbers and units written otherwise."""

from __future__ import annotations

import re

from eqsheet.syntax.misfit import ENDS_OF_OPERANDS, Misfit
from eqsheet.syntax.slip import Slip

_CLOSES = {"(": ")", "[": "]"}
_BRACKET = re.compile(r'"[^"\n]*"|#[^\n]*|[()\[\]]')

_PAIRS = {
    "**": ("power-sign", "`**` is no operator", "write `^` for a power"),
    "==": ("double-equals", "`==` is no operator", "write a single `=`"),
    "<>": ("comparison-sign", "`<>` is no comparison", "write `!=`"),
    "=<": ("comparison-sign", "`=<` is no comparison", "write `<=`"),
    "=>": ("comparison-sign", "`=>` is no comparison", "write `>=`"),
    "//": ("comment-sign", "`//` is no operator", "a comment starts with `#`; a quotient has one `/`"),
    "/*": ("comment-sign", "`/*` starts no comment", "a comment starts with `#`"),
}

_SIGNS = {
    ":=": ("colon-equals", "`:=` is no operator", "write `=`; every equation holds both ways"),
    "&&": ("logical-sign", "`&&` is no operator", "write `and`"),
    "&": ("logical-sign", "`&` is no operator", "write `and`"),
    "||": ("logical-sign", "`||` is no operator", "write `or`"),
    "|": ("logical-sign", "`|` is no operator", "write `abs(x)` for a magnitude, `or` between conditions"),
    "!=": ("comparison-sign", "`!=` is no equation", "write `=`; `!=` stands in conditions only"),
    "!": (
        "logical-sign",
        "`!` is no operator",
        "write `not` before a condition; a factorial is `gamma(n + 1)`",
    ),
    "{": ("bracket-kind", "braces are not used", "write `(` and `)`"),
    "}": ("bracket-kind", "braces are not used", "write `(` and `)`"),
    ";": ("two-statements", "`;` does not end a statement", "write one statement a line"),
    "~": ("guess-sign", "`~` is no operator", "a guess is written `x near 5`"),
    "\\": ("line-end", "a backslash does not continue a line", "end the line with an operator or a comma"),
    "·": ("product-sign", "`·` joins the symbols of a unit only", "write `*` for a product"),
    "$": ("foreign-sign", "`$` has no meaning here", "a currency is a unit after its number: `5 USD`"),
    "@": ("foreign-sign", "`@` has no meaning here", "leave it out"),
    "?": ("foreign-sign", "`?` has no meaning here", "an unknown is a name that nothing fixes; leave it out"),
    "`": ("foreign-sign", "` has no meaning here", "leave it out"),
    "'": (
        "foreign-sign",
        "`'` has no meaning here",
        'a name may end in `_prime`; members are quoted with `"`',
    ),
    "%": ("percent-sign", "`%` does not follow its number", "write `5 %`, with one space or none"),
}


def brackets(misfit: Misfit) -> Slip | None:
    """Brackets closed that are not open, closed by the other kind, or empty."""
    if misfit.rest[:1] not in (")", "]"):
        return None
    closing = misfit.rest[0]
    opened: list[int] = []
    for found in _BRACKET.finditer(misfit.text, 0, misfit.position):
        mark = found.group()
        if mark in "([":
            opened.append(found.start())
        elif mark in ")]" and opened:
            opened.pop()
    if not opened:
        return misfit.here(
            "bracket-not-opened",
            f"the bracket `{closing}` closes nothing",
            "delete it, or open one before",
        )
    opening = misfit.text[opened[-1]]
    if _CLOSES[opening] != closing:
        return misfit.here(
            "bracket-mismatch",
            f"a bracket opened by `{opening}` is closed by `{closing}`",
            f"write `{_CLOSES[opening]}`",
        )
    if misfit.last in ("LPAR", "LSQB"):
        return misfit.with_last(
            "empty-brackets",
            "nothing stands between the brackets",
            "write what belongs there, or leave the brackets out",
        )
    return None


def foreign_signs(misfit: Misfit) -> Slip | None:
    """Operators and marks of other notations."""
    rest = misfit.rest
    if misfit.touches and rest:
        pair = _PAIRS.get(misfit.last_text + rest[0])
        if pair is not None:
            code, message, help = pair
            return misfit.with_last(code, message, help)
    pair = _PAIRS.get(rest[:2])
    if pair is not None:
        code, message, help = pair
        return misfit.here(code, message, help, 2)
    if misfit.last_text == "+" and misfit.touches and rest.startswith("/-"):
        return misfit.with_last("tolerance-sign", "`+/-` is no operator", "write `±` or `+-`", 2)
    for sign, (code, message, help) in _SIGNS.items():
        if rest.startswith(sign):
            return misfit.here(code, message, help, len(sign))
    return None


def numbers(misfit: Misfit) -> Slip | None:
    """Numbers written otherwise: decimal comma, nothing before or after the point, digits in groups."""
    rest, before = misfit.rest, misfit.last_text
    after_digits = misfit.last == "NUMBER" and before[-1:].isdigit()
    if rest[:1] == "," and misfit.touches and after_digits and rest[1:2].isdigit():
        return _comma(misfit, before)
    if rest[:1] == "." and rest[:2] != ".." and misfit.touches and after_digits:
        return misfit.with_last(
            "number-form",
            "a number has digits on both sides of its point",
            f"write `{before}` or `{before}.0`" if "." not in before else "write one point in a number",
        )
    found = re.match(r"\.([0-9]+)", rest)
    if found and misfit.last not in ENDS_OF_OPERANDS:
        return misfit.here(
            "number-form",
            "a number has digits on both sides of its point",
            f"write `0.{found[1]}`",
            len(found.group()),
        )
    if found and misfit.last == "DOTS":
        return misfit.here(
            "number-form", "a number has digits on both sides of its point", f"write `0.{found[1]}`"
        )
    groups = re.match(r"[0-9]{3}(?![0-9.])|_[0-9]+|'[0-9]{3}", rest)
    if groups and after_digits and "." not in before:
        whole = before + groups.group().strip("_'")
        return misfit.with_last(
            "digit-groups",
            "digits of a number stand together, without spaces or other marks",
            f"write `{whole}`",
            len(groups.group()),
        )
    return None


def _comma(misfit: Misfit, before: str) -> Slip:
    digits = re.match(r"(?:,[0-9]+)+", misfit.rest)
    assert digits is not None, misfit.rest  # a comma and a digit stand there
    groups = digits.group()
    if groups.count(",") == 1:
        point = f"{before.replace('.', '')}.{groups[1:]}"
        thousand = f", or `{before}{groups[1:]}` without the comma" if len(groups) == 4 else ""
        return misfit.with_last(
            "decimal-comma",
            f"`{before}{groups}` has a comma for a decimal point",
            f"write `{point}`{thousand}",
            len(groups),
        )
    return misfit.with_last(
        "digit-groups",
        "digits of a number stand together, without spaces or other marks",
        f"write `{before}{groups.replace(',', '')}`",
        len(groups),
    )


def units(misfit: Misfit) -> Slip | None:
    """Units in square brackets, with spaces, or missing after ``in``."""
    rest = misfit.rest
    if rest[:1] == "[" and (misfit.last == "NUMBER" or "UNIT" in misfit.expected):
        found = re.match(r"\[\s*([^\]\n]*?)\s*\]", rest)
        inside = found[1] if found else "bar"
        return misfit.here(
            "unit-in-brackets",
            "a unit stands without brackets",
            f"write `{misfit.last_text if misfit.last == 'NUMBER' else 'in'} {inside}`",
            len(found.group()) if found else 1,
        )
    if misfit.last == "UNIT" and rest[:1] in ("*", "/", "^", "·"):
        return misfit.here(
            "unit-form",
            "a unit is written without spaces",
            "write units together, as in `kJ/(kg*K)`; a power as `m^2` or `m^(1/2)`",
            1,
        )
    if misfit.expected == {"UNIT"}:
        return misfit.here(
            "unit-missing",
            "a unit must stand after `in`",
            "write a unit such as `bar`, `L/min` or `1`; an expression cannot stand there",
        )
    return None


def quotes(misfit: Misfit) -> Slip | None:
    """Quoted names that are not closed, or that stand where none can."""
    if misfit.rest[:1] != '"':
        return None
    if misfit.rest.find('"', 1) < 0:
        return misfit.here(
            "quote-not-closed", "the quoted name is not closed", 'write `"name"` with both quotes'
        )
    return misfit.here(
        "text-as-number",
        "a quoted name cannot stand here",
        'quoted names are members of a set, used as subscripts (`x["NH4+"]`), or names of files',
    )


def tolerances(misfit: Misfit) -> Slip | None:
    """Tolerances elsewhere than after the number of a known, or not one number themselves."""
    if misfit.rest[:1] == "±" or misfit.rest[:2] == "+-":
        return misfit.here(
            "tolerance-not-on-known",
            "a tolerance cannot stand here",
            "write it after the number of a known: `D = 52.5 mm ± 0.1 mm`",
            1 if misfit.rest[0] == "±" else 2,
        )
    if misfit.last == "PLUS_MINUS" and not misfit.rest.startswith("."):
        return misfit.here(
            "tolerance-form",
            "a tolerance is one positive number",
            "write the number worked out, with its unit: `± 0.1 mm` or `± 2 %`",
        )
    if misfit.has("PLUS_MINUS") and re.match(r"(?:[^\W\d]\w*)?\(\s*k", misfit.rest):
        return misfit.here("tolerance-form", "a space must stand before `(k=2)`", "write `± 0.1 mm (k=2)`")
    return None
