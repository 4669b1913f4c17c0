"""Copper with holes as one closed outline: each hole is reached along a cut and left along the same cut.

For formats without holes whose readers take such outlines as what they are (Gerber regions). Every cut is a
horizontal line from the west end of a hole to the copper edge that it meets first, so both of its runs have
the same two end points, all on whole nanometres, and arcs stay arcs.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

import numpy as np
import shapely

from layoutgen.geometry import Point, Ring
from layoutgen.writers.outlines import bulge_radius, distinct_vertices, turned

__all__ = ["arc_centre", "one_outline"]

Corner = tuple[Point, float]
"""A vertex [nm] and the bulge [-] of the edge that leaves it."""


def one_outline(outline: Ring, holes: Sequence[Ring]) -> Ring:
    """Return outline and holes as one closed outline that touches itself along the cuts.

    Args:
        outline: The outer outline; where a cut meets a slanted edge or an arc, a vertex is put in, which
            moves the edge by up to half a nanometre.
        holes: Holes inside it that do not overlap each other.

    Raises:
        ValueError: A hole with nothing west of it, which is outside the outline.
    """
    outer = distinct_vertices(turned(outline, 1))
    rings = sorted((_from_west(turned(hole, -1)) for hole in holes), key=lambda ring: ring[0][0])
    if not rings:
        return _ring(outer)
    return _ring(list(_walk(_joined([outer, *rings]))))


def arc_centre(start: Point, end: Point, bulge: float) -> tuple[float, float]:
    """Return the centre [nm] of the arc between two vertices."""
    offset = (1.0 - bulge * bulge) / (4.0 * bulge)
    x, y = (start[0] + end[0]) / 2.0, (start[1] + end[1]) / 2.0
    return x - offset * (end[1] - start[1]), y + offset * (end[0] - start[0])


def _ring(corners: Sequence[Corner]) -> Ring:
    """Return a ring, edges of no length left out."""
    ring = Ring(tuple(p for p, _ in corners), tuple(b for _, b in corners))
    kept = distinct_vertices(ring)
    bulges = tuple(b for _, b in kept)
    return Ring(tuple(p for p, _ in kept), bulges if any(bulges) else ())


def _from_west(ring: Ring) -> list[Corner]:
    """Return a ring that starts at its west end; an end inside an arc becomes a vertex."""
    corners: list[Corner] = []
    vertices = distinct_vertices(ring)
    for k, (start, bulge) in enumerate(vertices):
        end = vertices[(k + 1) % len(vertices)][0]
        west = _west_of_arc(start, end, bulge) if bulge else None
        corners += [(start, bulge)] if west is None else _split(start, end, bulge, [west])
    first = min(range(len(corners)), key=lambda k: corners[k][0])
    return corners[first:] + corners[:first]


def _west_of_arc(start: Point, end: Point, bulge: float) -> Point | None:
    """Return the west end [nm] of an arc when it lies further west than its ends, else None."""
    centre, radius = arc_centre(start, end, bulge), bulge_radius(start, end, bulge)
    west = (round(centre[0] - radius), round(centre[1]))
    further = west[0] < min(start[0], end[0])
    return west if further and 0.0 < _share(start, end, bulge, west) < 1.0 else None


def _share(start: Point, end: Point, bulge: float, point: tuple[float, float]) -> float:
    """Return how far along an edge a point on it lies, 0 at the start and 1 at the end [-]."""
    if not bulge:
        return math.dist(start, point) / math.dist(start, end)
    x, y = arc_centre(start, end, bulge)
    turn = math.copysign(1.0, bulge)
    angle = turn * (math.atan2(point[1] - y, point[0] - x) - math.atan2(start[1] - y, start[0] - x))
    return angle % (2.0 * math.pi) / abs(4.0 * math.atan(bulge))


def _split(start: Point, end: Point, bulge: float, points: Sequence[Point]) -> list[Corner]:
    """Return an edge cut at points on it, in their order along it, each piece an arc of the same circle."""
    shares = [0.0, *(_share(start, end, bulge, p) for p in points), 1.0]
    angle = math.atan(bulge)
    pieces = zip((start, *points), shares, shares[1:], strict=False)
    return [(p, math.tan(angle * (b - a)) if bulge else 0.0) for p, a, b in pieces]


class _Edges:
    """All edges of all rings, to be asked which one a line going west meets first."""

    def __init__(self, rings: Sequence[Sequence[Corner]]) -> None:
        self.ends: list[tuple[int, int, Point, Point, float]] = []
        for number, ring in enumerate(rings):
            for k, (start, bulge) in enumerate(ring):
                self.ends.append((number, k, start, ring[(k + 1) % len(ring)][0], bulge))
        self.boxes = np.array([_box(start, end, bulge) for _, _, start, end, bulge in self.ends])
        self.tree = shapely.STRtree(shapely.box(*self.boxes.T))
        self.west = float(self.boxes[:, 0].min())
        spans = self.boxes[:, 2] - self.boxes[:, 0]
        self.reach = max(float(np.median(spans)), 1000.0)

    def first_west(self, ring: int, at: Point) -> tuple[int, int, Point]:
        """Return ring, edge and point [nm] that a line from a hole's west end meets first, going west."""
        reach = self.reach
        while True:
            edge = max(at[0] - reach, self.west - 1.0)
            near = self.tree.query(shapely.box(edge, at[1], at[0], at[1]))
            hits = [hit for k in sorted(near.tolist()) if (hit := self._hit(k, ring, at, edge))]
            if hits:
                x, number, k = max(hits, key=lambda hit: (hit[0], -hit[1], -hit[2]))
                return number, k, (round(x), at[1])
            if edge < self.west:
                raise ValueError(f"a hole at {at} nm lies outside its outline")
            reach *= 4.0

    def _hit(self, edge: int, ring: int, at: Point, west: float) -> tuple[float, int, int] | None:
        """Return where [nm] an edge of an earlier ring is met, None when it is not."""
        number, k, start, end, bulge = self.ends[edge]
        if number >= ring:
            return None
        found = [x for x in _crossings(start, end, bulge, at[1]) if west <= x <= at[0] + 0.5]
        return (max(found), number, k) if found else None


