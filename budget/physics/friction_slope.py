"""The slope of the friction law: how the friction factor changes with the Reynolds number, exactly."""

from typing import Final

import numpy as np

from budget.physics.arrays import Array, ArrayLike
from budget.physics.friction import LAMINAR_LIMIT, ROUND, TURBULENT_LIMIT, colebrook
from budget.physics.smooth import smooth_step

_TEN: Final = np.log(10.0)
_SMOOTH: Final = 2.0 * 2.51 / _TEN
_WIDTH: Final = TURBULENT_LIMIT - LAMINAR_LIMIT


def factor_by_reynolds(
    re: ArrayLike, relative_roughness: ArrayLike, laminar_constant: ArrayLike = ROUND
) -> tuple[Array, Array]:
    """Return f Re and its derivative by ln Re, over all regimes; finite at standstill, where f itself is not.

    f is that of `friction.friction_factor`: laminar C/Re, Colebrook-White, and their blend from Re 2300 to 4000. The
    drop of a straight leg goes as (f Re) x flow, so these two give it and its slope by flow at any flow, nothing
    included: slope = (f Re + d(f Re)/d ln Re) x drop's constant. Arguments broadcast.

    Source of the turbulent slope: the Colebrook-White law differentiated, d ln f/d ln Re = -2 b/(a + b y + b) with
    a + b y the law's argument and y = ln(10)/(2 sqrt f).
    """
    re, rough, constant = np.broadcast_arrays(
        *(np.asarray(x, dtype=np.float64) for x in (re, relative_roughness, laminar_constant))
    )
    product, slope = constant.copy(), np.zeros(re.shape)
    above = re >= LAMINAR_LIMIT
    if not above.any():
        return product, slope
    high, low = re[above], constant[above]
    factor = colebrook(high, rough[above])
    smooth = _SMOOTH / high
    inner = rough[above] / 3.7 + smooth * 0.5 * _TEN / np.sqrt(factor)
    turbulent = factor * high
    turbulent_slope = turbulent * (1.0 - 2.0 * smooth / (inner + smooth))
    weight = smooth_step(high, LAMINAR_LIMIT, TURBULENT_LIMIT)
    s = np.clip((high - LAMINAR_LIMIT) / _WIDTH, 0.0, 1.0)
    weight_slope = 6.0 * s * (1.0 - s) * high / _WIDTH
    product[above] = low + weight * (turbulent - low)
    slope[above] = weight * turbulent_slope + weight_slope * (turbulent - low)
    return product, slope
