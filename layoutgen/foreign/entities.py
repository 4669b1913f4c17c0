"""One DXF entity as outlines, lines and filled areas, in its own file's unit.

Read: LINE, ARC, CIRCLE, ELLIPSE, SPLINE, LWPOLYLINE, POLYLINE (in the plane), SOLID, TRACE, HATCH. Others are
counted by type and layer, never dropped in silence.
"""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Callable, Iterator, Sequence
from typing import Any

import numpy as np
import numpy.typing as npt
import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.foreign.curves import arc, bulged, ellipse
from layoutgen.foreign.hatches import hatch_areas
from layoutgen.foreign.records import Primitive

__all__ = ["primitives_of"]

Floats = npt.NDArray[np.float64]

_TURN = 2.0 * math.pi
_MITRE_LIMIT = 5.0
_SILENT = frozenset(("VIEWPORT", "ATTDEF"))
_CONTROL_VERTEX = 16


def primitives_of(entity: Any, tolerance: float, skipped: Counter[tuple[str, str]]) -> list[Primitive]:
    """Return what one entity stands for; an unknown kind is counted in ``skipped``.

    Args:
        entity: The library's entity, no INSERT.
        tolerance: Largest distance of a chord from its curve, in the file's unit.
        skipped: Counts by kind and layer.
    """
    kind = entity.dxftype()
    read = _READERS.get(kind)
    found = None if read is None or not _is_flat(entity) else read(entity, tolerance)
    if found is None:
        if kind not in _SILENT:
            skipped[kind, str(entity.dxf.get("layer", "0"))] += 1
        return []
    return [primitive for primitive in found if _is_finite(primitive, entity, skipped)]


def _is_flat(entity: Any) -> bool:
    """Tell whether an entity lies in the plane of the drawing, seen from above or from below."""
    if not entity.dxf.hasattr("extrusion"):
        return True
    x, y, _ = entity.dxf.extrusion.normalize()
    return math.hypot(x, y) < 1e-9


def _is_finite(primitive: Primitive, entity: Any, skipped: Counter[tuple[str, str]]) -> bool:
    """Tell whether all coordinates are numbers."""
    if all(np.isfinite(ring).all() for ring in primitive.rings):
        return True
    skipped[f"{entity.dxftype()} without finite coordinates", str(primitive.layer)] += 1
    return False


def _seen(entity: Any, points: Floats) -> Floats:
    """Return points of an entity's own plane in the drawing: mirrored where it is seen from below."""
    below = entity.dxf.hasattr("extrusion") and entity.dxf.extrusion.z < 0.0
    return points * np.array((-1.0, 1.0)) if below else points


def _turn(points: Floats) -> int:
    """Return 1 for a counter-clockwise outline, -1 for a clockwise one."""
    x, y = (points - points[0]).T
    return 1 if float(np.dot(x, np.roll(y, -1)) - np.dot(y, np.roll(x, -1))) >= 0.0 else -1


def _path(entity: Any, points: Floats, closed: bool) -> list[Primitive]:
    """Return points of an entity's own plane as an outline or an open line."""
    seen = _seen(entity, points)
    if closed and len(points) >= 3:
        return [Primitive(entity.dxf.layer, "loop", (seen,), _turn(points))]
    return [Primitive(entity.dxf.layer, "path", (seen,))] if len(points) >= 2 else []


def _line(entity: Any, _: float) -> list[Primitive]:
    start, end = entity.dxf.start, entity.dxf.end
    points = np.array(((start.x, start.y), (end.x, end.y)))
    if (points[0] == points[1]).all():
        return []
    return [Primitive(entity.dxf.layer, "path", (points,))]


def _circle(entity: Any, tolerance: float) -> list[Primitive]:
    middle = entity.dxf.center
    if entity.dxf.radius <= 0.0:
        return []
    points = arc((middle.x, middle.y), entity.dxf.radius, 0.0, _TURN, tolerance)[:-1]
    return _path(entity, points, closed=True)


def _arc(entity: Any, tolerance: float) -> list[Primitive]:
    middle, start, end = entity.dxf.center, entity.dxf.start_angle, entity.dxf.end_angle
    sweep = math.radians((end - start) % 360.0 or 360.0)
    points = arc((middle.x, middle.y), entity.dxf.radius, math.radians(start), sweep, tolerance)
    return _path(entity, points[:-1] if sweep >= _TURN else points, closed=sweep >= _TURN)


def _ellipse(entity: Any, tolerance: float) -> list[Primitive]:
    middle, major, minor = entity.dxf.center, entity.dxf.major_axis, entity.minor_axis
    start, sweep = entity.dxf.start_param, (entity.dxf.end_param - entity.dxf.start_param) % _TURN
    whole = sweep < 1e-9 or sweep > _TURN - 1e-9
    side = 1.0 if major.x * minor.y - major.y * minor.x >= 0.0 else -1.0
    points = ellipse(
        (middle.x, middle.y),
        (major.x, major.y),
        side * entity.dxf.ratio,
        start,
        _TURN if whole else sweep,
        tolerance,
    )
    if whole:
        return [Primitive(entity.dxf.layer, "loop", (points[:-1],), _turn(points[:-1]))]
    return [Primitive(entity.dxf.layer, "path", (points,))]


def _spline(entity: Any, tolerance: float) -> list[Primitive]:
    tool = entity.construction_tool()
    points = np.array([(p.x, p.y) for p in tool.flattening(tolerance, segments=8)])
    closed = bool(entity.closed) or bool(np.hypot(*(points[0] - points[-1])) <= tolerance)
    if closed and np.hypot(*(points[0] - points[-1])) <= tolerance:
        points = points[:-1]
    if closed and len(points) >= 3:
        return [Primitive(entity.dxf.layer, "loop", (points,), _turn(points))]
    return [Primitive(entity.dxf.layer, "path", (points,))]


