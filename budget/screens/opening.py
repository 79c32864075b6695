"""Opening a run in the app, and the way out of it."""

from __future__ import annotations

import contextlib
import errno
import logging
import sys
import threading
from pathlib import Path

from budget.document import Document
from budget.report.plain import plain
from budget.screens import unsaved
from budget.screens.app import BudgetApp
from budget.screens.config import Config, config_folder
from budget.screens.guarded import INTERNAL
from budget.screens.signals import Guard
from budget.screens.themes import load_theme
from budget.storage import StorageError
from budget.storage.records import Record, find_records

SAVING = 1.0
"""Seconds in which a save that is under way at the end may come to its own end."""


def open_app(
    path: Path, config: Config, problems: tuple[str, ...], *, ascii_only: bool, mouse: bool, read_only: bool = False
) -> int:
    """Open a file and stay in the app until the user leaves; return the exit code."""
    try:
        document, notes = _open(path)
    except StorageError as wrong:
        print(f"budget: {plain(str(wrong))}", file=sys.stderr)
        return 2
    if read_only:
        document.read_only = "opened read-only"
    theme, theme_problems = load_theme(config.theme, config_folder())
    app = BudgetApp(document, config, theme, ascii_only=ascii_only, notes=(*notes, *problems, *theme_problems))
    guard = Guard(keep=app.keep_now, close=app.close_with)
    app.failing = lambda: guard.hurry(INTERNAL)
    _quiet()
    guard.watch()
    try:
        code = app.run(mouse=mouse)
    except Exception as error:  # noqa: BLE001 - whatever broke the toolkit is told as any other error of ours
        code = INTERNAL
        app.fail(error)
        guard.put_back()
    if guard.code is not None:
        guard.let_go()
    if app.saver is not None:
        app.saver.join(SAVING)
    with contextlib.suppress(Exception):  # of a broken app, what was noted last is what there is
        unsaved.note(app)
    app.keeper.end(discard=app.discarding)
    if app.failure is not None:
        _tell_failure(app)
        return INTERNAL
    if guard.code is not None:
        if document.dirty:
            kept = f"kept: budget edit {plain(str(path))}"
            told = kept if app.keeper.kept else f"NOT kept: {plain(app.keeper.problem)}"
            print(f"budget: ended by a signal; unsaved changes were {told}", file=sys.stderr)
        return guard.code
    return code if code is not None else app.return_code or 0


def _open(path: Path) -> tuple[Document, tuple[str, ...]]:
    """Open a file; where it is gone and unsaved changes of it were left behind, those."""
    try:
        return Document.open(path), ()
    except StorageError:
        left = _left_behind(path) if not path.exists() else None
        if left is None:
            raise
    document = Document.of(left.text or "", path)
    return document, (f"{path.name} is not there; this is what was unsaved when it was last open",)


def _left_behind(path: Path) -> Record | None:
    return next((one for one in find_records(path) if one.alive is False and one.text is not None), None)


def _quiet() -> None:
    """Let nothing write on the screen but the app: what goes wrong in a thread or a task goes to the log."""

    def log(told: threading.ExceptHookArgs) -> None:
        from budget.storage.faults import record_fault  # noqa: PLC0415 - seldom, if ever

        # A terminal that went away is no fault of the program.
        lost = isinstance(told.exc_value, OSError) and told.exc_value.errno == errno.EIO
        if told.exc_value is not None and not lost:
            record_fault(told.exc_value, "budget edit, a thread")

    threading.excepthook = log
    logging.getLogger("asyncio").addHandler(logging.NullHandler())


def _tell_failure(app: BudgetApp) -> None:
    """Say in one message what happened, and where what was unsaved is."""
    error, log = app.failure, app.failure_log
    told = [f"internal error: {type(error).__name__}: {plain(str(error))[:300]}"]
    if app.document.dirty:
        kept = f"kept; budget edit {plain(str(app.document.path))} brings them back, budget recover {app.keeper.id} too"
        told.append(f"unsaved changes were {kept if app.keeper.kept else 'NOT kept: ' + plain(app.keeper.problem)}")
    if log is not None:
        told.append(f"the log is {plain(str(log))}")
    print(f"budget: {'; '.join(told)}", file=sys.stderr)
