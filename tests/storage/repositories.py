"""Repositories of git in folders of the tests."""

from __future__ import annotations

import os
import shutil
import subprocess
from pathlib import Path

import pytest

needs_git = pytest.mark.skipif(shutil.which("git") is None, reason="git is not installed")


class Repository:
    """A repository that knows no settings but its own."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder
        folder.mkdir(exist_ok=True)
        self.git("init", "--quiet", "--initial-branch=main")

    def git(self, *words: str, check: bool = True) -> str:
        """Call git in it; return what it prints."""
        mine = ("-c", "user.name=Somebody", "-c", "user.email=somebody@example.invalid", "-c", "commit.gpgSign=false")
        plain = {name: text for name, text in os.environ.items() if not name.startswith("GIT_")}
        ran = subprocess.run(
            ["git", *mine, *words],
            cwd=self.folder,
            env={**plain, "GIT_CONFIG_GLOBAL": os.devnull, "GIT_CONFIG_SYSTEM": os.devnull},
            capture_output=True,
            text=True,
            check=check,
        )
        return ran.stdout.strip()

    def commit(self, subject: str, **files: str | bytes) -> str:
        """Commit files, by their names without `.toml`; return the ID of the revision."""
        for name, text in files.items():
            (self.folder / f"{name}.toml").write_bytes(text.encode() if isinstance(text, str) else text)
        self.git("add", "--all")
        self.git("commit", "--quiet", "--allow-empty", f"--message={subject}")
        return self.git("rev-parse", "HEAD")
