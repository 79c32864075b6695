"""`budget flows`: solve a run for the flows as installed, in a case, with its balancing devices open or set."""

from __future__ import annotations

import argparse
import json

from budget.commands.dispatch import REFUSED, say
from budget.commands.opening import Opened, open_run
from budget.description import Description, Level, nearest, read_text
from budget.network.flows import solve_flows
from budget.report.flows import flows_text, flows_values
from budget.report.lines import finding_line
from budget.report.located import Located, locate


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take a file, a case, and where the devices stand."""
    parser.add_argument("file", metavar="FILE", help="a run's file; - reads standard input")
    parser.add_argument("--case", metavar="NAME", help="a [case.NAME] of the file")
    parser.add_argument(
        "--devices",
        choices=("open", "set", "rounded"),
        help="fully open, set as proposed, or so and rounded to their scales; without it, as the file states, "
        "else as proposed",
    )
    parser.add_argument("--json", action="store_true", help="print the flows in SI base units")


def run(options: argparse.Namespace) -> int:
    """Print the flows; return 0 for nothing above a note, 1 for warnings, 2 for an error."""
    one = open_run(options.file)
    if one.snapshot is None:
        if options.json:
            print(json.dumps(flows_values(None, one.findings)))
        else:
            _print(one.name, one.findings)
        return one.status
    snapshot = one.snapshot
    description = snapshot.description
    case = description.cases.get(options.case)
    if case is None and options.case is not None:
        say(f"{one.name} has no case {options.case!r}; {_cases(options.case, description)}")
        return REFUSED
    flows = solve_flows(snapshot.budget.run, case, options.devices or "given")
    errors = [finding for finding in one.findings if finding.level is Level.ERROR]
    findings = (*errors, *locate(flows.findings, read_text(snapshot.text), description))
    if options.json:
        # ASCII alone: whatever stands in a file is spelled out, and the output does not depend on the terminal.
        print(json.dumps(flows_values(flows, findings)))
    else:
        print(flows_text(description, snapshot.budget, flows), end="")
        _print(one.name, findings)
    return Opened(one.name, findings).status


def _print(name: str, findings: tuple[Located, ...]) -> None:
    for finding in findings:
        print(finding_line(name, finding))


def _cases(name: str, description: Description) -> str:
    """Return what to write in place of a case that the file does not have."""
    return nearest(name, description.cases) if description.cases else "it has none; add a [case.NAME]"
