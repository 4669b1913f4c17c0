"""At a flange the ground plane comes up to the cut-out.

What: along the side of a cut-out that a pad faces, the bottom plane is no farther from the cut-out than
``copper.min_edge_distance`` makes it.
Why: there the return current of the line goes over into the carrier; every gap on its way is inductance
in series with the source.
How measured: from the cut-out's edge straight under the pad, over the pad's width, to the plane; the
largest of 21 distances, ends included. Only for parts with a pin on ``ground = "flange"``. 1 um above
passes.
Source: common practice, no source; the limit is the least that the edge rule lets be.
"""

from __future__ import annotations

from collections.abc import Iterator
from itertools import pairwise

import numpy as np
import shapely
from shapely.geometry.polygon import orient

from layoutgen.checks.board import Area, Board
from layoutgen.checks.nodes import GROUND
from layoutgen.checks.outcome import Hit, Outcome, Rule, mm, named
from layoutgen.checks.planar import CHORD_NM, Geometry, Polygons, points_of, whole
from layoutgen.checks.records import NotChecked
from layoutgen.placement import PlacedPad

__all__ = ["RULE"]

NAME = "ground.flange"
_SAMPLES = 21
_TOLERANCE_NM = 1_000.0
_LOOKING = 0.7


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


def _pad(cutout: Area, pad: PlacedPad, plane: Geometry, limit: float) -> Iterator[Hit]:
    """Yield the hit of one pad."""
    points = _facing_points(cutout, pad)
    if points is None:
        return
    away = shapely.distance(points, plane) if not plane.is_empty else np.full(_SAMPLES, np.inf)
    worst = int(np.argmax(away))
    if away[worst] > limit + _TOLERANCE_NM:
        found = mm(float(away[worst])) if np.isfinite(away[worst]) else "nowhere"
        pad_name = f"pad {pad.pin} of {cutout.item}"
        yield Hit(
            rule=NAME,
            text=f"under {pad_name} the plane ends {found} from the cut-out, at most {mm(limit)}",
            items=named(cutout.item),
            at=whole(points[worst].x, points[worst].y),
            measured=float(away[worst]) / 1e6 if np.isfinite(away[worst]) else None,
            limit=limit / 1e6,
            unit="mm",
            layer="copper_bottom",
            nets=named(pad.net, GROUND),
        )


def _facing_points(cutout: Area, pad: PlacedPad) -> Polygons | None:
    """Return points along the side of a cut-out that a pad faces, over its width, if there is one."""
    outline = pad.outline.polygon(CHORD_NM)
    turn = np.radians(pad.heading)
    outward = np.array([np.cos(turn), np.sin(turn)])
    corners = shapely.get_coordinates(outline)
    for a, b in pairwise(shapely.get_coordinates(orient(cutout.polygon).exterior)):
        length = float(np.hypot(*(b - a)))
        along = (b - a) / length
        low, high = np.clip([((corners - a) @ along).min(), ((corners - a) @ along).max()], 0.0, length)
        if along[1] * outward[0] - along[0] * outward[1] > _LOOKING and high > low and outline.area > 0.0:
            return points_of(list(a + np.linspace(low, high, _SAMPLES)[:, None] * along))
    return None


RULE = Rule(names=(NAME,), find=find, keyless=True, needs_circuit=True)
