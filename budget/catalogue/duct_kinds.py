"""Laws of the duct fittings by geometry, by the name that stands in duct-kinds.toml."""

from collections.abc import Mapping
from typing import Any, Final

import numpy as np

from budget.catalogue.kind_laws import Law, Loss, Place, Values, beyond, chosen
from budget.physics import area_changes, dampers, elbows, openings


def _aspect(values: Values, place: Place) -> tuple[float, tuple[str, ...]]:
    """H/W of a bend, W the side in its plane, and what lay outside the tables of rectangular elbows."""
    in_plane, across = place.sides(values["plane"])
    aspect = across / in_plane
    return aspect, beyond("H/W", aspect, *elbows.MITRE_ASPECTS)


def _mitre(values: Values, place: Place, _: Mapping[str, Any]) -> Loss:
    if place.shape == "round":
        return Loss(corrected=float(elbows.round_mitre(values["angle"])))
    aspect, outside = _aspect(values, place)
    return Loss(corrected=float(elbows.rectangular_mitre(values["angle"], aspect)), outside=outside)


def _gored(values: Values, _: Place, row: Mapping[str, Any]) -> Loss:
    del row
    radius, pieces = values["radius_ratio"], values["pieces"]
    outside = () if pieces == 3 else beyond("radius_ratio", radius, 0.75, 2.0)
    return Loss(float(elbows.round_gored(radius, pieces)), outside=outside)


def _rectangular_smooth(values: Values, place: Place, _: Mapping[str, Any]) -> Loss:
    aspect, outside = _aspect(values, place)
    return Loss(float(elbows.rectangular_smooth(values["radius_ratio"], aspect, values["angle"])), outside=outside)


def _rectangular_splitter(values: Values, place: Place, _: Mapping[str, Any]) -> Loss:
    aspect, outside = _aspect(values, place)
    return Loss(float(elbows.rectangular_splitter(values["radius_ratio"], aspect)), outside=outside)


def _offset_rectangular(values: Values, place: Place, row: Mapping[str, Any]) -> Loss:
    one = _rectangular_smooth(values, place, row)
    return Loss(2.0 * one.constant, outside=one.outside)


def _offset_mitred(values: Values, place: Place, _: Mapping[str, Any]) -> Loss:
    aspect, outside = _aspect(values, place)
    return Loss(corrected=float(elbows.mitred_offset(values["length_ratio"], aspect)), outside=outside)


def _by_diameter(values: Values, place: Place, row: Mapping[str, Any]) -> Loss:
    """A row of coefficients by diameter in mm, one for each angle."""
    rows = row["by_diameter"]
    figures = next(r for r in rows if len(rows) == 1 or r["angle"] == values["angle"])
    size, sizes = place.width * 1000.0, figures["diameter"]
    return Loss(
        float(np.interp(size, sizes, figures["k"])), outside=beyond("diameter", size, sizes[0], sizes[-1], " mm")
    )


def _constants(values: Values, _: Place, row: Mapping[str, Any]) -> Loss:
    constants = row["constants"]
    return Loss(float(chosen(constants["of"], values[constants["by"]]) if "by" in constants else constants["of"]))


def _converging(values: Values, _: Place, row: Mapping[str, Any]) -> Loss:
    del row
    return Loss(float(area_changes.duct_convergence(values["area_ratio"], values["angle"])))


def _pyramid(values: Values) -> Loss:
    ratio, angle = values["area_ratio"], values["angle"]
    outside = beyond("angle", angle, 16.0, 180.0, " deg")
    return Loss(float(area_changes.pyramid_divergence(ratio, angle)), outside=outside)


def _diverging(values: Values, place: Place, _: Mapping[str, Any]) -> Loss:
    if place.shape == "rectangular" and values["sides"] == "four":
        return _pyramid(values)
    return Loss(float(area_changes.enlargement(values["area_ratio"], values["angle"])))


def _one_sided(values: Values, place: Place, row: Mapping[str, Any]) -> Loss:
    if values["direction"] == "converging":
        return _converging(values, place, row)
    return Loss(float(area_changes.enlargement(values["area_ratio"], values["angle"])))


