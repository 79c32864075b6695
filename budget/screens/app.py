"""The app: wires the open document to the widgets, and the keys to what they do."""

from __future__ import annotations

import asyncio
import gc
from typing import TYPE_CHECKING, ClassVar

from textual import events
from textual.app import ComposeResult
from textual.containers import Horizontal
from textual.filter import LineFilter

from budget.description.edits import Edit
from budget.description.finding import Path
from budget.document import Document, Snapshot
from budget.report.plain import plain
from budget.screens import choosing, entering, recovering, saving, turning, unsaved, watching
from budget.screens.actions import CHANGING
from budget.screens.beside import Beside
from budget.screens.budget_line import BudgetLine, change_of
from budget.screens.config import Config
from budget.screens.doing import DOINGS
from budget.screens.foot import Foot
from budget.screens.ledger import Mark
from budget.screens.rows import View
from budget.screens.signals import keep_before_stops
from budget.screens.stage import Stage
from budget.screens.themes import Theme
from budget.screens.toolkit import AsciiFilter, FrugalScreen, SafeFilter, widget_theme
from budget.screens.trials import Trials
from budget.storage.keeping import Work

if TYPE_CHECKING:
    from collections.abc import Sequence

    from textual.timer import Timer

TEXT_PAUSE = 0.5
"""Seconds in which what is written on the Text screen is noted once."""

WIDE = 120
"""Columns from which the row detail stands beside the ledger."""


