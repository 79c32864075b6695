"""The catalogue as plain text rows: each figure with its source and how it is known."""

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from typing import Any, Final

from budget.catalogue.ducts import DuctLine, duct_line, duct_names, standard_sizes
from budget.catalogue.fittings import fitting, fitting_names
from budget.catalogue.fluids import Fluid, fluid, fluid_names
from budget.catalogue.kind_listing import Block, kind_blocks, kinds_block
from budget.catalogue.kinds import kind, kind_names
from budget.catalogue.limits import limits
from budget.catalogue.loader import load
from budget.catalogue.pipes import PipeLine, pipe_line, pipe_names
from budget.catalogue.provenance import how_known
from budget.physics.fluids import ZERO_CELSIUS, Validity


@dataclass(frozen=True, slots=True)
class Row:
    """One row of a listing. A heading row names the columns of the rows below it; a lone cell spans all."""

    cells: tuple[str, ...]
    heading: bool = False


def rows(kind: str, name: str | None = None) -> list[Row]:
    """Rows of one part of the catalogue: "pipes", "ducts", "fittings", "fluids" or "limits" (KINDS).

    With the name of an entry its figures; with a part of names the overview of the entries that hold it;
    without a name the overview of all. Raises LookupError for a kind or a name that is not there, naming the
    nearest.
    """
    listing = _LISTINGS.get(kind)
    if listing is None:
        raise LookupError(f"the catalogue had no part {kind!r}; known are {', '.join(KINDS)}")
    names = listing.names()
    if name is None:
        return listing.overview(names)
    wanted = " ".join(name.lower().split())
    if exact := [n for n in names if n.lower() == wanted]:
        return listing.detail(exact[0])
    if holding := [n for n in names if wanted in n.lower()]:
        return listing.overview(holding)
    near = get_close_matches(wanted, names, n=3, cutoff=0.3) or names[:3]
    raise LookupError(f"the catalogue had no {listing.entry} {name!r}; nearest: {', '.join(near)}")


def aligned(listing: Iterable[Row]) -> str:
    """Rows as text: a block of columns under each heading, the blocks apart by an empty line."""
    blocks: list[list[Row]] = []
    for row in listing:
        if row.heading or not blocks:
            blocks.append([])
        blocks[-1].append(row)
    return "\n\n".join("\n".join(_align(block)) for block in blocks)


def _align(block: list[Row]) -> list[str]:
    columns = max(len(row.cells) for row in block)
    spread = [row.cells for row in block if len(row.cells) == columns]
    widths = [max(len(cells[i]) for cells in spread) for i in range(columns - 1)]
    lines = []
    for row in block:
        padded = [cell.ljust(width) for cell, width in zip(row.cells, widths, strict=False)]
        lines.append("  ".join([*padded, row.cells[-1]]) if len(row.cells) == columns else row.cells[0])
    return lines


def _known(known_from: str, confidence: str) -> str:
    return f"{how_known(known_from)} (confidence {confidence})"


def _mm(metres: float) -> str:
    return f"{metres * 1000.0:.10g}"


def _pipes_overview(names: Iterable[str]) -> list[Row]:
    listing = [Row(("pipe line", "roughness mm", "sizes", "source", "known"), heading=True)]
    for line in (_pipe(name) for name in names):
        sizes = f"{line.sizes[0].written} to {line.sizes[-1].written}"
        listing.append(
            Row((line.name, _mm(line.roughness), sizes, line.source, _known(line.known_from, line.confidence)))
        )
    return listing


def _pipe_detail(name: str) -> list[Row]:
    line = _pipe(name)
    listing = [Row((f"{line.name} ({line.material})",), heading=True)]
    listing.append(Row((f"sizes: {line.source}; {_known(line.known_from, line.confidence)}",)))
    between = ""
    if line.roughness_range is not None:
        between = f" (published {_mm(line.roughness_range[0])} to {_mm(line.roughness_range[1])})"
    known = _known(line.roughness_known_from, line.roughness_confidence)
    listing.append(Row((f"roughness {_mm(line.roughness)} mm{between}: {line.roughness_source}; {known}",)))
    if line.note:
        listing.append(Row((line.note,)))
    listing.append(Row(("size", "also", "nominal mm", "outside mm", "bore mm"), heading=True))
    listing += [Row((s.written, ", ".join(s.other), _mm(s.nominal), _mm(s.outside), _mm(s.bore))) for s in line.sizes]
    return listing


