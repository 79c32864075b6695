"""Circuits, margins, take-up and duty from the drops of legs and terminals.

A circuit belongs to a system: that of its source (of a gas, one a side), or that behind a
differential-holding device. The members of a system are the terminals in it and the devices of that
kind that stand in it, each of which counts as one terminal that needs its set point. IDs of sources,
sections and terminals are unique together, so a member is known by its ID, a system by a section's ID
or by its source and side.
"""

from tests.independent.legs import Table, cross_section
from tests.independent.quantities import measure

Leg = tuple[str, str]
System = str | tuple[str, str]
TIE = 1e-9


def climb(parent: dict[Leg, Leg | None], way: Leg | None) -> list[Leg]:
    """The legs from this one to the source."""
    legs = []
    while way is not None:
        if way not in parent:
            raise ValueError(f"{way[0]} has no {way[1]} leg")
        legs.append(way)
        way = parent[way]
    return legs


def judge(net: Table) -> None:
    """Everything that follows from the drops."""
    weigh(net)
    enclose(net)
    measure_circuits(net)
    take_up(net)
    for name in net["sources"]:
        set_duty(net, name)


def holds(device: Table | None, what: str) -> bool:
    """Whether a device holds its flow, or the differential of what is behind it."""
    return device is not None and device.get("holds") == what


def weigh(net: Table) -> None:
    """What each leg takes of a circuit: a section's items, static and device stand in its main leg."""
    net["weight"] = {}
    for way in net["parent"]:
        section = net["sections"][way[0]]
        result = section["legs"].get(way[1])
        weight = result["friction"] + result["fittings"] if result else 0.0
        if way[1] == section["main"]:
            weight += sum(drop for _, drop, _ in section["pieces"]) + section["static"] + section["base"]
        net["weight"][way] = weight


def enclose(net: Table) -> None:
    """Which system every member belongs to, and each member's own path."""
    sections, parent = net["sections"], net["parent"]
    net["groups"] = [name for name, section in sections.items() if holds(section["device"], "differential")]
    net["paths"], net["home"], net["members"] = {}, {}, {}
    for name, terminal in net["terminals"].items():
        net["paths"][name] = (terminal["out"], terminal["back"])
        guards = guards_on(net, terminal["out"])
        net["home"][name] = guards[-1] if guards else (terminal["source"], terminal["side"])
    for name in net["groups"]:
        out, back = climb(parent, (name, "out"))[::-1], climb(parent, (name, "back"))
        net["paths"][name] = (out, back)
        guards = guards_on(net, out[:-1])
        net["home"][name] = guards[-1] if guards else (sections[name]["source"], "out")
    for member, system in net["home"].items():
        net["members"].setdefault(system, []).append(member)


def guards_on(net: Table, out: list[Leg]) -> list[str]:
    """The differential-holding sections on an outward path, outermost first."""
    return [name for name, _ in out if name in net["groups"]]


def within(net: Table, member: str) -> tuple[list[Leg], list[Leg]]:
    """The legs of a member's path inside its own system."""
    out, back = net["paths"][member]
    system = net["home"][member]
    if not isinstance(system, str):
        return out, back
    if (system, "back") not in back:
        raise ValueError(f"{member} does not return by the paired leg of {system}")
    return out[out.index((system, "out")) + 1 :], back[: back.index((system, "back"))]


def measure_circuits(net: Table) -> None:
    """Every circuit, what each system must have, and every member's circuit inside its system."""
    level: dict[System, float] = {}
    there: dict[str, float] = {}
    net |= {"level": level, "there": there, "largest": {}}
    groups = sorted(net["groups"], key=lambda name: -len(net["paths"][name][0]))
    roots = [system for system in net["members"] if not isinstance(system, str)]
    for system in [*groups, *roots]:
        for member in net["members"][system]:
            out, back = within(net, member)
            own = net["terminals"][member]["own"] if member in net["terminals"] else level[member]
            there[member] = sum(net["weight"][way] for way in (*out, *back)) + own + plant(net, system)
        largest = net["largest"][system] = max(there[member] for member in net["members"][system])
        level[system] = largest
        if isinstance(system, str) and "set_point" in net["sections"][system]["device"]:
            terms = net["sources"][net["sections"][system]["source"]]["terms"]
            level[system] = measure(net["sections"][system]["device"]["set_point"], "pressure", *terms)
            if level[system] < largest * (1 - TIE):
                raise ValueError(f"{system}: the set point is below the largest circuit behind, {largest} Pa")
    for terminal in net["terminals"].values():
        path = (*terminal["out"], *terminal["back"])
        terminal["circuit"] = sum(net["weight"][way] for way in path) + terminal["own"]
        terminal["circuit"] += plant(net, (terminal["source"], terminal["side"]))


