"""DXF drawings for the tests: one board drawn in every way a drawing program may draw it."""

from __future__ import annotations

import math
from collections.abc import Callable
from pathlib import Path
from typing import Any

import ezdxf
import numpy as np
import shapely

MM_PER = {"mm": 1.0, "in": 25.4, None: 1.0}
CODES = {"mm": 4, "in": 1, None: 0}


def document(version: str = "R2010", unit: str | None = "mm") -> Any:
    """Return an empty drawing that states a unit, or none."""
    doc = ezdxf.new(version)
    if unit is None or version == "R12":
        doc.header["$INSUNITS"] = 0
    else:
        doc.header["$INSUNITS"] = CODES[unit]
    return doc


class Pen:
    """Draws on one layer, coordinates in millimetres whatever the drawing's unit is."""

    def __init__(
        self, doc: Any, unit: str | None = "mm", layer: str = "copper_top", space: Any = None
    ) -> None:
        self.doc, self.layer = doc, layer
        self.space = doc.modelspace() if space is None else space
        self.per = 1.0 / MM_PER[unit]

    @property
    def attribs(self) -> dict[str, Any]:
        return {"layer": self.layer}

    def at(self, *points: tuple[float, float]) -> list[tuple[float, float]]:
        return [(x * self.per, y * self.per) for x, y in points]

    def polyline(self, points: list[tuple[float, float]], bulges: list[float] | None = None) -> None:
        """Draw a closed polyline; the old kind where the format knows no other."""
        rows = [
            (x, y, 0.0, 0.0, b)
            for (x, y), b in zip(self.at(*points), bulges or [0.0] * len(points), strict=True)
        ]
        if self.doc.dxfversion <= "AC1009":
            self.space.add_polyline2d(rows, format="xyseb", close=True, dxfattribs=self.attribs)
        else:
            self.space.add_lwpolyline(rows, format="xyseb", close=True, dxfattribs=self.attribs)

    def circle(self, x: float, y: float, radius: float) -> None:
        self.space.add_circle(self.at((x, y))[0], radius * self.per, dxfattribs=self.attribs)

    def arc(self, x: float, y: float, radius: float, start: float, end: float) -> None:
        self.space.add_arc(self.at((x, y))[0], radius * self.per, start, end, dxfattribs=self.attribs)

    def line(self, a: tuple[float, float], b: tuple[float, float]) -> None:
        self.space.add_line(*self.at(a, b), dxfattribs=self.attribs)


SLOT = [(2.0, 2.0), (8.0, 2.0), (8.0, 4.0), (2.0, 4.0)]
SLOT_BULGES = [0.0, 1.0, 0.0, 1.0]


def slot_polygon(tolerance: float = 1e-5) -> shapely.Polygon:
    """Return the slot-shaped pad of the drawings, made here by other means [mm]."""
    count = math.ceil(math.pi / (2.0 * math.acos(1.0 - tolerance)))
    turn = np.linspace(-math.pi / 2.0, math.pi / 2.0, count + 1)
    right = np.column_stack((8.0 + np.cos(turn), 3.0 + np.sin(turn)))
    left = np.column_stack((2.0 - np.cos(turn), 3.0 - np.sin(turn)))
    return shapely.Polygon(np.concatenate((right, left)))


def by_bulges(pen: Pen) -> None:
    """The slot as a polyline with half-circle bulges."""
    pen.polyline(SLOT, SLOT_BULGES)


def by_pieces(pen: Pen) -> None:
    """The slot as two lines and two arcs, drawn in a jumble."""
    pen.arc(2, 3, 1, 90, 270)
    pen.line((8, 4), (2, 4))
    pen.line((2, 2), (8, 2))
    pen.arc(8, 3, 1, 270, 90)


def by_gap(pen: Pen) -> None:
    """The slot as lines and arcs that miss each other by 10 um at one end."""
    pen.arc(2, 3, 1, 90, 270)
    pen.line((8, 4), (2.01, 4))
    pen.line((2, 2), (8, 2))
    pen.arc(8, 3, 1, 270, 90)


def by_block(pen: Pen) -> None:
    """The slot from a block drawn at half size, turned, on layer 0, inside another block."""
    inner = pen.doc.blocks.new("INNER")
    half = Pen(pen.doc, layer="0", space=inner)
    half.per = pen.per
    half.polyline([(1.0, -3.0), (2.0, -3.0), (2.0, 0.0), (1.0, 0.0)], [1.0, 0.0, 1.0, 0.0])
    outer = pen.doc.blocks.new("OUTER")
    outer.add_blockref("INNER", (0, 0), dxfattribs={"layer": "0", "rotation": 90.0})
    pen.space.add_blockref(
        "OUTER",
        pen.at((2.0, 0.0))[0],
        dxfattribs={**pen.attribs, "xscale": 2.0, "yscale": 2.0},
    )


