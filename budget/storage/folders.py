"""Folders of the user's that the program keeps things in."""

from __future__ import annotations

import errno
import os
import stat
from pathlib import Path

MODE = 0o700


def state_folder(*names: str) -> Path:
    """Return a folder of ours in the user's state folder, made for the user's eyes alone where it is not there yet.

    Raises OSError where it can't be made, or belongs to somebody else.
    """
    import platformdirs  # noqa: PLC0415 - a check keeps nothing

    try:
        folder = Path(platformdirs.user_state_path("budget"))
    except RuntimeError as lost:
        raise FileNotFoundError(errno.ENOENT, "there is no home folder") from lost
    folder.parent.mkdir(parents=True, exist_ok=True)
    for one in (folder, *(folder.joinpath(*names[: size + 1]) for size in range(len(names)))):
        one.mkdir(mode=MODE, exist_ok=True)
        status = one.stat()
        if status.st_uid != os.geteuid():
            raise PermissionError(errno.EPERM, f"{one} belongs to another user")
        if stat.S_IMODE(status.st_mode) != MODE:
            one.chmod(MODE)
    return folder.joinpath(*names)
