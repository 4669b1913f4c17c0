"""Fabrication drawing as PDF: outline with dimensions, drill table, stackup, critical widths, notes."""

from __future__ import annotations

from layoutgen.numbers import mm_short
from layoutgen.units import to_nm
from layoutgen.writers.board_view import BoardView, scale_text, suitable_scale
from layoutgen.writers.dimensions import ordinates_x, ordinates_y, overall_height, overall_width
from layoutgen.writers.fabrication_facts import (
    CRITICAL_HEADS,
    DRILL_HEADS,
    STACK_HEADS,
    criticals,
    drill_rows,
    notes,
    open_points,
    stack_rows,
)
from layoutgen.writers.flow import Flow
from layoutgen.writers.records import Job, Result
from layoutgen.writers.sheet import INK, Book, Sheet
from layoutgen.writers.xnc import hits_of

__all__ = ["write_fabrication_drawing"]

_KIND = "Fabrication drawing"
_LEFT, _RIGHT, _BELOW, _ABOVE = 24.0, 16.0, 24.0, 12.0
_TABLES = 46.0
_FEW = 20
"""Tools with up to so many holes [-] have their letter at each of them."""
_ROOMY = 3.0
"""Radius on the sheet [mm] from which on a hole holds its letter."""


def write_fabrication_drawing(result: Result, job: Job) -> bytes:
    """Return the drawing as PDF; it is the same for equal results."""
    design = result.circuit.file.design
    details = (job.stem, f"revision {design.revision or 'none'}", "millimetres")
    book = Book(_KIND, design.title, details)
    _outline_sheet(book, result)
    _stackup_sheet(book, result)
    _width_sheets(book, result)
    return book.pdf()


def _outline_sheet(book: Book, result: Result) -> None:
    """Draw outline, cut-outs and holes with their dimensions, and the drill table below."""
    sheet = book.sheet("outline and drilling")
    left, low, right, high = sheet.room
    room = (right - left - _LEFT - _RIGHT, high - low - _BELOW - _ABOVE - _TABLES)
    scale = suitable_scale(result, *room)
    width, height = result.placement.width, result.placement.height
    drawn = (width / 1e6 * float(scale), height / 1e6 * float(scale))
    x = left + _LEFT + (room[0] - drawn[0]) / 2.0
    view = BoardView(sheet, x, high - _ABOVE - drawn[1], scale)
    view.profile(result)
    view.drills(result)
    _tool_letters(view, result)
    _dimensions(view, result, drawn)
    text = f"Seen from the top, scale {scale_text(scale)}. Dimensions from the south-west corner."
    sheet.text(left, low + _TABLES - 1.0, text, 2.6)
    flow = Flow(
        lambda: book.sheet("drilling, continued"), sheet, (left, low, left + 120.0, low + _TABLES - 4.0)
    )
    rows = drill_rows(result)
    if rows:
        flow.table(DRILL_HEADS, rows, numbers=(1, 2))
    else:
        flow.paragraph("No holes.")
    for number, text in enumerate(_outline_texts(result)):
        sheet.text(left + 132.0, low + _TABLES - 8.0 - 4.0 * number, text, 2.6, room=right - left - 132.0)


def _outline_texts(result: Result) -> list[str]:
    """Return what the drawing itself does not show in numbers."""
    radius = result.placement.corner_radius
    corners = f"Outer corners: radius {mm_short(radius)} mm." if radius else "Outer corners: square."
    cutouts = [s for s in result.artwork.on("profile") if s.role == "cutout"]
    texts = [corners, f"Cut-outs: {len(cutouts)}."]
    for shape in cutouts:
        xs, ys = zip(*shape.outline.chords(), strict=True)
        size = f"{mm_short(max(xs) - min(xs))} x {mm_short(max(ys) - min(ys))} mm"
        texts.append(f"Cut-out under {shape.origin.element}: {size}, not plated.")
    return [*texts, "Drills: see the XNC files for all middles; diameters are finished ones."]


def _tool_letters(view: BoardView, result: Result) -> None:
    """Write the tool's letter beside each hole of tools with few holes."""
    tools = [hit for plated in (True, False) for hit in hits_of(result, plated).items()]
    letters = [row[0] for row in drill_rows(result)]
    for letter, ((_, diameter), places) in zip(letters, tools, strict=True):
        for x, y in places if len(places) <= _FEW else ():
            px, py = view.at(x, y)
            radius = view.size(diameter) / 2.0
            away = 0.35 if radius > _ROOMY else 0.72 * radius + 0.6
            view.sheet.text(px + away, py + away, letter, 2.6, bold=True)


