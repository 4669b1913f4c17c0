"""Assembly drawing as PDF: references and first pads on the board, parts list, flange notes, cautions."""

from __future__ import annotations

import math
from collections.abc import Iterator

from layoutgen.numbers import fixed, mm_short
from layoutgen.placement import PlacedPart, PlacedPort
from layoutgen.units import quantity_text
from layoutgen.writers.bill_of_materials import BILL_HEADS, bill_rows
from layoutgen.writers.board_view import PAD, BoardView, scale_text, suitable_scale
from layoutgen.writers.centroid import ROTATION_CONVENTION
from layoutgen.writers.flow import Flow
from layoutgen.writers.part_texts import flange_parts, value_text
from layoutgen.writers.records import Job, Result
from layoutgen.writers.sheet import INK, Book, text_width
from layoutgen.writers.supplies import supplies_of

__all__ = ["flange_notes", "safety_notes", "write_assembly_drawing"]

_KIND = "Assembly drawing"
_LARGEST_TEXT, _SMALLEST_TEXT = 4.0, 1.6
_BODY = "#f6efdf"
_PORT = "#2d5f8a"


def write_assembly_drawing(result: Result, job: Job) -> bytes:
    """Return the drawing as PDF; it is the same for equal results."""
    design = result.circuit.file.design
    details = (job.stem, f"revision {design.revision or 'none'}", "millimetres")
    book = Book(_KIND, design.title, details)
    _board_sheet(book, result)
    _list_sheets(book, result)
    return book.pdf()


def _board_sheet(book: Book, result: Result) -> None:
    """Draw the board with its parts."""
    sheet = book.sheet("parts, seen from the top")
    left, low, right, high = sheet.room
    room = (right - left - 36.0, high - low - 36.0)
    scale = suitable_scale(result, *room)
    drawn = result.placement.width / 1e6 * float(scale), result.placement.height / 1e6 * float(scale)
    x, y = (left + right - drawn[0]) / 2.0, low + 18.0 + (room[1] - drawn[1]) / 2.0
    view = BoardView(sheet, x, y, scale)
    view.profile(result, fill="#ffffff")
    view.copper(result, lambda shape: shape.net != "gnd", "#f3e6d8")
    view.copper(result, lambda shape: shape.role == "pad", PAD)
    view.drills(result, crosses=False)
    for part in result.placement.parts.values():
        _part(view, result, part)
    for port in result.placement.ports.values():
        _port(view, port)
    text = (
        f"Scale {scale_text(scale)}. All parts on the top side. A dot marks the first pad (net 1 of a "
        "two-pad part, first pin of others)."
    )
    sheet.text(left, low, text, 2.6, room=right - left)


def _part(view: BoardView, result: Result, part: PlacedPart) -> None:
    """Draw a part's outline, the dot at its first pad, its reference and its value."""
    view.sheet.area([view.ring(part.outline)], None, INK, 0.25)
    pads = [pad for pad in part.pads if pad.outline.polygon().area > 0.0]
    if pads:
        first = pads[0]
        view.sheet.circle(*view.at(first.x, first.y), 0.45, fill=INK)
    points = view.ring(part.outline)
    size = points.max(axis=0) - points.min(axis=0)
    middle = (points.max(axis=0) + points.min(axis=0)) / 2.0
    upright = size[1] > size[0]
    long, short = (size[1], size[0]) if upright else (size[0], size[1])
    text = part.name
    fitted = min(0.55 * short, _LARGEST_TEXT, 0.62 * long / max(text_width(text, 1.0, True), 1e-6))
    height = max(float(fitted), _SMALLEST_TEXT)
    spread = text_width(text, height, True) / 2.0 + 0.3
    across, along = (0.62 * height, spread) if upright else (spread, 0.62 * height)
    x, y = float(middle[0]), float(middle[1])
    view.sheet.box(x - across, y - along, x + across, y + along, fill=_BODY)
    view.sheet.text(x, y, text, height, "center", True, 90.0 if upright else 0.0, middle=True)


def _port(view: BoardView, port: PlacedPort) -> None:
    """Draw a port's name outside the board, an arrow at its place."""
    angle = math.radians(port.heading)
    ux, uy = -math.cos(angle), -math.sin(angle)
    x, y = view.at(port.x, port.y)
    x, y = x + 2.5 * ux, y + 2.5 * uy
    tip, wide, long = (x, y), 0.8, 2.2
    sides = [
        (x + long * ux - wide * uy, y + long * uy + wide * ux),
        (x + long * ux + wide * uy, y + long * uy - wide * ux),
    ]
    view.sheet.area([[tip, *sides]], fill=_PORT)
    upright = abs(uy) > abs(ux)
    lines = (x + 3.2 * ux, y + 3.2 * uy)
    turn = 90.0 if upright else 0.0
    forwards = uy > 0 if upright else ux > 0
    view.sheet.text(*lines, port.name, 3.0, "left" if forwards else "right", True, turn, _PORT, middle=True)


