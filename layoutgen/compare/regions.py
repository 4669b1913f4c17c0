"""Where one set of polygons reaches beyond another."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.checks.planar import merge, parts

__all__ = ["Polygons", "Region", "joined", "regions"]

Polygons = npt.NDArray[np.object_]


@dataclass(frozen=True, slots=True, eq=False)
class Region:
    """An area of one artwork off the other: where it is more than the tolerance off, and how far [nm]."""

    shape: shapely.Polygon
    reach: float


def joined(polygons: Polygons) -> Polygons:
    """Return polygons as disjoint ones."""
    if not len(polygons):
        return polygons
    i, j = shapely.STRtree(polygons).query(polygons, predicate="intersects")
    return merge(polygons, np.stack((i[i < j], j[i < j]), axis=1))


def regions(mine: Polygons, other: Polygons, tolerance: float) -> list[Region]:
    """Return the areas where polygons reach farther than a tolerance [nm] beyond others."""
    if not len(mine):
        return []
    all_other = shapely.union_all(other) if len(other) else shapely.Polygon()
    grown = shapely.union_all(shapely.buffer(other, tolerance, quad_segs=16)) if len(other) else all_other
    shapely.prepare(grown)
    inside = shapely.covers(grown, mine)
    found = []
    for polygon in mine[~inside]:
        found += [Region(part, _reach(part, all_other)) for part in parts(polygon.difference(grown))]
    return found


def _reach(part: shapely.Polygon, other: BaseGeometry) -> float:
    """Return how far a region's corners lie from the other artwork [nm]; its own size where there is none."""
    if other.is_empty:
        x0, y0, x1, y1 = part.bounds
        return float(max(x1 - x0, y1 - y0))
    return float(shapely.distance(shapely.points(shapely.get_coordinates(part)), other).max())
