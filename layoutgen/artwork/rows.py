"""Rows of vias along the pour's edges: beside lines (the fence), cut-outs and the board's edge.

A row stands at one distance inside the edge. Its corners get vias first, then each straight stretch is
divided evenly; vias that already stand near the edge (those of ground pads, those of a row on the other side
of a narrow piece) count as members.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, field

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from layoutgen.artwork.drills import Drills
from layoutgen.geometry import grow, pieces, rings_of

__all__ = ["Facing", "Side", "all_stretches", "set_rows", "sides_of", "whole_sides"]

_SAMPLE_NM = 100_000
_STEP_NM = 50_000
_ROUNDING_NM = 2.0
_CORNER_DEG = 40.0
_ASIDE = 0.05

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]


@dataclass(frozen=True, slots=True, eq=False)
class Side:
    """A stretch of a row between two corners: points along it, arc lengths, outward normals; all [nm], [-].

    ``outward`` points from the row to the pour's edge, ``inset`` [nm] away.
    """

    points: Floats
    along: Floats
    outward: Floats
    inset: int

    @property
    def length(self) -> float:
        """Length [nm]."""
        return float(self.along[-1])

    def spots(self, t: float, drills: Drills) -> tuple[tuple[float, float], tuple[float, float]]:
        """Return where a via may be tried at an arc length [nm]: in the row, and nearest to the edge."""
        x, y = self.at(t)
        nx, ny = self.outward[min(int(np.searchsorted(self.along, t)), len(self.along) - 1)].tolist()
        shift = max(0, self.inset - drills.least_inset)
        return (x, y), (x + nx * shift, y + ny * shift)

    def at(self, t: float) -> tuple[float, float]:
        """Return the point at an arc length [nm]."""
        return (
            float(np.interp(t, self.along, self.points[:, 0])),
            float(np.interp(t, self.along, self.points[:, 1])),
        )


@dataclass(frozen=True, slots=True)
class Facing:
    """What rows are asked for: targets to be faced, within which distance of the edge, and the pitch [nm].

    No row is asked for inside what is ``spared``.
    """

    targets: Sequence[BaseGeometry]
    distance: int
    pitch: int
    spared: BaseGeometry | None = None


def sides_of(pour: Iterable[shapely.Polygon], inset: int) -> list[Side]:
    """Return all rows along the pour's edges, ``inset`` [nm] inside them, cut at their corners."""
    out: list[Side] = []
    for piece in pour:
        for core in pieces(grow(piece, -inset)):
            outline, holes = rings_of(core)
            for ring in (outline, *holes):
                out.extend(_split(np.array(ring.points, dtype=np.float64), inset))
    return out


def whole_sides(pour: Iterable[shapely.Polygon], inset: int) -> list[Side]:
    """Return all rows as :func:`sides_of` does, but run on around corners."""
    cores = [core for piece in pour for core in pieces(grow(piece, -inset))]
    rings = [ring for core in cores for outline, holes in [rings_of(core)] for ring in (outline, *holes)]
    return [_sampled(np.array([*ring.points, ring.points[0]], dtype=np.float64), inset) for ring in rings]


def _split(points: Floats, inset: int) -> Iterator[Side]:
    """Yield the sides of one closed ring; the pour's core lies to the left, its edge to the right."""
    step = np.roll(points, -1, axis=0) - points
    heading = np.degrees(np.arctan2(step[:, 1], step[:, 0]))
    turn = np.abs((heading - np.roll(heading, 1) + 180.0) % 360.0 - 180.0)
    corners = np.flatnonzero(turn > _CORNER_DEG)
    if len(corners) == 0:
        corners = np.array([0])
    points = np.roll(points, -corners[0], axis=0)
    bounds = [*(corners - corners[0]), len(points)]
    closed = np.vstack([points, points[:1]])
    for a, b in itertools.pairwise(bounds):
        yield _sampled(closed[a : b + 1], inset)


