"""Files that are there whole or not at all, however a run ends and whoever else writes them."""

from __future__ import annotations

import contextlib
import os
import tempfile
from pathlib import Path

PART = ".part"
"""How the names of files end that are being written, or were when a run was killed."""


def write_whole(path: Path, data: bytes) -> bool:
    """Write a file beside its place and move it there in one step; its folder is made where it is not there.

    Returns: whether that could be done; no fault of the folder is raised.
    """
    try:
        path.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
        handle, name = tempfile.mkstemp(prefix=".", suffix=PART, dir=path.parent)
    except OSError:
        return False
    try:
        with os.fdopen(handle, "wb") as file:
            file.write(data)
        os.replace(name, path)  # noqa: PTH105 - a Path for one call says no more
    except OSError:
        with contextlib.suppress(OSError):
            os.unlink(name)  # noqa: PTH108
        return False
    except BaseException:
        with contextlib.suppress(OSError):
            os.unlink(name)  # noqa: PTH108
        raise
    return True
