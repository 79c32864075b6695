"""The As installed screen: the flows that the pumps or fans really drive, and where each of them works."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import replace

from budget.description import Level
from budget.document import Snapshot
from budget.network.flows import Devices, SourceFlow, TerminalFlow
from budget.report.figures import NONE
from budget.report.operating import Operating, draw_operating, limits, operating
from budget.report.plain import plain
from budget.screens.beside import Beside, Watch
from budget.screens.board import Board, Head, place_heads, spell_heads, spell_row
from budget.screens.columns import MARK
from budget.screens.lines import Piece
from budget.screens.rows import INDEX_SIGN, OVER_SIGN, Cell
from budget.screens.safe import clip, fit, steady, width_of
from budget.screens.solving import Request, Solved, solve_request
from budget.screens.themes import Theme
from budget.units import Dimension

WAYS: tuple[Devices, ...] = ("given", "open", "set", "rounded")
SAID: dict[Devices, str] = {
    "given": "devices as stated",
    "open": "devices open",
    "set": "devices as proposed",
    "rounded": "devices rounded",
}

TABLE = 45
"""Cells that the table keeps beside the drawing."""

LEAST_DRAWING = 30

MARKS = "█·●│─┼"
_ROLES = {"█": "bar", "·": "index", "●": "over"}


class Installed(Board):
    """Sources and terminals as they run; solving goes on beside the keyboard."""

    def __init__(self, theme: Theme, snapshot: Snapshot, work: Beside, told: Callable[[], None]) -> None:
        """Show nothing yet; `told` is called when there is something new to tell at the foot."""
        super().__init__(theme, snapshot, id="installed")
        self.work, self.told = work, told
        self.devices: Devices = "given"
        self.case = ""
        self.solved: Solved | None = None
        self.state = ""
        self._asked: Request | None = None
        self._rows: tuple[SourceFlow | TerminalFlow, ...] = ()

    # What is solved

    @property
    def request(self) -> Request:
        """What is to be shown."""
        case = self.case if self.case in self.snapshot.description.cases else ""
        return Request(self.snapshot, self.devices, case)

    def prepare(self) -> None:
        """Begin to solve what is to be shown, where that is not what is shown or being solved."""
        if not self.request.is_as(self._asked):
            self.solve()

    def solve(self) -> None:
        """Solve anew; what was solved last stands until then."""
        request, last = self.request, self.solved
        self._asked, self.state = request, "solving..."
        self.work.start(lambda watch: solve_request(request, last, watch), self._take, self._fail, self._progress)
        self._tell()

    def stop(self) -> bool:
        """Stop solving; False where nothing is being solved."""
        if not self.work.working:
            return False
        self.work.stop()
        self.state = "stopped; the flows are those of before" if self.solved else "stopped"
        self._tell()
        return True

    def turn_devices(self) -> None:
        """Put the devices open, as proposed, rounded to their scale, as stated in turn."""
        self.devices = WAYS[(WAYS.index(self.devices) + 1) % len(WAYS)]
        self.renew()

    def turn_case(self) -> bool:
        """Go to the next case, after the last to none; False where the run has none."""
        cases = ["", *self.snapshot.description.cases]
        self.case = cases[(cases.index(self.request.case) + 1) % len(cases)]
        self.renew()
        return len(cases) > 1

    def _take(self, solved: Solved) -> None:
        self.solved, self.state = solved, ""
        in_hand, terminals = self.in_hand, solved.flows.terminals.values()
        rows: list[SourceFlow | TerminalFlow] = []
        for source in solved.flows.sources.values():
            rows += [source, *(one for one in terminals if one.source == source.id)]
        self._rows = tuple(rows)
        if in_hand is not None:
            self.go_to(in_hand)
        self.go(self.cursor)
        self._draw()
        self._tell()

    def _fail(self, reason: str) -> None:
        self.state = f"could not be solved: {reason}"
        self._tell()

    def _progress(self, step: int) -> None:
        self.state = f"solving... step {step}"
        self._tell()

    def _draw(self) -> None:
        """Trace the curves of the source in hand, where that was not done yet."""
        solved, source = self.solved, self.source
        if solved is None or not source or source in solved.curves or self.work.working:
            return

        def trace(watch: Watch) -> Operating | None:
            request = solved.request
            return operating(request.snapshot.budget.run, solved.flows, source, request.stated, request.devices, watch)

        def take(found: Operating | None) -> None:
            if self.solved is solved:
                self.solved = replace(solved, curves={**solved.curves, source: found})
                self._draw()
            self._tell()

        self.work.start(trace, take, self._fail)

    def _tell(self) -> None:
        self.repaint()
        self.told()

    # Rows

    @property
    def ids(self) -> Sequence[str]:
        """The IDs of sources, each with its terminals."""
        return tuple(row.id for row in self._rows)

    @property
    def source(self) -> str:
        """The source in hand: the marked one, or that of the marked terminal."""
        row = self._rows[self.cursor] if self.cursor < len(self._rows) else None
        return "" if row is None else row.source if isinstance(row, TerminalFlow) else row.id

    @property
    def head(self) -> int:
        """Title, the operating point, titles and units."""
        return 4

    def go(self, place: int) -> None:
        """Move the cursor; the drawing follows to another source."""
        super().go(place)
        self._draw()

    @property
    def about(self) -> tuple[str, str]:
        """What is being solved, or what is to be said of the marked row."""
        if self.state:
            more = "; Escape stops" if self.work.working else ""
            return f"{self.state}{more}", "error" if self.state.startswith("could") else "note"
        marked = self.marked
        findings = self.solved.findings if self.solved is not None else ()
        of_all = next((one for one in findings if one.level is Level.ERROR), None)
        found = of_all or next((one for one in findings if one.owner == marked), None)
        if found is not None:
            return f"{plain(found.owner)}: {plain(found.message)}", found.level.value
        description = self.snapshot.description
        part = description.terminals.get(marked or "") or description.sources.get(marked or "")
        texts = (part.id, part.title, part.location) if part is not None else ()
        return "  ".join(plain(text) for text in texts if text), "faint"

    # Spelling

    def line(self, y: int, width: int) -> Iterable[Piece]:
        """Spell the title, the operating point, headings and rows with the drawing beside them."""
        if y == 0:
            case = f"case {plain(self.request.case)}" if self.request.case else "no case"
            return self.titled("As installed", (SAID[self.devices], case, self.state or self._warned), width)
        if y == 1:
            return ((clip(f" {self._point}", width), "heading"),)
        drawn = width >= TABLE + LEAST_DRAWING
        left = max(TABLE, width // 2) if drawn else width
        pieces = list(self._beside(y, left))
        if not drawn:
            return pieces
        room = left - sum(width_of(text) for text, _ in pieces)
        return (*pieces, (" " * room, ""), *self._drawing(y - 2, width - left))

    def _beside(self, y: int, width: int) -> Iterable[Piece]:
        placed = place_heads(self._heads, width)
        if y in (2, 3):
            return spell_heads(placed, units=y == 3)
        place = self.top + y - self.head
        if place >= len(self._rows):
            return ()
        row = self._rows[place]
        cells = self._terminal(row) if isinstance(row, TerminalFlow) else self._source(row)
        terminal = self.snapshot.budget.terminals.get(row.id)
        sign = INDEX_SIGN if terminal is not None and terminal.index else " "
        return spell_row(placed, sign, cells, current=place == self.cursor)

    @property
    def _heads(self) -> tuple[Head, ...]:
        flow = self.figures.unit(Dimension.FLOW)
        return (
            Head("id", "ID", 13, 99, left=True),
            Head("flow", "flow", 8, 98, flow),
            Head("design", "design", 8, 95, flow),
            Head("share", "share", 7, 97, "%"),
            Head("verdict", "verdict", 8, 96, left=True),
            Head("title", "title", 12, 20, left=True),
        )

    def _source(self, one: SourceFlow) -> dict[str, Cell]:
        design = self.snapshot.budget.sources.get(one.id)
        title = self.snapshot.description.sources[one.id].title if design is not None else ""
        return {
            "id": Cell(steady(one.id), "title"),
            "flow": Cell(self.figures.flow(one.flow, one.mass_flow)),
            "design": Cell(self.figures.flow(design.flow, design.mass_flow) if design is not None else NONE),
            "title": Cell(plain(title)),
        }

    def _terminal(self, one: TerminalFlow) -> dict[str, Cell]:
        verdict = "" if one.within else "over" if one.share > one.wanted else "under"
        verdict = "off" if one.within and one.wanted == 0.0 else verdict
        part = self.snapshot.description.terminals.get(one.id)
        role, sign = ("over", OVER_SIGN) if not one.within else ("", "")
        return {
            "id": Cell(steady(one.id)),
            "flow": Cell(self.figures.flow(one.flow, one.mass_flow)),
            "design": Cell(self.figures.flow(one.design_flow, one.design_mass_flow)),
            "share": Cell(f"{100.0 * one.share:.1f}", role, sign),
            "verdict": Cell(verdict or "within", role),
            "title": Cell(plain(part.title) if part is not None else ""),
        }

    @property
    def _warned(self) -> str:
        findings = self.solved.findings if self.solved is not None else ()
        outside = sum(one.code == "flow-tolerance" for one in findings)
        other = len(findings) - outside
        return f"{outside} outside tolerance" + (f", {other} other findings" if other else "")

    @property
    def _point(self) -> str:
        """Tell the operating point of the source in hand beside its design."""
        solved, id_ = self.solved, self.source
        if solved is None or id_ not in solved.flows.sources:
            return "nothing is solved yet" if solved is None else "no source can be solved; see the findings"
        one, design = solved.flows.sources[id_], solved.request.snapshot.budget.sources[id_]
        density = design.fluid.density
        said = [
            f"{steady(id_)} works at {self.figures.flow(one.flow, one.mass_flow, unit=True)}",
            self.figures.pressure(one.pressure, density, unit=True),
            "" if one.speed is None else f"{100.0 * one.speed:.0f} % speed",
            self.figures.text(one.power, Dimension.POWER, unit=True) if one.power is not None else "",
        ]
        needs = self.figures.pressure(design.required, density)
        wanted = f"design {self.figures.flow(design.flow, design.mass_flow)}, {needs}"
        return "  ".join([", ".join(text for text in said if text), wanted])

    def _drawing(self, y: int, width: int) -> Iterator[Piece]:
        found = self.solved.curves.get(self.source) if self.solved is not None else None
        height = self.size.height - 3
        if found is None or self.solved is None:
            return
        if y == 0:
            for mark, word in zip(MARKS, ("pump" if not self._gas else "fan", "system", "works here"), strict=False):
                yield f" {mark}", _ROLES[mark]
                yield f" {word} ", "faint"
            return
        density = self.solved.request.snapshot.budget.sources[found.source].fluid.density
        most, highest = limits(found)
        labels = (
            self.figures.pressure(highest, density),
            self.figures.unit(Dimension.PRESSURE),
            "0",
            f"{self.figures.flow(most, most * density, unit=True)}",
        )
        lines = draw_operating(found, width - 1, height, labels, MARKS)
        if y - 1 < len(lines):
            for c in fit(lines[y - 1], width - 1):
                yield c, _ROLES.get(c, "faint")

    @property
    def _gas(self) -> bool:
        return self.snapshot.description.fluid.gas

    def point(self, x: int, y: int) -> None:
        """Move the cursor to the row at a place of the table."""
        if x >= MARK:
            super().point(x, y)
