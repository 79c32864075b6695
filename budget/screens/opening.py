"""Opening a run in the app, going on from it to another, and the way out."""

from __future__ import annotations

import contextlib
import errno
import logging
import signal
import sys
import threading
from dataclasses import dataclass
from pathlib import Path

from budget.report.plain import plain
from budget.screens import unsaved
from budget.screens.app import BudgetApp
from budget.screens.config import Config, config_folder
from budget.screens.guarded import INTERNAL
from budget.screens.opened import Opened, open_run
from budget.screens.signals import Guard
from budget.screens.themes import load_theme
from budget.screens.working import wait_for_all
from budget.storage import StorageError

SAVING = 1.0
"""Seconds in which a save that is under way at the end may come to its own end."""

WORKING = 1.0
"""Seconds in which other work that is under way at the end may."""


@dataclass(frozen=True, slots=True)
class Terms:
    """How runs are shown from the start of the program to its end, whichever of them is open."""

    config: Config
    ascii_only: bool
    mouse: bool
    read_only: bool


class _Stay:
    """A stay in the app: one run is open at any moment, and the guard acts on that one."""

    def __init__(self, terms: Terms) -> None:
        self.terms = terms
        self.theme, self.problems = load_theme(terms.config.theme, config_folder())
        self.app: BudgetApp | None = None
        self.guard = Guard(keep=self._keep, close=self._close)

    def make(self, run: Opened, problems: tuple[str, ...] = ()) -> BudgetApp:
        """Make the app of a run that was read."""
        terms = self.terms
        if terms.read_only:
            run.document.read_only = "opened read-only"
        notes = (*run.notes, *problems)
        app = BudgetApp(run.document, terms.config, self.theme, ascii_only=terms.ascii_only, notes=notes)
        app.failing = lambda: self.guard.hurry(INTERNAL)
        return app

    def through(self, app: BudgetApp) -> int | None:
        """Stay in an app until it ends; return what it ends with."""
        try:
            return app.run(mouse=self.terms.mouse)
        except Exception as error:  # noqa: BLE001 - whatever broke the toolkit is told as any other error of ours
            app.fail(error)
            self.guard.put_back()
            return INTERNAL
        finally:
            for number in (signal.SIGTSTP, signal.SIGCONT):  # the app's own would wake an app that has ended
                signal.signal(number, signal.SIG_DFL)

    def goes_on(self, app: BudgetApp) -> bool:
        """Whether an app that has ended was left for another run, and not ended by a signal or a fault."""
        return app.following is not None and app.failure is None and self.guard.code is None

    def next_after(self, app: BudgetApp, following: Opened) -> BudgetApp:
        """Return the app of the run that an app was left for; where that fails, of the old run, with the reason."""
        _settle(app)
        try:
            after = self.make(following.up_to_date())
        except StorageError as refused:
            return self._back(app, str(refused))
        except Exception as fault:  # noqa: BLE001 - what is wrong with the other run must not end the stay
            from budget.storage.faults import record_fault  # noqa: PLC0415 - seldom, if ever

            record_fault(fault, "budget edit, opening another run")
            return self._back(app, f"{following.path.name} could not be shown: {type(fault).__name__}")
        app.keeper.end(discard=app.discarding, left=True)
        return after

    def _back(self, app: BudgetApp, reason: str) -> BudgetApp:
        """Take up the run again that was left, with all that was unsaved and one step back from it."""
        again = self.make(Opened(app.document.path or unsaved.UNNAMED, app.document))
        again.first_words = (reason, "error")
        again.ledger.return_to(app.ledger.mark)
        # The new record is there before the old one goes.
        app.keeper.end(discard=again.keeper.keep_now(), left=True)
        return again

    def _keep(self) -> None:
        if self.app is not None:
            self.app.keep_now()

    def _close(self, code: int) -> None:
        if self.app is not None:
            self.app.close_with(code)


def open_app(
    path: Path, config: Config, problems: tuple[str, ...], *, ascii_only: bool, mouse: bool, read_only: bool = False,
    first_words: str = "",
) -> int:  # fmt: skip
    """Open a file, and others from there, and stay in the app until the user leaves; return the exit code.

    `first_words` are said of the run when it is shown.
    """
    try:
        run = open_run(path)
    except StorageError as wrong:
        print(f"budget: {plain(str(wrong))}", file=sys.stderr)
        return 2
    stay = _Stay(Terms(config, ascii_only, mouse, read_only))
    app = stay.app = stay.make(run, (*problems, *stay.problems))
    app.first_words = (first_words, "note")
    _quiet()
    stay.guard.watch()
    code = stay.through(app)
    while app.following is not None and stay.goes_on(app):
        app = stay.app = stay.next_after(app, app.following)
        if stay.guard.code is not None:  # it came between the two
            break
        code = stay.through(app)
    return _end(app, stay.guard, code)


def _settle(app: BudgetApp) -> None:
    """Wait a little for a save that is under way, and note what is unsaved of an app that has ended."""
    if app.saver is not None:
        app.saver.join(SAVING)
    with contextlib.suppress(Exception):  # of a broken app, what was noted last is what there is
        unsaved.note(app)


def _end(app: BudgetApp, guard: Guard, code: int | None) -> int:
    """End the stay with the app that was open last; return the exit code."""
    if guard.code is not None:
        guard.let_go()
    _settle(app)
    app.keeper.end(discard=app.discarding)
    for work in app.works:
        work.stop()
    wait_for_all(WORKING)
    if app.failure is not None:
        _tell_failure(app)
        return INTERNAL
    if guard.code is not None:
        if app.document.dirty:
            kept = f"kept: budget edit {plain(str(app.document.path))}"
            told = kept if app.keeper.kept else f"NOT kept: {plain(app.keeper.problem)}"
            print(f"budget: ended by a signal; unsaved changes were {told}", file=sys.stderr)
        return guard.code
    return code if code is not None else app.return_code or 0


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
