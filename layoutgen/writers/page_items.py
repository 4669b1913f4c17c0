"""What the report page says of each thing on the board: an item with its facts, found from any shape.

Items have keys such as ``line:launch_in``, ``part:C1`` or ``finding:3``; tables and canvas
refer to them by key.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import PurePath

from layoutgen.artwork import Hole, Shape, Via
from layoutgen.checks import Finding
from layoutgen.geometry import Ring
from layoutgen.numbers import fixed
from layoutgen.origin import Location
from layoutgen.placement import PlacedLine, PlacedPad, PlacedPair, PlacedPart, PlacedPort, PlacedRadial, Strip
from layoutgen.reading import Part, Port
from layoutgen.sizing import BudgetEntry
from layoutgen.units import quantity_text
from layoutgen.writers.page_tables import gaps_text, mm_text, port_value, value_text
from layoutgen.writers.records import Result

__all__ = ["Catalogue", "Fact", "Item", "element_keys"]

Fact = tuple[str, str]
"""What is said and its figure, such as ("Width", "1.100 mm")."""


@dataclass(frozen=True, slots=True)
class Item:
    """A thing that can be pointed at: its key, what it is called, its facts, the item it is a piece of."""

    key: str
    title: str
    facts: tuple[Fact, ...] = ()
    parent: str = ""


def element_keys(result: Result) -> dict[str, str]:
    """Return the key of each line, pair, stub, part and port by its name."""
    placement = result.placement
    kinds: tuple[tuple[str, Mapping[str, object]], ...] = (
        ("port", placement.ports),
        ("part", placement.parts),
        ("radial", placement.radials),
        ("pair", placement.pairs),
        ("line", placement.lines),
    )
    return {name: f"{kind}:{name}" for kind, names in kinds for name in names}


class Catalogue:
    """All items of a result, numbered; vias, lands and pieces of ground are added when first asked for."""

    def __init__(self, result: Result) -> None:
        """Make the items that exist whatever is drawn: elements, strips and findings."""
        self.result = result
        self.items: list[Item] = []
        self._numbers: dict[str, int] = {}
        self._keys = element_keys(result)
        for item in (*_elements(result), *_strips(result), *_findings(result)):
            self.add(item)

    def add(self, item: Item) -> int:
        """Return an item's number; a key that is there already keeps its first item."""
        if item.key not in self._numbers:
            self._numbers[item.key] = len(self.items)
            self.items.append(item)
        return self._numbers[item.key]

    def number(self, key: str) -> int:
        """Return the number of the item with a key."""
        return self._numbers[key]

    def of_shape(self, shape: Shape) -> int:
        """Return the number of the item that a shape belongs to."""
        name = shape.origin.element
        if shape.role == "pad" and name in self.result.placement.parts:
            return self.add(_pad(self.result.placement.parts[name], shape.outline))
        if shape.role == "strip":
            key = f"strip:{name}:{shape.net}"
            return self._numbers[key] if key in self._numbers else self._other(shape)
        if shape.role in ("line", "pair", "radial", "opening", "paste", "legend") and name in self._keys:
            return self._numbers[self._keys[name]]
        return self._other(shape)

    def of_via(self, via: Via) -> int:
        """Return the number of the item of all vias that are like one."""
        sizes = f"{mm_text(via.drill)} mm", f"{mm_text(via.land)} mm"
        facts = (("For", via.purpose), ("Net", via.net), ("Drill", sizes[0]), ("Land", sizes[1]))
        key = f"via:{via.purpose}:{via.net}:{via.drill}:{via.land}"
        return self.add(Item(key, "via", facts, self._keys.get(via.purpose.partition(":")[2], "")))

    def of_hole(self, hole: Hole) -> int:
        """Return the number of the item of all holes that are like one."""
        kind = "plated" if hole.plated else "unplated"
        facts = (("Diameter", f"{mm_text(hole.diameter)} mm"), ("Net", hole.net or "none"))
        name = hole.origin.element
        key = f"hole:{name}:{kind}:{hole.diameter}"
        return self.add(Item(key, f"{kind} hole", facts, self._keys.get(name, "")))

    def _other(self, shape: Shape) -> int:
        """Return the item of a piece that no element of the circuit stands for."""
        name, net = shape.origin.element, shape.net or "none"
        title = _ROLE_TITLES.get(shape.role, shape.role)
        facts: list[Fact] = [("Net", net)] if shape.net else []
        facts += [("Belongs to", name)] if name in self._keys else []
        facts += self._board_facts() if shape.role == "profile" else []
        key = f"{shape.layer}:{shape.role}:{name}:{net}"
        return self.add(Item(key, title, tuple(facts), self._keys.get(name, "")))

    def _board_facts(self) -> list[Fact]:
        placement = self.result.placement
        size = f"{mm_text(placement.width)} x {mm_text(placement.height)} mm"
        return [("Size", size), ("Corner radius", f"{mm_text(placement.corner_radius)} mm")]


