"""Slits between the lands of ground vias that stand nearer to each other than the least gap: filled.

The pour fills such slits where it may come; between parts that stand close to a line it may not, although
their vias, being the parts' own, stand there. Both are one net, so a bridge as wide as a land joins the two.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Sequence
from dataclasses import replace
from functools import partial

import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.artwork.board import GND, board_area, cutouts_of
from layoutgen.artwork.conductors import Conductor
from layoutgen.artwork.limits import Limits
from layoutgen.geometry import Ring, cut, joined, stroke
from layoutgen.placement import PlacedVia, Placement

__all__ = ["with_bridges"]

_ROUNDING_NM = 2
_NEARER_NM = 1_000  # by which a bridge may come nearer to signal copper than the lands that it joins
_LEAST_SLIT = 0.02  # of the square of the least gap [-]: smaller ones are what roundings leave


def with_bridges(
    placement: Placement, limits: Limits, conductors: Sequence[Conductor], ground: BaseGeometry
) -> Placement:
    """Return a placed board with bridges over the slits between lands that its pour leaves open.

    A bridge keeps the least gap to signal copper, and comes no nearer to it than the lands do, if these stand
    within the pour's usual distance.

    Args:
        placement: The placed board.
        limits: Sizes and distances.
        conductors: Signal copper.
        ground: All ground copper as it is, finished.
    """
    pairs = list(_near_lands(placement, limits))
    if not pairs:
        return placement
    signal = joined(piece.copper for piece in conductors)
    bridges = []
    for a, b in pairs:
        ring = stroke([(a.x, a.y), (b.x, b.y)], min(a.land, b.land))
        gap = cut(ring.polygon(), ground)
        is_slit = gap.area > _LEAST_SLIT * limits.min_gap**2
        if is_slit and _is_legal(ring, (a, b), placement, limits, signal):
            bridges.append((ring, a.origin))
    grounds = (*placement.ground_shapes, *bridges)
    return replace(placement, ground_shapes=grounds) if bridges else placement


def _near_lands(placement: Placement, limits: Limits) -> Iterator[tuple[PlacedVia, PlacedVia]]:
    """Yield the pairs of ground vias whose lands lie apart, but by less than the least gap."""
    vias = sorted((via for via in placement.vias if via.net == GND), key=lambda via: (via.x, via.y))
    reach = max((via.land for via in vias), default=0) + limits.min_gap
    for i, a in enumerate(vias):
        near = itertools.takewhile(partial(_is_west_of, a.x + reach), vias[i + 1 :])
        for b in near:
            apart = math.dist((a.x, a.y), (b.x, b.y)) - (a.land + b.land) / 2.0
            if 0.0 < apart < limits.min_gap:
                yield a, b


def _is_west_of(x: int, via: PlacedVia) -> bool:
    """True for a via whose axis lies west of a line [nm]."""
    return via.x < x


def _is_legal(
    ring: Ring,
    vias: Sequence[PlacedVia],
    placement: Placement,
    limits: Limits,
    signal: BaseGeometry,
) -> bool:
    """True when a bridge keeps its distance from signal copper, cut-outs, drilled holes and the profile."""
    bridge = ring.polygon()
    lands = min(float(signal.distance(shapely.Point(via.x, via.y))) - via.land / 2.0 for via in vias)
    lands = min(lands - _NEARER_NM, limits.default_gap)
    off = max(limits.min_gap, limits.mask_expansion, lands) + _ROUNDING_NM
    cutouts = joined(outline.polygon() for _, outline in cutouts_of(placement))
    holes = (
        bridge.distance(shapely.Point(hole.x, hole.y)) >= hole.diameter / 2.0 + limits.hole_copper
        for hole in placement.holes
        if not hole.plated
    )
    return (
        bool(bridge.distance(signal) >= off)
        and board_area(placement, limits.margin).contains(bridge)
        and (cutouts.is_empty or bridge.distance(cutouts) >= limits.edge)
        and all(holes)
    )
