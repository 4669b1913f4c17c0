"""Closed outlines in whole nanometres, with true arcs kept as bulges."""

from __future__ import annotations

import math
from dataclasses import dataclass

import shapely

__all__ = ["CHORD_TOLERANCE_NM", "Point", "Ring"]

Point = tuple[int, int]

CHORD_TOLERANCE_NM = 900
"""Largest distance of a chord from its arc [nm]; the contract allows 1000."""


@dataclass(frozen=True, slots=True)
class Ring:
    """A closed outline: vertices [nm], and for each edge its bulge [-].

    The first vertex is not repeated. ``bulges[i]`` belongs to the edge from vertex i to vertex i + 1 and is
    tan(angle / 4) of the arc, positive counter-clockwise (the DXF convention); an empty tuple means that all
    edges are straight.
    """

    points: tuple[Point, ...]
    bulges: tuple[float, ...] = ()

    def __post_init__(self) -> None:
        """Refuse what is not an outline."""
        if len(self.points) < (2 if self.bulges else 3):
            raise ValueError(f"an outline needs at least three vertices, found {len(self.points)}")
        if self.bulges and len(self.bulges) != len(self.points):
            raise ValueError(f"{len(self.points)} vertices but {len(self.bulges)} bulges")

    @classmethod
    def circle(cls, x: int, y: int, radius: int) -> Ring:
        """Return the circle about (x, y) [nm] as two half-circle arcs, counter-clockwise."""
        return cls(((x - radius, y), (x + radius, y)), (1.0, 1.0))

    @classmethod
    def box(cls, x0: int, y0: int, x1: int, y1: int) -> Ring:
        """Return the axis-parallel rectangle between two corners [nm], counter-clockwise."""
        x0, x1, y0, y1 = min(x0, x1), max(x0, x1), min(y0, y1), max(y0, y1)
        return cls(((x0, y0), (x1, y0), (x1, y1), (x0, y1)))

    @property
    def is_straight(self) -> bool:
        """True when no edge is an arc."""
        return not any(self.bulges)

    def chords(self, tolerance: float = CHORD_TOLERANCE_NM) -> tuple[Point, ...]:
        """Return the vertices with every arc replaced by chords, each vertex on the arc.

        Args:
            tolerance: Largest distance of a chord from its arc [nm].
        """
        if self.is_straight:
            return self.points
        out: list[Point] = []
        for i, start in enumerate(self.points):
            out.append(start)
            if self.bulges[i]:
                out.extend(
                    _arc_points(start, self.points[(i + 1) % len(self.points)], self.bulges[i], tolerance)
                )
        return tuple(out)

    def polygon(self, tolerance: float = CHORD_TOLERANCE_NM) -> shapely.Polygon:
        """Return the outline as a shapely polygon [nm], arcs as chords within the tolerance [nm]."""
        return shapely.Polygon(self.chords(tolerance))


def _arc_points(start: Point, end: Point, bulge: float, tolerance: float) -> list[Point]:
    """Return the inner chord vertices of one arc, ends left out; equally many in every quarter turn."""
    angle = 4.0 * math.atan(bulge)
    chord = math.hypot(end[0] - start[0], end[1] - start[1])
    radius = chord / (2.0 * abs(math.sin(angle / 2.0)))
    step = 2.0 * math.acos(max(0.0, 1.0 - min(tolerance / radius, 1.0)))
    quarters = max(1, math.ceil(abs(angle) / (math.pi / 2.0) - 1e-9))
    count = max(2, quarters * math.ceil(abs(angle) / (quarters * step)))
    mx, my = (start[0] + end[0]) / 2.0, (start[1] + end[1]) / 2.0
    offset = (1.0 - bulge * bulge) / (4.0 * bulge)
    cx, cy = mx - offset * (end[1] - start[1]), my + offset * (end[0] - start[0])
    first = math.atan2(start[1] - cy, start[0] - cx)
    return [
        (
            round(cx + radius * math.cos(first + angle * k / count)),
            round(cy + radius * math.sin(first + angle * k / count)),
        )
        for k in range(1, count)
    ]
