"""`budget explain`: what a finding code means."""

from __future__ import annotations

import argparse

from budget.commands.dispatch import OK, REFUSED, say
from budget.description import CODES, nearest


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take a code."""
    parser.add_argument("code", metavar="CODE", nargs="?", help="a finding code; without one, all are listed")


def run(options: argparse.Namespace) -> int:
    """Print the level and the meaning of a code; 2 where there is no such code."""
    if options.code is None:
        width = max(map(len, CODES))
        for name, (level, meaning) in CODES.items():
            print(f"{name:{width}}  {level:7}  {meaning}")
        return OK
    code = CODES.get(options.code)
    if code is None:
        say(f"there is no finding code {options.code!r}; {nearest(options.code, CODES, 3)}")
        return REFUSED
    print(f"{options.code} ({code.level}): {code.meaning}")
    return OK


def completions() -> tuple[str, ...]:
    """Return what may stand for the code."""
    return tuple(CODES)
