"""Tables of the report page: lines with their budgets, strips, parts, ports, bias."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

from layoutgen.artwork import LineCopper
from layoutgen.numbers import fixed
from layoutgen.placement import PlacedLine, PlacedPair, PlacedRadial
from layoutgen.reading import Part, Port
from layoutgen.sizing import BudgetEntry
from layoutgen.units import quantity_text
from layoutgen.writers.html import Cell, cell, escape, table, zoom_link
from layoutgen.writers.records import Result

__all__ = [
    "bias_tables",
    "gaps_text",
    "line_tables",
    "mm_text",
    "part_table",
    "port_table",
    "port_value",
    "strip_table",
    "value_text",
]

_CAUSES = {
    "line": "line",
    "bend": "bends",
    "step": "steps",
    "tee": "tees",
    "cross": "crosses",
    "open_end": "open end",
    "pad": "pads",
    "via": "vias",
    "port": "port",
    "response_correction": "correction",
}
_VALUE_DIMENSIONS = {"resistor": "resistance", "capacitor": "capacitance", "inductor": "inductance"}


def line_tables(result: Result) -> Iterator[str]:
    """Yield the tables of lines, coupled pairs and radial stubs, then the length budgets."""
    placement = result.placement
    heads: tuple[str, ...]
    if placement.lines:
        heads = (
            "Line", "Nets", "Impedance (ohm)", "Width (mm)", "Angle (deg)", "Centre-line (mm)", "Bends",
            "Pour left, right (mm)", "Effective permittivity", "Current (A)", "Loss (dB)",
        )  # fmt: skip
        yield table("Lines", heads, (_line_row(result, line) for line in placement.lines.values()))
    if placement.pairs:
        heads = (
            "Pair", "Nets", "Even, odd (ohm)", "Width (mm)", "Gap (mm)", "Angle (deg)", "Centre-line (mm)",
            "Effective permittivity", "Currents (A)",
        )  # fmt: skip
        yield table("Coupled pairs", heads, (_pair_row(result, pair) for pair in placement.pairs.values()))
    if placement.radials:
        heads = ("Radial stub", "Net", "Sector (deg)", "Inner radius (mm)", "Outer radius (mm)")
        yield table("Radial stubs", heads, map(_radial_row, placement.radials.values()))
    yield "<h3>Length budgets</h3>"
    yield (
        "<p>What each piece of a line is worth in degrees at the design frequency. The entries add up to the "
        "angle asked for; the drawn centre-line alone is the entry “line”.</p>"
    )
    yield _budgets([*placement.lines.values(), *placement.pairs.values()])


def _line_row(result: Result, line: PlacedLine) -> list[Cell]:
    sized = result.sized.lines[line.name]
    asked = sized.asked_impedance
    impedance: str = fixed(sized.impedance, 2)
    if asked is not None and abs(asked - sized.impedance) >= 0.005:
        impedance += f"<br><small>asked {fixed(asked, 2)}</small>"
    return [
        zoom_link(f"line:{line.name}", line.name),
        _path_of_nets((*line.nets, "open")[:2]),
        impedance,
        mm_text(line.width),
        fixed(math.degrees(line.angle), 2) + (" <small>free</small>" if sized.free else ""),
        mm_text(line.centre_line),
        str(len(line.bends)),
        gaps_text(result.artwork.line_copper.get(line.name)),
        fixed(sized.effective_permittivity, 4),
        fixed(abs(sized.current), 3),
        fixed(sized.loss * line.centre_line * 1e-9, 4),
    ]


def _pair_row(result: Result, pair: PlacedPair) -> list[Cell]:
    sized = result.sized.pairs[pair.name]
    return [
        zoom_link(f"pair:{pair.name}", pair.name),
        escape(", ".join(pair.nets)),
        f"{fixed(sized.even_impedance, 2)}, {fixed(sized.odd_impedance, 2)}",
        mm_text(pair.width),
        mm_text(pair.gap),
        fixed(math.degrees(pair.angle), 2),
        mm_text(pair.centre_line),
        f"{fixed(sized.permittivity_even, 4)}, {fixed(sized.permittivity_odd, 4)}",
        ", ".join(fixed(abs(current), 3) for current in sized.currents),
    ]


def _radial_row(radial: PlacedRadial) -> list[Cell]:
    name = zoom_link(f"radial:{radial.name}", radial.name)
    radii = mm_text(radial.inner_radius), mm_text(radial.outer_radius)
    return [name, escape(radial.nets[0]), fixed(radial.sector_deg, 2), *radii]


def _budgets(lines: Sequence[PlacedLine | PlacedPair]) -> str:
    """Return the budgets, one column for each cause that occurs."""
    causes = [c for c in _CAUSES if any(entry.cause == c for line in lines for entry in line.budget)]
    rows = (
        [_line_link(line), fixed(math.degrees(line.angle), 3)]
        + [_entries([e for e in line.budget if e.cause == cause]) for cause in causes]
        + [fixed(math.degrees(math.fsum(e.angle for e in line.budget)), 3)]
        for line in lines
    )
    heads = ["Line", "Angle (deg)", *(_CAUSES[cause] for cause in causes), "Sum (deg)"]
    return table("Length budgets in degrees", heads, rows)


def _line_link(line: PlacedLine | PlacedPair) -> Cell:
    kind = "line" if isinstance(line, PlacedLine) else "pair"
    return zoom_link(f"{kind}:{line.name}", line.name)


def _entries(entries: Sequence[BudgetEntry]) -> Cell:
    """Return the entries of one cause with their places, zero ones left out."""
    shown = [e for e in entries if round(math.degrees(e.angle), 3)]
    return "<br>".join(
        f"{_signed(math.degrees(e.angle))}" + (f" <small>{escape(e.at)}</small>" if e.cause != "line" else "")
        for e in shown
    )


def _signed(value: float, places: int = 3) -> str:
    return fixed(value, places).replace("-", "−")


def strip_table(result: Result) -> str:
    """Return the copper that no line of the circuit stands for; empty when there is none."""
    strips = result.placement.strips
    if not strips:
        return ""
    rows = (
        (
            zoom_link(f"strip:{s.origin.element}:{s.net}", s.name),
            escape(s.net),
            mm_text(s.width),
            _path(s.path),
            fixed(abs(s.current), 3),
        )
        for s in strips
    )
    heads = ("Strip", "Net", "Width (mm)", "Path (mm)", "Current (A)")
    return "<h3>Strips</h3><p>Copper between pads that the circuit has no line for.</p>" + table(
        "Strips", heads, rows
    )


def part_table(result: Result) -> str:
    """Return the parts with their values, places and voltages across them."""
    given = result.circuit.file.parts
    rows = (
        (
            zoom_link(f"part:{part.name}", part.name),
            escape(given[part.name].kind),
            cell(value_text(given[part.name])),
            cell(given[part.name].case or given[part.name].footprint),
            _nets(given[part.name]),
            mm_text(part.x),
            mm_text(part.y),
            fixed(part.heading % 360.0, 1),
        )
        for part in result.placement.parts.values()
    )
    heads = ("Part", "Kind", "Value", "Case", "Nets", "x (mm)", "y (mm)", "Heading (deg)")
    return table("Parts: place between the pads, or of the footprint's origin", heads, rows)


def value_text(part: Part) -> str | None:
    """Return a part's value with its unit, or the file that stands for it."""
    dimension = _VALUE_DIMENSIONS.get(part.kind)
    if part.value is None or dimension is None:
        return part.data
    return quantity_text(part.value, dimension)  # type: ignore[arg-type]


