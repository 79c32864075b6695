"""`budget config`: where the settings of the app are read from, and what is wrong with them."""

from __future__ import annotations

import argparse

from budget.commands.dispatch import OK, REFUSED
from budget.report.plain import plain
from budget.screens.config import config_path, load_config


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take what to do."""
    what = parser.add_mutually_exclusive_group(required=True)
    what.add_argument("--path", action="store_true", help="print where the settings are read from")
    what.add_argument("--check", action="store_true", help="read the settings and say what can't be taken")


def run(options: argparse.Namespace) -> int:
    """Print the path, or the problems; 2 where there are any."""
    path = config_path()
    if options.path:
        print(plain(str(path)))
        return OK
    _, problems = load_config(path)
    for problem in problems:
        print(plain(problem))
    if not problems:
        said = "nothing is wrong with it" if path.exists() else "there is no such file, the defaults stand"
        print(f"{plain(str(path))}: {said}")
    return REFUSED if problems else OK