def plant(net: Table, system: System) -> float:
    """The source's items, where they are part of every circuit of this system."""
    if isinstance(system, str) or net["gas"]:
        return 0.0
    return float(net["sources"][system[0]]["items"])


def margin(net: Table, member: str) -> float:
    """What could be added to a member before its system needs more."""
    return float(net["level"][net["home"][member]] - net["there"][member])


def system_of(net: Table, name: str) -> System:
    """The system that a section, with its device, stands in."""
    section = net["sections"][name]
    if section["main"] == "out":
        guards = guards_on(net, climb(net["parent"], (name, "out"))[:0:-1])
        return guards[-1] if guards else (section["source"], "out")
    out, back = net["paths"][section["serves"][0]]
    for guard in reversed(guards_on(net, out)):
        if (guard, "back") in back[back.index((name, "back")) :]:
            return guard
    return section["source"], net["terminals"][section["serves"][0]]["side"]


def member_of(net: Table, terminal: str, system: System) -> str:
    """The member of a system that a terminal is, or is behind."""
    member = terminal
    while net["home"][member] != system:
        home = net["home"][member]
        if not isinstance(home, str):
            raise ValueError(f"{terminal} is not within {system}")
        member = home
    return member


def served(net: Table, terminals: list[str], system: System) -> list[str]:
    """The members of a system that these terminals are or are behind, each once."""
    return list(dict.fromkeys(member_of(net, terminal, system) for terminal in terminals))


def take_up(net: Table) -> None:
    """Let the devices take up what the circuits leave, those of the most terminals first."""
    devices: list[tuple[tuple[int, int, int], Table, System, list[str]]] = []
    for order, (name, section) in enumerate(net["sections"].items()):
        if section["device"] is not None:
            system = system_of(net, name)
            members = served(net, net["users"][(name, section["main"])], system)
            rank = (-len(members), 0 if section["main"] == "out" else 1, order)
            devices.append((rank, section, system, members))
    for order, (name, terminal) in enumerate(net["terminals"].items()):
        if terminal["device"] is not None:
            devices.append(((-1, 2, order), terminal, net["home"][name], [name]))
    remaining = {member: margin(net, member) for member in net["home"]}
    for _, owner, _, members in sorted(devices, key=lambda device: device[0]):
        taken = max(0.0, min(remaining[member] for member in members))
        device = owner["device"]
        if holds(device, "flow") and "greatest_drop" in device:
            source = owner["source"]
            greatest = measure(device["greatest_drop"], "pressure", *net["sources"][source]["terms"])
            taken = min(taken, max(0.0, greatest - owner["base"]))
        owner["take_up"] = taken
        for member in members:
            remaining[member] -= taken
    for name, terminal in net["terminals"].items():
        terminal["excess"] = remaining[name]


def index_of(net: Table, system: System) -> list[str]:
    """The terminals of the largest circuit of a system, ties included, in file order."""
    largest = net["largest"][system]
    marked: list[str] = []
    for member in net["members"][system]:
        if net["there"][member] >= largest - TIE * abs(largest):
            marked += [member] if member in net["terminals"] else index_of(net, member)
    return [name for name in net["terminals"] if name in marked]


