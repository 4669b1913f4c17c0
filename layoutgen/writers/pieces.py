"""Copper with holes as polygons without holes, for formats that know none.

The copper is cut straight through the holes' middles, never along slits into them: every piece is a plain
polygon that touches its neighbours along whole edges. All vertices stay on whole nanometres.
"""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt
import shapely

from layoutgen.geometry import Point

__all__ = ["MAX_VERTICES", "clean_pieces", "cut_lines"]

MAX_VERTICES = 8190
"""Most vertices of a piece [-]: a GDSII record holds 8191 points, the first one repeated."""


def clean_pieces(polygon: shapely.Polygon, most: int = MAX_VERTICES) -> list[tuple[Point, ...]]:
    """Return the polygon as outlines without holes, none with more than ``most`` vertices.

    Args:
        polygon: Outline and holes in whole nanometres [nm].
        most: Most vertices of one outline [-].
    """
    points = shapely.get_coordinates(polygon.exterior)[:-1]
    if polygon.interiors:
        halves = _cut(polygon, *_through_holes(polygon))
    elif len(points) > most:
        axis = int(np.argmax(np.ptp(points, axis=0)))
        halves = _cut(polygon, axis, round(float(np.median(points[:, axis]))))
    else:
        return [tuple((round(x), round(y)) for x, y in points.tolist())]
    return [piece for half in halves for piece in clean_pieces(half, most)]


def cut_lines(spans: npt.NDArray[np.float64]) -> list[int]:
    """Return the fewest positions [nm], rising, such that one lies strictly inside each span.

    Args:
        spans: (N, 2) lower and upper ends of the holes along one axis [nm]; at least one.
    """
    cuts: list[int] = []
    low, high = -math.inf, math.inf
    for start, end in spans[np.argsort(spans[:, 1], kind="stable")].tolist():
        if max(low, start) + 2 > min(high, end):  # no whole nanometre lies inside all of them
            cuts.append(round((low + high) / 2))
            low, high = start, end
        low, high = max(low, start), min(high, end)
    return [*cuts, round((low + high) / 2)]


def _through_holes(polygon: shapely.Polygon) -> tuple[int, int]:
    """Return axis and position [nm] of the middle one of the fewest cuts that meet all holes."""
    boxes = shapely.bounds(np.array(polygon.interiors, dtype=object)).reshape(-1, 4)
    by_x, by_y = cut_lines(boxes[:, [0, 2]]), cut_lines(boxes[:, [1, 3]])
    return (0, by_x[len(by_x) // 2]) if len(by_x) <= len(by_y) else (1, by_y[len(by_y) // 2])


def _cut(polygon: shapely.Polygon, axis: int, at: int) -> list[shapely.Polygon]:
    """Cut a polygon in two across an axis, the crossings made vertices on whole nanometres first."""
    marked = _with_crossings(polygon, axis, at)
    x0, y0, x1, y1 = marked.bounds
    boxes = (
        [shapely.box(x0, y0, at, y1), shapely.box(at, y0, x1, y1)]
        if axis == 0
        else [shapely.box(x0, y0, x1, at), shapely.box(x0, at, x1, y1)]
    )
    parts = shapely.get_parts(shapely.intersection(marked, boxes)).tolist()
    return [part for part in parts if isinstance(part, shapely.Polygon) and part.area > 0]


def _with_crossings(polygon: shapely.Polygon, axis: int, at: int) -> shapely.Polygon:
    """Return the polygon with a vertex, rounded to whole nanometres, wherever an edge crosses the cut.

    Without it both halves would round the crossing by themselves, and a sliver could be left between them.
    """
    rings = np.array([polygon.exterior, *polygon.interiors], dtype=object)
    points, ring = shapely.get_coordinates(rings, return_index=True)
    side = np.sign(points[:, axis] - at)
    edge = np.nonzero((side[:-1] * side[1:] < 0) & (ring[:-1] == ring[1:]))[0]
    start, end = points[edge], points[edge + 1]
    t = (at - start[:, axis]) / (end[:, axis] - start[:, axis])
    new = np.round(start + t[:, None] * (end - start))
    new[:, axis] = at
    order = np.argsort(np.concatenate([np.arange(len(points)), edge + 0.5]), kind="stable")
    points, ring = np.concatenate([points, new])[order], np.concatenate([ring, ring[edge]])[order]
    whole = np.atleast_1d(np.asarray(shapely.linearrings(points, indices=ring), dtype=object)).tolist()
    return shapely.Polygon(whole[0], whole[1:])
