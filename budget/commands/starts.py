"""Small runs to start from, one a kind of circuit, as text.

`<a|b>` stands for a in an SI design and b in an IP design. The figures are our own and stand for nothing built.
"""

from __future__ import annotations

import re
import textwrap
from typing import Final, Literal

from budget.report.caution import CAUTION

Units = Literal["SI", "IP"]

FLUIDS: Final = {
    "heating": ("water", "propylene glycol", "ethylene glycol"),
    "chilled": ("water", "propylene glycol", "ethylene glycol"),
    "open": ("water", "propylene glycol", "ethylene glycol"),
    "air": ("air",),
}
"""By kind of circuit the fluids that it may hold, the usual one first."""

KINDS: Final = tuple(FLUIDS)

_CHOICE = re.compile(r"<([^|>]*)\|([^>]*)>")


def start(kind: str, fluid: str, units: Units) -> str:
    """Return the text of a small run of a kind."""
    stated = f'name = "{fluid}"'
    if fluid.endswith("glycol"):
        stated += '\nconcentration = "30 %"\nconcentration_by = "volume"'
    text = _HEAD + _RUNS[kind]
    text = text.replace("@WATER@\n", _WATER).replace(
        "@CAUTION@", textwrap.fill(CAUTION, 100, initial_indent="# ", subsequent_indent="# ")
    )
    text = text.replace("@FLUID@", stated).replace("@KIND@", kind).replace("@UNITS@", units)
    return _CHOICE.sub(r"\1" if units == "SI" else r"\2", text)


_HEAD = """\
format = 1

@CAUTION@
# Every figure below is there to be replaced. `budget manual file` names every key.

[design]
title = "Untitled @KIND@ run"
number = ""
revision = ""
units = "@UNITS@"

[fluid]
@FLUID@
"""

_WATER = """
[defaults]
pipe = "steel"
paired = true       # each section's return leg is the same again
takeoff = "none"    # the loss where legs meet is not counted; add k to a section's items where it matters

[limits]
velocity = "<1.2 m/s|4 ft/s>"
gradient = "<450 Pa/m|6 ftH2O/100ft>"

[pipe.steel]
catalogue = "<steel EN 10255 medium|steel ASME B36.10 schedule 40>"
"""

_HEATING = """\
temperature = "<70 degC|160 degF>"
return_temperature = "<50 degC|125 degF>"
@WATER@
[device."balancing valve"]    # [setting, flow coefficient], from the maker's sheet
<kv|cv> = [[0.5, <0.2|0.23>], [1, <0.4|0.46>], [2, <1.1|1.27>], [3, <2.4|2.8>], [4, <4.0|4.6>]]
least_drop = "<1 kPa|0.3 ftH2O>"

[source.P1]
title = "Heating pump"
available = "<40 kPa|14 ftH2O>"
reserve = "10 %"

[[source.P1.item]]
name = "Boiler"
drop = "<8 kPa|2.7 ftH2O>"

[section.M1]
title = "Main"
from = "P1"
size = "<DN25|NPS 1>"
length = "<12 m|40 ft>"
fittings = { "elbow 90" = 4, "gate valve" = 2 }

[section.B1]
title = "First branch"
from = "M1"
size = "<DN20|NPS 3/4>"
length = "<8 m|26 ft>"
fittings = { "elbow 90" = 2 }

[section.B2]
title = "Second branch"
from = "M1"
size = "<DN20|NPS 3/4>"
length = "<15 m|50 ft>"
fittings = { "elbow 90" = 2 }

[terminal.R1]
title = "First radiator"
from = "B1"
load = "<9 kW|30 MBH>"
drop = "<2 kPa|0.7 ftH2O>"
balance = "balancing valve"

[terminal.R2]
title = "Second radiator"
from = "B2"
load = "<8 kW|28 MBH>"
drop = "<2 kPa|0.7 ftH2O>"
balance = "balancing valve"
"""

