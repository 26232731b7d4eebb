"""Slips of form: parts of a statement that are missing, too many, or in the wrong place."""

from __future__ import annotations

import re
from difflib import get_close_matches

from eqsheet.syntax.misfit import COMPARISONS, ENDS_OF_OPERANDS, OPERATORS, RESERVED, Misfit
from eqsheet.syntax.slip import Slip

_STATEMENT_WORDS = (
    *("require", "show", "define", "off", "new", "for", "rows", "curve", "surface"),
    *("template", "shared", "use", "include"),
)
_IF_FORM = "write `if condition then a else b`"
_ELSE_IFS = ("elif", "elseif", "elsif")
_HEADS = ("FOR", "ROWS", "CURVE", "TEMPLATE")
_MISPLACED = {
    "valid": "it ends an equation or a definition: `Nu = 0.023*Re^0.8 valid Re > 1e4`",
    "within": "it follows the name it bounds: `x within 0 m .. 3 m`",
    "then": "it belongs to an `if`: `x = if a < b then 3 else 4`",
    "else": "it belongs to an `if`: `x = if a < b then 3 else 4`",
    "and": "it joins two conditions",
    "or": "it joins two conditions",
    "in": "it follows a name: `show V in L/min`",
    "not": "it stands before a condition",
}
_FUNCTIONS = frozenset(
    (
        *("sqrt", "exp", "ln", "log10", "sin", "cos", "tan", "asin", "acos", "atan", "atan2", "sinh", "cosh"),
        *("tanh", "abs", "sign", "min", "max", "hypot", "erf", "gamma", "logmean"),
    )
)
_PATTERN_OF_BOUNDS = re.compile(r"\*[\w.*]*[ \t]+(?:near|within)(?!\w)")
# Signs that end an operand that has not begun.
_ENDS = frozenset("*/^=<>)],:")

# Words people put before a statement, and what to write instead.
_NEEDLESS = {
    "let": "leave the word out: `x = 5 m`",
    "set": "leave the word out: `x = 5 m`",
    "var": "leave the word out; a quantity is unknown until something fixes it",
    "const": "leave the word out: `x = 5 m`",
    "given": "leave the word out: `x = 5 m`",
    "known": "leave the word out: `x = 5 m`",
    "unknown": "leave the line out; a quantity is unknown until something fixes it",
    "find": "leave the line out, or write `show x in m`",
    "solve": "leave the line out; all unknowns are solved for",
    "print": "write `show x in m`",
    "guess": "write `x near 5 m`",
    "limit": "write `require x <= 5 m`",
    "assert": "write `require x <= 5 m`",
    "def": "write `define f(x) = ...`",
    "function": "write `define f(x) = ...`",
    "import": 'write `include "file.eqsheet"`',
    "unit": "write `new unit EUR`",
    "comment": "a comment starts with `#`",
}


def conditionals(misfit: Misfit) -> Slip | None:
    """``if`` without ``then`` or ``else``, and ``then`` or ``else`` without ``if``."""
    word = misfit.word
    if misfit.first == "IF" and (
        misfit.thing == ":" or (misfit.thing == "=" and not misfit.has("EQUALS") and misfit.has("THEN"))
    ):
        return misfit.here(
            "if-statement",
            "`if` chooses between expressions, not between statements",
            "write `x = if a < b then 3 else 4`",
        )
    if word == "if" and misfit.has("EQUALS") and misfit.last in ENDS_OF_OPERANDS:
        return misfit.here("if-order", "the condition stands before what it chooses", _IF_FORM)
    if word in _ELSE_IFS:
        return misfit.here("else-if", f"`{word}` is no word of the language", "write `else if`")
    if misfit.last == "NUMBER" and misfit.last_text.endswith(_ELSE_IFS):
        # It was taken for the unit of the number before it.
        return misfit.at_last("else-if", "there is no such word in the language", "write `else if`")
    if word in ("then", "else") and word.upper() not in misfit.expected:
        if word == "then" and not misfit.has("IF") and misfit.last in ENDS_OF_OPERANDS:
            return misfit.here("stray-then", "`then` stands without an `if`", _IF_FORM)
        if word == "else" and "THEN" in misfit.expected:
            return _then_missing(misfit)
        if word == "else" and misfit.last in ENDS_OF_OPERANDS:
            return misfit.here("stray-else", "`else` stands without an `if`", _IF_FORM)
    if (
        "THEN" in misfit.expected
        and not re.search(r"(?<!\w)then(?!\w)", misfit.rest)
        and misfit.thing not in _ENDS
    ):
        return _then_missing(misfit)
    if "ELSE" in misfit.expected and (misfit.at_end or misfit.rest[:1] in (")", ",") or word in RESERVED):
        return _at_if(
            misfit,
            "else-missing",
            "this `if` needs its `else`: what holds where the condition does not?",
        )
    return None