_ROLE_TITLES = {
    "pour": "ground pour",
    "plane": "ground plane below",
    "ground": "ground copper",
    "land": "land of a via",
    "strip": "strip",
    "profile": "board",
    "cutout": "cut-out",
    "opening": "mask opening",
}


def _elements(result: Result) -> Iterator[Item]:
    placement, file = result.placement, result.circuit.file
    yield from (_line(result, line) for line in placement.lines.values())
    yield from (_pair(result, pair) for pair in placement.pairs.values())
    yield from (_radial(radial) for radial in placement.radials.values())
    yield from (_part(result, part, file.parts[part.name]) for part in placement.parts.values())
    yield from (_port(port, file.ports[port.name]) for port in placement.ports.values())


def _line(result: Result, line: PlacedLine) -> Item:
    sized = result.sized.lines[line.name]
    impedance = f"{fixed(sized.impedance, 2)} ohm"
    if sized.asked_impedance is not None and abs(sized.asked_impedance - sized.impedance) >= 0.005:
        impedance += f" (asked {fixed(sized.asked_impedance, 2)})"
    facts = (
        ("Width", f"{mm_text(line.width)} mm"),
        ("Length", f"{mm_text(line.centre_line)} mm"),
        ("Impedance", impedance),
        ("Angle", f"{fixed(math.degrees(line.angle), 2)} deg" + (", free" if sized.free else "")),
        ("Current", f"{fixed(abs(sized.current), 3)} A"),
        ("Temperature rise", f"{fixed(sized.temperature_rise, 1)} K"),
        ("Loss", f"{fixed(sized.loss * line.centre_line * 1e-9, 4)} dB"),
        ("Effective permittivity", fixed(sized.effective_permittivity, 4)),
        ("Pour left, right", f"{gaps_text(result.artwork.line_copper.get(line.name))} mm"),
        ("Nets", " – ".join((*line.nets, "open")[:2])),
    )
    return Item(f"line:{line.name}", f"line {line.name}", (*facts, *_budget(line.budget)))


def _pair(result: Result, pair: PlacedPair) -> Item:
    sized = result.sized.pairs[pair.name]
    facts = (
        ("Width", f"{mm_text(pair.width)} mm"),
        ("Gap", f"{mm_text(pair.gap)} mm"),
        ("Length", f"{mm_text(pair.centre_line)} mm"),
        ("Impedance, even", f"{fixed(sized.even_impedance, 2)} ohm"),
        ("Impedance, odd", f"{fixed(sized.odd_impedance, 2)} ohm"),
        ("Angle", f"{fixed(math.degrees(pair.angle), 2)} deg"),
        ("Currents", ", ".join(fixed(abs(current), 3) for current in sized.currents) + " A"),
        ("Nets", ", ".join(pair.nets)),
    )
    return Item(f"pair:{pair.name}", f"coupled pair {pair.name}", (*facts, *_budget(pair.budget)))


def _radial(radial: PlacedRadial) -> Item:
    facts = (
        ("Sector", f"{fixed(radial.sector_deg, 2)} deg"),
        ("Inner radius", f"{mm_text(radial.inner_radius)} mm"),
        ("Outer radius", f"{mm_text(radial.outer_radius)} mm"),
        ("Net", radial.nets[0]),
    )
    return Item(f"radial:{radial.name}", f"radial stub {radial.name}", facts)


def _budget(entries: tuple[BudgetEntry, ...]) -> Iterator[Fact]:
    """Yield the length budget: each entry that is not zero, and the sum."""
    shown = [entry for entry in entries if round(math.degrees(entry.angle), 3)]
    if not shown:
        return
    yield "Length budget", ""
    for entry in shown:
        yield _entry_name(entry), _degrees(entry.angle)
    yield "sum", _degrees(math.fsum(entry.angle for entry in entries))


def _entry_name(entry: BudgetEntry) -> str:
    cause = entry.cause.replace("_", " ")
    if entry.at.startswith(cause):
        return entry.at
    return cause if entry.cause == "line" or not entry.at else f"{cause} at {entry.at}"


