"""An app that loses nothing, whichever way it ends: what it keeps, what is under way with its file, and its ends."""

from __future__ import annotations

import asyncio
import contextlib
import sys
from typing import TYPE_CHECKING

from textual.app import App

from budget.document import Document
from budget.screens import unsaved
from budget.storage.keeping import Keeper, Work

if TYPE_CHECKING:
    import subprocess
    import threading
    from collections.abc import Callable
    from pathlib import Path

    from budget.document import Saving
    from budget.screens.opened import Opened

INTERNAL = 70
"""Exit status where the program itself failed."""


class GuardedApp(App[int], inherit_bindings=False):
    """An app on an open document."""

    def __init__(self, document: Document) -> None:
        """Open on a document; nothing is kept before the keeper is started."""
        super().__init__()
        self.document = document
        """The open run."""
        self.keeper = Keeper(unsaved.work_of(document))
        """Holds the recovery record."""
        self.discarding = False
        """Whether the user threw the unsaved changes away."""
        self.following: Opened | None = None
        """The run that is to be opened once this one is left."""

        self.saving: Saving | None = None
        """What is being written to the file."""
        self.saver: threading.Thread | None = None
        """The thread that writes it."""
        self.after_saving: Callable[[], object] | None = None
        """What is done when it is written."""
        self.looking = False
        """Whether the file is being looked at."""
        self.pending = 0
        """How many pieces of work are done in the background."""
        self.told_problem = ""
        """Why nothing could be kept, as it was told last."""

        self.child: subprocess.Popen[bytes] | None = None
        """The user's own editor, while it has the terminal."""
        self.failure: BaseException | None = None
        """The unexpected error that ended the app."""
        self.failure_log: Path | None = None
        """Where that was written down."""
        self.failing: Callable[[], object] = lambda: None
        """Called when the app fails, before anything else."""
        self._running_loop: asyncio.AbstractEventLoop | None = None

    def work(self) -> Work:
        """Return what is to be kept now."""
        raise NotImplementedError

    def keep_now(self) -> bool:
        """Write what is unsaved for recovery at once; return whether it is safe. For signal handlers as well."""
        work = None
        with contextlib.suppress(Exception):  # in the midst of a change what was noted last is what there is
            work = self.work()
        return self.keeper.keep_now(work)

    def close_with(self, code: int) -> None:
        """End from a signal handler or another thread."""
        if self.child is not None:
            with contextlib.suppress(OSError):
                self.child.terminate()
        if self._running_loop is not None and not self._running_loop.is_closed():
            self._running_loop.call_soon_threadsafe(self.exit, code)

    def _handle_exception(self, error: Exception) -> None:
        """End after an unexpected error: what is unsaved is kept, what happened goes to the log."""
        if self._exception is None:
            self._exception = error
            self._exception_event.set()
        self.fail(error)

    def panic(self, *_renderables: object) -> None:
        """End after an error of the toolkit, which has told it on the screen otherwise."""
        self.fail(sys.exc_info()[1] or RuntimeError("the terminal could not be read any more"))

    def fail(self, error: BaseException) -> None:
        """Keep what is unsaved, write the log, and close."""
        self._return_code = INTERNAL
        if self.failure is None:
            from budget.storage.faults import record_fault  # noqa: PLC0415 - seldom, if ever

            self.failing()
            self.failure = error
            self.keep_now()
            self.failure_log = record_fault(error, "budget edit")
        self._close_messages_no_wait()
