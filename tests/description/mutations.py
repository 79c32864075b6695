"""Texts of runs with something knocked out of place, as a slip of the hand or a bad merge does."""

from __future__ import annotations

import re
from collections.abc import Callable
from pathlib import Path
from random import Random

from tests.description.sound import SOUND, SOUND_AIR, SOUND_OPEN

EXAMPLES = sorted((Path(__file__).parents[2] / "examples").glob("*.toml"))
TEXTS = (SOUND, SOUND_AIR, SOUND_OPEN, *(path.read_text(encoding="utf-8") for path in EXAMPLES))

Change = Callable[[str, Random], str]

VALUES = (
    *("nan", "-inf", "0", "-1", "1e308", "1" + "0" * 400, "0x" + "f" * 5000, "true", "1979-05-27", "07:32:00"),
    *("[]", "{}", "[[]]", "[[1, 2]]", '[["1 m", "2 m"], ["1 m", "2 m"]]', "[{}]", "[{ k = 1 }]", "{ a = { b = 1 } }"),
    *('""', '" "', '"\\u0000"', '"{0}"', '"%s"', '"1e400 m"', '"-0 m"', '"0.0001 mm"', '"DN15"', '"NPS 1/0"', '"0x0"'),
    *('"oval 1x900"', '"P1"', '"M1"', '"B1"', '"R1"', '"water"', '"air"', '"custom"', '"flow"', '"kPa"'),
)
SNIPPETS: tuple[str, ...] = (*"\"'[]{}=.,\n\\#é\x00\u2028", "\r\n", "{0}", "[[", '"""')
VALUE = re.compile(r"(?<== )[^#\n]+")
NAME = re.compile(r'(?<=\.)[A-Za-z0-9-]+(?=\])|(?<=from = ")[^"]+|(?<=to = ")[^"]+|^[a-z_]+(?= =)', re.MULTILINE)


def mutate(text: str, random: Random, times: int) -> str:
    """Return a text with so many random changes."""
    for _ in range(times):
        change: Change = random.choice(_CHANGES)
        text = change(text, random)
    return text


def _slice(text: str, random: Random, longest: int = 40) -> tuple[int, int]:
    start = random.randrange(len(text) + 1)
    return start, min(len(text), start + random.randrange(1, longest))


def _delete(text: str, random: Random) -> str:
    start, end = _slice(text, random)
    return text[:start] + text[end:]


def _duplicate(text: str, random: Random) -> str:
    start, end = _slice(text, random)
    return text[:end] + text[start:end] + text[end:]


def _insert(text: str, random: Random) -> str:
    start, _ = _slice(text, random)
    return text[:start] + random.choice(SNIPPETS) + text[start:]


def _lines(text: str, random: Random) -> str:
    lines = text.split("\n")
    first, second = random.randrange(len(lines)), random.randrange(len(lines))
    if random.random() < 0.5:
        lines[first], lines[second] = lines[second], lines[first]
    else:
        del lines[min(first, second) : min(first, second) + random.randrange(1, 4)]
    return "\n".join(lines)


def _swap(pattern: re.Pattern[str]) -> Change:
    def swap(text: str, random: Random) -> str:
        found = list(pattern.finditer(text))
        if len(found) < 2:
            return text
        one, two = sorted(random.sample(found, 2), key=lambda match: match.start())
        between = text[one.end() : two.start()]
        first, second = text[one.start() : one.end()], text[two.start() : two.end()]
        return text[: one.start()] + second + between + first + text[two.end() :]

    return swap


def _replace(text: str, random: Random) -> str:
    found = list(VALUE.finditer(text))
    if not found:
        return text
    one = random.choice(found)
    return text[: one.start()] + random.choice(VALUES) + text[one.end() :]


_CHANGES: tuple[Change, ...] = (_delete, _duplicate, _insert, _lines, _swap(VALUE), _swap(NAME), _replace, _replace)