def _rectangular_to_round(values: Values, place: Place, row: Mapping[str, Any]) -> Loss:
    return _converging(values, place, row) if values["direction"] == "converging" else _pyramid(values)


def _abrupt(values: Values, _: Place, row: Mapping[str, Any]) -> Loss:
    del row
    sudden = {"converging": area_changes.sudden_contraction, "diverging": area_changes.sudden_enlargement}
    return Loss(float(sudden[values["direction"]](values["area_ratio"])))


def _hood(values: Values, place: Place, _: Mapping[str, Any]) -> Loss:
    return Loss(float(openings.hood(values["angle"], place.shape == "rectangular")))


def _damper_rectangular(values: Values, place: Place, _: Mapping[str, Any]) -> Loss:
    along, across = place.sides(values["axis"])
    return Loss(float(dampers.rectangular_blade(values["angle"], across / along)))


def _damper_opposed(values: Values, place: Place, _: Mapping[str, Any]) -> Loss:
    ratio, outside = _blades(values, place)
    return Loss(float(dampers.opposed_blades(values["angle"], ratio)), outside=outside)


def _damper_parallel(values: Values, place: Place, _: Mapping[str, Any]) -> Loss:
    ratio, outside = _blades(values, place)
    return Loss(float(dampers.parallel_blades(values["angle"], ratio)), outside=outside)


def _blades(values: Values, place: Place) -> tuple[float, tuple[str, ...]]:
    ratio = float(dampers.blade_ratio(values["blades"], place.width, place.height))
    return ratio, beyond("L/R", ratio, *dampers.BLADE_RATIOS)


def _rated(values: Values, _: Place, row: Mapping[str, Any]) -> Loss:
    del row
    names = ("rated_drop", "rated_velocity", "face_ratio", "rated_density")
    return Loss(float(openings.rated_coefficient(*(values[name] for name in names))))


LAWS: Final[Mapping[str, Law]] = {
    "round_smooth": lambda v, _p, _r: Loss(float(elbows.round_smooth(v["radius_ratio"], v["angle"]))),
    "round_gored": _gored,
    "mitre": _mitre,
    "rectangular_smooth": _rectangular_smooth,
    "rectangular_splitter": _rectangular_splitter,
    "by_diameter": _by_diameter,
    "offset_mitred": _offset_mitred,
    "offset_rectangular": _offset_rectangular,
    "offset_round": lambda v, _p, _r: Loss(2.0 * float(elbows.round_smooth(v["radius_ratio"], v["angle"]))),
    "constants": _constants,
    "converging": _converging,
    "diverging": _diverging,
    "one_sided": _one_sided,
    "rectangular_to_round": _rectangular_to_round,
    "abrupt": _abrupt,
    "entry_plain": lambda v, _p, _r: Loss(float(openings.plain_entry(v["thickness_ratio"], v["length_ratio"]))),
    "bellmouth": lambda v, _p, _r: Loss(float(openings.bellmouth(v["edge_ratio"]))),
    "bellmouth_in_wall": lambda v, _p, _r: Loss(float(openings.rounded_entry(v["edge_ratio"]))),
    "bevelled": lambda v, _p, _r: Loss(float(openings.bevelled_entry(v["length_ratio"], v["angle"]))),
    "hood": _hood,
    "exit_conical": lambda v, _p, _r: Loss(float(openings.conical_exit(v["area_ratio"], v["angle"]))),
    "damper_round": lambda v, _p, _r: Loss(float(dampers.round_blade(v["angle"]))),
    "damper_rectangular": _damper_rectangular,
    "damper_opposed": _damper_opposed,
    "damper_parallel": _damper_parallel,
    "screen": lambda v, _p, _r: Loss(float(openings.wire_screen(v["free_area"]))),
    "perforated_plate": lambda v, _p, _r: Loss(float(openings.perforated_plate(v["free_area"]))),
    "rated": _rated,
}
"""Laws by name."""
