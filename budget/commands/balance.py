"""`budget balance`: the commissioning schedule of a run, and what measured flows say about it."""

from __future__ import annotations

import argparse
import json
import math
import sys
from pathlib import Path

from budget import __version__
from budget.commands.dispatch import REFUSED, say
from budget.commands.opening import Opened, open_run
from budget.description import Description, Level, SourceText, nearest, read_bytes
from budget.description.readings import Readings, read_readings
from budget.network import Budget
from budget.network.proposals import AUTHORITY
from budget.report.figures import Figures
from budget.report.json import FORMAT
from budget.report.lines import finding_line
from budget.report.located import Located, locate
from budget.report.proposals import proposals_object, proposals_text
from budget.report.schedule import schedule
from budget.report.schedule_text import schedule_csv, schedule_json, schedule_text
from budget.storage import StorageError, load


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take a file, a form, and what was measured."""
    parser.add_argument("file", metavar="FILE", help="a run's file; - reads standard input")
    form = parser.add_mutually_exclusive_group()
    form.add_argument("--csv", action="store_true", help="print the schedule as CSV for a spreadsheet")
    form.add_argument("--json", action="store_true", help="print the schedule as JSON, in SI base units")
    parser.add_argument("--readings", metavar="READINGS", help="a TOML file of what was measured, by ID")
    text = "propose a control valve and a balancing device for a section or terminal instead"
    parser.add_argument("--propose", metavar="ID", help=text)
    text = f"authority that the control valve is to reach; {AUTHORITY:g} (common practice) unless stated"
    parser.add_argument("--authority", metavar="SHARE", type=_share, default=AUTHORITY, help=text)


def _share(text: str) -> float:
    try:
        share = float(text)
    except ValueError:
        share = math.nan
    if not 0.0 < share < 1.0:
        raise argparse.ArgumentTypeError(f"{text} is not an authority; write one above 0 and below 1")
    return share


def run(options: argparse.Namespace) -> int:
    """Print the schedule; return the status that the findings of the run and of the readings ask for."""
    one = open_run(options.file)
    if one.snapshot is None:
        if options.json:
            print(json.dumps(schedule_json(__version__, one.name, Description(), None, one.findings)))
        else:
            _tell(one.name, one.findings, error=options.csv)
        return one.status
    description, figures = one.snapshot.description, Figures(one.snapshot.description)
    if options.propose is not None:
        return _propose(options, one.snapshot.budget, figures, one.status)
    readings, source, refused = _readings(options.readings, description)
    found = schedule(description, one.snapshot.budget, figures, readings)
    measured = refused
    if readings is not None and source is not None:
        measured = locate((*readings.findings, *found.findings), source, description)
    status = max(one.status, Opened(options.readings or "", measured).status)
    if options.json:
        there = None if options.readings is None else (options.readings, measured)
        print(json.dumps(schedule_json(__version__, one.name, description, found, one.findings, there)))
        return status
    if options.csv:
        print(schedule_csv(found, figures), end="")
    else:
        print(schedule_text(description, found, figures, one.findings), end="")
    _tell(options.readings or "", measured, error=True)
    return status


def _propose(options: argparse.Namespace, budget: Budget, figures: Figures, status: int) -> int:
    known = [*budget.sections, *budget.terminals]
    id_ = options.propose
    if id_ not in known or options.csv or options.readings is not None:
        say(
            f"{options.file} has no section or terminal {id_!r}; {nearest(id_, known, 3)}"
            if id_ not in known
            else "a proposal has neither --csv nor --readings; leave them out"
        )
        return REFUSED
    if options.json:
        print(json.dumps({"format": FORMAT, "file": options.file, **proposals_object(budget, id_, options.authority)}))
    else:
        print(proposals_text(budget, id_, options.authority, figures), end="")
    return status


def _readings(
    name: str | None, description: Description
) -> tuple[Readings | None, SourceText | None, tuple[Located, ...]]:
    """Read the readings file; where it can't be read, the finding that says so."""
    if name is None:
        return None, None, ()
    try:
        content, _ = load(Path(name))
    except (StorageError, ValueError) as wrong:
        return None, None, (Located(Level.ERROR, "unreadable", str(wrong), (), "", "", "", 1, 1),)
    source = read_bytes(content)
    return read_readings(source, description), source, ()


def _tell(name: str, findings: tuple[Located, ...], *, error: bool) -> None:
    for finding in findings:
        print(finding_line(name, finding), file=sys.stderr if error else sys.stdout)
