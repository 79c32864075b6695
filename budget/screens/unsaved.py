"""What is unsaved: told to whoever keeps it, and at the head of the screen."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from budget.storage.keeping import Work

if TYPE_CHECKING:
    from budget.document import Document
    from budget.screens.app import BudgetApp

UNNAMED = Path("unnamed.toml")


def work_of(document: Document, cursor: tuple[str | int, ...] = (), written: str | None = None) -> Work:
    """Return what is to be kept of a document; `written` is a text that is not in it yet."""
    text = written if written is not None else document.snapshot.text if document.dirty else None
    return Work(document.path or UNNAMED.absolute(), document.base, text, cursor)


def work(app: BudgetApp) -> Work:
    """Return what is to be kept now, what is written on the Text screen included."""
    return work_of(app.document, app.ledger.mark.path, app.written)


def note(app: BudgetApp) -> None:
    """Have kept what is unsaved now."""
    app.keeper.note(work(app))


def state(document: Document, problem: str) -> tuple[str, str]:
    """Say how the run stands to its file, with the role of the style."""
    words = [document.read_only and "read only", "not saved" if document.dirty else "saved"]
    words.append({"changed": "changed on disk", "there": "changed on disk", "gone": "gone from disk"}.get(
        document.on_disk.what, ""))  # fmt: skip
    if problem and document.dirty:
        words.append("not kept for recovery")
    told = [word for word in words if word]
    return ", ".join(told), "faint" if len(told) == 1 or document.read_only else "warning"
