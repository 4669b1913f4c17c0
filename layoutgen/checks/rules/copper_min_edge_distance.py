"""Copper keeps away from the board's profile and from cut-outs.

What: finished copper of both layers is at least ``copper.min_edge_distance`` from the outline and from
cut-outs.
Why: routing tears copper that it reaches, and copper at the edge may touch the housing.
How measured: exactly, polygon to outline; copper across the outline measures 0, copper outside less.
Exempt, each with a note: within its own width, the copper of a port with ``to_edge``; the outline of a
pad at the cut-out of its own part, not a wider line that covers the pad. 10 nm short of the limit passes.
Source: the limit is the board house's; the exemptions are the circuit file's meaning.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np
import shapely

from layoutgen.artwork import Artwork
from layoutgen.checks.board import Area, Board, Layer, Piece
from layoutgen.checks.outcome import Hit, Outcome, Rule, mm, named, too_small
from layoutgen.checks.planar import CHORD_NM, TOLERANCE_NM, Geometry, middle
from layoutgen.checks.records import NotChecked
from layoutgen.placement import PlacedPort

__all__ = ["RULE"]

NAME = "copper.min_edge_distance"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each piece too near to an edge, and a note for each exemption."""
    limit = board.limits.nm(NAME)
    if limit is None:
        return
    if board.outline is None:
        yield NotChecked(NAME, "the drawing has no profile")
    ports = _edge_ports(board.artwork, limit)
    for layer in board.layers:
        if board.outline is not None:
            yield from _at_profile(layer, board.outline, limit, ports)
        for cutout in board.cutouts:
            yield from _at_cutout(layer, cutout, limit, _own_pads(board.artwork, cutout.item))
    yield from _notes(board, limit, ports)


def _at_profile(
    layer: Layer, outline: shapely.Polygon, limit: float, ports: list[tuple[PlacedPort, shapely.Polygon]]
) -> Iterator[Hit]:
    """Yield a hit for each piece too near to the outline, across it or outside."""
    inside = outline.buffer(-(limit - TOLERANCE_NM), join_style="mitre", mitre_limit=10.0)
    shapely.prepare(inside)
    for k in np.flatnonzero(~shapely.covers(inside, layer.polygons)).tolist():
        piece, rest = layer.pieces[k], layer.polygons[k]
        for _, mouth in ports if layer.name == "copper_top" else ():
            rest = rest.difference(mouth)
        distance = _signed_distance(rest, outline)
        if distance < limit - TOLERANCE_NM:
            yield _hit(layer, piece, rest, outline.boundary, distance, limit, "board")


def _signed_distance(copper: Geometry, outline: shapely.Polygon) -> float:
    """Return copper's distance from the outline [nm]: 0 across it, negative outside, infinite for none."""
    if copper.is_empty:
        return math.inf
    if outline.covers(copper):
        return float(copper.distance(outline.boundary))
    return -float(copper.distance(outline))


def _at_cutout(layer: Layer, cutout: Area, limit: float, pads: list[shapely.Polygon]) -> Iterator[Hit]:
    """Yield a hit for each piece too near to a cut-out, the pads of its own part left out."""
    near = layer.tree.query(cutout.polygon, predicate="dwithin", distance=limit - TOLERANCE_NM)
    for k in np.sort(near).tolist():
        rest = layer.polygons[k]
        for pad in pads if layer.name == "copper_top" else ():
            rest = rest.difference(pad)
        if not rest.is_empty and (distance := rest.distance(cutout.polygon)) < limit - TOLERANCE_NM:
            piece = layer.pieces[k]
            yield _hit(layer, piece, rest, cutout.polygon, distance, limit, cutout.item)


def _hit(
    layer: Layer,
    piece: Piece,
    copper: Geometry,
    edge: Geometry,
    distance: float,
    limit: float,
    to: str,
) -> Hit:
    """Return the hit of one piece at one edge."""
    where = "the profile" if to == "board" else f"the cut-out of {to}"
    text = f"copper of {piece.item} to {where}"
    items, nets = named(piece.item, to), named(piece.net or "")
    return too_small(NAME, text, distance, limit, middle(copper, edge), items, nets, layer.name)


def _edge_ports(artwork: Artwork | None, limit: float) -> list[tuple[PlacedPort, shapely.Polygon]]:
    """Return the ports whose copper runs to the profile, each with the region in which it may."""
    ports = [] if artwork is None else artwork.placement.ports.values()
    return [(port, _mouth(port, limit)) for port in ports if port.to_edge]


def _mouth(port: PlacedPort, limit: float) -> shapely.Polygon:
    """Return the region of a port's own copper at the profile: as wide as it, as deep as the limit."""
    turn = math.radians(port.heading)
    ux, uy = math.cos(turn), math.sin(turn)
    half, deep, out = port.width / 2.0 + TOLERANCE_NM, limit + TOLERANCE_NM, 4.0 * limit
    corners = [(-out, -half), (deep, -half), (deep, half), (-out, half)]
    return shapely.Polygon([(port.x + a * ux - b * uy, port.y + a * uy + b * ux) for a, b in corners])


def _own_pads(artwork: Artwork | None, part: str) -> list[shapely.Polygon]:
    """Return the outlines of a part's pads, grown by the tolerance."""
    if artwork is None or part not in artwork.placement.parts:
        return []
    pads = artwork.placement.parts[part].pads
    outlines = [pad.outline.polygon(CHORD_NM) for pad in pads]
    return [o.buffer(TOLERANCE_NM, join_style="mitre") for o in outlines if o.area > 0.0]


def _notes(board: Board, limit: float, ports: list[tuple[PlacedPort, shapely.Polygon]]) -> Iterator[Hit]:
    """Yield a note for each exemption that is made use of."""
    for port, _ in ports:
        text = f"port {port.name} runs to the profile as asked (to_edge): exempt from the edge rule"
        yield Hit(rule=NAME, text=text, items=(port.name,), at=(port.x, port.y), nets=(port.net,), note=True)
    for cutout in board.cutouts:
        if board.artwork is None or cutout.item not in board.artwork.placement.parts:
            continue
        for pad in board.artwork.placement.parts[cutout.item].pads:
            outline = pad.outline.polygon(CHORD_NM)
            distance = outline.distance(cutout.polygon)
            if outline.area > 0.0 and distance < limit - TOLERANCE_NM:
                text = f"pad {pad.pin} faces its own cut-out at {mm(distance)}: exempt from the edge rule"
                at = middle(outline, cutout.polygon)
                yield Hit(rule=NAME, text=text, items=(cutout.item,), at=at, nets=(pad.net,), note=True)


RULE = Rule(names=(NAME,), find=find)
