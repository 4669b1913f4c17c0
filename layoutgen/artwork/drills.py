"""Where a via may stand: legal places, distances to other holes, and the book of those that were set."""

from __future__ import annotations

import itertools
import math
from collections.abc import Collection, Iterable, Sequence

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from layoutgen.artwork.attitude import Attitude
from layoutgen.artwork.board import board_area, cutouts_of
from layoutgen.artwork.conductors import Conductor
from layoutgen.artwork.limits import Limits
from layoutgen.geometry import Point, Ring, circumscribed, cut, grow, joined, overlap
from layoutgen.placement import Placement

__all__ = ["Drills", "legal_area", "symmetries_of"]

_ROUNDING_NM = 1
_ONTO_AXIS_NM = 100_000  # apart: a via and its image are then one
_ALIKE_NM = 1.0  # by which outlines may differ in the mean


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


def symmetries_of(
    area: BaseGeometry, placed: Collection[tuple[int, int, int]], size: tuple[int, int]
) -> tuple[Attitude, ...]:
    """Return the movements, rest left out, of a board's pour and its placed vias onto themselves.

    Args:
        area: Where axes of pour vias may stand [nm].
        placed: The vias that are there, each (x, y, drill) [nm].
        size: The board's width and height [nm].
    """
    movements = (Attitude(*size, quarters, mirrored) for quarters in (0, 2) for mirrored in (True, False))
    return tuple(by for by in movements if not by.is_rest and _is_own_image(area, placed, by))


def _is_own_image(area: BaseGeometry, placed: Collection[tuple[int, int, int]], by: Attitude) -> bool:
    """True when pour and vias come to lie on themselves, to the roundings of booleans."""
    if area.is_empty or {(*by.point((x, y)), drill) for x, y, drill in placed} != set(placed):
        return False
    apart = shapely.symmetric_difference(area, by.geometry(area))
    return bool(apart.area <= _ALIKE_NM * area.length)


class Drills:
    """All vias set so far: answers what may stand where, and what stands near a point.

    A book of squares as wide as the largest distance that two vias must keep limits each answer to the
    squares about its place, so the time grows with the number of vias only.
    """

    def __init__(
        self,
        area: BaseGeometry,
        limits: Limits,
        placed: Iterable[tuple[int, int, int]],
        symmetries: tuple[Attitude, ...] = (),
    ) -> None:
        """Start with the vias that came with the placement.

        Args:
            area: Where axes may stand [nm].
            limits: Sizes and distances.
            placed: The vias that are there, each (x, y, drill) [nm].
            symmetries: Movements of the board onto itself: a via is set with its images.
        """
        self._symmetries = symmetries
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

    @property
    def is_symmetric(self) -> bool:
        """True when vias are set with their images."""
        return bool(self._symmetries)

    @property
    def apart(self) -> int:
        """The least distance of the axes of two vias that are set here [nm]."""
        return max(self._limits.via_pitch, self._drill + self._limits.hole_web)

    def take(self, vias: Iterable[Point]) -> list[Point]:
        """Take vias away that were set here [nm], and their images; return all that were taken."""
        taken = [
            via
            for via in dict.fromkeys(both for at in vias for both in self._images(at))
            if via in self.added
        ]
        for x, y in taken:
            self.added.remove((x, y))
            self._book[x // self._square, y // self._square].remove((x, y, self._drill))
        return taken

    def give(self, vias: Iterable[Point]) -> None:
        """Set vias back that were taken away [nm]."""
        for x, y in vias:
            self._enter(x, y, self._drill)
            self.added.append((x, y))

    def put(self, x: float, y: float) -> bool:
        """Set a via at the nearest whole nanometre if it may stand there; tell whether it does.

        On a symmetric board its images are set as well, where all may stand; near an axis it goes onto it.
        """
        images = self._images(self._onto_axes((round(x), round(y))))
        legal = self.legal(*np.array(images, dtype=np.float64).T)
        if not legal.all() or not all(self.free(*image) for image in images):
            return False
        if any(math.dist(a, b) < self.apart for a, b in itertools.combinations(images, 2)):
            return False
        self.give(images)
        return True

    def _images(self, at: Point) -> list[Point]:
        """Return a place and its images on a symmetric board, each once."""
        return list(dict.fromkeys([at, *(by.point(at) for by in self._symmetries)]))

    def _onto_axes(self, at: Point) -> Point:
        """Return a place moved onto the axes and middles of symmetry that it lies near."""
        for by in self._symmetries:
            x, y = by.point(at)
            if math.dist(at, (x, y)) <= _ONTO_AXIS_NM:
                at = (at[0] + x) // 2, (at[1] + y) // 2
        return at
