"""Faults of a run's file: what is changed in a sound file, what is found, where it points, which remedy it names."""

from __future__ import annotations

from dataclasses import dataclass
from functools import partial

from tests.description.sound import SOUND, SOUND_AIR


@dataclass(frozen=True, slots=True)
class Fault:
    """A change from `old` to `new`, and the finding that it makes: in `table` at `key`, pointing at the text `at`."""

    name: str
    old: str
    new: str
    code: str
    table: str
    key: str
    at: str
    remedy: str
    level: str = "error"
    base: str = SOUND

    @property
    def text(self) -> str:
        """The faulty file."""
        assert self.old in self.base, self.name
        return self.base.replace(self.old, self.new, 1)


_air = partial(Fault, base=SOUND_AIR)


STRAINER, CONTROL = "kv = 21.0", 'control = "two-port"'
B1, M1, T2 = 'length = "6 m"', 'length = "14.5 m"', 'load = "6 kW"'
PIPE = "[pipe.steel]"
V1 = "kv = [[1, 0.05], [2, 0.6], [3, 2.4]]"

KEYS = (
    Fault("table", "[fluid]", "[flud]", "unknown-table", "flud", "", "flud]", "mean 'fluid'"),
    Fault("top", "format = 1", "format = 1\nversion = 2", "unknown-key", "version", "", "2\n\n[des", "did you mean"),
    Fault("design", 'title = "Test', 'titel = "Test', "unknown-key", "design", "titel", '"Test bench"', "mean 'title'"),
    Fault(
        "display", 'flow = "L/s"', 'flows = "L/s"', "unknown-key", "display", "flows", '"L/s"\n\n[fluid', "mean 'flow'"
    ),
    Fault("fluid", "name", "nome", "unknown-key", "fluid", "nome", '"water"', "mean 'name'"),
    Fault("defaults", "takeoff", "takeof", "unknown-key", "defaults", "takeof", '"none"', "mean 'takeoff'"),
    Fault("limits", "gradient", "gradients", "unknown-key", "limits", "gradients", '"500 Pa/m"', "mean 'gradient'"),
    Fault("class", "{ velocity", "{ speed", "unknown-key", "limits", "branch.speed", '"1.1 m/s"', "known are velocity"),
    Fault("budget", "plant", "plants", "unknown-key", "budget", "plants", '"40 kPa"\n\n[pipe', "mean 'plant'"),
    Fault("pipe", "roughness", "rougness", "unknown-key", "pipe.own", "rougness", '"0.01 mm"', "mean 'roughness'"),
    Fault("duct", "[duct.sheet]", "[duct.sheet]\nk = 1", "unknown-key", "duct.sheet", "k", "1\ncatalogue", "known are"),
    Fault(
        "fitting",
        "k = 0.75",
        "k = 0.75\nkind = 1",
        "unknown-key",
        'fitting."swing joint"',
        "kind",
        "1\n\n[device.V1",
        "k",
    ),
    Fault("device", "greatest_drop", "greatest_drops", "unknown-key", "device.F1", "greatest_drops", '"400', "mean"),
    Fault("source", "eff", "ef", "unknown-key", "source.P1", "eficiency", "0.6\n", "mean 'efficiency'"),
    Fault("section", M1, M1.replace("gt", "tg"), "unknown-key", "section.M1", "lentgh", '"14.5 m"', "mean 'length'"),
    Fault("terminal", T2, "lode" + T2[4:], "unknown-key", "terminal.T2", "lode", '"6 kW"', "mean 'load'"),
    Fault("item", STRAINER, "kvs = 21.0", "unknown-key", "section.M1", "item.0.kvs", "21.0", "mean 'kv'"),
    Fault("link", PIPE, "[link.L]\nform = 1\n" + PIPE, "unknown-key", "link.L", "form", "1\n[pipe", "mean 'from'"),
    Fault("case", PIPE, "[case.C]\nof = []\n" + PIPE, "unknown-key", "case.C", "of", "[]", "mean 'off'"),
    Fault("sizing", PIPE, "[sizing]\nhigh = 1\n" + PIPE, "unknown-key", "sizing", "high", "1\n[pipe", "mean 'height'"),
    Fault("format", "format = 1", "format = 2", "format", "format", "", "2\n\n[design", "write format = 1"),
    Fault("unstated", "format = 1\n", "", "format", "", "", "\n[design]", "write format = 1 as the first line"),
    Fault(
        "late",
        "format = 1\n\n[design]",
        "library = []\nformat = 1\n[design]",
        "format",
        "format",
        "",
        "1\n[design",
        "move it up",
    ),
)
"""Keys and tables that the format does not have."""

