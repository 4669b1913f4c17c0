"""What the test engineer needs: ports with their planes, bias to expect, the order of switching on.

A sheet of plain text to read beside the bench, and the same ports and bias points as comma-separated values.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

from layoutgen.numbers import fixed, mm
from layoutgen.response.pads import pad_frames
from layoutgen.units import quantity_text
from layoutgen.writers.copper_nets import copper_nets
from layoutgen.writers.ipcd356 import test_points
from layoutgen.writers.part_texts import flange_parts
from layoutgen.writers.plain import columns, comma_separated, heading, paragraph
from layoutgen.writers.records import Job, Result
from layoutgen.writers.response_files import TRACE_HEADS, trace_values
from layoutgen.writers.supplies import Supply, supplies_of

__all__ = [
    "BIAS_HEADS",
    "PORT_HEADS",
    "bias_rows",
    "port_rows",
    "switching_steps",
    "write_bias_points",
    "write_port_table",
    "write_test_sheet",
]

PORT_HEADS = (
    "Touchstone port", "Name", "Kind", "Net", "x (mm)", "y (mm)", "Heading into the board (deg)",
    "Impedance or voltage", "Copper width (mm)", "Plane",
)  # fmt: skip
"""Headings of :func:`port_rows`."""

BIAS_HEADS = ("Net", "Conductor", "Expected voltage (V)", "Probe at", "x (mm)", "y (mm)")
"""Headings of :func:`bias_rows`."""

_LIMIT_SHARE = 1.2
"""Current limit over expected current [-]: common practice, no source."""
_SMALLEST_LIMIT = 0.01
"""Least current limit worth setting [A]: common practice, no source."""
_HIGH_VOLTAGE = 60.0
"""Direct voltage above which touching is taken as dangerous [V]: common practice, no source."""


def write_port_table(result: Result, job: Job) -> bytes:
    """Return the ports as comma-separated values; the same for equal results (``job`` changes nothing)."""
    return comma_separated(PORT_HEADS, port_rows(result))


def write_bias_points(result: Result, job: Job) -> bytes:
    """Return the bias points as comma-separated values; the same for equal results."""
    return comma_separated(BIAS_HEADS, bias_rows(result))


def write_test_sheet(result: Result, job: Job) -> bytes:
    """Return the sheet as plain text in UTF-8; it is the same for equal results."""
    design = result.circuit.file.design
    title = f"Test sheet: {design.title}, revision {design.revision or 'none'}"
    parts = [
        heading(title, "="),
        heading("Ports"),
        paragraph(
            "x runs east and y north from the board's south-west corner, seen from the top. The plane of a "
            "port is the end of its copper; the plane of a device's pin is the middle of the edge of its pad "
            "that faces the device, or the far edge where the device's data include the pad."
        ),
        columns(PORT_HEADS, port_rows(result)),
        heading("Switching on"),
        *(paragraph(step, f"{number}. ") for number, step in enumerate(switching_steps(result), start=1)),
        heading("Bias to expect"),
        *_bias(result),
        *_response(result),
        heading("Safety"),
        *(paragraph(text, "- ") for text in _cautions(result)),
    ]
    return "\n".join(parts).encode("utf-8")


def port_rows(result: Result) -> list[tuple[str, ...]]:
    """Return one row for each port: those of the Touchstone files in their order, then the dc ports."""
    file, placed = result.circuit.file, result.placement.ports
    numbers = {
        name: str(k) for k, name in enumerate(result.response.ports if result.response else (), start=1)
    }
    frames = {frame.key: frame for frame in pad_frames(result.placement)}
    rows: list[tuple[str, ...]] = []
    for name, port in file.ports.items():
        at = placed[name]
        value = port.voltage if port.kind == "dc" else port.impedance
        text = quantity_text(value or 0.0, "voltage" if port.kind == "dc" else "impedance")
        place = (mm(at.x), mm(at.y), fixed(at.heading % 360.0, 3))
        rows.append(
            (numbers.get(name, ""), name, port.kind, at.net, *place, text, mm(at.width), "end of the copper")
        )
    for part_name, part in file.parts.items():
        for pin, impedance in part.terminations.items():
            frame = frames[f"{part_name}.{pin}"]
            x, y = frame.at(frame.plane)
            heading_in = fixed(frame.heading % 360.0, 3)
            text = quantity_text(impedance, "impedance")
            plane = "far edge of the pad" if frame.plane else "edge of the pad that faces the device"
            rows.append(
                (numbers.get(frame.key, ""), frame.key, "pin", frame.net, mm(round(x)), mm(round(y)),
                 heading_in, text, mm(round(frame.across)), plane)
            )  # fmt: skip
    return sorted(rows, key=lambda row: int(row[0] or 0) or math.inf)


def bias_rows(result: Result) -> list[tuple[str, ...]]:
    """Return for each net its conductor, its voltage and one point where copper of it can be probed."""
    nets = tuple(result.circuit.nets)
    conductors = copper_nets(result.circuit.file, nets)
    points = {point.net: point for point in reversed(list(test_points(result)))}
    rows: list[tuple[str, ...]] = []
    for net in nets:
        point = points.get(net)
        if point is None or net not in result.circuit.dc.voltages:
            continue
        where = f"{point.reference}.{point.pin}" if point.pin else point.reference
        voltage = fixed(result.circuit.dc.voltages[net], 4)
        rows.append((net, conductors[net], voltage, where, mm(point.x), mm(point.y)))
    return rows


def switching_steps(result: Result) -> list[str]:
    """Return the steps of switching on, then the one of switching off."""
    supplies = supplies_of(result)
    if not supplies:
        return ["The board has no supply: connect the RF ports, nothing else."]
    controls = [s for s in supplies if s.control]
    others = [s for s in supplies if not s.control]
    rf = [name for name, port in result.circuit.file.ports.items() if port.kind == "rf"]
    steps = (
        [f"All supplies off. Terminate {', '.join(rf)}; no RF drive yet."] if rf else ["All supplies off."]
    )
    steps += [_control_step(s) for s in controls]
    steps += [_supply_step(s) for s in others]
    if controls:
        names = ", ".join(s.port for s in controls)
        steps.append(
            f"Bring {names} slowly to the value of the table, until the currents of the table flow; stop at "
            "a jump of any current."
        )
    steps.append("Compare the voltages below, then apply RF drive, low power first.")
    order = ", ".join(s.port for s in [*reversed(others), *reversed(controls)])
    return [*steps, f"Switching off: RF drive first, then {order}, in this order."]


def _control_step(supply: Supply) -> str:
    off = (
        "a value that surely cuts the device off by its data sheet (at or below the one of the table)"
        if supply.voltage < 0.0
        else "0 V, or the value that cuts the device off by its data sheet"
    )
    return (
        f"{supply.port} ({quantity_text(supply.voltage, 'voltage')} at the operating point, for "
        f"{', '.join(supply.pins)}): on first, at {off}. {_limit(supply)}"
    )


def _supply_step(supply: Supply) -> str:
    feeds = f", for {', '.join(supply.pins)}" if supply.pins else ""
    return (
        f"{supply.port} to {quantity_text(supply.voltage, 'voltage')}{feeds}, from low voltage upwards. "
        f"{_limit(supply)}"
    )


def _limit(supply: Supply) -> str:
    expected = quantity_text(abs(supply.current), "current", 4)
    limit = max(_SMALLEST_LIMIT, _LIMIT_SHARE * abs(supply.current))
    return f"Expected current {expected}; current limit {quantity_text(limit, 'current', 3)}."


def _bias(result: Result) -> Iterator[str]:
    """Yield voltages at nets, currents of elements, and what was assumed."""
    if not supplies_of(result):
        yield paragraph("None: the board has no supply.")
        return
    yield paragraph("Direct voltages against ground, without RF drive, at the supply voltages of the ports.")
    yield columns(BIAS_HEADS, bias_rows(result))
    flowing = [(k, i) for k, i in result.circuit.dc.currents.items() if abs(i) >= 5e-7]
    if flowing:
        yield paragraph(
            "Currents: of a line or part from its first to its second net, into a pin, and out of the board "
            "at a port (a supply that delivers has a negative one)."
        )
        yield columns(("Element", "Current (mA)"), [(name, fixed(1e3 * i, 3)) for name, i in flowing])
    yield from (paragraph(note, "- ") for note in result.circuit.dc.notes)


def _response(result: Result) -> Iterator[str]:
    """Yield the S-parameters to expect at band edges and design frequency."""
    if result.response is None:
        return
    yield heading("Response to expect")
    yield paragraph(
        "To the ports' own impedances, small signal, without the device itself where its pins are ports. "
        "The Touchstone files in this folder hold the whole sweep, to 50 ohm."
    )
    yield columns(TRACE_HEADS, trace_values(result.response))


def _cautions(result: Result) -> Iterator[str]:
    """Yield what can hurt people or devices, from the numbers of this board."""
    supplies = supplies_of(result)
    highest = max((abs(s.voltage) for s in supplies), default=0.0)
    if supplies:
        power = sum(s.voltage * s.current for s in supplies)
        yield (
            f"Highest supply voltage {quantity_text(highest, 'voltage')}, power drawn from the supplies "
            f"{quantity_text(power, 'power', 3)} without RF drive; capacitors keep their charge for a while."
        )
    if highest > _HIGH_VOLTAGE:
        yield "The supply voltage is dangerous to touch: cover the board, work with one hand."
    for part in flange_parts(result):
        yield f"{part.name} must be screwed to its carrier and heat sink before any supply is switched on."
    yield "RF power burns: do not touch or open lines under drive; terminate every port."
    yield "The devices may be sensitive to electrostatic discharge: ground yourself and the bench."