def _list_sheets(book: Book, result: Result) -> None:
    """Write the parts list, the notes on flanges and the cautions."""
    flow = Flow(lambda: book.sheet("parts list and notes"))
    flow.heading("Parts")
    rows = bill_rows(result)
    if rows:
        shown = [k for k, _ in enumerate(BILL_HEADS) if k < 3 or any(row[k] for row in rows)]
        flow.table([BILL_HEADS[k] for k in shown], [[row[k] for k in shown] for row in rows], numbers=(0, 1))
    else:
        flow.paragraph("No parts.")
    flow.paragraph(ROTATION_CONVENTION)
    flow.heading("Mounting and soldering")
    for number, text in enumerate(_mounting(result), start=1):
        flow.paragraph(text, lead=f"{number}.")
    flow.heading("Safety")
    for text in safety_notes(result):
        flow.paragraph(text, lead="-")


def _mounting(result: Result) -> Iterator[str]:
    """Yield notes on all parts, then on those with flanges."""
    if result.placement.parts:
        yield (
            "Solder paste by the paste file: openings as large as the pads, windows in pads that lie on "
            "vias. Stencil thickness and alloy are not stated in the circuit file."
        )
    yield from flange_notes(result)
    ports = [f"{port.name} ({_side(port)})" for port in result.placement.ports.values()]
    yield (
        f"Connectors and wires are not in the parts list. Copper ends at {', '.join(ports)}; solder centre "
        "conductors flat on it and their grounds to the pour on both sides."
    )
    yield "Do not clean into open cut-outs; leave no flux or solder on lines: both shift their impedance."


def _side(port: PlacedPort) -> str:
    return f"{port.edge} edge, x {mm_short(port.x)}, y {mm_short(port.y)} mm"


def flange_notes(result: Result) -> Iterator[str]:
    """Yield how parts with a flange are mounted; nothing where there are none."""
    for part in flange_parts(result):
        holes = [h for h in result.artwork.holes if h.origin.element == part.name]
        sizes = ", ".join(dict.fromkeys(f"{mm_short(h.diameter)} mm" for h in holes))
        screws = f" with {len(holes)} screws through the holes of {sizes}" if holes else ""
        yield (
            f"{part.name}{_valued(result, part)}: its flange stands on the metal carrier through the "
            f"board's cut-out and is screwed to it{screws}; torque and order of tightening by the device's "
            "data sheet."
        )
        yield (
            f"{part.name}: the carrier and the bottom copper are one ground. The board must lie flat on "
            "the carrier up to the edges of the cut-out, clamped or soldered: the flange's return current "
            "crosses there."
        )
        yield (
            f"{part.name}: the leads must come to lie on their pads without bending force: height of the "
            "leads over the flange equal to the board over the carrier (substrate, copper and solder); "
            "mill the carrier's pocket to suit. Screw first, solder the leads afterwards (common "
            "practice, no source)."
        )
        yield f"{part.name}: thermal compound or shim under the flange by its data sheet, thin and even."


def _valued(result: Result, part: PlacedPart) -> str:
    value = value_text(result.circuit.file.parts[part.name])
    return f" ({value})" if value else ""


def safety_notes(result: Result) -> Iterator[str]:
    """Yield what can hurt people or devices."""
    for part in flange_parts(result):
        yield (
            f"{part.name}: power devices of this form may hold beryllium oxide. Unless the data sheet says "
            "it has none, do not break, file, grind or etch the package, and dispose of it as toxic waste "
            "(common practice, no source)."
        )
    supplies = supplies_of(result)
    if supplies:
        highest = max(abs(supply.voltage) for supply in supplies)
        power = sum(supply.voltage * supply.current for supply in supplies)
        yield (
            f"Supplies up to {quantity_text(highest, 'voltage')}; about {fixed(power, 2)} W are drawn "
            "without RF drive. Do not switch on before flanges are screwed to a heat sink."
        )
    yield "Parts may be sensitive to electrostatic discharge: wrist strap, grounded iron, conductive mat."
    yield "Solder fumes: use extraction. Wash hands; leaded alloys are toxic."
