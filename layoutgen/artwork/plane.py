"""The ground plane on the bottom side."""

from __future__ import annotations

import math

import numpy as np
import shapely

from layoutgen.artwork.board import BOARD, GND, board_outline, cutouts_of, plane_area
from layoutgen.artwork.limits import Limits
from layoutgen.artwork.pour import washed, without_necks
from layoutgen.artwork.records import Shape
from layoutgen.geometry import Ring, grow, offset_ring, offset_rings, pieces, rings_of
from layoutgen.placement import Placement

__all__ = ["plane_shapes"]

_CHORDS_NM = 900.0


def plane_shapes(placement: Placement, limits: Limits) -> list[Shape]:
    """Return the plane: the board but for its edge, its cut-outs and its bare holes.

    Where there is copper to be etched between all of them, the clearances go in as they are, with true arcs;
    else as polygons, without necks too narrow and without islands, by the pour's own rules.
    """
    clear = _clearances(placement, limits)
    outline = board_outline(placement, limits.margin - limits.undercut)
    web = 2.0 * (limits.neck + limits.undercut + _CHORDS_NM)
    if _apart([ring.polygon() for ring in clear], outline.polygon(), web):
        return [_shape(outline, tuple(_clockwise(ring) for ring in clear))]
    area = plane_area(placement, limits, limits.margin, _CHORDS_NM)
    made = washed(without_necks(area, shapely.MultiPolygon(), limits.neck, limits), area, limits)
    return [_shape(*rings) for piece in made for rings in offset_rings(piece, limits.undercut)]


def _clearances(placement: Placement, limits: Limits) -> list[Ring]:
    """Return the outlines that the drawn plane stays out of."""
    rings = [_wider(ring, limits.edge - limits.undercut) for _, ring in cutouts_of(placement)]
    away = limits.hole_copper - limits.undercut
    rings += [
        Ring.circle(h.x, h.y, math.ceil(h.diameter / 2) + away) for h in placement.holes if not h.plated
    ]
    return rings


def _wider(ring: Ring, distance: int) -> Ring:
    """Return an outline moved outwards, by polygons where it has arcs of its own."""
    if ring.is_straight or len(ring.points) == 2:
        return offset_ring(ring, distance)
    return rings_of(pieces(grow(ring.polygon(), distance))[0])[0]


def _apart(polygons: list[shapely.Polygon], outline: shapely.Polygon, web: float) -> bool:
    """True when polygons keep a distance [nm] from the outline that they lie in and from each other."""
    inner = grow(outline, -web)
    tree = shapely.STRtree(polygons)
    first, second = tree.query(np.array(polygons, dtype=object), predicate="dwithin", distance=web)
    return bool((first == second).all()) and all(inner.contains(polygon) for polygon in polygons)


def _clockwise(ring: Ring) -> Ring:
    """Return a counter-clockwise outline the other way round, as a hole runs."""
    points = ring.points[::-1]
    if not ring.bulges:
        return Ring(points)
    bulges = ring.bulges[::-1]
    return Ring(points, tuple(-bulge for bulge in (*bulges[1:], bulges[0])))


def _shape(outline: Ring, holes: tuple[Ring, ...]) -> Shape:
    """Return one piece of the plane."""
    return Shape(layer="copper_bottom", outline=outline, holes=holes, net=GND, role="plane", origin=BOARD)