TYPES = (
    Fault("title", '"Test bench"', "5", "type", "design", "title", "5\nunits", 'write "5" in quotes'),
    Fault("display", 'flow = "L/s"', "flow = 3", "type", "display", "flow", "3\n\n[fluid", "in quotes"),
    Fault("name", '"water"', '["water"]', "type", "fluid", "name", '["water"]', "write a text in quotes"),
    Fault("paired", "paired = true", 'paired = "yes"', "type", "defaults", "paired", '"yes"', "true or false without"),
    Fault("class", '{ velocity = "1.1 m/s" }', "1.1", "type", "limits", "branch", "1.1\nauth", "write [limits.branch]"),
    Fault("budget", '"40 kPa"\n\n[pipe', "[40]\n\n[pipe", "type", "budget", "plant", "[40]", 'such as "1 kPa"'),
    Fault(
        "sizes", '{ "A" = "22 mm", "B" = "28 mm" }', '"B"', "type", "pipe.own", "sizes", '"B"\n\n[duct', "name = value"
    ),
    Fault(
        "line",
        '[duct.sheet]\ncatalogue = "gal',
        '[duct]\nsheet = "gal',
        "type",
        "duct.sheet",
        "",
        '"gal',
        "[duct.sheet]",
    ),
    Fault("k", "k = 0.75", 'k = "0.75"', "type", 'fitting."swing joint"', "k", '"0.75"', "write 0.75 without quotes"),
    Fault("table", V1, "kv = 2.4", "type", "device.V1", "kv", "2.4", "write [[1, 2], [3, 4]]"),
    Fault("pair", "[1, 0.05]", "[1]", "type", "device.V1", "kv.0", "[1], ", "write [1, 2]"),
    Fault("no pairs", V1, "kv = []", "type", "device.V1", "kv", "[]", "write [[1, 2], [3, 4]]"),
    Fault(
        "item",
        "[[source.P1.item]]",
        "[source.P1.item]",
        "type",
        "source.P1",
        "item",
        "item]\nname",
        "[[source.P1.item]]",
    ),
    Fault("running", "reserve", "running = 1.5\nreserve", "type", "source.P1", "running", "1.5\nres", "write 2"),
    Fault(
        "count",
        '"elbow 90" = 4',
        '"elbow 90" = true',
        "type",
        "section.M1",
        'fittings."elbow 90"',
        "true, ",
        "such as 2",
    ),
    Fault("size", '"DN32"', "[32]", "type", "section.M1", "size", "[32]", '"DN40"'),
    Fault("flow", '"0.12 L/s"', "2020-01-01", "type", "terminal.T1", "flow", "2020", 'such as "1 L/s"'),
    Fault(
        "entry", "[section.B1]", '[section]\nB0 = "x"\n[section.B1]', "type", "section.B0", "", '"x"', "[section.B0]"
    ),
    Fault("off", PIPE, '[case.C]\noff = "T1"\n' + PIPE, "type", "case.C", "off", '"T1"', 'write ["A", "B"]'),
    Fault("library", "format = 1", 'format = 1\nlibrary = "a"', "type", "library", "", '"a"', 'write ["../office'),
    Fault("link", PIPE, "[link.L]\nfrom = 1\n" + PIPE, "type", "link.L", "from", "1\n[pipe", "in quotes"),
    Fault(
        "sizing", PIPE, '[sizing]\naspect = "4"\n' + PIPE, "type", "sizing", "aspect", '"4"', "write 4 without quotes"
    ),
)
"""Values of another kind than the key takes."""

