"""`budget edit`: a run in the terminal app."""

from __future__ import annotations

import argparse
from pathlib import Path


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take a file, and how it is shown."""
    parser.add_argument("file", metavar="FILE", nargs="?", help="a run's file; without one, the run that was open last")
    parser.add_argument(
        "--ascii", action="store_const", const=True, help="draw with plain characters, for a terminal without UTF-8"
    )
    parser.add_argument("--read-only", action="store_true", help="open it to look at; nothing can be changed")
    parser.add_argument("--mouse", action="store_const", const=True, help="let the mouse work in the app")


def run(options: argparse.Namespace) -> int:
    """Open the app; return its exit status. What is not said here is as the settings say."""
    from budget import screens  # noqa: PLC0415 - help and completion must not wait for the app

    path = Path(options.file) if options.file is not None else None
    return screens.run(path, ascii=options.ascii, mouse=options.mouse, read_only=options.read_only) or 0
