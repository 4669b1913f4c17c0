"""Triangles that fill a polygon, small where it is narrow and at its inner corners.

Every edge of the outline is a chain of triangle edges: points are put on it until the Delaunay triangulation
holds them all, so that the triangles cover the polygon exactly.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import numpy.typing as npt
import shapely

__all__ = ["Mesh", "mesh_of"]

Floats = npt.NDArray[np.float64]
Ints = npt.NDArray[np.intp]

GROWTH = 0.3
"""How fast triangles grow away from a narrow place [-]."""
ACROSS = 4.0
"""Triangle edges across the copper at a corner [-]."""
ACROSS_INNER = 32.0
"""The same at an inner corner, where the current crowds [-]."""
_INNER_TURN = 0.26
"""A turn to the right of more than this is an inner corner [rad]: 15 degrees."""
_SIMPLE_NM = 250.0
"""How far chords may be put straight before meshing [nm]."""
_LEAST_NM = 500.0
"""Smallest triangle edge asked for [nm]."""
_COARSE = 400.0
"""Largest triangle edge: twice the side of a square of this part of the area [-]."""
_KEPT_OFF = 0.5
"""Inner points stay this many edges away from the outline [-]."""
_ROUNDS = 12
_CHUNK = 4_000_000


@dataclass(frozen=True, slots=True, eq=False)
class Mesh:
    """Points (N, 2) [nm] and triangles (M, 3) of point indices, counter-clockwise."""

    points: Floats
    triangles: Ints

    @property
    def areas(self) -> Floats:
        """Areas of the triangles (M,) [nm^2]."""
        a, b, c = (self.points[self.triangles[:, k]] for k in range(3))
        u, v = b - a, c - a
        return np.asarray(0.5 * (u[:, 0] * v[:, 1] - u[:, 1] * v[:, 0]))

    @property
    def centres(self) -> Floats:
        """Middles of the triangles (M, 2) [nm]."""
        return np.asarray(self.points[self.triangles].mean(axis=1))


@dataclass(frozen=True, slots=True, eq=False)
class _Sizes:
    """Wanted edge lengths: at (K, 2) [nm] an edge of (K,) [nm], growing with distance, at most ``most``."""

    at: Floats
    edge: Floats
    most: float
    growth: float

    def __call__(self, points: Floats) -> Floats:
        """Return the wanted edge (N,) [nm] at points (N, 2)."""
        best = np.full(len(points), self.most)
        if not len(self.at):
            return best
        step = max(1, _CHUNK // max(1, len(self.at)))
        for k in range(0, len(points), step):
            part = points[k : k + step]
            reach = np.hypot(*(part[:, None, :] - self.at[None, :, :]).transpose(2, 0, 1))
            best[k : k + step] = np.minimum(best[k : k + step], (self.edge + self.growth * reach).min(axis=1))
        return best


def mesh_of(polygon: shapely.Polygon, fine: Floats | None = None, fineness: float = 1.0) -> Mesh | None:
    """Return triangles that fill a polygon [nm], None where none were found that fit its outline.

    Args:
        polygon: The copper [nm].
        fine: Places (K, 3) where triangles are to be small: x, y, edge [nm].
        fineness: How many times smaller than usual the triangles are [-].
    """
    simplified = polygon.simplify(_SIMPLE_NM)
    simple = simplified if isinstance(simplified, shapely.Polygon) else polygon
    rings = [_open_ring(ring) for ring in (simple.exterior, *simple.interiors)]
    sizes = _sizes(rings, simple.area, fine, fineness)
    points, edges = _outline(rings, sizes)
    inner = _inner_points(simple, sizes)
    return _fitted(simple, points, edges, inner)


def _open_ring(ring: shapely.LinearRing) -> Floats:
    """Return a ring's vertices, the first not repeated."""
    return np.asarray(shapely.get_coordinates(ring)[:-1])


