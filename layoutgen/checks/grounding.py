"""Ground pads and ground ends with the vias of their own, and the direct current each of them takes."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
import shapely

from layoutgen.artwork import Artwork
from layoutgen.checks.board import Board, Drill
from layoutgen.checks.ground_ends import ground_ends
from layoutgen.checks.netgraph import clusters
from layoutgen.checks.nodes import GROUND
from layoutgen.checks.planar import CHORD_NM, Geometry, whole, within
from layoutgen.geometry import Point
from layoutgen.placement import PlacedPad, PlacedPart

__all__ = ["GroundPad", "ground_pads", "via_currents"]


@dataclass(frozen=True, slots=True, eq=False)
class GroundPad:
    """A pad on gnd: its part and pin, outline [nm], vias of its own, wanted thermal resistance [K/W]."""

    part: str
    pin: str
    outline: shapely.Polygon
    vias: tuple[Drill, ...]
    thermal: float | None

    @property
    def at(self) -> Point:
        """The pad's middle [nm]."""
        return whole(self.outline.centroid.x, self.outline.centroid.y)


def ground_pads(board: Board) -> list[GroundPad]:
    """Return every pad on gnd but those that meet a carrier, in file order, each with its vias.

    A via is a pad's own when it was set for the pad's part, its land meets the copper between that pad and
    its vias, and no other ground pad of the part is nearer.
    """
    if board.artwork is None:
        return []
    parts = board.artwork.placement.parts.values()
    return [pad for part in parts for pad in _pads_of(board, board.artwork, part)]


def _pads_of(board: Board, artwork: Artwork, part: PlacedPart) -> Iterator[GroundPad]:
    """Yield the ground pads of one part."""
    pads = [pad for pad in part.pads if pad.net == GROUND and pad.ground != "flange"]
    outlines = [pad.outline.polygon(CHORD_NM) for pad in pads]
    solid = [(pad, outline) for pad, outline in zip(pads, outlines, strict=True) if outline.area > 0.0]
    vias = [via for via in board.vias if via.purpose == f"part:{part.name}"]
    spots = shapely.points([(via.x, via.y) for via in vias]) if vias else np.array([], dtype=object)
    reach = np.array([(via.land or 0.0) / 2.0 for via in vias])
    nearest = np.argmin([shapely.distance(spots, o) for _, o in solid], axis=0) if solid and vias else []
    for k, (pad, outline) in enumerate(solid):
        joined = within(spots, _own_copper(artwork, part.name, pad, outline), reach)
        own = [via for n, via in enumerate(vias) if joined[n] and nearest[n] == k]
        yield GroundPad(part.name, pad.pin, outline, tuple(own), pad.thermal)


def _own_copper(artwork: Artwork, part: str, pad: PlacedPad, outline: shapely.Polygon) -> Geometry:
    """Return a pad with the ground copper of its part that hangs together with it."""
    pieces = [outline] + [
        shape.outline.polygon(CHORD_NM)
        for shape in artwork.on("copper_top")
        if shape.role == "ground" and shape.origin.element == part
    ]
    polygons = np.array(pieces, dtype=object)
    i, j = shapely.STRtree(polygons).query(polygons, predicate="intersects")
    label = clusters(len(pieces), np.stack((i[i < j], j[i < j]), axis=1))
    return shapely.union_all(polygons[label == 0])


def via_currents(board: Board) -> list[tuple[Drill, float]]:
    """Return the vias that carry direct current, each with its magnitude [A].

    The vias of a pad, or of an end on gnd, share equally; crowding in those nearest to the source is not
    looked at.
    """
    if board.artwork is None:
        return []
    shared = [(pad.vias, abs(_pad_current(board, pad))) for pad in ground_pads(board)]
    shared += [(end.vias, abs(end.current)) for end in ground_ends(board)]
    return [(via, current / len(vias)) for vias, current in shared for via in vias if current > 0.0]


def _pad_current(board: Board, pad: GroundPad) -> float:
    """Return the direct current [A] of one ground pad."""
    assert board.artwork is not None
    currents = board.artwork.placement.sized.circuit.dc.currents
    return currents.get(f"{pad.part}.{pad.pin}", currents.get(pad.part, 0.0))