def _then_missing(misfit: Misfit) -> Slip:
    return _at_if(misfit, "then-missing", "this `if` needs its `then`")


def _at_if(misfit: Misfit, code: str, message: str) -> Slip:
    """A slip of the last ``if``; at the misfit where none was read."""
    for terminal, start, end in reversed(misfit.before):
        if terminal == "IF":
            return Slip(code, message, start, end, _IF_FORM)
    return misfit.here(code, message, _IF_FORM)


def patterns(misfit: Misfit) -> Slip | None:
    """A ``*`` where a pattern of names was meant: alone, first, or in a ``show``."""
    if misfit.rest[:1] == "*" and misfit.first == "SHOW" and misfit.last in ("SHOW", "NAME", "COMMA"):
        return misfit.here(
            "pattern-form",
            "`show` names quantities, and takes no pattern",
            "all quantities are shown anyway; name those that come first or in a unit of their own: `show v in m/s`",
        )
    if not misfit.before and _PATTERN_OF_BOUNDS.match(misfit.rest):
        return misfit.here(
            "pattern-form",
            "a pattern begins with a letter",
            "name what the quantities have in common, `c_* within 0 mol/L ..`, or give each its own line",
        )
    return None


def reserved_words(misfit: Misfit) -> Slip | None:
    """Words of the language used as names, or where they do not belong."""
    word = misfit.word
    if not misfit.before and word in _MISPLACED and misfit.rest[len(word) :].lstrip()[:1] != "=":
        return misfit.here("misplaced-word", f"`{word}` cannot start a statement", _MISPLACED[word])
    taken = misfit.last_text
    if word == "if" and misfit.last in OPERATORS | COMPARISONS:
        return misfit.here(
            "if-without-brackets",
            "an `if` inside an expression needs brackets",
            "write `a + (if condition then b else c)`",
        )
    if misfit.last not in ENDS_OF_OPERANDS and word in RESERVED and "NAME" in misfit.expected:
        return misfit.here(
            "reserved-word",
            f"`{word}` is a word of the language and cannot be a name",
            f"choose another name, such as `{word}_1`",
        )
    if (
        taken in RESERVED
        and len([t for t in misfit.before if t[0] not in ("LABEL", "OFF")]) == 1
        and (misfit.rest[:1] in ("=", "*", "/", "^", "+") or word in ("near", "within"))
    ):
        return misfit.at_last(
            "reserved-word",
            f"`{taken}` is a word of the language and cannot be a name",
            f"choose another name, such as `{taken}_1`",
        )
    return None


def comparisons(misfit: Misfit) -> Slip | None:
    """Comparisons, conditions and ranges where an equation or a number is wanted."""
    if misfit.last not in ENDS_OF_OPERANDS:
        return None
    if misfit.thing in ("<", ">"):
        return misfit.here(
            "comparison-in-equation",
            "a comparison is no equation",
            "a limit is written `require x < 3 m`; bounds on an unknown, `x within 0 m .. 3 m`",
        )
    if misfit.word in ("and", "or"):
        return misfit.here(
            "condition-as-number",
            f"`{misfit.word}` joins conditions, and no condition stands here",
            "choose a number by a condition: `if a < b and b < c then 1 else 2`",
        )
    if misfit.rest.startswith(".."):
        return misfit.here(
            "stray-range",
            "a range cannot stand here",
            "bounds are written `x within a .. b`, indices `for i in 1..N`",
            2,
        )
    if misfit.at_end and "DOTS" in misfit.expected and misfit.has("WITHIN"):
        return misfit.here(
            "bounds-form",
            "bounds need `..` between or beside them",
            "write `within 0 .. 3`, `within 0 ..` or `within .. 3`",
        )
    return None


def equations(misfit: Misfit) -> Slip | None:
    """Equations with a side missing, without ``=``, or with two of them."""
    if misfit.rest[:1] == "=":
        if not misfit.before or misfit.last in ("LABEL", "OFF"):
            return misfit.here("side-missing", "nothing stands on the left of `=`", "write both sides")
        if misfit.first not in ("REQUIRE", "SHOW", "FOR", "IF") and misfit.has("EQUALS"):
            return _two_equals(misfit)
    if misfit.at_end and misfit.last == "EQUALS":
        return misfit.at_last(
            "side-missing",
            "nothing stands on the right of `=`",
            "write what it equals; leave the line out if the quantity is unknown",
        )
    if (
        misfit.at_end
        and "EQUALS" in misfit.expected
        and not misfit.has("EQUALS")
        and misfit.first in ("NAME", "NUMBER", "SIGNED_NUMBER", "LPAR", "MINUS", "PLUS", "IF", "DEFINE")
    ):
        start = next((s for t, s, _ in misfit.before if t not in ("LABEL", "OFF")), 0)
        return Slip(
            "equals-missing",
            "this expression alone says nothing: an equation needs `=`"
            if misfit.first != "DEFINE"
            else "a definition needs `=` and what the function gives",
            start,
            len(misfit.text),
            "write what it equals, or a guess (`x near 5`), or `show x`"
            if misfit.first != "DEFINE"
            else "write `define area(d) = pi*d^2/4`",
        )
    return None