QUANTITIES = (
    Fault("fluid", '"70 degC"', '"70 kPa"', "wrong-dimension", "fluid", "temperature", '"70 kPa"', "degC, degF or K"),
    Fault("limits", '"1.5 m/s"', '"1.5 m"', "wrong-dimension", "limits", "velocity", '"1.5 m"', "m/s, ft/s or fpm"),
    Fault(
        "budget", '"40 kPa"\n\n[pipe', '"4 kW"\n\n[pipe', "wrong-dimension", "budget", "plant", '"4 kW"', "write 4 Pa"
    ),
    Fault("pipe", '"0.01 mm"', '"1 kPa"', "wrong-dimension", "pipe.own", "roughness", '"1 kPa"', "write 1 m, mm"),
    Fault("sizes", '"22 mm"', '"22 s"', "unknown-unit", "pipe.own", "sizes.A", '"22 s"', "m, mm"),
    Fault("device", '"12 kPa"\ngr', '"12 L/s"\ngr', "wrong-dimension", "device.F1", "least_drop", '"12 L/s"', "kPa"),
    Fault("source", '"150 kPa"', '"15 degC"', "wrong-dimension", "source.P1", "available", '"15 degC"', "kPa"),
    Fault("curve", '"2 L/s"', '"2 m"', "wrong-dimension", "source.P1", "curve.1.0", '"2 m"', "L/s"),
    Fault("section", '"14.5 m"', '"14.5 kPa"', "wrong-dimension", "section.M1", "length", '"14.5 kPa"', "write 14.5 m"),
    Fault("terminal", '"0.12 L/s"', '"12 kPa"', "wrong-dimension", "terminal.T1", "flow", '"12 kPa"\ndrop', "L/s"),
    Fault("display", 'flow = "L/s"', 'flow = "bar"', "wrong-dimension", "display", "flow", '"bar"', "m3/h"),
    Fault(
        "angle", M1, M1 + '\ntransition = "3 m"', "wrong-dimension", "section.M1", "transition", '"3 m"', "write 3 deg"
    ),
    Fault("shown", 'flow = "L/s"', 'flow = "loops"', "unknown-unit", "display", "flow", '"loops"', "m3/h"),
    Fault("degX", '"70 degC"', '"70 degX"', "unknown-unit", "fluid", "temperature", '"70 degX"', "did you mean degF"),
    Fault(
        "metres", '"14.5 m"', '"14.5 metres"', "unknown-unit", "section.M1", "length", '"14.5 metres"', "write 14.5 m"
    ),
    Fault("l/sec", '"0.12 L/s"', '"0.12 l/sec"', "unknown-unit", "terminal.T1", "flow", '"0.12 l/sec"', "mean L/s"),
    Fault("m/min", '"1.5 m/s"', '"90 m/min"', "unknown-unit", "limits", "velocity", '"90 m/min"', "m/s"),
    Fault("kpsi", '"150 kPa"', '"1 kpsi"', "unknown-unit", "source.P1", "available", '"1 kpsi"', "mean psi"),
    Fault("comma", '"14.5 m"', '"14,5 m"', "decimal-comma", "section.M1", "length", '"14,5 m"', 'write "14.5 m"'),
    Fault("bare comma", '"14.5 m"', "14,5", "decimal-comma", "", "", ",5\nfit", "write a point"),
    Fault("limit", '"1.5 m/s"', '"1,5 m/s"', "decimal-comma", "limits", "velocity", '"1,5 m/s"', 'write "1.5 m/s"'),
    Fault("thousands", '"150 kPa"', '"1,500 kPa"', "decimal-comma", "source.P1", "available", '"1,500', '"1500 kPa"'),
    Fault("load", '"6 kW"', '"6,5 kW"', "decimal-comma", "terminal.T2", "load", '"6,5 kW"', 'write "6.5 kW"'),
    Fault("nan", '"14.5 m"', "nan", "not-finite", "section.M1", "length", "nan", "write a finite number"),
    Fault("inf", '"0.12 L/s"', '"inf L/s"', "not-finite", "terminal.T1", "flow", '"inf L/s"', "write a finite number"),
    Fault("1e400", '"150 kPa"', '"1e400 kPa"', "not-finite", "source.P1", "available", '"1e400', "a finite number"),
    Fault("inf k", "k = 0.75", "k = inf", "not-finite", 'fitting."swing joint"', "k", "inf\n", "the number itself"),
    Fault("nan row", "[1, 0.05]", "[nan, 0.05]", "not-finite", "device.V1", "kv.0.0", "nan, 0", "the number itself"),
    Fault("-inf kv", STRAINER, "kv = -inf", "not-finite", "section.M1", "item.0.kv", "-inf", "the number itself"),
    Fault("inf limit", '"1.5 m/s"', "inf", "not-finite", "limits", "velocity", "inf\ngrad", "write a finite number"),
    Fault(
        "powers", '"14.5 m"', '"9**9**9 m"', "not-a-quantity", "section.M1", "length", '"9**9**9 m"', "write a number"
    ),
    Fault("empty", '"6 kW"', '""', "not-a-quantity", "terminal.T2", "load", '""', "write a number"),
    Fault("words", '"150 kPa"', '"plenty"', "not-a-quantity", "source.P1", "available", '"plenty"', "write a number"),
    Fault("fraction", '"22 mm"', '"1/2 in"', "not-a-quantity", "pipe.own", "sizes.A", '"1/2 in"', 'write "0.5 in"'),
    Fault("no unit", 'flow = "L/s"', 'flow = ""', "not-a-quantity", "display", "flow", '""', "m3/h"),
    Fault("hot", '"70 degC"', '"700 degC"', "range", "fluid", "temperature", '"700 degC"', "at most 500 degC"),
    Fault("still", '"1.5 m/s"', '"0 m/s"', "range", "limits", "velocity", '"0 m/s"', "above 0 m/s"),
    Fault("minus", '"40 kPa"\n\n[pipe', '"-4 kPa"\n\n[pipe', "range", "budget", "plant", '"-4 kPa"', "at least 0 kPa"),
    Fault("rough", '"0.01 mm"', '"5 m"', "range", "pipe.own", "roughness", '"5 m"', "at most 100 mm"),
    Fault("k", "k = 0.75", "k = -1", "range", 'fitting."swing joint"', "k", "-1", "at least 0"),
    Fault("shut", "[1, 0.05]", "[1, 0]", "range", "device.V1", "kv.0.1", "0], [2", "above 0"),
    Fault("60", "efficiency = 0.6", "efficiency = 60", "range", "source.P1", "efficiency", "60\n", "at most 1"),
    Fault("back", '"14.5 m"', '"-1 m"', "range", "section.M1", "length", '"-1 m"', "at least 0 m"),
    Fault("no flow", '"0.12 L/s"', "0", "range", "terminal.T1", "flow", "0\ndrop", "above 0 L/s"),
    Fault("googol", STRAINER, f"kv = {10**400}", "long-number", "", "", "1" + "0" * 400, "17 digits at most"),
    Fault("long", '"14.5 m"', "9" * 51, "long-number", "", "", "9" * 51, "17 digits at most"),
    Fault("longer", '"14.5 m"', "-" + "9" * 5000, "long-number", "", "", "-" + "9" * 5000, "17 digits at most"),
    Fault("hex", '"14.5 m"', "0x" + "f" * 9000, "long-number", "", "", "0xfff", "17 digits at most"),
    Fault("date", '"14.5 m"', "1979-05-27T07:32:00." + "9" * 99, "long-number", "", "", "1979", "17 digits at most"),
    Fault("bits", '"DN32"', "0b" + "1" * 90, "long-number", "", "", "0b1", "17 digits at most"),
    Fault("element", "[1, 0.05]", f"[{'1' * 99}, 0.05]", "long-number", "", "", "1" * 99, "17 digits at most"),
    Fault("50 digits", '"14.5 m"', "9" * 50, "range", "section.M1", "length", "9" * 50, "at most 100000 m"),
    Fault("1e999", '"14.5 m"', "1e999", "not-finite", "section.M1", "length", "1e999", "write a finite number"),
    Fault(
        "setting", 'length = "6.2', 'setting = 9\nlength = "6.2', "range", "terminal.T1", "setting", "9\nl", "1 to 3"
    ),
    Fault("share", PIPE, "[case.C]\nshare = { T1 = 3 }\n" + PIPE, "range", "case.C", "share.T1", "3 }", "at most 1"),
    Fault("aspect", PIPE, "[sizing]\naspect = 99\n" + PIPE, "range", "sizing", "aspect", "99", "at most 20"),
    _air("duct", '"400x200"\nlength = "9', '"0x200"\nlength = "9', "range", "section.S1", "size", '"0x200"', "above 0"),
)
"""Quantities that are none, of another dimension, or out of their range."""

