"""Facing edges of polygons: how wide copper is, how wide the slits in it are. Exact, on whole outlines.

Two places of an outline face each other across copper when each lies on the inner side of the other's edge
and the edges run against each other (across a gap: on the outer side). The pairs come from an STRtree over
the edges; the distance is the least between the facing parts of both edges. Places that lie less than
``apart`` along one outline from each other are a corner and are passed over.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
import numpy.typing as npt
import shapely

__all__ = ["Edges", "Places", "edges_of", "facing"]

Floats = npt.NDArray[np.float64]
Ints = npt.NDArray[np.intp]
Geometries = npt.NDArray[np.object_]

_CHUNK = 20_000
"""Edges asked for at once: bounds the memory of the pair lists."""


@dataclass(frozen=True, eq=False)
class Edges:
    """The edges of polygons, copper on their left: ends (N, 2) [nm], unit directions (N, 2) [-].

    ``along`` (N,) [nm] is the way along the ring to the edge's start, ``around`` (N,) [nm] the ring's whole
    length, ``ring`` and ``polygon`` (N,) the indices of both.
    """

    start: Floats
    end: Floats
    ring: Ints
    polygon: Ints
    along: Floats
    around: Floats
    polygons: Geometries

    @cached_property
    def length(self) -> Floats:
        """Length of each edge (N,) [nm]."""
        return np.asarray(np.hypot(*(self.end - self.start).T))

    @cached_property
    def direction(self) -> Floats:
        """Unit direction of each edge (N, 2) [-]."""
        return np.asarray((self.end - self.start) / self.length[:, None])

    @cached_property
    def lines(self) -> Geometries:
        """The edges as line strings."""
        return np.asarray(shapely.linestrings(np.stack((self.start, self.end), axis=1)), dtype=object)

    @cached_property
    def tree(self) -> shapely.STRtree:
        """Tree over the edges."""
        return shapely.STRtree(self.lines)


@dataclass(frozen=True, eq=False)
class Places:
    """Pairs of facing places: points (M, 2) [nm], distances (M,) [nm], indices of the two edges (M,)."""

    first: Floats
    second: Floats
    distance: Floats
    i: Ints
    j: Ints

    def kept(self, mask: npt.NDArray[np.bool_]) -> Places:
        """Return the places where the mask is True."""
        return Places(self.first[mask], self.second[mask], self.distance[mask], self.i[mask], self.j[mask])


def edges_of(polygons: Geometries) -> Edges:
    """Return the edges of shapely polygons [nm], each ring turned so that the copper is on the left."""
    rings, polygon = shapely.get_rings(polygons, return_index=True)
    polygon = np.asarray(polygon, dtype=np.intp)
    outer = np.ones(len(rings), dtype=bool)
    outer[1:] = polygon[1:] != polygon[:-1]
    wrong = shapely.is_ccw(rings) != outer
    rings = np.asarray(rings, dtype=object)
    rings[wrong] = shapely.reverse(rings[wrong])
    points, ring = shapely.get_coordinates(rings, return_index=True)
    same = ring[1:] == ring[:-1]
    start, end, ring = points[:-1][same], points[1:][same], np.asarray(ring[:-1][same], dtype=np.intp)
    length = np.hypot(*(end - start).T)
    real = length > 0.0
    start, end, ring, length = start[real], end[real], ring[real], length[real]
    around = np.bincount(ring, weights=length, minlength=len(rings))
    before = np.concatenate(([0.0], np.cumsum(around)))[:-1]
    along = np.concatenate(([0.0], np.cumsum(length)))[:-1] - before[ring] if len(length) else length
    return Edges(start, end, ring, polygon[ring], along, around[ring], np.asarray(polygons, dtype=object))


def facing(edges: Edges, limit: float, apart: float, *, across_copper: bool) -> Places:
    """Return the pairs of facing places nearer than a limit, at most one for each pair of edges.

    Args:
        edges: Outlines with copper on the left.
        limit: Distance [nm] below which places are returned.
        apart: Least way along one outline [nm] between two places of the same outline.
        across_copper: True for the width of copper, False for gaps.
    """
    side = 1.0 if across_copper else -1.0
    found = [_facing_chunk(edges, at, limit, apart, side) for at in range(0, len(edges.start), _CHUNK)]
    if not found:
        none = np.zeros((0, 2))
        return Places(none, none, np.zeros(0), np.zeros(0, dtype=np.intp), np.zeros(0, dtype=np.intp))
    parts = zip(*((p.first, p.second, p.distance, p.i, p.j) for p in found), strict=True)
    places = Places(*(np.concatenate(part) for part in parts))
    clear = _crosses_copper if across_copper else _crosses_void
    return places.kept(clear(edges, places))


def _facing_chunk(edges: Edges, at: int, limit: float, apart: float, side: float) -> Places:
    """Return the facing places of the edges from ``at`` on with all later edges."""
    i, j = _near_pairs(edges, at, limit, side)
    low, high, fits = _facing_parts(edges, i, j, side)
    i, j, low, high = i[fits], j[fits], low[fits], high[fits]
    u, v, fits = _closest(edges, i, j, low, high, apart)
    i, j, u, v = i[fits], j[fits], u[fits], v[fits]
    first = edges.start[i] + u[:, None] * edges.direction[i]
    second = edges.start[j] + v[:, None] * edges.direction[j]
    distance = np.hypot(*(second - first).T)
    places = Places(first, second, distance, i, j)
    return places.kept(distance < limit)


def _near_pairs(edges: Edges, at: int, limit: float, side: float) -> tuple[Ints, Ints]:
    """Return index pairs i < j of edges near each other that run against each other."""
    low = np.minimum(edges.start[at : at + _CHUNK], edges.end[at : at + _CHUNK]) - limit
    high = np.maximum(edges.start[at : at + _CHUNK], edges.end[at : at + _CHUNK]) + limit
    i, j = edges.tree.query(shapely.box(low[:, 0], low[:, 1], high[:, 0], high[:, 1]))
    i = i + at
    keep = i < j
    if side > 0.0:
        keep &= edges.polygon[i] == edges.polygon[j]
    i, j = i[keep], j[keep]
    against = np.einsum("nk,nk->n", edges.direction[i], edges.direction[j]) < -1e-9
    return i[against], j[against]


def _facing_parts(
    edges: Edges, i: Ints, j: Ints, side: float
) -> tuple[Floats, Floats, npt.NDArray[np.bool_]]:
    """Return for each pair the parts [nm along the edge] of both edges that see each other: (M, 2) each."""
    low, high = np.zeros((len(i), 2)), np.stack((edges.length[i], edges.length[j]), axis=1)
    for column, (seen, by) in enumerate(((i, j), (j, i))):
        normal = side * np.stack((-edges.direction[by][:, 1], edges.direction[by][:, 0]), axis=1)
        offset = np.einsum("nk,nk->n", normal, edges.start[seen] - edges.start[by])
        slope = np.einsum("nk,nk->n", normal, edges.direction[seen])
        with np.errstate(divide="ignore", invalid="ignore"):
            crossing = -offset / slope
        low[:, column] = np.where(slope > 1e-12, np.maximum(low[:, column], crossing), low[:, column])
        high[:, column] = np.where(slope < -1e-12, np.minimum(high[:, column], crossing), high[:, column])
        behind = (np.abs(slope) <= 1e-12) & (offset <= 0.0)
        high[behind, column] = -1.0
    return low, high, np.asarray((low < high).all(axis=1))


def _closest(
    edges: Edges, i: Ints, j: Ints, low: Floats, high: Floats, apart: float
) -> tuple[Floats, Floats, npt.NDArray[np.bool_]]:
    """Return the closest places (along i, along j) [nm] that are far enough apart on the outline."""
    ti, tj, offset = edges.direction[i], edges.direction[j], edges.start[j] - edges.start[i]
    u, v = _closest_free(ti, tj, offset, low, high)
    same = edges.ring[i] == edges.ring[j]
    ahead = edges.along[j] - edges.along[i]
    least = np.where(same, apart, -np.inf) - ahead  # v - u must be at least this
    most = np.where(same, edges.around[i] - apart, np.inf) - ahead
    fits = least <= most
    for bound, broken in ((least, v - u < least), (most, v - u > most)):
        moved = np.flatnonzero(broken & fits)
        got = _closest_bound(ti[moved], tj[moved], offset[moved], low[moved], high[moved], bound[moved])
        u[moved], v[moved] = got[0], got[1]
        fits[moved] = got[2]
    return u, v, fits


def _closest_free(ti: Floats, tj: Floats, offset: Floats, low: Floats, high: Floats) -> tuple[Floats, Floats]:
    """Return the closest places of edges that do not cross; of parallel ones the middle of the overlap."""
    b = np.einsum("nk,nk->n", ti, tj)
    di, dj = np.einsum("nk,nk->n", ti, offset), np.einsum("nk,nk->n", tj, offset)
    ends = [(low[:, 0], np.clip(b * low[:, 0] - dj, low[:, 1], high[:, 1]))]
    ends.append((high[:, 0], np.clip(b * high[:, 0] - dj, low[:, 1], high[:, 1])))
    ends.append((np.clip(di + b * low[:, 1], low[:, 0], high[:, 0]), low[:, 1]))
    ends.append((np.clip(di + b * high[:, 1], low[:, 0], high[:, 0]), high[:, 1]))
    us, vs = np.stack([u for u, _ in ends]), np.stack([v for _, v in ends])
    apart = offset[None] + vs[..., None] * tj[None] - us[..., None] * ti[None]
    best = np.argmin(np.einsum("enk,enk->en", apart, apart), axis=0)
    every = np.arange(len(b))
    parallel = 1.0 - b * b < 1e-12
    from_v = np.stack((di + b * high[:, 1], di + b * low[:, 1]))
    lap_low, lap_high = np.maximum(low[:, 0], from_v[0]), np.minimum(high[:, 0], from_v[1])
    lapped = parallel & (lap_low <= lap_high)
    middle = 0.5 * (lap_low + lap_high)
    u = np.where(lapped, middle, us[best, every])
    v = np.where(lapped, np.clip(b * middle - dj, low[:, 1], high[:, 1]), vs[best, every])
    return u, v


def _closest_bound(
    ti: Floats, tj: Floats, offset: Floats, low: Floats, high: Floats, bound: Floats
) -> tuple[Floats, Floats, npt.NDArray[np.bool_]]:
    """Return the closest places with v - u equal to a bound: where the outline is just far enough around."""
    base, slope = offset + bound[:, None] * tj, tj - ti
    u = -np.einsum("nk,nk->n", base, slope) / np.einsum("nk,nk->n", slope, slope)
    lowest = np.maximum(low[:, 0], low[:, 1] - bound)
    highest = np.minimum(high[:, 0], high[:, 1] - bound)
    u = np.minimum(np.maximum(u, lowest), highest)
    return u, u + bound, lowest <= highest


def _connections(places: Places) -> Geometries:
    """Return the connections as lines, a little shortened so that they touch no outline at their ends."""
    step = 0.02 * (places.second - places.first)
    ends = np.stack((places.first + step, places.second - step), axis=1)
    return np.asarray(shapely.linestrings(ends), dtype=object)


def _crosses_copper(edges: Edges, places: Places) -> npt.NDArray[np.bool_]:
    """Return which connections run through copper all the way."""
    shapely.prepare(edges.polygons)
    return np.asarray(shapely.covers(edges.polygons[edges.polygon[places.i]], _connections(places)))


def _crosses_void(edges: Edges, places: Places) -> npt.NDArray[np.bool_]:
    """Return which connections meet no copper on their way."""
    tree = shapely.STRtree(edges.polygons)
    met = np.zeros(len(places.distance), dtype=bool)
    met[tree.query(_connections(places), predicate="intersects")[0]] = True
    return ~met
