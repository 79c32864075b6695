"""How a figure is known: the mark that every entry of the catalogue carries."""

from typing import Final

_WORDS: Final = {
    "read": "read in print or public data",
    "library": "taken off a library",
    "memory": "from memory",
    "derived": "derived",
}


def how_known(known_from: str) -> str:
    """The mark in words: "read+memory" is "read in print or public data, in part from memory".

    A mark that is not built of the known ones is given back as it stands.
    """
    parts = [_WORDS.get(part) for part in known_from.split("+")]
    words = [part for part in parts if part is not None]
    if len(words) < len(parts):
        return known_from
    return words[0] if len(words) == 1 else f"{words[0]}, in part {' and '.join(words[1:])}"
