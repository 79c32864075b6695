"""Density, viscosity and specific heat of the fluids, each by its published formula written out once more."""

from math import exp
from typing import Any

from tests.independent.quantities import measure

Properties = dict[str, float]  # density kg/m3, viscosity Pa s, specific_heat J/(kg K), temperature degC

# Polynomials in the temperature (rows, powers of K above the base) and the concentration (columns, powers of
# the fraction above the base); the secondary-refrigerant sets by mass (MPG, MEG) and by volume (APG, AEG).
GLYCOLS: dict[str, dict[str, Any]] = {
    "MPG": {
        "base": (305.8583, 0.307031),
        "viscosity unit": 0.001,
        "density": [
            [1018.0, 76.04, -24.98, -155.0, -113.1, 234.2],
            [-0.5406, -0.945, 0.27, 2.829, -2.221],
            [-0.002666, 0.005541, -0.004018, -0.007175],
            [1.347e-05, -1.343e-05, 3.376e-05],
        ],
        "specific_heat": [
            [3882.0, -1304.0, -1598.0, 353.9, 5000.0, -4959.0],
            [2.699, 5.07, 0.9534, 31.02, -71.35],
            [-0.001659, -0.004752, 0.1167, -0.295],
            [-1.032e-05, 0.0001522, -0.000487],
        ],
        "log viscosity": [
            [0.6837, 3.328, 0.5453, -3.9, -1.587, 35.64],
            [-0.03045, -0.03984, -0.00086, 0.1054, 0.04475],
            [0.0002525, 0.0004332, -0.0001593, -0.001589],
            [-1.399e-06, -1.86e-06, -4.465e-07],
        ],
    },
    "MEG": {
        "base": (304.878, 0.308462),
        "viscosity unit": 0.001,
        "density": [
            [1034.0, 131.1, 0.749, -106.2, -96.23, 489.1],
            [-0.4781, -0.6876, 0.7855, 1.229, -7.211],
            [-0.002692, 0.004805, -0.003995, -0.01153],
            [4.725e-06, 1.69e-06, 4.982e-05],
        ],
        "specific_heat": [
            [3737.0, -1799.0, -993.3, 2610.0, 1537.0, -16180.0],
            [2.93, 10.46, 3.516, -1.189, -42.72],
            [-0.004675, -0.04147, 0.05109, -0.1643],
            [-1.389e-05, 1.847e-05, -0.0007138],
        ],
        "log viscosity": [
            [0.4705, 2.471, 0.03328, 1.659, 3.089, -18.65],
            [-0.0255, -0.01171, 0.01086, 0.003157, 0.01831],
            [0.0001782, 0.0001052, 0.0001051, 0.0004063],
            [-7.669e-07, -1.634e-06, -6.475e-06],
        ],
    },
    "APG": {
        "base": (305.65, 0.35),
        "viscosity unit": 1.0,
        "density": [
            [1026.177, 72.53677, -65.32547, 34.66575, -15.82785, -213.9879],
            [-0.5350059, -0.5056296, 0.1751278, -0.092333, 0.02877433],
            [-0.002566157, -0.0001703579, 0.001165892, -0.000207517],
            [-5.177316e-09, 9.673169e-09, 3.368862e-07],
        ],
        "specific_heat": [
            [3815.392, -1391.877, -1121.4, -419.3939, -243.53, 4054.145],
            [3.025751, 5.558605, -0.1073388, 0.5290725, -2.262081],
            [4.165345e-05, -9.032069e-05, -0.003392169, 0.01079472],
            [-4.30948e-07, -1.33518e-06, 3.538903e-05],
        ],
        "log viscosity": [
            [-6.025825, 3.573663, -1.995205, -6.42511, 36.01949, 53.50879],
            [-0.03284399, -0.03838339, 0.08223532, 0.01520795, -1.123741],
            [0.0002492009, 0.0003529886, -0.0005119547, -0.0006572286],
            [-1.155771e-06, -1.216539e-06, 3.230125e-06],
        ],
    },
    "AEG": {
        "base": (305.65, 0.35),
        "viscosity unit": 1.0,
        "density": [
            [1047.337, 140.4485, -48.70559, 71.41693, 52.4585, -693.3962],
            [-0.4505054, -0.3001582, -0.03952614, 0.02496264, -0.06817576],
            [-0.002432696, -2.084384e-05, 0.0003108353, -0.0008979712],
            [-3.72545e-09, 1.044784e-06, -4.391164e-06],
        ],
        "specific_heat": [
            [3596.551, -1707.073, -444.7538, -552.7923, -715.9059, 7905.301],
            [3.096886, 5.184379, -0.7061384, 0.7949891, -0.6689394],
            [-3.388642e-05, 0.0003639717, 0.0009169943, -0.005359818],
            [3.171299e-07, -2.457345e-06, 1.419543e-05],
        ],
        "log viscosity": [
            [-6.319551, 2.881296, 0.8374394, -19.29626, -13.10981, 252.8586],
            [-0.02410848, -0.01593008, -0.006961209, -0.06322254, -0.2651482],
            [0.0001764482, 0.0001708786, -0.0004014337, -0.00024771],
            [-1.315418e-06, -1.745316e-06, 9.973464e-06],
        ],
    },
}