class BudgetApp(Stage, inherit_bindings=False):
    """The ledger with its budget line and foot; other screens take the ledger's place when they are first asked for."""

    ENABLE_COMMAND_PALETTE = False
    AUTO_FOCUS = None
    ALLOW_SELECT = False
    CSS: ClassVar[str] = """
    Screen { overflow: hidden; }
    #budget-line { height: 3; }
    #middle { height: 1fr; }
    #middle > * { width: 1fr; height: 1fr; }
    #middle > #beside { width: 40%; }
    #foot { height: 2; }
    #text { border: none; padding: 0; }
    #text:focus { border: none; }
    """

    def __init__(
        self, document: Document, config: Config, theme: Theme, *, ascii_only: bool, notes: Sequence[str]
    ) -> None:
        """Open on a document, with the user's settings; notes are told at the foot."""
        super().__init__(document, theme)
        self.config = config
        self.keymap, self.notes = config.keymap, notes
        self.first_words = ("", "")
        self.trials = Trials(self)
        self.works: list[Beside] = []
        self.valves = Beside(self)
        self.sought = ""
        self.beside_width = 0
        self.change: tuple[str, str] = ("", "")
        self.animation_level = "none"
        self._own_filters: tuple[LineFilter, ...] = (SafeFilter(), AsciiFilter()) if ascii_only else (SafeFilter(),)
        self.register_theme(widget_theme(theme))
        self.theme = theme.name

        self.budget_line = BudgetLine(theme, self.ledger.view, self.ledger.source)
        self.foot = Foot(theme, config.keymap)
        self._text_timer: Timer | None = None

    def get_default_screen(self) -> FrugalScreen:
        """Paint on a screen that sends no more than it must."""
        return FrugalScreen()

    def compose(self) -> ComposeResult:
        """Budget line, ledger, foot."""
        yield self.budget_line
        with Horizontal(id="middle"):
            yield self.ledger
        yield self.foot

    def on_mount(self) -> None:
        """Show the run, and say what was wrong with the settings."""
        self._running_loop = asyncio.get_running_loop()
        self.app_resume_signal.subscribe(self, lambda _: self.refresh(layout=True))
        keep_before_stops(self.keep_now)
        self.show(self.document.snapshot)
        self.tell()
        self.call_after_refresh(self._begin)
        if self.first_words[0]:
            self.say(plain(self.first_words[0]), self.first_words[1])
        elif self.notes:
            more = f" (and {len(self.notes) - 1} more)" if len(self.notes) > 1 else ""
            self.say(plain(self.notes[0]) + more, "warning")

    def _begin(self) -> None:
        """Begin with what can wait for the first frame."""
        gc.enable()
        self.keeper.start()
        recovering.look(self)
        saving.remember(self)
        self.set_interval(watching.EVERY, lambda: watching.look(self))

    # What is shown

    def show(self, snapshot: Snapshot, before: Snapshot | None = None) -> None:
        """Show a snapshot; with the one before it, by how much the required pressure changed."""
        view = self.ledger.view if self.ledger.view.snapshot is snapshot else View(snapshot)
        self.ledger.show(view)
        if self.at in self.boards:
            self.boards[self.at].show(snapshot)
        change = change_of(before, snapshot, self.ledger.source) if before is not None else self.change
        if snapshot is self.document.snapshot:
            self.change = change
            unsaved.note(self)
        self._show_budget(view, change)

    def _show_budget(self, view: View, change: tuple[str, str]) -> None:
        source = self.ledger.source
        changed = change[1] if change[0] == source else ""
        self.budget_line.show(view, source, changed, unsaved.state(self.document, self.keeper.problem))

    def tell_state(self) -> None:
        """Tell at the head how the run stands to its file."""
        self._show_budget(self.ledger.view, self.change)

    def apply(self, edit: Edit, label: str, path: Path | None = None) -> None:
        """Put an edit into the document as one undo step; the cursor goes to `path`. Raises EditError."""
        before = self.document.snapshot
        self.document.apply(edit, label, mark=self.ledger.mark)
        self.show(self.document.snapshot, before)
        if path is not None:
            self.ledger.return_to(Mark(path, self.ledger.cursor, self.ledger.column))
        self.tell()

    def say(self, message: str, role: str = "") -> None:
        """Say something at the foot until the next key."""
        self.foot.say(message, role)

    def tell(self) -> None:
        """Tell at the foot what is under the cursor, and which keys work here."""
        self.foot.tell(self.place, turning.about(self))
        if self.ledger.source != self.budget_line.source:
            self._show_budget(self.ledger.view, self.change)
        if self.entry is None:
            turning.follow(self)

    def keys(self, action: str) -> str:
        """Spell the key of an action."""
        return self.keymap.shown(action)

    # What comes in

    def on_key(self, event: events.Key) -> None:
        """Do what the key means here; a letter goes into the field that is open."""
        action = self.keymap.action(self.place, event.key)
        if action is None and self._write(event):
            event.stop().prevent_default()
            return
        if action is None:
            return
        event.stop().prevent_default()
        if self.foot.message and self.entry is None:
            self.say("")
        self.do(action)

    def do(self, action: str) -> None:
        """Do an action by its name, unless it would change what is open read-only."""
        if self.document.read_only and action in CHANGING:
            self.say(f"{self.document.read_only}; it can be saved under another name", "note")
            return
        DOINGS[action](self)

    def on_paste(self, event: events.Paste) -> None:
        """Put a text from the clipboard into the field that is open."""
        if self.entry is not None:
            entering.press(self, self.entry, self.entry.field.insert(event.text))
        elif self.at == "list":
            self.choosers["list"].write(self.choosers["list"].field.insert(event.text))
        elif self.at == "form" and self.form.blank is not None:
            choosing.fill_in(self, self.form.put(self.form.fields[self.form.place].insert(event.text)))

    def on_click(self, event: events.Click) -> None:
        """Go to the cell or entry that was clicked; twice edits or takes it."""
        if event.widget is self.front and self.entry is None:
            self.front.point(event.x, event.y)
            self.tell()
            if event.chain == 2:
                self.do(self.keymap.action(self.at, "enter") or "choose")

    def on_mouse_scroll_down(self) -> None:
        """Move down with the wheel."""
        if self.entry is None and self.at not in ("text", "manual", "form"):
            self.do("down")

    def on_mouse_scroll_up(self) -> None:
        """Move up with the wheel."""
        if self.entry is None and self.at not in ("text", "manual", "form"):
            self.do("up")

    def on_resize(self, event: events.Resize) -> None:
        """Put the row detail beside the ledger where there is room."""
        self.wide = event.size.width >= WIDE
        turning.lay_out(self, event.size.width)

    def on_app_focus(self) -> None:
        """Look at the file when somebody comes back to the window."""
        watching.look(self)

    def on_text_area_changed(self) -> None:
        """Have kept what is written on the Text screen, soon, and also while letters come without a pause."""
        if self._text_timer is None:
            self._text_timer = self.set_timer(TEXT_PAUSE, self._text_written)

    def _text_written(self) -> None:
        self._text_timer = None
        turning.text_written(self)

    # The file

    @property
    def written(self) -> str | None:
        """What is written on the Text screen and is not in the design yet."""
        return self._text.text if self._text is not None and self._text.changed else None

    def reload_text(self) -> None:
        """Let the Text screen show what is in the design, where it is in front."""
        if self._text is not None and self.at == "text":
            self._text.open(self.document.snapshot.text, self.ledger.row)

    def work(self) -> Work:
        """Return what is to be kept now."""
        return unsaved.work(self)

    def look_again(self) -> None:
        """Look at once whether the file was changed."""
        watching.look(self, anyway=True)

    def get_line_filters(self) -> Sequence[LineFilter]:
        """Whatever a widget paints goes through these, last through our own."""
        return (*super().get_line_filters(), *self._own_filters)

    def _write(self, event: events.Key) -> bool:
        if self.entry is not None:
            field = self.entry.field.press(event.key, event.character)
            if field is not None:
                entering.press(self, self.entry, field)
            return True
        if self.at == "list":
            return choosing.write(self, event.key, event.character)
        if self.at == "form":
            choosing.fill_in(self, self.form.press(event.key, event.character))
            return True
        return False
