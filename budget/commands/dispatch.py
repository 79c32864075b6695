"""Calling commands: their table, the exit statuses, help, and what happens when something goes wrong."""

from __future__ import annotations

import argparse
import difflib
import gc
import importlib
import os
import sys
from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, NamedTuple, NoReturn

from budget import __version__
from budget.commands import streams
from budget.report.plain import plain

if TYPE_CHECKING:
    from _typeshed import SupportsWrite

OK = 0
"""Nothing above a note."""
WARNINGS = 1
"""Warnings, no error."""
REFUSED = 2
"""An error in a file, a call that was not understood, or something that could not be done."""
INTERNAL = 70
"""The program itself failed."""
INTERRUPTED = 130
"""Stopped from the keyboard."""
PIPE_CLOSED = 141
"""Whoever read the output went away."""

DEBUG = "BUDGET_DEBUG"
"""Environment variable; where it is set, an internal error shows its traceback."""


class Command(NamedTuple):
    """One command: what it does in a line, and a call of it as an example."""

    summary: str
    example: str


COMMANDS: Mapping[str, Command] = {
    "check": Command("Compute runs and list what is wrong or doubtful.", "budget check heating.toml --json"),
    "flows": Command("Solve a run for the flows as installed.", "budget flows heating.toml --devices open"),
    "report": Command("Print the whole budget of a run as text.", "budget report heating.toml > heating.txt"),
    "changes": Command("Show what changed in a run: keys and figures.", "budget changes heating.toml --revision v1"),
    "balance": Command("Print the commissioning schedule of a run.", "budget balance heating.toml --csv > heating.csv"),
    "edit": Command("Open a run in the terminal app.", "budget edit heating.toml"),
    "new": Command("Write a small run to start from.", "budget new heating.toml --kind heating --units SI"),
    "set": Command("Set one key in a run's file.", "budget set heating.toml section.M1.length '14.5 m'"),
    "unset": Command("Take one key out of a run's file.", "budget unset heating.toml section.M1.note"),
    "recover": Command("List unsaved work that was kept, and write it out.", "budget recover heating.toml"),
    "list": Command("List what the catalogue holds, the units or the examples.", "budget list fittings 'elbow 90'"),
    "explain": Command("Show a row's figures as calculations, or what a code means.", "budget explain run.toml M1"),
    "manual": Command("Read the manual.", "budget manual file"),
    "config": Command("Find or check the settings of the app.", "budget config --check"),
    "completion": Command("Print a completion script for a shell.", "budget completion bash > ~/.budget-completion"),
}


def main(argv: Sequence[str] | None = None) -> int:
    """Run a command; return its exit status. No exception leaves it."""
    if argv is None:
        gc.disable()  # a process of its own soon ends; the app turns collection on again after its first frame
        streams.take()
    streams.soften()
    try:
        status = _run(list(sys.argv[1:] if argv is None else argv))
    except (KeyboardInterrupt, streams.Ended) as stopped:
        streams.drop(sys.stdout)  # whoever reads it may have stopped reading
        status = 128 + stopped.number if isinstance(stopped, streams.Ended) else INTERRUPTED
    except BrokenPipeError:
        streams.drop(sys.stdout)
        status = PIPE_CLOSED
    except OSError as wrong:
        streams.drop(sys.stdout)
        say(f"{wrong.filename or 'the output'} could not be read or written: {wrong.strerror or wrong}")
        status = REFUSED
    except Exception as wrong:
        if os.environ.get(DEBUG):
            raise
        log = _logged(wrong, sys.argv[1:] if argv is None else argv)
        say(f"internal error: {type(wrong).__name__}: {wrong}; {log}set {DEBUG}=1 to see where")
        status = INTERNAL
    for stream in (sys.stdout, sys.stderr):
        streams.settle(stream)
    return status


def say(message: str) -> None:
    """Tell something on standard error, in one line; where that can't be written, the status alone tells."""
    try:
        print(f"budget: {plain(message)}", file=sys.stderr)
    except OSError:
        streams.drop(sys.stderr)


def _logged(wrong: Exception, arguments: Sequence[str]) -> str:
    """Write an error to the log; say where that is, if it could be written."""
    from budget.storage.faults import record_fault  # noqa: PLC0415 - seldom, if ever

    called = " ".join(["budget", *(name for name in arguments[:1] if name in COMMANDS)])
    log = record_fault(wrong, called)
    return f"the log is {log}; " if log is not None else ""


class _Parser(argparse.ArgumentParser):
    def print_help(self, file: SupportsWrite[str] | None = None) -> None:
        print(self.format_help(), end="", file=file)  # argparse itself would keep quiet where that fails

    def error(self, message: str) -> NoReturn:
        super().error(plain(message))


def parser_of(name: str) -> argparse.ArgumentParser:
    """Return the parser of one command."""
    command = COMMANDS[name]
    parser = _Parser(
        prog=f"budget {name}",
        description=command.summary,
        epilog=f"example:\n  {command.example}",
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    importlib.import_module(f"budget.commands.{name}").add_arguments(parser)
    return parser


def overview() -> str:
    """Return the help of the program: every command with what it does and an example."""
    width = max(map(len, COMMANDS)) + 2
    lines = ["usage: budget COMMAND ...", "", "The pressure budget of a pipe or duct run, kept in a TOML file.", ""]
    lines += ["commands:", *(f"  {name:{width}}{command.summary}" for name, command in COMMANDS.items()), ""]
    lines += ["options:", f"  {'--help':{width}}Show this, or the help of a command: budget check --help."]
    lines += [f"  {'--version':{width}}Show the version of the program and of its catalogue.", ""]
    lines += ["examples:", *(f"  {command.example}" for command in COMMANDS.values()), ""]
    lines += ["A design calculation, to be checked by an engineer: budget manual accuracy-and-caution."]
    return "\n".join(lines)


def _run(arguments: list[str]) -> int:
    """Run a command and write its output whole; a parser leaves with a status of its own."""
    try:
        status = _dispatch(arguments)
    except SystemExit as leaving:
        status = leaving.code if isinstance(leaving.code, int) else REFUSED
    if sys.stdout is not None:
        sys.stdout.flush()
    return status


def _dispatch(arguments: list[str]) -> int:
    name, rest = (arguments[0], arguments[1:]) if arguments else ("", [])
    if name in COMMANDS:
        options = parser_of(name).parse_args(rest)
        status: int = importlib.import_module(f"budget.commands.{name}").run(options)
        return status
    if name in ("-h", "--help", "help"):
        if rest and rest[0] in COMMANDS:
            print(parser_of(rest[0]).format_help(), end="")
            return OK
        print(overview())
        return OK
    if name == "--version":
        print(_version())
        return OK
    if not name:
        print(overview(), file=sys.stderr)
        return REFUSED
    say(f"there is no {'option' if name.startswith('-') else 'command'} {name!r}; {_instead(name)}")
    return REFUSED


def _instead(name: str) -> str:
    if name.endswith(".toml"):
        return f"to open a run, write budget edit {name}"
    close = difflib.get_close_matches(name, COMMANDS, n=1, cutoff=0.5)
    return f"did you mean {close[0]}?" if close else "budget --help lists them"


def _version() -> str:
    from budget.catalogue import CATALOGUE_VERSION  # noqa: PLC0415 - a call of another command does without

    return f"budget {__version__}, catalogue {CATALOGUE_VERSION}"
