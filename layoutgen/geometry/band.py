"""What a line keeps clear around itself: its centre-line grown to both sides, with square corners."""

from __future__ import annotations

import itertools
import math
from collections.abc import Sequence

import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.geometry.booleans import joined
from layoutgen.geometry.ring import Point
from layoutgen.geometry.stroke import stroke, turn_degrees

__all__ = ["band"]

_SKEW_MARGIN_NM = 6
"""Added to both sides where legs are not parallel to an axis: their corners are rounded to the grid [nm]."""


def band(path: Sequence[Point], half: float, start: float, end: float) -> BaseGeometry:
    """Return the area [nm] within ``half`` of a centre-line, its corners left square and its ends extended.

    Nothing outside it is nearer to the centre-line than ``half``, so copper outside a band of half the line's
    width plus a gap keeps that gap, at bends too (outer corners are farther).

    Args:
        path: Vertices [nm], at least two, turns up to a right angle.
        half: Half the band's width [nm].
        start: How far the band reaches before the first vertex [nm].
        end: How far it reaches past the last [nm].
    """
    skew = any(0 not in (bx - ax, by - ay) for (ax, ay), (bx, by) in itertools.pairwise(path))
    half, start, end = (math.ceil(size) + (_SKEW_MARGIN_NM if skew else 0) for size in (half, start, end))
    whole = shapely.Polygon(stroke(_extended(path, start, end), 2 * half).points)
    if whole.is_valid:
        return whole
    reaches = [start, *(_corner_reach(path, i, half) for i in range(1, len(path) - 1)), end]
    return joined(_leg(path[i], path[i + 1], half, reaches[i], reaches[i + 1]) for i in range(len(path) - 1))


def _extended(path: Sequence[Point], start: int, end: int) -> list[Point]:
    """Return a centre-line with both ends moved outwards [nm]."""
    return [_beyond(path[1], path[0], start), *path[1:-1], _beyond(path[-2], path[-1], end)]


def _beyond(a: Point, b: Point, distance: int) -> Point:
    """Return the point a distance [nm] past b on the way from a."""
    share = distance / math.dist(a, b)
    return round(b[0] + (b[0] - a[0]) * share), round(b[1] + (b[1] - a[1]) * share)


def _corner_reach(path: Sequence[Point], i: int, half: float) -> float:
    """Return how far a leg must reach past vertex i, so that both legs meet in the outer corner [nm]."""
    turn = turn_degrees(path[i - 1], path[i], path[i + 1])
    return half * math.tan(math.radians(min(abs(turn), 90.0)) / 2.0)


def _leg(a: Point, b: Point, half: float, before: float, after: float) -> shapely.Polygon:
    """Return the rectangle along one leg."""
    length = math.dist(a, b)
    ux, uy = (b[0] - a[0]) / length, (b[1] - a[1]) / length
    corners = ((-before, -half), (length + after, -half), (length + after, half), (-before, half))
    return shapely.Polygon(
        [(round(a[0] + t * ux - s * uy), round(a[1] + t * uy + s * ux)) for t, s in corners]
    )
