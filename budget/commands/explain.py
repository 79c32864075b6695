"""`budget explain`: what a finding code means and what to do, or every figure of a row as a calculation."""

from __future__ import annotations

import argparse
import sys

from budget.commands.dispatch import OK, REFUSED, say
from budget.commands.opening import open_run
from budget.description import CODES, nearest
from budget.description.remedies import REMEDIES
from budget.report.explain import explain_text
from budget.report.lines import finding_line

TAKES_FILES_TOO = True
"""A shell offers files beside the codes."""


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take a code, or a file and an ID."""
    parser.add_argument("what", metavar="CODE|FILE", nargs="?", help="a code, or a run's file (- is standard input)")
    parser.add_argument("id", metavar="ID", nargs="?", help="a source, section or terminal of the file")


def run(options: argparse.Namespace) -> int:
    """Print what was asked for; 2 where there is no such code or ID, or the file can't be read.

    Without a code all are listed, each in a line.
    """
    if options.what is None:
        width = max(map(len, CODES))
        for name, (level, meaning) in CODES.items():
            print(f"{name:{width}}  {level:7}  {meaning}")
        return OK
    return _code(options.what) if options.id is None else _figures(options.what, options.id)


def _code(name: str) -> int:
    code = CODES.get(name)
    if code is None:
        if name == "-" or name.endswith(".toml"):
            say(f"name a source, section or terminal too: budget explain {name} ID")
        else:
            say(f"there is no finding code {name!r}; {nearest(name, CODES, 3)}")
        return REFUSED
    print(f"{name} ({code.level}): {code.meaning}")
    print(f"What to do: {REMEDIES[name]}")
    return OK


def _figures(file: str, id_: str) -> int:
    one = open_run(file)
    if one.snapshot is None:
        for finding in one.findings:
            print(finding_line(one.name, finding), file=sys.stderr)
        return REFUSED
    description = one.snapshot.description
    known = [*description.sources, *description.sections, *description.terminals]
    if id_ not in known:
        say(f"{file} has no {id_!r}; {nearest(id_, known, 3)}")
        return REFUSED
    print(explain_text(description, one.snapshot.budget, id_), end="")
    return OK


def completions() -> tuple[str, ...]:
    """Return what may stand for the code."""
    return tuple(CODES)
