"""Earlier versions of a run from the git repository that its file lies in: which there are, and what they hold.

Git is asked by its plumbing alone. Whatever the configuration of a repository says, no program is started by it, no
network is reached and nothing is written; what git answers is read up to a size and within a time.
"""

from __future__ import annotations

import contextlib
import os
import select
import shutil
import signal
import subprocess
import tempfile
import time
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import IO, NamedTuple

from budget.description import Library, SourceText, read_bytes
from budget.description.source import LARGEST_FILE
from budget.storage.files import StorageError, load
from budget.storage.libraries import read_libraries

LATEST = "HEAD"
"""The revision that is checked out."""

WITHIN = 10.0
"""Seconds in which git must have answered all that is asked of it at once."""

MOST = 200
"""Revisions that are listed."""


@dataclass(frozen=True, slots=True)
class Revision:
    """One revision that touched the file. The subject is as somebody wrote it, not made plain."""

    id: str
    short: str
    date: str
    subject: str


@dataclass(frozen=True, slots=True)
class Past:
    """A run's file as it was in a revision, with the libraries that it names."""

    revision: str
    """The whole ID of the revision."""
    source: SourceText
    libraries: tuple[Library, ...] = ()
    from_disk: tuple[str, ...] = ()
    """Libraries that the revision does not have, as the run writes their paths: they are as they are on disk now."""


def read_past(path: Path, revision: str) -> Past:
    """Return a run as it was in a revision, which is written as git takes it: `HEAD~2`, a tag, a branch, a hash.

    Symbolic links are followed as they lead now. Raises StorageError where there is no such revision, the file was not
    in it, or git can't be asked.
    """
    git = _Git(path)
    commit = git.commit(revision)
    source = read_bytes(git.content(commit, revision))
    from_disk: list[Path] = []

    def library(target: Path) -> bytes:
        try:
            return _Git(target, git.until).content(commit, revision)
        except StorageError:
            content = load(target)[0]
            from_disk.append(target)
            return content

    libraries = read_libraries(source, path, library)
    folder = git.file.parent
    there = [one.written for one in libraries if Path(os.path.realpath(folder / one.written)) in from_disk]
    return Past(commit, source, libraries, tuple(there))


def list_revisions(path: Path, most: int = MOST) -> tuple[Revision, ...]:
    """Return the revisions that touched a file under its present name, the latest first.

    Raises StorageError where git can't be asked.
    """
    git = _Git(path)
    if not git.knows(LATEST):
        return ()  # nothing was committed yet
    answer = git.told(
        "log", "-z", "--format=%H%x00%h%x00%cd%x00%s", "--date=short", "--encoding=UTF-8", f"--max-count={most}",
        "--no-show-signature", "--no-ext-diff", "--no-textconv", "--no-mailmap", "--no-color", "--no-follow",
        LATEST, "--", git.name,
    )  # fmt: skip
    fields = [field.decode("utf-8", "replace") for field in answer.split(b"\0")[:-1]]
    return tuple(Revision(*four) for four in zip(*[iter(fields)] * 4, strict=False))


_KEPT = ("GIT_CONFIG_GLOBAL", "GIT_CONFIG_SYSTEM", "GIT_CONFIG_NOSYSTEM", "GIT_EXEC_PATH", "GIT_CEILING_DIRECTORIES")
"""What git is told by the environment of the user. The rest goes: it may name another repository, as within a hook."""

_OURS: Mapping[str, str] = {
    "LC_ALL": "C",  # what git says is looked into
    "GIT_ALLOW_PROTOCOL": "",  # goes before any setting that would allow one
    "GIT_NO_LAZY_FETCH": "1",
    "GIT_TERMINAL_PROMPT": "0",
    "GIT_OPTIONAL_LOCKS": "0",
}

_SETTINGS = (
    "protocol.allow=never",
    "core.fsmonitor=false",
    "core.hooksPath=/dev/null",
    "safe.bareRepository=explicit",
    "log.showSignature=false",
)
"""Go before those of the repository, which are whatever came with it."""


class _Answer(NamedTuple):
    status: int
    output: bytes
    complaint: str


