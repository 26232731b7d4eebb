"""The worksheets on the pages of the codes do what the pages say."""

from __future__ import annotations

import pytest

import eqsheet
from eqsheet.diagnostics.codes import codes, page

WITH_WORKSHEETS = [code for code in codes() if (about := page(code)) is not None and about.wrong]


def codes_given_by(worksheet: str) -> set[str]:
    return {diagnostic.code for diagnostic in eqsheet.parse(worksheet).solve().diagnostics}


@pytest.mark.parametrize("code", WITH_WORKSHEETS)
def test_the_wrong_worksheet_gives_the_code(code: str) -> None:
    about = page(code)
    assert about is not None
    assert code in codes_given_by(about.wrong)


@pytest.mark.parametrize("code", WITH_WORKSHEETS)
def test_the_mended_worksheet_does_not(code: str) -> None:
    about = page(code)
    assert about is not None
    assert code not in codes_given_by(about.mended)
