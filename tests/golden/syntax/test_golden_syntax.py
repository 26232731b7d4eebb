"""What is said of two pages stays as recorded, word for word; `record.py` records it anew."""

from __future__ import annotations

import pytest
from record import FOLDER, RECORDINGS


@pytest.mark.parametrize("name", RECORDINGS)
def test_recording(name: str) -> None:
    assert RECORDINGS[name]() == (FOLDER / name).read_text(encoding="utf-8")
