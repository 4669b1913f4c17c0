"""Where a fence is asked for: stretches of pour edge that face a line, and the vias along them."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
import shapely

from layoutgen.artwork import Artwork
from layoutgen.checks.board import CHORD_NM, TOLERANCE_NM, Board, Piece, parts
from layoutgen.checks.drawn import pour_gaps
from layoutgen.checks.facing import edges_of
from layoutgen.checks.nodes import GROUND

__all__ = ["PART_CLEARANCE_NM", "Stretch", "fenced", "line_pieces", "part_outlines", "stretches"]

PART_CLEARANCE_NM = 300_000.0
"""No fence is asked for nearer than this to a part's outline [nm]."""

_LINE_ROLES = ("line", "pair", "radial")


@dataclass(frozen=True, slots=True, eq=False)
class Stretch:
    """A stretch of pour edge that faces a line: its way as a line string [nm], pour on its left."""

    item: str
    way: shapely.LineString


def fenced(board: Board) -> bool:
    """Tell whether the circuit asks for a fence."""
    artwork = board.artwork
    ground = None if artwork is None else artwork.placement.sized.circuit.file.ground
    return ground is not None and ground.fence


def line_pieces(board: Board) -> Mapping[str, list[shapely.Polygon]]:
    """Return the copper of each line, pair and radial stub on top; ends on gnd are left out."""
    found: dict[str, list[shapely.Polygon]] = {}
    for piece in board.top.pieces:
        if piece.role in _LINE_ROLES and piece.node != GROUND:
            found.setdefault(piece.item, []).append(piece.polygon)
    return found


def part_outlines(artwork: Artwork, grown: float) -> shapely.Geometry:
    """Return the union of all part outlines, grown by a length [nm]."""
    outlines = [part.outline.polygon(CHORD_NM) for part in artwork.placement.parts.values()]
    return shapely.union_all([o.buffer(grown, join_style="mitre") for o in outlines])


def stretches(board: Board) -> list[Stretch]:
    """Return the stretches of pour edge that face a line within two of its gaps, away from parts."""
    if board.artwork is None:
        return []
    pours = _joined([piece for piece in board.top.pieces if piece.role == "pour"])
    if not len(pours):
        return []
    gaps = pour_gaps(board.artwork)
    away = part_outlines(board.artwork, PART_CLEARANCE_NM)
    found: list[Stretch] = []
    for name, polygons in line_pieces(board).items():
        if name in gaps:
            line = shapely.union_all(polygons)
            found.extend(Stretch(name, way) for way in _ways(pours, line, 2.0 * gaps[name], away))
    return found


def _joined(pieces: list[Piece]) -> npt.NDArray[np.object_]:
    """Return the union of pieces as an array of polygons."""
    return np.array(parts(shapely.union_all([piece.polygon for piece in pieces])), dtype=object)


def _ways(
    pours: npt.NDArray[np.object_], line: shapely.Geometry, reach: float, away: shapely.Geometry
) -> Iterator[shapely.LineString]:
    """Yield the stretches of pour outline that face a line within reach [nm]."""
    edges = edges_of(pours)
    segments = np.asarray(
        shapely.linestrings(np.stack((edges.start, edges.end), axis=1)), dtype=object
    )
    zone = shapely.buffer(line, reach + TOLERANCE_NM, quad_segs=32)
    shapely.prepare(zone)
    near = np.flatnonzero(shapely.intersects(zone, segments))
    cut = shapely.difference(shapely.intersection(segments[near], zone), away)
    pieces, index = shapely.get_parts(cut, return_index=True)
    real = shapely.length(pieces) > 0.0
    pieces, index = pieces[real], near[index[real]]
    facing = _faces(pieces, edges.direction[index], line)
    joined = shapely.line_merge(shapely.multilinestrings(list(pieces[facing])), directed=True)
    yield from (part for part in shapely.get_parts(joined) if part.length > 0.0)


def _faces(
    pieces: npt.NDArray[np.object_], direction: npt.NDArray[np.float64], line: shapely.Geometry
) -> npt.NDArray[np.bool_]:
    """Return which pieces of pour outline have the line on their outer side."""
    middles = shapely.line_interpolate_point(pieces, 0.5, normalized=True)
    ends = shapely.get_coordinates(shapely.shortest_line(middles, line)).reshape(-1, 2, 2)
    towards = ends[:, 1] - ends[:, 0]
    outward = np.stack((direction[:, 1], -direction[:, 0]), axis=1)
    return np.asarray(np.einsum("nk,nk->n", towards, outward) > 0.0)
