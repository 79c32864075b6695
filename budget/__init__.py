"""The pressure budget of a pipe or duct run.

    >>> import budget
    >>> run = budget.read("examples/first-look.toml")
    >>> result = budget.evaluate(run.description)
    >>> result.sources["P1"].required                      # Pa
    >>> budget.quantity(result.sources["P1"].required, "pressure").to("kPa")
    >>> run = budget.apply(run, budget.SetValue(("section", "M1", "length"), "9 m"))
    >>> budget.save(run, "examples/first-look.toml")

Everything is in SI base units. `read` never raises for what stands in a file: `findings` says what is wrong with it.
"""

from __future__ import annotations

import dataclasses
import os
from pathlib import Path
from typing import TYPE_CHECKING, Any

from budget.description import Description, Finding, Level, Library, describe, read_text
from budget.network import Budget, SectionResult, SourceResult, TerminalResult, evaluate
from budget.storage import ChangedOnDisk, Stamp, StorageError, load_text, read_libraries, renew
from budget.storage import save as write

if TYPE_CHECKING:
    import pint

    from budget.description.edits import (
        AddTable,
        CopyTable,
        Edit,
        EditError,
        Literal,
        MoveTable,
        RemoveTable,
        RenameKey,
        SetValue,
        Several,
        Unset,
    )

__version__ = "0.1.0"

__all__ = [
    "AddTable",
    "Budget",
    "ChangedOnDisk",
    "CopyTable",
    "Description",
    "Edit",
    "EditError",
    "Finding",
    "Level",
    "Literal",
    "MoveTable",
    "RemoveTable",
    "RenameKey",
    "Run",
    "SectionResult",
    "SetValue",
    "Several",
    "SourceResult",
    "StorageError",
    "TerminalResult",
    "Unset",
    "apply",
    "evaluate",
    "quantity",
    "read",
    "reads",
    "save",
]


def __getattr__(name: str) -> Any:
    """Read the edits when the first is asked for: few runs of the program need one."""
    if name in __all__:
        from budget.description import edits  # noqa: PLC0415

        return getattr(edits, name)
    raise AttributeError(f"module 'budget' has no attribute {name!r}")


@dataclasses.dataclass(frozen=True, slots=True)
class Run:
    """A run's text and the description that was read from it."""

    text: str
    description: Description
    stamp: Stamp | None = None
    """What was on disk when it was read; None for a text that was not read from a file."""
    path: Path | None = None
    """The file that it was read from."""
    libraries: tuple[Library, ...] = ()
    """The libraries that it names."""


def read(path: str | Path) -> Run:
    """Read a run's file. Raises StorageError where the file itself can't be read, or holds no text."""
    source, stamp = load_text(Path(path))
    libraries = read_libraries(source, Path(path))
    return Run(source.text, describe(source, libraries), stamp, _real(path), libraries)


def reads(text: str) -> Run:
    """Read a run from text; it has no folder from which a library could be looked for."""
    return Run(text, describe(read_text(text)))


def apply(run: Run, edit: Edit) -> Run:
    """Return the run with an edit made to its text, and nothing else changed. Raises EditError."""
    from budget.description.edits import apply_to_text  # noqa: PLC0415

    source = read_text(apply_to_text(run.text, edit))
    libraries = renew(source, run.path, run.libraries)
    return dataclasses.replace(run, text=source.text, description=describe(source, libraries), libraries=libraries)


def save(run: Run, path: str | Path, *, over: bool = False) -> Run:
    """Write a run to its file, whole or not at all.

    Nothing is written over what somebody else has put there since the run was read, nor over another file that exists:
    ChangedOnDisk is raised then, unless `over`. Raises StorageError where it can't be written.
    """
    same = _real(path) == run.path
    stamp = write(Path(path), run.text.encode("utf-8"), run.stamp if same else None, over=over)
    source = read_text(run.text)
    libraries = read_libraries(source, Path(path))
    description = run.description if libraries == run.libraries else describe(source, libraries)
    return dataclasses.replace(run, description=description, stamp=stamp, path=_real(path), libraries=libraries)


def quantity(value: float, dimension: str) -> pint.Quantity[Any]:
    """Return a result in SI as a pint quantity: `quantity(section.run.drop, "pressure")`. Needs pint installed."""
    import pint  # noqa: PLC0415 - slow, and few need it

    return pint.Quantity(value, _SI_UNITS[dimension])


def _real(path: str | Path) -> Path:
    """Return where a path leads; unlike `Path.resolve` this never raises."""
    return Path(os.path.realpath(path))


_SI_UNITS = {
    "length": "m",
    "flow": "m**3/s",
    "mass flow": "kg/s",
    "pressure": "Pa",
    "gradient": "Pa/m",
    "velocity": "m/s",
    "power": "W",
    "temperature": "K",
    "difference": "delta_degC",
    "density": "kg/m**3",
    "viscosity": "Pa*s",
    "specific_heat": "J/(kg*K)",
    "angle": "degree",
    "fraction": "",
}
