"""Which process has a run open, and whether that process is still there."""

from __future__ import annotations

import contextlib
import dataclasses
import getpass
import os
from dataclasses import dataclass
from pathlib import Path

_PROC = Path("/proc")


@dataclass(frozen=True, slots=True)
class Process:
    """A process so named that no later one can be taken for it."""

    host: str
    """The name of the machine."""
    boot: str
    """What this start of the machine is known by; "" where the system does not tell."""
    space: str
    """Within which processes are numbered: containers of one machine number theirs apart."""
    pid: int
    started: str
    """When it began, as the system counts; "" where it does not tell."""


def this_process() -> Process:
    """Return the process that runs."""
    return Process(os.uname().nodename, _boot(), _space(), os.getpid(), _started(os.getpid()) or "")


def is_alive(process: Process) -> bool | None:
    """Whether a process is still there; None where that can't be told from here: another machine or container."""
    here = this_process()
    if process.host != here.host:
        return None
    if process.boot != here.boot:
        return False
    if process.space != here.space:
        return None
    if process.pid <= 0:  # to the system these are groups of processes
        return False
    try:
        os.kill(process.pid, 0)
    except ProcessLookupError:
        return False
    except (PermissionError, OverflowError):
        pass
    started = _started(process.pid)
    return started is None or not process.started or started == process.started


def left_by(process: Process) -> Process:
    """Return what stands for a process that lives on, in a record of what it has left: none that is alive."""
    return dataclasses.replace(process, pid=0)


def user_name() -> str:
    """Return who runs the program, as the system knows it."""
    with contextlib.suppress(OSError, KeyError, ImportError):
        return getpass.getuser()
    return str(os.getuid())


def _boot() -> str:
    try:
        return (_PROC / "sys/kernel/random/boot_id").read_text().strip()
    except OSError:
        return ""


def _space() -> str:
    try:
        return os.readlink(_PROC / "self/ns/pid")  # noqa: PTH115 - no file stands behind the link
    except OSError:
        return ""


def _started(pid: int) -> str | None:
    """Return when a process began, in ticks since the machine was started; None where that is not told."""
    try:
        told = (_PROC / str(pid) / "stat").read_text(errors="replace")
    except OSError:
        return None
    # The name of the program stands in parentheses and may hold anything; the fields behind it are numbers.
    fields = told.rpartition(")")[2].split()
    if fields[:1] in (["Z"], ["X"]):  # it has ended, and nobody has asked yet how
        return ""
    return fields[19] if len(fields) > 19 else None