_CHILLED = """\
temperature = "<6 degC|43 degF>"
return_temperature = "<12 degC|54 degF>"
@WATER@
[device."balancing valve"]    # [setting, flow coefficient], from the maker's sheet
<kv|cv> = [[0.5, <0.6|0.7>], [1, <1.2|1.4>], [2, <3.0|3.5>], [3, <5.6|6.5>], [4, <8.5|9.8>]]
least_drop = "<1 kPa|0.3 ftH2O>"

[source.P1]
title = "Chilled water pump"
available = "<180 kPa|60 ftH2O>"
reserve = "10 %"

[[source.P1.item]]
name = "Chiller"
drop = "<40 kPa|13 ftH2O>"

[section.M1]
title = "Main"
from = "P1"
size = "<DN40|NPS 1-1/2>"
length = "<15 m|50 ft>"
fittings = { "elbow 90" = 4, "gate valve" = 2 }

[section.B1]
title = "First branch"
from = "M1"
size = "<DN32|NPS 1-1/4>"
length = "<8 m|26 ft>"
fittings = { "elbow 90" = 2 }

[section.B2]
title = "Second branch"
from = "M1"
size = "<DN32|NPS 1-1/4>"
length = "<18 m|60 ft>"
fittings = { "elbow 90" = 2 }

[terminal.C1]
title = "First coil"
from = "B1"
load = "<16 kW|55 MBH>"
drop = "<15 kPa|5 ftH2O>"
balance = "balancing valve"

[[terminal.C1.item]]
name = "Two-port control valve"
<kv|cv> = <3.3|3.8>
control = "two-port"

[terminal.C2]
title = "Second coil"
from = "B2"
load = "<16 kW|55 MBH>"
drop = "<15 kPa|5 ftH2O>"
balance = "balancing valve"

[[terminal.C2.item]]
name = "Two-port control valve"
<kv|cv> = <3.3|3.8>
control = "two-port"
"""

_OPEN = """\
temperature = "<27 degC|80 degF>"

[defaults]
pipe = "steel"
takeoff = "none"    # the loss where legs meet is not counted; add k to a section's items where it matters

[limits]
velocity = "<2 m/s|7 ft/s>"

[pipe.steel]
catalogue = "<steel EN 10255 medium|steel ASME B36.10 schedule 40>"

[source.P1]
title = "Tower pump"
open = true         # the circuit is open to the atmosphere: heights count
available = "<200 kPa|67 ftH2O>"
reserve = "10 %"

[[source.P1.item]]
name = "Condenser"
drop = "<40 kPa|13 ftH2O>"

[section.D1]
title = "Up to the tower"
from = "P1"
size = "<DN50|NPS 2>"
length = "<20 m|65 ft>"
rise = "<6 m|20 ft>"
fittings = { "elbow 90" = 4, "gate valve" = 1 }

[section.S1]
title = "Suction from the basin"
to = "P1"
size = "<DN65|NPS 2-1/2>"
length = "<6 m|20 ft>"
rise = "<-2 m|-6 ft>"
fittings = { "elbow 90" = 2, "gate valve" = 1 }

[terminal.CT1]
title = "Spray header"
from = "D1"
to = "S1"
flow = "<3 L/s|48 gpm>"
rise = "<1.5 m|5 ft>"       # from the end of D1 to the nozzles
outlet_pressure = "<25 kPa|8 ftH2O>"    # gauge pressure that the nozzles need
"""

_AIR = """\
temperature = "<18 degC|65 degF>"

[defaults]
duct = "sheet"
takeoff = "none"    # the loss where legs meet is not counted; add k to a section's items where it matters

[limits]
velocity = "<6 m/s|1200 fpm>"

[duct.sheet]
catalogue = "galvanised steel"

[device.damper]     # [blade angle, loss coefficient], from the maker's sheet
k = [[0, 0.2], [15, 0.8], [30, 3.5], [45, 15], [60, 80]]

[source.F1]
title = "Supply fan"
available = "<300 Pa|1.2 inH2O>"
reserve = "10 %"

[[source.F1.item]]
name = "Filter"
clean = "<60 Pa|0.25 inH2O>"
final = "<160 Pa|0.65 inH2O>"
inside = true       # inside the air handling unit: not external pressure

[section.D1]
title = "Main duct"
from = "F1"
size = "<400x250|16x10>"
length = "<8 m|26 ft>"

[[section.D1.item]]
name = "Two bends"
k = 0.5             # both together, from a table of one's own

[section.D2]
title = "First branch"
from = "D1"
size = "<250 mm|10 in>"
length = "<4 m|13 ft>"

[section.D3]
title = "Second branch"
from = "D1"
size = "<250 mm|10 in>"
length = "<12 m|40 ft>"

[terminal.A1]
title = "First diffuser"
from = "D2"
flow = "<200 L/s|420 cfm>"
drop = "<25 Pa|0.1 inH2O>"
balance = "damper"

[terminal.A2]
title = "Second diffuser"
from = "D3"
flow = "<200 L/s|420 cfm>"
drop = "<25 Pa|0.1 inH2O>"
balance = "damper"
"""

_RUNS: Final = {"heating": _HEATING, "chilled": _CHILLED, "open": _OPEN, "air": _AIR}
