"""Files of the user's settings, as text and as TOML: within the limits of a run's file, or a sentence says why not."""

from __future__ import annotations

import os
from pathlib import Path
from typing import Any

from budget.description import read_text
from budget.storage import StorageError, load

LARGEST = 256 * 1024
"""Bytes of a settings file or a theme; they have some twenty lines."""


def read_file(path: Path) -> tuple[str | None, str]:
    """Return the text of a file, or None with the reason; None and "" where there is no such file.

    A device, a FIFO or a folder is not read, nor is what has more than 256 kB.
    """
    try:
        content, _ = load(path)
    except StorageError as refused:
        why = refused.__cause__
        if isinstance(why, FileNotFoundError | NotADirectoryError):
            return None, ""
        reason = f"could not be read: {why.strerror or why}" if isinstance(why, OSError) else "it is not a regular file"
        return None, reason
    if len(content) > LARGEST:
        return None, f"the file is larger than {LARGEST // 1024} kB; it was not read"
    try:
        return content.decode("utf-8"), ""
    except UnicodeDecodeError as wrong:
        return None, f"could not be read: byte {wrong.start + 1} is not UTF-8"


def read_toml(text: str) -> tuple[dict[str, Any] | None, str]:
    """Return what TOML makes of a text; None and the reason where it is not TOML, or is beyond a limit."""
    source = read_text(text)
    if source.data is not None:
        return source.data, ""
    line, column = source.place
    return None, f"line {line}, column {column}: {source.findings[0].message}"


def lies_within(path: Path, folder: Path) -> bool:
    """Whether a file is in a folder once all symbolic links of both are followed."""
    return Path(os.path.realpath(path)).is_relative_to(os.path.realpath(folder))
