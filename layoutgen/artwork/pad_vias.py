"""Vias beside ground pads that are too small for as many as the rule file asks for.

An exposed pad takes its vias inside. One that has no room for ``vias.per_ground_pad`` of them gets the others
beside it, outside its mask opening, so that no solder runs into them: joined to it by copper at least as wide
as a land, on the side where signal copper is farthest, and only where every rule is kept.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.artwork.board import GND, board_area, cutouts_of, has_area
from layoutgen.artwork.conductors import Conductor
from layoutgen.artwork.limits import Limits
from layoutgen.artwork.mask import soldered_pads
from layoutgen.geometry import Point, Ring, grow, joined
from layoutgen.placement import PlacedPad, PlacedPart, PlacedVia, Placement

__all__ = ["with_pad_vias"]

_AWAY_NM = 50_000  # of a land from a pad's mask opening
_OVERLAP_NM = 10_000  # of copper pushed under a pad
_STEP_NM = 100_000
_ALIKE_NM = 50_000.0  # distances to signal copper that differ by less are alike


@dataclass(frozen=True, slots=True)
class _Spot:
    """A place for a via beside a pad, the copper that joins the two, how far off the nearest it is [nm]."""

    at: Point
    copper: Ring
    off: int


def with_pad_vias(placement: Placement, limits: Limits, conductors: Sequence[Conductor]) -> Placement:
    """Return a placed board with the vias that its exposed ground pads lack, as far as there is room.

    Args:
        placement: The placed board.
        limits: Sizes and distances.
        conductors: Signal copper.
    """
    wanted = placement.sized.circuit.rules.vias.per_ground_pad or 0
    room = None
    for part, pad in soldered_pads(placement):
        missing = wanted - len(_own_vias(placement, part, pad)) if _takes_vias(pad) else 0
        for _ in range(missing):
            room = room or _Room(placement, limits, conductors)
            spot = room.best(pad)
            if spot is not None:
                placement = _with_via(placement, limits, part, spot)
                room = replace(room, placement=placement)
    return placement


def _takes_vias(pad: PlacedPad) -> bool:
    """True for a pad whose vias stand inside it."""
    return pad.net == GND and pad.ground == "vias" and has_area(pad.outline)


def _own_vias(placement: Placement, part: PlacedPart, pad: PlacedPad) -> list[PlacedVia]:
    """Return the vias of a part that stand in one of its pads."""
    area = pad.outline.polygon()
    vias = [via for via in placement.vias if via.purpose == f"part:{part.name}"]
    return [via for via in vias if area.intersects(shapely.Point(via.x, via.y))]


def _with_via(placement: Placement, limits: Limits, part: PlacedPart, spot: _Spot) -> Placement:
    """Return the board with one more via of a part, after the others of that part, and its copper."""
    purpose = f"part:{part.name}"
    via = PlacedVia(
        x=spot.at[0],
        y=spot.at[1],
        drill=limits.via_drill,
        land=limits.via_land,
        net=GND,
        purpose=purpose,
        origin=part.origin,
    )
    behind = max((i + 1 for i, other in enumerate(placement.vias) if other.purpose == purpose), default=0)
    vias = (*placement.vias[:behind], via, *placement.vias[behind:])
    grounds = (*placement.ground_shapes, (spot.copper, part.origin))
    return replace(placement, vias=vias, ground_shapes=grounds)


@dataclass(frozen=True, slots=True, eq=False)
class _Room:
    """Judges places for a via on a board."""

    placement: Placement
    limits: Limits
    conductors: Sequence[Conductor]

    def best(self, pad: PlacedPad) -> _Spot | None:
        """Return the best place for a via beside a pad, None where there is none."""
        reach = max(math.dist((pad.x, pad.y), point) for point in pad.outline.points)
        reach += 4 * self.limits.via_land + 2 * self.limits.via_pitch
        near = grow(
            shapely.Point(pad.x, pad.y).buffer(1.0), reach + max((c.gap for c in self.conductors), default=0)
        )
        signal = joined(c.copper for c in self.conductors if c.copper.intersects(near))
        legal = [spot for spot in _spots(pad, self.limits) if self._is_legal(pad, spot, signal)]
        outlines = joined(part.outline.polygon() for part in self.placement.parts.values())

        def rank(spot: _Spot) -> tuple[float, bool, int, Point]:
            away = min(float(spot.copper.polygon().distance(signal)), float(self.limits.default_gap))
            under = bool(outlines.intersects(shapely.Point(spot.at)))
            return -math.floor(away / _ALIKE_NM), under, spot.off, spot.at

        return min(legal, key=rank, default=None)

    def _is_legal(self, pad: PlacedPad, spot: _Spot, signal: BaseGeometry) -> bool:
        """True when a via and its copper keep every rule."""
        limits = self.limits
        axis, copper = shapely.Point(spot.at), spot.copper.polygon()
        radius, land = limits.via_drill / 2.0, limits.via_land / 2.0
        return (
            copper.distance(signal) >= limits.min_gap + 2
            and axis.distance(signal) >= max(radius + limits.hole_copper, land + limits.min_gap) + 2
            and self._is_on_board(axis, copper)
            and self._is_off_holes(spot.at)
            and self._is_off_openings(pad, axis, copper)
        )

    def _is_on_board(self, axis: shapely.Point, copper: shapely.Polygon) -> bool:
        """True when hole and copper keep their distances from the profile and from cut-outs."""
        limits = self.limits
        inside = math.ceil(limits.hole_edge + limits.via_drill / 2)
        cutouts = joined(ring.polygon() for _, ring in cutouts_of(self.placement))
        return (
            board_area(self.placement, limits.margin).contains(copper)
            and board_area(self.placement, inside).contains(axis)
            and (
                cutouts.is_empty
                or (axis.distance(cutouts) >= inside and copper.distance(cutouts) >= limits.edge)
            )
        )

    def _is_off_holes(self, at: Point) -> bool:
        """True when a via keeps its distance from other holes, drilled or plated."""
        limits = self.limits
        vias = (
            math.dist(at, (via.x, via.y))
            >= max(limits.via_pitch, (via.drill + limits.via_drill) / 2 + limits.hole_web)
            for via in self.placement.vias
        )
        holes = (
            math.dist(at, (hole.x, hole.y))
            >= (hole.diameter + limits.via_drill) / 2
            + max(limits.hole_web, limits.hole_copper)
            + limits.via_land / 2
            for hole in self.placement.holes
        )
        return all(vias) and all(holes)

    def _is_off_openings(self, pad: PlacedPad, axis: shapely.Point, copper: shapely.Polygon) -> bool:
        """True when the land is under no pad's mask opening, and the copper in that of no other pad."""
        limits = self.limits
        for _, other in soldered_pads(self.placement):
            area = other.outline.polygon()
            if axis.distance(area) < limits.mask_expansion + limits.via_land / 2:
                return False
            if other is not pad and copper.distance(area) < max(limits.mask_expansion, limits.min_gap):
                return False
        return True


