"""`budget check`: compute runs, list their findings, and say by the exit status how they stand."""

from __future__ import annotations

import argparse
import json

from budget import __version__
from budget.commands.opening import Opened, open_run
from budget.description import Description
from budget.report.json import results
from budget.report.lines import finding_line, source_line


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take any number of files."""
    parser.add_argument("files", metavar="FILE", nargs="+", help="a run's file; - reads standard input")
    parser.add_argument("--json", action="store_true", help="print everything computed, in SI base units")


def run(options: argparse.Namespace) -> int:
    """Return 0 for nothing above a note, 1 for warnings, 2 for an error: the highest of all files."""
    status = 0
    objects = []
    for name in options.files:
        one = open_run(name)
        status = max(status, one.status)
        if options.json:
            objects.append(_object(one))
        else:
            _print(one)
    if options.json:
        # ASCII alone: whatever stands in a file is spelled out, and the output does not depend on the terminal.
        print(json.dumps(objects[0] if len(objects) == 1 else {"files": objects}))
    return status


def _object(one: Opened) -> dict[str, object]:
    if one.snapshot is None:
        return results(__version__, one.name, Description(), None, one.findings)
    return results(__version__, one.name, one.snapshot.description, one.snapshot.budget, one.findings)


def _print(one: Opened) -> None:
    for finding in one.findings:
        print(finding_line(one.name, finding))
    if one.snapshot is not None:
        for result in one.snapshot.budget.sources.values():
            print(source_line(one.name, one.snapshot.description, result))
