"""Folders that are shipped with the program: examples and themes, from a wheel and from the source tree alike."""

from __future__ import annotations

from pathlib import Path

_PACKAGE = Path(__file__).resolve().parent


def shipped(folder: str) -> Path:
    """Return where a shipped folder is: inside the package where it was installed, beside it in the source tree."""
    inside = _PACKAGE / folder
    return inside if inside.is_dir() else _PACKAGE.parent / folder
