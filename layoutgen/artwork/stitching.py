"""The vias of the pour: fence rows beside lines, rows at cut-outs and at the board's edge, an inner grid."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.artwork.board import GND, board_area, cutouts_of
from layoutgen.artwork.conductors import Conductor
from layoutgen.artwork.drills import Drills
from layoutgen.artwork.limits import Limits
from layoutgen.artwork.mending import close_rows
from layoutgen.artwork.rows import Facing, Side, set_rows, sides_of, whole_sides
from layoutgen.geometry import Point, cut, grow, joined, pieces
from layoutgen.placement import Placement

__all__ = ["fence", "stitch_cutouts", "stitch_rest", "stitchable", "well_held"]

_LEAST_VIAS = 2
_GRID_CLEAR = 0.6
_LEAST_NECK = 1e10  # [nm^2]: smaller ones are corners
_NECK_ROUNDING = 1_000  # [nm]
_PART_CLEAR_NM = 300_000  # no row is asked for nearer to the outline of a part [nm]
_RIM_NM = 1_000  # rows as good as on the pour's edge, which run on where it is too narrow for vias [nm]


def stitchable(
    pour: Sequence[shapely.Polygon], area: BaseGeometry, limits: Limits, placement: Placement
) -> list[shapely.Polygon]:
    """Return the pieces of pour that two vias can hold; those that came with a part's ground count.

    Args:
        pour: Pieces of pour [nm].
        area: Where axes may stand [nm].
        limits: The pitch of vias.
        placement: The vias that are there already.
    """
    axes = [shapely.Point(via.x, via.y) for via in placement.vias if via.net == GND]
    held = shapely.STRtree(axes)
    out = []
    for piece in pour:
        present = len(held.query(piece, predicate="intersects")) if axes else 0
        if present + _room_for(shapely.intersection(piece, area), limits.via_pitch) >= _LEAST_VIAS:
            out.append(piece)
    return out


def _room_for(area: BaseGeometry, pitch: int) -> int:
    """Return how many vias an area takes, as far as it matters: 0, 1, or 2 for two or more."""
    if area.is_empty:
        return 0
    return 2 if shapely.minimum_bounding_radius(area) * 2.0 >= 1.01 * pitch else 1


def fence(
    placement: Placement,
    pour: Sequence[shapely.Polygon],
    conductors: Sequence[Conductor],
    limits: Limits,
    drills: Drills,
) -> list[Side]:
    """Set the fence: rows beside all lines, pairs and radial stubs. Return the rows of all pour edges."""
    sides = sides_of(pour, limits.row)
    guarded = [piece for piece in conductors if piece.guarded]
    if limits.fence and guarded:
        widest = max(piece.gap for piece in guarded)
        facing = Facing([c.copper for c in guarded], 2 * widest, limits.fence_pitch)
        set_rows(sides, facing, drills, limits.fence_reach)
        set_rows(_through_necks(pour, limits, drills), facing, drills, limits.fence_reach)
        spared = joined(grow(p.outline.polygon(), _PART_CLEAR_NM) for p in placement.parts.values())
        asked = replace(facing, spared=spared)
        close_rows(whole_sides(pour, _RIM_NM), asked, drills, limits.fence_reach)
    return sides


def _through_necks(pour: Sequence[shapely.Polygon], limits: Limits, drills: Drills) -> list[Side]:
    """Return rows as near to the edge as lands may stand, where the pour is too narrow for the usual ones."""
    out: list[Side] = []
    for piece in pour:
        near = grow(piece, -drills.least_inset)
        usual = grow(grow(piece, -limits.row), limits.row - drills.least_inset + _NECK_ROUNDING)
        necks = [neck for neck in pieces(cut(near, usual)) if neck.area > _LEAST_NECK]
        if necks:
            about = grow(shapely.MultiPolygon(necks), limits.fence_pitch)
            shapely.prepare(about)
            rows = sides_of([piece], drills.least_inset)
            out += [side for side in rows if shapely.intersects_xy(about, side.points).any()]
    return out


def stitch_cutouts(placement: Placement, sides: Sequence[Side], limits: Limits, drills: Drills) -> None:
    """Set rows along the cut-outs, at the fence's pitch: they lead the ground to the carrier."""
    slots = [ring.polygon() for _, ring in cutouts_of(placement)]
    facing = Facing(slots, 2 * limits.edge, limits.fence_pitch)
    set_rows(sides, facing, drills, limits.fence_reach)


