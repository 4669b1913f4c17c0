"""Booleans and offsets of polygons on the nanometre grid.

Every result lies on the grid (``grid_size`` 1 nm), so artwork is exact and repeatable. Offsets have straight
(mitred) corners: a right angle stays one, and corners sharper than about 84 degrees are cut off flat.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.geometry.ring import Point, Ring

__all__ = [
    "circumscribed",
    "closed",
    "cut",
    "grow",
    "joined",
    "offset_ring",
    "offset_rings",
    "opened",
    "overlap",
    "pieces",
    "rings_of",
    "sharpened",
]

GRID_NM = 1.0
_TINY_NM = 10.0
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


def sharpened(polygon: shapely.Polygon, shortest: float) -> shapely.Polygon:
    """Return a polygon without tiny edges at its corners: the edges before and after are made to meet.

    Roundings leave such edges of a few nanometres, which an offset by more than their length would turn over.

    Args:
        polygon: The polygon, on the grid.
        shortest: Edges shorter than this [nm] between two inside corners are replaced, which takes area away;
            others only when shorter than 10 nm.
    """
    outline, holes = rings_of(polygon)
    rings = [_sharp(list(ring.points), shortest) for ring in (outline, *holes)]
    sharp = shapely.Polygon(rings[0], rings[1:])
    return sharp if sharp.is_valid else polygon


def _sharp(points: list[Point], shortest: float) -> list[Point]:
    """Return a ring, area on its left, with tiny edges replaced by corners."""
    i = 0
    while i < len(points) and len(points) > 3:
        a, b, c, d = (points[(i + k) % len(points)] for k in range(4))
        inside = _turn(a, b, c) < 0 and _turn(b, c, d) < 0
        length = math.dist(b, c)
        corner = _crossing(a, b, c, d) if length < (shortest if inside else _TINY_NM) else None
        if corner is None or math.dist(corner, b) > 4.0 * length or _folds(a, b, c, d, corner):
            i += 1
            continue
        points[(i + 1) % len(points)] = corner
        del points[(i + 2) % len(points)]
    return points


def _folds(a: Point, b: Point, c: Point, d: Point, corner: Point) -> bool:
    """True when edges to and from a new corner would run against those they replace."""
    before = (corner[0] - a[0]) * (b[0] - a[0]) + (corner[1] - a[1]) * (b[1] - a[1])
    after = (d[0] - corner[0]) * (d[0] - c[0]) + (d[1] - corner[1]) * (d[1] - c[1])
    return before <= 0 or after <= 0


def _turn(a: Point, b: Point, c: Point) -> int:
    """Return the cross product of two edges that follow each other: negative for a right turn."""
    return (b[0] - a[0]) * (c[1] - b[1]) - (b[1] - a[1]) * (c[0] - b[0])


def _crossing(a: Point, b: Point, c: Point, d: Point) -> Point | None:
    """Return where the lines a-b and c-d cross, None when they are parallel."""
    ux, uy, vx, vy = b[0] - a[0], b[1] - a[1], d[0] - c[0], d[1] - c[1]
    across = ux * vy - uy * vx
    if across == 0:
        return None
    t = ((c[0] - a[0]) * vy - (c[1] - a[1]) * vx) / across
    return round(a[0] + t * ux), round(a[1] + t * uy)


def circumscribed(x: float, y: float, radius: float, sides: int = 32) -> shapely.Polygon:
    """Return a regular polygon [nm] that holds the whole circle, with flats to the four sides.

    Its corners lie ``radius`` (1 / cos(pi / sides) - 1) outside: 0.5 % for 32 sides.
    """
    angle = (np.arange(sides) + 0.5) * (2.0 * math.pi / sides)
    reach = (radius + 1.0) / math.cos(math.pi / sides)
    return shapely.Polygon(np.rint(np.column_stack([x + reach * np.cos(angle), y + reach * np.sin(angle)])))


def offset_ring(ring: Ring, distance: int) -> Ring:
    """Return an outline moved to its right by a distance [nm], corners kept sharp.

    That is outwards for a counter-clockwise outline, and into the opening for a clockwise hole.

    Raises:
        ValueError: An outline with arcs other than a circle.
    """
    if distance == 0:
        return ring
    if len(ring.points) == 2:
        (x0, y0), (x1, y1) = ring.points
        return Ring.circle((x0 + x1) // 2, (y0 + y1) // 2, round(math.dist(*ring.points) / 2.0) + distance)
    if not ring.is_straight:
        raise ValueError("only straight outlines and circles can be offset")
    points = ring.points
    return Ring(tuple(_moved_corner(points, i, distance) for i in range(len(points))))


def offset_rings(polygon: shapely.Polygon, distance: int) -> list[tuple[Ring, tuple[Ring, ...]]]:
    """Return outline and holes of a polygon grown by a distance [nm], every corner moved exactly.

    A polygon whose edges are too short for that is offset by :func:`grow` instead, which rounds a little; it
    may come out in several pieces (shrunk) or with fewer holes.
    """
    outline, holes = rings_of(polygon)
    if distance == 0:
        return [(outline, holes)]
    moved = offset_ring(outline, distance), tuple(offset_ring(hole, distance) for hole in holes)
    area = shapely.Polygon(moved[0].points, [hole.points for hole in moved[1]])
    if area.is_valid and (area.area > polygon.area) == (distance > 0):
        return [moved]
    return [rings_of(piece) for piece in pieces(grow(polygon, distance))]


def _moved_corner(points: Sequence[Point], i: int, distance: int) -> Point:
    """Return where the outwards moved edges before and after vertex i meet."""
    (ax, ay), (bx, by), (cx, cy) = points[i - 1], points[i], points[(i + 1) % len(points)]
    before, after = math.hypot(bx - ax, by - ay), math.hypot(cx - bx, cy - by)
    nx, ny = (by - ay) / before, (ax - bx) / before
    mx, my = (cy - by) / after, (bx - cx) / after
    scale = distance / (1.0 + nx * mx + ny * my)
    return round(bx + (nx + mx) * scale), round(by + (ny + my) * scale)
