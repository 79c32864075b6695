"""The parts of the manual that repeat what the program knows: codes, units, keys.

`python -m tests.commands.pages` writes them into the pages anew; a test compares.
"""

from collections.abc import Callable, Iterator, Mapping, Sequence
from pathlib import Path

from budget.description import CODES
from budget.screens.actions import ACTIONS, SCREENS
from budget.screens.keymap import spelled
from budget.units import Basis, factors

FOLDER = Path(__file__).parents[2] / "budget" / "manual"


def codes() -> Iterator[str]:
    """Every finding code with its meaning, by level."""
    for level, title in (("error", "Errors"), ("warning", "Warnings"), ("note", "Notes")):
        yield f"## {title}"
        yield from (f"* `{name}`: {code.meaning}" for name, code in CODES.items() if code.level == level)
        yield ""


def units() -> Iterator[str]:
    """Every unit with its factor."""
    rows = [("quantity", "unit", "factor", "offset")]
    for factor in factors():
        basis = "" if factor.basis is Basis.PLAIN else f", {factor.basis.value}"
        offset = f"{factor.offset:g}" if factor.offset else ""
        quantity = f"{factor.dimension.value.replace('_', ' ')}{basis}"
        rows.append((quantity, factor.unit, f"{factor.factor:.10g}", offset))
    yield from _table(rows)


def keys() -> Iterator[str]:
    """Every action with its keys, where it works, and its name in the config."""
    rows = [("key", "what it does", "where", "name")]
    for action in ACTIONS:
        pressed = " ".join("\\|" if spelled(key) == "|" else spelled(key) for key in action.keys)
        rows.append((pressed or "none", action.title, _where(action.places), action.id))
    yield from _table(rows)


def _where(places: Sequence[str]) -> str:
    every = {*SCREENS, "text"}
    if every <= set(places):
        return "everywhere" if set(places) > every else "every screen"
    if set(SCREENS) <= set(places):
        return "every screen but text"
    return ", ".join(places)


def _table(rows: Sequence[Sequence[str]]) -> Iterator[str]:
    widths = [max(len(row[place]) for row in rows) for place in range(len(rows[0]))]
    for number, row in enumerate(rows):
        yield "| " + " | ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)) + " |"
        if number == 0:
            yield "|" + "|".join("-" * (width + 2) for width in widths) + "|"


PARTS: Mapping[str, Callable[[], Iterator[str]]] = {"codes": codes, "units": units, "keys": keys}
PAGES = {"codes": "findings", "units": "units", "keys": "keys"}
BEGINS = {"codes": "## Errors", "units": "| quantity", "keys": "| key"}
"""By part the beginning of its first line; it goes on to the end of the page."""


def renewed(part: str) -> str:
    """The page of a part with that part as it should be."""
    text = (FOLDER / f"{PAGES[part]}.md").read_text(encoding="utf-8")
    kept = text[: text.rindex(f"\n{BEGINS[part]}") + 1]
    return kept + "\n".join(PARTS[part]()).rstrip() + "\n"


if __name__ == "__main__":
    for name, page in PAGES.items():
        (FOLDER / f"{page}.md").write_text(renewed(name), encoding="utf-8")
