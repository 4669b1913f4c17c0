"""What the drawn pour is to each line: its distance left and right over most of the line."""

from __future__ import annotations

import itertools
import math
from collections.abc import Mapping, Sequence

import numpy as np
import shapely
from numpy.typing import NDArray

from layoutgen.artwork.limits import Limits
from layoutgen.artwork.records import LineCopper
from layoutgen.geometry import Point
from layoutgen.placement import Placement

__all__ = ["measured_gaps"]

_NO_POUR_HEIGHTS = 6.0
_SAMPLES = 200

Floats = NDArray[np.float64]


def measured_gaps(
    placement: Placement, limits: Limits, pour: Sequence[shapely.Polygon]
) -> Mapping[str, LineCopper]:
    """Return for every line the distance of its edges to the finished pour, left and right of the path.

    It is the length-weighted median of the distance at right angles to the path, so that what stands beside
    a short part of the line does not count; None where there is no pour within six substrate heights.
    """
    edges = _pour_edges(pour)
    reach = _NO_POUR_HEIGHTS * limits.height
    out = {}
    for line in placement.lines.values():
        feet, left, weights = _along(line.path)
        gaps = []
        for side in (1.0, -1.0):
            normals = side * left
            distances = _distances(feet + normals * (line.width / 2.0), normals, reach, edges)
            gaps.append(_median(distances, weights))
        out[line.name] = LineCopper(name=line.name, gap_left=gaps[0], gap_right=gaps[1])
    return out


def _pour_edges(pour: Sequence[shapely.Polygon]) -> tuple[shapely.STRtree, Floats]:
    """Return all edges of the pour as a tree of segments and as an array (N, 2, 2) [nm]."""
    rings = [np.asarray(ring.coords) for piece in pour for ring in (piece.exterior, *piece.interiors)]
    segments = [np.stack([ring[:-1], ring[1:]], axis=1) for ring in rings]
    ends = np.concatenate(segments) if segments else np.zeros((0, 2, 2))
    return shapely.STRtree(np.asarray(shapely.linestrings(ends), dtype=object).tolist()), ends


def _along(path: Sequence[Point]) -> tuple[Floats, Floats, Floats]:
    """Return points along a path, the unit normals to the left there, and the length of each one's piece."""
    total = sum(math.dist(a, b) for a, b in itertools.pairwise(path))
    feet, left, weights = [], [], []
    for a, b in itertools.pairwise(np.array(path, dtype=np.float64)):
        length = math.dist(a, b)
        count = max(1, math.ceil(_SAMPLES * length / total))
        direction = (b - a) / length
        feet.append(a + (b - a) * ((np.arange(count) + 0.5) / count)[:, None])
        left.append(np.tile([-direction[1], direction[0]], (count, 1)))
        weights.append(np.full(count, length / count))
    return np.vstack(feet), np.vstack(left), np.concatenate(weights)


def _distances(
    starts: Floats, normals: Floats, reach: float, edges: tuple[shapely.STRtree, Floats]
) -> Floats:
    """Return the distance [nm] from each start along its normal to the first pour edge, infinity if none."""
    tree, ends = edges
    out = np.full(len(starts), np.inf)
    rays = shapely.linestrings(np.stack([starts, starts + normals * reach], axis=1))
    ray, edge = tree.query(rays, predicate="intersects")
    if len(ray):
        a = ends[edge, 0] - starts[ray]
        step = ends[edge, 1] - ends[edge, 0]
        across_a, across_step = _cross(a, normals[ray]), _cross(step, normals[ray])
        share = np.divide(-across_a, across_step, out=np.zeros(len(ray)), where=across_step != 0.0)
        hit = a + step * np.clip(share, 0.0, 1.0)[:, None]
        np.minimum.at(out, ray, np.maximum(np.sum(hit * normals[ray], axis=1), 0.0))
    return out


def _cross(a: Floats, b: Floats) -> Floats:
    """Return the cross products of rows of vectors in the plane."""
    return np.asarray(a[:, 0] * b[:, 1] - a[:, 1] * b[:, 0])


def _median(distances: Floats, weights: Floats) -> int | None:
    """Return the weighted median [nm]; None when it is infinite."""
    order = np.argsort(distances, kind="stable")
    middle = int(np.searchsorted(np.cumsum(weights[order]), 0.5 * weights.sum()))
    value = float(distances[order][min(middle, len(order) - 1)])
    return round(value) if math.isfinite(value) else None