def _dimensions(view: BoardView, result: Result, drawn: tuple[float, float]) -> None:
    """Draw overall lengths, and ordinates of cut-outs and of the holes that are no vias."""
    width, height = result.placement.width, result.placement.height
    xs, ys = {0, width}, {0, height}
    for shape in result.artwork.on("profile"):
        if shape.role == "cutout":
            corners = shape.outline.chords()
            xs |= {min(x for x, _ in corners), max(x for x, _ in corners)}
            ys |= {min(y for _, y in corners), max(y for _, y in corners)}
    xs |= {hole.x for hole in result.artwork.holes}
    ys |= {hole.y for hole in result.artwork.holes}
    ordinates_x(view, xs, view.y - 1.5)
    ordinates_y(view, ys, view.x - 1.5)
    overall_width(view, width, view.y + drawn[1] + 5.0)
    overall_height(view, height, view.x + drawn[0] + 5.0)


def _stackup_sheet(book: Book, result: Result) -> None:
    """Draw the stackup, the notes, and what is still open."""
    sheet = book.sheet("stackup and notes")
    flow = Flow(lambda: book.sheet("notes, continued"), sheet)
    flow.heading("Stackup, seen from the side (not to scale)")
    _section(sheet, flow, result)
    flow.table(STACK_HEADS, stack_rows(result))
    flow.heading("Notes")
    for number, text in enumerate(notes(result), start=1):
        flow.paragraph(text, lead=f"{number}.")
    flow.heading("Not stated in the circuit file, to be agreed")
    for text in open_points(result):
        flow.paragraph(text, lead="-")


def _section(sheet: Sheet, flow: Flow, result: Result) -> None:
    """Draw a section through the board: plane, substrate, a line with its sloping sides, mask."""
    substrate = result.circuit.file.substrate
    x0, x1, y = flow.left + 4.0, flow.left + 96.0, flow.y - 22.0
    sheet.box(x0, y, x1, y + 12.0, fill="#efe6cf", pen=INK)
    sheet.box(x0, y - 2.0, x1, y, fill="#ad5f2c", pen=INK)
    middle = (x0 + x1) / 2.0
    for left, right in ((x0, middle - 22.0), (middle - 9.0, middle + 9.0), (middle + 22.0, x1)):
        foot, top = y + 12.0, y + 14.0
        sheet.area([[(left, foot), (right, foot), (right - 0.7, top), (left + 0.7, top)]], "#ad5f2c", INK)
    sheet.line([(middle - 9.0, y + 12.0), (middle - 9.0, y + 18.0)], 0.1)
    sheet.line([(middle + 9.0, y + 12.0), (middle + 9.0, y + 18.0)], 0.1)
    sheet.line([(middle - 9.0, y + 17.0), (middle + 9.0, y + 17.0)], 0.1)
    sheet.text(middle, y + 18.6, "width, measured at the foot", 2.3, "center")
    copper, height = substrate.copper_thickness, substrate.height
    texts = (
        (y + 12.2, f"copper 1: {mm_short(to_nm(copper))} mm"),
        (y + 5.2, f"substrate: {mm_short(to_nm(height))} mm"),
        (y - 1.8, f"copper 2: {mm_short(to_nm(copper))} mm"),
        (
            y - 6.0,
            f"over both coppers: {mm_short(to_nm(height) + 2 * to_nm(copper))} mm, without solder mask",
        ),
    )
    for at, text in texts:
        sheet.text(x1 + 4.0, at, text, 2.6)
    flow.skip(31.0)


def _width_sheets(book: Book, result: Result) -> None:
    """Draw the numbered lines, and the table of what must be held."""
    sheet = book.sheet("critical widths")
    left, low, right, high = sheet.room
    scale = suitable_scale(result, right - left - 12.0, 0.42 * (high - low))
    drawn = (result.placement.width / 1e6 * float(scale), result.placement.height / 1e6 * float(scale))
    view = BoardView(sheet, left + (right - left - drawn[0]) / 2.0, high - 6.0 - drawn[1], scale)
    view.profile(result)
    view.copper(result, lambda shape: shape.net != "gnd")
    rows = criticals(result)
    view.numbered([(row.cells[0], float(row.at[0]), float(row.at[1])) for row in rows])
    flow = Flow(
        lambda: book.sheet("critical widths, continued"), sheet, (left, low, right, high - drawn[1] - 12.0)
    )
    flow.paragraph(f"Lines seen from the top, scale {scale_text(scale)}; ground copper left out.")
    flow.heading("Widths of finished copper, measured at the foot", 3.4)
    flow.table(CRITICAL_HEADS, [row.cells for row in rows], numbers=(2, 3, 4, 5))
