"""From the artwork to the board the rules look at: finished copper, arcs as fine chords."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from typing import Any

import numpy as np
import numpy.typing as npt
import shapely

from layoutgen.artwork import Artwork, Shape
from layoutgen.checks.board import Area, Board, Drill, Layer, Piece
from layoutgen.checks.limits import Limits
from layoutgen.checks.nodes import GROUND, drawn_conductors, joined_nets, pair_tails, tail_of
from layoutgen.checks.planar import (
    CHORD_NM,
    CORNER_LIMITS,
    TOLERANCE_NM,
    Geometry,
    Polygons,
    array_of,
    merge,
    parts,
    within,
)
from layoutgen.geometry import Ring
from layoutgen.placement import PlacedLine, PlacedPair

__all__ = ["board_of", "bored", "etched", "pour_gaps"]

_POUR_ROLES = ("pour", "plane")
_SEAM_NM = 2.0
"""How far pieces that meet end to end are left overlapping after etching, and how wide a tongue may be that
goes with that [nm]."""


def board_of(artwork: Artwork) -> Board:
    """Return the board that an artwork stands for."""
    circuit = artwork.placement.sized.circuit
    limits = Limits(circuit.rules)
    nodes = joined_nets(circuit.file)
    drills = _drills(artwork, nodes)
    copper = {name: _layer(artwork, name, limits, nodes, drills) for name in ("copper_top", "copper_bottom")}
    outline, cutouts = _profile(artwork.on("profile"))
    return Board(
        limits=limits,
        top=copper["copper_top"],
        bottom=copper["copper_bottom"],
        drills=drills,
        outline=outline,
        cutouts=cutouts,
        openings=tuple(_areas(artwork.on("soldermask_top"))),
        legend=tuple(_areas(artwork.on("legend_top"))),
        height=circuit.file.substrate.height * 1e9,
        thickness=circuit.file.substrate.copper_thickness * 1e9,
        artwork=artwork,
    )


def pour_gaps(artwork: Artwork) -> Mapping[str, float]:
    """Return the distance [nm] at which the pour was to be drawn from each line, pair and radial stub."""
    sized = artwork.placement.sized
    gaps = {line.name: line.pour_gap for line in sized.lines.values()}
    gaps |= {pair.name: pair.pour_gap for pair in sized.pairs.values()}
    gaps |= {stub.name: stub.pour_gap for stub in sized.radials.values()}
    return {name: gap * 1e9 for name, gap in gaps.items() if np.isfinite(gap)}


def _drills(artwork: Artwork, nodes: Mapping[str, str]) -> tuple[Drill, ...]:
    """Return all drilled holes, vias first, named by their place in the artwork's lists."""
    vias = [
        Drill(f"via:{n}", via.x, via.y, via.drill, True, via.net, nodes.get(via.net), via.land, via.purpose)
        for n, via in enumerate(artwork.vias)
    ]
    holes = [
        Drill(f"hole:{n}", hole.x, hole.y, hole.diameter, hole.plated, hole.net, nodes.get(hole.net or ""))
        for n, hole in enumerate(artwork.holes)
    ]
    return (*vias, *holes)


def _layer(
    artwork: Artwork, name: str, limits: Limits, nodes: Mapping[str, str], drills: Sequence[Drill]
) -> Layer:
    """Return one layer's finished copper."""
    names = {(drill.x, drill.y): drill.item for drill in drills if drill.is_via}
    tails = _tails(artwork, limits)
    pieces: list[Piece] = []
    for shape in _without_buried_lands(artwork.on(name), nodes):
        pieces.extend(_pieces(shape, nodes, names, tails))
    undercut = limits.nm("copper.undercut") or 0.0
    if undercut > 0.0:
        pieces = etched(pieces, undercut)
    return Layer(name, tuple(bored(pieces, drills)))