def _ducts_overview(names: Iterable[str]) -> list[Row]:
    listing = [Row(("duct", "roughness mm", "published mm", "source", "known"), heading=True)]
    for line in (_duct(name) for name in names):
        between = f"{_mm(line.roughness_range[0])} to {_mm(line.roughness_range[1])}"
        known = _known(line.known_from, line.confidence)
        listing.append(Row((line.name, _mm(line.roughness), between, line.source, known)))
    return listing


def _ducts_all(names: Iterable[str]) -> list[Row]:
    names = list(names)
    listing = _ducts_overview(names)
    if names != list(duct_names()):
        return listing
    listing.append(Row(("standard sizes", "sides or diameters", "source", "known"), heading=True))
    for shape, system, factor, unit in (
        ("round", "SI", 1000.0, "mm"),
        ("rectangular", "SI", 1000.0, "mm"),
        ("round", "IP", 1.0 / 0.0254, "in"),
        ("rectangular", "IP", 1.0 / 0.0254, "in"),
    ):
        grid = standard_sizes(shape, system)
        sides = " ".join(f"{side * factor:g}" for side in grid.sides)
        if grid.short_sides and grid.short_sides != grid.sides:
            sides += " against " + " ".join(f"{side * factor:g}" for side in grid.short_sides)
        listing.append(Row((f"{shape}, {unit}", sides, grid.source, _known(grid.known_from, grid.confidence))))
    return listing


def _duct_detail(name: str) -> list[Row]:
    line = _duct(name)
    listing = _ducts_overview([name])
    if line.note:
        listing.append(Row((line.note,)))
    if line.flexible:
        factor = load("ducts")["flexible_compression"]
        listing.append(Row((f"compressed: friction x {factor['formula']}; {factor['use']}",)))
        listing.append(Row((f"{factor['source']}; {_known(factor['known_from'], factor['confidence'])}",)))
    return listing


def _all_fittings() -> tuple[str, ...]:
    return (*fitting_names(), *kind_names())


def _fittings_overview(names: Iterable[str]) -> list[Row]:
    names = list(names)
    listing = []
    if any(fitting(name) for name in names):
        listing.append(Row(("fitting", "methods", "scatter", "source", "known"), heading=True))
    for entry in filter(None, map(fitting, names)):
        known = _known(entry.known_from, entry.confidence)
        listing.append(Row((entry.name, ", ".join(entry.methods), entry.scatter or "not stated", entry.source, known)))
    return listing + _rows(kinds_block(names))


def _rows(block: Block) -> list[Row]:
    return [Row(cells, heading=i == 0) for i, cells in enumerate(block)]


def _fitting_detail(name: str) -> list[Row]:
    if (by_kind := kind(name)) is not None:
        return [row for block in kind_blocks(by_kind) for row in _rows(block)]
    tables = load("fittings")
    row: Mapping[str, Any] = next(r for r in tables["fitting"] if r["name"] == name)
    listing = [Row((name,), heading=True)]
    listing += [Row((row["note"],))] if "note" in row else []
    listing += [Row((f"scatter of published data: {row['scatter']}",))] if "scatter" in row else []
    if "constant" in row:
        known = _known(row["known_from"], row["confidence"])
        return [*listing, Row((f"K = {row['constant']:g} at every size: {row['source']}; {known}",))]
    listing.append(Row(("method", "size", "figures", "source", "known"), heading=True))
    if "by_size" in row:
        for join, use in (("threaded", "to DN50"), ("flanged", "above DN50")):
            table = tables["by_size"][join]
            pairs = zip(table["size"], table[row["by_size"][join]], strict=True)
            figures = ", ".join(f"{size:g} mm {k:g}" for size, k in pairs if k >= 0)
            listing.append(_method("by size", f"{join}, {use}", f"K: {figures}", table, row["by_size"]))
    if "crane" in row:
        listing.append(_method("crane", "all", f"K = {_crane_n(row['crane'])} fT", tables["crane"], row["crane"]))
    for method, letters in (("darby", ("Km", "Ki", "Kd")), ("hooper", ("K1", "Kinf"))):
        sets = row[method]["k"] if method in row else []
        for i, figures in enumerate(sets):
            use = "all" if len(sets) == 1 else ("threaded, to DN50", "flanged, above DN50")[i]
            text = ", ".join(f"{letter} {figure:g}" for letter, figure in zip(letters, figures, strict=True))
            listing.append(_method(method, use, text, tables[method], row[method]))
    return listing


