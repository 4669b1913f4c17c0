"""Small questions about outlines that several writers ask."""

from __future__ import annotations

import math

from layoutgen.geometry import Point, Ring

__all__ = ["as_circle", "bulge_radius", "distinct_vertices", "doubled_area", "turned"]

_FULL_TURNS = ((1.0, 1.0), (-1.0, -1.0))


def doubled_area(ring: Ring) -> float:
    """Return twice the signed area [nm^2] of the outline, true arcs included; counter-clockwise is > 0."""
    circle = as_circle(ring)
    if circle:
        return math.copysign(2.0 * math.pi * circle[2] ** 2, ring.bulges[0])
    points = ring.points
    after = (*points[1:], points[0])
    area = sum(x0 * y1 - x1 * y0 for (x0, y0), (x1, y1) in zip(points, after, strict=True))
    if ring.is_straight:
        return float(area)
    edges = zip(points, after, ring.bulges, strict=True)
    return area + math.fsum(_doubled_segment(p, q, bulge) for p, q, bulge in edges if bulge)


def _doubled_segment(start: Point, end: Point, bulge: float) -> float:
    """Return twice the signed area [nm^2] between an arc and its chord."""
    angle = 4.0 * math.atan(bulge)
    return bulge_radius(start, end, bulge) ** 2 * (angle - math.sin(angle))


def turned(ring: Ring, sense: int) -> Ring:
    """Return the outline running counter-clockwise (sense 1) or clockwise (-1), bulges mirrored with it."""
    if doubled_area(ring) * sense >= 0:
        return ring
    bulges = tuple(-b for b in (*ring.bulges[-2::-1], ring.bulges[-1])) if ring.bulges else ()
    return Ring(ring.points[::-1], bulges)


def as_circle(ring: Ring) -> tuple[int, int, int] | None:
    """Return middle and radius [nm] of an outline made of two half circles, None for any other."""
    points = ring.points
    if len(points) != 2 or ring.bulges not in _FULL_TURNS:
        return None
    (x0, y0), (x1, y1) = points
    width = x1 - x0
    if y0 != y1 or width % 2:
        return None
    return x0 + width // 2, y0, abs(width) // 2


def distinct_vertices(ring: Ring) -> list[tuple[Point, float]]:
    """Return vertices with their edges' bulges, edges of no length left out."""
    bulges = ring.bulges or (0.0,) * len(ring.points)
    after = (*ring.points[1:], ring.points[0])
    return [(p, b) for p, b, q in zip(ring.points, bulges, after, strict=True) if p != q]


def bulge_radius(start: Point, end: Point, bulge: float) -> float:
    """Return the radius [nm] of the arc between two vertices."""
    return math.dist(start, end) * (1.0 + bulge * bulge) / (4.0 * abs(bulge))
