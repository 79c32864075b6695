"""The Balance screen: the commissioning schedule in the order of work, with what was measured beside it."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Sequence
from functools import cached_property
from pathlib import Path

from budget.description import Level, read_bytes
from budget.description.readings import Readings, read_readings
from budget.document import Snapshot
from budget.network.results import SectionResult, TerminalResult
from budget.report.figures import NONE, Figures, plain_number
from budget.report.located import Located, locate
from budget.report.plain import plain
from budget.report.schedule import Row, Schedule, schedule
from budget.report.schedule_text import next_text
from budget.screens.beside import Beside
from budget.screens.board import Board, Head, place_heads, spell_heads, spell_row
from budget.screens.lines import Piece
from budget.screens.rows import INDEX_SIGN, OVER_SIGN, Cell
from budget.screens.safe import clip, steady, wrapped
from budget.screens.themes import Theme
from budget.storage import StorageError, load
from budget.units import Dimension

_COLUMN_OF_CODE = {
    "device-range": "setting", "signal": "signal", "authority": "authority", "authority-low": "authority",
    "excess": "excess",
}  # fmt: skip

TOLD = 3
"""Lines beneath the rows that tell of the marked one."""

MANY = 750
"""Terminals from which a schedule is worked out beside the keyboard."""

STEP = 2
"""Lines for what to do next, where something was measured."""


def readings_beside(run: Path | None) -> Path | None:
    """Return where the readings of a run stand: `run.readings.toml` beside `run.toml`."""
    return None if run is None else run.with_name(f"{run.stem}.readings.toml")


class Balance(Board):
    """The schedule as a table; it holds the cursor and what was read beside the run."""

    def __init__(self, theme: Theme, snapshot: Snapshot, work: Beside, told: Callable[[], None]) -> None:
        """Show the schedule of a run, without readings yet; `told` is called when a long one was worked out."""
        super().__init__(theme, snapshot, id="balance")
        self.work, self.told = work, told
        self.schedule = Schedule(())
        self.readings: Readings | None = None
        self.findings: tuple[Located, ...] = ()
        """Of the readings."""
        self.refused = ""
        self._ids: tuple[str, ...] = ()
        self._source: bytes | None = None

    def read(self, run: Path | None) -> None:
        """Read the readings beside the run, as they are on disk by now."""
        path = readings_beside(run)
        self._source, self.refused = None, ""
        if path is not None and path.is_file():
            try:
                self._source = load(path)[0]
            except (StorageError, ValueError) as refused:
                self.refused = plain(str(refused))

    def prepare(self) -> None:
        """Take the schedule of the snapshot, and judge what was measured; a long one beside the keyboard."""
        snapshot, source = self.snapshot, self._source
        self.work.stop()
        if len(snapshot.description.terminals) <= MANY:
            self._take(_worked_out(snapshot, source))
        else:
            self.work.start(lambda _: _worked_out(snapshot, source), self._take_later, self._fail)

    def _take(self, found: tuple[Schedule, Readings | None, tuple[Located, ...]]) -> None:
        self.schedule, self.readings, self.findings = found
        self._ids = tuple(row.id for row in self.schedule.rows)
        self.__dict__.pop("_marks", None)

    def _take_later(self, found: tuple[Schedule, Readings | None, tuple[Located, ...]]) -> None:
        in_hand = self.in_hand
        self._take(found)
        self.go(self._ids.index(in_hand) if in_hand in self._ids else self.cursor)
        self.told()

    def _fail(self, reason: str) -> None:
        self.refused = reason
        self.told()

    @property
    def ids(self) -> Sequence[str]:
        """The IDs in the order of work."""
        return self._ids

    @property
    def row(self) -> Row | None:
        """The row under the cursor."""
        return self.schedule.rows[self.cursor] if self.cursor < len(self.schedule.rows) else None

    @property
    def tail(self) -> int:
        """What is told of the marked row, and the next step."""
        return TOLD + (STEP if self.readings is not None else 0)

    @property
    def about(self) -> tuple[str, str]:
        """The name of the marked row and where it stands."""
        row = self.row
        if self.work.working:
            return "working out the schedule...", "note"
        if row is None:
            return "there is nothing to set or to measure", "faint"
        lost = next((one for one in self.findings if one.level is Level.ERROR), None)
        if lost is not None:
            return f"readings, line {lost.line}: {plain(lost.message)}", "error"
        if self.refused:
            return self.refused, "error"
        return "  ".join(plain(text) for text in (row.id, row.device, row.title, row.location) if text), "faint"

    # Spelling

    def line(self, y: int, width: int) -> Iterable[Piece]:
        """Spell the title, the headings, a row, or what is told beneath."""
        placed = place_heads(self.heads, width)
        if y == 0:
            return self.titled("Balance", ("in the order of work", self._measured), width)
        if y in (1, 2):
            return spell_heads(placed, units=y == 2)
        if y < self.head + self.page:
            place = self.top + y - self.head
            if place >= len(self.schedule.rows):
                return ()
            row = self.schedule.rows[place]
            sign = INDEX_SIGN if self._on_index(row) else " "
            return spell_row(placed, sign, self.cells(row), current=place == self.cursor)
        return self._told(y - self.head - self.page, width)

    @property
    def heads(self) -> tuple[Head, ...]:
        """The columns; those of what was measured only where there are readings."""
        flow, pressure = self.figures.unit(Dimension.FLOW), self.figures.unit(Dimension.PRESSURE)
        measured = (
            Head("measured", "found", 8, 94, flow),
            Head("percent", "of", 5, 93, "%"),
            Head("verdict", "verdict", 8, 91, left=True),
        )
        return (
            Head("id", "ID", 12, 99, left=True),
            Head("flow", "flow", 7, 95, flow),
            *(measured if self.readings is not None else ()),
            Head("device", "device", 10, 90, left=True),
            Head("setting", "setting", 8, 92),
            Head("stated", "set at", 7, 85),
            Head("drop", "drop", 7, 80, pressure),
            Head("signal", "signal", 7, 60, pressure),
            Head("margin", "margin", 7, 70, pressure),
            Head("excess", "excess", 7, 55, pressure),
            Head("authority", "auth.", 7, 58),
            Head("title", "title", 20, 20, left=True),
        )

    def cells(self, row: Row) -> dict[str, Cell]:
        """Return the cells of a row, with a sign at what is out of its range."""
        figures, density = self.figures, row.density
        cells = {
            "id": Cell(steady(row.id), "index" if self._on_index(row) else "title" if row.kind == "source" else ""),
            "flow": Cell(figures.flow(row.design_flow, row.mass_flow)),
            "device": Cell(steady(row.device)),
            "setting": Cell(plain_number(row.setting)),
            "stated": Cell(plain_number(self._stated(row), 4)),
            "drop": Cell(figures.pressure(row.drop, density)),
            "signal": Cell(figures.pressure(row.signal, density)),
            "title": Cell(plain(row.title)),
        }
        result = self._result(row)
        if result is not None:
            cells["margin"] = Cell(figures.pressure(result.margin, density))
            cells["authority"] = Cell(f"{result.authority:.2f}" if result.authority is not None else NONE)
        if isinstance(result, TerminalResult):
            cells["excess"] = Cell(figures.pressure(result.excess, density))
        if row.judged is not None:
            judged = row.judged
            cells["measured"] = Cell(figures.flow(judged.flow, judged.share * row.mass_flow))
            cells["percent"] = Cell(f"{100.0 * judged.share:.0f}")
            cells["verdict"] = Cell(judged.verdict, "" if judged.verdict == "within" else "over")
        for column in self._marks.get(row.id, ()):
            cells[column] = Cell(cells[column].text if column in cells else NONE, "over", OVER_SIGN)
        return cells

    @cached_property
    def _marks(self) -> dict[str, set[str]]:
        """The columns of each row in which a figure is out of its range."""
        found: dict[str, set[str]] = {}
        for finding in self.snapshot.findings:
            column = _COLUMN_OF_CODE.get(finding.code)
            if column is not None and finding.owner:
                found.setdefault(finding.owner, set()).add(column)
        return found

    @property
    def _measured(self) -> str:
        if self.readings is None:
            return "no readings beside the run"
        wrong = f", {len(self.findings)} findings" if self.findings else ""
        return f"{len(self.readings.measured)} readings{wrong}"

    def _told(self, y: int, width: int) -> Iterator[Piece]:
        lines = self._of_row(width - 2)[:TOLD]
        lines += [("", "")] * (TOLD - len(lines))
        if self.schedule.next is not None:
            text = next_text(self.snapshot.description, self.schedule.next, self.figures)
            said = wrapped(f"Next: {text}", width - 2)
            if len(said) > STEP:
                said = [*said[: STEP - 1], f"{said[STEP - 1]} {said[STEP]}"]
            lines += [(one, "heading") for one in said]
        if y < len(lines):
            yield f" {clip(lines[y][0], width - 2)}", lines[y][1]

    def _of_row(self, width: int) -> list[tuple[str, str]]:
        """Tell the marked row: the figures whose columns have no room, its remarks, what was noted on site."""
        row = self.row
        if row is None:
            return []
        shown = {head.key for head, _ in place_heads(self.heads, width + 2)}
        cells = self.cells(row)
        left = [
            f"{head.title} {cells[head.key].text}{cells[head.key].sign} {head.unit}".rstrip()
            for head in self.heads
            if head.key not in shown and head.key != "title" and cells.get(head.key, Cell()).text not in ("", NONE)
        ]
        said = [plain(remark) for remark in row.remarks]
        if row.reading is not None:
            signal = self.figures.pressure(row.measured_signal, row.density, unit=True)
            noted = (f"signal read {signal}" if row.measured_signal is not None else "", row.reading.date)
            said += [plain(text) for text in (*noted, row.reading.note) if text]
        told = [(finding.message, "warning") for finding in self.findings if finding.path[1:2] == (row.id,)]
        lines = wrapped("; ".join([*left, *said]), width)
        return [(line, "faint") for line in lines] + [
            (line, role) for text, role in told for line in wrapped(plain(text), width)
        ]

    def _on_index(self, row: Row) -> bool:
        result = self._result(row)
        return result is not None and result.index

    def _result(self, row: Row) -> SectionResult | TerminalResult | None:
        budget = self.snapshot.budget
        return budget.terminals.get(row.id) if row.kind == "terminal" else budget.sections.get(row.id)

    def _stated(self, row: Row) -> float | None:
        description = self.snapshot.description
        part = description.terminals.get(row.id) if row.kind == "terminal" else description.sections.get(row.id)
        return part.setting if part is not None else None


def _worked_out(snapshot: Snapshot, readings: bytes | None) -> tuple[Schedule, Readings | None, tuple[Located, ...]]:
    """Return the schedule of a run, the readings, and what is wrong with them."""
    description, figures = snapshot.description, Figures(snapshot.description)
    if readings is None:
        return schedule(description, snapshot.budget, figures), None, ()
    source = read_bytes(readings)
    measured = read_readings(source, description)
    found = schedule(description, snapshot.budget, figures, measured)
    return found, measured, locate((*measured.findings, *found.findings), source, description)
