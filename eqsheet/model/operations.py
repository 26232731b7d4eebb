"""Operators of the language as operations of tapes."""

from __future__ import annotations

from fractions import Fraction

ARITHMETIC = {"+": "add", "-": "sub", "*": "mul", "/": "div"}
# operator -> (operation, operands swapped)
COMPARISON = {
    "<": ("lt", False),
    "<=": ("le", False),
    ">": ("lt", True),
    ">=": ("le", True),
    "=": ("eq", False),
}
# What an aggregate over no members comes to.
EMPTY = {"sum": Fraction(0), "prod": Fraction(1)}
