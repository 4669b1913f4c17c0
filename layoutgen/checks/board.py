"""The board as the rules see it: finished copper by net, drilled holes, outline, mask and legend.

Polygons are shapely polygons in nanometres. Nets, roles and the artwork behind the board are optional, so
that a board can be built from drawings of other origin as well.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
import numpy.typing as npt
import shapely

from layoutgen.artwork import Artwork
from layoutgen.checks.facing import Edges, Places, edges_of, facing
from layoutgen.checks.limits import Limits
from layoutgen.checks.nodes import GROUND
from layoutgen.checks.planar import CORNER_LIMITS, TOLERANCE_NM, Geometry, array_of, merge, points_of
from layoutgen.checks.sheet import Sheets, sheets_of
from layoutgen.geometry import Point

__all__ = ["Area", "Board", "Drill", "Layer", "Piece"]


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
        return array_of([piece.polygon for piece in self.pieces])

    @cached_property
    def tree(self) -> shapely.STRtree:
        """Tree over the pieces."""
        return shapely.STRtree(self.polygons)

    @cached_property
    def nodes(self) -> npt.NDArray[np.intp]:
        """Each piece's node as a number; pieces without one have a negative number each of their own."""
        names = {
            name: k for k, name in enumerate(dict.fromkeys(p.node for p in self.pieces if p.node is not None))
        }
        return np.array(
            [names[p.node] if p.node is not None else -1 - k for k, p in enumerate(self.pieces)],
            dtype=np.intp,
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

    @cached_property
    def pinches(self) -> npt.NDArray[np.float64]:
        """Points (N, 2) [nm] where outlines of the merged copper meet: nothing is wide there."""
        x, y = self.edges.start.T
        order = np.lexsort((y, x))
        x, y = x[order], y[order]
        return np.asarray(self.edges.start[order[1:][(x[1:] == x[:-1]) & (y[1:] == y[:-1])]])

    def owners(self, points: npt.NDArray[np.float64], reach: float = TOLERANCE_NM) -> list[int]:
        """Return for each point (N, 2) [nm] the smallest piece within reach [nm], -1 for none."""
        best = [-1] * len(points)
        spots, found = self.tree.query(shapely.points(points), predicate="dwithin", distance=reach)
        for spot, piece in sorted(zip(spots.tolist(), found.tolist(), strict=True)):
            if best[spot] < 0 or self.polygons[piece].area < self.polygons[best[spot]].area:
                best[spot] = piece
        return best

    def nearest_item(self, x: float, y: float) -> str:
        """Return the item of the piece nearest to a point [nm], ``board`` where there is no copper."""
        nearest = self.tree.query_nearest(shapely.Point(x, y))
        return self.pieces[int(nearest.min())].item if len(nearest) else "board"


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
    def sheets(self) -> Sheets:
        """The direct current in every piece of copper off gnd, solved once for all rules."""
        return sheets_of(self)

    @cached_property
    def plane(self) -> Geometry:
        """The bottom copper on gnd, prepared for many questions; empty where there is none."""
        plane = shapely.union_all(array_of([p.polygon for p in self.bottom.pieces if p.node == GROUND]))
        shapely.prepare(plane)
        return plane

    @cached_property
    def vias(self) -> tuple[Drill, ...]:
        """The drilled holes that are vias."""
        return tuple(drill for drill in self.drills if drill.is_via)

    @cached_property
    def drill_points(self) -> npt.NDArray[np.object_]:
        """The axes of all drilled holes as points."""
        return points_of([(drill.x, drill.y) for drill in self.drills])

    @cached_property
    def drill_tree(self) -> shapely.STRtree:
        """Tree over the axes of all drilled holes."""
        return shapely.STRtree(self.drill_points)

    @cached_property
    def drill_radii(self) -> npt.NDArray[np.float64]:
        """Radii of all drilled holes [nm]."""
        return np.array([drill.diameter / 2.0 for drill in self.drills], dtype=np.float64)