class _Git:
    """Git, asked about one file."""

    def __init__(self, path: Path, until: float | None = None) -> None:
        program = shutil.which("git")
        if program is None:
            raise StorageError("git was not found; install it, or compare with another file")
        self._path = path
        self._program = str(Path(program).absolute())  # never one that lies in the folder of the run
        self.file = Path(os.path.realpath(path))
        self.name = f"./{self.file.name}"
        self.until = time.monotonic() + WITHIN if until is None else until

    def knows(self, revision: str) -> bool:
        """Whether there is such a commit."""
        return self._find(revision) is not None

    def commit(self, revision: str) -> str:
        """Return the whole ID of a revision."""
        found = self._find(revision)
        if found is None:
            raise StorageError(
                f"there is no revision {revision!r} in the repository of {self._path}; "
                "write a branch, a tag, a hash or HEAD~1"
            )
        return found

    def content(self, commit: str, revision: str) -> bytes:
        """Return the bytes of the file in a commit, as they are in the repository: no filter changes them."""
        entry = self.told("ls-tree", "-z", "--long", commit, self.name).partition(b"\t")[0].split()
        if len(entry) != 4:
            raise StorageError(f"{self._path} is not in revision {revision}; name one that has it")
        mode, kind, blob, size = entry
        if kind != b"blob" or mode == b"120000":
            raise StorageError(f"{self._path} is no regular file in revision {revision}; name another revision")
        limit = f"{LARGEST_FILE / 1e6:.1f} MB"
        if size.isdigit() and int(size) > LARGEST_FILE:
            raise StorageError(f"{self._path} has more than {limit} in revision {revision}, which is not read")
        return self.told("cat-file", "blob", blob.decode("ascii"))

    def told(self, *words: str) -> bytes:
        """Return what git prints, cut off beyond the largest file. Raises StorageError where it refuses."""
        answer = self._ask(words)
        if answer.status != 0:
            raise self._refused(answer)
        return answer.output

    def _find(self, revision: str) -> str | None:
        if not revision.strip() or revision.startswith("-") or not revision.isprintable():
            return None
        answer = self._ask(("rev-parse", "--verify", "--quiet", f"{revision}^{{commit}}"))
        if answer.status != 0 and answer.complaint:
            raise self._refused(answer)
        return answer.output.decode("ascii", "replace").strip() if answer.status == 0 else None

    def _refused(self, answer: _Answer) -> StorageError:
        lines = answer.complaint.splitlines() or [f"it ended with status {answer.status}"]
        line = next((one for one in lines if one.startswith(("fatal: ", "error: "))), lines[0])
        line = line.removeprefix("fatal: ").removeprefix("error: ")
        if line.startswith("not a git repository"):
            return StorageError(f"{self._path} is in no git repository; compare it with another file")
        hint = "; where you trust it, add it to safe.directory of git" if "dubious ownership" in line else ""
        return StorageError(f"git refused to read {self._path}: {line}{hint}")

    def _ask(self, words: tuple[str, ...]) -> _Answer:
        settings = [word for setting in _SETTINGS for word in ("-c", setting)]
        command = [self._program, "--no-pager", "--literal-pathspecs", *settings, *words]
        kept = {name: text for name, text in os.environ.items() if not name.startswith("GIT_") or name in _KEPT}
        with tempfile.TemporaryFile() as complaints:
            try:
                # In a session of its own it has no terminal to ask at, and ends with all that it started.
                child = subprocess.Popen(  # noqa: S603 - git, found by the user's own PATH
                    command, cwd=self.file.parent, env={**kept, **_OURS}, stdin=subprocess.DEVNULL,
                    stdout=subprocess.PIPE, stderr=complaints, start_new_session=True,
                )  # fmt: skip
            except OSError as wrong:
                raise StorageError(f"git could not be asked about {self._path}: {wrong.strerror}") from wrong
            try:
                status, output = self._answered(child)
            finally:
                if child.returncode is None:
                    with contextlib.suppress(ProcessLookupError):
                        os.killpg(child.pid, signal.SIGKILL)
                    with contextlib.suppress(subprocess.TimeoutExpired):
                        child.wait(1.0)
                if child.stdout is not None:
                    child.stdout.close()
            complaints.seek(0)
            return _Answer(status, output, complaints.read(2000).decode("utf-8", "replace").strip())

    def _answered(self, child: subprocess.Popen[bytes]) -> tuple[int, bytes]:
        """Read what is printed and wait for the end; of what is too much the beginning, and it counts as well ended."""
        assert child.stdout is not None  # noqa: S101 - it is a pipe
        output = bytearray()
        while (piece := self._piece(child.stdout)) != b"":
            output += piece
            if len(output) > LARGEST_FILE:
                return 0, bytes(output[:LARGEST_FILE])
        try:
            return child.wait(max(self.until - time.monotonic(), 0.0)), bytes(output)
        except subprocess.TimeoutExpired as late:
            raise self._late() from late

    def _piece(self, stream: IO[bytes]) -> bytes:
        left = self.until - time.monotonic()
        if left <= 0.0 or not select.select([stream], [], [], left)[0]:
            raise self._late()
        return os.read(stream.fileno(), 1 << 16)

    def _late(self) -> StorageError:
        return StorageError(f"git did not answer about {self._path} within {WITHIN:g} s; try again")
