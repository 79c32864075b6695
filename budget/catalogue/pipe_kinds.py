"""Laws of the pipe fittings that take parameters, by the name that stands in pipe-kinds.toml."""

import math
from collections.abc import Mapping
from typing import Any, Final

import numpy as np

from budget.catalogue.kind_laws import Law, Loss, Place, Values, beyond, chosen
from budget.catalogue.loader import load
from budget.physics import area_changes, dampers, openings, valves
from budget.physics.fittings import INCH, three_k, two_k

# Bores of the series differ by a fraction of a per cent from those beside the table of fT.
_BORE_SLACK: Final = 0.005


def _ft(place: Place) -> tuple[float, tuple[str, ...]]:
    """Friction factor at fully turbulent flow, on the logarithm of the bore, and what lay outside its table."""
    rows = load("fittings")["crane"]["ft"]
    bores = [bore for _, bore, _ in rows]
    value = float(np.interp(math.log(place.width), np.log(bores), [ft for _, _, ft in rows]))
    low, high = round(bores[0] * 1000.0, 1), round(bores[-1] * 1000.0, 1)
    return value, beyond("bore", place.width * 1000.0, low, high, " mm", _BORE_SLACK)


def _n(row: Mapping[str, Any], values: Values, place: Place) -> tuple[float, tuple[str, ...]]:
    """Crane's n: one figure, one by a choice, or by bands of nominal size [from, to, n] in mm."""
    n = row["n"]
    if isinstance(n, Mapping):
        n = chosen(n["of"], values[n["by"]])
    if not isinstance(n, list):
        return float(n), ()
    size = place.nominal * 1000.0
    found = next((figure for low, _, figure in reversed(n) if low <= size + 1e-6), n[0][2])
    return float(found), beyond("nominal size", size, n[0][0], n[-1][1], " mm")


def _crane(values: Values, place: Place, row: Mapping[str, Any]) -> Loss:
    ft, outside = _ft(place)
    n, off_size = _n(row, values, place)
    return Loss(n * ft, outside=outside + off_size)


def _bend(values: Values, place: Place, _: Mapping[str, Any]) -> Loss:
    ft, outside = _ft(place)
    return Loss(float(valves.bend(ft, values["radius_ratio"], values["angle"])), outside=outside)


def _coil(values: Values, place: Place, _: Mapping[str, Any]) -> Loss:
    ft, outside = _ft(place)
    return Loss(float(valves.bend(ft, values["radius_ratio"], 360.0 * values["turns"])), outside=outside)


def _mitre(values: Values, place: Place, _: Mapping[str, Any]) -> Loss:
    ft, outside = _ft(place)
    return Loss(float(valves.mitre(ft, values["angle"])), outside=outside)


def _tapered_bore(values: Values, place: Place, row: Mapping[str, Any]) -> Loss:
    full = _crane(values, place, row)
    k = valves.tapered_bore(full.constant, values["bore_ratio"], values["angle"])
    return Loss(float(k), outside=full.outside)


def _abrupt_bore(values: Values, place: Place, row: Mapping[str, Any]) -> Loss:
    full = _crane(values, place, row)
    k = valves.abrupt_bore(full.constant, values["bore_ratio"], values["angle"])
    return Loss(float(k), outside=full.outside)


def _two_k(values: Values, place: Place, row: Mapping[str, Any]) -> Loss:
    figures = row["two_k"]["k"]
    if "by" in row["two_k"]:
        _, *figures = next(line for line in figures if line[0] == values[row["two_k"]["by"]])
    k1, k_infinity = figures
    constant, per_reynolds = two_k(k1, k_infinity, place.width)
    return Loss(float(constant), float(per_reynolds))


def _three_k(_: Values, place: Place, row: Mapping[str, Any]) -> Loss:
    km, ki, kd = row["three_k"]
    constant, per_reynolds = three_k(km, ki, kd, place.nominal)
    return Loss(float(constant), float(per_reynolds))


def _by_size(_: Values, place: Place, row: Mapping[str, Any]) -> Loss:
    """Linear in the logarithm of the nominal size; outside the tabulated sizes the nearest figure."""
    table = load("fittings")["by_size"][row["by_size"]["table"]]
    sizes, size = table["size"], place.nominal * 1000.0
    k = np.interp(math.log(size), np.log(sizes), table[row["by_size"]["row"]])
    return Loss(float(k), outside=beyond("nominal size", size, sizes[0], sizes[-1], " mm", _BORE_SLACK))


def _chart(_: Values, place: Place, row: Mapping[str, Any]) -> Loss:
    """A straight line of log K against the log of the nominal size, between its two ends [inch, K]."""
    (low, first), (high, last) = row["chart"]
    inches = place.nominal / INCH
    k = math.exp(np.interp(math.log(inches), np.log([low, high]), np.log([first, last])))
    # The ends of the line are trade sizes in inches: DN10 is 3/8, DN500 is 20.
    return Loss(float(k), outside=beyond("nominal size", inches, low, high, " in", 0.03))


LAWS: Final[Mapping[str, Law]] = {
    "bend": _bend,
    "coil": _coil,
    "mitre": _mitre,
    "crane": _crane,
    "tapered_bore": _tapered_bore,
    "abrupt_bore": _abrupt_bore,
    "two_k": _two_k,
    "three_k": _three_k,
    "by_size": _by_size,
    "chart": _chart,
    "contraction": lambda v, _p, _r: Loss(float(area_changes.contraction(v["bore_ratio"] ** 2, v["angle"]))),
    "enlargement": lambda v, _p, _r: Loss(float(area_changes.enlargement(v["bore_ratio"] ** 2, v["angle"]))),
    "contraction_abrupt": lambda v, _p, _r: Loss(float(area_changes.sudden_contraction(v["bore_ratio"] ** 2))),
    "enlargement_abrupt": lambda v, _p, _r: Loss(float(area_changes.sudden_enlargement(v["bore_ratio"] ** 2))),
    "contraction_rounded": lambda v, _p, _r: Loss(
        float(area_changes.rounded_contraction(v["bore_ratio"] ** 2, v["edge_ratio"]))
    ),
    "entrance_rounded": lambda v, _p, _r: Loss(float(openings.rounded_entry_crane(v["edge_ratio"]))),
    "entrance_bevelled": lambda v, _p, _r: Loss(float(openings.bevelled_entry(v["length_ratio"], v["angle"]))),
    "entrance_inclined": lambda v, _p, _r: Loss(float(openings.inclined_entry(v["angle"]))),
    "entrance_protruding": lambda v, _p, _r: Loss(float(openings.plain_entry(v["thickness_ratio"], v["length_ratio"]))),
    "gate_part_open": lambda v, _p, _r: Loss(float(dampers.gate(v["opening"]))),
    "cock_part_open": lambda v, _p, _r: Loss(float(dampers.cock(v["angle"]))),
    "butterfly_part_open": lambda v, _p, _r: Loss(float(dampers.butterfly(v["angle"]))),
    "orifice": lambda v, _p, _r: Loss(float(openings.perforated_plate(v["bore_ratio"] ** 2))),
}
"""Laws by name."""
