"""Hatches: the filled areas between their boundary paths, arcs and curves as chords.

Style "normal" fills every second level of nested paths, "outer" the outermost level alone, "ignore" all
inside the outermost paths. Patterns and gradients count as filled.
"""

from __future__ import annotations

import math
from functools import reduce
from typing import Any

import numpy as np
import numpy.typing as npt
import shapely

from layoutgen.foreign.curves import arc, bulged, ellipse

__all__ = ["hatch_areas"]

Floats = npt.NDArray[np.float64]

_OUTER, _IGNORE = 1, 2


def hatch_areas(entity: Any, tolerance: float) -> list[shapely.Polygon]:
    """Return the filled polygons of a hatch, in its own plane and unit."""
    loops = [_ring(path, tolerance) for path in entity.paths.paths]
    polygons: list[Any] = [shapely.make_valid(shapely.Polygon(ring)) for ring in loops if len(ring) >= 3]
    polygons = [polygon for polygon in polygons if polygon.area > 0.0]
    if not polygons:
        return []
    filled = _filled(polygons, int(entity.dxf.get("hatch_style", 0)))
    return [part for part in shapely.get_parts(shapely.get_parts(filled)) if part.geom_type == "Polygon"]


def _filled(polygons: list[Any], style: int) -> Any:
    """Return what a style fills of nested outlines."""
    if style == _IGNORE:
        return shapely.union_all(polygons)
    if style == _OUTER:
        depth = [sum(other is not p and other.covers(p) for other in polygons) for p in polygons]
        outer = shapely.union_all([p for p, d in zip(polygons, depth, strict=True) if d == 0])
        inner = [p for p, d in zip(polygons, depth, strict=True) if d == 1]
        return outer.difference(shapely.union_all(inner))
    return reduce(lambda a, b: a.symmetric_difference(b), polygons)


def _ring(path: Any, tolerance: float) -> Floats:
    """Return one boundary path as points (N, 2)."""
    if hasattr(path, "vertices"):
        rows = np.array(path.vertices, dtype=float).reshape(-1, 3)
        return bulged(rows[:, :2], rows[:, 2].tolist(), True, tolerance)
    edges = [_edge(edge, tolerance) for edge in path.edges]
    edges = [edge for edge in edges if len(edge)]
    return _head_to_tail(edges) if edges else np.zeros((0, 2))


def _head_to_tail(edges: list[Floats]) -> Floats:
    """Return edges as one outline; an edge that runs the wrong way is turned."""
    out = [edges[0]]
    if len(edges) > 1:
        free = min((0, -1), key=lambda end: _least(edges[0][end], edges[1]))
        out[0] = edges[0] if free == -1 else edges[0][::-1]
    for edge in edges[1:]:
        last = out[-1][-1]
        ahead = float(np.hypot(*(edge[0] - last))) <= float(np.hypot(*(edge[-1] - last)))
        out.append(edge if ahead else edge[::-1])
    points = np.concatenate(out)
    keep = np.concatenate(([True], (np.abs(np.diff(points, axis=0)) > 0.0).any(axis=1)))
    return np.asarray(points[keep])


def _least(point: Floats, edge: Floats) -> float:
    """Return how far a point is from the nearer end of an edge."""
    return min(float(np.hypot(*(edge[end] - point))) for end in (0, -1))


def _edge(edge: Any, tolerance: float) -> Floats:
    """Return one edge of a boundary path as points (N, 2)."""
    kind = edge.EDGE_TYPE
    if kind == "LineEdge":
        return np.array((tuple(edge.start)[:2], tuple(edge.end)[:2]), dtype=float)
    if kind == "ArcEdge":
        sweep = math.radians((edge.end_angle - edge.start_angle) % 360.0 or 360.0)
        points = arc(tuple(edge.center)[:2], edge.radius, math.radians(edge.start_angle), sweep, tolerance)
    elif kind == "EllipseEdge":
        tool = edge.construction_tool()
        sweep = (tool.end_param - tool.start_param) % (2.0 * math.pi) or 2.0 * math.pi
        major = (tool.major_axis.x, tool.major_axis.y)
        points = ellipse(tuple(edge.center)[:2], major, tool.ratio, tool.start_param, sweep, tolerance)
    else:
        tool = edge.construction_tool()
        return np.array([(p.x, p.y) for p in tool.flattening(tolerance, segments=8)])
    return points if edge.ccw else points[::-1]
