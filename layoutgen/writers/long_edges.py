"""Outlines without edges too short for their receivers: each is merged where that moves the least area.

Programs that read drawings take edges below a micrometre for repeated vertices, or lose them. Both ends of
such an edge become one vertex: the point where its neighbours meet if they are prolonged, one of the ends,
or, on a step in a straight edge, the point between them at which as much area is won as lost.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

from layoutgen.geometry import Point, Ring
from layoutgen.writers.outlines import distinct_vertices

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
    corners = distinct_vertices(ring)
    while True:
        lengths = _lengths(corners)
        least = min(lengths)
        if least >= shortest:
            return corners
        merged = _merged(corners, lengths.index(least))
        if len(merged) < (2 if any(bulge for _, bulge in merged) else 3):
            return corners
        corners = merged


def _lengths(corners: Sequence[Corner]) -> list[float]:
    """Return the lengths [nm] of the edges, chords of arcs."""
    points = [point for point, _ in corners]
    return list(map(math.dist, points, (*points[1:], points[0])))


def _merged(corners: Sequence[Corner], edge: int) -> list[Corner]:
    """Return the outline with both ends of an edge made one vertex."""
    ring = [*corners[edge:], *corners[:edge]]
    (start, _), (end, bulge) = ring[0], ring[1]
    before, after = ring[-1][0], ring[2 % len(ring)][0]
    places = [start, end, *_between(before, start, end, after)]
    place = min(places, key=lambda point: _moved(before, start, end, after, point))
    merged = [(place, bulge), *ring[2:]]
    return [a for a, b in zip(merged, (*merged[1:], merged[0]), strict=True) if a[0] != b[0]]


def _between(before: Point, start: Point, end: Point, after: Point) -> Iterator[Point]:
    """Yield where the neighbours of an edge meet, and where its ends balance, on whole nanometres."""
    first, last = math.dist(before, start), math.dist(end, after)
    share = last / (first + last)
    yield round(start[0] + share * (end[0] - start[0])), round(start[1] + share * (end[1] - start[1]))
    (ux, uy), (vx, vy) = _step(before, start), _step(end, after)
    (wx, wy), turn = _step(start, end), ux * vy - uy * vx
    if turn:
        along = (wx * vy - wy * vx) / turn
        meeting = start[0] + along * ux, start[1] + along * uy
        if math.dist(meeting, start) <= _FAR * math.hypot(wx, wy):
            yield round(meeting[0]), round(meeting[1])


def _moved(before: Point, start: Point, end: Point, after: Point, place: Point) -> float:
    """Return the area [nm^2] that changes sides when both ends of an edge go to one place, at most."""
    pieces = (_doubled(before, start, place), _doubled(start, end, place), _doubled(end, after, place))
    return (math.fsum(map(abs, pieces)) + abs(math.fsum(pieces))) / 2.0


def _doubled(a: Point, b: Point, c: Point) -> int:
    """Return twice the signed area [nm^2] of a triangle."""
    return (b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0])


def _step(start: Point, end: Point) -> Point:
    return end[0] - start[0], end[1] - start[1]
