"""Exact offsets of outlines: every edge moved along its normal, every corner where the moved edges meet.

For undercut and clearances, where an offset by buffers would round by up to a per cent of the distance.
"""

from __future__ import annotations

import math
from collections.abc import Sequence

import shapely

from layoutgen.geometry.booleans import grow, joined, pieces, rings_of
from layoutgen.geometry.ring import Point, Ring

__all__ = ["offset_ring", "offset_rings", "sharpened"]

_TINY_NM = 10.0
_FINE_NM = 2.0
_ALIKE = 0.05
_LONGEST_MITRE = 5.0
"""Farthest that a corner moves, in distances of an offset outwards [-]: 5 for one of 23 degrees."""


def offset_ring(ring: Ring, distance: int) -> Ring:
    """Return an outline moved to its right by a distance [nm], corners kept sharp.

    That is outwards for a counter-clockwise outline, and into the opening for a clockwise hole. Vertices that
    turn nothing do not count. Edges that would turn over, being shorter than the offset leaves room for, are
    dropped: their neighbours meet. A counter-clockwise outline that no moving of edges gets right (a notch
    narrower than twice the distance, a corner sharper than 23 degrees) is grown by booleans instead: what of
    it closes is filled.

    Raises:
        ValueError: An outline with arcs other than a circle, or one of which nothing sensible is left.
    """
    if distance == 0:
        return ring
    if len(ring.points) == 2:
        (x0, y0), (x1, y1) = ring.points
        return Ring.circle((x0 + x1) // 2, (y0 + y1) // 2, round(math.dist(*ring.points) / 2.0) + distance)
    if not ring.is_straight:
        raise ValueError("only straight outlines and circles can be offset")
    points = _turning(ring.points)
    outline = distance > 0 and len(points) > 2 and shapely.LinearRing(points).is_ccw
    if not outline:
        return Ring(tuple(_moved(points, distance)))
    fine = _grown(shapely.Polygon(points), distance)
    try:
        moved = _moved(points, distance)
    except ValueError:
        return fine
    return Ring(tuple(moved)) if _is_alike(moved, fine, distance) else fine


def _grown(polygon: shapely.Polygon, distance: int) -> Ring:
    """Return an outline grown by booleans, which leave out what is finer than a few nanometres."""
    body = shapely.make_valid(shapely.simplify(shapely.make_valid(polygon), _FINE_NM))
    grown = shapely.buffer(body, distance, join_style="mitre", mitre_limit=_LONGEST_MITRE)
    whole = pieces(joined(pieces(shapely.make_valid(grown))))
    return rings_of(max(whole, key=lambda piece: piece.area))[0]


def _is_alike(moved: Sequence[Point], grown: Ring, distance: int) -> bool:
    """True for a valid outline that lies where the grown one does, to the roundings of booleans."""
    polygon = shapely.Polygon(moved)
    apart = shapely.hausdorff_distance(polygon.exterior, grown.polygon().exterior)
    return bool(polygon.is_valid and apart <= _ALIKE * distance + _TINY_NM)


def _turning(points: Sequence[Point]) -> list[Point]:
    """Return the vertices of an outline at which it turns: none twice, none on an edge or at a fold."""
    kept = list(points)
    i = 0
    while i < len(kept) and len(kept) > 2:
        if _turn(kept[i - 1], kept[i], kept[(i + 1) % len(kept)]) == 0:
            del kept[i]
            i = max(0, i - 2)
        else:
            i += 1
    return kept


def _moved(points: Sequence[Point], distance: int) -> list[Point]:
    """Return an outline's vertices with all edges moved; those that would turn over go, the first one first.

    Raises:
        ValueError: Nothing sensible is left.
    """
    points = list(points)
    while len(points) > 2:
        moved = [_moved_corner(points, i, distance) for i in range(len(points))]
        turned = [i for i in range(len(points)) if _turned_over(points, moved, i)]
        if not turned:
            return moved
        _drop_edge(points, min(turned, key=lambda i: _survival(points, moved, i)))
        points = _turning(points)
    raise ValueError("nothing sensible is left of the outline")


def _survival(points: Sequence[Point], moved: Sequence[Point], i: int) -> float:
    """Return at which share of the offset the edge after vertex i, which turns over, has no length left."""
    before = math.dist(points[i], points[(i + 1) % len(points)])
    return before / (before + math.dist(moved[i], moved[(i + 1) % len(points)]))


def _turned_over(points: Sequence[Point], moved: Sequence[Point], i: int) -> bool:
    """True when the edge after vertex i runs the other way, or is nothing, after the offset."""
    (ax, ay), (bx, by) = points[i], points[(i + 1) % len(points)]
    (cx, cy), (dx, dy) = moved[i], moved[(i + 1) % len(points)]
    return (bx - ax) * (dx - cx) + (by - ay) * (dy - cy) <= 0


def _drop_edge(points: list[Point], i: int) -> None:
    """Make the edges before and after the one that follows vertex i meet.

    Raises:
        ValueError: They are parallel, or too few are left.
    """
    count = len(points)
    before, after = points[i - 1], points[(i + 2) % count]
    corner = _crossing(before, points[i], points[(i + 1) % count], after) if count > 3 else None
    if corner is None or corner in (before, after):
        raise ValueError("nothing sensible is left of the outline")
    points[i] = corner
    del points[(i + 1) % count]


def offset_rings(polygon: shapely.Polygon, distance: int) -> list[tuple[Ring, tuple[Ring, ...]]]:
    """Return outline and holes of a polygon grown by a distance [nm], every corner moved exactly.

    A polygon that leaves no room for that is offset by :func:`grow` instead, which rounds a little; it may
    come out in several pieces (shrunk) or with fewer holes.
    """
    outline, holes = rings_of(polygon)
    try:
        moved = offset_ring(outline, distance), tuple(offset_ring(hole, distance) for hole in holes)
    except ValueError:
        moved = None
    if moved is not None and shapely.Polygon(moved[0].points, [hole.points for hole in moved[1]]).is_valid:
        return [moved]
    return [rings_of(piece) for piece in pieces(grow(polygon, distance))]


def _about(points: Sequence[Point], i: int) -> tuple[Point, Point, Point]:
    """Return vertex i between those before and after it."""
    return points[i - 1], points[i], points[(i + 1) % len(points)]


def _moved_corner(points: Sequence[Point], i: int, distance: int) -> Point:
    """Return where the outwards moved edges before and after vertex i meet."""
    (ax, ay), (bx, by), (cx, cy) = _about(points, i)
    before, after = math.hypot(bx - ax, by - ay), math.hypot(cx - bx, cy - by)
    nx, ny = (by - ay) / before, (ax - bx) / before
    mx, my = (cy - by) / after, (bx - cx) / after
    opening = 1.0 + nx * mx + ny * my
    if opening < 1e-9:
        raise ValueError("an outline that folds back on itself cannot be offset")
    if distance > 0 and opening < 2.0 / _LONGEST_MITRE**2 and _turn(*_about(points, i)) > 0:
        raise ValueError("a corner too sharp to be kept")
    scale = distance / opening
    return round(bx + (nx + mx) * scale), round(by + (ny + my) * scale)


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
