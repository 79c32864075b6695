"""The folder of the user's that the program keeps things in, and how they are read from there."""

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


def read_kept(file: Path, most: int) -> bytes:
    """Return so many bytes at the most of a file that the program keeps.

    Raises OSError where it can't be read, or is a link or no regular file: it is not ours then.
    """
    # O_NONBLOCK: a FIFO must not hang the program.
    handle = os.open(file, os.O_RDONLY | os.O_NONBLOCK | os.O_NOFOLLOW)
    with os.fdopen(handle, "rb") as stream:
        if not stat.S_ISREG(os.fstat(handle).st_mode):
            raise OSError(0, "it is not a regular file")
        return stream.read(most)
