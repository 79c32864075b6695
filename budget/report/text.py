"""A run's whole budget as plain text: it reads well in a terminal, in a diff and aloud."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence

from budget import __version__
from budget.catalogue import CATALOGUE_VERSION
from budget.description import Description, Level
from budget.network import HEADINGS, Budget, SourceResult
from budget.physics.power import sfp_class
from budget.report.caution import CAUTION
from budget.report.figures import NONE, Figures, plain_number
from budget.report.ledger import ledger
from budget.report.links import links
from budget.report.located import Located
from budget.report.plain import plain
from budget.report.table import Column, labelled, table, wrapped
from budget.report.tables import devices, fittings, items, joints, libraries, terminals
from budget.units import Dimension, to_unit


def text_report(description: Description, budget: Budget, findings: Iterable[Located]) -> str:
    """Return the report of a run: title block, summaries, ledger, terminals, devices, fittings, findings, caution."""
    figures = Figures(description)
    parts = [_title_block(description)]
    parts += [_summary(description, result, figures, budget) for result in budget.sources.values()]
    parts += [
        _part("Ledger", ledger(description, budget, figures)),
        _part("Links", links(description, budget, figures)),
        _part("Terminals", terminals(budget, figures)),
        _part("Items", items(budget, figures)),
        _part("Balancing devices", devices(budget, figures)),
        _part("Fittings", fittings(budget, figures)),
        _part("Junctions and changes of area", joints(budget, figures)),
        _part("Libraries", libraries(description)),
        _part("Titles and notes", list(_remarks(description))),
        _part("Findings", list(_findings(findings))),
        _part("Caution", wrapped(CAUTION, "  ", "  ")),
    ]
    return "\n\n".join("\n".join(lines) for lines in parts if lines) + "\n"


def _part(title: str, lines: Sequence[str]) -> list[str]:
    return [title, *lines] if lines else []


def _title_block(description: Description) -> list[str]:
    design = description.design
    lines = wrapped(plain(design.title) or "Untitled run")
    pairs = [("number", plain(design.number)), ("revision", plain(design.revision)), ("note", plain(design.note))]
    pairs += [("computed by", f"budget {__version__}, catalogue {CATALOGUE_VERSION}")]
    return [*lines, *labelled(pairs)]


def _summary(description: Description, result: SourceResult, figures: Figures, budget: Budget) -> list[str]:
    source = description.sources[result.id]
    density = result.fluid.density

    def pressure(value: float | None) -> str:
        return "" if value is None else figures.pressure(value, density, unit=True)

    duty_flow = result.mass_flow * (result.duty_flow / result.flow) if result.flow else result.mass_flow
    pairs = [
        ("circuit", {"closed": "liquid, closed", "open": "liquid, open", "air": "gas"}[result.kind]),
        ("fluid", _fluid(result, figures)),
        ("flow", figures.flow(result.flow, result.mass_flow, unit=True)),
        ("required", pressure(result.required)),
        ("discharge", pressure(result.discharge_required)),
        ("suction", pressure(result.suction_required)),
        ("static", pressure(result.static) if result.static else ""),
        ("reserve", pressure(result.reserve)),
        ("duty", f"{pressure(result.duty)} at {figures.flow(result.duty_flow, duty_flow, unit=True)}"),
        ("available", pressure(result.available) or "not stated"),
        ("in hand", pressure(result.in_hand)),
        ("fan static", pressure(result.static_pressure) if result.kind == "air" else ""),
        ("external total", pressure(result.external_total)),
        ("external static", pressure(result.external_static)),
        ("hydraulic power", _power(result.hydraulic_power, description)),
        ("shaft power", _power(result.shaft_power, description)),
        ("electrical power", _power(result.electrical_power, description)),
        ("specific power", _specific_power(result)),
        ("index terminal", ", ".join(map(plain, result.index)) or NONE),
        ("index circuit", "; ".join(_circuit(description, budget, result.id, terminal) for terminal in result.index)),
    ]
    title = f": {plain(source.title)}" if source.title else ""
    return [f"Source {plain(result.id)}{title}", *labelled(pairs), "", *_spent(result, figures)]


def _fluid(result: SourceResult, figures: Figures) -> str:
    fluid = result.fluid
    density, viscosity = Dimension.DENSITY, Dimension.VISCOSITY

    def leg(rho: float, mu: float) -> str:
        return f"{figures.text(rho, density, unit=True)}, {figures.text(mu, viscosity, unit=True)}"

    other = "suction" if result.kind == "air" else "return"
    supply, back = leg(fluid.density, fluid.viscosity), leg(fluid.return_density, fluid.return_viscosity)
    return f"{plain(fluid.name)}, {supply}" + (f"; {other} {back}" if back != supply else "")


def _specific_power(result: SourceResult) -> str:
    """Spell the specific power; of a fan with its class."""
    if result.sfp is None:
        return ""
    text = f"{plain_number(result.sfp, 4)} W/(m3/s)"
    return f"{text}, {sfp_class(result.sfp)}" if result.kind == "air" else text


def _power(value: float | None, description: Description) -> str:
    if value is None:
        return ""
    unit = description.display.get("power", "W" if description.design.units == "SI" else "hp")
    return f"{plain_number(to_unit(value, unit, Dimension.POWER), 4)} {' '.join(unit.split())}"


def _circuit(description: Description, budget: Budget, source: str, terminal: str) -> str:
    """Name what an index circuit runs through, from the source's outlet to its inlet."""
    part, path = description.terminals[terminal], budget.terminals[terminal].path
    outward, above = 0, part.from_
    while above is not None and above in description.sections:
        outward += 1
        above = description.sections[above].from_
    steps = [*path[:outward], terminal, *path[outward:]]
    steps = [*steps, source] if part.from_ is None else [source, *steps]
    return ", ".join(map(plain, steps))


def _spent(result: SourceResult, figures: Figures) -> Iterator[str]:
    density = result.fluid.density
    columns = [
        Column("spent under", left=True),
        Column("spent", figures.unit(Dimension.PRESSURE)),
        Column("budget", figures.unit(Dimension.PRESSURE), optional=True),
        Column("left", figures.unit(Dimension.PRESSURE), optional=True),
    ]
    rows = []
    for heading in HEADINGS:
        spent, allowed = result.spent.get(heading, 0.0), result.budget.get(heading)
        if spent == 0.0 and allowed is None:
            continue
        left = None if allowed is None else allowed - spent
        rows.append((heading, *(figures.pressure(value, density) for value in (spent, allowed, left))))
    rows.append(("required", figures.pressure(result.required, density), "", ""))
    yield from table(columns, rows)


def _remarks(description: Description) -> Iterator[str]:
    for id_ in description.order:
        part = description.sources.get(id_) or description.sections.get(id_) or description.terminals.get(id_)
        if part is None:
            continue
        said = [plain(text) for text in (part.title, part.location, part.note) if text]
        if said:
            yield from wrapped(f"{plain(id_)}: {'; '.join(said)}", "  ", "    ")


def _findings(findings: Iterable[Located]) -> Iterator[str]:
    """Spell findings, the gravest first; the place is a key, for a line number would change with every other line."""
    found = list(findings)
    if not found:
        yield "  none"
    for level in Level:
        for finding in found:
            if finding.level is level:
                place = ".".join(filter(None, (finding.table, finding.key)))
                text = f"{level.value} {finding.code}: {plain(place)}: {plain(finding.message)}"
                yield from wrapped(text, "  ", "    ")