def _spots(pad: PlacedPad, limits: Limits) -> Iterator[_Spot]:
    """Yield places beside all four sides of a pad, clear of its mask opening."""
    ring = pad.outline.points
    least = limits.mask_expansion + limits.via_land // 2 + _AWAY_NM
    for start, end in itertools.pairwise((*ring, ring[0])):
        most = (round(math.dist(start, end) / 2.0) + limits.via_pitch) // _STEP_NM
        for k, more in itertools.product(range(-most, most + 1), range(0, limits.via_pitch, _STEP_NM // 2)):
            yield _spot(start, end, (least + more, k * _STEP_NM), limits.via_land // 2)


def _spot(start: Point, end: Point, place: tuple[int, int], half: int) -> _Spot:
    """Return a place by one side of a pad.

    Args:
        start: The side's first corner [nm], the pad's outside on the right.
        end: Its second corner [nm].
        place: How far out, and how far on from the side's middle [nm].
        half: Half of a land's diameter [nm].
    """
    (ax, ay), (bx, by), (out, aside) = start, end, place
    side = math.dist(start, end)
    vx, vy = (bx - ax) / side, (by - ay) / side

    def world(u: float, v: float) -> Point:
        return round((ax + bx) / 2.0 + u * vy + v * vx), round((ay + by) / 2.0 - u * vx + v * vy)

    touching = min(round(side / 2.0), half)
    low, high = min(-touching, aside - half), max(touching, aside + half)
    corners = ((-_OVERLAP_NM, low), (out + half, low), (out + half, high), (-_OVERLAP_NM, high))
    return _Spot(world(out, aside), Ring(tuple(world(u, v) for u, v in corners)), out + 2 * abs(aside))
