"""The app: `budget edit`."""

from __future__ import annotations

import gc
import os
import sys
from pathlib import Path

from budget.screens.config import load_config
from budget.screens.terminal import objection_here, prepare

__all__ = ["run"]


def run(path: Path | None, *, ascii: bool | None = None, mouse: bool | None = None, read_only: bool = False) -> int:  # noqa: A002
    """Open a run in the app and stay in it until the user leaves; return the exit code.

    Without a path it is the run that was open last, of those that still exist, and the app says which that is.
    `ascii` and `mouse` overrule the user's config. 2 where the terminal or the file can't be used, with the
    reason on the standard error.
    """
    config, problems = load_config()
    ascii_only = config.ascii if ascii is None else ascii
    refused = objection_here(ascii_only=ascii_only)
    if refused:
        print(f"budget: {refused}", file=sys.stderr)
        return 2
    first_words = ""
    if path is None:
        path = _latest()
        if path is None:
            told = "no run was open of late; write budget edit FILE, or budget new FILE for a run to start from"
            print(f"budget: {told}", file=sys.stderr)
            return 2
        first_words = f"the run that was open last: {path}"
    prepare(os.environ)
    gc.disable()  # until the first frame: nothing that is imported or read before it is garbage
    from budget.screens.opening import open_app  # noqa: PLC0415 - the toolkit reads its switches when it is imported

    mouse = config.mouse if mouse is None else mouse
    return open_app(
        path, config, problems, ascii_only=ascii_only, mouse=mouse, read_only=read_only, first_words=first_words
    )


def _latest() -> Path | None:
    from budget.storage.recents import recent_runs  # noqa: PLC0415 - with a path it is not asked for
    from budget.storage.runs import latest_of  # noqa: PLC0415

    recent = latest_of(recent_runs())
    return recent.path if recent is not None else None
