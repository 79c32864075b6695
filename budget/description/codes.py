"""Every finding code, its level, and what it means: a stable list."""

from __future__ import annotations

from typing import NamedTuple


class Code(NamedTuple):
    """One kind of finding."""

    level: str
    meaning: str


CODES: dict[str, Code] = {
    # the file
    "unreadable": Code("error", "The file can't be read."),
    "encoding": Code("error", "The file is not UTF-8. Save it as UTF-8 without a byte order mark."),
    "too-large": Code("error", "The file is larger than any run needs."),
    "nesting": Code("error", "Brackets or tables are nested deeper than any run needs."),
    "too-many": Code("error", "More tables, keys or elements than any run needs."),
    "too-long": Code("error", "A key or a text is longer than any run needs."),
    "long-number": Code("error", "A number or a date has more characters than can count."),
    "syntax": Code("error", "The file is not TOML 1.0; the place is where reading stopped."),
    "format": Code("error", "The first line must say which format the file has."),
    "library": Code("error", "A library that can't be read, or that lies outside the run's repository."),
    "unknown-table": Code("error", "A table that this format does not have."),
    "unknown-key": Code("error", "A key that its table does not have."),
    "unused-key": Code("warning", "A key that has no effect with this fluid."),
    "type": Code("error", "A value of another kind than the key takes."),
    "choice": Code("error", "A word that is not one of the choices."),
    "missing": Code("error", "Something that is needed is not stated."),
    "contradiction": Code("error", "Two keys, or a key and what it stands on, contradict each other."),
    "order": Code("error", "Pairs are not in rising order."),
    "control-character": Code("error", "An ID has a control or invisible character."),
    "id": Code("error", "An ID is blank or too long."),
    "duplicate-id": Code("error", "An ID stands twice; sources, sections and terminals share their IDs."),
    "later": Code("error", "A key that is read and checked, but whose effect can't be computed yet."),
    # quantities
    "not-a-quantity": Code("error", "A text that is not a number and a unit."),
    "decimal-comma": Code("error", "A decimal comma; write a point."),
    "not-finite": Code("error", "Not a number, or infinite."),
    "unknown-unit": Code("error", "A unit that is not known."),
    "wrong-dimension": Code("error", "A unit of another dimension than the key takes."),
    "range": Code("error", "A value outside what is physically possible or sensible."),
    # names
    "unknown-line": Code("error", "A pipe or duct that neither the design nor the catalogue has."),
    "unknown-size": Code("error", "A size that its pipe line does not have."),
    "size": Code("error", "A text that is not a duct size."),
    "unknown-fitting": Code("error", "A fitting that neither the design nor the catalogue has."),
    "unknown-device": Code("error", "A balancing device that the design does not have."),
    "unknown-code": Code("error", "An accepted finding code that does not exist, or that is an error."),
    # connections
    "dangling": Code("error", "An ID that does not exist."),
    "wrong-connection": Code("error", "A section or terminal hangs on something that it can't hang on."),
    "cycle": Code("error", "Sections that hang on each other in a circle."),
    "no-terminal": Code("error", "A section or source that serves no terminal."),
    "unpaired": Code("error", "A terminal returns by a section or run-out that has no return leg."),
    "paired": Code("error", "A return leg where there can be none: on a gas or on a return section."),
    "return-unused": Code("note", "A paired section whose return leg carries nothing."),
    "rise": Code("error", "A rise or outlet pressure outside an open liquid circuit."),
    "no-flow": Code("error", "A terminal without flow or load."),
    "no-difference": Code("error", "A load without a temperature difference."),
    "no-reference": Code("error", "A loss coefficient or equivalent length without a pipe or duct that it refers to."),
    "no-drop": Code("warning", "A terminal without a pressure drop of its own."),
    "diversity": Code("error", "A diversity that makes a section's flow less than its largest branch's."),
    "held-differently": Code("error", "A differential-holding device that does not enclose all that hangs on it."),
    "set-point": Code("error", "A set point below the largest circuit behind the device."),
    "fluid": Code("error", "The fluid's properties can't be computed as stated."),
    "frozen": Code("error", "The fluid is below its freezing point."),
    # judgement of results
    "near-freezing": Code("warning", "The fluid comes within 3 K of its freezing point."),
    "fluid-range": Code("warning", "Outside the range of the fluid's property formulas."),
    "velocity": Code("warning", "The velocity is above its limit."),
    "gradient": Code("warning", "The pressure gradient is above its limit."),
    "slow": Code("warning", "The velocity is below the least velocity (air removal, dirt: common practice)."),
    "transitional": Code("warning", "Reynolds number 2300 to 4000: no published friction law is reliable there."),
    "junction": Code("warning", "Legs meet and the junction is not stated: its loss is not counted."),
    "takeoff": Code("error", "A takeoff or transition that does not fit what meets there."),
    "junction-range": Code("warning", "A junction outside what its family was published for: the nearest is used."),
    "junction-gain": Code("note", "A negative junction coefficient on the index circuit: it is kept."),
    "area-change": Code("note", "Sizes differ and no transition is stated: its loss is not counted."),
    "fitting-range": Code("warning", "A fitting outside the range of its table: the nearest published value is used."),
    "fitting-method": Code("note", "A fitting that the chosen method lacks: another one is used."),
    "duct-size": Code("note", "A duct size off the standard grid."),
    "flexible": Code("warning", "Flexible duct outside 150 to 250 mm or above 30 % compression: extrapolated."),
    "nothing-in-hand": Code("warning", "The duty is above what is available."),
    "heading": Code("warning", "More is spent under a heading than its budget."),
    "leakage": Code("warning", "The ducts leak more by their class than the flow reserve covers."),
    "air-balance": Code("warning", "Supply and extract mass flows of a fan differ by more than 1 %."),
    "excess": Code("warning", "Pressure that no device takes up: the terminal is over-supplied."),
    "device-range": Code("warning", "A device outside its setting table or its range."),
    "signal": Code("warning", "A measuring signal below the least that can be read."),
    "authority": Code("warning", "A control item's authority below the limit (common practice)."),
    "authority-low": Code("note", "A control item's authority below the value to aim for (common practice)."),
    "settings-diversified": Code("note", "Settings hold for the diversified flow."),
    "reading": Code("error", "A reading from which no share of the design flow can be told."),
    "measured-flow": Code("warning", "A measured flow outside its tolerance."),
    # flows as installed
    "not-settled": Code("error", "The flows as installed did not settle: its figures are not to be relied on."),
    "flow-tolerance": Code("warning", "A terminal's flow as installed is outside the tolerance of its design flow."),
    "off-curve": Code("warning", "A pump or fan works outside the points of its curve: extrapolated."),
    "set-point-missed": Code("warning", "A pump or fan does not reach its set point at full speed."),
    "backward": Code("warning", "The flow as installed runs against the direction of design."),
    "case-idle": Code("warning", "A case asks for something that has no effect where it is stated."),
    "extract-gain": Code("warning", "An air terminal's static drop is less than its neck velocity pressure."),
    "accept-unused": Code("note", "A finding was accepted that does not occur."),
}
"""The stable list of codes. `accept` in a section or terminal turns a warning of its code into a note."""
