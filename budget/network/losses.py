"""The fittings of a section or run-out with their loss coefficients."""

from __future__ import annotations

import math

from budget.catalogue import coefficient, kind, kind_coefficient
from budget.description import Description, Finding, FittingCount, FittingUse, Geometry, Run, error, note, warning
from budget.network.arrays import Loss
from budget.physics import shapes

IN_SECTION = "velocity in the section"


def losses_of(description: Description, run: Run, findings: list[Finding]) -> tuple[Loss, ...]:
    """Return the fittings of a run with their coefficients; a finding where one is outside what was published."""
    counted = [_counted(description, run, use, findings) for use in run.fittings]
    return (*counted, *(_of_kind(run, use, findings) for use in run.uses))


def hydraulic_diameter(geometry: Geometry) -> float:
    """Return the bore of a round section, else 4 A/P, m."""
    if geometry.shape == "round":
        return geometry.width
    make = shapes.rectangle if geometry.shape == "rectangular" else shapes.flat_oval
    return float(make(geometry.width, geometry.height).hydraulic_diameter)


def _unknown(name: str, count: int) -> Loss:
    return Loss(name, count, math.nan, 0.0, 0.0, "", "", "", "")


def _counted(description: Description, run: Run, use: FittingCount, findings: list[Finding]) -> Loss:
    """Return a fitting that is counted by its name: one's own, or of the catalogue by the run's method."""
    own = description.fittings.get(use.name)
    if own is not None:
        known_from = own.known_from or ("stated in a library" if own.origin else "stated in the run")
        source = ", ".join(filter(None, (own.source, own.origin and f"from {own.origin}")))
        return Loss(use.name, use.count, own.k, 0.0, 0.0, "own", source, known_from, IN_SECTION)
    if run.geometry is None:
        return _unknown(use.name, use.count)
    bore = hydraulic_diameter(run.geometry)
    nominal = run.geometry.nominal if run.geometry.shape == "round" else bore
    k = coefficient(use.name, run.fitting_method, nominal, bore)
    if k is None:
        return _unknown(use.name, use.count)
    duct = run.line is not None and run.line.kind == "duct"
    if duct and k.method != "constant":
        text = f"{use.name!r} is a pipe fitting; its coefficient is not that of a duct: take a kind for ducts"
        findings.append(warning("fitting-range", text, use.path))
    elif not k.in_range:
        text = f"{use.name!r} is outside its table at this size; the nearest tabulated value is used"
        findings.append(warning("fitting-range", text, use.path))
    elif k.method not in (run.fitting_method, "constant") and run.fitting_method != "by size":
        text = f"{use.name!r} has no coefficient by {run.fitting_method}; it is taken {k.method}"
        findings.append(note("fitting-method", text, use.path))
    return Loss(use.name, use.count, k.constant, k.per_reynolds, 0.0, k.method, k.source, k.known_from, IN_SECTION)


def _of_kind(run: Run, use: FittingUse, findings: list[Finding]) -> Loss:
    """Return a fitting of a kind with parameters."""
    found, geometry = kind(use.kind), run.geometry
    if found is None or geometry is None:
        return _unknown(use.kind, use.count)
    if geometry.shape not in found.shapes:
        text = f"{use.kind!r} has no figures for a {geometry.shape} section, only {' and '.join(found.shapes)}"
        findings.append(error("unknown-fitting", text, use.path))
        return _unknown(use.kind, use.count)
    k = kind_coefficient(
        use.kind,
        use.values,
        shape=geometry.shape,
        width=geometry.width,
        height=geometry.height,
        nominal=geometry.nominal,
    )
    if not k.in_range:
        text = f"{use.kind!r} is outside what was published: {k.reason}; the nearest figure is used"
        findings.append(warning("fitting-range", text, use.path))
    return Loss(
        use.kind,
        use.count,
        k.constant,
        k.per_reynolds,
        k.reynolds_corrected,
        "by kind",
        found.source,
        found.known_from,
        found.reference,
    )
