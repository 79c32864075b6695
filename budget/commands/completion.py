"""`budget completion`: a script by which a shell completes commands, options, words and files."""

from __future__ import annotations

import argparse
import importlib
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from budget.commands.dispatch import COMMANDS, parser_of

SHELLS = ("bash", "zsh", "fish")

_BARE = re.compile(r"[A-Za-z0-9-]+")


@dataclass(frozen=True, slots=True)
class Completion:
    """What can follow a command: its options with what they say, the words of those, words in place of a file."""

    summary: str
    options: Mapping[str, str] = field(default_factory=dict)
    words_of_options: Mapping[str, tuple[str, ...]] = field(default_factory=dict)
    words: tuple[str, ...] = ()
    files: bool = False
    """Whether a file may stand where the words do."""


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take a shell."""
    parser.add_argument("shell", choices=SHELLS, help="the shell that is to read the script")


def run(options: argparse.Namespace) -> int:
    """Print the script."""
    script = {"bash": bash, "zsh": zsh, "fish": fish}[options.shell]
    print(script(gather()))
    return 0


def gather() -> dict[str, Completion]:
    """Read off every command's parser what can follow it."""
    found = {}
    for name, command in COMMANDS.items():
        module = importlib.import_module(f"budget.commands.{name}")
        options, words_of_options = {}, {}
        words: tuple[str, ...] = module.completions() if hasattr(module, "completions") else ()
        for action in parser_of(name)._actions:  # noqa: SLF001 - argparse has no other way to ask
            long = next((option for option in action.option_strings if option.startswith("--")), None)
            if long is not None:
                options[long] = action.help or ""
                if action.choices:
                    words_of_options[long] = tuple(map(str, action.choices))
            elif action.choices:
                words = tuple(map(str, action.choices))
        files = getattr(module, "TAKES_FILES_TOO", False)
        found[name] = Completion(command.summary, options, words_of_options, words, files)
    return found


def bash(commands: Mapping[str, Completion]) -> str:
    """Write the script for bash."""
    lines = [
        "# Completion of budget for bash. Load it in ~/.bashrc: source FILE",
        "_budget() {",
        "    local word=${COMP_WORDS[COMP_CWORD]} before=${COMP_WORDS[COMP_CWORD-1]} offer= files=",
        "    local IFS=$'\\n'",
        "    COMPREPLY=()",
        '    case "$COMP_CWORD:${COMP_WORDS[1]}:$before:$word" in',
        f"        1:*) offer={_lines([*commands, '--help', '--version'])} ;;",
    ]
    for name, one in commands.items():
        for option, words in one.words_of_options.items():
            lines.append(f"        *:{name}:{option}:*) offer={_lines(words)} ;;")
        lines.append(f"        *:{name}:*:-*) offer={_lines(one.options)} ;;")
        if one.words:
            lines.append(f"        2:{name}:*) offer={_lines(one.words)}{' files=too' if one.files else ''} ;;")
    lines += [
        "    esac",
        '    if [ -n "$offer" ]; then',
        '        COMPREPLY=($(compgen -W "$offer" -- "$word"))',
        '        COMPREPLY=("${COMPREPLY[@]// /\\\\ }")',
        "    fi",
        '    if [ -z "$offer" ] || [ -n "$files" ]; then',
        "        compopt -o filenames 2>/dev/null",
        '        COMPREPLY+=($(compgen -f -- "$word"))',
        "    fi",
        "}",
        "complete -F _budget budget",
    ]
    return "\n".join(lines)


def zsh(commands: Mapping[str, Completion]) -> str:
    """Write the script for zsh."""
    lines = [
        "#compdef budget",
        "# Completion of budget for zsh. Save it as _budget in a folder of $fpath, or source it after compinit.",
        "_budget() {",
        "    local -a offer",
        "    local files=",
        "    if (( CURRENT == 2 )); then",
        "        offer=(",
        *(f"            {_single(f'{name}:{one.summary}')}" for name, one in commands.items()),
        "        )",
        "        _describe command offer",
        "        return",
        "    fi",
        '    case "$CURRENT:${words[2]}:${words[CURRENT-1]}:${words[CURRENT]}" in',
    ]
    for name, one in commands.items():
        for option, words in one.words_of_options.items():
            lines.append(f"        *:{name}:{option}:*) offer=({_spaced(words)}) ;;")
        lines.append(f"        *:{name}:*:-*) offer=({_spaced(one.options)}) ;;")
        if one.words:
            lines.append(f"        3:{name}:*) offer=({_spaced(one.words)}){'; files=too' if one.files else ''} ;;")
    lines += [
        "    esac",
        "    if (( ${#offer} )); then",
        "        compadd -a offer",
        "    fi",
        '    if (( ! ${#offer} )) || [[ -n "$files" ]]; then',
        "        _files",
        "    fi",
        "}",
        'if [[ "${funcstack[1]}" == _budget ]]; then',
        '    _budget "$@"',
        "else",
        "    compdef _budget budget",
        "fi",
    ]
    return "\n".join(lines)


def fish(commands: Mapping[str, Completion]) -> str:
    """Write the script for fish."""
    lines = ["# Completion of budget for fish. Save it as ~/.config/fish/completions/budget.fish"]
    for name, one in commands.items():
        lines.append(f"complete -c budget -f -n __fish_use_subcommand -a {name} -d {_fish(one.summary)}")
    for name, one in commands.items():
        after = f"complete -c budget -n '__fish_seen_subcommand_from {name}'"
        for option, said in one.options.items():
            words = one.words_of_options.get(option)
            takes = f" -x -a {_fish(' '.join(map(_fish, words)))}" if words else ""
            lines.append(f"{after} -l {option.removeprefix('--')}{takes} -d {_fish(said)}")
        if one.words:
            alone = "" if one.files else " -f"
            lines.append(f"{after}{alone} -a {_fish(' '.join(map(_fish, one.words)))}")
    return "\n".join(lines)


def _lines(words: Iterable[str]) -> str:
    return "$'" + "\\n".join(word.replace("\\", "\\\\").replace("'", "\\'") for word in words) + "'"


def _spaced(words: Iterable[str]) -> str:
    return " ".join(map(_single, words))


def _single(text: str) -> str:
    if _BARE.fullmatch(text):
        return text
    return "'" + text.replace("'", "'\\''") + "'"


def _fish(text: str) -> str:
    if _BARE.fullmatch(text):
        return text
    return "'" + text.replace("\\", "\\\\").replace("'", "\\'") + "'"
