"""The Profile screen: pressure against distance along a circuit, with a cursor that names what stands there."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence

from budget.document import Snapshot
from budget.report.plain import plain
from budget.report.profile import Marks, Point, Profile, bounds, draw, index_profile, terminal_profile
from budget.screens.board import Board
from budget.screens.lines import Piece
from budget.screens.rows import INDEX_SIGN
from budget.screens.safe import clip, fit, steady, width_of
from budget.screens.themes import Theme
from budget.units import Dimension

MARKS = Marks("█", "▒", "·", "─", "│", "┼")
_ROLES = {MARKS.total: "index", MARKS.static: "note", MARKS.other: "faint"}


class ProfileBoard(Board):
    """One circuit at a time, with the index circuit behind it; up and down turn to another circuit."""

    def __init__(self, theme: Theme, snapshot: Snapshot) -> None:
        """Show nothing yet."""
        super().__init__(theme, snapshot, id="profile")
        self.profiles: tuple[Profile, ...] = ()
        """The circuit in hand, then the index circuits that are others."""
        self.at = 0
        """The place of the cursor among the points of the circuit."""
        self._drawn: tuple[object, ...] = ()
        self._lines: list[str] = []

    @property
    def ids(self) -> Sequence[str]:
        """The terminals, each with its circuit."""
        return tuple(self.snapshot.budget.terminals)

    def prepare(self) -> None:
        """Take the circuit in hand from the snapshot."""
        budget, terminal = self.snapshot.budget, self.marked
        self.profiles = ()
        if terminal is None:
            return
        own = terminal_profile(budget, terminal)
        others = index_profile(budget, own.source)
        self.profiles = (own, *(one for one in others if one.terminal != terminal))
        self.at = min(self.at, len(own.points) - 1)

    def renew(self) -> None:
        """Draw the circuit that was in hand, as it is now."""
        marked = self._terminal
        if marked in self.ids:
            self.cursor = list(self.ids).index(marked)
        self.go(self.cursor)

    def go(self, place: int) -> None:
        """Turn to another circuit."""
        before = self._terminal
        self.cursor = min(max(place, 0), max(len(self.ids) - 1, 0))
        self.prepare()
        if self._terminal != before:
            self.at = 0
        self.repaint()

    def move_column(self, step: int) -> None:
        """Move along the circuit to a neighbouring point."""
        if self.profiles:
            self.at = min(max(self.at + step, 0), len(self.profiles[0].points) - 1)
            self.repaint()

    def point(self, x: int, _y: int) -> None:
        """Move along the circuit to the point nearest to a place of the drawing."""
        if self.profiles:
            room, columns = self._frame(self.size.width)
            points = self.profiles[0].points
            self.at = min(range(len(points)), key=lambda n: abs(self._column(points[n], columns) + room + 1 - x))
            self.repaint()

    @property
    def about(self) -> tuple[str, str]:
        """What stands under the cursor, by its name."""
        if not self.profiles:
            return "no circuit can be computed", "faint"
        id_ = self.profiles[0].points[self.at].id
        description = self.snapshot.description
        part = description.terminals.get(id_) or description.sections.get(id_) or description.sources.get(id_)
        return "  ".join(plain(text) for text in (id_, part.title, part.location) if text) if part else "", "faint"

    # Spelling

    def line(self, y: int, width: int) -> Iterable[Piece]:
        """Spell the title, the legend, the drawing, or what stands under the cursor."""
        height = self.size.height
        if y == 0:
            return self._title(width)
        if not self.profiles:
            return ()
        if y == 1:
            return self._legend()
        if y >= height - 2:
            return self._told(y - height + 2, width)
        return self._drawing(y - 2, width, height - 4)

    @property
    def _terminal(self) -> str:
        return self.profiles[0].terminal if self.profiles else ""

    def _title(self, width: int) -> Iterator[Piece]:
        terminal = self.snapshot.description.terminals.get(self._terminal)
        result = self.snapshot.budget.terminals.get(self._terminal)
        index = f"{INDEX_SIGN} index circuit" if result is not None and result.index else ""
        title = plain(terminal.title) if terminal is not None else ""
        return self.titled(f"Profile {steady(self._terminal)}".rstrip(), (index, title), width)

    def _legend(self) -> Iterator[Piece]:
        gas = self.profiles[0].points[0].static is not None
        unit = self.figures.unit(Dimension.PRESSURE)
        yield f" {MARKS.total}", _ROLES[MARKS.total]
        yield f" {'total pressure' if gas else 'pressure'}, {unit}", "faint"
        if gas:
            yield f"   {MARKS.static}", _ROLES[MARKS.static]
            yield " static", "faint"
        if len(self.profiles) > 1:
            names = ", ".join(steady(one.terminal) for one in self.profiles[1:])
            yield f"   {MARKS.other}", _ROLES[MARKS.other]
            yield f" index circuit, {names}", "faint"

    def _labels(self) -> tuple[str, str, str, str]:
        low, high, length = bounds(self.profiles)
        lowest, highest = (self.figures.pressure(value, self._density) for value in (low, high))
        return highest, lowest, "0", self.figures.text(length, Dimension.LENGTH, unit=True)

    def _frame(self, width: int) -> tuple[int, int]:
        """Return the cells of the labels, and the columns of the drawing."""
        room = max(width_of(label) for label in self._labels()[:2])
        return room, width - room - 1

    def _column(self, point: Point, columns: int) -> int:
        """Return the column of the drawing in which a point stands."""
        length = bounds(self.profiles)[2]
        return min(int(point.distance / length * columns), columns - 1) if length > 0.0 else 0

    def _drawing(self, y: int, width: int, height: int) -> Iterator[Piece]:
        asked = (self.profiles, width, height)
        if asked != self._drawn:
            self._drawn, self._lines = asked, draw(self.profiles, width, height, self._labels(), MARKS)
        if not self._lines:
            if y == 0:
                yield clip(" a figure on this circuit is not known: see the findings", width), "note"
            return
        if y >= len(self._lines):
            return
        room, columns = self._frame(width)
        cursor = room + 1 + self._column(self.profiles[0].points[self.at], columns)
        for x, c in enumerate(fit(self._lines[y], width)):
            yield c, f"{_ROLES.get(c, 'faint')} cursor" if x == cursor and y < height - 2 else _ROLES.get(c, "faint")

    def _told(self, y: int, width: int) -> Iterator[Piece]:
        """Tell what stands under the cursor: what it costs, where it is, and what is left behind it."""
        profile, density = self.profiles[0], self._density
        here = profile.points[self.at]
        if y == 0:
            before = profile.points[self.at - 1] if self.at else None
            # A gain in height or at a junction is a drop below nothing.
            drop = "" if before is None else self.figures.pressure(before.total - here.total, density, unit=True)
            yield clip(f" {plain(here.id)}  {plain(here.what)}" + (f"  drop {drop}" if drop else ""), width), "heading"
            return
        left = self.figures.pressure(here.total, density, unit=True)
        said = [f"at {self.figures.text(here.distance, Dimension.LENGTH, unit=True)}", f"{left} behind it"]
        if here.static is not None:
            said.append(f"static {self.figures.pressure(here.static, density, unit=True)}")
        said.append(f"point {self.at + 1} of {len(profile.points)}")
        yield clip(" " + "  ".join(said), width), "faint"

    @property
    def _density(self) -> float | None:
        result = self.snapshot.budget.sources.get(self.profiles[0].source)
        return result.fluid.density if result is not None else None
