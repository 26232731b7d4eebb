"""Editing sessions with scripted answers."""

import os

import pytest
from editor_driver import CTRL_C, CTRL_D, Driven

from eqsheet.app import exit_status
from eqsheet.app.main import main
from eqsheet.live.journal import recovery_path

PIPE = """\
## Pipe
D = 50 mm      # bore
v = Q/(pi*D^2/4)
Q = 3 L/s
require v <= 2 m/s
show v in m/s
"""


@pytest.fixture
def path(tmp_path):
    file = tmp_path / "pipe.eqsheet"
    file.write_text(PIPE)
    return str(file)


def text_of(path):
    with open(path, encoding="utf-8") as file:
        return file.read()


def test_start_shows_the_lines_with_their_values_and_the_verdict(path):
    said = Driven(path, ["quit"]).said
    assert "   3  v = Q/(pi*D^2/4)\n          v = 1.52789 m/s" in said
    assert "   5  require v <= 2 m/s\n          holds, 0.472 m/s (23.6%) to spare" in said
    assert "solved, the limit holds" in said


def test_start_of_a_long_worksheet_shows_its_sections(path):
    said = Driven(path, ["quit"], height=10).said
    assert "   1  ## Pipe" in said
    assert "v = Q/" not in said


def test_edit_tells_the_lines_the_values_and_the_limits_that_changed(path):
    said = Driven(path, ["D = 25 mm", "quit", "no"]).said
    assert (
        "   2  D = 25 mm      # bore\n was  D = 50 mm      # bore\nsolved, but 1 of 1 limit fails\n" in said
    )
    # v goes as D^-2, 0.003 m^3/s over pi*(25 mm)^2/4
    assert "  v  1.52789  ->  6.11155  m/s  +300%\n  D       50  ->       25  mm   -50%" in said
    assert "now fails:  v <= 2 m/s  4.11 m/s (206%) too far  line 5" in said


def test_saved_and_left(path):
    driven = Driven(path, ["D = 60 mm", "save", "quit"])
    assert driven.status == exit_status.SOLVED
    assert text_of(path) == PIPE.replace("50 mm", "60 mm")
    assert not os.path.exists(recovery_path(path))


@pytest.mark.parametrize(
    ("answers", "saved"),
    [
        (["quit", "yes"], True),
        (["quit", "no"], False),
        ([CTRL_D, "yes"], True),
        (["quit", "stay", "save", "quit"], True),
        (["quit", CTRL_C, "quit", "no"], False),
        (["quit", "perhaps", "n"], False),
    ],
)
def test_quitting_asks_when_something_is_unsaved(path, answers, saved):
    Driven(path, ["D = 60 mm", *answers])
    assert text_of(path) == (PIPE.replace("50 mm", "60 mm") if saved else PIPE)
    assert not os.path.exists(recovery_path(path))


def test_second_ctrl_d_leaves_and_keeps_the_work_for_the_next_start(path):
    driven = Driven(path, ["D = 60 mm", CTRL_D, CTRL_D])
    assert "offers them again" in driven.said
    assert os.path.exists(recovery_path(path))
    assert text_of(path) == PIPE


@pytest.mark.parametrize("leave", ["quit", CTRL_D])
def test_quitting_asks_nothing_when_all_is_saved(path, leave):
    assert len(Driven(path, ["D = 60 mm", "undo", leave]).asked) == 3


def test_wrong_line_is_taken_in_and_comes_back(path):
    driven = Driven(path, ["D = 60 mmm", "D = 60 mm   # bore", "save", "quit"])
    assert driven.asked[1] == ("2> ", "D = 60 mmm     # bore")
    assert "unknown unit `mmm`" in driven.said
    assert "The values shown are those of before" in driven.said
    assert text_of(path) == PIPE.replace("50 mm", "60 mm")


def test_broken_line_mended_takes_the_place_it_was_meant_for(path):
    driven = Driven(path, ["D = (60 mm", "D = 60 mm", "save", "quit"])
    assert driven.asked[1] == ("7> ", "D = (60 mm")
    assert text_of(path) == PIPE.replace("50 mm", "60 mm")


def test_broken_line_left_alone_stays_in_the_text(path):
    driven = Driven(path, ["D = (60 mm", CTRL_C, "v", "save", "quit"])
    assert "before: v = 1.52789 m/s" in driven.said
    assert text_of(path) == PIPE + "D = (60 mm\n"


