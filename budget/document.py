"""The open run: snapshots of its text and all that follows from it, with undo, redo and saving."""

from __future__ import annotations

import dataclasses
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path as FilePath
from typing import TYPE_CHECKING

from budget.description import Description, Finding, Level, Library, SourceText, describe, read_text
from budget.description.history import History
from budget.network import Budget, evaluate
from budget.report.located import Located, locate
from budget.storage import Stamp, load_text, read_libraries, renew, save

if TYPE_CHECKING:
    from budget.description.edits import Edit


@dataclass(frozen=True, slots=True)
class Snapshot:
    """Everything that follows from one state of the text."""

    text: str
    description: Description
    budget: Budget
    findings: tuple[Located, ...]
    revision: int
    readable: bool
    """Whether the text is TOML; where it is not, description and budget are those of the last text that was."""

    @property
    def level(self) -> Level | None:
        """The highest level among the findings."""
        levels = {finding.level for finding in self.findings}
        return next((level for level in (Level.ERROR, Level.WARNING, Level.NOTE) if level in levels), None)


def take(
    source: SourceText, revision: int = 0, before: Snapshot | None = None, libraries: tuple[Library, ...] = ()
) -> Snapshot:
    """Return all that follows from a text and the libraries that it names.

    One that is not TOML keeps what followed from the text before.
    """
    if source.data is None and before is not None:
        return dataclasses.replace(
            before,
            text=source.text,
            findings=locate(source.findings, source, before.description),
            revision=revision,
            readable=False,
        )
    description = describe(source, libraries)
    budget = evaluate(description)
    findings: Iterable[Finding] = budget.findings if source.data is not None else source.findings
    located = locate(findings, source, description)
    return Snapshot(source.text, description, budget, located, revision, source.data is not None)


class Document:
    """A run that is open for editing. It is the only place where anything changes."""

    def __init__(self, source: SourceText, path: FilePath | None = None, stamp: Stamp | None = None) -> None:
        """Start from a text that was read."""
        self.path = path
        """Where it is saved; None for a run that has no file yet."""
        self._libraries = read_libraries(source, path)
        self.snapshot = take(source, libraries=self._libraries)
        """The present state."""
        self._stamp = stamp
        self._saved = source.text if stamp is not None else None
        self._history = History.of(source.text)

    @classmethod
    def open(cls, path: FilePath) -> Document:
        """Open a file. Raises StorageError where it can't be read."""
        source, stamp = load_text(path)
        return cls(source, path, stamp)

    @classmethod
    def of(cls, text: str, path: FilePath | None = None) -> Document:
        """Open a text that is not saved yet."""
        return cls(read_text(text), path)

    @property
    def dirty(self) -> bool:
        """Whether the text differs from what is on disk."""
        return self.snapshot.text != self._saved

    def apply(self, edit: Edit, label: str, mark: object = None) -> Snapshot:
        """Apply an edit as one step that can be undone. Raises EditError, and nothing is changed then."""
        from budget.description.edits import apply_to_text  # noqa: PLC0415 - a check makes none

        return self.replace_text(apply_to_text(self.snapshot.text, edit), label, mark)

    def preview(self, edit: Edit) -> Snapshot:
        """Return what an edit would lead to; the document stays as it is. Raises EditError."""
        from budget.description.edits import apply_to_text  # noqa: PLC0415

        source = read_text(apply_to_text(self.snapshot.text, edit, verify=False))
        libraries = renew(source, self.path, self._libraries)
        return take(source, self.snapshot.revision, self.snapshot, libraries)

    def replace_text(self, text: str, label: str, mark: object = None) -> Snapshot:
        """Put another text in place of the present one, as one step that can be undone."""
        if text != self.snapshot.text:
            self._history = self._history.push(text, label, mark)
            self._show(text)
        return self.snapshot

    def undo(self) -> object | None:
        """Take the last step back; return the mark that it was made with."""
        mark = self._history.mark if self.can_undo else None
        self._travel(self._history.undo())
        return mark

    def redo(self) -> object | None:
        """Take the step forward again; return the mark that it was made with."""
        if not self.can_redo:
            return None
        self._travel(self._history.redo())
        return self._history.mark

    @property
    def can_undo(self) -> bool:
        """Whether there is a step to take back."""
        return self._history.can_undo

    @property
    def can_redo(self) -> bool:
        """Whether there is a step to take again."""
        return self._history.can_redo

    @property
    def history(self) -> History:
        """The steps so far."""
        return self._history

    def save(self, path: FilePath | None = None, *, over: bool = False) -> None:
        """Save, whole or not at all. Raises StorageError; ChangedOnDisk where the file was changed and not `over`."""
        target = path or self.path
        if target is None:
            raise ValueError("the run has no file; give a path")
        same = target == self.path and not over
        self._stamp = save(target, self.snapshot.text.encode("utf-8"), self._stamp if same else None)
        self.path, self._saved = target, self.snapshot.text
        self.read_libraries()

    def read_libraries(self) -> Snapshot:
        """Read the libraries that the run names anew, as they are on disk by now."""
        libraries = read_libraries(read_text(self.snapshot.text), self.path)
        if libraries != self._libraries:
            self._libraries = libraries
            self._show(self.snapshot.text)
        return self.snapshot

    def _travel(self, history: History) -> None:
        if history is not self._history:
            self._history = history
            self._show(history.text)

    def _show(self, text: str) -> None:
        source = read_text(text)
        self._libraries = renew(source, self.path, self._libraries)
        self.snapshot = take(source, self.snapshot.revision + 1, self.snapshot, self._libraries)
