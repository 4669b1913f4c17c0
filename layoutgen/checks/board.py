"""The board as the rules see it: finished copper by net, drilled holes, outline, mask and legend.

Polygons are shapely polygons in nanometres. Nets, roles and the artwork behind the board are optional, so that
a board can be built from drawings of other origin as well.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
import numpy.typing as npt
import shapely

from layoutgen.artwork import Artwork
from layoutgen.checks.facing import Edges, Places, edges_of, facing
from layoutgen.checks.limits import Limits
from layoutgen.checks.netgraph import clusters
from layoutgen.geometry import Point

__all__ = ["CHORD_NM", "CORNER_LIMITS", "TOLERANCE_NM", "Area", "Board", "Drill", "Layer", "Piece", "middle"]

CHORD_NM = 5.0
"""Largest distance of a chord from its arc in the polygons judged [nm]."""

TOLERANCE_NM = 10.0
"""What a distance may fall short of its limit [nm]: two chords, or two roundings to whole nanometres."""

CORNER_LIMITS = 3.5
"""Two places of one outline nearer to each other along it than this many limits are a corner [-]."""


@dataclass(frozen=True, slots=True, eq=False)
class Piece:
    """One piece of finished copper.

    ``net`` is the net written at it, ``node`` the nets that lines join into one (by one name), None when
    unknown; ``role`` as in :class:`~layoutgen.artwork.Shape`; ``item`` is the name used in findings.
    """

    polygon: shapely.Polygon
    item: str
    net: str | None = None
    node: str | None = None
    role: str | None = None


@dataclass(frozen=True, slots=True, eq=False)
class Area:
    """A mask opening, a legend stroke or a cut-out: polygon [nm] and the name used in findings."""

    polygon: shapely.Polygon
    item: str


@dataclass(frozen=True, slots=True)
class Drill:
    """A drilled hole: middle, diameter [nm], plated or not, net; ``land`` [nm] for vias, else None.

    ``item`` is ``via:N`` or ``hole:N``; ``purpose`` is a via's use, empty for other holes.
    """

    item: str
    x: float
    y: float
    diameter: float
    plated: bool
    net: str | None = None
    node: str | None = None
    land: float | None = None
    purpose: str = ""

    @property
    def at(self) -> Point:
        """The middle, in whole nanometres."""
        return round(self.x), round(self.y)

    @property
    def is_via(self) -> bool:
        """True for vias."""
        return self.land is not None


@dataclass(frozen=True, eq=False)
class Layer:
    """The copper of one layer, and what rules ask of it over and over."""

    name: str
    pieces: tuple[Piece, ...]

    @cached_property
    def polygons(self) -> npt.NDArray[np.object_]:
        """The pieces' polygons, in their order."""
        return _array([piece.polygon for piece in self.pieces])

    @cached_property
    def tree(self) -> shapely.STRtree:
        """Tree over the pieces."""
        return shapely.STRtree(self.polygons)

    @cached_property
    def nodes(self) -> npt.NDArray[np.intp]:
        """Each piece's node as a number; pieces without one have a negative number each of their own."""
        names = {name: k for k, name in enumerate(dict.fromkeys(p.node for p in self.pieces if p.node is not None))}
        return np.array(
            [names[p.node] if p.node is not None else -1 - k for k, p in enumerate(self.pieces)], dtype=np.intp
        )

    @cached_property
    def touching(self) -> npt.NDArray[np.intp]:
        """Index pairs (M, 2), first below second, of pieces that touch or overlap."""
        i, j = self.tree.query(self.polygons, predicate="intersects")
        return np.stack((i[i < j], j[i < j]), axis=1)

    @cached_property
    def merged(self) -> npt.NDArray[np.object_]:
        """The copper as disjoint polygons: pieces that touch are one."""
        return merge(self.polygons, self.touching)

    @cached_property
    def edges(self) -> Edges:
        """The outlines of the merged copper."""
        return edges_of(self.merged)

    def slits(self, limit: float) -> Places:
        """Return the places where copper faces copper across less than a limit [nm], corners left out."""
        return facing(self.edges, limit - TOLERANCE_NM, CORNER_LIMITS * limit, across_copper=False)

    def necks(self, limit: float) -> Places:
        """Return the places where copper is narrower than a limit [nm], corners left out."""
        return facing(self.edges, limit - TOLERANCE_NM, CORNER_LIMITS * limit, across_copper=True)

    def owners(self, points: npt.NDArray[np.float64], reach: float = TOLERANCE_NM) -> list[int]:
        """Return for each point (N, 2) [nm] of an outline the smallest piece within reach [nm], -1 for none."""
        best = [-1] * len(points)
        spots, found = self.tree.query(shapely.points(points), predicate="dwithin", distance=reach)
        for spot, piece in sorted(zip(spots.tolist(), found.tolist(), strict=True)):
            if best[spot] < 0 or self.polygons[piece].area < self.polygons[best[spot]].area:
                best[spot] = piece
        return best


