"""Measures on finished artwork, written apart from the code that draws it: plain shapely, nothing shared."""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterable, Iterator

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.artwork import Artwork, Shape


def polygon(shape: Shape, undercut: float = 0.0, tolerance: float = 900.0) -> BaseGeometry:
    """Return a shape's finished area [nm], arcs as chords within a tolerance."""
    drawn = shapely.Polygon(shape.outline.chords(tolerance), [hole.chords(tolerance) for hole in shape.holes])
    return drawn.buffer(-undercut, join_style="mitre", mitre_limit=5.0) if undercut else drawn


def undercut_of(artwork: Artwork) -> float:
    """Return by how much each edge of the artwork lies outside the finished copper [nm]."""
    copper = artwork.placement.sized.circuit.rules.copper
    return 0.0 if copper.undercut is None else copper.undercut * 1e9


def areas(
    artwork: Artwork,
    *roles: str,
    layer: str = "copper_top",
    undercut: float = 0.0,
    tolerance: float = 900.0,
) -> list[BaseGeometry]:
    """Return the finished areas of all shapes of some roles on a layer [nm]."""
    return [polygon(s, undercut, tolerance) for s in artwork.on(layer) if s.role in roles]


def ground(artwork: Artwork, undercut: float = 0.0) -> BaseGeometry:
    """Return the whole ground copper of the top side [nm]."""
    return shapely.union_all([polygon(s, undercut) for s in artwork.on("copper_top") if s.net == "gnd"])


def signal(artwork: Artwork, undercut: float = 0.0) -> BaseGeometry:
    """Return all copper of the top side that is not on ground [nm]."""
    return shapely.union_all([polygon(s, undercut) for s in artwork.on("copper_top") if s.net != "gnd"])


def corners(shape: BaseGeometry, shortest: float) -> Iterator[tuple[float, tuple[float, float]]]:
    """Yield the angle of the empty notch at each inside corner [deg], short edges smoothed."""
    for part in shapely.get_parts(shapely.simplify(shape, shortest)):
        oriented = shapely.geometry.polygon.orient(part)
        for ring in (oriented.exterior, *oriented.interiors):
            points = np.asarray(ring.coords)[:-1]
            for a, b, c in zip(np.roll(points, 1, axis=0), points, np.roll(points, -1, axis=0), strict=True):
                (ux, uy), (vx, vy) = (b - a).tolist(), (c - b).tolist()
                turn = math.degrees(math.atan2(ux * vy - uy * vx, ux * vx + uy * vy))
                if turn < 0.0:
                    yield 180.0 + turn, (float(b[0]), float(b[1]))


def too_thin(shape: BaseGeometry, width: float) -> BaseGeometry:
    """Return what a disc of a diameter cannot reach [nm], without the bits in corners."""
    opened = shape.buffer(-width / 2.0).buffer(width / 2.0 * 1.02)
    left = shapely.difference(shape, opened)
    return shapely.union_all([p for p in shapely.get_parts(left) if p.area > 0.25 * width * width])


def nearest_pair(points: Iterable[tuple[int, int]]) -> float:
    """Return the least distance of two of the points [nm]."""
    return min((math.dist(a, b) for a, b in itertools.combinations(points, 2)), default=math.inf)
