"""Which key does what, where: the default keys with what the config changes, checked for clashes."""

from __future__ import annotations

import difflib
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from budget.screens.actions import ACTIONS, BY_ID, LETTERS, Place

NEEDED = ("accept", "leave", "choose", "back", "quit")
"""Actions without which one would be caught."""

SAME_IN_A_TERMINAL: Mapping[str, str] = {
    "ctrl+i": "tab",
    "ctrl+m": "enter",
    "ctrl+h": "backspace",
    "ctrl+left_square_bracket": "escape",
    "shift+enter": "enter",
    "ctrl+enter": "enter",
}
"""Keys that a plain terminal can't tell apart."""

WRITTEN_IN: tuple[Place, ...] = ("entry", "list", "form", "text")
"""Places where a letter or sign is written, not a command."""

_SIGNS: Mapping[str, str] = {
    "/": "slash",
    "?": "question_mark",
    ":": "colon",
    "=": "equals_sign",
    "+": "plus",
    "-": "minus",
    "[": "left_square_bracket",
    "]": "right_square_bracket",
    "{": "left_curly_bracket",
    "}": "right_curly_bracket",
    "(": "left_parenthesis",
    ")": "right_parenthesis",
    "<": "less_than_sign",
    ">": "greater_than_sign",
    "!": "exclamation_mark",
    ".": "full_stop",
    ",": "comma",
    ";": "semicolon",
    "*": "asterisk",
    "#": "number_sign",
    "&": "ampersand",
    "%": "percent_sign",
    "@": "at",
    "_": "underscore",
    "'": "apostrophe",
    '"': "quotation_mark",
    "\\": "backslash",
    "|": "vertical_line",
    "~": "tilde",
    "$": "dollar_sign",
    "^": "circumflex_accent",
    "`": "grave_accent",
    " ": "space",
}
_SPELLED = {name: sign for sign, name in _SIGNS.items() if sign != " "}
_NAMED = frozenset(
    {"up", "down", "left", "right", "home", "end", "pageup", "pagedown", "insert", "delete", "backspace", "enter"}
    | {"escape", "tab", "space"}
    | {f"f{number}" for number in range(1, 25)}
)
_MODIFIED = re.compile(r"(?:(?:ctrl|shift|alt)\+)+")


@dataclass(frozen=True, slots=True)
class Keymap:
    """The keys of every place: by place and key the action, by action the keys."""

    actions: Mapping[Place, Mapping[str, str]]
    keys: Mapping[str, tuple[str, ...]]

    def action(self, place: Place, key: str) -> str | None:
        """Return what a key does at a place, or None."""
        return self.actions.get(place, {}).get(key)

    def shown(self, action: str, count: int = 1, place: Place = "ledger") -> str:
        """Spell the first keys of an action that work at a place as a footer shows them: `^s`, `Enter`, `?`."""
        keys = [key for key in self.keys[action] if place not in WRITTEN_IN or not _is_sign(key)]
        return " ".join(spelled(key) for key in keys[:count])


@dataclass(slots=True)
class _Draft:
    keys: dict[str, tuple[str, ...]]
    problems: list[str] = field(default_factory=list)


def build(changes: Mapping[str, object] | None = None, *, letters: bool = False) -> tuple[Keymap, tuple[str, ...]]:
    """Build the keys from the defaults and the config's `[keys]`; everything wrong with them is told, none is taken.

    `letters` adds h, j, k and l for movement. An action that is not known, a key that is none, one that a
    terminal can't tell from another, and a key with two meanings at one place are problems.
    """
    draft = _Draft({action.id: action.keys for action in ACTIONS})
    for name, value in (changes or {}).items():
        _change(draft, name, value)
    if letters:
        for letter, action in LETTERS.items():
            draft.keys[action] = (*draft.keys[action], letter)
    draft.problems += [f"keys.{name}: it needs a key" for name in NEEDED if not draft.keys[name]]
    actions = _by_place(draft)
    if draft.problems:
        default, _ = build(letters=False)
        return default, tuple(draft.problems)
    return Keymap(actions, draft.keys), ()


def spelled(key: str) -> str:
    """Spell a key as a person reads it: `^s`, `?`, `Enter`, `Shift+Up`."""
    if key.startswith("ctrl+") and len(key) == 6:
        return "^" + key[-1]
    if key in _SPELLED:
        return _SPELLED[key]
    return "+".join(part if len(part) == 1 else part.capitalize() for part in key.split("+"))


def known_key(text: str) -> str | None:
    """Return the name of a key as the terminal reports it, or None where there is no such key."""
    if text in _SIGNS:
        return _SIGNS[text]
    modifiers = _MODIFIED.match(text)
    bare = text[modifiers.end() :] if modifiers else text
    if bare in _SIGNS and modifiers:
        bare = _SIGNS[bare]
    if not (bare in _NAMED or bare in _SPELLED or (len(bare) == 1 and bare.isalnum())):
        return None
    if modifiers and "shift+" in modifiers.group() and len(bare) == 1:
        return None
    return (modifiers.group() if modifiers else "") + bare


def _is_sign(key: str) -> bool:
    return len(key) == 1 or key in _SPELLED or key == "space"


def _change(draft: _Draft, name: str, value: object) -> None:
    if name not in BY_ID:
        draft.problems.append(f"keys.{name}: there is no such action; {_nearest(name, BY_ID)}")
        return
    texts = [value] if isinstance(value, str) else value
    if not isinstance(texts, list) or not all(isinstance(text, str) for text in texts):
        draft.problems.append(f'keys.{name}: write a key or a list of keys, "x" or ["x", "f7"]')
        return
    keys = []
    for text in texts:
        key = known_key(text)
        if key is None:
            draft.problems.append(f'keys.{name}: there is no key "{text}"; write "x", "X", "f7", "ctrl+x" or "/"')
        elif key in SAME_IN_A_TERMINAL:
            draft.problems.append(
                f'keys.{name}: a terminal can\'t tell "{text}" from "{SAME_IN_A_TERMINAL[key]}"; choose another'
            )
        else:
            keys.append(key)
    draft.keys[name] = tuple(keys)


def _by_place(draft: _Draft) -> dict[Place, dict[str, str]]:
    found: dict[Place, dict[str, str]] = {}
    for action in ACTIONS:
        for place in action.places:
            keys = found.setdefault(place, {})
            for key in draft.keys[action.id]:
                if place in ("entry", "list", "form") and _is_sign(key):
                    if LETTERS.get(key) != action.id:
                        draft.problems.append(f'keys.{action.id}: a field needs "{spelled(key)}"; choose another')
                elif keys.setdefault(key, action.id) != action.id:
                    draft.problems.append(
                        f'keys: "{key}" would be both {keys[key]} and {action.id} on {place}; change one of them'
                    )
    return found


def _nearest(word: str, known: Iterable[str]) -> str:
    close = difflib.get_close_matches(word, list(known), n=1, cutoff=0.5)
    return f"did you mean {close[0]}?" if close else "the command list names them"
