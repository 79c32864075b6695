"""Moving about: rows, columns, folds, search and filter, and straight to an ID, the index terminal or a finding."""

from __future__ import annotations

from typing import TYPE_CHECKING

from budget.description.finding import Level, Path
from budget.report.plain import plain
from budget.screens.chooser import Choice, Chooser, Offer
from budget.screens.entering import Entry, begin
from budget.screens.field import Field
from budget.screens.filtering import NO_FILTER, matches, read_filter, sought

if TYPE_CHECKING:
    from budget.document import Snapshot
    from budget.screens.app import BudgetApp

FILTER_GONE = "the filter was taken away"
"""Said where one goes to a row that it left out."""


def step(app: BudgetApp, rows: int) -> None:
    """Move up or down by so many rows."""
    app.front.go(app.front.cursor + rows)
    app.tell()


def page(app: BudgetApp, pages: int) -> None:
    """Move up or down by pages."""
    front = app.front
    if isinstance(front, Chooser):
        front.turn(pages)
        app.tell()
    else:
        step(app, pages * front.page)


def end(app: BudgetApp, *, last: bool) -> None:
    """Move to the first or last row."""
    app.front.go(1_000_000_000 if last else 0)
    app.tell()


def sideways(app: BudgetApp, columns: int) -> None:
    """Move to a neighbouring column."""
    app.boards.get(app.at, app.ledger).move_column(columns)
    app.tell()


def fold(app: BudgetApp) -> None:
    """Fold the branch under the cursor, or unfold it."""
    row = app.ledger.row
    if _folds_wait(app):
        return
    if row is None or not row.branch or row.kind == "item":
        app.say("nothing hangs on this row", "note")
        return
    app.ledger.fold(app.ledger.folded ^ {row.id})
    app.tell()


def fold_all(app: BudgetApp) -> None:
    """Fold every branch below the sources, or unfold everything."""
    if _folds_wait(app):
        return
    branches = frozenset(row.id for row in app.ledger.rows if row.branch and row.kind == "section")
    app.ledger.fold(frozenset() if app.ledger.folded else branches)
    app.tell()


def _folds_wait(app: BudgetApp) -> bool:
    """Say so where a filter stands, under which nothing is folded."""
    if app.ledger.filter:
        app.say(f"nothing is folded while a filter stands; {app.keys('back')} shows every row", "note")
    return bool(app.ledger.filter)


def to_index(app: BudgetApp) -> None:
    """Go to the index terminal of the source; again, to that of the other side."""
    result = app.document.snapshot.budget.sources.get(app.ledger.source)
    if result is None or not result.index:
        app.say("no index terminal can be computed", "note")
        return
    row = app.ledger.row
    here = result.index.index(row.id) if row is not None and row.id in result.index else -1
    to_id(app, result.index[(here + 1) % len(result.index)])


def to_id(app: BudgetApp, id_: str) -> bool:
    """Go to a source, section or terminal by its ID, on the ledger."""
    row = next((row for row in app.ledger.rows if row.id == id_ and row.kind != "item"), None)
    if row is None:
        app.say(f"there is no {plain(id_)} in this run", "note")
        return False
    app.turn_to("ledger")
    return reach(app, row.path)


def reach(app: BudgetApp, path: Path, column: str | None = None, said: tuple[str, str] = ("", "note")) -> bool:
    """Go to a row and say something of it, in a role; a filter that leaves it out is taken away, with a word.

    False where there is no such row.
    """
    ledger = app.ledger
    hidden = bool(ledger.filter) and all(row.path != path for row in ledger.shown)
    if hidden and any(row.path == path for row in ledger.rows):
        ledger.keep_only(NO_FILTER)
        said = (f"{FILTER_GONE}; {said[0]}" if said[0] else FILTER_GONE, said[1])
    if not ledger.go_to(path, column):
        return False
    app.tell()
    if said[0]:
        app.say(*said)
    return True


def next_source(app: BudgetApp) -> None:
    """Go to the next source."""
    ids = list(app.document.snapshot.description.sources)
    if ids:
        here = ids.index(app.ledger.source) if app.ledger.source in ids else -1
        to_id(app, ids[(here + 1) % len(ids)])


