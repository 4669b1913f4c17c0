"""Where a fence is asked for: stretches of pour edge that face a line, and the vias along them."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from itertools import groupby

import numpy as np
import shapely

from layoutgen.artwork import Artwork
from layoutgen.checks.board import Board
from layoutgen.checks.drawn import pour_gaps
from layoutgen.checks.facing import Edges, edges_of
from layoutgen.checks.nodes import GROUND
from layoutgen.checks.planar import CHORD_NM, TOLERANCE_NM, Bools, Floats, Geometry, Polygons, array_of, parts
from layoutgen.geometry import Point

__all__ = [
    "PART_CLEARANCE_NM",
    "ground_copper",
    "line_pieces",
    "nearest_line",
    "part_outlines",
    "pour_rim",
    "stretches",
    "unfenced",
]

PART_CLEARANCE_NM = 300_000.0
"""No fence is asked for nearer than this to a part's outline [nm]."""

_LINE_ROLES = ("line", "pair", "radial")


def unfenced(board: Board) -> str | None:
    """Return why there is no fence to look at, None where there should be one."""
    ground = None if board.artwork is None else board.artwork.placement.sized.circuit.file.ground
    if ground is None or not ground.fence:
        return "the circuit asks for no fence"
    return None if any(piece.role == "pour" for piece in board.top.pieces) else "there is no pour"


def line_pieces(board: Board) -> Mapping[str, list[shapely.Polygon]]:
    """Return the copper of each line, pair and radial stub on top; ends on gnd are left out."""
    found: dict[str, list[shapely.Polygon]] = {}
    for piece in board.top.pieces:
        if piece.role in _LINE_ROLES and piece.node != GROUND:
            found.setdefault(piece.item, []).append(piece.polygon)
    return found


def part_outlines(artwork: Artwork, grown: float) -> Geometry:
    """Return the union of all part outlines, grown by a length [nm]."""
    outlines = [part.outline.polygon(CHORD_NM) for part in artwork.placement.parts.values()]
    return shapely.union_all([o.buffer(grown, join_style="mitre") for o in outlines])


def stretches(board: Board) -> list[shapely.LineString]:
    """Return the stretches of pour edge [nm] that face a line within two of its gaps, away from parts.

    Stretches that face one line after the other are one.
    """
    if board.artwork is None:
        return []
    pours = parts(shapely.union_all([piece.polygon for piece in board.top.pieces if piece.role == "pour"]))
    if not pours:
        return []
    edges = edges_of(array_of(pours))
    gaps = pour_gaps(board.artwork)
    away = part_outlines(board.artwork, PART_CLEARANCE_NM)
    spans: list[tuple[int, float, float]] = []
    for name, polygons in line_pieces(board).items():
        if name in gaps:
            spans.extend(_spans(edges, shapely.union_all(polygons), 2.0 * gaps[name], away))
    return [_way(edges, ring, start, end) for ring, start, end in _joined(edges, spans)]


def ground_copper(board: Board) -> Geometry:
    """Return the top's copper on gnd, grown by the tolerance and prepared for many questions."""
    copper = shapely.union_all([piece.polygon for piece in board.top.pieces if piece.node == GROUND])
    grown = copper.buffer(TOLERANCE_NM, join_style="mitre")
    shapely.prepare(grown)
    return grown


def nearest_line(board: Board, at: Point) -> str:
    """Return the line, pair or radial stub nearest to a point [nm]."""
    spot = shapely.Point(at)
    lines = line_pieces(board)
    return min(lines, key=lambda name: min(polygon.distance(spot) for polygon in lines[name]), default="")


def pour_rim(board: Board) -> Geometry:
    """Return the outlines of the pour as lines, prepared for many questions; empty without pour."""
    rim = shapely.boundary(shapely.union_all([p.polygon for p in board.top.pieces if p.role == "pour"]))
    shapely.prepare(rim)
    return rim


def _spans(edges: Edges, line: Geometry, reach: float, away: Geometry) -> Iterator[tuple[int, float, float]]:
    """Yield the spans of pour outline that face a line within reach: ring, start, end along it [nm]."""
    segments = edges.lines
    zone = shapely.buffer(line, reach + TOLERANCE_NM, quad_segs=32)
    shapely.prepare(zone)
    near = np.flatnonzero(shapely.intersects(zone, segments))
    cut = shapely.difference(shapely.intersection(segments[near], zone), away)
    pieces, index = shapely.get_parts(cut, return_index=True)
    real = shapely.length(pieces) > 0.0
    pieces, index = pieces[real], near[index[real]]
    facing = _faces(pieces, edges.direction[index], line, reach + TOLERANCE_NM)
    for piece, edge in zip(pieces[facing], index[facing].tolist(), strict=True):
        way = (shapely.get_coordinates(piece) - edges.start[edge]) @ edges.direction[edge] + edges.along[edge]
        yield int(edges.ring[edge]), float(way.min()), float(way.max())


def _joined(edges: Edges, spans: list[tuple[int, float, float]]) -> list[tuple[int, float, float]]:
    """Return spans that touch or overlap as one, also across the start of their ring.

    A span across the start ends beyond the ring's length.
    """
    joined: list[tuple[int, float, float]] = []
    for ring, start, end in sorted(spans):
        if joined and joined[-1][0] == ring and start <= joined[-1][2] + TOLERANCE_NM:
            joined[-1] = (ring, joined[-1][1], max(joined[-1][2], end))
        else:
            joined.append((ring, start, end))
    around = {int(ring): float(length) for ring, length in zip(edges.ring, edges.around, strict=True)}
    out: list[tuple[int, float, float]] = []
    for _, group in groupby(joined, key=lambda span: span[0]):
        row = list(group)
        length = around[row[0][0]]
        if len(row) > 1 and row[0][1] <= TOLERANCE_NM and row[-1][2] >= length - TOLERANCE_NM:
            first = row.pop(0)
            row[-1] = (first[0], row[-1][1], length + first[2])
        out.extend(row)
    return out


def _way(edges: Edges, ring: int, start: float, end: float) -> shapely.LineString:
    """Return a span of a ring as a line string [nm]; the end may lie beyond the ring's length."""
    own = np.flatnonzero(edges.ring == ring)
    along = np.concatenate((edges.along[own], edges.along[own] + edges.around[own]))
    points = np.concatenate((edges.start[own], edges.start[own]))
    along, points = np.append(along, 2.0 * edges.around[own[0]]), np.append(points, points[:1], axis=0)
    inside = (along > start + 1e-6) & (along < end - 1e-6)
    ends = np.array([[np.interp(t, along, points[:, k]) for k in (0, 1)] for t in (start, end)])
    return shapely.LineString(np.concatenate((ends[:1], points[inside], ends[1:])))


def _faces(pieces: Polygons, direction: Floats, line: Geometry, reach: float) -> Bools:
    """Return which pieces of pour outline look at the line.

    A piece does when the nearest copper of the line lies on its outer side, or when the line is met straight
    ahead within reach [nm].
    """
    middles = shapely.line_interpolate_point(pieces, 0.5, normalized=True)
    ends = shapely.get_coordinates(shapely.shortest_line(middles, line)).reshape(-1, 2, 2)
    outward = np.stack((direction[:, 1], -direction[:, 0]), axis=1)
    nearest = np.einsum("nk,nk->n", ends[:, 1] - ends[:, 0], outward) > 0.0
    rays = shapely.linestrings(np.stack((ends[:, 0], ends[:, 0] + reach * outward), axis=1))
    return np.asarray(nearest | shapely.intersects(rays, line))
