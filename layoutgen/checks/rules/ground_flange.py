"""At a flange the ground plane comes up to the cut-out.

What: along the side of a cut-out that a pad faces, the bottom plane is no farther from the cut-out than
``copper.min_edge_distance`` makes it.
Why: there the return current of the line goes over into the carrier; every gap on its way is inductance in
series with the source.
How measured: from the cut-out's edge straight under the pad, over the pad's width, to the plane; the largest
of 21 distances, ends included. Only for parts with a pin on ``ground = "flange"``. 1 um above passes.
Source: common practice, no source; the limit is the least that the edge rule lets be.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import shapely

from layoutgen.checks.board import CHORD_NM, TOLERANCE_NM, Area, Board, whole
from layoutgen.checks.nodes import GROUND
from layoutgen.checks.outcome import Hit, Outcome, Rule, mm, named
from layoutgen.checks.records import NotChecked
from layoutgen.placement import PlacedPad

__all__ = ["RULE"]

NAME = "ground.flange"
_SAMPLES = 21
_TOLERANCE_NM = 1_000.0


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each pad under which the plane ends too early."""
    if board.artwork is None:
        return
    limit = board.limits.nm("copper.min_edge_distance")
    plane = shapely.union_all(board.bottom.polygons) if board.bottom.pieces else shapely.MultiPolygon()
    for cutout in board.cutouts:
        part = board.artwork.placement.parts.get(cutout.item)
        if part is None or not any(pad.ground == "flange" for pad in part.pads):
            continue
        if limit is None:
            yield NotChecked(f"{NAME} ({part.name})", "copper.min_edge_distance is not given")
            continue
        for pad in part.pads:
            yield from _pad(cutout, pad, plane, limit)


def _pad(cutout: Area, pad: PlacedPad, plane: shapely.Geometry, limit: float) -> Iterator[Hit]:
    """Yield the hit of one pad."""
    rim = _facing_rim(cutout, pad)
    if rim is None:
        return
    points = shapely.line_interpolate_point(rim, np.linspace(0.0, 1.0, _SAMPLES), normalized=True)
    away = shapely.distance(points, plane) if not plane.is_empty else np.full(_SAMPLES, np.inf)
    worst = int(np.argmax(away))
    if away[worst] > limit + _TOLERANCE_NM:
        found = mm(float(away[worst])) if np.isfinite(away[worst]) else "nowhere"
        yield Hit(
            rule=NAME,
            text=f"under pad {pad.pin} of {cutout.item} the plane ends {found} from the cut-out, at most {mm(limit)}",
            items=named(cutout.item),
            at=whole(points[worst].x, points[worst].y),
            measured=float(away[worst]) / 1e6 if np.isfinite(away[worst]) else None,
            limit=limit / 1e6,
            unit="mm",
            layer="copper_bottom",
            nets=named(pad.net, GROUND),
        )


def _facing_rim(cutout: Area, pad: PlacedPad) -> shapely.Geometry | None:
    """Return the part of a cut-out's edge that a pad faces over its width; None for pads without copper."""
    outline = pad.outline.polygon(CHORD_NM)
    if outline.area == 0.0:
        return None
    turn = np.radians(pad.heading)
    back = np.array([-np.cos(turn), -np.sin(turn)])
    corners = shapely.get_coordinates(outline.exterior)
    far = 10.0 * float(np.ptp(corners, axis=0).max()) + cutout.polygon.length
    shadow = shapely.convex_hull(shapely.multipoints(np.concatenate((corners, corners + far * back))))
    sides = [side for side in _sides(cutout.polygon) if _looks(side, -back)]
    met = shapely.union_all([side.intersection(shadow.buffer(-TOLERANCE_NM)) for side in sides])
    return shapely.line_merge(met) if met.length > 0.0 else None


def _sides(polygon: shapely.Polygon) -> list[shapely.LineString]:
    """Return the sides of a polygon, counter-clockwise."""
    ring = shapely.get_coordinates(shapely.geometry.polygon.orient(polygon).exterior)
    return [shapely.LineString(pair) for pair in zip(ring[:-1], ring[1:], strict=True)]


def _looks(side: shapely.LineString, outward: np.ndarray[tuple[int], np.dtype[np.float64]]) -> bool:
    """Tell whether a side's outer face looks towards a direction."""
    (ax, ay), (bx, by) = side.coords
    return bool((by - ay) * outward[0] - (bx - ax) * outward[1] > 0.5 * side.length)


RULE = Rule(names=(NAME,), find=find, keyless=True, needs_circuit=True)
