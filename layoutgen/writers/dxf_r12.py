"""DXF R12 for readers that know nothing newer: arcs as chords within 1 um, no units but a 10 mm square.

The layers are those of the R2010 file, and ``keepout`` with the parts' courtyards. R12 cannot say that its
numbers are millimetres: the square on ``reference``, south-west of the board, has sides of 10.000 mm, and a
cross lies on the origin. Outlines run counter-clockwise, holes and cut-outs clockwise; all that is round and
no hole is a circle. No vertex is repeated and no edge is below 1 um.
"""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.artwork import Label
from layoutgen.geometry import Point, Ring
from layoutgen.numbers import fixed, mm
from layoutgen.writers.long_edges import long_edges
from layoutgen.writers.outlines import turned
from layoutgen.writers.records import Job, Result
from layoutgen.writers.scene import drawn_layers, labels_of

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

_NM = 1e6
"""Nanometres in a millimetre; quotients of whole ones have six exact decimals up to 4,000 km."""
_PLACE = " 10\n%.6f\n 20\n%.6f\n 30\n0.0\n"


def write_dxf_r12(result: Result, job: Job) -> bytes:
    """Return the DXF file; it is the same for equal results (``job`` changes nothing)."""
    texts = [_header(result), *_tables(), *_entities(result), "  0\nEOF\n"]
    return "".join(texts).encode("ascii", "replace")


def reference_square() -> Ring:
    """Return the square of known size [nm], south-west of the board."""
    low = -_AWAY - REFERENCE_SIDE
    return Ring.box(low, low, -_AWAY, -_AWAY)


def _header(result: Result) -> str:
    """Return the version and the extents."""
    width, height = result.placement.width, result.placement.height
    low = mm(-_AWAY - REFERENCE_SIDE)
    return (
        "  0\nSECTION\n  2\nHEADER\n  9\n$ACADVER\n  1\nAC1009\n"
        f"  9\n$EXTMIN\n 10\n{low}\n 20\n{low}\n 30\n0.0\n"
        f"  9\n$EXTMAX\n 10\n{mm(width)}\n 20\n{mm(height)}\n 30\n0.0\n  0\nENDSEC\n"
    )


def _tables() -> Iterator[str]:
    """Yield the line type and the layers."""
    yield "  0\nSECTION\n  2\nTABLES\n"
    yield "  0\nTABLE\n  2\nLTYPE\n 70\n1\n  0\nLTYPE\n  2\nCONTINUOUS\n 70\n0\n"
    yield "  3\nsolid\n 72\n65\n 73\n0\n 40\n0.0\n  0\nENDTAB\n"
    yield f"  0\nTABLE\n  2\nLAYER\n 70\n{len(_COLOURS)}\n"
    for name, colour in _COLOURS.items():
        yield f"  0\nLAYER\n  2\n{name}\n 70\n0\n 62\n{colour}\n  6\nCONTINUOUS\n"
    yield "  0\nENDTAB\n  0\nENDSEC\n"


def _entities(result: Result) -> Iterator[str]:
    """Yield shapes and texts, then keep-outs and what tells the scale."""
    yield "  0\nSECTION\n  2\nENTITIES\n"
    for layer, drawn in drawn_layers(result).items():
        for shape in drawn.shapes:
            yield _polyline(layer, turned(shape.outline, -1 if shape.role == "cutout" else 1))
            yield from (_polyline(layer, turned(hole, -1)) for hole in shape.holes)
        circle = f"  0\nCIRCLE\n  8\n{layer}\n{_PLACE} 40\n%.6f\n"
        yield from (circle % (x / _NM, y / _NM, radius / _NM) for x, y, radius in drawn.circles)
    for label in labels_of(result):
        yield _text(label.layer, label)
    for part in result.placement.parts.values():
        yield _polyline(KEEPOUT, part.courtyard)
    yield from _marks()
    yield "  0\nENDSEC\n"


def _polyline(layer: str, ring: Ring) -> str:
    """Return a closed polyline with straight edges, none below a micrometre."""
    vertex = f"  0\nVERTEX\n  8\n{layer}\n{_PLACE}"
    vertices = "".join(vertex % (x / _NM, y / _NM) for (x, y), _ in long_edges(Ring(ring.chords())))
    head = f"  0\nPOLYLINE\n  8\n{layer}\n 66\n1\n 10\n0.0\n 20\n0.0\n 30\n0.0\n 70\n1\n"
    return f"{head}{vertices}  0\nSEQEND\n  8\n{layer}\n"


def _text(layer: str, label: Label) -> str:
    """Return a text, its middle on its anchor."""
    x, y = mm(label.x), mm(label.y)
    return (
        f"  0\nTEXT\n  8\n{layer}\n 10\n{x}\n 20\n{y}\n 30\n0.0\n 40\n{mm(label.height)}\n"
        f"  1\n{label.text}\n 50\n{fixed(label.rotation)}\n"
        f" 72\n1\n 11\n{x}\n 21\n{y}\n 31\n0.0\n 73\n2\n"
    )


def _marks() -> Iterator[str]:
    """Yield the square of 10 mm with its size beside it, and the cross on the origin."""
    square = reference_square()
    yield _polyline("reference", square)
    x, y = square.points[0]
    at = f" 10\n{mm(x)}\n 20\n{mm(y - 2 * _TEXT)}\n 30\n0.0\n"
    yield f"  0\nTEXT\n  8\nreference\n{at} 40\n{mm(_TEXT)}\n  1\n10.000 mm\n"
    yield _line("reference", (-_ARM, 0), (_ARM, 0))
    yield _line("reference", (0, -_ARM), (0, _ARM))


def _line(layer: str, start: Point, end: Point) -> str:
    (x0, y0), (x1, y1) = start, end
    return (
        f"  0\nLINE\n  8\n{layer}\n 10\n{mm(x0)}\n 20\n{mm(y0)}\n 30\n0.0\n"
        f" 11\n{mm(x1)}\n 21\n{mm(y1)}\n 31\n0.0\n"
    )