def _sampled(vertices: Floats, inset: int) -> Side:
    """Return a side with points at every vertex and at least every sample length between."""
    points, normals = [vertices[:1]], []
    for a, b in itertools.pairwise(vertices):
        count = max(1, math.ceil(math.dist(a, b) / _SAMPLE_NM))
        t = np.arange(1, count + 1)[:, None] / count
        points.append(a + (b - a) * t)
        direction = (b - a) / math.dist(a, b)
        normals.append(np.tile([direction[1], -direction[0]], (count, 1)))
    merged, outward = np.vstack(points), np.vstack([normals[0][:1], *normals])
    lengths = np.hypot(*np.diff(merged, axis=0).T)
    return Side(merged, np.concatenate([[0.0], np.cumsum(lengths)]), outward, inset)


def set_rows(sides: Sequence[Side], facing: Facing, drills: Drills, reach: int) -> None:
    """Set the vias of all rows that face the targets; where rows meet, the longer one has its corners first.

    Args:
        sides: Rows to choose from.
        facing: What must be faced, and the pitch.
        drills: The book that vias are written into.
        reach: Largest distance of an axis from the pour's edge [nm] at which it counts for the row.
    """
    stretches = sorted(all_stretches(sides, facing), key=lambda stretch: stretch[1] - stretch[2])
    for side, a, b in stretches:
        for t in (a, b):
            if not drills.near(*side.at(t), facing.pitch / 2.0):
                _put_near(side, t, (a, b), facing.pitch / 2.0, drills)
    for side, a, b in stretches:
        _fill(side, a, b, facing.pitch, drills, reach)


def all_stretches(sides: Sequence[Side], facing: Facing) -> list[tuple[Side, float, float]]:
    """Return the stretches of all rows that face something: the side, start and end along it [nm]."""
    return [
        (side, a, b)
        for side, faced in zip(sides, _faced(sides, facing), strict=True)
        for a, b in _stretches(side, faced)
    ]


def _faced(sides: Sequence[Side], facing: Facing) -> list[Bools]:
    """Return for each side at which of its points the pour's edge looks at a target within reach.

    It does when the nearest place of a target lies on the outer side of the edge, not across the pour.
    """
    if not sides or not facing.targets:
        return [np.zeros(len(side.points), dtype=bool) for side in sides]
    outward = np.vstack([side.outward for side in sides])
    edge = np.vstack([side.points + side.outward * side.inset for side in sides])
    targets = np.asarray(facing.targets, dtype=object)
    spots = shapely.points(edge)
    spot, target = shapely.STRtree(targets).query(spots, predicate="dwithin", distance=facing.distance)
    way = shapely.get_coordinates(shapely.shortest_line(np.asarray(spots)[spot], targets[target]))
    ahead = way[1::2] - way[::2]
    seen = np.zeros(len(edge), dtype=bool)
    looks = np.sum(ahead * outward[spot], axis=1) > _ASIDE * np.hypot(ahead[:, 0], ahead[:, 1])
    seen[spot[looks]] = True
    if facing.spared is not None:
        seen &= ~shapely.intersects(facing.spared, spots)
    return np.split(seen, np.cumsum([len(side.points) for side in sides])[:-1])


def _stretches(side: Side, faced: Bools) -> Iterator[tuple[float, float]]:
    """Yield the stretches [nm] of a side that face something, to its ends where these are one sample off."""
    marks = np.flatnonzero(np.diff(np.concatenate([[False], faced, [False]]).astype(int)))
    for first, behind in zip(marks[::2], marks[1::2], strict=True):
        yield float(side.along[max(0, first - 1)]), float(side.along[min(behind, len(faced) - 1)])


def _put_near(
    side: Side, t: float, bounds: tuple[float, float], tolerance: float, drills: Drills
) -> float | None:
    """Set a via at t [nm], or as near to it as it may stand within a tolerance and bounds; return where.

    Where the row itself is blocked, a place as near to the pour's edge as a land may come is tried as well.
    """
    places = [t]
    for k in range(1, math.floor(tolerance / _STEP_NM) + 1):
        places += [t + k * _STEP_NM, t - k * _STEP_NM]
    for place in places:
        if bounds[0] <= place <= bounds[1] and any(drills.put(x, y) for x, y in side.spots(place, drills)):
            return place
    return None


