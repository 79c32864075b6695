"""Friction of straight pipe and duct: Reynolds number, regime, friction factor, gradient, wall shear."""

from typing import Final

import numpy as np

from budget.physics.arrays import Array, ArrayLike, SmallIndices
from budget.physics.smooth import smooth_step

LAMINAR_LIMIT: Final = 2300.0
"""Reynolds number below which flow is laminar."""
TURBULENT_LIMIT: Final = 4000.0
"""Reynolds number above which the Colebrook-White law holds."""
ROUND: Final = 64.0
"""f Re of laminar flow in a round pipe (Hagen-Poiseuille)."""
REGIMES: Final = ("laminar", "transitional", "turbulent")
"""Names of the regimes, by the number that `regime` returns."""

_TEN = np.log(10.0)
# The least number that 64 may be divided by without overflow; far below any flow.
_TINY = 1e-300


def reynolds(density: ArrayLike, velocity: ArrayLike, diameter: ArrayLike, viscosity: ArrayLike) -> Array:
    """Reynolds number of a leg: rho |v| D / mu.

    Density in kg/m3, mean velocity in m/s of either sign, bore or hydraulic diameter in m, dynamic viscosity
    in Pa s.
    """
    rho, d, mu = (np.asarray(x, dtype=np.float64) for x in (density, diameter, viscosity))
    return np.asarray(rho * np.abs(np.asarray(velocity, dtype=np.float64)) * d / mu)


def regime(re: ArrayLike) -> SmallIndices:
    """Flow regime by Reynolds number, as an index into `REGIMES`.

    0 laminar below 2300, 1 transitional from 2300 to 4000 (ends included), 2 turbulent above 4000.
    """
    re = np.asarray(re, dtype=np.float64)
    return np.asarray((re >= LAMINAR_LIMIT).astype(np.int8) + (re > TURBULENT_LIMIT).astype(np.int8))


def laminar_factor(re: ArrayLike, laminar_constant: ArrayLike = ROUND) -> Array:
    """Darcy friction factor of laminar flow: C/Re, and 0 where nothing flows.

    `laminar_constant` is f Re of the cross-section: 64 for a round pipe, see `shapes` for the others. At Re =
    0 the true factor has no limit while the drop is zero; 0 is returned so that the drop comes out as zero.
    """
    re = np.asarray(re, dtype=np.float64)
    factor = np.asarray(laminar_constant, dtype=np.float64) / np.maximum(re, _TINY)
    return np.asarray(np.where(re > 0.0, factor, 0.0))


def colebrook(re: ArrayLike, relative_roughness: ArrayLike) -> Array:
    """Darcy friction factor of turbulent flow by the Colebrook-White law, to machine precision.

    1/sqrt f = -2 log10(e/3.7 + 2.51/(Re sqrt f)), e the roughness over the (hydraulic) diameter. Three Newton
    steps on x = 1/sqrt f from the start of Swamee and Jain (1976); verified for Re 4e3 to 1e8 and e 0 to
    0.05. Re must be positive; below 4000 the number is the law's, which no measurement supports.

    Source: Colebrook (1939), J. Inst. Civ. Eng. 11.
    """
    re = np.asarray(re, dtype=np.float64)
    rough = np.asarray(relative_roughness, dtype=np.float64) * (1.0 / 3.7)
    # In y = x ln(10)/2 the law is y + ln(rough + smooth y) = 0: natural logarithms, no factors in the loop.
    smooth = (2.0 * 2.51 / _TEN) / re
    y = -np.log(rough + 5.74 * np.exp(-0.9 * np.log(re)))
    for _ in range(3):
        inner = rough + smooth * y
        y -= (y + np.log(inner)) * inner / (inner + smooth)
    return np.asarray((0.25 * _TEN * _TEN) / (y * y))


def friction_factor(re: ArrayLike, relative_roughness: ArrayLike, laminar_constant: ArrayLike = ROUND) -> Array:
    """Darcy friction factor over all regimes, continuous together with its slope.

    Laminar C/Re below Re 2300, Colebrook-White above 4000; between them the two laws blended by
    `smooth_step`, since no published law is reliable there. 0 where Re is 0. Arguments broadcast to the shape
    of the result.
    """
    re, rough, constant = np.broadcast_arrays(
        *(np.asarray(x, dtype=np.float64) for x in (re, relative_roughness, laminar_constant))
    )
    turbulent = re >= LAMINAR_LIMIT
    if re.size and turbulent.all() and re.min() > TURBULENT_LIMIT:
        return colebrook(re, rough)
    factor = laminar_factor(re, constant)
    if turbulent.any():
        re, rough, low = re[turbulent], rough[turbulent], factor[turbulent]
        weight = smooth_step(re, LAMINAR_LIMIT, TURBULENT_LIMIT)
        factor[turbulent] = low + weight * (colebrook(re, rough) - low)
    return factor


def pressure_gradient(factor: ArrayLike, density: ArrayLike, velocity: ArrayLike, diameter: ArrayLike) -> Array:
    """Friction loss per metre of straight leg, Pa/m: f/D rho v |v| / 2.

    `diameter` is the bore or the hydraulic diameter 4A/P in m, `velocity` the mean velocity flow/area in m/s.
    The loss has the sign of the velocity. Source: Darcy-Weisbach.
    """
    v = np.asarray(velocity, dtype=np.float64)
    f, rho, d = (np.asarray(x, dtype=np.float64) for x in (factor, density, diameter))
    return np.asarray(0.5 * f * rho * v * np.abs(v) / d)


def wall_shear_stress(drop: ArrayLike, diameter: ArrayLike, length: ArrayLike) -> Array:
    """Shear stress of the fluid on the wall, Pa: dp D/(4 L), from the force balance of a straight leg.

    `drop` is the friction loss in Pa over `length` in m; `diameter` the bore or the hydraulic diameter in m.
    """
    dp, d, run = (np.asarray(x, dtype=np.float64) for x in (drop, diameter, length))
    return np.asarray(dp * d / (4.0 * run))


# Power-law exponent n of the velocity profile u ~ y^(1/n) against Re, as measured by Nikuradse (Schlichting,
# Boundary Layer Theory, chapter on pipe flow; from memory). The ratio is 2 n^2/((n+1)(2n+1)): 0.791 at Re
# 4e3, 0.866 from 2e6.
_PROFILE_LOG_RE = np.log([4.0e3, 2.3e4, 1.1e5, 1.1e6, 2.0e6])
_PROFILE_N = np.array([6.0, 6.6, 7.0, 8.8, 10.0])


def mean_to_centre_ratio(re: ArrayLike) -> Array:
    """Ratio of the mean to the centre-line velocity in a round pipe: 0.5 laminar, 0.8 to 0.87 turbulent.

    Laminar exactly 0.5 (parabola); turbulent by the power-law profile with Nikuradse's exponents (from
    memory; its use is common practice); blended between Re 2300 and 4000 like the friction factor.
    """
    re = np.asarray(re, dtype=np.float64)
    n = np.interp(np.log(np.maximum(re, TURBULENT_LIMIT)), _PROFILE_LOG_RE, _PROFILE_N)
    turbulent = 2.0 * n * n / ((n + 1.0) * (2.0 * n + 1.0))
    return np.asarray(0.5 + smooth_step(re, LAMINAR_LIMIT, TURBULENT_LIMIT) * (turbulent - 0.5))