def test_command_is_obeyed_where_a_line_is_brought_up(path):
    driven = Driven(path, ["D = (60 mm", "undo", "quit"])
    assert not driven.document.unsaved


def test_line_is_brought_up_changed_and_put_back(path):
    driven = Driven(path, ["4", "Q = 4 L/s", "4", "Q = 4 L/s", "save", "quit"])
    assert driven.asked[1] == ("4> ", "Q = 3 L/s")
    assert "line 4 is unchanged" in driven.said
    assert text_of(path) == PIPE.replace("3 L/s", "4 L/s")


def test_line_brought_up_is_kept_by_an_empty_answer_and_by_ctrl_c(path):
    driven = Driven(path, ["4", "", "4", CTRL_C, "quit"])
    assert not driven.document.unsaved


def test_long_statement_is_brought_up_whole(path):
    driven = Driven(path, ["w = (1 m +\n  2 m)", "8", CTRL_C, "quit", "no"])
    assert driven.asked[2] == ("7> ", "w = (1 m +\n  2 m)")


def test_lines_are_inserted_until_an_empty_one(path):
    Driven(path, ["insert 4", "# pump", "eta = 70 %", "", "save", "quit"])
    assert text_of(path) == PIPE.replace("Q = 3", "# pump\neta = 70 %\nQ = 3")


def test_lines_are_deleted_and_brought_back(path):
    driven = Driven(path, ["delete 5 to 6", "undo", "redo", "save", "quit"])
    assert "gone  show v in m/s" in driven.said
    assert text_of(path) == PIPE.split("require")[0]


def test_known_is_swapped_by_switching_off_and_on(path):
    Driven(path, ["off D", "v = 1 m/s", "save", "quit"])
    assert text_of(path) == PIPE.replace("D = 50 mm      #", "off D = 50 mm  #") + "v = 1 m/s\n"
    Driven(path, ["off v", "on D", "save", "quit"])
    assert text_of(path) == PIPE + "off v = 1 m/s\n"


@pytest.mark.parametrize("typed", ["off v", "on D", "off 1", "on 2", "off xyz"])
def test_nothing_to_switch_is_said(path, typed):
    driven = Driven(path, [typed, "quit"])
    assert "switched off" in driven.said or "in use" in driven.said
    assert not driven.document.unsaved


@pytest.mark.parametrize(
    "typed", ["99", "0", "delete 99", "delete 2 to 99", "insert 8", "99: x = 1", "list 99", "off 99"]
)
def test_line_that_is_not_there_is_said(path, typed):
    driven = Driven(path, [typed, "quit"])
    assert "there is no line" in driven.said


def test_name_shows_value_origin_and_lines(path):
    said = Driven(path, ["Q", "v", "value nothing", "quit"]).said
    assert "Q = 3 L/s  given, line 4\n   3  v = Q/(pi*D^2/4)\n   4  Q = 3 L/s" in said
    assert "v = 1.52789 m/s  line 3" in said
    assert "no quantity is called `nothing`" in said


def test_quantity_called_like_a_command_can_be_reached(path):
    said = Driven(path, ["list = 3 m", "value list", "quit", "no"]).said
    assert "list = 3 m  given, line 7" in said


def test_neither_comes_back_and_is_not_taken_in(path):
    driven = Driven(path, ["lits", CTRL_C, "quit"])
    assert "`lits` is no statement, no command and no quantity" in driven.said
    assert "`list`" in driven.said
    assert driven.asked[1] == ("> ", "lits")
    assert not driven.document.unsaved


def test_tables_blocks_messages_and_help_are_shown(path):
    said = Driven(
        path, ["results", "blocks", "messages", "find bore", "list Pipe", "changes", "help", "quit"]
    ).said
    assert "holds  0.472 m/s (23.6%) to spare" in said
    assert "closed form" in said
    assert "there are no messages" in said
    assert "   2  D = 50 mm      # bore" in said
    assert "nothing has moved" in said
    assert "take the last change back" in said


def test_many_changes_are_folded(tmp_path):
    file = tmp_path / "many.eqsheet"
    file.write_text("a = 1 m\n" + "".join(f"x{i} = {i + 2}*a\n" for i in range(30)))
    folded = Driven(str(file), ["a = 2 m", "quit", "no"], height=20).said
    assert "and 19 more, less; `changes` shows all" in folded
    assert "x9 " not in folded
    assert "x9 " in Driven(str(file), ["a = 2 m", "changes", "quit", "no"], height=20).said