@dataclass(frozen=True, slots=True, order=True)
class _Member:
    """A via by a row: arc length, distance from the row; an end of a stretch: the way on to the nearest via.

    All [nm]; ``across`` is positive towards the pour's edge; ``spot`` is the axis of the via.
    """

    along: float
    across: float = 0.0
    beyond: float = 0.0
    spot: tuple[float, float] = field(default=(0.0, 0.0), compare=False)

    def gap_to(self, other: _Member) -> float:
        """Return the distance [nm] to a later member: around a corner the straight one."""
        if self.beyond or other.beyond:
            return math.dist(self.spot, other.spot)
        return math.hypot(other.along - self.along, other.across - self.across)

    @property
    def aside(self) -> float:
        """How much farther than its arc length a via of the row sees this one, at most [nm]."""
        return self.beyond + abs(self.across)


def _members(side: Side, a: float, b: float, pitch: int, drills: Drills, reach: int) -> list[_Member]:
    """Return the vias that stand by the row in order, and both ends of the stretch.

    An end counts as an axis unless a via stands near it about the corner.
    """
    marks = {_end(side, t, drills, pitch / 2.0) for t in (a, b)}
    middle = (side.along >= a) & (side.along <= b)
    for x, y, _ in _vias_about(side.points[middle], drills, reach):
        offsets = np.array([x, y]) - side.points
        nearest = int(np.argmin(np.hypot(offsets[:, 0], offsets[:, 1])))
        (dx, dy), (nx, ny) = offsets[nearest].tolist(), side.outward[nearest].tolist()
        along, across = float(side.along[nearest]) - dx * ny + dy * nx, dx * nx + dy * ny
        if 0.0 < side.inset - across <= reach and a <= along <= b:
            marks.add(_Member(along, across, spot=(x, y)))
    return sorted(marks)


def _end(side: Side, t: float, drills: Drills, reach: float) -> _Member:
    """Return the end of a stretch: an axis itself, or the via within reach [nm] of it, round a corner."""
    x, y = side.at(t)
    about = [(abs(vx - x) + abs(vy - y), (vx, vy)) for vx, vy, _ in drills.near(x, y, reach)]
    beyond, spot = min(about, default=(0.0, (x, y)))
    return _Member(t, beyond=float(beyond), spot=spot)


def _vias_about(points: Floats, drills: Drills, reach: int) -> list[tuple[int, int, int]]:
    """Return the vias within reach of any of a row's points, in order of place."""
    found: set[tuple[int, int, int]] = set()
    stride = max(1, reach // _SAMPLE_NM)
    for x, y in points[::stride]:
        found.update(drills.near(x, y, 2.0 * reach))
    return sorted(found)


def _fill(side: Side, a: float, b: float, pitch: int, drills: Drills, reach: int) -> None:
    """Divide what is left open between the members of a row evenly.

    Where no via may stand at its place, the nearest one within the pitch is taken and the rest divided anew.
    """
    tried: set[tuple[float, float]] = set()
    while True:
        members = itertools.pairwise(_members(side, a, b, pitch, drills, reach))
        wide = ((m, n) for m, n in members if m.gap_to(n) > pitch + _ROUNDING_NM)
        gap = next((gap for gap in wide if (gap[0].along, gap[1].along) not in tried), None)
        if gap is None:
            return
        tried.add((gap[0].along, gap[1].along))
        _divide(side, (a, b), gap, pitch, drills)


def _divide(
    side: Side, bounds: tuple[float, float], gap: tuple[_Member, _Member], pitch: int, drills: Drills
) -> None:
    """Set vias between two members of a row, each at an even share of what is left.

    On a symmetric board the images of vias may stand in the same row: then the rest is looked at anew.
    """
    last, end = gap[0].along - gap[0].aside, gap[1].along + gap[1].aside
    while end - last > pitch + _ROUNDING_NM:
        steps = math.ceil((end - last - _ROUNDING_NM) / pitch)
        wish, farthest = last + (end - last) / steps, min(bounds[1], last + pitch)
        placed = _put_near(side, wish, (max(bounds[0], last), farthest), float(pitch), drills)
        if placed is None:
            placed = _put_near(side, farthest, (farthest, min(bounds[1], end)), end - farthest, drills)
        if placed is None or drills.is_symmetric:
            return
        last = placed