@dataclass(frozen=True, kw_only=True, eq=False)
class Board:
    """Everything the rules look at.

    ``outline`` is the board without its cut-outs (None when the drawing has no profile); ``height`` and
    ``thickness`` [nm] are the substrate's and the copper's, None when unknown; ``artwork`` is the drawing
    with all that it came from, None for drawings of other origin.
    """

    limits: Limits
    top: Layer
    bottom: Layer
    drills: tuple[Drill, ...]
    outline: shapely.Polygon | None
    cutouts: tuple[Area, ...] = ()
    openings: tuple[Area, ...] = ()
    legend: tuple[Area, ...] = ()
    height: float | None = None
    thickness: float | None = None
    artwork: Artwork | None = None

    @property
    def layers(self) -> tuple[Layer, Layer]:
        """Both copper layers, top first."""
        return self.top, self.bottom

    @cached_property
    def vias(self) -> tuple[Drill, ...]:
        """The drilled holes that are vias."""
        return tuple(drill for drill in self.drills if drill.is_via)

    @cached_property
    def drill_points(self) -> npt.NDArray[np.object_]:
        """The axes of all drilled holes as points."""
        return _points([(drill.x, drill.y) for drill in self.drills])

    @cached_property
    def drill_tree(self) -> shapely.STRtree:
        """Tree over the axes of all drilled holes."""
        return shapely.STRtree(self.drill_points)

    @cached_property
    def drill_radii(self) -> npt.NDArray[np.float64]:
        """Radii of all drilled holes [nm]."""
        return np.array([drill.diameter / 2.0 for drill in self.drills], dtype=np.float64)


def merge(polygons: npt.NDArray[np.object_], pairs: npt.NDArray[np.intp]) -> npt.NDArray[np.object_]:
    """Return disjoint polygons: the union of those that the index pairs join, the others as they are."""
    label = clusters(len(polygons), pairs)
    order = np.argsort(label, kind="stable")
    bounds = np.flatnonzero(np.diff(label[order])) + 1
    out: list[shapely.Polygon] = []
    for group in np.split(order, bounds) if len(order) else ():
        joined = polygons[group[0]] if len(group) == 1 else shapely.union_all(polygons[group])
        out.extend(parts(joined))
    return _array(out)


def parts(geometry: shapely.Geometry) -> list[shapely.Polygon]:
    """Return the polygons that a geometry is made of; points and lines are dropped."""
    pieces = shapely.get_parts(shapely.get_parts(geometry))
    return [piece for piece in pieces if piece.geom_type == "Polygon" and not piece.is_empty]


def middle(a: shapely.Geometry, b: shapely.Geometry) -> Point:
    """Return the middle of the shortest connection of two geometries [nm]; of their overlap when they meet."""
    if a.intersects(b):
        shared = a.intersection(b)
        largest = max(shapely.get_parts(shared), key=lambda part: (part.area, part.length))
        inside = largest.centroid if largest.intersects(largest.centroid) else largest.representative_point()
        return whole(inside.x, inside.y)
    (ax, ay), (bx, by) = shapely.get_coordinates(shapely.shortest_line(a, b)).tolist()
    return whole((ax + bx) / 2.0, (ay + by) / 2.0)


def whole(x: float, y: float) -> Point:
    """Return a point in whole nanometres."""
    return math.floor(x + 0.5), math.floor(y + 0.5)


def by_item(pieces: Sequence[Piece], roles: Sequence[str]) -> Mapping[str, list[Piece]]:
    """Return the pieces of some roles by their item, in drawing order."""
    found: dict[str, list[Piece]] = {}
    for piece in pieces:
        if piece.role in roles:
            found.setdefault(piece.item, []).append(piece)
    return found


def _array(items: Sequence[shapely.Geometry]) -> npt.NDArray[np.object_]:
    """Return geometries as an array of objects, also when there are none."""
    out = np.empty(len(items), dtype=object)
    out[:] = items
    return out


def _points(places: Sequence[tuple[float, float]]) -> npt.NDArray[np.object_]:
    """Return points as an array of objects, also when there are none."""
    return _array(list(shapely.points(places)) if places else [])
