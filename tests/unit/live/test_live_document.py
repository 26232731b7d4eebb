"""The edited worksheet: solution, history, file."""

import os

import pytest

import eqsheet
from eqsheet.live.document import ChangedOnDisk, EditedWorksheet, open_text
from eqsheet.live.journal import Journal, read_recovery, recovery_path
from eqsheet.syntax.read import TextFile

PIPE = """\
## Pipe
D = 50 mm  # bore
A = pi*D^2/4
v = Q/A
## Flow
Q = 3 L/s
require v <= 2 m/s
x + y = 3
x - y = 1
"""


@pytest.fixture
def path(tmp_path):
    file = tmp_path / "pipe.eqsheet"
    file.write_bytes(PIPE.encode())
    return str(file)


def opened(path):
    file = open_text(path)
    assert isinstance(file, TextFile)
    return EditedWorksheet(file, path, Journal(path))


def test_edit_gives_the_solution_of_the_new_text(path):
    sheet = opened(path)
    outcome = sheet.type("D = 60 mm")
    cold = eqsheet.parse("\n".join(sheet.lines)).solve()
    assert {name: value.si for name, value in outcome.solution.items()} == {
        name: v.si for name, v in cold.items()
    }


def test_edit_solves_only_the_blocks_it_touches(path):
    sheet = opened(path)
    before = sheet.memory.solved_anew
    sheet.type("Q = 4 L/s")
    # Of the blocks for A, v and (x, y) only that of v depends on Q.
    assert sheet.memory.solved_anew == before + 1


def test_line_inserted_above_solves_nothing_anew(path):
    sheet = opened(path)
    before = sheet.memory.solved_anew
    sheet.insert(1, "# a note")
    assert sheet.memory.solved_anew == before


def test_quantity_inserted_leaves_the_other_blocks_solved(path):
    sheet = opened(path)
    before = sheet.memory.solved_anew
    # Sorts before all other names, so every quantity gets another number.
    outcome = sheet.type("AA = 7 m")
    assert sheet.memory.solved_anew == before
    assert outcome.solution["x"].si == pytest.approx(2.0, rel=1e-14)
    assert outcome.solution["y"].si == pytest.approx(1.0, rel=1e-14)


def test_changes_are_the_largest_first_with_the_limits_that_changed(path):
    sheet = opened(path)
    moved = sheet.type("D = 25 mm").moved
    # v goes as D^-2: 4 times, A to a quarter, D to a half.
    assert [(c.new.name, round(c.relative, 12)) for c in moved.changes] == [
        ("v", 3.0),
        ("A", -0.75),
        ("D", -0.5),
    ]
    assert [limit.text for limit in moved.fails] == ["v <= 2 m/s"]
    again = sheet.undo()
    assert again is not None
    assert [limit.text for limit in again.moved.holds] == ["v <= 2 m/s"]


@pytest.mark.parametrize(
    "wrong", ["D = = 3", "D = 60 mmm", "D = 60 s", "require z < 3", "z = 3*zz", "x = 4 m"]
)
def test_last_good_solution_is_kept_while_the_text_is_wrong(path, wrong):
    sheet = opened(path)
    good = sheet.good
    outcome = sheet.type(wrong)
    assert not outcome.solution.solved
    assert not outcome.moved
    assert sheet.good is good
    assert any(wrong.split("#")[0].strip() in line for line in sheet.lines)


def test_change_is_told_against_the_last_good_solution(path):
    sheet = opened(path)
    sheet.type("D = = 3")
    moved = sheet.retype("D = 100 mm").moved
    # Against D = 50 mm: A fourfold, D twofold, v a quarter.
    assert [c.new.name for c in moved.changes] == ["A", "D", "v"]


def test_retyped_line_leaves_nothing_of_the_first(path):
    sheet = opened(path)
    sheet.type("D = = 3")
    sheet.retype("D = 60 mm")
    assert "\n".join(sheet.lines) + "\n" == PIPE.replace("50 mm", "60 mm")
    sheet.undo()
    assert not sheet.unsaved


def test_undo_and_redo_walk_through_all_edits(path):
    sheet = opened(path)
    states = [sheet.lines]
    for edit in (
        lambda: sheet.type("D = 60 mm"),
        lambda: sheet.insert(1, "# a note"),
        lambda: sheet.delete(2, 3),
        lambda: sheet.replace(1, 1, "# two\n# lines"),
    ):
        edit()
        states.append(sheet.lines)
    for state in reversed(states[:-1]):
        assert sheet.undo() is not None
        assert sheet.lines == state
    assert sheet.undo() is None
    for state in states[1:]:
        assert sheet.redo() is not None
        assert sheet.lines == state
    assert sheet.redo() is None


def test_several_typed_statements_are_one_edit(path):
    sheet = opened(path)
    sheet.type("D = 60 mm\nQ = 4 L/s")
    assert "\n".join(sheet.lines) + "\n" == PIPE.replace("50 mm", "60 mm").replace("3 L/s", "4 L/s")
    sheet.undo()
    assert "\n".join(sheet.lines) + "\n" == PIPE


