"""The recovery file: every edit since the last save, so that nothing is lost if the program is killed.

It stands beside the worksheet, ``.loop.eqsheet.recovery`` for ``loop.eqsheet``: one JSON value a line, first the
lines the edits start from, then the edits. It is there only while there are unsaved edits. A line cut off by the end of the
program is left out when it is read.
"""

from __future__ import annotations

import json
import os
from collections.abc import Sequence
from contextlib import suppress
from dataclasses import dataclass
from typing import IO

from eqsheet.live.lines import Edit

FORMAT = 1


@dataclass(frozen=True, slots=True)
class Recovered:
    """What a recovery file holds.

    Attributes
    ----------
    base : tuple of str
        The lines the edits start from.
    edits : tuple of Edit
    lines : tuple of str
        The lines with all edits done.
    written : float
        When it was last written, in seconds since the epoch.
    """

    base: tuple[str, ...]
    edits: tuple[Edit, ...]
    lines: tuple[str, ...]
    written: float


def recovery_path(path: str) -> str:
    """Where the recovery file of a worksheet stands.

    >>> recovery_path("work/loop.eqsheet")
    'work/.loop.eqsheet.recovery'
    """
    folder, name = os.path.split(os.path.realpath(path) if os.path.islink(path) else path)
    return os.path.join(folder, f".{name}.recovery")


def read_recovery(path: str) -> Recovered | None:
    """What the recovery file of the worksheet at `path` holds; None where there is none to be used."""
    file = recovery_path(path)
    try:
        with open(file, encoding="utf-8") as stream:
            records = stream.read().split("\n")
        written = os.stat(file).st_mtime
        head = json.loads(records[0])
        if head["format"] != FORMAT:
            return None
        base = tuple(map(str, head["lines"]))
    except (OSError, ValueError, KeyError, TypeError):
        return None
    lines = base
    edits = []
    for record in records[1:]:
        try:
            found = json.loads(record)
            edit = Edit(found["start"], tuple(found["old"]), tuple(found["new"]))
            lines = edit.applied(lines)
        except (ValueError, KeyError, TypeError):
            break
        edits.append(edit)
    return Recovered(base, tuple(edits), lines, written)


def is_in_use(path: str) -> bool:
    """Whether a running program is writing the recovery file of the worksheet at `path`."""
    try:
        with open(recovery_path(path), encoding="utf-8") as stream:
            return not _lock(stream)
    except OSError:
        return False


def discard_recovery(path: str) -> None:
    """Take the recovery file of the worksheet at `path` away, if there is one."""
    with suppress(OSError):
        os.unlink(recovery_path(path))


class Journal:
    """Writes the recovery file of one worksheet."""

    def __init__(self, path: str) -> None:
        self._path = path
        self._stream: IO[str] | None = None
        self.trouble = ""
        """Why it cannot be written; empty while it can."""

    def add(self, before: Sequence[str], edit: Edit) -> None:
        """Write one edit of the lines `before`; trouble is kept for the caller to tell, never raised."""
        if self.trouble:
            return
        try:
            if self._stream is None:
                self._stream = self._begun(before)
            _write(self._stream, {"start": edit.start, "old": edit.old, "new": edit.new})
        except OSError as failure:
            self.trouble = failure.strerror or type(failure).__name__

    def remove(self) -> None:
        """Take the file away: all it holds is saved, or is to be dropped."""
        if self._stream is not None:
            discard_recovery(self._path)
            self.leave()

    def leave(self) -> None:
        """Close the file and keep it, to be offered on the next start."""
        if self._stream is not None:
            with suppress(OSError):
                self._stream.close()
            self._stream = None

    def _begun(self, lines: Sequence[str]) -> IO[str]:
        # Whoever has the file open keeps it: two editors must not write into each other's recovery.
        # Opened for appending first, so that a file in use by another editor is not emptied.
        stream = open(recovery_path(self._path), "a", encoding="utf-8")  # noqa: SIM115  # kept open on purpose
        if not _lock(stream):
            stream.close()
            raise OSError(0, "another editor has this worksheet open")
        stream.seek(0)
        stream.truncate()
        _write(stream, {"format": FORMAT, "lines": list(lines)})
        return stream


def _write(stream: IO[str], record: object) -> None:
    stream.write(json.dumps(record, ensure_ascii=False) + "\n")
    # Into the operating system's hands, so that it outlives this program; not forced to the disk, which would
    # cost more than the edit.
    stream.flush()


def _lock(stream: IO[str]) -> bool:
    """Take the file for this program until it is closed; False where another has it."""
    try:
        import fcntl
    except ImportError:  # not on this system: without it two editors are not told of each other
        return True
    try:
        fcntl.flock(stream.fileno(), fcntl.LOCK_EX | fcntl.LOCK_NB)
    except OSError:
        return False
    return True
