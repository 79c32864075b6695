"""The screens for balancing: turning to them, and what the keys do there.

Each is imported when it is first shown: what they stand on would keep the first frame of the ledger waiting.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from budget.report.plain import plain
from budget.screens import entering
from budget.screens.actions import Place
from budget.screens.beside import Beside
from budget.screens.board import Board
from budget.screens.chooser import Choice, Offer

if TYPE_CHECKING:
    from budget.description.finding import Path
    from budget.screens.app import BudgetApp
    from budget.screens.installed import Installed


def show_balance(app: BudgetApp) -> None:
    """Show the commissioning schedule, with the readings that stand beside the run."""
    from budget.screens.balance import Balance  # noqa: PLC0415

    board = _board(app, "balance")
    if isinstance(board, Balance):
        board.read(app.document.path)
    _turn_to(app, board, "balance")


def show_installed(app: BudgetApp) -> None:
    """Show the flows as installed; they are solved beside the keyboard."""
    _turn_to(app, _board(app, "installed"), "installed")


def show_profile(app: BudgetApp) -> None:
    """Show pressure against distance along the circuit in hand: that of the terminal under the cursor, or the index."""
    board = _board(app, "profile")
    if not any(board.go_to(id_) for id_ in (_in_hand(app), *_index(app))):
        board.go(board.cursor)
    _turn_to(app, board, "profile")


def _index(app: BudgetApp) -> tuple[str, ...]:
    result = app.document.snapshot.budget.sources.get(app.ledger.source)
    return result.index if result is not None else ()


def _in_hand(app: BudgetApp) -> str:
    board = app.boards.get(app.at)
    row = app.ledger.row
    return (board.in_hand or "") if board is not None else row.id if row is not None else ""


def _turn_to(app: BudgetApp, board: Board, place: Place) -> None:
    here = _in_hand(app)
    board.show(app.ledger.view.snapshot)
    if place != "profile" and here not in app.document.snapshot.description.sources:
        board.go_to(here)
    app.turn_to(place)


def _board(app: BudgetApp, place: Place) -> Board:
    """Return the board of a place; it is made when it is first asked for."""
    if place not in app.boards:
        board = _make(app, place)
        app.boards[place] = board
        app.middle.mount(board, after=app.ledger)
    return app.boards[place]


def _make(app: BudgetApp, place: Place) -> Board:
    snapshot = app.document.snapshot

    def told() -> None:
        if app.place == place:
            app.tell()

    if place == "balance":
        from budget.screens.balance import Balance  # noqa: PLC0415

        return Balance(app.colours, snapshot, Beside(app), told)
    if place == "profile":
        from budget.screens.profile import ProfileBoard  # noqa: PLC0415

        return ProfileBoard(app.colours, snapshot)
    from budget.screens.installed import Installed  # noqa: PLC0415

    return Installed(app.colours, snapshot, Beside(app), told)


def follow(app: BudgetApp) -> None:
    """Let the ledger's cursor follow that of a board, so that detail, undo and the way back find the row."""
    board = app.boards.get(app.at)
    if board is not None and board.marked is not None:
        path = path_of(app, board.marked)
        row = app.ledger.row
        if path is not None and (row is None or row.path[:2] != path):
            app.ledger.go_to(path)


def path_of(app: BudgetApp, id_: str) -> Path | None:
    """Return the keys of a source, section or terminal."""
    description = app.document.snapshot.description
    part = description.terminals.get(id_) or description.sections.get(id_) or description.sources.get(id_)
    return part.path if part is not None else None


# Editing


def edit(app: BudgetApp) -> None:
    """Write the setting at which the device of the marked row stands on site; without a device, pick one."""
    id_ = app.boards[app.at].marked or ""
    description = app.document.snapshot.description
    part = description.terminals.get(id_) or description.sections.get(id_)
    if part is None:
        app.say("a setting belongs to a section or terminal with a device", "note")
        return
    device = description.devices.get(part.balance or "")
    if device is None:
        pick_device(app)
    elif not (device.kv or device.k):
        app.say(f"{plain(device.name)} has no table of settings; {app.keys('pick')} picks another", "note")
    else:
        entering.edit_key(app, (*part.path, "setting"))


def pick_device(app: BudgetApp) -> None:
    """Offer the devices of the run for the marked row."""
    path = path_of(app, app.boards[app.at].marked or "")
    if path is None or path[0] == "source":
        app.say("a device belongs to a section or terminal", "note")
        return
    from budget.screens import valves  # noqa: PLC0415

    valves.propose_device(app, str(path[1]))


def propose(app: BudgetApp) -> None:
    """Offer sizes for the control item of the row in hand."""
    id_ = _in_hand(app)
    if id_:
        from budget.screens import valves  # noqa: PLC0415

        valves.propose(app, id_)


def pick_circuit(app: BudgetApp) -> None:
    """Offer the terminals whose circuit can be drawn."""
    board, snapshot = app.boards["profile"], app.document.snapshot
    terminals = snapshot.description.terminals

    def choice(id_: str) -> Choice:
        sign = "index" if snapshot.budget.terminals[id_].index else ""
        return Choice((plain(id_), sign, plain(terminals[id_].title)), id_)

    def take(id_: object) -> None:
        board.go_to(str(id_))
        app.tell()

    app.offer(Offer("circuit of", ("ID", "", "title"), [choice(id_) for id_ in board.ids], take, start=board.cursor))


# As installed


def turn_devices(app: BudgetApp) -> None:
    """Put the devices open, as proposed, as stated in turn."""
    _installed(app).turn_devices()
    app.tell()


def turn_case(app: BudgetApp) -> None:
    """Go to the next case of the file."""
    if not _installed(app).turn_case():
        app.say("the run has no case; write [case.NAME] on the Text screen", "note")
        return
    app.tell()


def solve(app: BudgetApp) -> None:
    """Solve the flows anew, where that was stopped."""
    _installed(app).solve()


def stop(app: BudgetApp) -> bool:
    """Stop what is being solved; False where nothing is."""
    return app.at == "installed" and _installed(app).stop()


def _installed(app: BudgetApp) -> Installed:
    from budget.screens.installed import Installed  # noqa: PLC0415

    board = app.boards["installed"]
    if not isinstance(board, Installed):
        raise TypeError("this board has no flows")
    return board