def _nets(part: Part) -> Cell:
    if part.nets:
        return _path_of_nets(part.nets)
    return escape(", ".join(f"{pin}: {net}" for pin, net in (part.pins or {}).items()))


def port_table(result: Result) -> str:
    """Return the ports with their planes, impedances or voltages."""
    given = result.circuit.file.ports
    rows = (
        (
            zoom_link(f"port:{port.name}", port.name),
            given[port.name].kind,
            escape(port.net),
            cell(port_value(given[port.name])),
            mm_text(port.x),
            mm_text(port.y),
            fixed(port.heading % 360.0, 1),
        )
        for port in result.placement.ports.values()
    )
    heads = ("Port", "Kind", "Net", "Impedance or voltage", "x (mm)", "y (mm)", "Heading (deg)")
    return table("Ports: the end of their copper; the heading points into the board", heads, rows)


def port_value(port: Port) -> str | None:
    """Return a port's voltage or impedance, None when it has neither."""
    if port.voltage is not None:
        return quantity_text(port.voltage, "voltage").replace("-", "−")
    return None if port.impedance is None else quantity_text(port.impedance, "impedance")


def bias_tables(result: Result) -> Iterator[str]:
    """Yield the expected voltages of nets and currents through elements, and what was assumed."""
    dc = result.circuit.dc
    nets = [(escape(net), _signed(voltage, 4)) for net, voltage in dc.voltages.items()]
    flowing = ((name, current) for name, current in dc.currents.items() if abs(current) >= 5e-7)
    currents = [(escape(name), _signed(current * 1e3, 3)) for name, current in flowing]
    yield '<div class="beside">'
    yield table("Voltages to expect at the nets", ("Net", "Voltage (V)"), nets)
    if currents:
        yield table("Currents: first to second net, or into the pin", ("Element", "Current (mA)"), currents)
    else:
        yield "<p>No element carries direct current.</p>"
    yield "</div>"
    yield from (f'<p class="soft">{escape(note)}</p>' for note in dc.notes)


def _path_of_nets(nets: Sequence[str]) -> Cell:
    return escape("\u00a0– ".join(nets))


def gaps_text(copper: LineCopper | None) -> str:
    """Return how far the pour is from a line, left and right [mm]; a dash where it is out of reach."""
    if copper is None or (copper.gap_left is None and copper.gap_right is None):
        return "–"
    return ", ".join("–" if gap is None else mm_text(gap) for gap in (copper.gap_left, copper.gap_right))


def mm_text(nm: float) -> str:
    """Return a length [nm] as millimetres with three decimals and a true minus."""
    return fixed(nm / 1e6, 3).replace("-", "−")


def _path(points: Sequence[tuple[int, int]]) -> Cell:
    return escape(" → ".join(f"({mm_text(x)}, {mm_text(y)})" for x, y in points))
