"""Fence rows mended: where a row gapes although other places would do, the vias about the gap are set anew.

A row is set from its corners and from what stands there already, one via after the other, so a via may take
a place that leaves the next one none. Here all places about a gap are listed, at all depths that count for
the row, and the chain through them that gapes least is found by dynamic programming: if one closes the gap,
it is found. It is kept when the row gapes less for it and no other row gapes more, else all stays as it was.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from layoutgen.artwork.drills import Drills
from layoutgen.artwork.rows import Facing, Side, all_stretches
from layoutgen.geometry import Point

__all__ = ["close_rows"]

_ROUNDING_NM = 500.0
_WINDOWS = (1, 2, 3, 4)  # vias to both sides of a gap that may move
_STEPS, _FINE_NM = 120.0, 10_000.0
_DEPTHS = 5
_MEETING_NM = 250_000.0  # between stretches that are taken as one
_EXCESS_COST, _VIA_COST = 1_000.0, 10_000.0  # of a nanometre too wide, and of a via
_UNEVEN_COST = 1_000.0  # of a step as wide as the pitch, by its square

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]


class _Foot(NamedTuple):
    """Where an axis stands by a row: way along it, the axis, its distance behind the edge; all [nm].

    Ends of the row count as axes on the edge; they are no vias.
    """

    along: float
    x: float
    y: float
    depth: float
    is_via: bool = True

    @property
    def at(self) -> Point:
        """The axis [nm]."""
        return round(self.x), round(self.y)


@dataclass(frozen=True, slots=True, eq=False)
class _Row:
    """A stretch of pour edge (N, 2) that is to be fenced, the way along it (N,), and outward normals (N, 2).

    ``pitch`` is the largest one, ``reach`` the largest distance from the edge that counts; all [nm].
    """

    points: Floats
    along: Floats
    outward: Floats
    pitch: int
    reach: int

    def feet(self, drills: Drills) -> list[_Foot]:
        """Return where vias stand by the row, in order, with both its ends."""
        (x0, y0), (x1, y1) = self.points[[0, -1]].tolist()
        ends = (
            _Foot(float(self.along[0]), x0, y0, 0.0, is_via=False),
            _Foot(float(self.along[-1]), x1, y1, 0.0, is_via=False),
        )
        return [ends[0], *sorted(self._between(drills)), ends[1]]

    def _between(self, drills: Drills) -> Iterator[_Foot]:
        """Yield the feet of vias; one in a narrow piece of pour, with the row on both sides, has two."""
        start, step = self.points[:-1], np.diff(self.points, axis=0)
        length = np.hypot(*step.T)
        for x, y in self._axes(drills):
            offset = np.array([x, y]) - start
            share = np.clip(np.einsum("nk,nk->n", offset, step) / length**2, 0.0, 1.0)
            away = np.hypot(*(offset - share[:, None] * step).T)
            close = np.flatnonzero(away <= self.reach)
            for group in np.split(close, np.flatnonzero(np.diff(close) > 1) + 1):
                if len(group):
                    k = int(group[np.argmin(away[group])])
                    yield _Foot(float(self.along[k] + share[k] * length[k]), x, y, float(away[k]))

    def _axes(self, drills: Drills) -> list[Point]:
        """Return the vias near the row, in order of place [nm]."""
        stride = max(1, round(len(self.points) * self.reach / (self.along[-1] - self.along[0] + 1.0)))
        spots = self.points[::stride].tolist()
        return sorted({(x, y) for px, py in spots for x, y, _ in drills.near(px, py, 2.5 * self.reach)})

    def excess(self, drills: Drills) -> float:
        """Return by how much the row gapes in all [nm]."""
        return sum(self.gaping(a, b) for a, b in itertools.pairwise(self.feet(drills)))

    def gaping(self, a: _Foot, b: _Foot) -> float:
        """Return by how much two neighbours are too far apart [nm].

        Around a corner the edge is longer than the row behind it, by twice the depth of each at most.
        """
        along = b.along - a.along
        apart = min(along, max(math.hypot(b.x - a.x, b.y - a.y), along - 2.0 * (a.depth + b.depth)))
        return max(0.0, apart - self.pitch - _ROUNDING_NM)


def close_rows(sides: Sequence[Side], facing: Facing, drills: Drills, reach: int) -> None:
    """Set vias of rows anew where the next one is farther off than the pitch.

    Args:
        sides: The pour's whole edges.
        facing: What they face, and the pitch.
        drills: The book of vias; those set in it may move, others stay.
        reach: Largest distance of an axis from the pour's edge [nm] at which it counts for the row.
    """
    rows = [row for row in _rows(sides, facing, reach) if row.along[-1] - row.along[0] > facing.pitch]
    gaping = [row for row in rows if row.excess(drills) > 0.0]
    for window, row in itertools.product(_WINDOWS, gaping):
        tried: set[tuple[Point, Point]] = set()
        while (gap := _first_gap(row, window, drills, tried)) is not None:
            _mend(row, gap, rows, drills)


def _rows(sides: Sequence[Side], facing: Facing, reach: int) -> Iterator[_Row]:
    """Yield the stretches of whole edges that face something; those that meet are one, at its start too."""
    for side, group in itertools.groupby(all_stretches(sides, facing), key=lambda stretch: stretch[0]):
        spans: list[tuple[float, float]] = []
        for _, a, b in group:
            if spans and a <= spans[-1][1] + _MEETING_NM:
                spans[-1] = (spans[-1][0], b)
            else:
                spans.append((a, b))
        rows = [_row(side, a, b, facing.pitch, reach) for a, b in spans]
        if len(rows) > 1 and spans[0][0] <= _MEETING_NM and spans[-1][1] >= side.length - _MEETING_NM:
            rows[-1] = _joined(rows[-1], rows.pop(0), side.length)
        yield from rows


def _row(side: Side, a: float, b: float, pitch: int, reach: int) -> _Row:
    """Return a stretch of a side from one arc length to another [nm]."""
    inside = (side.along >= a) & (side.along <= b)
    edge = side.points[inside] + side.outward[inside] * side.inset
    return _Row(edge, side.along[inside], side.outward[inside], pitch, reach)


def _joined(last: _Row, first: _Row, around: float) -> _Row:
    """Return the last stretch of a closed edge run on into the first one; ``around`` is its length [nm]."""
    whole = [np.concatenate(pair) for pair in ((last.points, first.points), (last.outward, first.outward))]
    along = np.concatenate([last.along, first.along + around])
    apart = np.concatenate([[True], np.hypot(*np.diff(whole[0], axis=0).T) > 0.0])
    return _Row(whole[0][apart], along[apart], whole[1][apart], last.pitch, last.reach)


def _first_gap(row: _Row, window: int, drills: Drills, tried: set[tuple[Point, Point]]) -> list[_Foot] | None:
    """Return the feet about the first gap that was not tried yet, and note it."""
    feet = row.feet(drills)
    for i, (a, b) in enumerate(itertools.pairwise(feet)):
        if row.gaping(a, b) > 0.0 and (a.at, b.at) not in tried:
            tried.add((a.at, b.at))
            return feet[max(0, i - window) : i + 2 + window]
    return None


def _mend(row: _Row, feet: Sequence[_Foot], rows: Sequence[_Row], drills: Drills) -> None:
    """Set vias between the first and the last of some feet, if the row gapes less for it.

    First all that are there stay, then only those that count for another row as well, then none.
    """
    about = [other for other in rows if _is_near(row, feet, other)]
    own = [at for at in dict.fromkeys(foot.at for foot in feet[1:-1]) if at in drills.added]
    others = {foot.at for other in about if other is not row for foot in other.feet(drills)}
    alone = [at for at in own if at not in others]
    for loose in dict.fromkeys(((), tuple(alone), tuple(own))):
        if _is_mended(row, feet, loose, about, drills):
            return


def _is_mended(
    row: _Row, feet: Sequence[_Foot], loose: Sequence[Point], about: Sequence[_Row], drills: Drills
) -> bool:
    """Set loose vias of a row anew; tell whether it gapes less, and no row more, else all is as before."""
    before = [other.excess(drills) for other in about]
    taken = drills.take(loose)
    chain = _best_chain(row, feet, loose, drills)
    kept = len(drills.added)
    for x, y in chain:
        drills.put(x, y)
    after = [other.excess(drills) for other in about]
    worse = any(new > old + 1.0 for new, old in zip(after, before, strict=True))
    if worse or sum(after) >= sum(before) - 1.0:
        drills.take(drills.added[kept:])  # where they were set, which may be on an axis beside the place
        drills.give(taken)
        return False
    return True


def _is_near(row: _Row, feet: Sequence[_Foot], other: _Row) -> bool:
    """True for a row that vias between two feet may count for."""
    between = (row.along >= feet[0].along) & (row.along <= feet[-1].along)
    spots = row.points[between] if between.any() else row.points
    far = 2 * row.reach + row.pitch
    low, high = spots.min(axis=0) - far, spots.max(axis=0) + far
    return bool(((other.points >= low) & (other.points <= high)).all(axis=1).any())


@dataclass(frozen=True, slots=True, eq=False)
class _Places:
    """Places along a row in order (N,): way along, depth, axis (N, 2) [nm]; new ones, and which are vias."""

    along: Floats
    depth: Floats
    at: Floats
    new: Bools
    is_via: Bools


def _best_chain(
    row: _Row, feet: Sequence[_Foot], loose: Sequence[Point], drills: Drills
) -> list[tuple[float, float]]:
    """Return the places of new vias in the chain of the least cost from the first foot to the last."""
    places = _places(row, feet, loose, drills)
    count = len(places.along)
    cost, back = np.full(count, np.inf), np.zeros(count, dtype=int)
    cost[0] = 0.0
    for j in range(1, count):
        apart, blocked = _steps(places, j, drills)
        steps = cost[:j] + _EXCESS_COST * np.maximum(0.0, apart - row.pitch)
        steps += _UNEVEN_COST * (apart / row.pitch) ** 2
        steps[blocked] = np.inf
        back[j] = int(np.argmin(steps))
        cost[j] = steps[back[j]] + (_VIA_COST if places.new[j] else 0.0)
    chain, j = [], count - 1
    while j > 0 and np.isfinite(cost[j]):
        if places.new[j]:
            chain.append((float(places.at[j, 0]), float(places.at[j, 1])))
        j = int(back[j])
    return chain[::-1]


def _steps(places: _Places, j: int, drills: Drills) -> tuple[Floats, Bools]:
    """Return how far apart the places before one are from it [nm], and from which no chain may come."""
    along = places.along[j] - places.along[:j]
    straight = np.hypot(*(places.at[:j] - places.at[j]).T)
    apart = np.minimum(along, np.maximum(straight, along - 2.0 * (places.depth[:j] + places.depth[j])))
    vias = places.is_via[:j] & places.is_via[j] & (places.new[:j] | places.new[j])
    return apart, np.asarray((along < 0.0) | (vias & (straight < drills.apart + 1.0)))


def _places(row: _Row, feet: Sequence[_Foot], loose: Sequence[Point], drills: Drills) -> _Places:
    """Return the feet that stay and all places free for vias between the first and the last."""
    first, *inner, last = feet
    along, depth, at = _free_places(row, first.along, last.along, drills)
    stay = [foot for foot in inner if foot.at not in loose]
    order = np.argsort(np.concatenate([[foot.along for foot in stay], along]), kind="stable")
    order = np.concatenate([[0], order + 1, [len(order) + 1]])
    known = np.array([(f.along, f.depth, f.x, f.y, f.is_via) for f in (first, *stay)], dtype=np.float64)
    end = np.array([(last.along, last.depth, last.x, last.y, last.is_via)], dtype=np.float64)
    free = np.column_stack([along, depth, at, np.ones(len(along))])
    table = np.concatenate([known, free, end])[order]
    new = np.concatenate([np.zeros(len(known), bool), np.ones(len(free), bool), [False]])[order]
    return _Places(table[:, 0], table[:, 1], table[:, 2:4], new, table[:, 4] > 0.0)


def _free_places(row: _Row, a: float, b: float, drills: Drills) -> tuple[Floats, Floats, Floats]:
    """Return places (N,) along a row and behind its edge, and (N, 2) on the board, for vias [nm]."""
    step = max(_FINE_NM, row.pitch / _STEPS)
    t = np.linspace(a, b, max(2, math.ceil((b - a) / step) + 1))
    depths = np.linspace(min(drills.least_inset, row.reach), row.reach, _DEPTHS)
    along, depth = np.tile(t, _DEPTHS), np.repeat(depths, len(t))
    index = np.minimum(np.searchsorted(row.along, along), len(row.along) - 1)
    foot = np.column_stack([np.interp(along, row.along, row.points[:, k]) for k in (0, 1)])
    at = np.rint(foot - row.outward[index] * depth[:, None])
    free = drills.legal(at[:, 0], at[:, 1])
    free[free] = [drills.free(int(x), int(y)) for x, y in at[free]]
    return along[free], depth[free], at[free]
