"""`budget recover`: unsaved work that the app kept: listed, compared, written out and removed, without the app."""

from __future__ import annotations

import argparse
import json
import os
import sys
from collections.abc import Sequence
from datetime import datetime
from pathlib import Path
from shutil import get_terminal_size
from typing import Literal

from budget.commands.dispatch import OK, REFUSED, WARNINGS, say
from budget.report.plain import plain
from budget.report.table import WIDE, Column, table
from budget.storage import StorageError, load, writing
from budget.storage.processes import this_process, user_name
from budget.storage.records import SUFFIX, Record, read_record, records_folder, remove_record

STDOUT = "-"

Standing = Literal["same", "differs", "changed", "gone", "unreadable"]
"""How a kept text stands to its file: the file as it was opened is another one, was changed since, is gone."""

STANDINGS: dict[Standing, str] = {
    "same": "the same as the file",
    "differs": "differs from the file",
    "changed": "differs, and the file was changed since",
    "gone": "there is no such file",
    "unreadable": "the file can't be read",
}


class _RefusedError(Exception):
    """What was asked for can't be done; the text says why and what to do."""


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take a file or the ID of a record, and what to do."""
    parser.add_argument(
        "what",
        metavar="FILE|ID",
        nargs="?",
        help="a run's file, or the ID of a record, of which the beginning is enough",
    )
    doing = parser.add_mutually_exclusive_group()
    doing.add_argument("--to", metavar="FILE", help="write the kept text to a new file; - prints it")
    doing.add_argument("--differences", action="store_true", help="print how the kept text differs from the file")
    doing.add_argument("--delete", action="store_true", help="remove a record for good; asks first")
    parser.add_argument("--yes", action="store_true", help="with --delete: do not ask")
    parser.add_argument("--all", action="store_true", help="list runs that are open with nothing unsaved as well")
    parser.add_argument("--json", action="store_true", help="print the list as JSON")


def run(options: argparse.Namespace) -> int:
    """List records, or do something with one; 1 where its text may be cut off, 2 where it can't be done."""
    try:
        records, lost = _kept()
        if not (options.to is not None or options.differences or options.delete):
            return _list(records, lost, options)
        if options.all or options.json:
            raise _RefusedError("--all and --json go with the list alone; leave them out")
        if options.what is None:
            raise _RefusedError("say which record; budget recover lists them with their IDs")
        record = _one(options.what, records)
        if options.delete:
            return _delete(record, sure=options.yes)
        return _differences(record) if options.differences else _write(record, options.to)
    except _RefusedError as refused:
        say(str(refused))
        return REFUSED


def standing(record: Record) -> Standing:
    """Return how the kept text stands to the file on disk as it is now."""
    try:
        content, stamp = load(record.path)
    except StorageError as wrong:
        return "gone" if isinstance(wrong.__cause__, FileNotFoundError | NotADirectoryError) else "unreadable"
    except ValueError:  # a name that no file can have
        return "unreadable"
    if content == _bytes(record):
        return "same"
    return "differs" if stamp.digest == record.base else "changed"


# Finding


def _kept() -> tuple[list[Record], list[Path]]:
    """Return all records, the latest first, and the files among them that can't be read as records."""
    try:
        files = sorted(records_folder().glob(f"*{SUFFIX}"))
    except OSError as wrong:
        reason = wrong.strerror or str(wrong)
        raise _RefusedError(f"the folder in which unsaved work is kept could not be used: {reason}") from wrong
    records, lost = [], []
    for file in files:
        try:
            records.append(read_record(file))
        except StorageError:
            lost.append(file)
    return sorted(records, key=lambda record: record.time, reverse=True), lost


def _meant(name: str, records: Sequence[Record]) -> list[Record]:
    """Return the record of an ID, else those that are kept of a file, else those whose IDs begin so."""
    real = Path(os.path.realpath(name))
    return (
        [record for record in records if record.id == name]
        or [record for record in records if record.path == real]
        or [record for record in records if name and record.id.startswith(name)]
    )


def _one(name: str, records: Sequence[Record]) -> Record:
    """Return the one record that is meant; where there are several of a file, that with something unsaved."""
    found = _meant(name, records)
    if len(found) > 1:
        found = [record for record in found if record.text is not None] or found
    if len(found) == 1:
        return found[0]
    if found:
        raise _RefusedError(
            f"{name!r} may be any of {', '.join(record.id for record in found)}; write one of these IDs"
        )
    raise _RefusedError(f"there is no record {name!r}, and nothing is kept of a file of that name; see budget recover")


# The list


def _list(records: list[Record], lost: Sequence[Path], options: argparse.Namespace) -> int:
    if options.yes:
        raise _RefusedError("--yes goes with --delete alone; leave it out")
    shown = records if options.what is None else _meant(options.what, records)
    if not options.all:
        shown = [record for record in shown if record.text is not None]
    if options.json:
        # ASCII alone: whatever stands in a name is spelled out, and the output does not depend on the terminal.
        print(
            json.dumps({"records": [_object(record) for record in shown], "unreadable": [str(file) for file in lost]})
        )
        return OK
    for file in lost:
        say(f"{file} is damaged at its beginning; look at it with a text editor")
    if not shown:
        print("nothing is kept" if options.what is None else f"nothing is kept of {plain(options.what)}")
        return OK
    columns = (
        Column("ID", left=True),
        Column("kept", left=True),
        Column("by", left=True, optional=True),
        Column("open", left=True),
        Column("state", left=True),
        Column("file", left=True),
    )
    for line in table(columns, [_row(record) for record in shown], indent=""):
        print(line)
    print("\nbudget edit FILE offers what is kept of it; budget recover ID --to FILE writes it to a new file")
    return OK


