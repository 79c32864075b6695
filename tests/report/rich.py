"""Runs that hold every form in which something can be stated, for what explains them."""

RICH = """\
format = 1

[design]
title = "Every form, liquid"
units = "SI"

[fluid]
name = "propylene glycol"
concentration = "30 %"
concentration_by = "volume"
temperature = "7 degC"
return_temperature = "13 degC"

[defaults]
pipe = "steel"
paired = true

[pipe.steel]
catalogue = "steel EN 10255 medium"

[pipe.own]
roughness = "0.3 mm"
sizes = { "A" = "22 mm" }
source = "measured on site"

[device.V1]
kv = [[1, 0.05], [2, 0.6], [3, 2.4], [4, 5.0]]
signal_kv = 4.0
source = "maker's sheet"

[device.PIV]
holds = "flow"
least_drop = "15 kPa"
greatest_drop = "300 kPa"

[device.DPV]
holds = "differential"
set_point = "60 kPa"
least_drop = "8 kPa"

[source.P1]
title = "Pump {0}"
available = "400 kPa"
reserve = "10 %"
flow_reserve = "5 %"
efficiency = 0.6
motor_efficiency = 0.9

[[source.P1.item]]
name = "Chiller"
drop = "30 kPa"
at = "1.2 L/s"
exponent = 1.9
parallel = 2
tested_density = "1000 kg/m3"

[[source.P1.item]]
name = "Strainer"
kv = 40
parallel = 2

[section.M1]
from = "P1"
size = "DN40"
length = "14.5 m"
fittings = { "elbow 90" = 4 }
fitting_method = "hooper"
diversity = 0.9

[[section.M1.item]]
name = "Meter"
k = 4.5
parallel = 2

[[section.M1.item]]
name = "Hose"
equivalent_length = "6 m"

[section.B1]
from = "M1"
size = "DN32"
length = "6 m"
takeoff = "straight"
transition = "abrupt"
fittings = { "elbow 90" = 2, "gate valve" = 1 }
fitting_method = "darby"
balance = "DPV"

[section.B2]
from = "M1"
pipe = "own"
size = "A"
length = "8 m"
takeoff = "branch"
junction = "tee-idelchik"
angle = 60
transition = 30
balance = "V1"

[[section.B2.fitting]]
kind = "bend"
radius_ratio = 1.5
count = 2

[section.C2]
to = "M1"
size = "DN20"
length = "9 m"
takeoff = "branch"
transition = "abrupt"

[terminal.T1]
from = "B1"
flow = "0.25 L/s"
drop = "14 kPa"
at = "0.3 L/s"
exponent = 1.8
size = "DN20"
length = "6.2 m"
balance = "V1"
takeoff = "branch"

[[terminal.T1.item]]
name = "Control valve"
kv = 1.6
control = "two-port"

[terminal.T2]
from = "B1"
load = "6 kW"
return_temperature = "12 degC"
drop = "1.2 m"
size = "DN20"
length = "2 m"
takeoff = "straight"
balance = "V1"

[[terminal.T2.item]]
name = "Three-port valve"
kv = 4
control = "three-port"

[terminal.T3]
from = "B2"
to = "C2"
flow = "0.15 kg/s"
drop = "11 kPa"
balance = "PIV"

[terminal.T4]
from = "B2"
to = "C2"
flow = "0.003 L/s"
drop = "1 kPa"
size = "DN15"
length = "20 m"
"""
"""A closed liquid circuit; its flows are laminar, between the two and turbulent."""

RICH_AIR = """\
format = 1

[design]
units = "IP"

[fluid]
name = "air"
temperature = "65 degF"
return_temperature = "75 degF"
altitude = "1200 ft"

[defaults]
duct = "sheet"
takeoff = "none"

[duct.sheet]
catalogue = "galvanised steel"

[duct.rough]
catalogue = "galvanised steel"
roughness = "0.01 in"

[duct.flex]
catalogue = "flexible"
compression = "10 %"

[device.D1]
k = [[0, 0.2], [30, 4.0], [60, 90.0]]
least_drop = 0.02

[source.SF]
outlet = "16x12"
available = "3 inH2O"
reserve = "5 %"
flow_reserve = "8 %"
efficiency = "60 %"
motor_efficiency = "90 %"

[[source.SF.item]]
name = "Filter"
clean = "0.25 inH2O"
final = "0.65 inH2O"
inside = true

[[source.SF.item]]
name = "Coil"
clean = "0.1 inH2O"
final = "0.2 inH2O"
state = "final"
at = "700 cfm"
exponent = 1.8

[section.S1]
from = "SF"
size = "16x8"
length = "30 ft"
leakage = "ATC 3"

[[section.S1.fitting]]
kind = "elbow mitred"
count = 2
plane = "width"

[section.S2]
from = "S1"
size = "oval 14x8"
length = "12 ft"
takeoff = "straight"
transition = 30

[[section.S2.item]]
name = "Attenuator"
k = 1.5

[section.X1]
to = "SF"
duct = "rough"
size = "16x8"
length = "9 ft"
leakage = "ATC 4"

[terminal.G1]
from = "S2"
flow = "320 cfm"
static_drop = "0.07 inH2O"
at = "300 cfm"
neck = "10 in"
balance = "D1"

[[terminal.G1.item]]
name = "Damper plate"
k = 2

[terminal.G2]
from = "S1"
flow = "300 cfm"
drop = "0.06 inH2O"
duct = "flex"
size = "8 in"
length = "6 ft"
balance = "D1"
takeoff = "branch"

[terminal.L1]
to = "X1"
static_drop = "-0.2 inH2O"
neck = "16x12"
"""
"""A fan in IP units, with ducts of every shape."""

RICH_OPEN = """\
format = 1

[display]
pressure = "m"
flow = "kg/h"

[fluid]
name = "water"
temperature = "27 degC"

[defaults]
pipe = "steel"
takeoff = "none"

[pipe.steel]
catalogue = "steel EN 10255 medium"

[source.P1]
open = true
available = "20 m"
reserve = "10 %"

[section.D1]
from = "P1"
size = "DN50"
length = "20 m"
rise = "6 m"

[section.S1]
to = "P1"
size = "DN65"
length = "6 m"
rise = "-2 m"

[section.S2]
to = "S1"
size = "DN65"
length = "2 m"

[terminal.CT1]
from = "D1"
to = "S2"
flow = "3 L/s"
rise = "1.5 m"
outlet_pressure = "25 kPa"
"""
"""An open circuit whose pressures are shown as heads and whose flows by mass."""
