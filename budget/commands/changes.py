"""`budget changes`: what changed in a run since another version of it, in keys and in figures."""

from __future__ import annotations

import argparse
import json
from collections.abc import Iterator, Mapping
from pathlib import Path
from shutil import get_terminal_size
from typing import NamedTuple

from budget import __version__
from budget.catalogue import CATALOGUE_VERSION
from budget.commands.dispatch import REFUSED, say
from budget.commands.opening import STDIN, Opened, open_run, opened
from budget.description import read_text
from budget.document import take
from budget.report.changes import changes_between
from budget.report.changes_text import changes_lines, changes_object
from budget.report.lines import finding_line
from budget.report.plain import plain
from budget.report.table import WIDE
from budget.storage import StorageError
from budget.storage.revisions import LATEST, read_past


class _Before(NamedTuple):
    """The version that the run is compared with."""

    run: Opened
    named: Mapping[str, str]
    """What it is, for a program."""
    remarks: tuple[str, ...] = ()


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take a file and what it is compared with."""
    parser.add_argument("file", metavar="FILE", help="a run's file; - reads standard input")
    parser.add_argument("before", metavar="BEFORE", nargs="?", help="an older version of it; - reads standard input")
    text = f"compare with the file in a git revision, {LATEST} unless stated: HEAD~2, a tag, a branch, a hash"
    parser.add_argument("--revision", metavar="REV", help=text)
    parser.add_argument("--json", action="store_true", help="print the changes as JSON, in SI base units")


def run(options: argparse.Namespace) -> int:
    """Print the changes; return the status that the findings of the file ask for, 2 where it can't be compared."""
    refusal = _refusal(options)
    if refusal:
        say(refusal)
        return REFUSED
    after = open_run(options.file)
    try:
        before = _before(options) if options.before is None else _other(options.before, options.file)
    except StorageError as refused:
        say(str(refused))
        return REFUSED
    unreadable = [one for one in (before.run, after) if one.snapshot is None]
    for one in unreadable:
        for finding in one.findings:
            say(finding_line(one.name, finding))
    if before.run.snapshot is None or after.snapshot is None:
        return REFUSED
    changes = changes_between(before.run.snapshot, after.snapshot, checked_out="revision" in before.named)
    if options.json:
        # ASCII alone: whatever stands in a file is spelled out, and the output does not depend on the terminal.
        print(json.dumps(changes_object(__version__, options.file, before.named, changes)))
        return after.status
    lines = changes_lines(changes, get_terminal_size((WIDE, 0)).columns)
    for line in (*_head(options.file, before), *(("", *lines) if lines else ("nothing differs",))):
        print(line)
    return after.status


def _refusal(options: argparse.Namespace) -> str:
    """Say what can't be asked for together; "" for nothing."""
    if options.before is not None and options.revision is not None:
        return "a run is compared with another file or with a revision; leave one of them out"
    if options.file == STDIN and options.before in (None, STDIN):
        return "standard input has no other version; name a file to compare it with"
    return ""


def _before(options: argparse.Namespace) -> _Before:
    """Read the file as it was in a revision."""
    revision = options.revision if options.revision is not None else LATEST
    path = Path(options.file)
    past = read_past(path, revision)
    snapshot = take(past.source, libraries=past.libraries)
    name = f"{options.file} in {revision}"
    run = Opened(name, snapshot.findings, snapshot if snapshot.readable else None)
    remarks = tuple(f"the library {written} is not in {revision}; it is read from disk" for written in past.from_disk)
    return _Before(run, {"revision": revision, "commit": past.revision}, remarks)


def _other(name: str, file: str) -> _Before:
    """Read another file; what comes from standard input is a version of the same run, beside the same libraries."""
    run = open_run(name)
    if name == STDIN and run.snapshot is not None:
        source = read_text(run.snapshot.text)
        run = Opened(name, (), opened(file, source).snapshot)
    return _Before(run, {"file": name})


def _head(file: str, before: _Before) -> Iterator[str]:
    """Say what is compared with what."""
    named = before.named
    was = named.get("file") or f"{named['revision']} ({named['commit'][:10]})"
    was = "standard input" if was == STDIN else was
    yield f"{plain(file)}: {plain(was)} -> as it is"
    yield f"both versions are computed by budget {__version__}, catalogue {CATALOGUE_VERSION}, whatever did it then"
    yield from map(plain, before.remarks)
