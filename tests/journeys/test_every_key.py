"""`budget set` on every key of every example: one changed value is one changed line, or the file is untouched."""

from __future__ import annotations

import re
import shutil
import subprocess
import tomllib
from collections import Counter
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from budget.commands import main
from budget.description import dotted

EXAMPLES = sorted((Path(__file__).parents[2] / "examples").glob("*.toml"))
NUMBER = re.compile(r"-?\d+(\.\d+)?")


def leaves(value: Any, path: tuple[str | int, ...] = ()) -> Iterator[tuple[tuple[str | int, ...], Any]]:
    """Yield every single value of a file with the keys that lead to it."""
    if isinstance(value, dict):
        for key, inner in value.items():
            yield from leaves(inner, (*path, key))
    elif isinstance(value, list):
        for place, inner in enumerate(value):
            yield from leaves(inner, (*path, place))
    else:
        yield path, value


def changed(path: tuple[str | int, ...], value: Any, others: list[Any]) -> str:
    """Return another value of the same kind, as one would type it: one from such a key elsewhere, or near it."""
    if isinstance(value, bool):
        return str(not value).lower()
    if isinstance(value, int):
        return str(value + 1)
    if isinstance(value, float):
        return repr(round(value * 0.99, 6) or 0.01)
    found = NUMBER.match(value)
    if found and path[-1] != "size":
        number = found.group()
        other = f"{float(number) * 0.99:.4g}" if "." in number else str(int(number) + 1)
        return other + str(value[found.end() :])
    # No other one is known: the same value in TOML's other quotes.
    spelled = f"'{value}'" if "'" not in value else f'"{value}."'
    return next((str(other) for other in others if other != value), spelled)


def respelled(value: Any) -> str:
    """Return the same value as one might spell it too: in TOML's other quotes, or with its sign."""
    if isinstance(value, str):
        return f"'{value}'" if "'" not in value else f'"{value}"'
    return f"+{value!r}"


def try_keys(example: Path, folder: Path, every: int) -> Counter[str]:
    """Set each n-th key of an example; count those that took another value, and those that only another spelling.

    Another value may be refused, where it would break the run: another format, a circle, a curve out of order.
    """
    before = example.read_bytes()
    file = folder / "run.toml"
    shutil.copy(example, folder / "before.toml")
    shutil.copytree(example.parent / "office", folder / "office", dirs_exist_ok=True)
    outcomes: Counter[str] = Counter()
    keys = list(leaves(tomllib.loads(before.decode())))
    for path, value in keys[::every]:
        file.write_bytes(before)
        others = [other for at, other in keys if at[-1] == path[-1] and at[0] == path[0] and isinstance(other, str)]
        refused = main(["set", str(file), dotted(path), changed(path, value, others)]) == 2
        if refused and isinstance(value, bool):
            assert file.read_bytes() == before, dotted(path)
            outcomes["refused"] += 1  # true and false have no other spelling
            continue
        if refused and file.read_bytes() == before:
            main(["set", str(file), dotted(path), respelled(value)])
        outcomes["respelled" if refused else "set"] += 1
        assert numstat(folder) == "1\t1", dotted(path)
    return outcomes


def numstat(folder: Path) -> str:
    """Return added and removed lines as git counts them."""
    found = subprocess.run(
        ["git", "diff", "--no-index", "--numstat", "before.toml", "run.toml"],
        cwd=folder,
        capture_output=True,
        text=True,
        check=False,
    )
    return "\t".join(found.stdout.split("\t")[:2])


@pytest.mark.parametrize("example", EXAMPLES, ids=lambda path: path.stem)
def test_a_set_value_is_one_changed_line(example: Path, tmp_path: Path) -> None:
    outcomes = try_keys(example, tmp_path, every=17)
    assert outcomes["set"] > 0


@pytest.mark.long
@pytest.mark.parametrize("example", EXAMPLES, ids=lambda path: path.stem)
def test_every_key_set_is_one_changed_line(example: Path, tmp_path: Path) -> None:
    outcomes = try_keys(example, tmp_path, every=1)
    assert outcomes["set"] > 0.8 * outcomes.total(), outcomes