def spend(net: Table, member: str) -> list[tuple[str, float, Table]]:
    """What a member's circuit inside its system is spent on: heading, pressure and item."""
    pieces: list[tuple[str, float, Table]] = []
    for way in (part for side in within(net, member) for part in side):
        section = net["sections"][way[0]]
        if way[1] in section["legs"]:
            result = section["legs"][way[1]]
            pieces.append(("distribution", result["friction"] + result["fittings"], {}))
        if way[1] == section["main"]:
            pieces += section["pieces"]
            pieces += [("static", section["static"], {}), ("balancing", section["base"], {})]
    if member in net["terminals"]:
        terminal = net["terminals"][member]
        pieces += [("distribution", terminal["run_out"], {}), ("terminal", terminal["drop"], {})]
        pieces += terminal["pieces"]
        pieces += [("static", terminal["static"], {}), ("balancing", terminal["base"], {})]
        return pieces
    inner = member_of(net, index_of(net, member)[0], member)
    return [*pieces, *spend(net, inner), ("balancing", net["level"][member] - net["largest"][member], {})]


def held(net: Table, member: str) -> float:
    """The part of the index circuit that holding devices keep at its design drop, without static."""
    out, back = within(net, member)
    path = [*out, *back]
    carriers = [
        way for way in path
        if holds(net["sections"][way[0]]["device"], "flow") and way[1] == net["sections"][way[0]]["main"]
    ]  # fmt: skip
    terminal = net["terminals"].get(member)
    on_terminal = terminal is not None and holds(terminal["device"], "flow")
    total = 0.0
    for position, way in enumerate(path):
        section = net["sections"][way[0]]
        main = way[1] == section["main"]
        covered = any(is_behind(net, way, position, carrier, path) for carrier in carriers)
        if covered:
            total += net["weight"][way] - (section["static"] if main else 0.0)
        elif main and holds(section["device"], "differential"):
            total += section["base"]
    if terminal is None:
        total += net["level"][member]
    elif on_terminal or carriers:
        total += terminal["own"] - terminal["static"]
    return total


def is_behind(net: Table, way: Leg, position: int, carrier: Leg, path: list[Leg]) -> bool:
    """Whether a leg of a path stands in or behind the section of a flow-holding device."""
    section = net["sections"][way[0]]
    behind = set(net["users"][carrier])
    if way[1] == carrier[1]:
        at = path.index(carrier)
        return position >= at if carrier[1] == "out" else position <= at
    if section["main"] == way[1]:
        return set(net["users"][way]) <= behind
    return carrier in climb(net["parent"], (way[0], "out"))


def set_duty(net: Table, name: str) -> None:
    """Required pressure, duty and index of a source."""
    source = net["sources"][name]
    entry, terms = source["entry"], source["terms"]
    sides = [system for system in ((name, "out"), (name, "back")) if system in net["members"]]
    source["sides"] = {side: net["level"][(name, side)] for _, side in sides}
    source["required"] = sum(source["sides"].values()) + (source["items"] if net["gas"] else 0.0)
    source["index"] = [index_of(net, side)[0] for side in sides]
    source["marked"] = [terminal for side in sides for terminal in index_of(net, side)]
    pieces = list(source["pieces"])
    hold = 0.0
    for side, terminal in zip(sides, source["index"], strict=True):
        member = member_of(net, terminal, side)
        pieces += spend(net, member)
        hold += held(net, member)
    spent: dict[str, float] = {}
    for what, pressure, _ in pieces:
        spent[what] = spent.get(what, 0.0) + pressure
    source["spent"] = spent
    source["static"] = static = spent.get("static", 0.0)
    factor = 1 + measure(entry.get("flow_reserve", 0), "fraction")
    rest = source["required"] - static - hold
    reserve = measure(entry.get("reserve", 0), "fraction")
    source["duty"] = static + (1 + reserve) * (rest * factor**2 + hold)
    source["duty_flow"] = source["mass"] / source["fluid"]["out"]["density"] * factor
    available = entry.get("available")
    source["available"] = None if available is None else measure(available, "pressure", *terms)
    inside = sum(pressure for _, pressure, item in pieces if item.get("inside"))
    source |= {"external_total": None, "external_static": None, "static_pressure": None}
    if net["gas"]:
        source["external_total"] = source["duty"] - inside
        if "outlet" in entry:
            velocity = source["duty_flow"] / cross_section(entry["outlet"], net["units"])["area"]
            dynamic = source["fluid"]["out"]["density"] * velocity**2 / 2
            source["external_static"] = source["external_total"] - dynamic
            source["static_pressure"] = source["duty"] - dynamic
