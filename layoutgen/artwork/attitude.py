"""Quarter turns and mirrors of a board and of what is drawn on it, exact on whole nanometres."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from layoutgen.artwork.conductors import Conductor
from layoutgen.artwork.records import LineCopper, Shape
from layoutgen.geometry import Point, Ring

__all__ = ["Attitude"]

_EDGES = ("east", "north", "west", "south")
_MATRICES = ((1, 0, 0, 1), (0, -1, 1, 0), (-1, 0, 0, -1), (0, 1, -1, 0))


@dataclass(frozen=True, slots=True)
class Attitude:
    """A movement of a board of a size [nm] onto itself: mirrored north to south or not, then quarter turns.

    ``width`` and ``height`` are those of the board before, ``quarters`` counter-clockwise, 0 to 3.
    """

    width: int
    height: int
    quarters: int = 0
    mirrored: bool = False

    @property
    def is_rest(self) -> bool:
        """True when nothing moves."""
        return not self.quarters and not self.mirrored

    @property
    def size(self) -> tuple[int, int]:
        """Width and height afterwards [nm]."""
        return (self.height, self.width) if self.quarters % 2 else (self.width, self.height)

    @property
    def back(self) -> Attitude:
        """The movement that undoes this one."""
        return Attitude(*self.size, self.quarters if self.mirrored else -self.quarters % 4, self.mirrored)

    @property
    def matrix(self) -> tuple[int, int, int, int]:
        """What x and y are multiplied by for the new x, then for the new y [-]."""
        a, b, c, d = _MATRICES[self.quarters]
        return (a, -b, c, -d) if self.mirrored else (a, b, c, d)

    @property
    def shift(self) -> Point:
        """What is then added [nm], so that the board's south-west corner lies at the origin again."""
        a, b, c, d = self.matrix
        x, y = (min(0, p * self.width) + min(0, q * self.height) for p, q in ((a, b), (c, d)))
        return -x, -y

    def point(self, point: Point) -> Point:
        """Return where a point comes to lie [nm]."""
        (a, b, c, d), (e, f) = self.matrix, self.shift
        x, y = point
        return a * x + b * y + e, c * x + d * y + f

    def points(self, points: Sequence[Point]) -> tuple[Point, ...]:
        """Return where points come to lie [nm]."""
        return tuple(self.point(point) for point in points)

    def heading(self, heading: float) -> float:
        """Return a heading after the movement [deg]."""
        return ((-heading if self.mirrored else heading) + 90.0 * self.quarters) % 360.0

    def edge(self, edge: str) -> str:
        """Return the edge that an edge becomes."""
        return _EDGES[round(self.heading(90.0 * _EDGES.index(edge)) / 90.0)]

    def ring(self, ring: Ring) -> Ring:
        """Return where an outline comes to lie; it runs the same way round as before."""
        points = self.points(ring.points)
        if len(points) == 2:  # circles all begin in the west, holes in the east
            (x0, y0), (x1, y1) = points
            circle = Ring.circle((x0 + x1) // 2, (y0 + y1) // 2, (abs(x1 - x0) + abs(y1 - y0)) // 2)
            return circle if ring.bulges[0] > 0.0 else Ring(circle.points[::-1], ring.bulges)
        if not self.mirrored:
            return Ring(points, ring.bulges)
        bulges = ring.bulges[::-1]
        return Ring(points[::-1], (*bulges[1:], bulges[0]) if bulges else ())

    def geometry(self, area: BaseGeometry) -> BaseGeometry:
        """Return where an area comes to lie [nm]."""
        a, b, c, d = self.matrix
        turn, shift = np.array(((a, c), (b, d)), dtype=np.float64), np.array(self.shift, dtype=np.float64)

        def moved(points: NDArray[np.float64]) -> NDArray[np.float64]:
            return np.asarray(points @ turn + shift)

        return area if self.is_rest else shapely.transform(area, moved)

    def shape(self, shape: Shape) -> Shape:
        """Return where a drawn shape comes to lie."""
        if self.is_rest:
            return shape
        holes = tuple(self.ring(hole) for hole in shape.holes)
        return replace(shape, outline=self.ring(shape.outline), holes=holes)

    def conductor(self, piece: Conductor) -> Conductor:
        """Return where a piece of signal copper comes to lie."""
        if self.is_rest:
            return piece
        return replace(
            piece,
            copper=self.geometry(piece.copper),
            rings=tuple(self.ring(ring) for ring in piece.rings),
            drawn=tuple(self.ring(ring) for ring in piece.drawn),
            keepout=self.geometry(piece.keepout),
        )

    def line_copper(self, lines: Mapping[str, LineCopper]) -> Mapping[str, LineCopper]:
        """Return the pour's distances from lines: a mirror swaps left and right."""
        if not self.mirrored:
            return lines
        return {
            name: replace(line, gap_left=line.gap_right, gap_right=line.gap_left)
            for name, line in lines.items()
        }
