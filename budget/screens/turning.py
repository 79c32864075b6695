"""Turning to another screen, in the ledger's place, and what the keys do there."""

from __future__ import annotations

from typing import TYPE_CHECKING, cast

from budget.description import read_text
from budget.description.finding import Level, dotted
from budget.manual import titles
from budget.report.located import Located
from budget.report.plain import plain
from budget.screens import boards, entering, moving, recovering, saving, telling, unsaved
from budget.screens.asking import ask
from budget.screens.chooser import Choice, Chooser, Offer

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp

LEDGER_AT_LEAST = 82
"""Columns that the ledger keeps where the row detail stands beside it."""


def about(app: BudgetApp) -> tuple[str, str]:
    """Return what is to be told of the row under the cursor, with the role of its style."""
    if app.at in app.choosers:
        marked = app.choosers[app.at].marked
        if app.at == "findings" and marked is not None:
            return marked.cells[-1], marked.role
        if app.at in ("detail", "explain") and marked is not None and marked.words:
            return marked.words, "faint"
        return ("  ".join(cell.strip() for cell in marked.cells if cell.strip()), "faint") if marked else ("", "")
    if app.at in app.boards:
        return app.boards[app.at].about
    row = app.ledger.row
    if app.at != "ledger" or row is None:
        return "", ""
    view = app.ledger.view
    level = view.level(row) if row.kind != "item" else None
    if level is not None:
        found = next(f for f in view.snapshot.findings if f.owner == row.id and f.level is level)
        return plain(found.message), level.value
    title = view.cells(row)["title"].text
    return f"{plain(dotted(row.path))}  {title}", "faint"


# The row detail


def lay_out(app: BudgetApp, width: int) -> None:
    """Put the row detail beside the ledger where there is room, and take it away where there is none."""
    if app.wide and "beside" not in app.choosers:
        app.choosers["beside"] = Chooser(app.colours, "beside", passive=True)
        app.middle.mount(app.choosers["beside"])
    if app.wide:
        most = width - LEDGER_AT_LEAST
        app.beside_width = max(most - 50, min(most, 56))
        app.choosers["beside"].styles.width = app.beside_width
    app.turn_to(app.at)


def edit(app: BudgetApp) -> None:
    """Edit the cell under the cursor, or the line of the row detail."""
    if app.at == "ledger":
        entering.edit_cell(app)
        return
    if app.at in app.boards:
        boards.edit(app)
        return
    marked = app.choosers["detail"].marked
    if marked is None or not isinstance(marked.value, tuple):
        app.say("this line is computed; Enter works on the lines as written", "note")
        return
    entering.edit_key(app, marked.value)


def follow(app: BudgetApp) -> None:
    """Let what is told of the row follow the cursor, and the findings the run, where they are in view."""
    telling.follow(app)
    boards.follow(app)
    if app.at == "findings":
        app.choosers["findings"].present(_findings(app), keep=True)


# Findings


def show_findings(app: BudgetApp) -> None:
    """List what is wrong or doubtful; Enter goes to its row and cell."""
    app.chooser("findings").present(_findings(app))
    app.turn_to("findings")


def _findings(app: BudgetApp) -> Offer:
    found = app.ledger.view.snapshot.findings
    ranked = sorted(found, key=lambda finding: list(Level).index(finding.level))
    choices = [Choice((f.level.value, str(f.line), plain(f.table), plain(f.message)), f, f.level.value) for f in ranked]
    return Offer(
        "Findings", ("", "line", "where", "what"), choices, lambda value: _to_finding(app, cast("Located", value)),
        filters=False, empty="nothing is wrong or doubtful",
    )  # fmt: skip


def _to_finding(app: BudgetApp, value: Located) -> None:
    app.turn_to("ledger")
    shown = value.path[:4] if len(value.path) > 3 and value.path[2] == "item" else value.path[:2]
    said = (plain(value.message), value.level.value)
    if not moving.reach(app, shown, moving.column_of(value.path), said):
        show_text(app)
        app.text.go_to_line(value.line)
        app.tell()
        app.say(*said)


# Text and manual


