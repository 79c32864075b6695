"""An app without a terminal, on a run small enough to check by hand."""

from __future__ import annotations

import asyncio
import contextlib
import time
from collections.abc import Awaitable, Callable
from pathlib import Path

import pytest
from textual import events
from textual.pilot import Pilot

from budget.document import Document
from budget.screens.app import BudgetApp
from budget.screens.config import Config
from budget.screens.lines import Lines
from budget.screens.themes import Theme, terminal_theme

EXAMPLES = Path(__file__).parents[2] / "examples"
SMALL = (Path(__file__).with_name("cottage.toml")).read_text()
DUCT = (Path(__file__).with_name("loft.toml")).read_text()

LONG = 30.0
"""Seconds that nothing on a busy machine takes."""


class Hands:
    """Presses keys and reads the screen."""

    def __init__(self, app: BudgetApp, pilot: Pilot[int]) -> None:
        self.app, self.pilot = app, pilot

    async def press(self, *keys: str) -> None:
        """Press keys by name."""
        for key in keys:
            character = key if len(key) == 1 else CHARACTERS.get(key)
            await self.send(events.Key(key, character))

    async def send(self, event: events.Event) -> None:
        """Send an event as the terminal does, and wait until it was dealt with."""
        self.app.post_message(event)
        await self._passed()
        for _ in range(2):
            await self.pilot._wait_for_screen()
        await self.done()
        shown = self.app.form if self.app.at == "form" else self.app.front
        until = time.monotonic() + LONG
        while not shown.size and shown.display and not self.app._exit and time.monotonic() < until:
            await asyncio.sleep(0.001)  # it has just been mounted, and is not laid out yet
            await self.pilot._wait_for_screen()

    async def _passed(self) -> None:
        """Wait until what was sent has gone the way of a key, and what it brought to the front is laid out.

        A key goes to the app, to what has the focus, and back; a change of what is in front comes with a refresh.
        """
        passed, app = asyncio.Event(), self.app

        def in_front(then: Callable[[], None]) -> object:
            return (app.form if app.at == "form" else app.front).call_later(then)

        way: list[Callable[[Callable[[], None]], object]] = [
            app.call_later,
            (app.focused or app.screen).call_later,
            app.screen.call_later,
            app.call_later,
            app.call_after_refresh,
            in_front,
        ]

        def go_on() -> None:
            if way:
                way.pop(0)(go_on)
            else:
                passed.set()

        go_on()
        with contextlib.suppress(TimeoutError):  # an app that has ended passes nothing on
            await asyncio.wait_for(passed.wait(), 0.05 if app._exit or app.failure else LONG)

    async def done(self) -> None:
        """Wait until the disk has done what was asked of it."""
        until = time.monotonic() + LONG
        while self.app.pending and self.app.is_running and not self.app._exit:
            await asyncio.sleep(0.002)
            assert time.monotonic() < until, "the disk never came back"

    async def looked(self) -> None:
        """Wait until the list shows what each entry in view would cost."""
        until = time.monotonic() + LONG
        await self.pilot._wait_for_screen()
        while self.app.choosers[self.app.at].looking and time.monotonic() < until:
            await asyncio.sleep(0.002)
            await self.pilot._wait_for_screen()

    async def type(self, text: str) -> None:
        """Type letters."""
        await self.press(*(NAMES.get(c, c) for c in text))

    async def at(self, id_: str, column: str = "length") -> None:
        """Put the cursor on a row and column."""
        row = next(row for row in self.app.ledger.rows if row.id == id_ and row.kind != "item")
        self.app.ledger.go_to(row.path, column)
        self.app.tell()
        await self.pilot._wait_for_screen()

    def lines(self, widget: Lines | None = None) -> list[str]:
        """What a widget shows, the ledger where none is named."""
        shown = widget or self.app.front
        return ["".join(segment.text for segment in shown.render_line(y)).rstrip() for y in range(shown.size.height)]

    def row(self, id_: str) -> str:
        """The line of the ledger that begins with an ID."""
        return next(line for line in self.lines(self.app.ledger) if line.lstrip("» ").split(" ")[0] == id_)

    @property
    def listed(self) -> list[str]:
        """The first cells of the list in front, as the filter leaves it."""
        return [choice.cells[0] for choice in self.app.choosers[self.app.at].kept]

    def listing(self, name: str) -> str:
        """The line of the list in front that begins with a name."""
        return next(line for line in self.lines() if line.startswith(f" {name}  "))

    @property
    def screen_text(self) -> str:
        """What the list or form in front says."""
        widget = self.app.form if self.app.at == "form" else self.app.front
        return "\n".join(self.lines(widget))

    @property
    def place(self) -> str:
        """Where the hands are."""
        return self.app.place

    @property
    def screen(self) -> str:
        """Which screen is in front."""
        return self.app.at

    @property
    def foot(self) -> str:
        """What is said at the foot."""
        return self.lines(self.app.foot)[0].strip()

    @property
    def budget(self) -> str:
        """What the budget line says."""
        return "\n".join(self.lines(self.app.budget_line))

    @property
    def text(self) -> str:
        """The document's text."""
        return self.app.document.snapshot.text


NAMES = {
    "?": "question_mark", ":": "colon",
    " ": "space", ".": "full_stop", '"': "quotation_mark", "=": "equals_sign", "-": "minus", "/": "slash",
    "{": "left_curly_bracket", "}": "right_curly_bracket", "_": "underscore", ",": "comma", "%": "percent_sign",
}  # fmt: skip

CHARACTERS = {name: character for character, name in NAMES.items()}

Play = Callable[[Hands], Awaitable[None]]
Stage = Callable[..., None]


@pytest.fixture
def play(tmp_path: Path) -> Stage:
    """Run a play of key presses on the app without a terminal."""

    def run(
        act: Play, text: str = SMALL, *, size: tuple[int, int] = (80, 24), ascii_only: bool = False,
        theme: Theme | None = None,
    ) -> None:  # fmt: skip
        path = tmp_path / "run.toml"
        path.write_text(text, encoding="utf-8", newline="")

        async def stage() -> None:
            app = BudgetApp(Document.open(path), Config(), theme or terminal_theme(), ascii_only=ascii_only, notes=())
            app.trials.clock = lambda: 0.0  # what is shown at once must not hang on how busy the machine is
            try:
                async with app.run_test(size=size) as pilot:
                    while not app.ledger.size:
                        await pilot._wait_for_screen()
                    await act(Hands(app, pilot))
            finally:
                app.keeper.end()  # as the way out of the app does

        asyncio.run(stage())

    return run