def _sizes(rings: list[Floats], area: float, fine: Floats | None, fineness: float) -> _Sizes:
    """Return the wanted edges: by how far the copper reaches across from each corner."""
    turned = [ring if _is_left(ring) == (k == 0) else ring[::-1] for k, ring in enumerate(rings)]
    start = np.concatenate(turned)
    step = np.concatenate([np.roll(ring, -1, axis=0) - ring for ring in turned])
    before = np.concatenate([ring - np.roll(ring, 1, axis=0) for ring in turned])
    turn = np.arctan2(_cross(before, step), (before * step).sum(axis=1))
    own = np.arange(len(start))
    previous = np.concatenate([np.roll(own[own_ring], 1) for own_ring in _spans(turned)])
    across = _across(start, step, own, previous)
    edge = np.where(turn < -_INNER_TURN, across / (ACROSS_INNER * fineness**2), across / (ACROSS * fineness))
    sides = np.hypot(*step.T) + np.hypot(*before.T)
    with np.errstate(divide="ignore"):
        radius = np.where(turn < 0.0, 0.5 * sides / np.abs(turn), np.inf)
    edge = np.minimum(edge, np.where(turn < -_INNER_TURN, np.inf, radius / (ACROSS * fineness)))
    most = 2.0 * float(np.sqrt(area / _COARSE)) / fineness
    edge = np.clip(np.minimum(edge, most), _LEAST_NM, None)
    if fine is not None and len(fine):
        start, edge = np.concatenate((start, fine[:, :2])), np.concatenate((edge, fine[:, 2]))
    return _governing(_Sizes(start, edge, most, GROWTH / fineness))


def _governing(sizes: _Sizes) -> _Sizes:
    """Return the wanted edges without the places where another one asks for as small an edge."""
    order = np.argsort(sizes.edge, kind="stable")
    at, edge = sizes.at[order], sizes.edge[order]
    kept: list[int] = []
    for k in range(len(at)):
        reach = np.hypot(*(at[kept] - at[k]).T)
        if edge[k] < sizes.most and not (edge[kept] + sizes.growth * reach <= 1.1 * edge[k]).any():
            kept.append(k)
    return _Sizes(at[kept], edge[kept], sizes.most, sizes.growth)


def _spans(rings: list[Floats]) -> list[slice]:
    """Return each ring's place in the list of all vertices."""
    ends = np.cumsum([0, *map(len, rings)]).tolist()
    return [slice(a, b) for a, b in pairwise(ends)]


def _is_left(ring: Floats) -> bool:
    """Tell whether a ring runs counter-clockwise."""
    x, y = (ring - ring[0]).T
    return bool(np.dot(x, np.roll(y, -1)) - np.dot(y, np.roll(x, -1)) > 0.0)


def _cross(a: Floats, b: Floats) -> Floats:
    """Return the cross products of rows of two arrays (N, 2)."""
    return np.asarray(a[..., 0] * b[..., 1] - a[..., 1] * b[..., 0])