def _row(record: Record) -> tuple[str, ...]:
    return (
        plain(record.id),
        _time(record.time),
        _whose(record),
        {True: f"yes, process {record.process.pid}", False: "no", None: "perhaps"}[record.alive],
        _state(record),
        plain(str(record.path)),
    )


def _state(record: Record) -> str:
    if record.text is None:
        return "nothing unsaved"
    state = STANDINGS[standing(record)]
    return f"{state}; damaged, its end may be missing" if record.fault else state


def _whose(record: Record) -> str:
    """Return who kept it, where it was another user or on another machine."""
    here = this_process().host
    if record.user == user_name() and record.process.host == here:
        return ""
    return plain(record.user if record.process.host == here else f"{record.user} on {record.process.host}")


def _object(record: Record) -> dict[str, object]:
    return {
        "id": record.id,
        "file": str(record.path),
        "kept": record.time.isoformat(timespec="seconds"),
        "opened": record.opened.isoformat(timespec="seconds"),
        "user": record.user,
        "host": record.process.host,
        "pid": record.process.pid,
        "open": record.alive,
        "unsaved": record.text is not None,
        "state": standing(record) if record.text is not None else None,
        "damaged": bool(record.fault),
        "record": str(record.file),
    }


def _time(time: datetime) -> str:
    try:
        return time.astimezone().strftime("%Y-%m-%d %H:%M:%S")
    except (OverflowError, ValueError):  # a damaged record may say anything
        return time.isoformat(sep=" ", timespec="seconds")


# What can be done with one


def _write(record: Record, name: str) -> int:
    content = _content(record)
    if name == STDOUT:
        _print(content)
        return _damage(record)
    target = Path(name)
    try:
        writing.put(target, content, new=True)
    except FileExistsError:
        raise _RefusedError(_taken(record, target)) from None
    except OSError as wrong:
        raise _RefusedError(f"{name} could not be written: {wrong.strerror or wrong}") from wrong
    print(f"{plain(name)} was written, with {len(content)} bytes; open it with: budget edit {plain(name)}")
    print(f"the record is kept until you remove it with: budget recover {record.id} --delete")
    return _damage(record)


def _taken(record: Record, target: Path) -> str:
    if target.exists() and record.path.exists() and target.samefile(record.path):
        return f"{target} is the run's own file; write to another one, or take what is kept in budget edit"
    return f"{target} exists already; name a file that is not there yet"


def _print(content: bytes) -> None:
    if sys.stdout.isatty():
        for line in content.decode("utf-8", "replace").removesuffix("\n").split("\n"):
            print(plain(line))
        return
    sys.stdout.flush()
    sys.stdout.buffer.write(content)


def _differences(record: Record) -> int:
    from budget.description.differences import compare  # noqa: PLC0415 - a list does without
    from budget.report.differences import difference_lines  # noqa: PLC0415

    text = _content(record).decode("utf-8", "replace")
    try:
        content, _ = load(record.path)
    except StorageError as wrong:
        raise _RefusedError(f"{wrong}; write the kept text out with --to") from wrong
    except ValueError as wrong:
        raise _RefusedError(f"no file can be called {str(record.path)!r}; write the kept text out with --to") from wrong
    changes = compare(content.decode("utf-8", "replace"), text)
    if not changes:
        print(f"the kept text is the same as {plain(str(record.path))}")
    else:
        print(f"{plain(str(record.path))} on disk  ->  as kept {_time(record.time)}")
    for line in difference_lines(changes, width=get_terminal_size((WIDE, 0)).columns):
        print(line)
    return _damage(record)


def _delete(record: Record, *, sure: bool) -> int:
    about = f"of {record.path}, kept {_time(record.time)}"
    if record.alive:
        raise _RefusedError(f"the record {about} belongs to the app in process {record.process.pid}; close it there")
    if not sure:
        if sys.stdin is None or not sys.stdin.isatty():
            raise _RefusedError("nobody is there to be asked; add --yes to delete it without a question")
        perhaps = "" if record.alive is False else f"; it may be open still on {record.process.host}"
        print(f"delete what is unsaved {plain(about + perhaps)} (yes, no) [no]: ", end="", file=sys.stderr, flush=True)
        if sys.stdin.readline().strip().lower() not in ("y", "yes"):
            print("it was left as it is")
            return OK
    remove_record(record)
    print(f"the record {plain(about)} was deleted")
    return OK


def _content(record: Record) -> bytes:
    if record.text is None:
        raise _RefusedError(f"nothing was unsaved of {record.path}; the record says no more than that it is open")
    return _bytes(record)


def _bytes(record: Record) -> bytes:
    return (record.text or "").encode("utf-8", "surrogatepass")


def _damage(record: Record) -> int:
    if record.fault:
        say(f"{record.fault}; compare it with the file")
        return WARNINGS
    return OK
