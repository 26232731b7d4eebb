"""Files written in one step: either the new content is there, or the old one still is."""

from __future__ import annotations

import os
import tempfile
from contextlib import suppress
from dataclasses import dataclass


def write_atomically(path: str, content: bytes) -> None:
    """Replace the file at `path` by `content`; a symbolic link is followed, permissions are kept.

    Raises
    ------
    OSError
        If it cannot be written; the old file is untouched then.
    """
    target = os.path.realpath(path)
    handle, temporary = tempfile.mkstemp(prefix=".eqsheet-", dir=os.path.dirname(target))
    try:
        with os.fdopen(handle, "wb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        with suppress(FileNotFoundError):
            os.chmod(temporary, os.stat(target).st_mode & 0o7777)
        if not os.path.exists(target):
            mask = os.umask(0)
            os.umask(mask)
            os.chmod(temporary, 0o666 & ~mask)
        elif not os.access(target, os.W_OK):
            raise PermissionError(13, "Permission denied", path)
        os.replace(temporary, target)
    except BaseException:
        with suppress(OSError):
            os.unlink(temporary)
        raise


@dataclass(frozen=True, slots=True)
class FileState:
    """What a file was like when it was read or written: empty content and no stamp where there was none."""

    content: bytes | None
    stamp: tuple[int, int, int] | None

    def unchanged(self, path: str) -> bool:
        """Whether the file at `path` still holds the same; a mere touch is no change."""
        if self.stamp is not None and self.stamp == _stamp(path):
            return True
        return self.content == _content(path)


def state_of(path: str) -> FileState:
    """The state of the file at `path` now; without content where it is not there or cannot be read."""
    stamp = _stamp(path)
    return FileState(_content(path), stamp)


def _stamp(path: str) -> tuple[int, int, int] | None:
    try:
        found = os.stat(path)
    except OSError:
        return None
    return found.st_mtime_ns, found.st_size, found.st_ino


def _content(path: str) -> bytes | None:
    try:
        with open(path, "rb") as file:
            return file.read()
    except OSError:
        return None