WORDS = (
    Fault("units", '"SI"', '"metric"', "choice", "design", "units", '"metric"', "known are SI, IP"),
    Fault("fluid", '"water"', '"brine"', "choice", "fluid", "name", '"brine"', "known are water"),
    Fault("takeoff", '"none"', '"side"', "choice", "defaults", "takeoff", '"side"', "straight, branch, none"),
    Fault("holds", '"flow"', '"flux"', "choice", "device.F1", "holds", '"flux"', "flow"),
    Fault(
        "controls",
        "eff",
        'controls = "speed"\neff',
        "choice",
        "source.P1",
        "controls",
        '"speed"',
        "fixed, differential",
    ),
    Fault("class", M1, M1 + '\nclass = "riser"', "choice", "section.M1", "class", '"riser"', "main, branch, run-out"),
    Fault("control", '"two-port"', '"two port"', "choice", "terminal.T1", "item.0.control", '"two port"', "'two-port'"),
    Fault(
        "catalogue",
        "10255 medium",
        "10255 medum",
        "unknown-line",
        "pipe.steel",
        "catalogue",
        '"steel EN',
        "10255 medium'",
    ),
    Fault("metal", "galvanised", "tinned", "unknown-line", "duct.sheet", "catalogue", '"tinned', "'galvanised steel'"),
    Fault("default", '"steel"', '"steal"', "unknown-line", "defaults", "pipe", '"steal"', "'steel'"),
    Fault("pipe", '"own"', '"owm"', "unknown-line", "section.B2", "pipe", '"owm"', "'own'"),
    Fault("duct", 'pipe = "own"', 'duct = "shed"', "unknown-line", "section.B2", "duct", '"shed"', "'sheet'"),
    Fault("DN33", '"DN32"', '"DN33"', "unknown-size", "section.M1", "size", '"DN33"', "nearest are DN25, DN32, DN40"),
    Fault("33", '"DN32"', "33", "unknown-size", "section.M1", "size", "33\n", "nearest are DN25, DN32, DN40"),
    Fault("run-out", '"DN20"', '"DN21"', "unknown-size", "terminal.T1", "size", '"DN21"', "are DN15, DN20, DN25"),
    Fault("own size", 'size = "B"', 'size = "C"', "unknown-size", "section.B2", "size", '"C"', "known are A, B"),
    Fault(
        "elbow", '"elbow 90"', '"elbow 91"', "unknown-fitting", "section.M1", 'fittings."elbow 91"', "4, ", "'elbow 90'"
    ),
    Fault("valve", 'balance = "F1"', 'balance = "F2"', "unknown-device", "terminal.T3", "balance", '"F2"', "'F1'"),
    Fault("branch valve", B1, B1 + '\nbalance = "W"', "unknown-device", "section.B1", "balance", '"W"', "known are V1"),
    Fault("code", M1, M1 + '\naccept = { slo = "x" }', "unknown-code", "section.M1", "accept.slo", '"x" }', "'slow'"),
    Fault(
        "error", T2, T2 + '\naccept = { cycle = "x" }', "unknown-code", "terminal.T2", "accept.cycle", '"x" }', "mend"
    ),
    _air(
        "xx", '"400x200"\nlength = "9', '"400xx2"\nlength = "9', "size", "section.S1", "size", '"400xx2"', '"600x300"'
    ),
    _air("neck", '"250 mm"', '"250 kPa"', "size", "terminal.G1", "neck", '"250 kPa"', '"250 mm"'),
    _air("outlet", '"400x300"', '"wide"', "size", "source.SF", "outlet", '"wide"', '"600x300"'),
    _air(
        "off the grid",
        '"400x200"\nlength = "9',
        '"410x200"\nlength = "9',
        "duct-size",
        "section.S1",
        "size",
        '"410x200"',
        "nearest standard sizes are 400x200",
        level="note",
    ),
)
"""Names that neither the design nor the catalogue has."""