def _lwpolyline(entity: Any, tolerance: float) -> list[Primitive]:
    rows = entity.get_points("xyseb")
    width = float(entity.dxf.const_width) if entity.dxf.hasattr("const_width") else 0.0
    rows = [(x, y, start or width, end or width, bulge) for x, y, start, end, bulge in rows]
    return _polyline(entity, rows, bool(entity.closed), tolerance)


def _old_polyline(entity: Any, tolerance: float) -> list[Primitive] | None:
    if not (entity.is_2d_polyline or entity.is_3d_polyline):
        return None
    default = (entity.dxf.get("default_start_width", 0.0), entity.dxf.get("default_end_width", 0.0))
    rows = [
        (
            vertex.dxf.location.x,
            vertex.dxf.location.y,
            vertex.dxf.get("start_width", default[0]),
            vertex.dxf.get("end_width", default[1]),
            vertex.dxf.get("bulge", 0.0),
        )
        for vertex in entity.vertices
        if not vertex.dxf.flags & _CONTROL_VERTEX
    ]
    return _polyline(entity, rows, bool(entity.is_closed), tolerance)


def _polyline(
    entity: Any, rows: Sequence[tuple[float, ...]], closed: bool, tolerance: float
) -> list[Primitive]:
    """Return a polyline given as rows x, y, start width, end width, bulge."""
    rows = [row for k, row in enumerate(rows) if k == 0 or row[:2] != rows[k - 1][:2]]
    if closed and len(rows) > 1 and rows[0][:2] == rows[-1][:2]:
        rows = rows[:-1]
    if len(rows) < 2:
        return []
    points, bulges = np.array([row[:2] for row in rows]), [row[4] for row in rows]
    if any(row[2] or row[3] for row in rows):
        return _wide(entity, rows, closed, tolerance)
    outline = bulged(points, bulges, closed, tolerance)
    meets = bool((outline[0] == outline[-1]).all()) and len(outline) > 3
    return _path(entity, outline[:-1] if meets else outline, closed or meets)


def _wide(entity: Any, rows: Sequence[tuple[float, ...]], closed: bool, tolerance: float) -> list[Primitive]:
    """Return a polyline with a width as the copper that it covers: square ends, mitred corners."""
    widths = {width for row in (rows if closed else rows[:-1]) for width in row[2:4]}
    points, bulges = np.array([row[:2] for row in rows]), [row[4] for row in rows]
    if len(widths) == 1:
        way = bulged(points, bulges, closed, tolerance)
        line = shapely.LinearRing(way) if closed and len(way) >= 3 else shapely.LineString(way)
        copper: BaseGeometry = line.buffer(
            widths.pop() / 2.0, cap_style="flat", join_style="mitre", mitre_limit=_MITRE_LIMIT
        )
    else:
        copper = shapely.union_all(list(_tapers(rows, points, closed, tolerance)))
    return [_area(entity, part) for part in shapely.get_parts(copper) if part.area > 0.0]


def _tapers(
    rows: Sequence[tuple[float, ...]], points: Floats, closed: bool, tolerance: float
) -> Iterator[BaseGeometry]:
    """Yield the copper of each edge of a polyline whose width changes along it."""
    for k in range(len(rows) if closed else len(rows) - 1):
        ends = np.stack((points[k], points[(k + 1) % len(rows)]))
        way = bulged(ends, [rows[k][4], 0.0], False, tolerance)
        steps = np.diff(way, axis=0)
        normal = np.column_stack((-steps[:, 1], steps[:, 0])) / np.hypot(*steps.T)[:, None]
        share = np.concatenate(([0.0], np.cumsum(np.hypot(*steps.T))))
        half = 0.5 * (rows[k][2] + (rows[k][3] - rows[k][2]) * share / share[-1])
        mean = np.concatenate((normal[:1], (normal[1:] + normal[:-1]) / 2.0, normal[-1:]))
        side = mean * half[:, None]
        yield shapely.make_valid(shapely.Polygon(np.concatenate((way + side, (way - side)[::-1]))))


def _area(entity: Any, polygon: shapely.Polygon) -> Primitive:
    """Return a polygon of an entity's own plane as a filled area."""
    rings = [shapely.get_coordinates(ring)[:-1] for ring in (polygon.exterior, *polygon.interiors)]
    return Primitive(entity.dxf.layer, "area", tuple(_seen(entity, ring) for ring in rings))


def _solid(entity: Any, _: float) -> list[Primitive]:
    corners = [entity.dxf.get(f"vtx{k}") for k in (0, 1, 3, 2)]
    points = np.array([(c.x, c.y) for c in corners if c is not None])
    points = points[np.concatenate(([True], (np.abs(np.diff(points, axis=0)) > 0.0).any(axis=1)))]
    if len(points) < 3:
        return []
    return [Primitive(entity.dxf.layer, "area", (_seen(entity, points),))]


def _hatch(entity: Any, tolerance: float) -> list[Primitive]:
    return [_area(entity, part) for part in hatch_areas(entity, tolerance)]


_READERS: dict[str, Callable[[Any, float], list[Primitive] | None]] = {
    "LINE": _line,
    "ARC": _arc,
    "CIRCLE": _circle,
    "ELLIPSE": _ellipse,
    "SPLINE": _spline,
    "LWPOLYLINE": _lwpolyline,
    "POLYLINE": _old_polyline,
    "SOLID": _solid,
    "TRACE": _solid,
    "HATCH": _hatch,
}
