"""What a line keeps clear around itself: its centre-line grown to both sides, with square corners."""

from __future__ import annotations

import math
from collections.abc import Sequence

import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.geometry.booleans import joined
from layoutgen.geometry.ring import Point
from layoutgen.geometry.stroke import turn_degrees

__all__ = ["band"]

_SKEW_MARGIN_NM = 3
"""Added to both sides of legs not parallel to an axis, whose corners are rounded to the grid [nm]."""


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
    reaches = [start, *(_corner_reach(path, i, half) for i in range(1, len(path) - 1)), end]
    return joined(_leg(path[i], path[i + 1], half, reaches[i], reaches[i + 1]) for i in range(len(path) - 1))


def _corner_reach(path: Sequence[Point], i: int, half: float) -> float:
    """Return how far a leg must reach past vertex i, so that both legs meet in the outer corner [nm]."""
    turn = turn_degrees(path[i - 1], path[i], path[i + 1])
    return half * math.tan(math.radians(min(abs(turn), 90.0)) / 2.0)


def _leg(a: Point, b: Point, half: float, before: float, after: float) -> shapely.Polygon:
    """Return the rectangle along one leg, rounded outwards to the grid."""
    length = math.dist(a, b)
    ux, uy = (b[0] - a[0]) / length, (b[1] - a[1]) / length
    if 0 not in (b[0] - a[0], b[1] - a[1]):
        half, before, after = half + _SKEW_MARGIN_NM, before + _SKEW_MARGIN_NM, after + _SKEW_MARGIN_NM
    half, before, after = math.ceil(half), math.ceil(before), math.ceil(after)
    corners = ((-before, -half), (length + after, -half), (length + after, half), (-before, half))
    return shapely.Polygon(
        [(round(a[0] + t * ux - s * uy), round(a[1] + t * uy + s * ux)) for t, s in corners]
    )
