"""Tees and wyes: a loss coefficient for each leg, by flow ratio, area ratio and angle.

Both families are formulas with steps and kinks at certain area and flow ratios, which lie near many real reductions.
Each of them is replaced by the cubic blend of the two formulas over +-BAND around it, so that the coefficients are
continuous in flow ratio and area ratio. Negative coefficients, where one stream draws the other along, are kept.
"""

from typing import Final

import numpy as np

from budget.physics.arrays import Array, ArrayLike, Flags
from budget.physics.smooth import smooth_step

FAMILIES: Final = ("tee-crane", "tee-idelchik")
"""Published families; an array of families holds the places in this tuple.

"tee-crane": Crane Technical Paper 410 (2009) chapter 2, with its errata. Between 60 and 90 degrees the paper states
nothing; as in the `fluids` library the 90 degree formulas begin at 75 degrees, and from 60 degrees on the branch of a
diverging tee with a bore ratio above 2/3 goes without its angle term, as the paper has it at 90 degrees.
"tee-idelchik": Idelchik, Handbook of Hydraulic Resistance, section 7 (eq. 7-1, 7-2, tables 7-1 to 7-4, diagrams 7-20
and 7-21, the factor 0.9 of the 90 degree branch above v = 0.8 from memory); its 90 degree formulas begin at 75 degrees
here too.
"""
ANGLES: Final = (30.0, 90.0)
"""Angles in degrees between branch and straight leg within which the families were published."""
BAND: Final = 0.02
"""Half the width over which a step of a family is blended."""

_CRANE_ANGLE = np.array([30.0, 45.0, 60.0, 90.0])
_CRANE_F = np.array([1.74, 1.41, 1.0, 0.0])
_WYE_TO = 60.0  # the wye formula of a diverging branch ends below this angle in tee-crane where the bore ratio is high
_TEE_FROM = 75.0
_LEAST_AREA = 1e-6


def junction_coefficients(
    family: str | ArrayLike, converging: ArrayLike, flow_ratio: ArrayLike, area_ratio: ArrayLike, angle: ArrayLike
) -> tuple[Array, Array]:
    """Loss coefficients of a junction, (branch, straight), on the velocity pressure of the combined flow.

    `family` is one of FAMILIES or an array of places in it, `converging` False where the flow divides, `flow_ratio`
    the branch's flow over the combined flow (0 to 1), `area_ratio` its area over that of the combined leg (above 0,
    to 1), `angle` that between branch and straight leg in degrees. The straight leg has the combined area. A ratio
    out of its range is taken at the end of it, see `in_range`. All broadcast. A positive coefficient is a loss of
    total pressure from the inlet to the outlet of that leg, a negative one a gain.

    Raises ValueError for a family that is not known.
    """
    crane = _is_crane(family)
    crane, joins, q, a, theta = np.broadcast_arrays(
        crane,
        np.asarray(converging, dtype=np.bool_),
        np.minimum(np.maximum(np.asarray(flow_ratio, dtype=np.float64), 0.0), 1.0),
        np.minimum(np.maximum(np.asarray(area_ratio, dtype=np.float64), _LEAST_AREA), 1.0),
        np.asarray(angle, dtype=np.float64),
    )
    branch, straight = np.empty(q.shape), np.empty(q.shape)
    for law, mask in ((_converging, joins), (_diverging, ~joins)):
        if mask.any():
            branch[mask], straight[mask] = law(crane[mask], q[mask], a[mask], theta[mask])
    return branch, straight


def in_range(
    family: str | ArrayLike, converging: ArrayLike, flow_ratio: ArrayLike, area_ratio: ArrayLike, angle: ArrayLike
) -> Flags:
    """Whether a junction lies within what its family was published for; arguments as for `junction_coefficients`.

    Both families, converging and diverging: flow ratio 0 to 1, area ratio above 0 and up to 1, angle 30 to 90
    degrees.
    """
    _, _, q, a, theta = np.broadcast_arrays(
        _is_crane(family), converging, *(np.asarray(x, dtype=np.float64) for x in (flow_ratio, area_ratio, angle))
    )
    low, high = ANGLES
    return np.asarray((q >= 0.0) & (q <= 1.0) & (a > 0.0) & (a <= 1.0) & (theta >= low) & (theta <= high))