def next_finding(app: BudgetApp) -> None:
    """Go to the next row in the file of which there is something to say above a note, and say it."""
    ledger, snapshot = app.ledger, app.document.snapshot
    places = {row.id: place for place, row in enumerate(ledger.rows) if row.kind != "item"}
    found = [f for f in snapshot.findings if f.level is not Level.NOTE]
    if not found:
        app.say("there is no finding above a note", "note")
        return
    here = ledger.rows.index(ledger.row) if ledger.row in ledger.rows else -1
    placed = sorted((places[f.owner], n) for n, f in enumerate(found) if f.owner in places)
    after = next(((place, n) for place, n in placed if place > here), placed[0] if placed else None)
    if after is None:
        app.say(f"line {found[0].line}: {plain(found[0].message)}", found[0].level.value)
        return
    finding = found[after[1]]
    said = (plain(finding.message), finding.level.value)
    reach(app, ledger.rows[after[0]].path, column_of(finding.path), said)


def column_of(path: Path) -> str | None:
    """Return the column of the ledger that shows a key."""
    shown = {"bore": "size", "load": "flow", "static_drop": "drop", "limit_velocity": "velocity"}
    key = str(path[2]) if len(path) > 2 else ""
    return shown.get(key, key) or None


def search(app: BudgetApp) -> None:
    """Ask for words and go to the first row that has them, while they are typed."""
    ledger = app.ledger
    start, kept, folds = ledger.mark, ledger.filter, ledger.folded

    def put_back() -> None:
        if (ledger.filter, ledger.folded) != (kept, folds):
            ledger.folded = folds
            ledger.keep_only(kept, start)
        ledger.return_to(start)

    def attempt(text: str) -> Snapshot | None:
        app.sought = text
        put_back()
        _seek(app, 1, include_here=True)
        return None

    def take(text: str) -> None:
        app.sought = text
        if text and not _seek(app, 1, include_here=True):
            app.say(f'nothing has "{plain(text)}"', "note")
        elif ledger.filter is not kept:
            app.say(FILTER_GONE, "note")

    begin(app, Entry("search", Field(), attempt, take, light=True, undo=put_back))


def next_match(app: BudgetApp, direction: int) -> None:
    """Go to the next or the previous row that has what was sought."""
    if not app.sought:
        app.say("nothing was sought yet", "note")
    elif not _seek(app, direction, include_here=False):
        app.say(f'nothing has "{plain(app.sought)}"', "note")


def filter_rows(app: BudgetApp) -> None:
    """Ask for words and show only the rows that have them, while they are typed; no words show every row."""
    ledger = app.ledger
    start, before = ledger.mark, ledger.filter

    def attempt(text: str) -> Snapshot | None:
        ledger.keep_only(read_filter(text), start)
        return None

    def take(text: str) -> None:
        if ledger.sifted is None:
            app.say("every row is shown", "note")
        elif not ledger.sifted.matching:
            ledger.keep_only(NO_FILTER, start)
            app.say(f"no row matches {plain(text)}; every row is shown", "note")
        else:
            count = f"{ledger.sifted.matching} of {len(ledger.rows)} rows match"
            app.say(f"{count}; {app.keys('back')} shows every row", "note")

    def put_back() -> None:
        ledger.keep_only(before, start)
        ledger.return_to(start)

    begin(app, Entry("only rows with", Field.holding(before.text), attempt, take, light=True, undo=put_back))


def show_all(app: BudgetApp) -> bool:
    """Take the filter away; False where none stands."""
    if not app.ledger.filter:
        return False
    app.ledger.keep_only(NO_FILTER)
    app.tell()
    app.say("every row is shown", "note")
    return True


def go_to(app: BudgetApp) -> None:
    """Offer every ID to go to."""
    view = app.ledger.view
    rows = [row for row in app.ledger.rows if row.kind != "item"]
    choices = [
        Choice((" " * min(row.depth, 7) + plain(row.id), row.kind, view.cells(row)["title"].text), row.id)
        for row in rows
    ]
    app.offer(Offer("go to", ("ID", "kind", "title"), choices, lambda id_: _go(app, str(id_))))


def _go(app: BudgetApp, id_: str) -> None:
    to_id(app, id_)


def _seek(app: BudgetApp, direction: int, *, include_here: bool) -> bool:
    """Go to a row that has what is sought; what filters by a meaning is sought as it is written."""
    ledger = app.ledger
    rows, wanted = ledger.rows, sought(app.sought)
    if not rows or not wanted:
        return False
    here = rows.index(ledger.row) if ledger.row in rows else 0
    for offset in range(0 if include_here else 1, len(rows) + 1):
        row = rows[(here + direction * offset) % len(rows)]
        if matches(ledger.view, row, wanted):
            return reach(app, row.path)
    return False
