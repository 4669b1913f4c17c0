"""Outlines without edges too short for their receivers: each is merged where that moves the least area.

Programs that read drawings take edges below a micrometre for repeated vertices, or lose them. Both ends of
such an edge become one vertex: the point where its neighbours meet if they are prolonged, one of the ends,
or, on a step in a straight edge, the point between them at which as much area is won as lost. What one edge
wins the next ones lose again; an arc beside an edge is bent so that nothing is.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

from layoutgen.geometry import Point, Ring
from layoutgen.writers.outlines import bulge_radius, distinct_vertices

__all__ = ["SHORTEST_NM", "long_edges"]

SHORTEST_NM = 1000
"""Shortest edge that is kept [nm]."""

_FAR = 2.0
"""How far from a short edge, in lengths of it, its neighbours may meet [-]."""

Corner = tuple[Point, float]
"""A vertex [nm] and the bulge [-] of the edge that leaves it."""


def long_edges(ring: Ring, shortest: int = SHORTEST_NM) -> list[Corner]:
    """Return vertices with their edges' bulges, edges shorter than ``shortest`` [nm] merged.

    An outline that is itself no larger than that keeps the last edges it needs to be one.
    """
    corners, carried = distinct_vertices(ring), 0.0
    while True:
        lengths = _lengths(corners)
        least = min(lengths)
        if least >= shortest or len(corners) < 3:
            return corners
        merged, carried = _merged(corners, lengths.index(least), carried)
        if len(merged) < (2 if any(bulge for _, bulge in merged) else 3):
            return corners
        corners = merged


def _lengths(corners: Sequence[Corner]) -> list[float]:
    """Return the lengths [nm] of the edges, chords of arcs."""
    points = [point for point, _ in corners]
    return list(map(math.dist, points, (*points[1:], points[0])))


def _merged(corners: Sequence[Corner], edge: int, carried: float) -> tuple[list[Corner], float]:
    """Return the outline with both ends of an edge made one vertex, and twice the area [nm^2] won so far.

    Args:
        corners: The outline.
        edge: Number of the edge.
        carried: What earlier edges won; this one is merged so that it is lost again.
    """
    ring = [*corners[edge:], *corners[:edge]]
    (start, _), (end, bulge), (before, bent) = ring[0], ring[1], ring[-1]
    after = ring[2 % len(ring)][0]
    places = [start, end, *_between(before, start, end, after, carried)]
    won = {place: _won(before, start, end, after, place) for place in places}
    place = min(places, key=lambda p: math.fsum(map(abs, won[p])) + abs(carried + math.fsum(won[p])))
    total = carried + math.fsum(won[place])
    if bent:
        arc = _segment(before, start, bent)
        bent, total = _rebent(before, place, bent, arc - total), 0.0
    elif bulge:
        arc = _segment(end, after, bulge)
        bulge, total = _rebent(place, after, bulge, arc - total), 0.0
    merged = [(place, bulge), *ring[2:-1], (before, bent)]
    pairs = zip(merged, (*merged[1:], merged[0]), strict=True)
    return [corner for corner, (point, _) in pairs if corner[0] != point], total


def _segment(start: Point, end: Point, bulge: float) -> float:
    """Return twice the signed area [nm^2] between an arc and its chord."""
    angle = 4.0 * math.atan(bulge)
    return bulge_radius(start, end, bulge) ** 2 * (angle - math.sin(angle))


def _rebent(start: Point, end: Point, bulge: float, wanted: float) -> float:
    """Return the bulge of an arc that is to have twice a signed area [nm^2] over its chord.

    Two steps of Newton's method, enough where the ends have moved by a micrometre.
    """
    for _ in range(2):
        found, nudge = _segment(start, end, bulge), 1e-6 * bulge
        slope = (_segment(start, end, bulge + nudge) - found) / nudge
        bulge += (wanted - found) / slope
    return bulge


def _between(before: Point, start: Point, end: Point, after: Point, carried: float) -> Iterator[Point]:
    """Yield the place [nm] on an edge at which nothing is won, and the one where its neighbours meet."""
    first, last = (carried + math.fsum(_won(before, start, end, after, place)) for place in (start, end))
    if first * last < 0:
        share = first / (first - last)
        yield round(start[0] + share * (end[0] - start[0])), round(start[1] + share * (end[1] - start[1]))
    (ux, uy), (vx, vy) = _step(before, start), _step(end, after)
    (wx, wy), turn = _step(start, end), ux * vy - uy * vx
    if turn:
        along = (wx * vy - wy * vx) / turn
        meeting = start[0] + along * ux, start[1] + along * uy
        if math.dist(meeting, start) <= _FAR * math.hypot(wx, wy):
            yield round(meeting[0]), round(meeting[1])


def _won(before: Point, start: Point, end: Point, after: Point, place: Point) -> tuple[int, int, int]:
    """Return twice the areas [nm^2] won, or lost, when both ends of an edge go to one place."""
    return _doubled(start, before, place), _doubled(end, start, place), _doubled(after, end, place)


def _doubled(a: Point, b: Point, c: Point) -> int:
    """Return twice the signed area [nm^2] of a triangle."""
    return (b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0])


def _step(start: Point, end: Point) -> Point:
    return end[0] - start[0], end[1] - start[1]
