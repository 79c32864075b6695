"""`budget report`: the whole budget of a run as text for a terminal, a printer or a diff."""

from __future__ import annotations

import argparse

from budget.commands.opening import open_run
from budget.report.lines import finding_line
from budget.report.text import text_report


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take one file."""
    parser.add_argument("file", metavar="FILE", help="a run's file; - reads standard input")


def run(options: argparse.Namespace) -> int:
    """Print the report; return the status that the findings ask for."""
    one = open_run(options.file)
    if one.snapshot is None:
        for finding in one.findings:
            print(finding_line(one.name, finding))
    else:
        print(text_report(one.snapshot.description, one.snapshot.budget, one.findings), end="")
    return one.status
