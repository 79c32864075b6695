"""Small runs without a finding, on which faults are tried."""

SOUND = """\
format = 1

[design]
title = "Test bench"
units = "SI"

[display]
flow = "L/s"

[fluid]
name = "water"
temperature = "70 degC"
return_temperature = "55 degC"

[defaults]
pipe = "steel"
paired = true
takeoff = "none"

[limits]
velocity = "1.5 m/s"
gradient = "500 Pa/m"
velocity_by_bore = [["20 mm", "0.9 m/s"], ["50 mm", "1.2 m/s"]]
branch = { velocity = "1.1 m/s" }
authority = 0.1
authority_note = 0.15

[budget]
plant = "40 kPa"

[pipe.steel]
catalogue = "steel EN 10255 medium"

[pipe.own]
roughness = "0.01 mm"
sizes = { "A" = "22 mm", "B" = "28 mm" }

[duct.sheet]
catalogue = "galvanised steel"

[fitting."swing joint"]
k = 0.75

[device.V1]
kv = [[1, 0.05], [2, 0.6], [3, 2.4]]

[device.H1]
holds = "differential"
set_point = "40 kPa"
least_drop = "8 kPa"

[device.F1]
holds = "flow"
least_drop = "12 kPa"
greatest_drop = "400 kPa"

[source.P1]
title = "Pump"
available = "150 kPa"
reserve = "10 %"
efficiency = 0.6
curve = [["0 L/s", "80 kPa"], ["2 L/s", "60 kPa"]]

[[source.P1.item]]
name = "Boiler"
drop = "12 kPa"

[section.M1]
from = "P1"
size = "DN32"
length = "14.5 m"
fittings = { "elbow 90" = 4, "swing joint" = 1 }

[[section.M1.item]]
name = "Strainer"
kv = 21.0

[section.B1]
from = "M1"
size = "DN25"
length = "6 m"

[section.B2]
from = "M1"
pipe = "own"
size = "B"
length = "8 m"
paired = false

[section.C2]
to = "M1"
size = "DN25"
length = "9 m"

[terminal.T1]
from = "B1"
flow = "0.12 L/s"
drop = "14 kPa"
size = "DN20"
length = "6.2 m"
balance = "V1"

[[terminal.T1.item]]
name = "Control valve"
kv = 1.6
control = "two-port"

[terminal.T2]
from = "B1"
load = "6 kW"
drop = "9 kPa"
balance = "V1"

[terminal.T3]
from = "B2"
to = "C2"
flow = "0.15 L/s"
drop = "11 kPa"
balance = "F1"
"""
"""A small heating run without a finding."""

SOUND_AIR = """\
format = 1

[fluid]
name = "air"
temperature = "18 degC"

[defaults]
duct = "sheet"
takeoff = "none"

[duct.sheet]
catalogue = "galvanised steel"

[duct.flex]
catalogue = "flexible"

[device.D1]
k = [[0, 0.2], [30, 4.0], [60, 90.0]]

[source.SF]
outlet = "400x300"
available = "200 Pa"

[section.S1]
from = "SF"
size = "400x200"
length = "9 m"

[section.X1]
to = "SF"
size = "400x200"
length = "3 m"

[terminal.G1]
from = "S1"
flow = "150 L/s"
static_drop = "18 Pa"
neck = "250 mm"
balance = "D1"

[terminal.G2]
from = "S1"
flow = "140 L/s"
drop = "15 Pa"
duct = "flex"
size = "200 mm"
length = "2 m"
balance = "D1"

[terminal.L1]
to = "X1"
drop = "30 Pa"
"""
"""A small air run without a finding."""

SOUND_OPEN = (
    SOUND.replace('title = "Pump"', "open = true")
    .replace("paired = true\n", "")
    .replace("paired = false\n", "")
    .replace('to = "M1"', 'to = "P1"')
)
"""The same run as an open circuit, where rises count."""
