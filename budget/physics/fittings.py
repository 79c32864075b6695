"""Loss coefficients of fittings in the form K = constant + per_reynolds/Re, and the Kv of valves."""

from typing import Final

import numpy as np

from budget.physics.arrays import Array, ArrayLike

INCH: Final = 0.0254
"""Metres in an inch, in which the 2-K and 3-K methods were published."""
CV_PER_KV: Final = 1.156
"""Cv (US gpm at 1 psi) for a Kv of 1 (m3/h at 1 bar). Source: IEC 60534-1."""

# dp[Pa] = (3600 q / Kv)^2 x 1e5 x rho/1000 with q in m3/s, hence this times rho (q/Kv)^2.
_KV_SCALE = 3600.0**2 * 1e5 / 1000.0


def two_k(k1: ArrayLike, k_infinity: ArrayLike, bore: ArrayLike) -> tuple[Array, Array]:
    """2-K coefficient of a fitting, as (constant, per_reynolds): K = K1/Re + Kinf (1 + 1/D), D in inches.

    `bore` in m. Source: Hooper (1981), Chemical Engineering, August 24.
    """
    d = np.asarray(bore, dtype=np.float64) / INCH
    constant = np.asarray(k_infinity, dtype=np.float64) * (1.0 + 1.0 / d)
    return np.asarray(constant), _spread(k1, constant)


def three_k(km: ArrayLike, ki: ArrayLike, kd: ArrayLike, nominal: ArrayLike) -> tuple[Array, Array]:
    """3-K coefficient of a fitting, as (constant, per_reynolds): K = Km/Re + Ki (1 + Kd/Dn^0.3), Dn in inch.

    `nominal` is the nominal size in m. Source: Darby (2001), Chemical Engineering Fluid Mechanics, 2nd ed.
    """
    d = np.asarray(nominal, dtype=np.float64) / INCH
    constant = np.asarray(ki, dtype=np.float64) * (1.0 + np.asarray(kd, dtype=np.float64) / d**0.3)
    return np.asarray(constant), _spread(km, constant)


def crane(n: ArrayLike, ft: ArrayLike) -> tuple[Array, Array]:
    """Coefficient n fT of a fitting, as (constant, per_reynolds = 0).

    fT is the friction factor of the pipe at fully turbulent flow. Source: Crane, Technical Paper 410.
    """
    constant = np.asarray(n, dtype=np.float64) * np.asarray(ft, dtype=np.float64)
    return np.asarray(constant), np.asarray(np.zeros_like(constant))


def coefficient_at(constant: ArrayLike, per_reynolds: ArrayLike, re: ArrayLike) -> Array:
    """Loss coefficient at a Reynolds number: constant + per_reynolds/Re; only the constant where Re is 0.

    At standstill the second part has no limit while the drop is zero, so it is left out.
    """
    re = np.asarray(re, dtype=np.float64)
    part = np.asarray(per_reynolds, dtype=np.float64) / np.maximum(re, 1e-300)
    return np.asarray(np.asarray(constant, dtype=np.float64) + np.where(re > 0.0, part, 0.0))


def fitting_drop(k: ArrayLike, density: ArrayLike, velocity: ArrayLike) -> Array:
    """Total-pressure loss of a fitting, Pa: K rho v |v| / 2, in the direction of the velocity (m/s)."""
    v = np.asarray(velocity, dtype=np.float64)
    return np.asarray(0.5 * np.asarray(k, dtype=np.float64) * np.asarray(density, dtype=np.float64) * v * np.abs(v))


def valve_drop(flow: ArrayLike, kv: ArrayLike, density: ArrayLike) -> Array:
    """Drop across a valve, Pa, at `flow` in m3/s: dp[bar] = (q[m3/h]/Kv)^2 rho/1000.

    `kv` in m3/h at 1 bar and 1000 kg/m3, positive; the drop has the sign of the flow. Source: IEC 60534-2-1.
    """
    q, capacity, rho = (np.asarray(x, dtype=np.float64) for x in (flow, kv, density))
    return np.asarray(_KV_SCALE * rho * q * np.abs(q) / (capacity * capacity))


def kv_of_drop(flow: ArrayLike, drop: ArrayLike, density: ArrayLike) -> Array:
    """Kv (m3/h at 1 bar) that a valve needs to drop `drop` Pa at `flow` m3/s; both positive."""
    q, dp = np.asarray(flow, dtype=np.float64), np.asarray(drop, dtype=np.float64)
    return np.asarray(q * np.sqrt(_KV_SCALE * np.asarray(density, dtype=np.float64) / dp))


def k_of_kv(kv: ArrayLike, area: ArrayLike) -> Array:
    """Loss coefficient of a valve of given Kv on the velocity in a pipe of `area` m2: K ~ (A/Kv)^2."""
    ratio = np.asarray(area, dtype=np.float64) / np.asarray(kv, dtype=np.float64)
    return np.asarray(2.0 * _KV_SCALE * ratio * ratio)


def kv_of_k(k: ArrayLike, area: ArrayLike) -> Array:
    """Kv of anything with loss coefficient `k` on the velocity in a pipe of `area` m2; undoes `k_of_kv`."""
    a, k = np.asarray(area, dtype=np.float64), np.asarray(k, dtype=np.float64)
    return np.asarray(a * np.sqrt(2.0 * _KV_SCALE / k))


def equivalent_length(k: ArrayLike, factor: ArrayLike, diameter: ArrayLike) -> Array:
    """Length of straight pipe, m, that loses as much as a fitting of coefficient `k`: K D/f (Darcy f)."""
    k, f, d = (np.asarray(x, dtype=np.float64) for x in (k, factor, diameter))
    return np.asarray(k * d / f)


def k_of_equivalent_length(length: ArrayLike, factor: ArrayLike, diameter: ArrayLike) -> Array:
    """Loss coefficient of a fitting stated as equivalent length in m: f L/D (Darcy f)."""
    run, f, d = (np.asarray(x, dtype=np.float64) for x in (length, factor, diameter))
    return np.asarray(f * run / d)


def _spread(value: ArrayLike, like: Array) -> Array:
    """`value` in the common shape of both."""
    return np.asarray(np.asarray(value, dtype=np.float64) + np.zeros_like(like))