def _method(method: str, use: str, figures: str, origin: Mapping[str, Any], entry: Mapping[str, Any]) -> Row:
    figures += f" ({entry['note']})" if "note" in entry else ""
    formula = f"{origin['formula']}: " if method in ("darby", "hooper") else ""
    known = _known(origin["known_from"], origin["confidence"])
    return Row((method, use, formula + figures, origin["source"], known))


def _crane_n(entry: Mapping[str, Any]) -> str:
    if "n" in entry:
        return f"{entry['n']:g}"
    return "n (" + ", ".join(f"{low:g} to {high:g} mm: {n:g}" for low, high, n in entry["bands"]) + ")"


def _fluids_overview(names: Iterable[str]) -> list[Row]:
    listing = []
    for name in names:
        listing += _fluid_detail(name)
    return listing


def _fluid_detail(name: str) -> list[Row]:
    entry = _fluid(name)
    listing = [Row((entry.name, "correlation", "verified", "source", "known"), heading=True)]
    listing += [Row((p.name, p.correlation, p.verified, p.source, how_known(p.known_from))) for p in entry.properties]
    listing += [Row((f"holds {_range(basis, validity)}",)) for basis, validity in entry.ranges.items()]
    return listing


def _range(basis: str, validity: Validity) -> str:
    low, high = (t - ZERO_CELSIUS for t in validity.temperature)
    least, most = validity.fraction
    text = f"{low:g} to {high:g} degC"
    return f"by {basis} {least * 100:g} to {most * 100:g} %, {text}, not below the freezing point" if basis else text


def _limits_overview(names: Iterable[str]) -> list[Row]:
    listing = []
    for name in names:
        listing += _limit_detail(name)
    return listing


def _limit_detail(name: str) -> list[Row]:
    group = [limit for limit in limits() if limit.group == name]
    first = group[0]
    listing = [Row((name, "usual"), heading=True)]
    listing += [Row((limit.what, limit.value)) for limit in group]
    listing.append(Row((f"{first.source}; {_known(first.known_from, first.confidence)}",)))
    return [*listing, Row((first.note,))] if first.note else listing


def _limit_groups() -> tuple[str, ...]:
    return tuple(dict.fromkeys(limit.group for limit in limits()))


def _pipe(name: str) -> PipeLine:
    line = pipe_line(name)
    assert line is not None, name  # noqa: S101 - the name comes from the catalogue itself
    return line


def _duct(name: str) -> DuctLine:
    line = duct_line(name)
    assert line is not None, name  # noqa: S101
    return line


def _fluid(name: str) -> Fluid:
    entry = fluid(name)
    assert entry is not None, name  # noqa: S101
    return entry


@dataclass(frozen=True, slots=True)
class _Listing:
    """One part of the catalogue: what an entry is called, the names, the overview and the detail."""

    entry: str
    names: Callable[[], tuple[str, ...]]
    overview: Callable[[Iterable[str]], list[Row]]
    detail: Callable[[str], list[Row]]


_LISTINGS: Final[Mapping[str, _Listing]] = {
    "pipes": _Listing("pipe line", pipe_names, _pipes_overview, _pipe_detail),
    "ducts": _Listing("duct", duct_names, _ducts_all, _duct_detail),
    "fittings": _Listing("fitting", _all_fittings, _fittings_overview, _fitting_detail),
    "fluids": _Listing("fluid", fluid_names, _fluids_overview, _fluid_detail),
    "limits": _Listing("usual limit", _limit_groups, _limits_overview, _limit_detail),
}
KINDS: Final = tuple(_LISTINGS)
"""Parts of the catalogue that can be listed."""