def test_lines_that_are_not_there_are_refused(path):
    sheet = opened(path)
    for edit in (
        lambda: sheet.delete(0, 1),
        lambda: sheet.delete(1, 99),
        lambda: sheet.replace(99, 99, "x = 1"),
        lambda: sheet.insert(11, "x = 1"),
        lambda: sheet.lines_of(0),
    ):
        with pytest.raises(IndexError):
            edit()


def test_line_of_a_long_statement_stands_for_all_of_it(path):
    sheet = opened(path)
    sheet.type("w = (1 m +\n  2 m)")
    assert sheet.lines_of(10) == sheet.lines_of(11) == (10, 11)


@pytest.mark.parametrize(
    ("content", "expected"),
    [
        (b"D = 5 mm\r\nL = 2 m\r\n", b"D = 6 mm\r\nL = 2 m\r\n"),
        (b"\xef\xbb\xbfD = 5 mm\nL = 2 m\n", b"\xef\xbb\xbfD = 6 mm\nL = 2 m\n"),
        (b"L = 2 m\nD = 5 mm", b"L = 2 m\nD = 6 mm"),
        (b"D = 5 mm\n\n\n", b"D = 6 mm\n\n\n"),
    ],
)
def test_save_keeps_line_ends_mark_and_last_line(tmp_path, content, expected):
    file = tmp_path / "a.eqsheet"
    file.write_bytes(content)
    sheet = opened(str(file))
    sheet.type("D = 6 mm")
    sheet.save()
    assert file.read_bytes() == expected
    assert not sheet.unsaved


def test_new_file_is_made_on_save_and_ends_with_a_line_end(tmp_path):
    file = tmp_path / "new.eqsheet"
    sheet = opened(str(file))
    assert sheet.lines == ()
    sheet.type("D = 6 mm")
    assert not file.exists()
    sheet.save()
    assert file.read_bytes() == b"D = 6 mm\n"


def test_file_changed_by_somebody_else_is_not_overwritten(path):
    sheet = opened(path)
    sheet.type("D = 60 mm")
    with open(path, "a", encoding="utf-8") as file:
        file.write("z = 3\n")
    with pytest.raises(ChangedOnDisk):
        sheet.save()
    with open(path, encoding="utf-8") as file:
        assert file.read() == PIPE + "z = 3\n"
    sheet.overwrite()
    assert not sheet.changed_on_disk()


def test_file_made_by_somebody_else_is_not_overwritten(tmp_path):
    file = tmp_path / "new.eqsheet"
    sheet = opened(str(file))
    sheet.type("D = 6 mm")
    file.write_text("theirs")
    with pytest.raises(ChangedOnDisk):
        sheet.save()


def test_file_touched_but_the_same_is_saved(path):
    sheet = opened(path)
    sheet.type("D = 60 mm")
    os.utime(path, (1, 1))
    sheet.save()
    assert not sheet.unsaved


def test_failed_save_loses_nothing(tmp_path):
    sheet = opened(str(tmp_path / "nowhere" / "a.eqsheet"))
    sheet.type("D = 6 mm")
    with pytest.raises(OSError):
        sheet.save()
    assert sheet.unsaved and sheet.lines == ("D = 6 mm",)
    assert sheet.journal_trouble


def test_saving_elsewhere_edits_the_other_file_from_then_on(path, tmp_path):
    sheet = opened(path)
    sheet.type("D = 60 mm")
    other = str(tmp_path / "other.eqsheet")
    sheet.save_as(other)
    sheet.type("D = 70 mm")
    sheet.save()
    with open(path, encoding="utf-8") as file:
        assert file.read() == PIPE
    with open(other, encoding="utf-8") as file:
        assert file.read() == PIPE.replace("50 mm", "70 mm")


def test_recovery_file_is_there_only_while_something_is_unsaved(path):
    sheet = opened(path)
    assert not os.path.exists(recovery_path(path))
    sheet.type("D = 60 mm")
    assert os.path.exists(recovery_path(path))
    sheet.undo()
    assert not os.path.exists(recovery_path(path))
    sheet.redo()
    sheet.save()
    assert not os.path.exists(recovery_path(path))


def test_recovered_edits_can_be_undone_one_by_one(path):
    first = opened(path)
    first.type("D = 60 mm")
    first.type("Q = 4 L/s")
    first.leave()
    found = read_recovery(path)
    assert found is not None
    second = opened(path)
    outcome = second.recover(found)
    assert second.lines == first.lines
    assert outcome.solution["D"].si == 0.06
    second.undo()
    assert "\n".join(second.lines) + "\n" == PIPE.replace("50 mm", "60 mm")
    assert not second.undo().solution.diagnostics
    assert not second.unsaved


def test_recovered_edits_of_another_text_are_one_edit(path):
    first = opened(path)
    first.type("D = 60 mm")
    first.type("Q = 4 L/s")
    first.leave()
    with open(path, "w", encoding="utf-8") as file:
        file.write("# other\n" + PIPE)
    found = read_recovery(path)
    second = opened(path)
    second.recover(found)
    assert second.lines == first.lines
    second.undo()
    assert second.lines[0] == "# other"
