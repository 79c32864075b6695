"""Changing one key of a run's file: made to the text, computed, and saved only where nothing new is wrong."""

from __future__ import annotations

import difflib
import sys
import tomllib
from collections.abc import Callable, Iterator, Mapping
from pathlib import Path as FilePath
from typing import Any

from budget.commands.dispatch import OK, REFUSED, say
from budget.commands.opening import STDIN, Opened, open_run, opened
from budget.description import Level, Path, read_text
from budget.description.edits import Edit, EditError, apply_to_text, read_path
from budget.report.figures import Figures
from budget.report.lines import finding_line
from budget.report.located import Located
from budget.report.plain import plain
from budget.storage import StorageError, save


def change(file: str, key: str, make: Callable[[Path], Edit]) -> int:
    """Make the edit of a key, save, and print what changed.

    Refused, with the file as it was, where the key or the value can't stand there, where an error would come up that
    was not there before, and where the file can't be written.
    """
    if file == STDIN:
        say("standard input can't be changed; name a file")
        return REFUSED
    before = open_run(file)
    if before.snapshot is None:
        return _refuse("the file can't be changed", file, before.findings)
    try:
        data: Mapping[str, Any] = tomllib.loads(before.snapshot.text)
        path = read_path(key, data)
        text = apply_to_text(before.snapshot.text, make(path), data=data)
    except EditError as wrong:
        say(f"{wrong}; {file} was not changed")
        return REFUSED
    if text == before.snapshot.text:
        print(f"{plain(file)}: nothing changed, it was so already")
        return OK
    after = opened(file, read_text(text))
    wrong_now = list(_new_errors(before, after, path))
    if wrong_now:
        return _refuse("it would be an error; the file was not changed", file, wrong_now)
    try:
        save(FilePath(file), text.encode("utf-8"), before.stamp)
    except StorageError as wrong:
        say(str(wrong))
        return REFUSED
    for line in (*_lines(file, before.snapshot.text, text), *_required(before, after), *_doubts(before, after)):
        print(line)
    return OK


def _refuse(why: str, file: str, findings: list[Located] | tuple[Located, ...]) -> int:
    for finding in findings:
        print(finding_line(file, finding), file=sys.stderr)
    say(why)
    return REFUSED


def _new_errors(before: Opened, after: Opened, changed: Path) -> Iterator[Located]:
    """Find errors that were not there before; one that only moved, or whose figures changed, is not new.

    At the changed key itself every error is, unless it is the same to the letter.
    """
    places = {(finding.code, finding.path) for finding in before.findings}
    said = {(finding.code, finding.owner, finding.message) for finding in before.findings}
    for finding in after.findings:
        if finding.level is not Level.ERROR or (finding.code, finding.owner, finding.message) in said:
            continue
        if (finding.code, finding.path) not in places or finding.path[: len(changed)] == changed:
            yield finding


def _lines(file: str, before: str, after: str) -> Iterator[str]:
    """Return the lines that differ, as they were and as they are, under their place."""
    old, new = before.split("\n"), after.split("\n")
    start = 0
    while start < min(len(old), len(new)) and old[start] == new[start]:
        start += 1
    end = 0
    while end < min(len(old), len(new)) - start and old[-1 - end] == new[-1 - end]:
        end += 1
    yield f"{plain(file)}:{start + 1}"
    for line in difflib.ndiff(old[start : len(old) - end], new[start : len(new) - end]):
        if line[:1] in "+-":
            yield plain(line.removesuffix("\r")).rstrip()


def _required(before: Opened, after: Opened) -> Iterator[str]:
    if before.snapshot is None or after.snapshot is None:
        return
    figures = Figures(after.snapshot.description)
    was = before.snapshot.budget.sources
    for id_, result in after.snapshot.budget.sources.items():
        density = result.fluid.density
        now = figures.pressure(result.required, density, unit=True)
        if id_ not in was:
            yield f"{plain(id_)}: required {now}"
            continue
        then = figures.pressure(was[id_].required, density, unit=True)
        if then == now:
            yield f"{plain(id_)}: required {now}, unchanged"
        else:
            difference = figures.pressure(result.required - was[id_].required, density, unit=True)
            sign = "" if difference.startswith("-") else "+"
            yield f"{plain(id_)}: required {then} -> {now} ({sign}{difference})"


def _doubts(before: Opened, after: Opened) -> Iterator[str]:
    """Spell the warnings that came up with the change."""
    known = {(finding.code, finding.path) for finding in before.findings}
    for finding in after.findings:
        if finding.level is Level.WARNING and (finding.code, finding.path) not in known:
            yield finding_line(after.name, finding)
