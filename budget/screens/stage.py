"""What stands in front: the ledger, or another screen in its place, made when it is first asked for."""

from __future__ import annotations

from typing import TYPE_CHECKING

from textual.widget import Widget

from budget.document import Document
from budget.screens.actions import Place
from budget.screens.board import Board
from budget.screens.chooser import Chooser, Offer
from budget.screens.form import Form
from budget.screens.guarded import GuardedApp
from budget.screens.ledger import Ledger
from budget.screens.rows import View
from budget.screens.themes import Theme

if TYPE_CHECKING:
    from budget.screens.entering import Entry
    from budget.screens.manual import ManualScreen
    from budget.screens.text import TextScreen


class Stage(GuardedApp, inherit_bindings=False):
    """An app with one place in which a screen stands."""

    def __init__(self, document: Document, theme: Theme) -> None:
        """Put the ledger in front."""
        super().__init__(document)
        self.colours = theme
        """The styles of all that is painted."""
        self.ledger = Ledger(theme, View(document.snapshot))
        """The home screen."""
        self.choosers: dict[str, Chooser] = {}
        """The lists by their places, as far as they were asked for."""
        self.boards: dict[str, Board] = {}
        """The screens for balancing, as far as they were asked for."""
        self.entry: Entry | None = None
        """The field that is open."""
        self.at: Place = "ledger"
        """The screen in front."""
        self.returns_to: Place = "ledger"
        """The screen that comes back when a list is left."""
        self.wide = False
        """Whether there is room for the row detail beside the ledger."""
        self._form: Form | None = None
        self._text: TextScreen | None = None
        self._manual: ManualScreen | None = None

    def tell(self) -> None:
        """Tell what is under the cursor."""
        raise NotImplementedError

    @property
    def place(self) -> Place:
        """Where the hands are: a field that is open, else the screen."""
        return "entry" if self.entry is not None else self.at

    @property
    def front(self) -> Ledger | Chooser | Board:
        """The ledger, or the list or board in its place."""
        return self.boards[self.at] if self.at in self.boards else self.choosers.get(self.at, self.ledger)

    def turn_to(self, place: Place) -> None:
        """Bring a screen to the front, in the place of the ledger."""
        if place == "list" and self.at not in ("list", "form"):
            self.returns_to = self.at
        self.at = place
        for widget in self.middle.children:
            if widget.id == "beside":
                widget.display = self.wide and place in ("ledger", "list", "form", "findings")
            else:
                widget.display = widget.id == place
        self.screen.set_focus({"text": self._text, "manual": self._manual}.get(place))
        self.tell()

    @property
    def middle(self) -> Widget:
        """What stands between the budget line and the foot."""
        return self.query_one("#middle")

    def chooser(self, place: Place) -> Chooser:
        """Return the list of a place; it is made when it is first asked for."""
        if place not in self.choosers:
            self.choosers[place] = Chooser(self.colours, place)
            self._mount(self.choosers[place])
        return self.choosers[place]

    def _mount(self, widget: Widget) -> None:
        """Put a widget in the ledger's place, to the left of what stands beside it."""
        self.middle.mount(widget, after=self.ledger)

    @property
    def form(self) -> Form:
        """The form; it is made when it is first asked for."""
        if self._form is None:
            self._form = Form(self.colours)
            self._mount(self._form)
        return self._form

    @property
    def text(self) -> TextScreen:
        """The Text screen; it is made when it is first asked for."""
        if self._text is None:
            from budget.screens.text import TextScreen  # noqa: PLC0415 - heavy, and seldom needed

            self._text = TextScreen()
            self.middle.mount(self._text)
        return self._text

    @property
    def manual(self) -> ManualScreen:
        """The Manual screen; it is made when it is first asked for."""
        if self._manual is None:
            from budget.screens.manual import ManualScreen  # noqa: PLC0415 - heavy, and seldom needed

            self._manual = ManualScreen()
            self.middle.mount(self._manual)
        return self._manual

    def offer(self, offer: Offer) -> None:
        """Show a list to pick from."""
        self.chooser("list").present(offer)
        self.turn_to("list")
