"""Every combination of kinds under every operation, against the written table."""

from __future__ import annotations

import tomllib
from pathlib import Path
from typing import Any

import pytest
from written_formulas import formulas, statements

from eqsheet.diagnostics.diagnostic import Severity
from eqsheet.model.check_units import check_units

TABLE: dict[str, Any] = tomllib.loads(Path(__file__).with_name("reading_table.toml").read_text("utf-8"))
ORDER: list[str] = TABLE["order"]

# Each way to write the operands: names of quantities, or literals where there are any.
BASE = ["w = 2.5", "c = 4[W/K]"]
TEMPERATURES = [*BASE, "r = 20[degC]", "s = 30[degC]", "d = s - r", "u = 3[W]*h", "h = 2[K/W]"]
PRESSURES = [*BASE, "r = 2[barg]", "s = 3[barg]", "d = s - r", "u = 3[W]*h", "h = 2[Pa/W]"]
WRITINGS: dict[str, tuple[list[str], dict[str, str]]] = {
    "temperatures": (
        TEMPERATURES,
        {"reading": "r", "difference": "d", "absolute": "300[K]", "number": "2.5", "unknown": "u"},
    ),
    "temperature literals": (
        TEMPERATURES,
        {
            "reading": "20[degC]",
            "difference": "5[delta_degC]",
            "absolute": "300[K]",
            "number": "2.5",
            "unknown": "u",
        },
    ),
    "pressures": (
        PRESSURES,
        {"reading": "r", "difference": "d", "absolute": "2[bar]", "number": "2.5", "unknown": "u"},
    ),
}


def outcome(lines: list[str], with_result: bool) -> str:
    """The code of the only error, else the kind of x, else ``fits``."""
    found, names = formulas(lines)
    check = check_units(found, statements(lines), names)
    errors = {d.code for d in check.diagnostics if d.severity is Severity.ERROR}
    if errors:
        assert len(errors) == 1, errors
        return errors.pop()
    return check.kinds.kinds[names.index("x")] if with_result else "fits"


def binary_cases() -> list[Any]:
    return [
        pytest.param(rows["text"], left, right, expected, group == "binary", id=f"{left} {name} {right}")
        for group in ("binary", "statement")
        for name, rows in TABLE[group].items()
        for left in ORDER
        for right, expected in zip(ORDER, rows[left], strict=True)
    ]


@pytest.mark.parametrize("writing", WRITINGS)
@pytest.mark.parametrize(("text", "left", "right", "expected", "with_result"), binary_cases())
def test_two_operands(
    writing: str, text: str, left: str, right: str, expected: str, with_result: bool
) -> None:
    lines, words = WRITINGS[writing]
    written = text.format(a=words[left], b=_twin(words[right]) if left == right else words[right])
    extra = ["t = 25[degC]" if "temp" in writing else "t = 2.5[barg]", "e = s - t", "v = 5[W]*h"]
    line = f"x = {written}" if with_result else written
    assert outcome([*lines, *extra, line], with_result) == expected


def _twin(word: str) -> str:
    """Another operand of the same kind, so that nothing cancels."""
    return {"r": "t", "d": "e", "u": "v", "20[degC]": "24[degC]", "300[K]": "310[K]", "2[bar]": "3[bar]"}.get(
        word, word
    )


@pytest.mark.parametrize("writing", WRITINGS)
@pytest.mark.parametrize(
    ("text", "operand", "expected"),
    [
        pytest.param(text, operand, expected, id=text.format(a=operand))
        for text, row in TABLE["unary"].items()
        for operand, expected in zip(ORDER, row, strict=True)
    ],
)
def test_one_operand(writing: str, text: str, operand: str, expected: str) -> None:
    lines, words = WRITINGS[writing]
    word = words[operand]
    if text == "-{a}" and "[" in word:
        word = f"({word} + 0)"  # a sign directly before a literal would belong to the literal
    assert outcome([*lines, "x = " + text.format(a=word)], True) == expected


def test_the_table_is_complete() -> None:
    for group in ("binary", "statement"):
        for rows in TABLE[group].values():
            assert [set(rows) - {"text"}, *(len(rows[left]) for left in ORDER)] == [
                set(ORDER),
                *[len(ORDER)] * 5,
            ]
