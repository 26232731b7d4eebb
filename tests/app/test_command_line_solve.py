"""``eqsheet solve``: exit statuses, streams, changes for one run, and the JSON of section 6 of the design."""

from __future__ import annotations

import io
import json
from pathlib import Path
from typing import Any

import pytest

from eqsheet.app.command_line.output import MOST_PRINTED
from eqsheet.app.main import main

SOLVED = "v = Q/A\nQ = 3 L/s\nA = 12 cm^2 # free area\n"
OUTSIDE = SOLVED + "require v <= 2 m/s\n"
UNSOLVED = "x + y = 3 m\nx*y = 40 m^2\nz = 2 m\n"
INVALID = "D = 50 mm\nv = Q/D^2\n"
UNREADABLE = "\x00"
TEXTS = {
    "solved": (SOLVED, 0),
    "outside-limits": (OUTSIDE, 1),
    "unsolved": (UNSOLVED, 4),
    "invalid": (INVALID, 3),
}


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A folder to work in with one file for each status."""
    for name, (text, _) in TEXTS.items():
        (tmp_path / f"{name}.eqsheet").write_text(text, encoding="utf-8")
    (tmp_path / "binary.eqsheet").write_text(UNREADABLE, encoding="utf-8")
    monkeypatch.chdir(tmp_path)
    return tmp_path


def standard_input(monkeypatch: pytest.MonkeyPatch, content: bytes) -> None:
    monkeypatch.setattr("sys.stdin", io.TextIOWrapper(io.BytesIO(content)))


def objects(capsys: pytest.CaptureFixture[str]) -> list[dict[str, Any]]:
    """The JSON objects printed, one a line; a number that JSON does not know fails."""

    def refuse(word: str) -> float:
        raise AssertionError(f"{word} in JSON")

    out = capsys.readouterr().out
    return [json.loads(line, parse_constant=refuse) for line in out.splitlines()]


@pytest.mark.parametrize("name", TEXTS)
@pytest.mark.parametrize("command", ["solve", "check", "blocks"])
@pytest.mark.parametrize("form", [[], ["--json"]], ids=["text", "json"])
def test_exit_status(folder: Path, command: str, name: str, form: list[str]) -> None:
    assert main([command, f"{name}.eqsheet", *form]) == TEXTS[name][1]


@pytest.mark.parametrize("command", ["solve", "check", "blocks", "fmt"])
@pytest.mark.parametrize("file", ["missing.eqsheet", "binary.eqsheet", "."])
def test_a_file_that_cannot_be_read(
    folder: Path, capsys: pytest.CaptureFixture[str], command: str, file: str
) -> None:
    assert main([command, file]) == 66
    out, err = capsys.readouterr()
    assert out == ""
    assert err.startswith(f"{file}: error: cannot read {file}: ")


@pytest.mark.parametrize(
    ("names", "status"),
    [
        (["solved", "solved"], 0),
        (["outside-limits", "solved"], 1),
        (["solved", "unsolved", "outside-limits"], 4),
        (["invalid", "unsolved", "outside-limits"], 3),
        (["unsolved", "invalid", "solved"], 3),
        (["binary", "invalid"], 66),
        (["invalid", "binary"], 66),
    ],
)
def test_of_several_files_the_worst_status(folder: Path, names: list[str], status: int) -> None:
    assert main(["solve", *(f"{name}.eqsheet" for name in names)]) == status


def test_every_file_is_reported_though_one_cannot_be_read(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    main(["solve", "missing.eqsheet", "solved.eqsheet", "outside-limits.eqsheet"])
    out = capsys.readouterr().out
    assert "solved.eqsheet: solved\n" in out
    assert "outside-limits.eqsheet: " in out


def test_results_go_to_standard_output_and_messages_to_standard_error(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    main(["solve", "invalid.eqsheet"])
    out, err = capsys.readouterr()
    assert "not valid" in out
    assert "error" not in out
    assert "invalid.eqsheet:2:5: error: " in err


def test_what_is_determined_is_shown_though_the_rest_is_not(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    main(["solve", "invalid.eqsheet", "--json"])
    (invalid,) = objects(capsys)
    assert list(invalid["quantities"]) == ["D"]
    main(["solve", "unsolved.eqsheet", "--json"])
    (unsolved,) = objects(capsys)
    assert list(unsolved["quantities"]) == ["z"]
    assert sorted(unsolved["best"]) == ["x", "y"]


def test_json_has_the_keys_that_are_promised(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["solve", "outside-limits.eqsheet", "--json"]) == 1
    (found,) = objects(capsys)
    assert list(found) == [
        "format",
        "worksheet",
        "status",
        "quantities",
        "blocks",
        "limits",
        "diagnostics",
        "best",
        "timing",
    ]
    assert found["format"] == 1
    assert found["worksheet"] == "outside-limits.eqsheet"
    assert found["status"] == "outside-limits"
    v = found["quantities"]["v"]
    assert {k: v[k] for k in ("unit", "kind", "from", "block", "line")} == {
        "unit": "m/s",
        "kind": "plain",
        "from": "block",
        "block": 1,
        "line": 1,
    }
    assert v["value"] == v["si"] == pytest.approx(2.5, rel=1e-15)
    assert sorted(v) == ["block", "digits", "from", "kind", "line", "si", "unit", "value"]
    known = found["quantities"]["A"]
    assert (known["unit"], known["from"], known["block"], known["line"]) == ("cm^2", "known", None, 3)
    assert known["value"] == pytest.approx(12.0, rel=1e-15)
    (block,) = found["blocks"]
    assert sorted(block) == ["iterations", "lines", "method", "number", "residual", "unknowns"]
    assert (block["number"], block["unknowns"], block["lines"]) == (1, ["v"], [1])
    (limit,) = found["limits"]
    assert sorted(limit) == ["holds", "line", "margin", "slack", "text", "unit"]
    assert (limit["line"], limit["text"], limit["holds"], limit["unit"]) == (4, "v <= 2 m/s", False, "m/s")
    assert limit["margin"] == pytest.approx(-0.25)
    assert limit["slack"] == pytest.approx(-0.5)
    assert sorted(found["timing"]) == ["model", "parse", "solve", "structure"]


def test_a_diagnostic_in_json_has_its_place_and_its_help(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    main(["solve", "invalid.eqsheet", "--json"])
    (found,) = objects(capsys)
    one = next(d for d in found["diagnostics"] if d["code"] == "under-determined")
    assert {"code", "severity", "file", "line", "column", "message", "help"} <= set(one)
    assert (one["severity"], one["file"], one["line"], one["column"]) == ("error", "invalid.eqsheet", 2, 5)
    assert "`Q`" in one["message"]
    assert one["help"]


@pytest.mark.parametrize("command", ["solve", "check", "blocks"])
def test_json_of_a_file_that_cannot_be_read(
    folder: Path, capsys: pytest.CaptureFixture[str], command: str
) -> None:
    assert main([command, "missing.eqsheet", "--json"]) == 66
    (found,) = objects(capsys)
    assert (found["worksheet"], found["status"]) == ("missing.eqsheet", "invalid")
    (diagnostic,) = found["diagnostics"]
    assert (diagnostic["code"], diagnostic["line"], diagnostic["file"]) == (
        "unreadable-file",
        None,
        "missing.eqsheet",
    )


def test_json_of_several_files_is_one_object_a_line(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    main(["solve", *(f"{name}.eqsheet" for name in TEXTS), "missing.eqsheet", "--json"])
    assert [o["status"] for o in objects(capsys)] == [*TEXTS, "invalid"]


def test_standard_input(
    folder: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    standard_input(monkeypatch, OUTSIDE.encode())
    assert main(["solve", "-", "--json"]) == 1
    (found,) = objects(capsys)
    assert found["worksheet"] == "<stdin>"


@pytest.mark.parametrize(
    "content",
    [b"\xef\xbb\xbf" + SOLVED.encode(), SOLVED.replace("\n", "\r\n").encode(), SOLVED.rstrip().encode()],
    ids=["byte order mark", "carriage returns", "no last line end"],
)
def test_ways_to_save_a_text(folder: Path, capsys: pytest.CaptureFixture[str], content: bytes) -> None:
    Path("saved.eqsheet").write_bytes(content)
    assert main(["solve", "saved.eqsheet", "--json"]) == 0
    (found,) = objects(capsys)
    assert found["quantities"]["v"]["line"] == 1
    assert found["quantities"]["v"]["si"] == pytest.approx(2.5)


def test_with_replaces_the_known_of_that_name(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["solve", "solved.eqsheet", "--with", "Q = 6 L/s", "--json"]) == 0
    (found,) = objects(capsys)
    assert found["quantities"]["v"]["si"] == pytest.approx(5.0)
    assert found["quantities"]["Q"]["line"] is None
    assert Path("solved.eqsheet").read_text(encoding="utf-8") == SOLVED


def test_with_adds_any_other_statement(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    arguments = ["--with", "require v <= 2 m/s", "--with", "w = 2*v"]
    assert main(["solve", "solved.eqsheet", *arguments, "--json"]) == 1
    (found,) = objects(capsys)
    assert found["limits"][0]["line"] is None
    assert found["quantities"]["w"]["si"] == pytest.approx(5.0)


def test_a_slip_in_with_is_said_to_be_there(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["solve", "solved.eqsheet", "--with", "Q = 6 LL/s", "--json"]) == 3
    (found,) = objects(capsys)
    (slip,) = [d for d in found["diagnostics"] if d["code"] == "unknown-unit"]
    assert (slip["file"], slip["line"], slip["column"]) == ("--with", None, None)


def test_free_swaps_a_known_for_an_unknown(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    arguments = ["--free", "Q", "--with", "v = 4 m/s", "--json"]
    assert main(["solve", "solved.eqsheet", *arguments]) == 0
    (found,) = objects(capsys)
    assert found["quantities"]["Q"]["value"] == pytest.approx(4.8)
    assert (found["quantities"]["Q"]["unit"], found["quantities"]["Q"]["from"]) == ("L/s", "block")


def test_only_a_known_can_be_freed(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["solve", "solved.eqsheet", "--free", "v"]) == 3
    assert "[not-a-known]" in capsys.readouterr().err


@pytest.mark.parametrize(
    "arguments",
    [
        [],
        ["solve"],
        ["melt", "solved.eqsheet"],
        ["solve", "solved.eqsheet", "--jsn"],
        ["solve", "solved.eqsheet", "--with"],
        ["blocks", "solved.eqsheet", "unsolved.eqsheet"],
    ],
    ids=["nothing", "no file", "no such command", "no such option", "no statement", "two files"],
)
def test_wrong_usage(folder: Path, capsys: pytest.CaptureFixture[str], arguments: list[str]) -> None:
    assert main(arguments) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err.startswith("usage: eqsheet")


@pytest.mark.parametrize("command", [[], ["solve"], ["check"], ["blocks"], ["fmt"], ["edit"]])
def test_help_has_an_example(capsys: pytest.CaptureFixture[str], command: list[str]) -> None:
    assert main([*command, "--help"]) == 0
    assert "example" in capsys.readouterr().out


def test_version(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["--version"]) == 0
    assert capsys.readouterr().out.startswith("eqsheet ")


def test_no_message_is_printed_without_end(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    Path("many.eqsheet").write_text(
        "".join(f"x{i}^2 = 4\nx{i} + 1 = 9\n" for i in range(400)), encoding="utf-8"
    )
    assert main(["solve", "many.eqsheet"]) == 3
    err = capsys.readouterr().err
    assert err.count(": error: ") == MOST_PRINTED
    assert err.splitlines()[-1] == f"eqsheet: {400 - MOST_PRINTED} more messages; --json gives all"


def test_our_own_mistake_is_told_without_a_traceback(
    folder: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    def fail(*_: object) -> None:
        raise ZeroDivisionError("division by zero")

    monkeypatch.setattr("eqsheet.worksheet.sheet.prepare", fail)
    assert main(["solve", "solved.eqsheet"]) == 70
    err = capsys.readouterr().err
    assert len(err.splitlines()) == 1
    assert "our own mistake, please report it" in err
