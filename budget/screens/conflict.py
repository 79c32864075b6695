"""The file is not what it was when it was opened: what differs, table by table, and which version stands."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, cast

from budget.description.differences import compare
from budget.description.finding import Path, dotted
from budget.description.merging import Merge, MergeError, MergeTable, Side, merge
from budget.report.differences import difference_lines, merge_lines
from budget.report.plain import plain
from budget.screens import changes, unsaved
from budget.screens.asking import Answer, ask
from budget.screens.background import in_background
from budget.screens.chooser import Choice, Offer
from budget.storage import Look

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp

SIDES: tuple[Side, ...] = ("ours", "theirs", "base")
NAMES = {"ours": "yours", "theirs": "on disk", "base": "as it was"}
STANDINGS = {"ours": "changed by you", "theirs": "changed on disk", "same": "both alike", "both": "both differ"}


def settle(app: BudgetApp, elsewhere: Answer, save: Callable[[], object]) -> None:
    """Look at the file and ask what is to stand; `elsewhere` saves under another name, `save` saves to the file."""
    in_background(app, app.document.look, lambda seen: _settle(app, seen, elsewhere, save))


def show_changes(app: BudgetApp) -> None:
    """Show what differs from the file: where it was changed on disk too, both sides, to pick from."""
    in_background(app, app.document.look, lambda seen: _show_changes(app, seen))


def list_differences(app: BudgetApp, title: str, before: str, after: str, back: Callable[[], None]) -> None:
    """List what differs between two texts, table by table; Enter and Escape go back."""
    lines = difference_lines(compare(before, after), width=app.size.width - 2)
    offer = Offer(
        title, ("",), [Choice((line,)) for line in lines], lambda _: back(), filters=False, leave=back,
        empty="nothing differs",
    )  # fmt: skip
    app.offer(offer)


def _settle(app: BudgetApp, seen: Look, elsewhere: Answer, save: Callable[[], object]) -> None:
    document = app.document
    name = document.path.name if document.path is not None else "the file"

    def write_over() -> None:
        document.acknowledge(seen)
        save()

    def take() -> None:
        document.take_from_disk(seen, app.ledger.mark)
        _shown(app)
        app.say(f"taken from disk; {app.keys('undo')} brings back what was here before")

    app.tell_state()
    if seen.what == "same":  # it is again as it was
        save()
    elif seen.what == "gone":
        ask(app, f"{name} is gone from disk", (("write it anew", write_over), elsewhere))
    elif seen.source is None:
        ask(app, f"{name} was changed on disk and {seen.why}", (elsewhere, ("write over what is on disk", write_over)))
    else:
        ask(
            app,
            f"{name} was changed on disk since it was opened",
            (
                ("see what differs and pick table by table", lambda: pick_tables(app, seen, save)),
                elsewhere,
                ("write over what is on disk", write_over),
                ("take what is on disk; yours stays one step back", take),
            ),
        )


def _show_changes(app: BudgetApp, seen: Look) -> None:
    document = app.document
    if seen.what in ("changed", "there") and seen.source is not None and document.dirty:
        pick_tables(app, seen, lambda: app.do("save"))
        return
    known = seen.source.text if seen.source is not None else document.saved_text
    title = "Changes since the file was saved" if seen.what == "same" else "Changes against the file as it was"
    changes.show(app, title, known or "")


# Picking


def pick_tables(app: BudgetApp, seen: Look, then: Callable[[], object]) -> None:
    """List the tables that differ, with the version that is to stand; the last entry puts the picks into the run."""
    found = merge(app.document.saved_text, app.document.snapshot.text, seen.source.text if seen.source else "")
    if not found.tables:
        reason = plain(found.reason) or "the versions say the same"
        app.say(f"table by table does not work here: {reason}", "note")
        return
    _Picking(app, seen, found, then).show()


class _Picking:
    """What was picked so far."""

    def __init__(self, app: BudgetApp, seen: Look, found: Merge, then: Callable[[], object]) -> None:
        self._app, self._seen, self._found, self._then = app, seen, found, then
        self._ours = app.document.snapshot.text
        self._picks: dict[Path, Side] = {table.table: _first_pick(table) for table in found.tables}

    def show(self, start: int = 0) -> None:
        """List the tables, with the cursor on one of them."""
        choices = [
            Choice(
                (plain(dotted(table.table)) or "top of the file", STANDINGS[table.standing], NAMES[self._pick(table)]),
                table,
                "warning" if table.standing == "both" else "",
            )
            for table in self._found.tables
        ]
        choices.append(Choice(("put it together", "and save it", ""), None, "title"))
        offer = Offer(
            "What differs: Enter turns to the other version",
            ("table", "what happened", "stands"),
            choices,
            self._take,
            filters=False,
            beneath=self._beneath,
            start=start,
            leave=lambda: self._app.turn_to("ledger"),
        )
        self._app.offer(offer)

    def _pick(self, table: MergeTable) -> Side:
        return self._picks[table.table]

    def _beneath(self, value: object) -> tuple[str, ...]:
        if value is None:
            decided = sum(table.standing == "both" for table in self._found.tables)
            return (f"{decided} tables were changed on both sides, each in its own way.",) if decided else ()
        return merge_lines(cast("MergeTable", value), width=self._app.size.width - 4)

    def _take(self, value: object) -> None:
        if value is None:
            self._put_together()
            return
        table = cast("MergeTable", value)
        known = [side for side in SIDES if side != "base" or self._app.document.saved_text is not None]
        self._picks[table.table] = known[(known.index(self._pick(table)) + 1) % len(known)]
        self.show(self._found.tables.index(table))

    def _put_together(self) -> None:
        app, document = self._app, self._app.document
        if document.snapshot.text != self._ours:
            app.say("the run was changed in the meantime; look at what differs anew", "warning")
            return
        try:
            text = self._found.text(self._picks)
        except MergeError as refused:
            app.say(plain(str(refused)), "error")
            self.show()
            return
        document.acknowledge(self._seen)
        document.replace_text(text, "put together with what was on disk", app.ledger.mark)
        _shown(app)
        self._then()


def _first_pick(table: MergeTable) -> Side:
    """Return what stands until somebody picks: a change of one side, ours where both did, and nothing is dropped."""
    only_there = table.standing == "both" and table.ours is None and table.base is None
    return "theirs" if only_there or table.standing in ("theirs", "same") else "ours"


def _shown(app: BudgetApp) -> None:
    """Show what was taken in."""
    app.reload_text()
    app.show(app.document.snapshot)
    unsaved.note(app)
    app.tell()
