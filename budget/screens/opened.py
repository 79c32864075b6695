"""Reading a run that is to be shown in the app, before anything of the app begins or ends."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from budget.document import Document
from budget.storage import StorageError
from budget.storage.records import Record, find_records


@dataclass(frozen=True, slots=True)
class Opened:
    """A run that was read: its document, and what is to be said of it first."""

    path: Path
    document: Document
    notes: tuple[str, ...] = ()

    def up_to_date(self) -> Opened:
        """Return it as it is on disk by now: the very same where nothing changed. Raises StorageError."""
        return self if self.document.look().what == "same" else open_run(self.path)


def open_run(path: Path) -> Opened:
    """Open a file; where it is gone and unsaved changes of it were left behind, those.

    Raises StorageError where it can't be read.
    """
    try:
        return Opened(path, Document.open(path))
    except StorageError:
        left = left_behind(path)
        if left is None:
            raise
    document = Document.of(left.text or "", path)
    return Opened(path, document, (f"{path.name} is not there; this is what was unsaved when it was last open",))


def left_behind(path: Path) -> Record | None:
    """Return what was left behind unsaved of a file that is gone, if anything was."""
    try:
        if path.exists():
            return None
    except OSError:  # it can't be told, in a folder that is closed, say
        return None
    return next((one for one in find_records(path) if one.alive is False and one.text is not None), None)
