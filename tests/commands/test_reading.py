"""budget list, explain, manual, config, completion, edit, and the help of them all."""

import re
import shlex
import shutil
import subprocess
from pathlib import Path

import pytest

from budget import screens
from budget.catalogue import duct_names, fitting_names, fluid_names, pipe_names
from budget.commands.completion import gather
from budget.commands.dispatch import COMMANDS
from budget.commands.manual import TOPICS
from budget.description import CODES
from budget.units import factors
from tests.commands.calls import Caller


@pytest.mark.parametrize("arguments", [("--help",), ("-h",), ("help",)])
def test_help_names_every_command_with_an_example(call: Caller, arguments: tuple[str, ...]) -> None:
    status, out, _ = call(*arguments)
    assert status == 0
    for name, command in COMMANDS.items():
        assert re.search(rf"^  {name} +{re.escape(command.summary)}$", out, re.MULTILINE)
        assert f"\n  {command.example}\n" in out
    assert max(map(len, out.splitlines())) <= 100


@pytest.mark.parametrize("name", COMMANDS)
def test_every_command_has_help_with_an_example(call: Caller, name: str) -> None:
    status, out, _ = call(name, "--help")
    assert status == 0
    assert COMMANDS[name].example in out
    assert call("help", name).out == out


def test_the_version_names_program_and_catalogue(call: Caller) -> None:
    assert re.fullmatch(r"budget [0-9.]+, catalogue [0-9.]+\n", call("--version").out)


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        ((), "commands:"),
        (("chek",), "did you mean check?"),
        (("run.toml",), "budget edit run.toml"),
        (("--jsn",), "there is no option"),
        (("check",), "FILE"),
        (("check", "a.toml", "--jso"), "--jso"),
        (("list", "pumps"), "invalid choice"),
        (("new", "a.toml", "--kind", "steam"), "invalid choice"),
        (("config",), "required"),
        (("explain", "velocty"), "did you mean 'velocity'"),
        (("manual", "fil3"), "did you mean 'file'?"),
        (("list", "pipes", "gold"), "nearest"),
        (("list", "units", "furlong"), "there is no unit"),
    ],
)
def test_a_call_that_is_not_understood_is_status_2(call: Caller, arguments: tuple[str, ...], said: str) -> None:
    status, out, err = call(*arguments)
    assert (status, out) == (2, "")
    assert said in err


def test_lists_name_everything_with_its_source(call: Caller) -> None:
    for kind, names in (("pipes", pipe_names()), ("ducts", duct_names()), ("fluids", fluid_names())):
        out = call("list", kind).out
        assert all(name in out for name in names)
        assert "known" in out
    for name in fitting_names():
        out = call("list", "fittings", name).out
        assert name in out
        assert "from memory" in out or "read in" in out or "derived" in out
    assert not re.search(r" $", call("list", "fittings").out, re.MULTILINE)


def test_units_are_listed_with_their_factors(call: Caller) -> None:
    out = call("list", "units").out
    assert all(f" {factor.unit} " in out for factor in factors())
    assert "249.08891" in call("list", "units", "inH2O").out
    assert len(call("list", "units", "velocity").out.splitlines()) == 4
    assert call("list", "units", "gal/min").out.count("gpm") == 1


def test_every_code_is_explained(call: Caller) -> None:
    every = call("explain").out
    for code, (level, meaning) in CODES.items():
        assert call("explain", code).out.startswith(f"{code} ({level}): {meaning}\nWhat to do: ")
        assert meaning in every


def test_the_settings_are_found_and_checked(call: Caller, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("XDG_CONFIG_HOME", str(tmp_path))
    path = Path(call("config", "--path").out.strip())
    assert path.name == "config.toml"
    assert "no such file" in call("config", "--check").out
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_text("mouse = true\n")
    assert call("config", "--check").status == 0
    path.write_text("mose = true\n")
    status, out, _ = call("config", "--check")
    assert status == 2
    assert "mose" in out


def test_the_app_is_opened_with_what_was_asked_for(
    call: Caller, run_file: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    seen: list[object] = []

    def run(path: Path | None, **how: object) -> int | None:
        seen.append((path, how))
        return 3 if how["mouse"] else None

    monkeypatch.setattr(screens, "run", run, raising=False)
    assert call("edit", run_file).status == 0
    assert call("edit", "--ascii", "--mouse", run_file).status == 3
    assert call("edit", "--read-only", run_file).status == 0
    assert call("edit").status == 0
    assert seen == [
        (run_file, {"ascii": None, "mouse": None, "read_only": False}),
        (run_file, {"ascii": True, "mouse": True, "read_only": False}),
        (run_file, {"ascii": None, "mouse": None, "read_only": True}),
        (None, {"ascii": None, "mouse": None, "read_only": False}),
    ]


def test_completion_knows_every_command_option_and_word(call: Caller) -> None:
    commands = gather()
    assert commands.keys() == COMMANDS.keys()
    assert "--json" in commands["check"].options
    assert commands["new"].words_of_options["--kind"] == ("heating", "chilled", "open", "air")
    assert commands["manual"].words == TOPICS
    assert commands["explain"].words == tuple(CODES)
    for shell in ("bash", "zsh", "fish"):
        out = call("completion", shell).out
        assert all(name in out for name in COMMANDS)
        checker = shutil.which(shell)
        if checker is not None:
            subprocess.run([checker, "-n"], input=out, text=True, check=True)
    assert shutil.which("bash")


def complete(script: str, *words: str) -> list[str]:
    """What bash would offer for the last of the words."""
    typed = " ".join(map(shlex.quote, words))
    call = (
        f"{script}\nCOMP_WORDS=({typed}); COMP_CWORD={len(words) - 1}\n"
        "_budget 2>/dev/null; printf '%s\\n' \"${COMPREPLY[@]}\""
    )
    ended = subprocess.run(["bash", "-c", call], capture_output=True, text=True, check=True)
    return ended.stdout.split("\n")[:-1]


def test_bash_completes_commands_options_words_and_files(call: Caller, run_file: Path) -> None:
    script = call("completion", "bash").out
    assert complete(script, "budget", "che") == ["check"]
    assert complete(script, "budget", "check", "--j") == ["--json"]
    assert complete(script, "budget", "new", "a", "--fluid", "prop") == ["propylene\\ glycol"]
    assert complete(script, "budget", "list", "pi") == ["pipes"]
    assert complete(script, "budget", "explain", "transit") == ["transitional"]
    assert complete(script, "budget", "explain", str(run_file)[:-3]) == [str(run_file)]
    assert complete(script, "budget", "check", str(run_file)[:-3]) == [str(run_file)]


def test_stopping_from_the_keyboard_is_status_130(
    call: Caller, run_file: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def stop(_name: str) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr("budget.commands.check.open_run", stop)
    assert call("check", run_file).status == 130
