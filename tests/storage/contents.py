"""What the run's file holds before and after, and what saving may leave beside it."""

from pathlib import Path

OLD = b'format = 1\n\n[design]\ntitle = "Old"\n'
NEW = b'format = 1\n\n[design]\ntitle = "New, and a good deal longer than the old one was"\n'
SHORT = b"format = 1\n"


def leftovers(folder: Path) -> list[str]:
    return sorted(path.name for path in folder.iterdir() if path.name.startswith("."))