def _box(start: Point, end: Point, bulge: float) -> tuple[float, float, float, float]:
    """Return bounds [nm] of an edge; of an arc, those of a circle about its middle that holds it."""
    low, high = np.minimum(start, end), np.maximum(start, end)
    if bulge:
        span = (
            bulge_radius(start, end, bulge) * 2.0 if abs(bulge) > 1.0 else abs(bulge) * math.dist(start, end)
        )
        low, high = low - span - 1.0, high + span + 1.0
    return float(low[0]), float(low[1]), float(high[0]), float(high[1])


def _crossings(start: Point, end: Point, bulge: float, y: int) -> list[float]:
    """Return where [nm] an edge meets the horizontal line at a height [nm]; of one along it, its ends."""
    ends = [float(p[0]) for p in (start, end) if p[1] == y]
    if not bulge:
        if ends or (start[1] > y) == (end[1] > y):
            return ends
        return [start[0] + (end[0] - start[0]) * ((y - start[1]) / (end[1] - start[1]))]
    (cx, cy), radius = arc_centre(start, end, bulge), bulge_radius(start, end, bulge)
    half = math.sqrt(max(0.0, radius**2 - (y - cy) ** 2))
    inner = [x for x in (cx - half, cx + half) if abs(y - cy) < radius and _on_arc(start, end, bulge, (x, y))]
    return ends + inner


def _on_arc(start: Point, end: Point, bulge: float, point: tuple[float, float]) -> bool:
    return 0.0 < _share(start, end, bulge, point) < 1.0


Attached = tuple[Sequence[Corner], dict[int, list[int]]]
"""A ring with the numbers of the holes that hang on each of its vertices."""


def _joined(rings: Sequence[list[Corner]]) -> list[Attached]:
    """Return the rings, each hole hung on the ring that its cut meets, cuts' ends made vertices."""
    edges = _Edges(rings)
    hung: list[dict[int, list[tuple[Point, int]]]] = [{} for _ in rings]
    for number, ring in enumerate(rings[1:], start=1):
        host, edge, at = edges.first_west(number, ring[0][0])
        hung[host].setdefault(edge, []).append((at, number))
    return [_with_vertices(ring, cuts) for ring, cuts in zip(rings, hung, strict=True)]


def _with_vertices(ring: Sequence[Corner], cuts: dict[int, list[tuple[Point, int]]]) -> Attached:
    """Return a ring with a vertex at the end of every cut that meets it."""
    corners: list[Corner] = []
    holes_at: dict[Point, list[int]] = {}
    for k, (start, bulge) in enumerate(ring):
        end = ring[(k + 1) % len(ring)][0]
        met = cuts.get(k, [])
        for at, number in met:
            holes_at.setdefault(at, []).append(number)
        inner = sorted({at for at, _ in met} - {start, end}, key=lambda p: _share(start, end, bulge, p))
        corners += _split(start, end, bulge, inner) if inner else [(start, bulge)]
    places = {}
    for k, (point, _) in enumerate(corners):
        if point in holes_at:
            places[k] = holes_at.pop(point)
    return corners, places


def _walk(rings: Sequence[Attached]) -> Iterator[Corner]:
    """Yield the vertices of the one outline: along each ring, into every hole that hangs on it and back."""
    waiting = [_along(*rings[0])]
    while waiting:
        step = next(waiting[-1], None)
        if step is None:
            waiting.pop()
        elif isinstance(step, int):
            waiting.append(_along(*rings[step], closed=True))
        else:
            yield step


def _along(
    corners: Sequence[Corner], holes: dict[int, list[int]], closed: bool = False
) -> Iterator[Corner | int]:
    """Yield a ring's vertices; at one with holes, that vertex, a hole's number, and the vertex again."""
    for k, (point, bulge) in enumerate(corners):
        for number in holes.get(k, ()):
            yield point, 0.0
            yield number
        yield point, bulge
    if closed:
        yield corners[0][0], 0.0