def power_loss(branch: ArrayLike, straight: ArrayLike, flow_ratio: ArrayLike) -> Array:
    """Power lost in a junction over the velocity pressure and volume flow of the combined leg: q K_b + (1-q) K_s.

    Coefficients as from `junction_coefficients`. Below zero it would be a gain out of nothing.
    """
    b, s, q = (np.asarray(x, dtype=np.float64) for x in (branch, straight, flow_ratio))
    return np.asarray(q * b + (1.0 - q) * s)


def _converging(crane: Flags, q: Array, a: Array, angle: Array) -> tuple[Array, Array]:
    """K_b = C (1 + v^2 - 2 (1-q)^2 - F q^2/a) with v = q/a; K_s likewise, or 1.55 q - q^2 at 90 degrees."""
    c = _blend(a, 0.35, 1.0, _blend(q, 0.40, 0.9 * (1.0 - q), 0.55))
    f = 2.0 * np.cos(np.radians(angle))
    if crane.any():
        f = np.where(crane, np.interp(angle, _CRANE_ANGLE, _CRANE_F), f)
    v = q / a
    rest = (1.0 - q) * (1.0 - q)
    branch = c * (1.0 + v * v - 2.0 * rest - f * q * v)
    # Crane's F for the straight leg ends at 60 degrees, with 1.
    wye = 1.0 - rest - np.where(crane, np.maximum(f, 1.0), f) * q * v
    return branch, np.where(angle >= _TEE_FROM, (1.55 - q) * q, wye)


def _diverging(crane: Flags, q: Array, a: Array, angle: Array) -> tuple[Array, Array]:
    """K_b = G (1 + H v^2 - J v cos(angle)) with v = q/a; K_s = M q^2."""
    v = q / a
    v_cos = v * np.cos(np.radians(angle))
    square = v * v
    twice = 2.0 * q - 1.0
    straight = q * q * _blend(a, 0.40, 0.4, _blend(q, 0.50, 2.0 * twice, 0.3 * twice))
    tee = angle >= _TEE_FROM
    branch = np.empty_like(q)
    if not tee.all():
        g = _blend(a, 0.35, _blend(q, 0.40, 1.1 - 0.7 * q, 0.85), _blend(q, 0.60, 1.0 - 0.6 * q, 0.6))
        equal = np.where(crane & (angle >= _WYE_TO), smooth_step(a, 4.0 / 9.0 - BAND, 4.0 / 9.0 + BAND), 0.0)
        branch = g * (1.0 + (1.0 - 0.7 * equal) * square - 2.0 * (1.0 - equal) * v_cos)
    if tee.any():
        branch = np.where(tee, _tee_branch(crane, q, a, v, v_cos), branch)
    return branch, straight


def _tee_branch(crane: Flags, q: Array, a: Array, v: Array, v_cos: Array) -> Array:
    """Branch of a diverging tee near 90 degrees: equal legs lose less than a reduced branch."""
    square = v * v
    equal = smooth_step(a, 2.0 / 3.0 - BAND, 2.0 / 3.0 + BAND)
    ours = np.empty_like(q)
    if crane.any():
        high_bore = smooth_step(a, 4.0 / 9.0 - BAND, 4.0 / 9.0 + BAND)
        g = 1.0 + equal * 0.3 * q * q
        ours = g * (1.0 + (1.0 - 0.7 * high_bore) * square - 2.0 * (1.0 - high_bore) * v_cos)
    if not crane.all():
        reduced = _blend(v, 0.80, 1.0, 0.9) * (1.0 + square)
        ours = np.where(crane, ours, reduced + equal * (1.0 + 0.3 * square - reduced))
    return ours


def _blend(x: Array, step: float, below: ArrayLike, above: ArrayLike) -> Array:
    """`below` up to the step, `above` from there on, joined over +-BAND."""
    w = smooth_step(x, step - BAND, step + BAND)
    return np.asarray(below + w * (np.asarray(above) - below))


def _is_crane(family: str | ArrayLike) -> Flags:
    if isinstance(family, str):
        if family not in FAMILIES:
            raise ValueError(f"{family!r} was no family of junctions; known are {', '.join(FAMILIES)}")
        return np.asarray(family == FAMILIES[0])
    places = np.asarray(family)
    if places.dtype.kind not in "iu" or (places.size and not (places.min() >= 0 and places.max() < len(FAMILIES))):
        raise ValueError(f"families of junctions were not places in {FAMILIES}: {family!r}")
    return np.asarray(places == 0)