def stitch_rest(
    placement: Placement,
    pour: Sequence[shapely.Polygon],
    sides: Sequence[Side],
    limits: Limits,
    drills: Drills,
) -> None:
    """Set rows along the board's edge and a square grid inside, then hold pieces that have too few vias."""
    profile = board_area(placement).exterior
    at_edge = Facing([profile], limits.margin + limits.edge, limits.stitch_pitch)
    set_rows(sides, at_edge, drills, 2 * limits.hole_edge + limits.via_land)
    for x, y in _grid(placement, limits.stitch_pitch, drills):
        if not drills.near(x, y, _GRID_CLEAR * limits.stitch_pitch):
            drills.put(x, y)
    for piece, count in zip(pour, _counts(pour, drills), strict=True):
        _hold(piece, _LEAST_VIAS - count, limits, drills)


def _grid(placement: Placement, pitch: int, drills: Drills) -> list[Point]:
    """Return the legal points of a square grid about the board's middle, row by row."""
    axes = []
    for size in (placement.width, placement.height):
        count = size // 2 // pitch
        axes.append(size // 2 + pitch * np.arange(-count, count + 1))
    xs, ys = (grid.ravel() for grid in np.meshgrid(*axes))
    keep = drills.legal(xs.astype(float), ys.astype(float))
    return [(int(x), int(y)) for x, y in zip(xs[keep], ys[keep], strict=True)]


def _hold(piece: shapely.Polygon, missing: int, limits: Limits, drills: Drills) -> None:
    """Give a piece of pour the vias that it lacks."""
    for _ in range(missing):
        area = shapely.intersection(piece, drills.area)
        open_area = _away_from_vias(area, drills, limits)
        if open_area.is_empty:
            return
        place = _best_place(open_area)
        drills.put(place.x, place.y)


def _counts(pour: Sequence[shapely.Polygon], drills: Drills) -> list[int]:
    """Return how many vias stand in each piece of pour."""
    axes = np.array(drills.axes(), dtype=np.float64).reshape(-1, 2)
    tree = shapely.STRtree(np.asarray(shapely.points(axes), dtype=object).tolist())
    found = (
        tree.query(np.array(pour, dtype=object), predicate="intersects")[0]
        if pour
        else np.zeros(0, dtype=int)
    )
    return [int(count) for count in np.bincount(found, minlength=len(pour))]


def _away_from_vias(area: BaseGeometry, drills: Drills, limits: Limits) -> BaseGeometry:
    """Return the part of an area where a via keeps the pitch to all others."""
    x0, y0, x1, y1 = area.bounds if not area.is_empty else (0.0, 0.0, 0.0, 0.0)
    about = drills.near((x0 + x1) / 2.0, (y0 + y1) / 2.0, max(x1 - x0, y1 - y0) + 2.0 * limits.via_pitch)
    taken = [
        grow(shapely.Point(x, y).buffer(limits.via_pitch, quad_segs=8), limits.via_pitch * 0.02)
        for x, y, _ in about
    ]
    return cut(area, shapely.union_all(taken))


def _best_place(area: BaseGeometry) -> shapely.Point:
    """Return a point of an area: of its largest piece one inside, or one of its first line or point."""
    polygons = pieces(area)
    if polygons:
        return shapely.point_on_surface(max(polygons, key=lambda piece: piece.area))
    return shapely.point_on_surface(area)


def well_held(
    pour: Sequence[shapely.Polygon], drills: Drills, fenced: int
) -> tuple[list[shapely.Polygon], list[tuple[Point, str]]]:
    """Return the pieces of pour that have their two vias, and the vias that stand in these, with purposes.

    Args:
        pour: Pieces of pour [nm].
        drills: The book of vias.
        fenced: How many of the added vias, counted from the first, belong to the fence.
    """
    counts = _counts(pour, drills)
    kept = [piece for piece, count in zip(pour, counts, strict=True) if count >= _LEAST_VIAS]
    tree = shapely.STRtree(kept)
    purposes = ["fence"] * fenced + ["pour"] * (len(drills.added) - fenced)
    axes = shapely.points(np.array(drills.added, dtype=np.float64).reshape(-1, 2))
    inside = set(tree.query(axes, predicate="intersects")[0].tolist())
    return kept, [
        (at, purpose)
        for i, (at, purpose) in enumerate(zip(drills.added, purposes, strict=True))
        if i in inside
    ]