def _tails(artwork: Artwork, limits: Limits) -> Mapping[str, Geometry]:
    """Return for each line or pair that ends on gnd the region at its ends there that counts as gnd."""
    gaps, gap = pour_gaps(artwork), limits.nm("copper.min_gap") or 0.0
    lines = artwork.placement.lines
    tails: dict[str, Geometry] = {}
    for name, net in drawn_conductors(artwork).items():
        wanted = gaps.get(name, 0.0) + CORNER_LIMITS * gap + lines[name].width
        clear = lines[name].centre_line - _reach_of_others(artwork, name, net) - gap - TOLERANCE_NM
        tails[name] = tail_of(lines[name], max(min(wanted, clear), gap))
    for name, pair in artwork.placement.pairs.items():
        wanted = gaps.get(name, 0.0) + CORNER_LIMITS * gap + pair.width
        held = max(_reach_of_others(artwork, name, net) for net in pair.nets if net != GROUND)
        clear = pair.centre_line - held - gap - TOLERANCE_NM
        found = [tail for _, tail in pair_tails(pair, max(min(wanted, clear), gap))]
        tails |= {name: shapely.union_all(found)} if found else {}
    return tails


def _reach_of_others(artwork: Artwork, name: str, net: str) -> float:
    """Return how far the copper of other lines and pads of a net may reach along a line from its node [nm].

    What counts as gnd ends short of it: a short stub does not short what it leaves.
    """
    placement = artwork.placement
    both: list[PlacedLine | PlacedPair] = [*placement.lines.values(), *placement.pairs.values()]
    halves = [other.width / 2.0 for other in both if net in other.nets and other.name != name]
    pads = [
        float(np.ptp(pad.outline.points, axis=0).max())
        for part in placement.parts.values()
        for pad in part.pads
        if pad.net == net
    ]
    return max([*halves, *pads], default=0.0)


def _pieces(
    shape: Shape,
    nodes: Mapping[str, str],
    via_names: Mapping[tuple[float, float], str],
    tails: Mapping[str, Geometry],
) -> Iterator[Piece]:
    """Yield a shape's pieces: one, or two where a line or strip that ends on gnd is cut."""
    polygon, item = _polygon(shape), _item(shape, via_names)
    if shape.role in ("line", "pair") and item in tails:
        net, tail = shape.net or "", tails[item]
        for rest, held in ((polygon.difference(tail), net), (polygon.intersection(tail), GROUND)):
            for part in parts(rest):
                yield Piece(part, item, held, nodes.get(held), shape.role)
        return
    for part in parts(polygon):
        yield Piece(part, item, shape.net, nodes.get(shape.net or ""), shape.role)


def _item(shape: Shape, via_names: Mapping[tuple[float, float], str]) -> str:
    """Return the name of a shape in findings."""
    if shape.role in _POUR_ROLES:
        return "pour"
    if shape.role == "land" and (circle := _circle(shape.outline)) is not None:
        return via_names.get((circle[0], circle[1]), shape.origin.element)
    return shape.origin.element


def _polygon(shape: Shape) -> Geometry:
    """Return a shape as a valid polygon [nm], or several where its outline crosses itself."""
    rings = [hole.chords(CHORD_NM) for hole in shape.holes]
    polygon = shapely.Polygon(shape.outline.chords(CHORD_NM), rings)
    return polygon if polygon.is_valid else shapely.make_valid(polygon)


def _circle(ring: Ring) -> tuple[float, float, float] | None:
    """Return middle and radius [nm] of a ring that is a whole circle, None for others."""
    if len(ring.points) != 2 or ring.bulges != (1.0, 1.0):
        return None
    (ax, ay), (bx, by) = ring.points
    return (ax + bx) / 2.0, (ay + by) / 2.0, float(np.hypot(bx - ax, by - ay)) / 2.0


def _without_buried_lands(shapes: Sequence[Shape], nodes: Mapping[str, str]) -> list[Shape]:
    """Return the shapes without round lands that lie wholly inside other copper of their own net.

    They change no outline, and there may be thousands of them.
    """
    circles = [(k, c) for k, shape in enumerate(shapes) if (c := _circle(shape.outline)) is not None]
    hosts = [shape for shape in shapes if _circle(shape.outline) is None]
    if not circles or not hosts:
        return list(shapes)
    polygons = np.array([_polygon(shape) for shape in hosts], dtype=object)
    points = shapely.points([(x, y) for _, (x, y, _) in circles])
    point, host = shapely.STRtree(polygons).query(points, predicate="intersects")
    same = [
        nodes.get(shapes[circles[p][0]].net or "") == nodes.get(hosts[h].net or "") is not None
        for p, h in zip(point, host, strict=True)
    ]
    point, host = point[same], host[same]
    radius = np.array([circles[p][1][2] for p in point])
    rims = shapely.boundary(polygons)
    shapely.prepare(rims)
    deep = ~within(rims[host], points[point], np.maximum(radius - TOLERANCE_NM, 0.0))
    buried = {circles[p][0] for p in point[deep]}
    return [shape for k, shape in enumerate(shapes) if k not in buried]


