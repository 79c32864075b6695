"""The open run: snapshots of its text and all that follows from it, with undo, redo and saving."""

from __future__ import annotations

import dataclasses
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from pathlib import Path as FilePath
from typing import TYPE_CHECKING

from budget.description import Description, Finding, Level, Library, SourceText, describe, read_text
from budget.description.history import History
from budget.network import Budget, evaluate
from budget.report.located import Located, locate
from budget.storage import Look, Stamp, StorageError, load_text, look, read_again, read_libraries, renew, save

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


@dataclass(frozen=True, slots=True)
class Saving:
    """What is to be written where, while the run may change on."""

    path: FilePath
    text: str
    stamp: Stamp | None
    over: bool = False

    def write(self, keep: Callable[[], object] = lambda: None) -> Stamp:
        """Write it, whole or not at all; return what stands on disk then. May run in any thread.

        `keep` is called when nothing stands in the way of writing. Raises StorageError; ChangedOnDisk where the file is
        not what it was, or where there is one already.
        """
        try:
            content = self.text.encode("utf-8")
        except UnicodeEncodeError as wrong:
            line = self.text.count("\n", 0, wrong.start) + 1
            message = f"{self.path} was not written: line {line} holds half a character; type it anew"
            raise StorageError(message) from wrong
        return save(self.path, content, self.stamp, over=self.over, keep=keep)


class Document:
    """A run that is open for editing. It is the only place where anything changes."""

    def __init__(self, source: SourceText, path: FilePath | None = None, stamp: Stamp | None = None) -> None:
        """Start from a text that was read."""
        self.path = path
        """Where it is saved; None for a run that has no file yet."""
        self._libraries = read_libraries(source, path)
        self.snapshot = take(source, libraries=self._libraries)
        """The present state."""
        self.read_only = ""
        """Why nothing may be changed; "" where it may."""
        self.on_disk = Look("same", stamp=stamp)
        """What was seen of the file last."""
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
        """Whether the text differs from what is known to be on disk, or nothing is there any more."""
        return self.snapshot.text != self._saved or self.on_disk.what == "gone"

    @property
    def base(self) -> str | None:
        """What the bytes on disk are known by, as they were read or written last; None where there are none."""
        return self._stamp.digest if self._stamp is not None else None

    @property
    def saved_text(self) -> str | None:
        """The text as it was read or written last; None where the run has no file."""
        return self._saved

    def apply(self, edit: Edit, label: str, mark: object = None) -> Snapshot:
        """Apply an edit as one step that can be undone. Raises EditError, and nothing is changed then."""
        self._check_open()
        from budget.description.edits import apply_to_text  # noqa: PLC0415 - a check makes none

        return self.replace_text(apply_to_text(self.snapshot.text, edit), label, mark)

    def preview(self, edit: Edit) -> Snapshot:
        """Return what an edit would lead to; the document stays as it is. Raises EditError."""
        from budget.description.edits import apply_to_text  # noqa: PLC0415

        source = read_text(apply_to_text(self.snapshot.text, edit, verify=False))
        libraries = renew(source, self.path, self._libraries)
        return take(source, self.snapshot.revision, self.snapshot, libraries)

    def replace_text(self, text: str, label: str, mark: object = None) -> Snapshot:
        """Put another text in place of the present one, as one step that can be undone.

        Raises EditError where nothing may be changed.
        """
        self._check_open()
        return self._replace(text, label, mark)

    def _replace(self, text: str, label: str, mark: object = None) -> Snapshot:
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

    # The file

    def prepare(self, path: FilePath | None = None, *, over: bool = False) -> Saving:
        """Return what saving is to write: the present text, to its file or to another one that must not exist yet."""
        target = path or self.path
        if target is None:
            raise ValueError("the run has no file; give a path")
        return Saving(target, self.snapshot.text, self._stamp if target == self.path else None, over)

    def saved(self, saving: Saving, stamp: Stamp, libraries: tuple[Library, ...]) -> None:
        """Take note that something was written, and of the libraries beside it; what was changed since is unsaved."""
        self.path, self._saved, self._stamp = saving.path, saving.text, stamp
        self.on_disk = Look("same", stamp=stamp)
        self.read_only = ""
        self.take_libraries(libraries)

    def save(self, path: FilePath | None = None, *, over: bool = False) -> None:
        """Save, whole or not at all. Raises StorageError; ChangedOnDisk where the file was changed and not `over`."""
        saving = self.prepare(path, over=over)
        self.saved(saving, saving.write(), self.look_at_libraries(saving.path))

    @property
    def stamp(self) -> Stamp | None:
        """That of the bytes on disk, as they were read or written last."""
        return self._stamp

    def look(self) -> Look:
        """Look what is on disk now. May run in any thread; nothing changes."""
        return look(self.path, self._stamp) if self.path is not None else Look("same")

    def meet(self, seen: Look, mark: object = None) -> bool:
        """Take note of what is on disk; return whether another text stands in the document now.

        A document without unsaved changes follows its file, as one step that can be undone. Of one that has some the
        file is left to be dealt with: `on_disk` tells of it.
        """
        clean = not self.dirty
        self.on_disk = seen
        if seen.what == "same":
            self._stamp = seen.stamp
        elif seen.source is not None and (clean or seen.source.text == self.snapshot.text):
            return self.take_from_disk(seen, mark)
        return False

    def acknowledge(self, seen: Look) -> None:
        """Go on from what is on disk: the next save may write over it, and over nothing else."""
        self._stamp = seen.stamp
        self._saved = seen.source.text if seen.source is not None else None
        self.on_disk = Look("same", stamp=seen.stamp)

    def take_from_disk(self, seen: Look, mark: object = None) -> bool:
        """Take what is on disk in place of the present text, which stays one step back."""
        before = self.snapshot
        self.acknowledge(seen)
        if seen.source is not None:
            self._replace(seen.source.text, "reload from disk", mark)
        return self.snapshot is not before

    def look_at_libraries(self, path: FilePath | None = None) -> tuple[Library, ...]:
        """Look what the libraries that the run names are by now, beside its file or where that is to be saved.

        May run in any thread; nothing changes.
        """
        return read_again(self._libraries, path or self.path)

    def take_libraries(self, libraries: tuple[Library, ...]) -> bool:
        """Compute the run with its libraries as they were seen; return whether one of them had changed."""
        names = [[library.written for library in some] for some in (libraries, self._libraries)]
        if libraries == self._libraries or names[0] != names[1]:
            return False
        self._libraries = libraries
        self._show(self.snapshot.text)
        return True

    def _check_open(self) -> None:
        if self.read_only:
            from budget.description.edits import EditError  # noqa: PLC0415 - a check makes none

            raise EditError(self.read_only)

    def _travel(self, history: History) -> None:
        if history is not self._history:
            self._history = history
            self._show(history.text)

    def _show(self, text: str) -> None:
        source = read_text(text)
        self._libraries = renew(source, self.path, self._libraries)
        self.snapshot = take(source, self.snapshot.revision + 1, self.snapshot, self._libraries)
