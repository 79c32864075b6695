"""`budget unset`: take one key out of a run's file with its line."""

from __future__ import annotations

import argparse

from budget.commands.changing import change
from budget.description.edits import Unset


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take the file and the key."""
    parser.add_argument("file", metavar="FILE", help="a run's file")
    parser.add_argument("key", metavar="KEY", help="section.M1.note, source.P1.item.0")


def run(options: argparse.Namespace) -> int:
    """Take the key out; return 0, or 2 where it was refused and the file is as it was."""
    return change(options.file, options.key, Unset)
