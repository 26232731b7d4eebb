"""What is typed at the prompt: statement, command, name or neither; and what it is completed to."""

import pytest

from eqsheet.app.editor.completer import WorksheetCompleter
from eqsheet.app.editor.incomplete import is_incomplete
from eqsheet.app.editor.lexer import fragments
from eqsheet.app.editor.words import WORDS, Understood, understood


@pytest.mark.parametrize(
    "text",
    [
        "D = 5 mm",
        "list = 3 m",
        "save near 3 m",
        "undo within 1 .. 2",
        "value = 4",
        "find = 3",
        "off D = 3 m",
        "show list in m",
        "require quit < 3 m",
        "# list",
        "## help",
        "D = = 5 mm",
        "require v",
        "show",
        "off 3 m =",
        "a = 1\nb = 2",
    ],
)
def test_statement_goes_into_the_worksheet_whatever_its_first_word(text):
    assert understood(text, ()).name == "type"


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("12", Understood("line", "", 12)),
        ("12: D = 5 mm", Understood("replace", "D = 5 mm", 12)),
        ("delete 3", Understood("delete", "", 3)),
        ("delete 3 to 5", Understood("delete", "", 3, 5)),
        ("delete 3..5", Understood("delete", "", 3, 5)),
        ("delete 3 5", Understood("delete", "", 3, 5)),
        ("insert 7", Understood("insert", "", 7)),
        ("list", Understood("list")),
        ("list 4 to 9", Understood("list", "", 4, 9)),
        ("list Water side", Understood("list", "Water side")),
        ("  undo  ", Understood("undo")),
        ("find D =", Understood("find", "D =")),
        ("off D", Understood("off", "D")),
        ("on 4", Understood("on", "", 4)),
        ("value list", Understood("value", "list")),
        ("save as a=b.eqsheet", Understood("save", "a=b.eqsheet")),
    ],
)
def test_command_with_its_numbers_and_text(text, expected):
    assert understood(text, ()) == expected


def test_name_alone_asks_for_the_quantity_unless_it_is_a_command():
    quantities = {"v", "list"}
    assert understood("v", quantities) == Understood("value", "v")
    assert understood("list", quantities).name == "list"
    assert understood("value list", quantities) == Understood("value", "list")


@pytest.mark.parametrize("text", ["w", "lst", "delete", "list it all = not", "v 3 m/s", "12 13", "quit now"])
def test_anything_else_is_neither(text):
    assert understood(text, {"v"}).name in ("neither", "type", "list")
    if "=" not in text:
        assert understood(text, {"v"}).name == "neither"


def test_every_command_is_what_its_usage_says():
    for word in WORDS:
        for usage in word.usage.split(" | "):
            assert understood(usage, ()).name == word.name


COMPLETER = WorksheetCompleter(lambda: ["v", "v_max", "Re"], lambda: ["m", "mm", "m/s", "mol", "kPa", "K"])


@pytest.mark.parametrize(
    ("before", "started", "includes", "excludes"),
    [
        ("re", "re", ["require", "redo", "results"], ["Re"]),
        ("v", "v", ["v_max", "value"], ["v", "valid"]),
        ("D = 5 m", "m", ["mm", "mol"], ["max(", "m"]),
        ("D = 5 ", "", ["m", "kPa"], ["v"]),
        ("D = 5 W/(m", "m", ["mm"], []),
        ("show v in k", "k", ["kPa"], []),
        ("x = v", "v", ["v_max", "valid"], ["value"]),
        ("x = 2*sq", "sq", ["sqrt("], []),
        ("off R", "R", ["Re"], ["require"]),
        ("x = v # so", "", [], ["sqrt("]),
        ("x = v2 ", "", [], ["m"]),
    ],
)
def test_completion_fits_the_place(before, started, includes, excludes):
    found_started, found = COMPLETER.candidates(before)
    assert found_started == started
    assert set(includes) <= set(found)
    assert not set(excludes) & set(found)


@pytest.mark.parametrize(
    ("text", "wants_more"),
    [
        ("D = 5 mm", False),
        ("D = (5 mm", True),
        ("D = (5 mm\n+ 2 mm)", False),
        ("D = 5 mm +", True),
        ("D = 5 mm +  # and", True),
        ("D = 5 mm +\n", False),
        ("show v, ", True),
        ("# a (note", False),
        ("x near 3 ..", False),
        ("x = 3 %", False),
        ("rows pump: H in m", False),
        ("for i in 1..3:", True),
        ("for i in 1..3:\n    x[i] = 2", True),
        ("for i in 1..3:\n    x[i] = 2\n", False),
        ("energy: Q = 3 W", False),
        ("", False),
    ],
)
def test_statement_goes_on_while_it_is_not_finished(text, wants_more):
    assert is_incomplete(text) is wants_more


@pytest.mark.parametrize(
    "line",
    ["require v <= 3 m/s # fast", "x = if a < 3 then 1 else 2", "show = 3", "", "# all", 'x = "#" # y'],
)
def test_highlighting_changes_no_character(line):
    assert "".join(text for _, text, *_ in fragments(line)) == line
    assert {style for style, *_ in fragments(line)} <= {"", "class:keyword", "class:comment"}
