"""What the hands can do: every action with its name, its keys and the places where it works.

The table is the whole of it: the footer, the command list, the key bindings of the config and the manual read it.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

Place = Literal[
    "ledger", "detail", "explain", "findings", "balance", "installed", "profile", "manual", "text", "list",
    "form", "entry",
]  # fmt: skip
"""Where the hands are: a screen, a list to pick from, a form to fill in, or a field that is being written in."""

BOARDS: tuple[Place, ...] = ("balance", "installed", "profile")
"""Screens for balancing, with rows of their own."""

SCREENS: tuple[Place, ...] = ("ledger", "detail", "explain", "findings", *BOARDS, "manual")
"""Screens on which a letter is a command."""

EVERYWHERE: tuple[Place, ...] = (*SCREENS, "text")


@dataclass(frozen=True, slots=True)
class Action:
    """One thing that can be done: its name in the config, what it says, its keys, where, and its rank in the footer."""

    id: str
    title: str
    keys: tuple[str, ...]
    places: tuple[Place, ...] = ("ledger",)
    short: str = ""
    """The word that the footer shows."""
    rank: int = 99
    """Place in the footer, the first six are shown; 99 is never shown."""


_PICKS: tuple[Place, ...] = ("ledger", "detail", "findings", "balance", "installed")
_LISTS: tuple[Place, ...] = ("ledger", "detail", "explain", "findings", *BOARDS, "list")
_STEPS: tuple[Place, ...] = ("ledger", "detail", "explain", "findings", *BOARDS)
_ROWS: tuple[Place, ...] = ("balance", "installed")

ACTIONS: tuple[Action, ...] = (
    Action("up", "Move up", ("up",), _LISTS),
    Action("down", "Move down", ("down",), _LISTS),
    Action("left", "Move to the left, or back along a profile", ("left",), ("ledger", "profile"), "before"),
    Action("right", "Move to the right, or along a profile", ("right",), ("ledger", "profile"), "next"),
    Action("page_up", "Move up a page", ("pageup",), _LISTS),
    Action("page_down", "Move down a page", ("pagedown",), _LISTS),
    Action("first", "Move to the first row", ("home",), _LISTS),
    Action("last", "Move to the last row", ("end",), _LISTS),
    Action("edit", "Edit the cell, or the setting of a device", ("enter",), ("ledger", "detail", *_ROWS), "edit", 1),
    Action("next_cell", "Move to the next cell that can be edited", ("tab",)),
    Action("previous_cell", "Move to the cell before that can be edited", ("shift+tab",)),
    Action("set", "Set a key of the row, in words of the file", ("equals_sign",), ("ledger", "detail"), "set key"),
    Action("pick", "Pick from a list for the cell, or for the key of a finding", ("p",), _PICKS, "pick", 3),
    Action("pick_size", "Pick a size", ("s",), ("ledger", "detail")),
    Action("pick_fitting", "Pick fittings, count them, change or remove them", ("f",), ("ledger", "detail")),
    Action("pick_takeoff", "Pick what it is at its junction", ("y",), ("ledger", "detail")),
    Action("pick_family", "Pick the family of its junction", (), ("ledger", "detail")),
    Action("pick_transition", "Pick the change of area at its junction", ("w",), ("ledger", "detail")),
    Action("add_after", "Add a section after this one", ("a",), short="add", rank=2),
    Action("add_before", "Add a section before this one", ("b",)),
    Action("add_beneath", "Add a section beneath this one", ("c",)),
    Action("add_terminal", "Add a terminal", ("t",), short="terminal", rank=4),
    Action("duplicate", "Duplicate the branch with new IDs", ("d",)),
    Action("move", "Hang the branch on another section", ("m",)),
    Action("earlier", "Move the branch up among its neighbours", ("shift+up", "left_square_bracket")),
    Action("later", "Move the branch down among its neighbours", ("shift+down", "right_square_bracket")),
    Action("delete", "Delete the row with what hangs on it", ("x", "delete")),
    Action("rename", "Rename the ID, everywhere", ("r",)),
    Action("fold", "Fold or unfold the branch", ("space",)),
    Action("fold_all", "Fold or unfold every branch", ("z",)),
    Action("undo", "Undo", ("u",), _STEPS, "undo", 5),
    Action("redo", "Redo", ("U", "ctrl+r"), _STEPS),
    Action("search", "Search the ledger", ("slash",), short="search"),
    Action("next_match", "Next match", ("n",)),
    Action("previous_match", "Match before", ("N",)),
    Action("filter", "Show only rows with these words", ("W",), short="filter"),
    Action("copy_rows", "Copy the row with its branch, or the schedule", ("C",), ("ledger", "balance"), "copy"),
    Action("go_to", "Go to an ID", ("g",), _STEPS),
    Action("go_to_index", "Go to the index terminal", ("i",)),
    Action("next_finding", "Go to the next finding", ("e",)),
    Action("next_source", "Switch to the next source", ("P",)),
    Action("show_ledger", "Ledger", ("f2",), EVERYWHERE),
    Action("show_detail", "Row detail", ("v", "f3"), ("ledger", "explain", "findings", *_ROWS), "detail"),
    Action("explain", "Explain the figures of the row", ("E", "f6"), ("ledger", "detail", *_ROWS), "explain"),
    Action("show_findings", "Findings", ("F", "f4"), ("ledger", "detail", "explain", *BOARDS, "manual"), "findings"),
    Action("show_balance", "Balance: what is set where, and what was measured", ("B", "f7"), SCREENS, "balance"),
    Action("show_installed", "As installed: the flows really driven", ("I", "f8"), SCREENS, "as installed"),
    Action("show_profile", "Profile: pressure along a circuit", ("L",), SCREENS, "profile"),
    Action("propose_kv", "Pick a Kv by the authority", ("K",), ("ledger", "detail", *_ROWS), "Kv"),
    Action("turn_devices", "Put the devices open, as proposed, rounded, as stated", ("o",), ("installed",), "devices"),
    Action("turn_case", "Solve for the next case", ("c",), ("installed",), "case"),
    Action("solve", "Solve anew", ("r",), ("installed",)),
    Action("pick_circuit", "Pick the circuit that is drawn", ("enter", "p"), ("profile",), "circuit"),
    Action("show_text", "Text", ("T", "f5"), SCREENS),
    Action("show_manual", "Manual", ("question_mark", "f1"), SCREENS),
    Action("commands", "Command list", ("colon", "ctrl+p"), EVERYWHERE, "commands", 6),
    Action("back", "Back to the ledger", ("escape",), EVERYWHERE, "back"),
    Action("save", "Save", ("ctrl+s",), EVERYWHERE, "save"),
    Action("save_as", "Save under another name", (), SCREENS),
    Action("open_other", "Open another run", ("ctrl+t",), EVERYWHERE, "open"),
    Action("show_changes", "Changes against the file on disk", ("D",), SCREENS, "changes"),
    Action("show_changes_since", "Changes since a git revision", (), SCREENS),
    Action("recover", "Recover unsaved changes", (), SCREENS),
    Action("edit_outside", "Edit the file in your own editor", ("ctrl+o",), EVERYWHERE, "editor"),
    Action("suspend", "Suspend to the shell", ("ctrl+z",), SCREENS),
    Action("quit", "Quit", ("ctrl+q",), (*EVERYWHERE, "list", "form", "entry")),
    Action("choose", "Take what is marked", ("enter",), ("list", "findings"), "take", 1),
    Action("leave", "Leave things as they were", ("escape", "ctrl+c"), ("list", "form", "entry"), "leave", 3),
    Action("accept", "Enter what is written", ("enter",), ("form", "entry"), "take", 1),
    Action("accept_next", "Enter it and edit the next cell", ("tab",), ("entry",), "next cell", 2),
    Action("accept_previous", "Enter it and edit the cell before", ("shift+tab",), ("entry",)),
    Action("pick_instead", "Pick from a list instead", ("down",), ("entry",), "pick"),
    Action("next_field", "Write the next value", ("tab", "down"), ("form",), "next"),
    Action("previous_field", "Write the value before", ("shift+tab", "up"), ("form",)),
    Action("apply_text", "Put the text into the design", ("ctrl+e",), ("text",), "apply", 1),
    Action("undo_text", "Undo in the text", ("ctrl+z",), ("text",)),
)

BY_ID: Mapping[str, Action] = {action.id: action for action in ACTIONS}

CHANGING = frozenset({
    "edit", "set", "pick", "pick_size", "pick_fitting", "pick_takeoff", "pick_family", "pick_transition", "add_after",
    "add_before", "add_beneath", "add_terminal", "duplicate", "move", "earlier", "later", "delete", "rename",
    "propose_kv", "apply_text", "edit_outside", "undo", "redo", "recover",
})  # fmt: skip
"""What changes the run, and is refused where that is open read-only."""

LETTERS: Mapping[str, str] = {"h": "left", "j": "down", "k": "up", "l": "right"}
"""Letters for movement, where the config asks for them."""

FOOTER: Mapping[Place, tuple[str, ...]] = {
    "ledger": ("edit", "add_after", "add_terminal", "undo", "save", "commands"),
    "detail": ("edit", "pick", "explain", "undo", "back", "commands"),
    "explain": ("show_detail", "undo", "back", "commands"),
    "findings": ("choose", "pick", "show_detail", "undo", "back", "commands"),
    "balance": ("edit", "pick", "propose_kv", "show_installed", "undo", "back"),
    "installed": ("turn_devices", "turn_case", "edit", "show_balance", "undo", "back"),
    "profile": ("pick_circuit", "right", "left", "undo", "back", "commands"),
    "manual": ("back", "show_findings", "commands"),
    "text": ("apply_text", "save", "back", "commands"),
    "list": ("choose", "leave"),
    "form": ("accept", "next_field", "leave"),
    "entry": ("accept", "accept_next", "leave", "pick_instead"),
}
"""What the footer shows at each place, in order of use; six at most."""
