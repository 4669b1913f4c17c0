"""DXF R12 for readers that know nothing newer: arcs as chords within 1 um, no units but a 10 mm square.

The layers are those of the R2010 file, and ``keepout`` with the parts' courtyards. R12 cannot say that its
numbers are millimetres: the square on ``reference``, south-west of the board, has sides of 10.000 mm, and a
cross lies on the origin. Outlines run counter-clockwise, holes and cut-outs clockwise.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from layoutgen.artwork import Label, Shape
from layoutgen.geometry import Point, Ring
from layoutgen.numbers import fixed, mm
from layoutgen.writers.outlines import as_circle, distinct_vertices, turned
from layoutgen.writers.records import Job, Result
from layoutgen.writers.scene import labels_of, layers_of

__all__ = ["KEEPOUT", "REFERENCE_SIDE", "reference_square", "write_dxf_r12"]

KEEPOUT = "keepout"
REFERENCE_SIDE = 10_000_000
"""Side of the reference square [nm]."""

_AWAY, _ARM, _TEXT = 5_000_000, 2_000_000, 1_500_000
_COLOURS = {
    "copper_top": 30, "copper_bottom": 34, "soldermask_top": 94, "soldermask_bottom": 96, "paste_top": 8,
    "legend_top": 7, "profile": 5, "drill_plated": 4, "drill_nonplated": 6, "reference": 9, "findings": 1,
    KEEPOUT: 2,
}  # fmt: skip
"""Colour index of each layer on screen [-]; those of the R2010 file."""


def write_dxf_r12(result: Result, job: Job) -> bytes:
    """Return the DXF file; it is the same for equal results (``job`` changes nothing)."""
    lines = [*_header(result), *_tables(), *_entities(result), "  0", "EOF"]
    return ("\n".join(lines) + "\n").encode("ascii", "replace")


def reference_square() -> Ring:
    """Return the square of known size [nm], south-west of the board."""
    low = -_AWAY - REFERENCE_SIDE
    return Ring.box(low, low, -_AWAY, -_AWAY)


def _header(result: Result) -> Iterator[str]:
    """Yield the version and the extents."""
    width, height = result.placement.width, result.placement.height
    low = mm(-_AWAY - REFERENCE_SIDE)
    yield from ("  0", "SECTION", "  2", "HEADER", "  9", "$ACADVER", "  1", "AC1009")
    yield from ("  9", "$EXTMIN", " 10", low, " 20", low, " 30", "0.0")
    yield from ("  9", "$EXTMAX", " 10", mm(width), " 20", mm(height), " 30", "0.0")
    yield from ("  0", "ENDSEC")


def _tables() -> Iterator[str]:
    """Yield the line type and the layers."""
    yield from ("  0", "SECTION", "  2", "TABLES")
    yield from ("  0", "TABLE", "  2", "LTYPE", " 70", "1", "  0", "LTYPE", "  2", "CONTINUOUS", " 70", "0")
    yield from ("  3", "solid", " 72", "65", " 73", "0", " 40", "0.0", "  0", "ENDTAB")
    yield from ("  0", "TABLE", "  2", "LAYER", " 70", str(len(_COLOURS)))
    for name, colour in _COLOURS.items():
        yield from ("  0", "LAYER", "  2", name, " 70", "0", " 62", str(colour), "  6", "CONTINUOUS")
    yield from ("  0", "ENDTAB", "  0", "ENDSEC")


def _entities(result: Result) -> Iterator[str]:
    """Yield shapes and texts, then keep-outs and what tells the scale."""
    yield from ("  0", "SECTION", "  2", "ENTITIES")
    for layer, shapes in layers_of(result).items():
        for shape in shapes:
            yield from _shape(layer, shape)
    for label in labels_of(result):
        yield from _text(label.layer, label)
    for part in result.placement.parts.values():
        yield from _polyline(KEEPOUT, part.courtyard)
    yield from _marks()
    yield from ("  0", "ENDSEC")


def _shape(layer: str, shape: Shape) -> Iterator[str]:
    circle = as_circle(shape.outline) if shape.role == "drill" else None
    if circle:
        x, y, radius = circle
        yield from (
            "  0",
            "CIRCLE",
            "  8",
            layer,
            " 10",
            mm(x),
            " 20",
            mm(y),
            " 30",
            "0.0",
            " 40",
            mm(radius),
        )
        return
    yield from _polyline(layer, turned(shape.outline, -1 if shape.role == "cutout" else 1))
    for hole in shape.holes:
        yield from _polyline(layer, turned(hole, -1))


def _polyline(layer: str, ring: Ring) -> Iterator[str]:
    """Yield a closed polyline with straight edges, no vertex twice in a row."""
    points = [point for point, _ in distinct_vertices(Ring(ring.chords()))]
    yield from (
        "  0",
        "POLYLINE",
        "  8",
        layer,
        " 66",
        "1",
        " 10",
        "0.0",
        " 20",
        "0.0",
        " 30",
        "0.0",
        " 70",
        "1",
    )
    for x, y in points:
        yield from ("  0", "VERTEX", "  8", layer, " 10", mm(x), " 20", mm(y), " 30", "0.0")
    yield from ("  0", "SEQEND", "  8", layer)


def _text(layer: str, label: Label) -> Iterator[str]:
    """Yield a text, its middle on its anchor."""
    x, y = mm(label.x), mm(label.y)
    yield from ("  0", "TEXT", "  8", layer, " 10", x, " 20", y, " 30", "0.0", " 40", mm(label.height))
    yield from ("  1", label.text, " 50", fixed(label.rotation), " 72", "1", " 11", x, " 21", y, " 31", "0.0")
    yield from (" 73", "2")


def _marks() -> Iterator[str]:
    """Yield the square of 10 mm with its size beside it, and the cross on the origin."""
    square = reference_square()
    yield from _polyline("reference", square)
    x, y = square.points[0]
    at = ("  0", "TEXT", "  8", "reference", " 10", mm(x), " 20", mm(y - 2 * _TEXT), " 30", "0.0")
    yield from (*at, " 40", mm(_TEXT), "  1", "10.000 mm")
    for ends in (((-_ARM, 0), (_ARM, 0)), ((0, -_ARM), (0, _ARM))):
        yield from _line("reference", ends)


def _line(layer: str, ends: Sequence[Point]) -> Iterator[str]:
    (x0, y0), (x1, y1) = ends
    yield from ("  0", "LINE", "  8", layer, " 10", mm(x0), " 20", mm(y0), " 30", "0.0")
    yield from (" 11", mm(x1), " 21", mm(y1), " 31", "0.0")
