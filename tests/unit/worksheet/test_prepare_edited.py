"""A worksheet prepared from the text before it is the one prepared afresh, or is prepared afresh."""

import pytest

import eqsheet
from eqsheet.diagnostics.source import Source
from eqsheet.model.lowered_cache import LoweredCache
from eqsheet.worksheet.block_memory import BlockMemory
from eqsheet.worksheet.prepare_edited import prepare_edited
from eqsheet.worksheet.sheet import read

SHEET = """\
## Pipe
D = 52.5 mm    # bore; source: drawing
Q = 3 L/s
off v = 2 m/s
A = pi*D^2/4
v = Q/A
Nu = if v > 1 m/s then 4*v/(1 m/s) else 3
w^2 + w = Nu
w near 1 within 0 ..
require v <= 2 m/s
show v in m/s
"""


def told(solution):
    """All a solution says, places included."""
    return (
        solution.status,
        {n: (v.si, v.unit, v.error, v.line, v.statement.description) for n, v in solution.items()},
        [(b.unknowns, b.lines, b.method, b.depends, b.after) for b in solution.blocks],
        [(limit.line, limit.text, limit.holds, limit.slack) for limit in solution.limits],
        [
            (d.code, d.message, d.notes, [(x.span.start, x.span.text, x.text) for x in d.labels])
            for d in solution.diagnostics
        ],
        [s.whole.text for s in solution.statements],
    )


class Edited:
    """A worksheet read again and again, each time with what is known of the time before."""

    def __init__(self, text):
        self.cache, self.memory = LoweredCache(), BlockMemory()
        self.sheet = read(Source("sheet", text), self.cache, self.memory)
        assert self.sheet.solve().solved

    def taken_over(self, text):
        """Whether `text` can be prepared from the text before."""
        statements = read(Source("sheet", text)).document.statements
        return prepare_edited(self.sheet.unchanged, statements, self.cache) is not None

    def solve(self, text):
        self.sheet = read(Source("sheet", text), self.cache, self.memory, self.sheet.unchanged)
        return self.sheet.solve()


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("52.5 mm", "60 mm"),
        ("52.5 mm", "7 mm"),
        ("52.5 mm    # bore; source: drawing", "61 mm # other; source: letter"),
        ("D = 52.5 mm", "   D  =  58.25 mm"),
        ("## Pipe", "# above\n## Tube\n\n"),
        ("# bore", "# a much longer comment than before"),
        ("off v = 2 m/s", "off v = 3 m/s"),
        ("Q = 3 L/s", "Q = 3.5 L/s"),
    ],
)
def test_other_numbers_and_prose_are_taken_over(old, new):
    text = SHEET.replace(old, new)
    assert text != SHEET
    edited = Edited(SHEET)
    assert edited.taken_over(text)
    assert told(edited.solve(text)) == told(eqsheet.parse(text, "sheet").solve())
    # And back, from what was taken over.
    assert told(edited.solve(SHEET)) == told(eqsheet.parse(SHEET, "sheet").solve())


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("52.5 mm", "5.25 cm"),
        ("52.5 mm", "60 s"),
        ("52.5 mm", "60 mm ± 1 mm"),
        ("52.5 mm", "L"),
        ("D = 52.5 mm", "bore: D = 52.5 mm"),
        ("D = 52.5 mm", "off D = 52.5 mm"),
        ("off v", "v"),
        ("Q/A", "2*Q/A"),
        ("near 1", "near 2"),
        ("<= 2 m/s", "<= 1 m/s"),
        ("show v in m/s", "show v in km/h"),
        ("Q = 3 L/s\n", ""),
        ("Q = 3 L/s\n", "Q = 3 L/s\nz = 4 m\n"),
        ("52.5 mm", "1e400 mm"),
    ],
)
def test_anything_else_is_prepared_afresh(old, new):
    text = SHEET.replace(old, new)
    assert text != SHEET
    edited = Edited(SHEET)
    assert not edited.taken_over(text)
    assert told(edited.solve(text)) == told(eqsheet.parse(text, "sheet").solve())


@pytest.mark.parametrize("first", ["D = = 3\n", "z = 3*y\n", "x = 3 m + 4 s\n", "new unit skid = 48 kg\n"])
def test_text_that_was_wrong_between_leaves_no_trace(first):
    edited = Edited(SHEET)
    edited.solve(SHEET + first)
    text = SHEET.replace("52.5 mm", "60 mm")
    assert told(edited.solve(text)) == told(eqsheet.parse(text, "sheet").solve())


def test_known_that_settles_a_condition_may_change_the_structure():
    before = "n = 1\na = if n > 2 then x else y\nx = 3\ny = 4*a - 9\n"
    edited = Edited(before)
    text = before.replace("n = 1", "n = 3")
    assert not edited.taken_over(text)
    assert told(edited.solve(text)) == told(eqsheet.parse(text, "sheet").solve())
