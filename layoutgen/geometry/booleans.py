"""Booleans and offsets of polygons on the nanometre grid.

Every result lies on the grid (``grid_size`` 1 nm), so artwork is exact and repeatable. Offsets have straight
(mitred) corners: a right angle stays one, and corners sharper than about 84 degrees are cut off flat.
"""

from __future__ import annotations

import math
from collections.abc import Iterable

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.geometry.ring import Ring

__all__ = [
    "circumscribed",
    "closed",
    "cut",
    "grow",
    "joined",
    "opened",
    "overlap",
    "pieces",
    "rings_of",
]

GRID_NM = 1.0
MITRE_LIMIT = 1.5
"""Longest mitre in offsets [-]: 1.414 is a right angle, so that one stays and sharper ones are cut."""


def joined(shapes: Iterable[BaseGeometry]) -> BaseGeometry:
    """Return the union of polygons [nm]; a single one comes out on the grid as well."""
    together = list(shapes)
    if len(together) == 1:  # shapely hands a single shape through as it is
        return _areal(shapely.set_precision(together[0], GRID_NM))
    return _areal(shapely.union_all(together, grid_size=GRID_NM))


def cut(shape: BaseGeometry, tool: BaseGeometry) -> BaseGeometry:
    """Return what is left of the first [nm] when the second is taken away."""
    return _areal(shapely.difference(shape, tool, grid_size=GRID_NM))


def overlap(shape: BaseGeometry, other: BaseGeometry) -> BaseGeometry:
    """Return the common area [nm] of two shapes."""
    return _areal(shapely.intersection(shape, other, grid_size=GRID_NM))


def grow(shape: BaseGeometry, distance: float, mitre_limit: float = MITRE_LIMIT) -> BaseGeometry:
    """Return the shape [nm] offset outwards by a distance [nm] (inwards when negative), corners straight."""
    if distance == 0:
        return shape
    grown = shapely.buffer(shape, distance, join_style="mitre", mitre_limit=mitre_limit)
    return _areal(shapely.set_precision(grown, GRID_NM))


def _areal(shape: BaseGeometry) -> BaseGeometry:
    """Return a shape without the lines and points that booleans leave where outlines only touch."""
    if isinstance(shape, (shapely.Polygon, shapely.MultiPolygon)):
        return shape
    return shapely.MultiPolygon([p for p in shapely.get_parts(shape) if isinstance(p, shapely.Polygon)])


def opened(shape: BaseGeometry, radius: float) -> BaseGeometry:
    """Return the shape [nm] without what is narrower than twice the radius [nm]; never more than it."""
    return overlap(grow(grow(shape, -radius), radius), shape)


def closed(shape: BaseGeometry, radius: float) -> BaseGeometry:
    """Return the shape [nm] with gaps narrower than twice the radius [nm] filled; never less than it."""
    return joined([grow(grow(shape, radius), -radius), shape])


def pieces(shape: BaseGeometry) -> list[shapely.Polygon]:
    """Return the polygons of a shape with area, ordered by their south-west corners."""
    parts = [
        part for part in shapely.get_parts(shape) if isinstance(part, shapely.Polygon) and part.area > 0.0
    ]
    return sorted(parts, key=lambda part: (*part.bounds, part.area))


def rings_of(polygon: shapely.Polygon) -> tuple[Ring, tuple[Ring, ...]]:
    """Return outline (counter-clockwise) and holes (clockwise) of a polygon, each from its least vertex."""
    outline = _ring(polygon.exterior, ccw=True)
    if outline is None:
        raise ValueError("a polygon without area has no outline")
    holes = [hole for interior in polygon.interiors if (hole := _ring(interior, ccw=False)) is not None]
    return outline, tuple(sorted(holes, key=lambda ring: ring.points))


def _ring(line: shapely.LinearRing, ccw: bool) -> Ring | None:
    """Return a ring with its turning vertices only; None when nothing of it is left."""
    points = np.rint(np.asarray(line.coords)[:-1, :2]).astype(np.int64)
    while True:
        before, after = points - np.roll(points, 1, axis=0), np.roll(points, -1, axis=0) - points
        turning = before[:, 0] * after[:, 1] - before[:, 1] * after[:, 0] != 0
        if turning.all():
            break
        points = points[turning]
        if len(points) < 3:
            return None
    x, y = points[:, 0], points[:, 1]
    if (float(np.dot(x, np.roll(y, -1)) - np.dot(y, np.roll(x, -1))) > 0.0) != ccw:
        points = points[::-1]
    first = min(range(len(points)), key=lambda i: (points[i, 0], points[i, 1]))
    return Ring(tuple((int(px), int(py)) for px, py in np.roll(points, -first, axis=0)))


def circumscribed(x: float, y: float, radius: float, sides: int = 32) -> shapely.Polygon:
    """Return a regular polygon [nm] that holds the whole circle, with flats to the four sides.

    Its corners lie ``radius`` (1 / cos(pi / sides) - 1) outside: 0.5 % for 32 sides.
    """
    angle = (np.arange(sides) + 0.5) * (2.0 * math.pi / sides)
    reach = (radius + 1.0) / math.cos(math.pi / sides)
    return shapely.Polygon(np.rint(np.column_stack([x + reach * np.cos(angle), y + reach * np.sin(angle)])))