def show_text(app: BudgetApp) -> None:
    """Show the file itself, to be edited."""
    app.text.read_only = bool(app.document.read_only)
    app.text.open(app.document.snapshot.text, app.ledger.row)
    app.turn_to("text")


def apply_text(app: BudgetApp) -> bool:
    """Put the text into the document, as one undo step; False, with the reason, where it is not TOML."""
    source = read_text(app.text.text)
    if source.data is None:
        line, message = source.place[0], source.findings[0].message
        app.text.go_to_line(line)
        app.say(f"line {line}: {plain(message)}", "error")
        return False
    before = app.document.snapshot
    app.document.replace_text(app.text.text, "edit the text", app.ledger.mark)
    app.text.taken()
    app.show(app.document.snapshot, before)
    app.say("the text was taken into the design")
    return True


def text_written(app: BudgetApp) -> None:
    """Have what is written on the Text screen kept."""
    unsaved.note(app)


def _forget(app: BudgetApp) -> None:
    app.text.open(app.document.snapshot.text, app.ledger.row)
    app.turn_to("ledger")


def undo_text(app: BudgetApp) -> None:
    """Undo what was typed in the text."""
    app.text.undo()


def show_manual(app: BudgetApp) -> None:
    """List the pages of the manual; Enter opens one."""

    def take(name: object) -> None:
        page = app.manual
        app.turn_to("manual")
        app.call_after_refresh(page.open, str(name))

    choices = [Choice((title, topic), topic) for topic, title in titles().items()]
    app.offer(Offer("Manual", ("", "topic"), choices, take))


def show_ledger(app: BudgetApp) -> None:
    """Show the ledger; what is written on the Text screen is taken first, as it is on the way back."""
    if app.at == "text":
        back(app)
    else:
        app.turn_to("ledger")


def back(app: BudgetApp) -> None:
    """Go back to the ledger; a changed text is taken into the design first, or thrown away where it is not TOML."""
    if app.at == "text" and app.text.changed and not apply_text(app):
        reason = app.foot.message
        ask(app, "The text is not TOML", (("throw away what was written", lambda: _forget(app)),), "mend it")
        app.say(reason, "error")
        return
    if boards.stop(app) or (app.at == "ledger" and moving.show_all(app)):
        return
    app.turn_to("ledger")


# Saving and leaving


def save(app: BudgetApp) -> None:
    """Save the run; on the Text screen, what is written there."""
    if app.at == "text" and app.text.changed and not apply_text(app):
        return
    saving.save(app)


def save_as(app: BudgetApp) -> None:
    """Save under another name."""
    saving.save_as(app)


def show_changes(app: BudgetApp) -> None:
    """Show what differs from the file on disk."""
    from budget.screens import conflict  # noqa: PLC0415 - the first frame does not wait for it

    conflict.show_changes(app)


def show_changes_since(app: BudgetApp) -> None:
    """Show what changed since a git revision."""
    from budget.screens import changes  # noqa: PLC0415 - the first frame does not wait for it

    changes.show_since_revision(app)


def recover(app: BudgetApp) -> None:
    """Look for unsaved changes of this run that were left behind."""
    recovering.look(app, asked=True)


def copy_rows(app: BudgetApp) -> None:
    """Copy the row with its branch, or the rows of the schedule."""
    from budget.screens import copying  # noqa: PLC0415 - the first frame does not wait for it

    copying.copy_rows(app)


def edit_outside(app: BudgetApp) -> None:
    """Edit the file in the user's own editor; what is written on the Text screen is taken first."""
    from budget.screens import outside  # noqa: PLC0415 - few need it, and the first frame does not wait for it

    if app.at == "text" and app.text.changed and not apply_text(app):
        return
    outside.edit_outside(app)


def leave_app(app: BudgetApp) -> None:
    """Quit; what is written on the Text screen is taken first."""
    if app.at == "text" and app.text.changed and not apply_text(app):
        return
    if app.entry is not None:
        entering.leave(app)
    saving.leave(app)


def suspend(app: BudgetApp) -> None:
    """Go to the shell, with what is unsaved kept first; `fg` comes back."""
    app.keep_now()
    app.action_suspend_process()
