"""Faults of junctions, changes of area and fittings with parameters, as in `faults`."""

from __future__ import annotations

from functools import partial

from tests.description.faults import B1, M1, T2, Fault
from tests.description.sound import SOUND, SOUND_AIR

_air = partial(Fault, base=SOUND_AIR)

B2 = 'length = "8 m"'
BRANCHED = SOUND.replace(B1, B1 + '\ntakeoff = "branch"\nangle = 45')
JUNCTIONS = (
    Fault("at the pump", M1, M1 + '\ntakeoff = "branch"',
          "takeoff", "section.M1", "takeoff", '"branch"', 'at a source only "none" fits'),
    Fault("alone", 'balance = "F1"', 'balance = "F1"\ntakeoff = "straight"',
          "takeoff", "terminal.T3", "takeoff", '"straight"', "remove it"),
    Fault("sizeless", T2, T2 + '\ntakeoff = "branch"',
          "takeoff", "terminal.T2", "takeoff", '"branch"', "give it one"),
    Fault("both branches", B2, B2 + '\ntakeoff = "branch"',
          "takeoff", "section.B2", "takeoff", '"branch"\npaired', "one goes straight on", base=BRANCHED),
    Fault("three legs", "[terminal.T3]", '[terminal.T4]\nfrom = "M1"\nflow = 0.01\n[terminal.T3]',
          "takeoff", "section.B1", "takeoff", '"branch"', 'state "none", and k', base=BRANCHED),
    Fault("two angles", B2, B2 + '\ntakeoff = "straight"\nangle = 60',
          "takeoff", "section.B2", "angle", "60\npaired", "state it on the branch", base=BRANCHED),
    Fault("first transition", M1, M1 + "\ntransition = 30",
          "takeoff", "section.M1", "transition", "30\nfit", "remove it"),
    Fault("steep", B1, B1 + '\ntransition = "270 deg"',
          "range", "section.B1", "transition", '"270', "at most 180 deg"),
    Fault("flat", B1, B1 + "\nangle = 21", "range", "section.B1", "angle", "21\n\n", "at least 30 deg"),
    Fault("twice", B1, B1 + '\ntakeoff = "branch"\nfittings = { "tee branch" = 1 }', "contradiction",
          "section.B1", 'fittings."tee branch"', "1 }\n\n[section.B2", "keep one"),
    Fault("twice by default", B1, B1 + '\nfitting = [{ kind = "tee stub-in branch" }]', "contradiction",
          "section.B1", "fitting.0.kind", '"tee stub', 'state takeoff = "none" here',
          base=SOUND.replace('takeoff = "none"', 'takeoff = "branch"')),
    Fault("wide branch", 'size = "DN25"', 'size = "DN40"',
          "junction-range", "section.B1", "takeoff", '"branch"', "the nearest is used", "warning", BRANCHED),
    Fault("drawn along", B1, B1 + '\ntakeoff = "straight"', "junction-gain",
          "section.B1", "takeoff", '"straight"', "its supply leg is -0.0", "note",
          SOUND.replace(B2, B2 + '\ntakeoff = "branch"')),
    Fault("step", 'balance = "F1"', 'balance = "F1"\nsize = "DN20"\nlength = 2',
          "area-change", "terminal.T3", "transition", "T3]", 'state transition = "abrupt"', "note"),
)
"""What is stated of junctions and changes of area and does not fit, or is worth a look."""

KINDS = (
    Fault("kind", M1, M1 + '\nfitting = [{ kind = "x" }]',
          "unknown-fitting", "section.M1", "fitting.0.kind", '"x"', "known are"),
    Fault("none", M1, M1 + "\nfitting = [{ count = 2 }]",
          "missing", "section.M1", "fitting.0", "{ count", 'write kind = "..."'),
    Fault("duct elbow", M1, M1 + '\nfitting = [{ kind = "elbow gored" }]',
          "unknown-fitting", "section.M1", "fitting.0.kind", '"elbow gored"', "a fitting of a duct, this is a pipe"),
    Fault("no radius", M1, M1 + '\nfitting = [{ kind = "bend" }]',
          "missing", "section.M1", "fitting.0", '{ kind', "needs radius_ratio: "),
    Fault("counted", '"elbow 90" = 4', "bend = 4",
          "missing", "section.M1", "fittings.bend", "4, ", "state it in [[..fitting]]"),
    Fault("odd", M1, M1 + '\nfitting = [{ kind = "bend", radius_ratio = 3, turns = 2 }]',
          "unknown-key", "section.M1", "fitting.0.turns", "2 }]", "known are radius_ratio, angle"),
    Fault("welds", M1, M1 + '\nfitting = [{ kind = "mitre bend welded", welds = 9 }]',
          "choice", "section.M1", "fitting.0.welds", "9 }", "known are 1, 2, 3, 4, 5"),
    Fault("pattern", M1, M1 + '\nfitting = [{ kind = "stop check valve", pattern = "glob" }]',
          "choice", "section.M1", "fitting.0.pattern", '"glob"', "did you mean 'globe'"),
    Fault("radius", M1, M1 + '\nfitting = [{ kind = "bend", radius_ratio = "3 m" }]',
          "type", "section.M1", "fitting.0.radius_ratio", '"3 m"', "a plain number"),
    Fault("angle", M1, M1 + '\nfitting = [{ kind = "bend", radius_ratio = 3, angle = "1 m" }]',
          "wrong-dimension", "section.M1", "fitting.0.angle", '"1 m"', "write 1 deg"),
    Fault("own", '"swing joint" = 1', '"swing joint" = 1 }\nfitting = [{ kind = "swing joint", k = 2 }]#',
          "unknown-key", "section.M1", "fitting.0.k", "2 }", "known are kind, count"),
    Fault("count", M1, M1 + '\nfitting = [{ kind = "swing joint", count = 0 }]',
          "range", "section.M1", "fitting.0.count", "0 }", "at least 1"),
    Fault("own name", '[fitting."swing joint"]', '[fitting."return bend long"]',
          "contradiction", 'fitting."return bend long"', "", '"return bend', "another name"),
    Fault("beyond", M1, M1 + '\nfitting = [{ kind = "bend", radius_ratio = 30 }]',
          "fitting-range", "section.M1", "fitting.0.kind", '"bend", rad', "the nearest figure is used", "warning"),
    _air("round elbow", 'length = "9 m"', 'length = "9 m"\nfitting = [{ kind = "elbow gored" }]',
         "unknown-fitting", "section.S1", "fitting.0.kind", '"elbow gored"', "only round"),
    _air("head", 'length = "9 m"',
         'length = "9 m"\nfitting = [{ kind = "filter rated", rated_drop = "2 m", rated_velocity = 2 }]',
         "wrong-dimension", "section.S1", "fitting.0.rated_drop", '"2 m"', "write a pressure"),
)
"""Fittings with parameters."""