def etched(pieces: Sequence[Piece], undercut: float) -> list[Piece]:
    """Return the pieces as they are left after etching: every outline of the joined copper moved inwards.

    Each piece gets its own outline moved inwards, and what is left of the seam between that and its drawn
    outline where no other piece's finished copper lies: so an end buried in other copper is not left longer
    by the undercut, and pieces drawn side by side stay joined.
    """
    layer = Layer("", tuple(pieces))
    left = _shares(layer.polygons, _shrunk(layer.merged, undercut))
    own, deep = _shrunk(layer.polygons, undercut), _shrunk(layer.polygons, undercut + _SEAM_NM)
    neighbours: dict[int, list[int]] = {}
    for i, j in layer.touching.tolist():
        neighbours.setdefault(i, []).append(j)
        neighbours.setdefault(j, []).append(i)
    for i, others in neighbours.items():
        kept = left[i].difference(shapely.union_all(deep[others]).difference(own[i]))
        left[i] = _shrunk(_shrunk(kept, _SEAM_NM), -_SEAM_NM)
    return [
        Piece(part, piece.item, piece.net, piece.node, piece.role)
        for piece, polygon in zip(pieces, left, strict=True)
        for part in parts(polygon)
    ]


def _shares(polygons: Polygons, copper: Polygons) -> Polygons:
    """Return what of each polygon lies on copper, given as geometries that do not meet."""
    piece, part = shapely.STRtree(copper).query(polygons, predicate="intersects")
    found: list[list[Geometry]] = [[] for _ in polygons]
    for k, share in zip(piece.tolist(), shapely.intersection(polygons[piece], copper[part]), strict=True):
        found[k].append(share)
    return array_of([shares[0] if len(shares) == 1 else shapely.union_all(shares) for shares in found])


def _shrunk(copper: Any, by: float) -> Any:
    """Return a geometry, or an array of them, with all outlines moved inwards [nm], corners kept."""
    return shapely.buffer(copper, -by, join_style="mitre", mitre_limit=5.0)


def bored(pieces: Sequence[Piece], drills: Iterable[Drill]) -> list[Piece]:
    """Return the pieces with the copper that unplated holes take away removed."""
    discs = [disc(drill) for drill in drills if not drill.plated]
    if not discs or not pieces:
        return list(pieces)
    away = shapely.union_all(discs)
    shapely.prepare(away)
    out: list[Piece] = []
    for piece in pieces:
        if not away.intersects(piece.polygon):
            out.append(piece)
            continue
        left = parts(piece.polygon.difference(away))
        out.extend(Piece(part, piece.item, piece.net, piece.node, piece.role) for part in left)
    return out


def disc(drill: Drill, grown: float = 0.0) -> shapely.Polygon:
    """Return a hole's circle as a polygon [nm], its radius grown by a length [nm]."""
    radius = round(drill.diameter / 2.0 + grown)
    return Ring.circle(round(drill.x), round(drill.y), radius).polygon(CHORD_NM)


def _profile(shapes: Sequence[Shape]) -> tuple[shapely.Polygon | None, tuple[Area, ...]]:
    """Return the board's outline and its cut-outs."""
    outlines = [part for shape in shapes if shape.role == "profile" for part in parts(_polygon(shape))]
    cutouts = tuple(_areas(shape for shape in shapes if shape.role == "cutout"))
    return (max(outlines, key=lambda polygon: polygon.area) if outlines else None), cutouts


def _areas(shapes: Iterable[Shape]) -> Iterator[Area]:
    """Yield the polygons of shapes with the names of their elements."""
    for shape in shapes:
        for part in parts(_polygon(shape)):
            yield Area(part, shape.origin.element)


def joined(areas: Sequence[Area]) -> npt.NDArray[np.object_]:
    """Return areas as disjoint polygons."""
    polygons = np.array([area.polygon for area in areas], dtype=object)
    i, j = shapely.STRtree(polygons).query(polygons, predicate="intersects")
    return merge(polygons, np.stack((i[i < j], j[i < j]), axis=1))