def _two_equals(misfit: Misfit) -> Slip:
    slip = misfit.here(
        "two-equals", "an equation has one `=`", "write two equations, `a = b` and `b = c`, a line each", 1
    )
    line_start = misfit.text.rfind("\n", 0, misfit.position) + 1
    beginning = misfit.text[line_start:].lstrip()[:1]
    if line_start and beginning in "+-*/^":
        slip.notes = (
            f"the line that begins with `{beginning}` goes on with the statement above it; "
            "to make it one of its own, start it with a name, a number or a bracket",
        )
    return slip


def colons(misfit: Misfit) -> Slip | None:
    """Colons missing at a head, labels alone, colons that open nothing."""
    if misfit.at_end and misfit.last == "LABEL":
        return misfit.at_last(
            "label-alone",
            "a label needs its statement on the same line",
            "write `energy: Q = m*cp*(T2 - T1)`",
        )
    if misfit.at_end and "COLON" in misfit.expected and misfit.first in _HEADS:
        return misfit.here(
            "colon-missing", "a colon is missing at the end of this line", "end it with a colon"
        )
    if misfit.last == "COLON" and misfit.first in (*_HEADS, "USE"):
        return misfit.here(
            "group-on-line",
            "the statements of a group stand on lines of their own",
            "start a new line after the colon and indent it by four spaces",
        )
    if misfit.rest[:1] != ":":
        return None
    if misfit.rest == ":":
        return misfit.here(
            "stray-colon",
            "this line opens no group",
            "leave the colon out; it stands only after `for`, `rows`, `curve`, `surface`, `template` and `use`",
        )
    if "=" in misfit.rest and not misfit.has("EQUALS"):
        return misfit.here("label-form", "a label is one plain name", "write `energy: Q = m*cp*(T2 - T1)`", 1)
    return misfit.here("stray-colon", "a colon cannot stand here", "a range is written `1..N`", 1)


def file_names(misfit: Misfit) -> Slip | None:
    """Names of files without quotes."""
    if misfit.last == "FROM" or (misfit.last_text == "include" and len(misfit.before) == 1 and misfit.word):
        name = re.match(r"\S+", misfit.rest)
        if name:
            return misfit.here(
                "file-name-quotes",
                "the name of a file stands in quotes",
                f'write `"{name.group()}"`',
                len(name.group()),
            )
    return None


def misspelt_words(misfit: Misfit) -> Slip | None:
    """Words before a statement that do not belong, and words of the language spelt almost right."""
    if misfit.last == "NAME" and len(misfit.before) == 1 and misfit.word:
        first = misfit.last_text
        help = _NEEDLESS.get(first.lower())
        if help is not None:
            return misfit.at_last("needless-word", f"`{first}` is no word of the language", help)
        close = get_close_matches(first, _STATEMENT_WORDS, 1, 0.8)
        if first not in _STATEMENT_WORDS and (first.lower() in _STATEMENT_WORDS or close):
            return misfit.at_last(
                "misspelt-word",
                f"`{first}` is no word of the language",
                f"did you mean `{first.lower() if first.lower() in _STATEMENT_WORDS else close[0]}`?",
            )
    if misfit.last in ENDS_OF_OPERANDS and len(misfit.word) > 1:
        wanted = [t.lower() for t in misfit.expected & _WORDS_AFTER_OPERANDS]
        lower = misfit.word.lower()
        close = [lower] if lower in wanted else get_close_matches(misfit.word, wanted, 1, 0.75)
        if close and close[0] != misfit.word:
            return misfit.here(
                "misspelt-word", f"`{misfit.word}` is no word of the language", f"did you mean `{close[0]}`?"
            )
    return None


_WORDS_AFTER_OPERANDS = frozenset(
    ("THEN", "ELSE", "AND", "OR", "IN", "NEAR", "WITHIN", "VALID", "FROM", "OF", "BY", "AS", "FOR", "IF")
)


_STEPS = frozenset(("step", "by"))


# ``supply.head`` or ``p[l].head``, at the end.
_DOTTED = re.compile(r"(?P<owner>[^\W\d]\w*)(?:\[[^\]]*\])?(?:\.[^\W\d]\w*(?:\[[^\]]*\])?)*\.[^\W\d]\w*$")


