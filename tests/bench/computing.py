"""Computing 10,000 sections against the friction factor alone, and with fittings and junctions against without."""

from __future__ import annotations

import random
from functools import partial

from budget.description import describe, read_text
from budget.network import compute, lay_out
from budget.physics.friction import friction_factor
from tests.bench.timing import best

SECTIONS = 10_000
SIZES = ("DN15", "DN20", "DN25", "DN32", "DN40", "DN50", "DN65", "DN80", "DN100")


def building(sections: int = SECTIONS, seed: int = 1, branches: int = 3, losses: str = "fittings") -> str:
    """Return a paired heating run: ten risers, so many branches at every joint, a terminal at every end.

    Its losses are those of friction alone (""), with "fittings", or with "fittings and junctions": two branches at a
    joint, of which the first goes straight on.
    """
    rng = random.Random(seed)
    lines = [
        "format = 1",
        '[fluid]\nname = "water"\ntemperature = 70\nreturn_temperature = 50',
        '[defaults]\npipe = "steel"\npaired = true\ntakeoff = "none"',
        '[pipe.steel]\ncatalogue = "steel EN 10255 medium"',
        "[source.P1]",
    ]
    first_end = sections
    for number in range(sections):
        parent = "P1" if number < 10 else f"S{(number - 10) // branches}"
        depth_left = max(len(str(sections)) - len(str(number)), 0)
        size = SIZES[min(2 * depth_left + rng.randrange(2), len(SIZES) - 1)]
        lines.append(f'[section.S{number}]\nfrom = "{parent}"\nsize = "{size}"\nlength = {rng.uniform(1, 20):.2f}')
        if losses:
            lines.append('fittings = { "elbow 90" = 2, "gate valve" = 1 }')
        if "junctions" in losses and 10 <= number < sections - (sections - 10) % branches:
            lines.append('takeoff = "branch"' if (number - 10) % branches else 'takeoff = "straight"\ntransition = 30')
        if 10 + branches * number >= sections:
            first_end = min(first_end, number)
    lines += [
        f'[terminal.T{number}]\nfrom = "S{number}"\nflow = {rng.uniform(0.02, 0.1):.3f}\ndrop = 5'
        for number in range(first_end, sections)
    ]
    return "\n".join(lines)


def report() -> str:
    """Return both ratios, and the times behind them."""
    layout = lay_out(describe(read_text(building())))
    drops = compute(layout).drops
    legs = layout.legs
    alone = best(lambda: friction_factor(drops.reynolds, legs.roughness / legs.diameter, legs.laminar))
    whole = best(lambda: compute(layout))
    plain, joined = (
        lay_out(describe(read_text(building(branches=2, losses=losses)))) for losses in ("", "fittings and junctions")
    )
    without, with_them = (best(partial(compute, one)) for one in (plain, joined))
    return (
        f"computing {SECTIONS:,} sections ({len(legs):,} legs, {len(layout.terminals):,} terminals) / "
        f"friction factor alone: {whole / alone:.1f} (at most 20; {whole * 1e3:.1f} ms / {alone * 1e3:.2f} ms)\n"
        f"the same with {len(joined.junctions):,} junctions, changes of area and fittings / without: "
        f"{with_them / without:.2f} (at most 2.5; {with_them * 1e3:.1f} ms / {without * 1e3:.1f} ms)"
    )