def water(t: float) -> Properties:
    """Kell's density, the IAPWS SR6-08 viscosity at low pressure, a fitted specific heat; t in degC."""
    top = (
        999.83952
        + 16.945176 * t
        - 7.9870401e-3 * t**2
        - 46.170461e-6 * t**3
        + 105.56302e-9 * t**4
        - 280.54253e-12 * t**5
    )
    r = (t + 273.15) / 300
    x = t / 100
    return {
        "density": top / (1 + 16.879850e-3 * t),
        "viscosity": 1e-6 * (280.68 * r**-1.9 + 511.45 * r**-7.7 + 61.131 * r**-19.6 + 0.45903 * r**-40),
        "specific_heat": 4215.6129
        - 250.14317 * x
        + 577.96725 * x**2
        - 608.97163 * x**3
        + 361.0647 * x**4
        - 79.665419 * x**5,
        "temperature": t,
    }


def glycol(name: str, by: str, concentration: float, t: float) -> Properties:
    """Propylene or ethylene glycol in water at this fraction by mass or by volume; t in degC."""
    letters = {"propylene glycol": "PG", "ethylene glycol": "EG"}[name]
    table = GLYCOLS[("M" if by == "mass" else "A") + letters]
    dt, dx = t + 273.15 - table["base"][0], concentration - table["base"][1]

    def polynomial(rows: list[list[float]]) -> float:
        return sum((c * dt**i * dx**j for i, row in enumerate(rows) for j, c in enumerate(row)), 0.0)

    return {
        "density": polynomial(table["density"]),
        "viscosity": table["viscosity unit"] * exp(polynomial(table["log viscosity"])),
        "specific_heat": polynomial(table["specific_heat"]),
        "temperature": t,
    }


def air(t: float, altitude: float, humidity: float) -> Properties:
    """Humid air as an ideal gas at the standard atmosphere's pressure of that altitude.

    The saturation pressure (Magnus form, over water) and the viscosity of dry air (Sutherland) are
    good to 0.5 % and 1 %: no figure below 0.1 % of a drop can be compared through them.
    """
    pressure = 101325 * (1 - 2.25577e-5 * altitude) ** 5.25588
    vapour = humidity * 611.2 * exp(17.62 * t / (243.12 + t))
    kelvin = t + 273.15
    density = (pressure - vapour) / (287.055 * kelvin) + vapour / (461.5 * kelvin)
    ratio = 0.622 * vapour / (pressure - vapour)
    return {
        "density": density,
        "viscosity": 1.458e-6 * kelvin**1.5 / (kelvin + 110.4),
        "specific_heat": (1006 + 1860 * ratio) / (1 + ratio),
        "temperature": t,
    }


def at_temperature(fluid: dict[str, Any], t: float, units: str) -> Properties:
    """The fluid of the run at t degC; a custom one has the same figures at any temperature."""
    name = fluid["name"]
    if name == "water":
        return water(t)
    if name == "air":
        height = measure(fluid.get("altitude", "0 m"), "length", units)
        return air(t, height, measure(fluid.get("humidity", 0.5), "fraction"))
    if name == "custom":
        density = measure(fluid["density"], "density", units)
        heat = fluid.get("specific_heat")
        return {
            "density": density,
            "viscosity": measure(fluid["viscosity"], "viscosity", units, density=density),
            "specific_heat": measure(heat, "specific heat", units) if heat is not None else float("nan"),
            "temperature": t,
        }
    return glycol(name, fluid["concentration_by"], measure(fluid["concentration"], "fraction"), t)


def is_gas(fluid: dict[str, Any], units: str) -> bool:
    """Air, or a custom fluid below 50 kg/m3."""
    if fluid["name"] == "custom":
        return measure(fluid["density"], "density", units) < 50
    return bool(fluid["name"] == "air")


def two_legs(fluid: dict[str, Any], source: dict[str, Any], units: str) -> dict[str, Properties]:
    """The fluid going out from a source and coming back to it (of a gas: its discharge and its suction side).

    A source's own temperature overrides the fluid's; where it states no return temperature, the fluid's
    stands, and where neither does, the return is as warm as the supply.
    """
    supply = source.get("temperature", fluid.get("temperature", "nan K"))
    back = source.get("return_temperature", fluid.get("return_temperature", supply))
    return {
        "out": at_temperature(fluid, measure(supply, "temperature", units), units),
        "back": at_temperature(fluid, measure(back, "temperature", units), units),
    }
