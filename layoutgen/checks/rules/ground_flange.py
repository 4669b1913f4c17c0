"""At a flange the ground plane comes up to the cut-out.

What: along the side of a cut-out that a pad faces, the bottom plane is no farther from the cut-out than
``copper.min_edge_distance`` makes it.
Why: there the return current of the line goes over into the carrier; every gap on its way is inductance
in series with the source.
How measured: from the cut-out's edge under the pad, over the pad's width, to the nearest bottom copper on
gnd; the largest of these distances, looked for wherever it is too large, so that a slot is found however
narrow it is against the pad. Only for parts with a pin on ``ground = "flange"``. 1 um above passes.
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
from layoutgen.checks.planar import CHORD_NM, Geometry, points_of, whole
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
    for cutout in board.cutouts:
        part = board.artwork.placement.parts.get(cutout.item)
        if part is None or not any(pad.ground == "flange" for pad in part.pads):
            continue
        if limit is None:
            yield NotChecked(f"{NAME} ({part.name})", "copper.min_edge_distance is not given")
            continue
        for pad in part.pads:
            yield from _pad(cutout, pad, board.plane, limit)


def _pad(cutout: Area, pad: PlacedPad, plane: Geometry, limit: float) -> Iterator[Hit]:
    """Yield the hit of one pad."""
    side = _facing_side(cutout, pad)
    if side is None:
        return
    far = side.difference(plane.buffer(limit + _TOLERANCE_NM, quad_segs=64))
    if far.is_empty:
        return
    points = points_of([place for piece in shapely.get_parts(far) for place in _along(piece)])
    away = shapely.distance(points, plane) if not plane.is_empty else np.full(len(points), np.inf)
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


def _along(piece: shapely.LineString) -> list[tuple[float, float]]:
    """Return points along a line, ends included."""
    spots = shapely.line_interpolate_point(piece, np.linspace(0.0, 1.0, _SAMPLES), normalized=True)
    return [(spot.x, spot.y) for spot in spots]


def _facing_side(cutout: Area, pad: PlacedPad) -> shapely.LineString | None:
    """Return the side of a cut-out that a pad faces, over the pad's width, if there is one."""
    outline = pad.outline.polygon(CHORD_NM)
    turn = np.radians(pad.heading)
    outward = np.array([np.cos(turn), np.sin(turn)])
    corners = shapely.get_coordinates(outline)
    for a, b in pairwise(shapely.get_coordinates(orient(cutout.polygon).exterior)):
        length = float(np.hypot(*(b - a)))
        along = (b - a) / length
        low, high = np.clip([((corners - a) @ along).min(), ((corners - a) @ along).max()], 0.0, length)
        if along[1] * outward[0] - along[0] * outward[1] > _LOOKING and high > low and outline.area > 0.0:
            return shapely.LineString([a + low * along, a + high * along])
    return None


RULE = Rule(names=(NAME,), find=find, keyless=True, needs_circuit=True)
