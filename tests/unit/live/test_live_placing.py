"""Where a typed statement goes, and what it keeps of the one it replaces."""

import pytest

from eqsheet.diagnostics.source import Source
from eqsheet.live.placing import pieces, placed, section_at, statement_at
from eqsheet.syntax.parse import parse_document

SHEET = """\
# A pipe
## Pipe
bore: D = 52.5 mm ± 0.1 mm   # from the drawing
v = Q/(pi*D^2/4)

## Water
rho = 998 kg/m^3
f near 0.02 within 0.005 .. 0.1
off T = 20 degC  # not now
h = (1 m
     + 2 m)  # two parts
"""


def after(typed, sheet=SHEET, section=None):
    lines = sheet.removesuffix("\n").split("\n")
    document = parse_document(Source("sheet", sheet))[0]
    return "\n".join(placed(typed, lines, document, section).applied(lines)) + "\n"


@pytest.mark.parametrize(
    ("typed", "old", "new"),
    [
        (
            "D = 60 mm",
            "bore: D = 52.5 mm ± 0.1 mm   # from the drawing",
            "bore: D = 60 mm              # from the drawing",
        ),
        (
            "60 mm = D",
            "bore: D = 52.5 mm ± 0.1 mm   # from the drawing",
            "bore: 60 mm = D              # from the drawing",
        ),
        ("D = 60 mm # mine", "bore: D = 52.5 mm ± 0.1 mm   # from the drawing", "bore: D = 60 mm # mine"),
        (
            "pipe: D = 6 cm",
            "bore: D = 52.5 mm ± 0.1 mm   # from the drawing",
            "pipe: D = 6 cm               # from the drawing",
        ),
        (
            "off D = 60 mm",
            "bore: D = 52.5 mm ± 0.1 mm   # from the drawing",
            "off bore: D = 60 mm          # from the drawing",
        ),
        (
            "bore: D = 2*R",
            "bore: D = 52.5 mm ± 0.1 mm   # from the drawing",
            "bore: D = 2*R                # from the drawing",
        ),
        ("T = 55 degC", "off T = 20 degC  # not now", "T = 55 degC      # not now"),
        (
            "f near 0.03 within 0.01 .. 0.2",
            "f near 0.02 within 0.005 .. 0.1",
            "f near 0.03 within 0.01 .. 0.2",
        ),
        ("h = 4 m", "h = (1 m\n     + 2 m)  # two parts", "h = 4 m      # two parts"),
    ],
)
def test_statement_takes_the_place_of_the_one_it_is_about(typed, old, new):
    assert after(typed) == SHEET.replace(old, new)


@pytest.mark.parametrize(
    "typed",
    [
        "v = Q/A",  # an equation is no known: there may be any number of them
        "f within 0.01 .. 0.1",  # would lose the start value of the guess that is there
        "off f near 0.03",
        "require v <= 2 m/s",
        "D = = 3",  # broken: taken in as it is
        "# a note",
    ],
)
def test_anything_else_is_added_at_the_end(typed):
    assert after(typed) == SHEET + typed + "\n"


@pytest.mark.parametrize(
    ("sheet", "typed", "expected"),
    [
        (
            "f near 0.02 within 0.005 .. 0.1 # guess\n",
            "f near 0.03",
            "f near 0.03 within 0.005 .. 0.1 # guess\n",
        ),
        ("f within 0.005 .. 0.1 near 0.02\n", "f near 2*f_0", "f within 0.005 .. 0.1 near 2*f_0\n"),
        ("  show V in L/min, T in degC\n", "show V in m^3/h", "  show V in m^3/h, T in degC\n"),
        ("show V in L/min, T in degC\n", "show T in K", "show V in L/min, T in K\n"),
        ("show V, T in degC\n", "show V in m^3/h", "show V in m^3/h, T in degC\n"),
        ("off show V in L/min\n", "show V in m^3/h", "off show V in L/min\nshow V in m^3/h\n"),
        ("show V in L/min\n", "show T in K", "show V in L/min\nshow T in K\n"),
        ("f within 0.005 .. 0.1\n", "f near 0.03", "f within 0.005 .. 0.1\nf near 0.03\n"),
    ],
)
def test_part_of_a_statement_is_given_anew(sheet, typed, expected):
    assert after(typed, sheet) == expected


def test_addition_joins_the_section_last_touched():
    assert after("Q = 3 L/s", section="Pipe") == SHEET.replace("D^2/4)\n", "D^2/4)\nQ = 3 L/s\n")


def test_addition_before_the_first_heading():
    assert after("Q = 3 L/s", section="") == SHEET.replace("# A pipe\n", "# A pipe\nQ = 3 L/s\n")


def test_new_section_goes_to_the_end_after_a_blank_line():
    assert after("## Pump", section="Pipe") == SHEET + "\n## Pump\n"


def test_known_in_use_is_replaced_before_one_that_is_off():
    sheet = "off D = 1 m\nD = 2 m\n"
    assert after("D = 3 m", sheet) == "off D = 1 m\nD = 3 m\n"


def test_comment_moves_no_further_than_it_must():
    assert after("D = 123456 mm", "D = 5 m # a\n") == "D = 123456 mm # a\n"


def test_several_statements_are_told_apart():
    text = "D = 5 mm\n\n# note\nL = 2 m +\n  3 m\nrows pump: H in m\n  a 3\n  b 4\nv = 1 m/s"
    assert pieces(text) == [
        "D = 5 mm",
        "# note",
        "L = 2 m +\n  3 m",
        "rows pump: H in m\n  a 3\n  b 4",
        "v = 1 m/s",
    ]


def test_statement_and_section_are_found_from_any_of_their_lines():
    document = parse_document(Source("sheet", SHEET))[0]
    for index in (9, 10):
        statement = statement_at(document, index)
        assert statement is not None and statement.line.line == 10
    assert statement_at(document, 0) is None
    assert [section_at(document, index) for index in (0, 1, 3, 5, 10)] == [
        "",
        "Pipe",
        "Pipe",
        "Water",
        "Water",
    ]
