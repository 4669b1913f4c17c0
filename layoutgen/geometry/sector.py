"""The outline of a radial stub: a sector with a true arc, and a neck down to its apex."""

from __future__ import annotations

import math

import numpy as np
import shapely

from layoutgen.geometry.ring import Point, Ring

__all__ = ["sector_cover", "sector_ring"]

_COVER_STEP_DEG = 10.0
_ARC_DEG = 30.0


def sector_ring(apex: Point, heading: float, sector: float, inner: int, outer: int, extra: int = 0) -> Ring:
    """Return the outline of a radial stub, its outer edge true arcs about the apex, of 30 degrees at most.

    Readers that take an arc as one cubic curve are off by the sixth power of its angle: half a micrometre
    for 70 degrees at 9 mm, next to nothing for 30.

    From the inner radius inwards the sector goes on as a neck as wide as its chord there, down to the apex,
    so that it joins a host line of any width.

    Args:
        apex: Middle of all radii [nm].
        heading: Direction of the axis, counter-clockwise from east [deg].
        sector: Opening angle [deg], below 180.
        inner: Radius at which the sector begins [nm].
        outer: Radius of the outer arc [nm].
        extra: How far every edge is moved outwards [nm].

    Raises:
        ValueError: A sector of 180 degrees or more, or radii that leave no sector.
    """
    if not 0.0 < sector < 180.0 or not 0 < inner < outer:
        raise ValueError(f"no sector of {sector} degrees between the radii {inner} and {outer}")
    corners = _right_side(math.radians(sector) / 2.0, inner, outer, extra)
    turn = 2.0 * math.atan2(corners[-1][1], corners[-1][0])
    count = math.ceil(math.degrees(turn) / _ARC_DEG)
    reach, steps = math.hypot(*corners[-1]), (turn * (k / count - 0.5) for k in range(1, count))
    arc = [(reach * math.cos(a), reach * math.sin(a)) for a in steps]
    around = [*((x, -y) for x, y in corners), *arc, *reversed(corners)]
    bulges = [0.0] * len(around)
    first = len(corners) - 1
    bulges[first : first + count] = [math.tan(turn / count / 4.0)] * count
    return Ring(tuple(_placed(apex, heading, x, y) for x, y in around), tuple(bulges))


def sector_cover(apex: Point, heading: float, sector: float, inner: int, outer: int) -> shapely.Polygon:
    """Return a polygon [nm] with straight edges that holds the whole radial stub of :func:`sector_ring`."""
    half = math.radians(sector) / 2.0
    corners = _right_side(half, inner, outer, 2)
    turn = 2.0 * math.atan2(corners[-1][1], corners[-1][0])
    count = max(2, math.ceil(math.degrees(turn) / _COVER_STEP_DEG))
    reach = math.hypot(*corners[-1]) / math.cos(turn / count / 2.0)
    inner_corners = corners[:-1]
    arc = -turn / 2.0 + turn / count * np.arange(count + 1)
    around = [(x, -y) for x, y in inner_corners]
    around += [(reach * math.cos(a), reach * math.sin(a)) for a in arc]
    around += [(x, y) for x, y in reversed(inner_corners)]
    return shapely.Polygon([_placed(apex, heading, x, y) for x, y in around])


def _right_side(half: float, inner: int, outer: int, extra: int) -> list[tuple[float, float]]:
    """Return neck's foot, neck's end and outer corner in the frame of the axis; y counts as a distance."""
    neck = inner * math.sin(half) + extra
    start = (neck - extra * math.cos(half)) / math.sin(half)
    end = math.sqrt((outer + extra) ** 2 - extra**2)
    foot = (0.0 - extra, neck)
    return [
        foot,
        *(
            (t * math.cos(half) - extra * math.sin(half), t * math.sin(half) + extra * math.cos(half))
            for t in (start, end)
        ),
    ]


def _placed(apex: Point, heading: float, x: float, y: float) -> Point:
    """Return a point of the axis' frame in the board's [nm]."""
    cos, sin = math.cos(math.radians(heading)), math.sin(math.radians(heading))
    return round(apex[0] + x * cos - y * sin), round(apex[1] + x * sin + y * cos)