def _degrees(angle: float) -> str:
    return fixed(math.degrees(angle), 3).replace("-", "−") + " deg"


def _part(result: Result, part: PlacedPart, given: Part) -> Item:
    dc = result.circuit.dc
    value, case = value_text(given), given.case or given.footprint
    facts: list[Fact] = [("Kind", given.kind)]
    facts += [("Value", value)] if value else []
    facts += [("Case", case)] if case else []
    facts.append(("Place", f"{mm_text(part.x)}, {mm_text(part.y)} mm"))
    facts.append(("Heading", f"{fixed(part.heading % 360.0, 1)} deg"))
    current = dc.currents.get(part.name)
    facts += [("Current", f"{fixed(abs(current), 3)} A")] if current is not None else []
    facts += [
        (f"Pin {pad.pin}", f"{pad.net}, {_volts(dc.voltages.get(pad.net))}")
        for pad in part.pads
        if dc.voltages.get(pad.net) is not None
    ]
    return Item(f"part:{part.name}", f"part {part.name}", tuple(facts))


def _volts(voltage: float | None) -> str:
    return "" if voltage is None else fixed(voltage, 3).replace("-", "−") + " V"


def _pad(part: PlacedPart, outline: Ring) -> Item:
    """Return the pad of a part whose middle is nearest to that of an outline."""
    xs, ys = zip(*outline.points, strict=True)
    x, y = (min(xs) + max(xs)) / 2, (min(ys) + max(ys)) / 2
    pad: PlacedPad = min(part.pads, key=lambda pad: (math.hypot(pad.x - x, pad.y - y), pad.pin))
    facts = (
        ("Net", pad.net),
        ("Size", f"{mm_text(max(xs) - min(xs))} x {mm_text(max(ys) - min(ys))} mm"),
        ("Middle", f"{mm_text(pad.x)}, {mm_text(pad.y)} mm"),
    )
    return Item(f"pad:{part.name}.{pad.pin}", f"pad {pad.pin} of {part.name}", facts, f"part:{part.name}")


def _port(port: PlacedPort, given: Port) -> Item:
    value = port_value(given)
    facts: list[Fact] = [("Kind", given.kind), ("Net", port.net)]
    facts += [("Voltage" if given.voltage is not None else "Impedance", value)] if value else []
    facts += [("Current", quantity_text(given.current, "current"))] if given.current is not None else []
    facts.append(("Plane", f"{mm_text(port.x)}, {mm_text(port.y)} mm"))
    facts.append(("Copper width", f"{mm_text(port.width)} mm"))
    return Item(f"port:{port.name}", f"port {port.name}", tuple(facts))


def _strips(result: Result) -> Iterator[Item]:
    """Yield the strips; an element's strips on one net share an item."""
    for strip in result.placement.strips:
        yield Item(
            f"strip:{strip.origin.element}:{strip.net}", f"strip on net {strip.net}", _strip_facts(strip)
        )


def _strip_facts(strip: Strip) -> tuple[Fact, ...]:
    length = math.fsum(math.dist(*leg) for leg in zip(strip.path, strip.path[1:], strict=False))
    return (
        ("Width", f"{mm_text(strip.width)} mm"),
        ("Length", f"{mm_text(length)} mm"),
        ("Current", f"{fixed(abs(strip.current), 3)} A"),
        ("Net", strip.net),
    )


def _findings(result: Result) -> Iterator[Item]:
    for number, finding in enumerate(result.findings, start=1):
        yield Item(f"finding:{number}", f"finding {number}: {_severity(finding)}", _finding_facts(finding))


def _severity(finding: Finding) -> str:
    return finding.severity if finding.waived is None else f"waived {finding.severity}"


def _finding_facts(finding: Finding) -> tuple[Fact, ...]:
    figures = ((name, value) for name, value in (("Measured", finding.measured), ("Limit", finding.limit)))
    lines = ((name, f"{value:.4g} {finding.unit}".strip()) for name, value in figures if value is not None)
    where = ", ".join(map(_place, finding.sources))
    return (
        ("Rule", finding.rule),
        ("What", finding.text),
        *lines,
        *((("Items", ", ".join(finding.items)),) if finding.items else ()),
        *((("Written at", where),) if where else ()),
        *((("Limit set at", _place(finding.limit_from)),) if finding.limit_from else ()),
        *((("Waived", finding.waived),) if finding.waived else ()),
    )


def _place(location: Location) -> str:
    """Return a line of a file without the file's folder, which is another on every machine."""
    name = PurePath(location.file).name
    return f"{name}, line {location.line}" if location.line else name
