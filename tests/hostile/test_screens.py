"""Whatever stands in a file, every screen paints plain text: no sequence goes to the terminal but our own."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from textual import events

from budget.screens.actions import ACTIONS, Place
from tests.hostile.payloads import MESS, PAYLOADS, piled
from tests.hostile.runs import BASE, READINGS, filled, names, places, put, renamed, spelled
from tests.screens.conftest import Hands, Stage
from tests.terminal.conftest import Open

OURS = re.compile(r"\x1b\[[0-9;]*[mH]|\n")
"""Colours and the place of the cursor are all that a painted screen holds beside its text."""

AWAY = {"quit", "suspend", "save", "save_as", "back", "edit_outside"}
WAYS: dict[Place, str] = {
    "ledger": "show_ledger", "detail": "show_detail", "explain": "explain", "findings": "show_findings",
    "balance": "show_balance", "installed": "show_installed", "profile": "show_profile", "manual": "show_manual",
    "text": "show_text",
}  # fmt: skip


QUICK = ("action", "c1", "storm")

POINTER = b"\x1b]22;default\x07"
"""The shape of the pointer, which the toolkit sets once as it starts."""

RAW = (
    b"\x1b]", b"\x1b[31mred", b"\x1b[2J", b"\x1b[6n", b"\x1bc", b"\x1bZ", b"\x1bP", b"\x1b_", b"\x08", b"\x07", b"\x00",
)  # fmt: skip
"""Sequences of the payloads which the app itself never sends."""


def painted(hands: Hands) -> str:
    """Return what a terminal would be sent for the whole screen; fail where it would obey any of it."""
    app = hands.app
    sent = app.screen._compositor.render_full_update().render_segments(app.console)
    text = OURS.sub("", sent)
    wrong = {c for c in text if not (c.isprintable() or c == "\xa0" or c == "\u3000")}
    assert wrong == set(), (app.at, wrong)
    assert not piled(text)
    assert app.is_running
    return text


async def look(hands: Hands, place: Place) -> str:
    """Turn to a screen from the row in hand."""
    hands.app.do("show_ledger")
    hands.app.do(WAYS[place])
    await hands.pilot.pause()
    return painted(hands)


def beside(folder: Path, payload: str) -> None:
    """Put readings beside the run."""
    readings = renamed(put(READINGS, (("reading", "T1", "note"), payload)), names(payload))
    (folder / "run.readings.toml").write_text(spelled(readings), encoding="utf-8", newline="")


@pytest.mark.parametrize(
    "name",
    [*QUICK, *(pytest.param(name, marks=pytest.mark.long) for name in PAYLOADS if name not in QUICK)],
)
def test_every_screen_shows_a_text_plain(name: str, play: Stage, tmp_path: Path) -> None:
    payload = PAYLOADS[name]
    beside(tmp_path, payload)

    async def act(hands: Hands) -> None:
        ids = names(payload)
        for id_ in ("P1", "M1", "T1"):
            await hands.at(ids[id_])
            for place in WAYS:
                shown = await look(hands, place)
                assert place != "detail" or payload[:3] not in ("[@c", "{0}") or payload[:8] in shown

    play(act, spelled(filled(payload)), size=(130, 40))


@pytest.mark.parametrize(
    ("text", "ascii_only"),
    [(spelled(filled(MESS)), False), (spelled(put(BASE, *((place, MESS) for place, _ in places()))), True)],
    ids=["titles and names", "every value"],
)
@pytest.mark.long
def test_every_key_on_every_screen_shows_plain_text(text: str, ascii_only: bool, play: Stage, tmp_path: Path) -> None:
    beside(tmp_path, MESS)

    async def act(hands: Hands) -> None:
        app = hands.app
        paths = {row.kind: row.path for row in app.ledger.rows}
        assert {"source", "section", "terminal"} <= paths.keys()
        for kind, path in paths.items():
            for place in WAYS if kind == "section" else ("ledger", "detail"):
                for action in [one for one in ACTIONS if place in one.places and one.id not in AWAY]:
                    app.do("show_ledger")
                    app.ledger.go_to(path)
                    if place == "findings":
                        app.do("show_findings")
                    await look(hands, place)
                    app.do(action.id)
                    await hands.pilot.pause()
                    painted(hands)
                    if app.place in ("entry", "list", "form"):
                        await hands.type("a=")
                        painted(hands)
                        await hands.press("backspace", "backspace", "down")
                        painted(hands)
                    for _ in range(3):
                        if app.place in ("entry", "list", "form"):
                            app.do("leave")
                            await hands.pilot.pause()
                    painted(hands)
                    while app.document.dirty and app.at != "text":
                        app.document.undo()
                        app.show(app.document.snapshot)

    play(act, text, size=(130, 40), ascii_only=ascii_only)


@pytest.mark.parametrize("place", ["ledger", "list", "form", "search"])
def test_what_is_pasted_is_shown_plain(place: str, play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1", "length")
        await hands.press(*{"ledger": ["enter"], "list": ["f"], "form": ["f", "enter"], "search": ["/"]}[place])
        await hands.send(events.Paste(MESS))
        painted(hands)
        await hands.press("enter")
        painted(hands)

    play(act, spelled(BASE))


def test_settings_and_names_are_told_plain(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        hands.app.say(MESS, "error")
        painted(hands)
        await hands.press("=")
        await hands.send(events.Paste(f"note = {MESS}"))
        await hands.press("enter")
        painted(hands)

    play(act, spelled(BASE), size=(60, 12))


@pytest.mark.long
def test_nothing_from_a_file_reaches_the_terminal_raw(opened: Open) -> None:
    session = opened(spelled(filled(MESS)), config='theme = "\\u001b[2J\\u009b"\n', size=(100, 30))
    session.press("down", "down")
    for keys in (
        ("v", "pagedown", "escape"), ("E", "pagedown", "escape"), ("F", "escape"), ("B", "escape"), ("I", "escape"),
        ("L", "p", "escape", "escape"), ("T",), ("escape",), (":", "escape"), ("f", "escape"), ("y", "escape"),
        ("m", "escape"), ("s", "escape"), ("r", "escape"), ("g", "escape"), ("/", "click", "enter"),
        ("=", "note = x", "escape"), ("x",), ("u",),
    ):  # fmt: skip
        session.press(*keys)
        assert not session.ended, keys
    session.send("ctrl+q")
    session.press("n", "d", "y")
    told = session.received.replace(POINTER, b"")
    for wrong in RAW:
        assert wrong not in told, wrong
    text = told.decode("utf-8")
    assert not {c for c in text if 0x7F <= ord(c) < 0xA0 or c in "\u202e\u2066\u200b\ufeff\u2028\u061c\U000e0041"}
