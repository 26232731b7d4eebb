"""Files written in one step: either the new content is there, or the old one still is."""

from __future__ import annotations

import os
import tempfile
from contextlib import suppress


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
