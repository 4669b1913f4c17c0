"""Where a via may stand: legal places, distances to other holes, and the book of those that were set."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from layoutgen.artwork.board import board_area, cutouts_of
from layoutgen.artwork.conductors import Conductor
from layoutgen.artwork.limits import Limits
from layoutgen.geometry import Point, Ring, circumscribed, cut, grow, joined, overlap
from layoutgen.placement import Placement

__all__ = ["Drills", "legal_area"]

_ROUNDING_NM = 1


def legal_area(
    placement: Placement,
    limits: Limits,
    pour: Sequence[shapely.Polygon],
    conductors: Sequence[Conductor],
    bare: Iterable[Ring],
) -> BaseGeometry:
    """Return where axes of pour vias may stand [nm]: the land inside the pour, all hole distances kept.

    Args:
        placement: The placed board.
        limits: Sizes and distances.
        pour: Finished pour.
        conductors: Signal copper, for the distance of hole walls to it.
        bare: Outlines of pads and lands free of mask; vias stay out of these openings.
    """
    radius = math.ceil(limits.via_drill / 2)
    land = math.ceil(limits.via_land / 2) + _ROUNDING_NM
    area = joined(grow(piece, -land) for piece in pour)
    inner = overlap(area, board_area(placement, limits.hole_edge + radius, 10_000.0))
    forbidden = [grow(ring.polygon(), limits.mask_expansion + land) for ring in bare]
    forbidden += [grow(ring.polygon(), limits.hole_edge + radius) for _, ring in cutouts_of(placement)]
    forbidden += [
        circumscribed(hole.x, hole.y, math.ceil(hole.diameter / 2) + limits.hole_web + radius)
        for hole in placement.holes
    ]
    wall = radius + limits.hole_copper
    forbidden += [grow(c.copper, wall, 5.0) for c in conductors if wall > c.gap + land]
    return cut(inner, joined(forbidden))


class Drills:
    """All vias set so far: answers what may stand where, and what stands near a point.

    A book of squares as wide as the largest distance that two vias must keep limits each answer to the
    squares about its place, so the time grows with the number of vias only.
    """

    def __init__(self, area: BaseGeometry, limits: Limits, placed: Iterable[tuple[int, int, int]]) -> None:
        """Start with the vias that came with the placement, each (x, y, drill) [nm]."""
        self.area = area
        shapely.prepare(area)
        self._limits = limits
        self._drill = limits.via_drill
        self.least_inset = math.ceil(limits.via_land / 2) + 2 * _ROUNDING_NM
        placed = tuple(placed)
        most = max((drill for _, _, drill in placed), default=0)
        self._square = max(limits.via_pitch, math.ceil((most + self._drill) / 2) + limits.hole_web, 1)
        self._book: dict[tuple[int, int], list[tuple[int, int, int]]] = {}
        self.added: list[Point] = []
        for x, y, drill in placed:
            self._enter(x, y, drill)

    def keep_off(self, areas: Iterable[BaseGeometry], distance: int) -> None:
        """Let no later via come nearer to any of the areas [nm] than a distance [nm], from its wall."""
        away = distance + math.ceil(self._drill / 2)
        self.area = cut(self.area, joined(grow(area, away) for area in areas))
        shapely.prepare(self.area)

    def _enter(self, x: int, y: int, drill: int) -> None:
        """Write a via into its square."""
        self._book.setdefault((x // self._square, y // self._square), []).append((x, y, drill))

    def axes(self) -> list[Point]:
        """Return the axes of all vias [nm], in order of place."""
        return sorted((x, y) for square in self._book.values() for x, y, _ in square)

    def near(self, x: float, y: float, distance: float) -> list[tuple[int, int, int]]:
        """Return the vias whose axes are within a distance [nm] of a point."""
        square, reach = self._square, math.ceil(distance / self._square)
        i, j = math.floor(x / square), math.floor(y / square)
        return [
            via
            for p in range(i - reach, i + reach + 1)
            for q in range(j - reach, j + reach + 1)
            for via in self._book.get((p, q), ())
            if (via[0] - x) ** 2 + (via[1] - y) ** 2 <= distance * distance
        ]

    def legal(self, xs: NDArray[np.float64], ys: NDArray[np.float64]) -> NDArray[np.bool_]:
        """Return for points [nm] whether they lie in the legal area."""
        return shapely.intersects_xy(self.area, xs, ys)

    def free(self, x: int, y: int) -> bool:
        """True when a via there keeps its distance to all others."""
        for ox, oy, drill in self.near(x, y, self._square):
            need = max(self._limits.via_pitch, math.ceil((drill + self._drill) / 2) + self._limits.hole_web)
            if (ox - x) ** 2 + (oy - y) ** 2 < need * need:
                return False
        return True

    def move(self, old: Point, x: float, y: float, reach: float) -> bool:
        """Move a via set here to the nearest whole nanometre if it may stand there; tell whether it does.

        It stays where it was the neighbour of a via within a reach [nm] that it would then be out of.
        """
        new = round(x), round(y)
        square = self._book.get((old[0] // self._square, old[1] // self._square), [])
        if old not in self.added or not shapely.intersects_xy(self.area, *new):
            return False
        near = [(vx, vy) for vx, vy, _ in self.near(*old, reach)]
        square.remove((*old, self._drill))
        if not self.free(*new) or any(math.dist(new, via) > reach for via in near if via != old):
            self._enter(*old, self._drill)
            return False
        self._enter(*new, self._drill)
        self.added[self.added.index(old)] = new
        return True

    def put(self, x: float, y: float) -> bool:
        """Set a via at the nearest whole nanometre if it may stand there; tell whether it does."""
        px, py = round(x), round(y)
        if not shapely.intersects_xy(self.area, px, py) or not self.free(px, py):
            return False
        self._enter(px, py, self._drill)
        self.added.append((px, py))
        return True
