"""Pairs of copper pieces of two nets that lie near each other without meeting."""

from __future__ import annotations

from collections.abc import Iterator
from typing import NamedTuple

import numpy as np
import shapely

from layoutgen.checks.board import Layer
from layoutgen.checks.planar import TOLERANCE_NM, middle
from layoutgen.geometry import Point

__all__ = ["NearPair", "near_nets"]


class NearPair(NamedTuple):
    """Two pieces by their indices, their distance [nm], and the middle of their shortest connection [nm]."""

    first: int
    second: int
    distance: float
    at: Point


def near_nets(layer: Layer, limit: float) -> Iterator[NearPair]:
    """Yield the pairs of pieces of two nets that are nearer than a limit [nm] and do not meet."""
    within = max(limit - TOLERANCE_NM, 0.0)
    i, j = layer.tree.query(layer.polygons, predicate="dwithin", distance=within)
    other = (i < j) & (layer.nodes[i] != layer.nodes[j])
    i, j = i[other], j[other]
    distance = shapely.distance(layer.polygons[i], layer.polygons[j])
    apart = (distance > 0.0) & (distance < within)
    for k in np.flatnonzero(apart).tolist():
        a, b = int(i[k]), int(j[k])
        yield NearPair(a, b, float(distance[k]), middle(layer.polygons[a], layer.polygons[b]))