def products(misfit: Misfit) -> Slip | None:
    """Two things side by side, which do not multiply."""
    thing = misfit.thing
    inch = misfit.word == "in" and misfit.last_text == ")"
    if misfit.last not in ENDS_OF_OPERANDS or (misfit.word in RESERVED and not inch) or not misfit.before:
        return None
    if not (misfit.word or thing[:1].isdigit() or thing == "("):
        return None
    if not misfit.expected >= OPERATORS and misfit.last != "UNIT":
        return None
    if misfit.has("FOR") and misfit.has("DOTS"):
        # After a number the word was taken for a unit.
        words = (misfit.word, misfit.last_text.rpartition(" ")[2] if misfit.last == "NUMBER" else "")
        if not _STEPS.isdisjoint(words):
            return misfit.with_last(
                "range-step",
                "a range has no step, it goes up by one",
                "reckon with the index, `x[2*k+1]`, or leave members out with a filter",
                len(misfit.thing),
            )
    start = _start_of_operand(misfit)
    left, right = misfit.text[start : misfit.before[-1][2]], _operand_at(misfit)
    help = f"write `{left}({right})`" if left in _FUNCTIONS else f"write `{left}*{right}`"
    dotted = _DOTTED.search(misfit.text[: misfit.position]) if thing == "(" else None
    if dotted is not None:
        help = f"for a product write `{dotted[0]}*{right}`"
        if dotted["owner"] != "const":
            help += f"; definitions and curves belong to no instance, so they are called as `{left}{right}`"
    if misfit.last == "NUMBER" and misfit.word and right == misfit.word and not misfit.touches:
        if left[-1].isdigit() and misfit.text[misfit.before[-1][2] : misfit.position] != " ":
            return Slip(
                "unit-apart",
                f"`{left}` and `{right}` stand apart: a unit follows its number directly or after one space",
                misfit.last_start,
                misfit.position + len(misfit.thing),
                f"write `{left} {right}`, or `{left}*{right}` where `{right}` is a quantity",
            )
        if left[-1].isdigit():
            help += f" for a product; a unit follows its number after one space, `{left} {right}`"
        else:
            digits, _, symbol = left.partition(" ")
            help = f"write `{digits}*{symbol}*{right}`, or `{left}*{right}` where `{symbol}` is a unit"
    elif inch:
        help = f"a unit belongs to a number: write `{left}*1 in`"
    elif misfit.last_text == ")" and misfit.word and right == misfit.word:
        help += f" for a product; a unit belongs to a number, `{left}*1 {right}`"
    elif misfit.last == "NAME" and len(misfit.before) == 1 and misfit.word:
        help += f" for a product, `{left}_{right}` for one name"
    return Slip(
        "implied-product",
        "two things side by side do not multiply",
        misfit.last_start,
        misfit.position + len(misfit.thing),
        help,
    )


def _start_of_operand(misfit: Misfit) -> int:
    """Where the operand before the misfit starts, its brackets and the name before them included."""
    depth = 0
    for i in range(len(misfit.before) - 1, -1, -1):
        terminal, start, _ = misfit.before[i]
        depth += (terminal in ("RPAR", "RSQB")) - (terminal in ("LPAR", "LSQB"))
        if depth <= 0:
            named = i > 0 and terminal in ("LPAR", "LSQB") and misfit.before[i - 1][0] == "NAME"
            return misfit.before[i - 1][1] if named else start
    return misfit.last_start


def _operand_at(misfit: Misfit) -> str:
    """The operand at the misfit, as far as one line of advice can hold it."""
    depth = 0
    start = 0 if misfit.thing == "(" else len(misfit.thing)
    if misfit.rest[start : start + 1] not in ("(", "["):
        return misfit.thing
    for i, character in enumerate(misfit.rest[start : start + 40], start):
        depth += (character in "([") - (character in ")]")
        if depth == 0:
            return misfit.rest[: i + 1]
    return misfit.rest[: start + 1] + "...)"


def operands(misfit: Misfit) -> Slip | None:
    """An operator, comma or word with nothing after it."""
    last = misfit.last
    if last in ENDS_OF_OPERANDS or not misfit.before or last in ("LABEL", "OFF"):
        return None
    if not (misfit.at_end or misfit.thing in _ENDS or misfit.word in RESERVED):
        return None
    sign = misfit.last_text
    if last in OPERATORS or last in COMPARISONS or last == "COMMA":
        message = "something is missing after " + ("the comma" if last == "COMMA" else f"`{sign}`")
    elif last in ("LPAR", "LSQB"):
        message = f"something is missing after the bracket `{sign}`"
    else:
        message = f"something is missing after `{sign}`"
    return misfit.at_last("operand-missing", message, "write what belongs there")