@pytest.mark.parametrize("answer", ["no", "yes"])
def test_file_changed_by_somebody_else_is_asked_about(path, answer):
    theirs = PIPE + "# theirs\n"

    def answers():
        yield "D = 60 mm"
        with open(path, "w", encoding="utf-8") as file:
            file.write(theirs)
        yield from ("save", answer, "quit", "no")

    driven = Driven(path, answers())
    assert any("by somebody else" in question for question, _ in driven.asked)
    assert text_of(path) == (theirs if answer == "no" else PIPE.replace("50 mm", "60 mm"))


def test_failed_save_is_said_and_shows_in_the_exit_status(tmp_path):
    path = str(tmp_path / "nowhere" / "a.eqsheet")
    driven = Driven(path, ["D = 5 mm", "save", "quit", "no"])
    assert "cannot be written" in driven.said
    assert driven.status == exit_status.UNWRITABLE


def test_save_as_asks_before_it_overwrites(path, tmp_path):
    other = tmp_path / "other.eqsheet"
    other.write_text("theirs")
    Driven(path, ["D = 60 mm", f"save as {other}", "no", "quit", "no"])
    assert other.read_text() == "theirs"
    Driven(path, ["D = 60 mm", f"save as {other}", "yes", "quit"])
    assert other.read_text() == PIPE.replace("50 mm", "60 mm")
    assert text_of(path) == PIPE


def test_new_worksheet_grows_line_by_line(tmp_path):
    path = str(tmp_path / "new.eqsheet")
    driven = Driven(path, ["x = 2*y", "y = 3 m", "x", "save", "quit"])
    assert "a new worksheet" in driven.said
    assert "x = 6 m  line 1" in driven.said
    assert text_of(path) == "x = 2*y\ny = 3 m\n"


@pytest.mark.parametrize(("answer", "taken"), [("yes", True), ("no", False)])
def test_work_that_was_cut_off_is_offered(path, answer, taken):
    first = Driven(path, ["quit"]).document
    first.type("D = 60 mm")
    first.leave()
    driven = Driven(path, [answer, *(["save"] if taken else []), "quit"])
    assert "1 change of" in driven.asked[0][0]
    assert text_of(path) == (PIPE.replace("50 mm", "60 mm") if taken else PIPE)
    assert not os.path.exists(recovery_path(path))


def test_work_that_was_cut_off_stays_without_an_answer(path):
    first = Driven(path, ["quit"]).document
    first.type("D = 60 mm")
    first.leave()
    Driven(path, [CTRL_C, "quit"])
    assert os.path.exists(recovery_path(path))


def test_script_that_ends_leaves_what_is_unsaved_for_the_next_start(path):
    driven = Driven(path, ["D = 60 mm", CTRL_D], brings_up=False)
    assert "the changes are not saved" in driven.said
    assert os.path.exists(recovery_path(path))
    assert text_of(path) == PIPE
    again = Driven(path, ["quit"], brings_up=False)
    assert "left in their recovery file" in again.said
    assert os.path.exists(recovery_path(path))


def test_ctrl_c_during_a_computation_returns_to_the_prompt(path, monkeypatch):
    from eqsheet.worksheet.sheet import Worksheet

    solve = Worksheet.solve
    calls = 0

    def interrupting(self, *args, **kwargs):
        nonlocal calls
        calls += 1
        if calls == 2:
            raise KeyboardInterrupt
        return solve(self, *args, **kwargs)

    monkeypatch.setattr(Worksheet, "solve", interrupting)
    driven = Driven(path, ["D = 60 mm", "v", "save", "quit"])
    assert "interrupted" in driven.said
    assert "v = 1.52789 m/s" in driven.said
    assert text_of(path) == PIPE.replace("50 mm", "60 mm")


@pytest.mark.parametrize(
    ("name", "status"),
    [("", exit_status.UNREADABLE), ("binary", exit_status.UNREADABLE), ("-", exit_status.WRONG_USAGE)],
)
def test_what_cannot_be_edited_is_said(tmp_path, monkeypatch, capsys, name, status):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "binary").write_bytes(b"\x00\x01")
    assert main(["edit", name or "."]) == status
    assert capsys.readouterr().err
