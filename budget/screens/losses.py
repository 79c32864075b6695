"""Every loss of a pipe or duct, leg by leg: fittings, junction, change of area, what stands in line, its device."""

from __future__ import annotations

from collections.abc import Iterator

from budget.catalogue.provenance import how_known
from budget.network.results import DeviceResult, ItemResult, LegResult, LossResult, RunResult
from budget.report.figures import Figures, plain_number
from budget.report.plain import plain
from budget.screens.fitting_words import velocity
from budget.screens.page import Line
from budget.units import Dimension


class Losses:
    """Spells losses in the units of one design, heads in those of one density."""

    def __init__(self, figures: Figures, density: float | None) -> None:
        """Take the figures of a design, and the density of the source in kg/m3."""
        self.figures, self.density = figures, density

    def sums(self, run: RunResult) -> Iterator[Line]:
        """Spell the drop of a run by what it is made up of."""
        yield Line("drop", "", "heading")
        for label, value in (
            ("friction", run.friction), ("fittings", run.fittings), ("junction", run.junction),
            ("change of area", run.transition), ("items", run.items), ("static", run.static), ("drop", run.drop),
        ):  # fmt: skip
            if value or label in ("friction", "drop"):
                yield self._pressure(label, value)

    def legs(
        self, run: RunResult, items: tuple[ItemResult, ...] = (), device: DeviceResult | None = None
    ) -> Iterator[Line]:
        """Spell each leg with its losses; items and device stand on the first one."""
        for number, leg in enumerate(run.legs):
            yield from self._leg(leg)
            if number == 0:
                yield from self.items(items)
                yield from self.device(device)

    def items(self, items: tuple[ItemResult, ...]) -> Iterator[Line]:
        """Spell what stands in line."""
        for item in items:
            inside = ", inside" if item.inside else ""
            yield Line("  item", "", "", None, (self._spelled(item.drop), plain(item.name), f"{item.heading}{inside}"))

    def device(self, device: DeviceResult | None) -> Iterator[Line]:
        """Spell a balancing device: its drop, of what it is made up, where it is set."""
        if device is None:
            return
        parts = [self._spelled(device.drop), plain(device.name)]
        parts += [f"base {self._spelled(device.base)}", f"take-up {self._spelled(device.take_up)}"]
        parts += [f"{name} {plain_number(v)}" for name, v in (("Kv", device.kv), ("k", device.k)) if v is not None]
        parts += [f"setting {plain_number(device.setting)}"] if device.setting is not None else []
        parts += [f"signal {self._spelled(device.signal)}"] if device.signal is not None else []
        parts += [f"holds {self._spelled(device.set_point)}"] if device.set_point is not None else []
        source = f"from {plain(device.origin)}" if device.origin else ""
        yield Line("  device", "", "", None, tuple(parts), source=source)

    def _leg(self, leg: LegResult) -> Iterator[Line]:
        figures = self.figures
        yield Line(f"{leg.leg} leg", "", "heading")
        yield Line("  velocity", figures.text(leg.velocity, Dimension.VELOCITY, unit=True))
        yield self._pressure("velocity pressure", leg.velocity_pressure)
        yield Line("  Reynolds number", f"{plain_number(leg.reynolds)} ({leg.regime})")
        yield Line("  friction factor", plain_number(leg.friction_factor))
        yield Line("  gradient", figures.text(leg.gradient, Dimension.GRADIENT, unit=True))
        yield self._pressure("friction", leg.friction)
        for loss in leg.losses:
            yield self._loss(f"{loss.count} {plain(loss.name)}", loss)
        for joint in leg.joints:
            label = "change of area" if joint.name == "change of area" else "junction"
            yield self._loss(label, joint, () if joint.name == label else (joint.name,))

    def _loss(self, label: str, loss: LossResult, more: tuple[str, ...] = ()) -> Line:
        gain = " gain" if loss.drop < 0.0 else ""
        pieces = (f"K {plain_number(loss.k)}", f"{self._spelled(loss.drop)}{gain}", *more, velocity(loss, self.figures))
        known = how_known(loss.known_from) if loss.known_from else ""
        source = "; ".join(filter(None, (plain(loss.method), plain(known), plain(loss.source))))
        marked = "; ".join(filter(None, (plain(loss.method), plain(loss.known_from), plain(loss.source))))
        return Line(f"  {label}", role="good" if gain else "", pieces=pieces, source=source, short=marked)

    def _pressure(self, label: str, value: float | None) -> Line:
        return Line(f"  {label}", self._spelled(value))

    def _spelled(self, value: float | None) -> str:
        return self.figures.pressure(value, self.density, unit=True)
