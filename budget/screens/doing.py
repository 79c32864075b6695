"""What each action does: one line from its name to the function."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from functools import partial
from typing import TYPE_CHECKING

from budget.screens import boards, changing, choosing, entering, fitting_form, moving, shaping, telling, turning

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp

Doing = Callable[["BudgetApp"], object]

DOINGS: Mapping[str, Doing] = {
    "up": lambda app: moving.step(app, -1),
    "down": lambda app: moving.step(app, 1),
    "left": lambda app: moving.sideways(app, -1),
    "right": lambda app: moving.sideways(app, 1),
    "page_up": lambda app: moving.page(app, -1),
    "page_down": lambda app: moving.page(app, 1),
    "first": partial(moving.end, last=False),
    "last": partial(moving.end, last=True),
    "fold": moving.fold,
    "fold_all": moving.fold_all,
    "search": moving.search,
    "next_match": lambda app: moving.next_match(app, 1),
    "previous_match": lambda app: moving.next_match(app, -1),
    "go_to": moving.go_to,
    "go_to_index": moving.to_index,
    "next_finding": moving.next_finding,
    "next_source": moving.next_source,
    "edit": turning.edit,
    "next_cell": lambda app: entering.next_cell(app, 1),
    "previous_cell": lambda app: entering.next_cell(app, -1),
    "set": entering.set_key,
    "rename": entering.rename,
    "accept": lambda app: fitting_form.enter(app) if app.at == "form" else entering.accept(app),
    "accept_next": lambda app: entering.accept_and_move(app, 1),
    "accept_previous": lambda app: entering.accept_and_move(app, -1),
    "leave": choosing.leave,
    "pick": choosing.pick,
    "pick_size": lambda app: choosing.pick_key(app, "size"),
    "pick_fitting": lambda app: choosing.pick_key(app, "fittings"),
    "pick_takeoff": lambda app: choosing.pick_key(app, "takeoff"),
    "pick_family": lambda app: choosing.pick_key(app, "junction"),
    "pick_transition": lambda app: choosing.pick_key(app, "transition"),
    "next_field": lambda app: choosing.next_field(app, 1),
    "previous_field": lambda app: choosing.next_field(app, -1),
    "pick_instead": choosing.pick_instead,
    "choose": choosing.choose,
    "add_after": lambda app: changing.reshape(app, shaping.add_section, "after"),
    "add_before": lambda app: changing.reshape(app, shaping.add_section, "before"),
    "add_beneath": lambda app: changing.reshape(app, shaping.add_section, "beneath"),
    "add_terminal": lambda app: changing.reshape(app, shaping.add_terminal),
    "duplicate": lambda app: changing.reshape(app, shaping.duplicate),
    "move": changing.move,
    "earlier": lambda app: changing.reshape(app, shaping.shift, -1),
    "later": lambda app: changing.reshape(app, shaping.shift, 1),
    "delete": lambda app: changing.reshape(app, shaping.delete),
    "undo": changing.undo,
    "redo": changing.redo,
    "save": turning.save,
    "save_as": turning.save_as,
    "show_changes": turning.show_changes,
    "recover": turning.recover,
    "edit_outside": turning.edit_outside,
    "show_ledger": turning.show_ledger,
    "show_detail": telling.show_detail,
    "explain": telling.show_explain,
    "show_findings": turning.show_findings,
    "show_balance": boards.show_balance,
    "show_installed": boards.show_installed,
    "show_profile": boards.show_profile,
    "propose_kv": boards.propose,
    "turn_devices": boards.turn_devices,
    "turn_case": boards.turn_case,
    "solve": boards.solve,
    "pick_circuit": boards.pick_circuit,
    "show_text": turning.show_text,
    "show_manual": turning.show_manual,
    "commands": choosing.show_commands,
    "back": turning.back,
    "apply_text": turning.apply_text,
    "undo_text": turning.undo_text,
    "suspend": turning.suspend,
    "quit": turning.leave_app,
}