def _across(start: Floats, step: Floats, own: Ints, previous: Ints) -> Floats:
    """Return how far from each vertex the nearest edge is that has it on its copper side [nm]."""
    length2 = np.maximum((step**2).sum(axis=1), 1e-12)
    best = np.full(len(start), np.inf)
    rows = max(1, _CHUNK // max(1, len(start)))
    for k in range(0, len(start), rows):
        away = start[k : k + rows, None, :] - start[None, :, :]
        along = np.clip((away * step[None]).sum(axis=2) / length2, 0.0, 1.0)
        distance = np.hypot(*(away - along[..., None] * step[None]).transpose(2, 0, 1))
        depth = _cross(np.broadcast_to(step[None], away.shape), away) / np.sqrt(length2)
        hidden = depth < 0.5 * distance
        here = np.arange(len(distance))
        hidden[here, own[k : k + rows]] = True
        hidden[here, previous[k : k + rows]] = True
        best[k : k + rows] = np.where(hidden, np.inf, distance).min(axis=1)
    return best


def _outline(rings: list[Floats], sizes: _Sizes) -> tuple[Floats, Ints]:
    """Return the points on the outline, and its edges (E, 2) as point indices, none longer than wanted."""
    points, edges, count = [], [], 0
    for ring in rings:
        while True:
            after = np.roll(ring, -1, axis=0)
            middle = (ring + after) / 2.0
            long = np.hypot(*(after - ring).T) > 1.2 * sizes(middle)
            if not long.any():
                break
            ring = np.insert(ring, np.flatnonzero(long) + 1, middle[long], axis=0)
        index = count + np.arange(len(ring))
        points.append(ring)
        edges.append(np.column_stack((index, np.roll(index, -1))))
        count += len(ring)
    return np.concatenate(points), np.concatenate(edges)


def _inner_points(polygon: shapely.Polygon, sizes: _Sizes) -> Floats:
    """Return points inside a polygon, about as dense as wanted."""
    x0, y0, x1, y1 = polygon.bounds
    cell = sizes.most
    grid = np.meshgrid(np.arange(x0 + cell / 2, x1 + cell, cell), np.arange(y0 + cell / 2, y1 + cell, cell))
    middles = np.column_stack([axis.ravel() for axis in grid])
    shapely.prepare(polygon)
    done = []
    while len(middles):
        wanted = sizes(middles)
        small = wanted >= cell
        done.append(np.column_stack((middles[small], wanted[small])))
        quarter = cell / 4.0
        shifts = np.array(((-1, -1), (1, -1), (1, 1), (-1, 1))) * quarter
        middles = (middles[~small][:, None, :] + shifts[None]).reshape(-1, 2)
        cell /= 2.0
        middles = (
            middles[shapely.dwithin(polygon, shapely.points(middles), cell)] if len(middles) else middles
        )
    found = np.concatenate(done)
    inside = shapely.contains_xy(polygon, found[:, 0], found[:, 1])
    found = found[inside]
    off = shapely.distance(polygon.boundary, shapely.points(found[:, :2]))
    return np.asarray(found[off > _KEPT_OFF * found[:, 2], :2])


def _fitted(polygon: shapely.Polygon, points: Floats, edges: Ints, inner: Floats) -> Mesh | None:
    """Return the triangulation, with more points on the outline until all its edges are in it."""
    origin = points.mean(axis=0)
    for _ in range(_ROUNDS):
        together = np.concatenate((points, inner))
        triangles = _delaunay(together - origin)
        missing = _missing(edges, triangles, len(together))
        if not missing.any():
            return _inside(polygon, together, triangles)
        middle = points[edges[missing]].mean(axis=1)
        new = len(points) + np.arange(len(middle))
        halves = np.concatenate(
            (np.column_stack((edges[missing, 0], new)), np.column_stack((new, edges[missing, 1])))
        )
        points, edges = np.concatenate((points, middle)), np.concatenate((edges[~missing], halves))
    return None


def _delaunay(points: Floats) -> Ints:
    """Return the Delaunay triangles (M, 3) of points (N, 2), as point indices."""
    found = shapely.delaunay_triangles(shapely.MultiPoint(points))
    corners = shapely.get_coordinates(found).reshape(-1, 4, 2)[:, :3]
    keys = points[:, 0] + 1j * points[:, 1]
    order = np.argsort(keys)
    return np.asarray(order[np.searchsorted(keys[order], corners[..., 0] + 1j * corners[..., 1])])


def _missing(edges: Ints, triangles: Ints, count: int) -> npt.NDArray[np.bool_]:
    """Return which edges are not edges of a triangle."""
    pairs = np.concatenate((triangles[:, (0, 1)], triangles[:, (1, 2)], triangles[:, (2, 0)]))
    there = np.sort(pairs, axis=1) @ np.array((count, 1))
    return ~np.isin(np.sort(edges, axis=1) @ np.array((count, 1)), there)


def _inside(polygon: shapely.Polygon, points: Floats, triangles: Ints) -> Mesh | None:
    """Return the triangles inside a polygon; None when they do not cover it."""
    middle = points[triangles].mean(axis=1)
    kept = triangles[shapely.contains_xy(polygon, middle[:, 0], middle[:, 1])]
    areas = Mesh(points, kept).areas
    kept[areas < 0.0] = kept[areas < 0.0][:, ::-1]
    kept = kept[np.abs(areas) > 1e-3]
    used, index = np.unique(kept, return_inverse=True)
    mesh = Mesh(points[used], np.asarray(index.reshape(-1, 3), dtype=np.intp))
    return mesh if abs(float(mesh.areas.sum()) / polygon.area - 1.0) < 1e-6 else None
