"""Solder mask openings of both sides, and solder paste.

Top: pads are open, RF lines too unless the board says otherwise, and the last piece of every line at a port,
where a connector or a wire is soldered. Vias stay covered, plated holes are open. Bottom: a board whose part
stands on a carrier through a cut-out rests on that carrier and is bare all over; else the bottom is covered
but for the holes.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.artwork.board import BOARD, board_area, board_outline, cutouts_of, has_area, hole_lands
from layoutgen.artwork.conductors import Conductor
from layoutgen.artwork.limits import Limits
from layoutgen.artwork.records import Shape
from layoutgen.geometry import Ring, circumscribed, closed, grow, joined, overlap, pieces, rings_of, stroke
from layoutgen.placement import PlacedPad, PlacedPart, PlacedPort, Placement

__all__ = ["bottom_openings", "paste_shapes", "soldered_pads", "top_openings"]

_PORT_LANDING_NM = 2_000_000
_PANE_NM, _PANE_GAP_NM = 1_200_000, 300_000
_SCREW_HEADS = 2.0


def soldered_pads(placement: Placement) -> list[tuple[PlacedPart, PlacedPad]]:
    """Return all pads that are copper, each with its part."""
    return [(part, pad) for part in placement.parts.values() for pad in part.pads if has_area(pad.outline)]


def top_openings(placement: Placement, limits: Limits, conductors: Sequence[Conductor]) -> list[Shape]:
    """Return the openings of the top solder mask; those with too narrow a web between them are one."""
    bare: list[BaseGeometry] = [pad.outline.polygon() for _, pad in soldered_pads(placement)]
    copper = shapely.STRtree([piece.copper for piece in conductors])
    bare += [_landing(port, copper) for port in placement.ports.values()]
    if not placement.sized.circuit.file.board.mask_over_lines:
        bare += [piece.copper for piece in conductors if piece.rf]
    bare += [_hole(hole.x, hole.y, hole.diameter) for hole in placement.holes]
    bare += [ring.polygon() for ring, _ in hole_lands(placement, limits)]
    grown = joined(grow(copper, limits.mask_expansion) for copper in bare)
    ganged = _ganged(closed(grown, limits.mask_web / 2.0), limits, conductors)
    merged = overlap(ganged, board_area(placement))
    return [_opening("soldermask_top", piece) for piece in pieces(merged)]


def _ganged(openings: BaseGeometry, limits: Limits, conductors: Sequence[Conductor]) -> BaseGeometry:
    """Return openings with those made one that still lie nearer to each other than a web is wide.

    Closing leaves webs where a corner faces another opening. A bridge joins the two there (common practice,
    no source), where no pour comes.
    """
    parts = np.array(pieces(openings), dtype=object)
    tree = shapely.STRtree(parts)
    first, second = tree.query(parts, predicate="dwithin", distance=limits.mask_web - 1.0)
    pairs = sorted((i, j) for i, j in zip(first.tolist(), second.tolist(), strict=True) if i < j)
    if not pairs:
        return openings
    bridges = [_bridge(parts[i], parts[j], limits.mask_web) for i, j in pairs]
    pourless = closed(joined(piece.keepout for piece in conductors), limits.min_width / 2.0)
    return joined([openings, overlap(joined(bridges), pourless)])


def _bridge(a: BaseGeometry, b: BaseGeometry, web: int) -> BaseGeometry:
    """Return what joins two openings where they are nearest: as wide as a web, and as far into both."""
    (x0, y0), (x1, y1) = shapely.get_coordinates(shapely.shortest_line(a, b)).tolist()
    apart = math.dist((x0, y0), (x1, y1))
    if apart < 1.0:  # they touch at a corner
        touching: BaseGeometry = shapely.box(x0 - web / 2.0, y0 - web / 2.0, x0 + web / 2.0, y0 + web / 2.0)
        return touching
    more = web / apart
    dx, dy = more * (x1 - x0), more * (y1 - y0)
    return stroke([(round(x0 - dx), round(y0 - dy)), (round(x1 + dx), round(y1 + dy))], web).polygon()


def _landing(port: PlacedPort, copper: shapely.STRtree) -> BaseGeometry:
    """Return the end of a port's copper, left bare for solder: as long as it is wide, 2 mm at least."""
    length = max(_PORT_LANDING_NM, port.width)
    angle = math.radians(port.heading)
    ahead = (round(port.x + length * math.cos(angle)), round(port.y + length * math.sin(angle)))
    area = shapely.buffer(shapely.LineString([(port.x, port.y), ahead]), port.width, cap_style="flat")
    own = copper.query(shapely.Point(port.x, port.y), predicate="dwithin", distance=1.0)
    return overlap(joined(copper.geometries[np.sort(own)]), area)


def _hole(x: int, y: int, diameter: int) -> BaseGeometry:
    """Return the area of a drilled hole, as a polygon around it."""
    return circumscribed(x, y, math.ceil(diameter / 2))


def bottom_openings(placement: Placement, limits: Limits) -> list[Shape]:
    """Return the openings of the bottom solder mask."""
    if cutouts_of(placement):
        whole = Shape(
            layer="soldermask_bottom",
            outline=board_outline(placement),
            holes=(),
            role="opening",
            origin=BOARD,
        )
        return [whole]
    screws = [_hole(h.x, h.y, round(_SCREW_HEADS * h.diameter)) for h in placement.holes]
    merged = overlap(closed(joined(screws), limits.mask_web / 2.0), board_area(placement))
    return [_opening("soldermask_bottom", piece) for piece in pieces(merged)]


def _opening(layer: str, piece: shapely.Polygon) -> Shape:
    """Return one opening."""
    outline, holes = rings_of(piece)
    return Shape(layer=layer, outline=outline, holes=holes, role="opening", origin=BOARD)


def paste_shapes(placement: Placement) -> Iterator[Shape]:
    """Yield the solder paste of all pads: the pad itself, exposed pads as windows of panes."""
    for part, pad in soldered_pads(placement):
        for ring in _panes(pad) if pad.ground == "vias" else (pad.outline,):
            yield Shape(layer="paste_top", outline=ring, net=pad.net, role="paste", origin=part.origin)


def _panes(pad: PlacedPad) -> list[Ring]:
    """Return the window of an exposed pad: even panes of about 1.2 mm with bars of 0.3 mm between.

    The bars let gas out and keep the part from floating (common practice, no source).
    """
    points = pad.outline.points
    (ox, oy), (ax, ay), (bx, by) = points[0], points[1], points[-1]
    along, across = math.hypot(ax - ox, ay - oy), math.hypot(bx - ox, by - oy)
    return [
        Ring(
            tuple(
                (round(ox + (ax - ox) * s + (bx - ox) * t), round(oy + (ay - oy) * s + (by - oy) * t))
                for s, t in ((s0, t0), (s1, t0), (s1, t1), (s0, t1))
            )
        )
        for s0, s1 in _windows(along)
        for t0, t1 in _windows(across)
    ]


def _windows(length: float) -> list[tuple[float, float]]:
    """Return begin and end of the panes along an edge, as shares of its length [-]."""
    bar = min(_PANE_GAP_NM, length / 4.0)
    count = max(1, round((length - bar) / (_PANE_NM + bar)))
    pane = (length - (count + 1) * bar) / count
    starts = [bar + i * (pane + bar) for i in range(count)]
    return [(start / length, (start + pane) / length) for start in starts]
