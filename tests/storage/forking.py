"""Acts in a child process: what they take away from themselves, privileges or mounts, this process keeps."""

from __future__ import annotations

import os
import sys
import traceback
from collections.abc import Callable


def in_child(*acts: Callable[[], None]) -> tuple[int, str]:
    """Do acts one after the other in a child; return how many were done, and what went wrong with the next."""
    read, write = os.pipe()
    sys.stdout.flush()
    child = os.fork()
    if child == 0:
        done = 0
        try:
            os.close(read)
            for act in acts:
                act()
                done += 1
        except BaseException:  # noqa: BLE001 - what went wrong is told to the parent
            os.write(write, traceback.format_exc()[-4000:].encode())
        finally:
            os._exit(done)
    os.close(write)
    with os.fdopen(read, "rb") as said:
        message = said.read().decode(errors="replace")
    return os.waitstatus_to_exitcode(os.waitpid(child, 0)[1]), message
