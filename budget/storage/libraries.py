"""Reading the libraries that a run names: relative to its file, within its repository or the settings folder."""

from __future__ import annotations

import os
import re
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path, PureWindowsPath

from budget.description import SourceText, read_bytes
from budget.description.libraries import NO_FILE, Library, library_paths
from budget.description.source import LARGEST_FILE
from budget.storage.files import StorageError, load

MOST = 50
"""Libraries that one run may name."""

LARGEST_TOGETHER = 4 * LARGEST_FILE
"""Bytes of all libraries of a run together."""

_URL = re.compile(r"[A-Za-z][A-Za-z0-9+.-]+:")

Read = Callable[[Path], bytes]
"""Returns the bytes of a file; raises StorageError where it can't be read."""


def _now(target: Path) -> bytes:
    return load(target)[0]


def read_libraries(source: SourceText, path: Path | None, read: Read = _now) -> tuple[Library, ...]:
    """Read the libraries that a run names, in its order. `path` is the run's file, None where it has none.

    A path is relative to the run's file and must lead, symbolic links followed, to a file in the repository that holds
    the run (the nearest folder above it with a .git, else the run's own folder) or in the user's settings folder.
    Nothing is raised: a library that can't be read says why. `read` gets their bytes elsewhere than from the disk.
    """
    return _read_all(library_paths(source), path, {}, read)


def read_again(known: tuple[Library, ...], path: Path | None) -> tuple[Library, ...]:
    """Return libraries as they are on disk by now; those that did not change are the very same."""
    now = _read_all([library.written for library in known], path, {library.written: library for library in known})
    return known if now == known else now


def renew(source: SourceText, path: Path | None, known: tuple[Library, ...]) -> tuple[Library, ...]:
    """Return the libraries of a run: those that are known where it names the same ones, else read anew."""
    if source.data is None or library_paths(source) == tuple(library.written for library in known):
        return known
    return read_libraries(source, path)


def _read_all(
    names: Sequence[str], path: Path | None, known: Mapping[str, Library], read_file: Read = _now
) -> tuple[Library, ...]:
    read: list[Library] = []
    left = LARGEST_TOGETHER
    for place, written in enumerate(names):
        content, fault = _content(written, path, place, read_file)
        if not fault and len(content) > left:
            fault = f"would make more than {LARGEST_TOGETHER / 1e6:.1f} MB of libraries; name fewer, or split them"
        if fault:
            read.append(Library(written, fault=fault))
            continue
        left -= len(content)
        before = known.get(written)
        same = before is not None and before.source is not None and before.source.text.encode("utf-8") == content
        read.append(before if before is not None and same else Library(written, read_bytes(content)))
    return tuple(read)


def _content(written: str, path: Path | None, place: int, read_file: Read) -> tuple[bytes, str]:
    """Return the bytes of a library, or none and the reason why."""
    fault = _fault_of(written, path, place)
    if fault or path is None:
        return b"", fault
    run = os.path.realpath(path)
    folder = Path(run).parent
    target = Path(os.path.realpath(folder / written))
    allowed = (_repository(folder), *_settings())
    if not any(target.is_relative_to(place) for place in allowed):
        return b"", "lies outside the run's repository and the settings folder; copy it into one"
    if str(target) == run:
        return b"", "is the run itself; name a file of pipe, duct, fitting and device tables"
    try:
        content = read_file(target)
    except StorageError as refused:
        why = refused.__cause__
        if isinstance(why, OSError):
            return b"", f"could not be read: {why.strerror or why}; correct the path"
        return b"", "is not a regular file; name a TOML file"
    if len(content) > LARGEST_FILE:
        return b"", f"has more than {LARGEST_FILE / 1e6:.1f} MB, which is not read; split it"
    return content, ""


def _fault_of(written: str, path: Path | None, place: int) -> str:
    """Say what is wrong with a path as it is written; "" for nothing."""
    if not written.strip() or not written.isprintable():
        return "is no path; write one relative to the run's file"
    if PureWindowsPath(written).drive or Path(written).is_absolute():
        return "is an absolute path, which leads elsewhere on another machine; write one relative to the run's file"
    if _URL.match(written):
        return "is an address, and only files are read; write a path relative to the run's file"
    if place >= MOST:
        return f"is one too many, {MOST} are read; put several into one file"
    return NO_FILE if path is None else ""


def _repository(folder: Path) -> Path:
    """Return the nearest folder with a .git at or above one, else itself."""
    return next((above for above in (folder, *folder.parents) if os.path.lexists(above / ".git")), folder)


def _settings() -> tuple[Path, ...]:
    """Return the user's settings folder; none where there is no home to hold one."""
    import platformdirs  # noqa: PLC0415 - few runs name a library

    try:
        return (Path(os.path.realpath(platformdirs.user_config_path("budget"))),)
    except (OSError, RuntimeError):
        return ()
