"""What could have stood at a place, in plain words."""

from __future__ import annotations

from collections.abc import Collection

_OPERAND = frozenset(("NUMBER", "NAME", "LPAR"))
_OPERATORS = frozenset(("PLUS", "MINUS", "STAR", "SLASH", "CARET"))
_COMPARISONS = frozenset(("LESS", "LESS_EQUAL", "GREATER", "GREATER_EQUAL"))

_WORDS = {
    "NUMBER": "a number",
    "NAME": "a name",
    "TEXT": 'a name in quotes, `"..."`',
    "UNIT": "a unit",
    "LABEL": "a label",
    "PLUS_MINUS": "a tolerance (`±`)",
    "EQUALS": "`=`",
    "DOTS": "`..`",
    "DOT": "`.`",
    "COMMA": "a comma",
    "COLON": "a colon",
    "LPAR": "`(`",
    "RPAR": "`)`",
    "LSQB": "`[`",
    "RSQB": "`]`",
    "THEN": "`then`",
    "ELSE": "`else`",
    "AND": "`and`",
    "OR": "`or`",
    "NOT": "`not`",
    "IF": "`if`",
    "IN": "`in`",
    "FOR": "`for`",
    "NEAR": "`near`",
    "WITHIN": "`within`",
    "VALID": "`valid`",
    "FROM": "`from`",
    "OF": "`of`",
    "BY": "`by`",
    "AS": "`as`",
    "$END": "the end of the statement",
}


def in_words(expected: Collection[str]) -> str:
    """What the terminals `expected` stand for, as a list for a sentence.

    >>> in_words({"NUMBER", "NAME", "LPAR", "MINUS", "NOT", "IF", "SIGNED_NUMBER", "PLUS"})
    'a number, a name or an expression'
    >>> in_words({"$END", "COMMA", "IN"})
    'a comma, `in` or the end of the statement'
    """
    if "REQUIRE" in expected:
        return "a statement"
    left = set(expected)
    if len(left) > 3:  # what can go on a name is beside the point
        left -= {"DOT", "LSQB"} | (set() if left >= _OPERAND else {"LPAR"})
    parts = []
    if left >= _OPERAND:
        parts.append("a number, a name or an expression")
        left -= _OPERAND | {"SIGNED_NUMBER", "PLUS", "MINUS", "NOT", "IF"}
    elif left >= _OPERATORS:
        parts.append("an operator")
        left -= _OPERATORS
    if left >= _COMPARISONS:
        parts.append("a comparison")
        left -= _COMPARISONS | {"UNEQUAL"}
    parts.extend(word for terminal, word in _WORDS.items() if terminal in left)
    if not parts:
        return ""
    return parts[0] if len(parts) == 1 else ", ".join(parts[:-1]) + " or " + parts[-1]
