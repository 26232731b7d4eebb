"""The recovery file."""

import os
import subprocess
import sys

import pytest

from eqsheet.live.journal import Journal, discard_recovery, is_in_use, read_recovery, recovery_path
from eqsheet.live.lines import Edit

FIRST, SECOND = Edit(0, ("a",), ("b", "µ")), Edit(2, (), ("c",))


@pytest.fixture
def path(tmp_path):
    return str(tmp_path / "pipe.eqsheet")


def written(path):
    journal = Journal(path)
    journal.add(("a",), FIRST)
    journal.add(("b", "µ"), SECOND)
    return journal


def test_edits_are_read_back_in_order(path):
    written(path).leave()
    found = read_recovery(path)
    assert found is not None
    assert (found.base, found.edits, found.lines) == (("a",), (FIRST, SECOND), ("b", "µ", "c"))


@pytest.mark.parametrize("cut", [1, 5, 30])
def test_record_cut_off_by_the_end_of_the_program_is_left_out(path, cut):
    written(path).leave()
    file = recovery_path(path)
    with open(file, "rb+") as stream:
        stream.truncate(os.path.getsize(file) - 1 - cut)
    found = read_recovery(path)
    assert found is not None
    assert found.lines == ("b", "µ")


@pytest.mark.parametrize("content", ["", "{", "[]", '{"format": 2, "lines": []}', '{"format": 1}', "\x00\n"])
def test_file_that_is_none_is_no_recovery(path, content):
    with open(recovery_path(path), "w", encoding="utf-8") as stream:
        stream.write(content)
    assert read_recovery(path) is None


def test_no_file_is_no_recovery(path):
    assert read_recovery(path) is None
    assert not is_in_use(path)
    discard_recovery(path)


def test_second_editor_does_not_touch_the_file_of_the_first(path):
    first = written(path)
    assert is_in_use(path)
    other = Journal(path)
    other.add(("z",), Edit(0, ("z",), ("y",)))
    assert "another editor" in other.trouble
    other.remove()
    found = read_recovery(path)
    assert found is not None and found.base == ("a",)
    first.remove()
    assert not os.path.exists(recovery_path(path))


def test_folder_that_cannot_be_written_is_told_not_raised(tmp_path):
    journal = Journal(str(tmp_path / "nowhere" / "a.eqsheet"))
    journal.add(("a",), FIRST)
    assert journal.trouble


def test_edits_outlive_a_program_that_is_killed(path):
    code = (
        "import os, signal, sys\n"
        "from eqsheet.live.document import EditedWorksheet, open_text\n"
        "from eqsheet.live.journal import Journal\n"
        "path = sys.argv[1]\n"
        "sheet = EditedWorksheet(open_text(path), path, Journal(path))\n"
        "sheet.type('D = 5 mm')\n"
        "os.kill(os.getpid(), signal.SIGKILL)\n"
    )
    done = subprocess.run([sys.executable, "-c", code, path], check=False)
    assert done.returncode == -9
    assert not is_in_use(path)
    found = read_recovery(path)
    assert found is not None and found.lines == ("D = 5 mm",)
