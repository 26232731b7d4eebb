"""Lines of other files are told with the name of their file."""

from __future__ import annotations

from pathlib import Path

import pytest

import eqsheet
from eqsheet.review.json_form import solution_data


def test_lines_of_an_included_file_and_of_a_table_name_it(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "inc.eqsheet").write_text("a = 3 m\nc = a + b\nrequire a <= 4 m\n")
    (tmp_path / "pipe.csv").write_text("pipe,L in m\nx,20\ny,30\n")
    main = Path("main.eqsheet")
    main.write_text(
        'include "inc.eqsheet"\nrows pipe from "pipe.csv"\nb = 2*a\nb^2 + d = 9 m^2\nrequire b <= 9 m\n'
    )
    data = solution_data(eqsheet.load(main).solve())
    places = {name: (one["line"], one.get("file")) for name, one in data["quantities"].items()}
    assert places == {
        "a": (1, "inc.eqsheet"),
        "b": (3, None),
        "c": (2, "inc.eqsheet"),
        "d": (4, None),
        "L[x]": (2, "pipe.csv"),
        "L[y]": (3, "pipe.csv"),
    }
    assert [(one["line"], one.get("file")) for one in data["limits"]] == [(3, "inc.eqsheet"), (5, None)]
    files = {tuple(one["unknowns"]): (one["lines"], one.get("files")) for one in data["blocks"]}
    assert files["c",] == ([2], ["inc.eqsheet"])
    assert files["b",] == ([3], None)
