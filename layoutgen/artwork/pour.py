"""The ground pour: what is left of the top side beside the signal copper, cleaned until it can be made.

The signal copper itself is never changed here. The pour keeps each line's own distance everywhere: its edges
are those of the lines' bands, so corners are square and the gap is even.
"""

from __future__ import annotations

import math
from collections.abc import Sequence

import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.artwork.board import GND, has_area, hole_lands, plane_area
from layoutgen.artwork.conductors import Conductor
from layoutgen.artwork.limits import Limits
from layoutgen.geometry import (
    Ring,
    circumscribed,
    closed,
    cut,
    grow,
    joined,
    opened,
    overlap,
    pieces,
    sharpened,
)
from layoutgen.origin import Origin
from layoutgen.placement import Placement

__all__ = ["ground_pieces", "own_ground", "pour_of", "washed", "without_necks"]

_CORNER_CHORD_NM = 20_000.0
_WASH_NM = 20
_SHORT_NM = 50.0
_NECK_ROUND = 12.0
_NECK_FILLED = 0.5
_MOST_STEPS = 4


def ground_pieces(placement: Placement, limits: Limits) -> list[tuple[str, Ring, Origin]]:
    """Return the ground copper of parts, lines, plated holes, finished: role, outline, origin; no vias."""
    pads = [
        ("pad", pad.outline, part.origin)
        for part in placement.parts.values()
        for pad in part.pads
        if pad.net == GND and has_area(pad.outline)
    ]
    pads += [("ground", ring, origin) for ring, origin in placement.ground_shapes]
    return pads + [("land", ring, origin) for ring, origin in hole_lands(placement, limits)]


def own_ground(placement: Placement, limits: Limits) -> BaseGeometry:
    """Return the ground copper that came with parts and lines [nm]: pads, pieces, lands of vias."""
    flat = [ring for role, ring, _ in ground_pieces(placement, limits) if role != "land"]
    shapes: list[BaseGeometry] = [ring.polygon() for ring in flat]
    shapes += [circumscribed(v.x, v.y, v.land / 2, 48) for v in placement.vias if v.net == GND]
    shapes += [
        circumscribed(hole.x, hole.y, math.ceil(hole.diameter / 2) + limits.hole_land, 48)
        for hole in placement.holes
        if hole.plated
    ]
    return joined(shapes)


def pour_of(placement: Placement, limits: Limits, conductors: Sequence[Conductor]) -> list[shapely.Polygon]:
    """Return the finished pour [nm], piece by piece, before vias decide which pieces stay.

    Nothing of it is narrower than twice ``limits.row`` (pads and lands on ground count as part of it), no gap
    in it is narrower than ``limits.min_gap``, and sharp corners are cut off.
    """
    board = plane_area(placement, limits, limits.margin, _CORNER_CHORD_NM)
    allowed = cut(board, _keepout(placement, limits, conductors))
    own = own_ground(placement, limits)
    filled = overlap(closed(joined([allowed, own]), limits.min_gap / 2.0), allowed)
    spaced = _spaced(filled, own, limits)
    solid = without_necks(spaced, own, limits.row, limits)
    return washed(solid, allowed, limits)


def washed(copper: BaseGeometry, allowed: BaseGeometry, limits: Limits) -> list[shapely.Polygon]:
    """Return copper [nm] piece by piece, without what roundings left at its corners and without islands."""
    smooth = overlap(opened(copper, _WASH_NM), allowed)
    return [sharpened(piece, _SHORT_NM) for piece in pieces(smooth) if piece.area >= limits.island]


def without_necks(pour: BaseGeometry, own: BaseGeometry, row: float, limits: Limits) -> BaseGeometry:
    """Return ground copper without fins, and without necks too narrow to be etched.

    What is narrower than twice ``row`` goes, but for short necks, which come back as they were: a cut
    through one would be a slit with sharp ends. A neck narrower than the least width is cut through squarely.

    Args:
        pour: The copper [nm].
        own: Other ground copper that counts as part of it and stays as it is [nm].
        row: Half of the width wanted [nm].
        limits: The least width and gap.
    """
    wide = opened(joined([pour, own]), row)
    healed = overlap(joined([wide, *_short_necks(pour, wide, row)]), pour)
    thin = _thin_necks(joined([healed, own]), limits.neck)
    if not thin:
        return healed
    apart = cut(healed, joined(shapely.box(*grow(neck, limits.min_gap).bounds) for neck in thin))
    return overlap(opened(joined([apart, own]), row), apart)


def _short_necks(pour: BaseGeometry, wide: BaseGeometry, row: float) -> list[shapely.Polygon]:
    """Return what opening took off the pour between places that lie near each other.

    Such a piece fills the hollow between its contacts with what is left; a fin stands out from one contact.
    """
    lost = [piece for piece in pieces(cut(pour, wide)) if piece.length < _NECK_ROUND * row]
    return [piece for piece in lost if _fills_hollow(piece, wide)]


def _fills_hollow(piece: shapely.Polygon, rest: BaseGeometry) -> bool:
    """True when most of a piece lies between the places where it touches the rest."""
    contact = overlap(piece.buffer(_WASH_NM), rest)
    return overlap(piece, contact.convex_hull).area >= _NECK_FILLED * piece.area


def _thin_necks(copper: BaseGeometry, radius: float) -> list[shapely.Polygon]:
    """Return where a disc cannot pass from one part of the copper to the other; corners do not count."""
    passed = shapely.buffer(shapely.buffer(copper, -radius), radius)
    left = pieces(shapely.difference(copper, passed))
    return [piece for piece in left if len(pieces(overlap(passed, piece.buffer(_WASH_NM)))) > 1]


def _keepout(placement: Placement, limits: Limits, conductors: Sequence[Conductor]) -> BaseGeometry:
    """Return all that the pour stays out of beside the board's own limits."""
    shapes = [piece.keepout for piece in conductors]
    reach = max(limits.hole_copper, limits.min_gap)
    shapes += [
        circumscribed(v.x, v.y, max(math.ceil(v.drill / 2) + reach, math.ceil(v.land / 2) + limits.min_gap))
        for v in placement.vias
        if v.net != GND
    ]
    return joined(shapes)


def _spaced(pour: BaseGeometry, own: BaseGeometry, limits: Limits) -> BaseGeometry:
    """Return the pour stepped back where it ends just short of ground copper of a part.

    Such a slot can be neither etched nor, being within a line's distance, filled. About it the pour keeps the
    least gap to that copper; should that leave another slot, it is looked for again, a few times.
    """
    away = grow(own, limits.min_gap)
    for _ in range(_MOST_STEPS):
        both = joined([pour, own])
        slots = pieces(cut(closed(both, limits.min_gap / 2.0), both))
        real = [slot for slot in slots if slot.area > _WASH_NM * limits.min_gap]
        if not real:
            break
        about = joined(shapely.box(*grow(slot, limits.min_gap).bounds) for slot in real)
        pour = cut(pour, overlap(away, about))
    return pour
