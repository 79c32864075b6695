"""At opening: whether the run is open elsewhere, and whether unsaved changes of it were left behind."""

from __future__ import annotations

import contextlib
from collections.abc import Callable
from datetime import datetime
from functools import partial
from typing import TYPE_CHECKING

from budget.report.plain import plain
from budget.screens import unsaved
from budget.screens.asking import ask
from budget.screens.background import in_background
from budget.screens.ledger import Mark
from budget.storage.processes import this_process
from budget.storage.records import Record, find_records, remove_record

if TYPE_CHECKING:
    from pathlib import Path

    from budget.screens.app import BudgetApp


def look(app: BudgetApp, *, asked: bool = False) -> None:
    """Look for records of the run, in a thread, and ask about each; `asked` says so too where there are none."""
    path = app.document.path
    if path is None:
        return
    known, sweep = app.document.saved_text, not asked

    def then(found: tuple[Record, ...]) -> None:
        if asked and not found:
            app.say("no unsaved changes of this run were left behind", "note")
        _ask_next(app, found)

    in_background(app, partial(_records, path, known, sweep=sweep), then)


def told(record: Record) -> str:
    """Say when something was kept and by whom."""
    return f"{clock(record.time)} by {plain(record.user)}"


def clock(time: datetime) -> str:
    """Spell a time as the clock on the wall shows it, with the day where it is another."""
    here = time.astimezone()
    return here.strftime("%H:%M" if here.date() == datetime.now().astimezone().date() else "%Y-%m-%d %H:%M")


def _records(path: Path, known: str | None, *, sweep: bool) -> tuple[Record, ...]:
    """Return what is to be asked about: other processes that have the run open first, then what was left behind."""
    from budget.storage.writing import sweep as sweep_temporary  # noqa: PLC0415 - only here, and beside the keyboard

    if sweep:
        sweep_temporary(path.parent, path.name)
    here, open_elsewhere, left = this_process(), [], []
    for record in find_records(path):
        if record.process == here:
            continue
        if record.alive is not False:
            open_elsewhere.append(record)
        elif record.text is not None and record.text == known and not record.fault:
            with contextlib.suppress(OSError):
                remove_record(record)
        elif record.text is not None:
            left.append(record)
    return (*open_elsewhere, *left)


def _ask_next(app: BudgetApp, records: tuple[Record, ...]) -> None:
    if not records or app.document.read_only:
        return
    record, rest = records[0], records[1:]
    if record.alive is not False:
        _ask_of_another(app, record, partial(_ask_next, app, rest))
    else:
        _ask_of_changes(app, record, partial(_ask_next, app, rest))


def _ask_of_another(app: BudgetApp, record: Record, go_on: Callable[[], object]) -> None:
    surely = record.alive
    where = f" on {plain(record.process.host)}" if surely is None else f", process {record.process.pid}"
    since = (
        f"{'open' if surely else 'perhaps open'} elsewhere since {clock(record.opened)} by {plain(record.user)}{where}"
    )
    unsaved_there = ", with unsaved changes" if record.text is not None else ""

    def read_only() -> None:
        app.document.read_only = f"opened read-only: the run is {since}"
        app.tell_state()
        app.say(f"read-only; {app.keys('save_as')} saves a copy" if app.keys("save_as") else "read-only")

    def anyway() -> None:
        app.say("two people at one file: whoever saves last is asked about what the other changed", "note")
        go_on()

    ask(
        app,
        f"The run is {since}{unsaved_there}",
        (("open it read-only", read_only), ("open it all the same", anyway)),
        "quit",
        lambda: app.exit(0),
    )


def _ask_of_changes(app: BudgetApp, record: Record, go_on: Callable[[], object]) -> None:
    text = record.text or ""
    since = "" if record.base in (None, app.document.base) else "; the file was changed since"
    fault = f"; {record.fault}" if record.fault else ""

    def again() -> None:
        _ask_of_changes(app, record, go_on)

    def recover() -> None:
        before = app.document.snapshot
        app.document.replace_text(text, "recover unsaved changes", app.ledger.mark)
        app.show(app.document.snapshot, before)
        if record.cursor:
            app.ledger.return_to(Mark(record.cursor, app.ledger.cursor, app.ledger.column))
        app.tell()
        app.say(f"recovered, not saved yet; {app.keys('undo')} brings back what is on disk")
        unsaved.note(app)
        in_background(app, partial(_hand_over, app, record), lambda _: None)

    def differences() -> None:
        from budget.screens import conflict  # noqa: PLC0415 - the first frame does not wait for it

        title = f"What was unsaved at {told(record)}"
        conflict.list_differences(app, title, app.document.saved_text or "", text, again)

    def delete() -> None:
        with contextlib.suppress(OSError):
            remove_record(record)
        app.say("the unsaved changes were deleted")
        go_on()

    ask(
        app,
        f"Unsaved changes of {told(record)} were left behind{since}{fault}",
        (("recover them", recover), ("see what differs from the file", differences), ("delete them", delete)),
        "ignore them for now",
        go_on,
    )


def _hand_over(app: BudgetApp, record: Record) -> None:
    """Remove a record once our own holds what was in it."""
    if app.keeper.keep_now():
        with contextlib.suppress(OSError):
            remove_record(record)
