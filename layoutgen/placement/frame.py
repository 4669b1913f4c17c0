"""Poses and turns on the nanometre grid: quarter turns are exact."""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterable
from typing import NamedTuple

from layoutgen.geometry import Point, Ring

__all__ = [
    "Box",
    "Pose",
    "ahead",
    "box_around",
    "box_to_world",
    "grown",
    "hull",
    "ring_to_world",
    "slices_to_world",
    "to_world",
    "unit",
]

Box = tuple[int, int, int, int]

_SLICE = 250_000  # width of a slice [nm]
_MOST_SLICES = 40

_QUARTERS = {0.0: (1.0, 0.0), 90.0: (0.0, 1.0), 180.0: (-1.0, 0.0), 270.0: (0.0, -1.0)}


class Pose(NamedTuple):
    """A point [nm] and a heading [deg] counter-clockwise from east, 0 <= heading < 360."""

    x: int
    y: int
    heading: float

    @property
    def point(self) -> Point:
        """The point without the heading."""
        return (self.x, self.y)

    def turned(self, angle: float) -> Pose:
        """Return the pose turned on the spot by an angle [deg]."""
        return Pose(self.x, self.y, (self.heading + angle) % 360.0)


def unit(heading: float) -> tuple[float, float]:
    """Return the unit vector of a heading [deg], exact for quarter turns."""
    quarter = _QUARTERS.get(heading % 360.0)
    if quarter is not None:
        return quarter
    angle = math.radians(heading)
    return math.cos(angle), math.sin(angle)


def ahead(pose: Pose, distance: float, sideways: float = 0.0) -> Pose:
    """Return the pose moved along its heading, and to its left, by distances [nm]."""
    x, y = to_world(pose, distance, sideways)
    return Pose(x, y, pose.heading)


def to_world(pose: Pose, x: float, y: float) -> Point:
    """Return the world point [nm] of a point given in the frame of a pose."""
    ux, uy = unit(pose.heading)
    return round(pose.x + x * ux - y * uy), round(pose.y + x * uy + y * ux)


def box_to_world(pose: Pose, box: Box) -> Box:
    """Return the axis-parallel box around a box given in the frame of a pose (exact for quarter turns)."""
    x0, y0, x1, y1 = box
    points = [to_world(pose, x, y) for x, y in ((x0, y0), (x1, y0), (x1, y1), (x0, y1))]
    return box_around(points)


def slices_to_world(pose: Pose, box: Box) -> list[Box]:
    """Return axis-parallel boxes that cover a box given in the frame of a pose: one for quarter turns.

    A box at another angle is cut into slices across the board's x axis, each covered by a box of its own.
    """
    if pose.heading % 90.0 == 0.0:
        return [box_to_world(pose, box)]
    x0, y0, x1, y1 = box
    ring = [to_world(pose, x, y) for x, y in ((x0, y0), (x1, y0), (x1, y1), (x0, y1))]
    low, _, high, _ = box_around(ring)
    count = max(1, min(_MOST_SLICES, math.ceil((high - low) / _SLICE)))
    cuts = [low + (high - low) * k / count for k in range(count + 1)]
    return [_slice(ring, left, right) for left, right in itertools.pairwise(cuts)]


def _slice(ring: list[Point], left: float, right: float) -> Box:
    """Return the box around the part of a convex outline that lies between two x coordinates [nm]."""
    ys = [float(y) for x, y in ring if left <= x <= right]
    for (ax, ay), (bx, by) in zip(ring, [*ring[1:], ring[0]], strict=True):
        inside = (x for x in (left, right) if min(ax, bx) < x < max(ax, bx))
        ys.extend(ay + (by - ay) * (x - ax) / (bx - ax) for x in inside)
    return math.floor(left), math.floor(min(ys)), math.ceil(right), math.ceil(max(ys))


def ring_to_world(pose: Pose, box: Box) -> Ring:
    """Return the outline of a box given in the frame of a pose, counter-clockwise."""
    x0, y0, x1, y1 = box
    return Ring(tuple(to_world(pose, x, y) for x, y in ((x0, y0), (x1, y0), (x1, y1), (x0, y1))))


def hull(boxes: Iterable[tuple[float, float, float, float]]) -> tuple[float, float, float, float]:
    """Return the box around boxes."""
    x0, y0, x1, y1 = zip(*boxes, strict=True)
    return min(x0), min(y0), max(x1), max(y1)


def box_around(points: list[Point]) -> Box:
    """Return the axis-parallel box around points."""
    xs = [p[0] for p in points]
    ys = [p[1] for p in points]
    return min(xs), min(ys), max(xs), max(ys)


def grown(box: Box, amount: int) -> Box:
    """Return the box with every side moved outward by an amount [nm]."""
    return box[0] - amount, box[1] - amount, box[2] + amount, box[3] + amount
