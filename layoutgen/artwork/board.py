"""The board itself: its outline, cut-outs and drilled holes, as outlines and as areas to keep clear."""

from __future__ import annotations

import math

import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.artwork.limits import Limits
from layoutgen.artwork.records import Hole, Shape
from layoutgen.geometry import Ring, circumscribed, cut, grow, joined
from layoutgen.origin import Origin
from layoutgen.placement import PlacedPart, Placement

__all__ = [
    "BOARD",
    "GND",
    "OPEN",
    "board_area",
    "board_outline",
    "cutouts_of",
    "has_area",
    "hole_lands",
    "holes_of",
    "plane_area",
    "profile_shapes",
]

GND = "gnd"
OPEN = "open"
BOARD = Origin("board")


def board_outline(placement: Placement, inset: int = 0) -> Ring:
    """Return the board's outline moved inwards [nm], its rounded corners as true arcs."""
    x1, y1 = placement.width - inset, placement.height - inset
    radius = min(placement.corner_radius, placement.width // 2, placement.height // 2) - inset
    if radius <= 0:
        return Ring.box(inset, inset, x1, y1)
    a, b, c = inset + radius, x1 - radius, y1 - radius
    points = ((a, inset), (b, inset), (x1, a), (x1, c), (b, y1), (a, y1), (inset, c), (inset, a))
    return Ring(points, (0.0, math.tan(math.pi / 8.0)) * 4)


def board_area(placement: Placement, inset: int = 0, tolerance: float = 900.0) -> shapely.Polygon:
    """Return the board's area moved inwards [nm], its corners as chords inside the arcs."""
    return board_outline(placement, inset).polygon(tolerance)


def cutouts_of(placement: Placement) -> list[tuple[PlacedPart, Ring]]:
    """Return the parts that stand over a cut-out, each with it."""
    return [(part, part.cutout) for part in placement.parts.values() if part.cutout is not None]


def has_area(ring: Ring) -> bool:
    """True for a pad that is copper, and not a pin that meets the carrier."""
    return ring.polygon().area > 0.0


def holes_of(placement: Placement) -> tuple[Hole, ...]:
    """Return the drilled holes that are no vias; plated ones are joined to ground."""
    return tuple(
        Hole(
            x=hole.x,
            y=hole.y,
            diameter=hole.diameter,
            plated=hole.plated,
            net=GND if hole.plated else None,
            origin=hole.origin,
        )
        for hole in placement.holes
    )


def hole_lands(placement: Placement, limits: Limits) -> list[tuple[Ring, Origin]]:
    """Return the round lands of plated holes [nm]; screws in them reach ground on both sides."""
    return [
        (Ring.circle(hole.x, hole.y, math.ceil(hole.diameter / 2) + limits.hole_land), hole.origin)
        for hole in placement.holes
        if hole.plated
    ]


def plane_area(placement: Placement, limits: Limits, margin: int, tolerance: float) -> BaseGeometry:
    """Return where ground copper may be: the board inside a margin [nm], off cut-outs and bare holes.

    Args:
        placement: The placed board.
        limits: Distances to cut-outs and holes.
        margin: Distance from the profile [nm].
        tolerance: Largest distance of a chord from the board's rounded corners [nm].
    """
    clear = [grow(ring.polygon(), limits.edge) for _, ring in cutouts_of(placement)]
    clear += [
        circumscribed(hole.x, hole.y, math.ceil(hole.diameter / 2) + limits.hole_copper)
        for hole in placement.holes
        if not hole.plated
    ]
    return cut(board_area(placement, margin, tolerance), joined(clear))


def profile_shapes(placement: Placement) -> list[Shape]:
    """Return the outline of the board and of each cut-out."""
    shapes = [Shape(layer="profile", outline=board_outline(placement), role="profile", origin=BOARD)]
    shapes += [
        Shape(layer="profile", outline=ring, role="cutout", origin=part.origin)
        for part, ring in cutouts_of(placement)
    ]
    return shapes
