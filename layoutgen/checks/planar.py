"""Plane geometry that the rules share: tolerances, joining of polygons, middles of shortest connections.

All in nanometres.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

import numpy as np
import numpy.typing as npt
import shapely
from shapely.geometry.base import BaseGeometry as Geometry

from layoutgen.checks.netgraph import clusters
from layoutgen.geometry import Point

__all__ = [
    "CHORD_NM",
    "CORNER_LIMITS",
    "TOLERANCE_NM",
    "Bools",
    "Floats",
    "Geometry",
    "Ints",
    "Polygons",
    "array_of",
    "farthest",
    "merge",
    "middle",
    "near_points",
    "parts",
    "points_of",
    "whole",
    "within",
]

Polygons = npt.NDArray[np.object_]
Floats = npt.NDArray[np.float64]
Ints = npt.NDArray[np.intp]
Bools = npt.NDArray[np.bool_]

CHORD_NM = 5.0
"""Largest distance of a chord from its arc in the polygons judged [nm]."""

TOLERANCE_NM = 10.0
"""What a distance may fall short of its limit [nm]: two chords, or two roundings to whole nanometres."""

_FLAT_NM = 2.0
"""How far the ends of an edge may lie off a straight line [nm]: rounding to whole nanometres."""

CORNER_LIMITS = 3.5
"""Two places of one outline nearer to each other along it than this many limits are a corner [-]."""


def merge(polygons: npt.NDArray[np.object_], pairs: npt.NDArray[np.intp]) -> npt.NDArray[np.object_]:
    """Return disjoint polygons: the union of those that the index pairs join, the others as they are."""
    label = clusters(len(polygons), pairs)
    alone = (np.bincount(label, minlength=len(polygons))[label] == 1) & (shapely.get_type_id(polygons) == 3)
    rest = np.flatnonzero(~alone)
    order = rest[np.argsort(label[rest], kind="stable")]
    bounds = np.flatnonzero(np.diff(label[order])) + 1
    unions = [shapely.union_all(polygons[group]) for group in np.split(order, bounds) if len(group)]
    joined = [part for union in unions for part in parts(union)]
    return np.concatenate((polygons[alone], array_of(joined)))


def parts(geometry: Geometry) -> list[shapely.Polygon]:
    """Return the polygons that a geometry is made of; points and lines are dropped."""
    pieces = shapely.get_parts(shapely.get_parts(geometry))
    return [piece for piece in pieces if piece.geom_type == "Polygon" and not piece.is_empty]


def middle(a: Geometry, b: Geometry) -> Point:
    """Return the middle of the shortest connection of two geometries [nm], or of their overlap.

    Where parallel edges leave a choice of connections, it is the middle one of them.
    """
    if a.intersects(b):
        shared = a.intersection(b)
        largest = max(shapely.get_parts(shared), key=lambda part: (part.area, part.length))
        inside = largest.centroid if largest.intersects(largest.centroid) else largest.representative_point()
        return whole(inside.x, inside.y)
    start, end = shapely.get_coordinates(shapely.shortest_line(a, b))
    centre = (start + end) / 2.0
    across = (end - start) / np.hypot(*(end - start))
    along = np.array([-across[1], across[0]])
    (low, high), (least, most) = _flat(a, start, along, across), _flat(b, end, along, across)
    return whole(*(centre + along * (max(low, least) + min(high, most)) / 2.0).tolist())


def farthest(a: Geometry, b: Geometry) -> float:
    """Return the largest distance of a vertex of either outline from the other outline [nm]."""
    return max(_farthest_vertex(a, b), _farthest_vertex(b, a))


def _farthest_vertex(a: Geometry, b: Geometry) -> float:
    """Return the largest distance of a vertex of one outline from another outline [nm]."""
    shapely.prepare(b)
    return float(shapely.distance(shapely.points(shapely.get_coordinates(a)), b).max())


def _flat(geometry: Geometry, at: Floats, along: Floats, across: Floats) -> tuple[float, float]:
    """Return how far an outline runs straight along a direction to both sides of a point on it [nm]."""
    points, part = shapely.get_coordinates(shapely.get_parts(_lines(geometry)), return_index=True)
    same = part[1:] == part[:-1]
    flat = np.abs((points - at) @ across) < _FLAT_NM
    edge = np.flatnonzero(same & flat[1:] & flat[:-1])
    t = (points - at) @ along
    low, high = np.minimum(t[edge], t[edge + 1]), np.maximum(t[edge], t[edge + 1])
    holds = (low <= _FLAT_NM) & (high >= -_FLAT_NM)
    return float(low[holds].min(initial=0.0)), float(high[holds].max(initial=0.0))


def _lines(geometry: Geometry) -> Geometry:
    """Return a geometry's outlines as lines, lines and points as they are."""
    return geometry.boundary if shapely.get_dimensions(geometry) == 2 else geometry


def whole(x: float, y: float) -> Point:
    """Return a point in whole nanometres."""
    return math.floor(x + 0.5), math.floor(y + 0.5)


def array_of(items: Sequence[Geometry]) -> npt.NDArray[np.object_]:
    """Return geometries as an array of objects, also when there are none."""
    out = np.empty(len(items), dtype=object)
    out[:] = items
    return out


def points_of(places: Sequence[tuple[float, float]]) -> npt.NDArray[np.object_]:
    """Return points as an array of objects, also when there are none."""
    return array_of(list(shapely.points(places)) if places else [])


def near_points(tree: shapely.STRtree, points: Polygons, reach: npt.NDArray[np.float64]) -> tuple[Ints, Ints]:
    """Return the index pairs (point, member of the tree) that are within each point's reach (N,) [nm]."""
    query: Any = tree.query
    point, member = query(points, predicate="dwithin", distance=reach)
    return point, member


def within(a: Polygons | Geometry, b: Polygons | Geometry, reach: npt.NDArray[np.float64]) -> Bools:
    """Return pair by pair whether geometries are within a reach (N,) [nm] of each other."""
    dwithin: Any = shapely.dwithin
    return np.asarray(dwithin(a, b, reach), dtype=bool)