def by_mirror(pen: Pen) -> None:
    """The slot from a block mirrored in x."""
    block = pen.doc.blocks.new("MIRRORED")
    own = Pen(pen.doc, layer="0", space=block)
    own.per = pen.per
    own.polyline([(-x, y) for x, y in SLOT[::-1]], [0.0, 1.0, 0.0, 1.0])
    pen.space.add_blockref("MIRRORED", (0, 0), dxfattribs={**pen.attribs, "xscale": -1.0})


def by_uneven_block(pen: Pen) -> None:
    """The slot from a block that is stretched in x alone: its ends are half ellipses there."""
    block = pen.doc.blocks.new("UNEVEN")
    own = Pen(pen.doc, layer="0", space=block)
    own.per = pen.per
    own.line((1.0, 4.0), (4.0, 4.0))
    own.line((1.0, 2.0), (4.0, 2.0))
    half = math.pi / 2.0
    for x, start in ((4.0, -half), (1.0, half)):
        block.add_ellipse(
            own.at((x, 3.0))[0],
            major_axis=(0.0, own.per),
            ratio=0.5,
            start_param=0.0 if start > 0 else math.pi,
            end_param=math.pi if start > 0 else 2.0 * math.pi,
            dxfattribs={"layer": "0"},
        )
    pen.space.add_blockref("UNEVEN", (0, 0), dxfattribs={**pen.attribs, "xscale": 2.0, "yscale": 1.0})


def by_hatch(pen: Pen) -> None:
    """The slot as a solid hatch with its boundary drawn as well."""
    pen.polyline(SLOT, SLOT_BULGES)
    hatch = pen.space.add_hatch(dxfattribs=pen.attribs)
    rows = [(x, y, b) for (x, y), b in zip(pen.at(*SLOT), SLOT_BULGES, strict=True)]
    hatch.paths.add_polyline_path(rows, is_closed=True)


def by_hatch_edges(pen: Pen) -> None:
    """The slot as a hatch whose boundary is made of lines and arcs, one of them run backwards."""
    hatch = pen.space.add_hatch(dxfattribs=pen.attribs)
    path = hatch.paths.add_edge_path()
    path.add_line(*pen.at((2, 2), (8, 2)))
    path.add_arc(pen.at((8, 3))[0], pen.per, 270, 450)
    path.add_line(*pen.at((8, 4), (2, 4)))
    path.add_arc(pen.at((2, 3))[0], pen.per, 90, 270, ccw=True)


def by_width(pen: Pen) -> None:
    """The slot as a wide line between two discs, in the same place."""
    rows = [(x, y, 2.0 * pen.per, 2.0 * pen.per, 0.0) for x, y in pen.at((2, 3), (8, 3))]
    if pen.doc.dxfversion <= "AC1009":
        pen.space.add_polyline2d(rows, format="xyseb", dxfattribs=pen.attribs)
    else:
        pen.space.add_lwpolyline(rows, format="xyseb", dxfattribs=pen.attribs)
    pen.circle(2, 3, 1)
    pen.circle(8, 3, 1)


def by_spline(pen: Pen) -> None:
    """The slot with its right end a rational spline, a half circle exactly."""
    pen.arc(2, 3, 1, 90, 270)
    pen.line((8, 4), (2, 4))
    pen.line((2, 2), (8, 2))
    root = math.sqrt(0.5)
    spline = pen.space.add_rational_spline(
        [(*p, 0.0) for p in pen.at((8, 2), (9, 2), (9, 3), (9, 4), (8, 4))],
        weights=[1.0, root, 1.0, root, 1.0],
        degree=2,
        knots=[0, 0, 0, 1, 1, 2, 2, 2],
        dxfattribs=pen.attribs,
    )
    assert spline.dxf.degree == 2


Way = Callable[[Pen], None]
OLD: tuple[Way, ...] = (by_bulges, by_pieces, by_gap, by_block, by_mirror, by_width)
"""Ways that R12 knows too."""
NEW: tuple[Way, ...] = (by_uneven_block, by_hatch, by_hatch_edges, by_spline)


def save(doc: Any, path: Path) -> Path:
    """Write a drawing."""
    doc.saveas(path)
    return path
