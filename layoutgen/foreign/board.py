"""From foreign artwork to the board the rules look at: copper joined, conductors found, vias recognised."""

from __future__ import annotations

import numpy as np
import shapely

from layoutgen.checks.board import Area, Board, Drill, Layer, Piece
from layoutgen.checks.connections import Connections
from layoutgen.checks.drawn import bored, etched
from layoutgen.checks.limits import Limits
from layoutgen.checks.planar import Polygons, array_of, merge
from layoutgen.foreign.curves import fitted_circle
from layoutgen.foreign.records import ForeignArtwork, RoundHole
from layoutgen.reading import RuleFile

__all__ = ["board_of_foreign"]

_COPPER = ("copper_top", "copper_bottom")
_VIA_NM = 1_000.0


def board_of_foreign(artwork: ForeignArtwork, rules: RuleFile) -> Board:
    """Return the board that a drawing of other origin stands for.

    Copper is judged as etching by the undercut leaves it. What hangs together, on both layers and through
    plated holes, is one conductor ``net:N``, the largest first; each piece of it on a layer is ``copper:N``.
    A plated hole of the rule file's via drill with round copper about it on the top is a via.
    """
    limits = Limits(rules)
    drills = tuple(_drills(artwork, limits))
    joined = {name: _joined(artwork, name) for name in _COPPER}
    pieces = {name: [Piece(polygon, "") for polygon in joined[name]] for name in _COPPER}
    undercut = limits.nm("copper.undercut") or 0.0
    for name, layer in pieces.items():
        pieces[name] = bored(etched(layer, undercut) if undercut > 0.0 else layer, drills)
    top, bottom = (Layer(name, tuple(pieces[name])) for name in _COPPER)
    plain = _board(artwork, limits, top, bottom, drills)
    return _named(artwork, limits, plain)


def _board(
    artwork: ForeignArtwork, limits: Limits, top: Layer, bottom: Layer, drills: tuple[Drill, ...]
) -> Board:
    """Return the board of layers and holes."""
    outline = artwork.profile[0] if artwork.profile else None
    cutouts = [shapely.Polygon(ring) for ring in outline.interiors] if outline is not None else []
    return Board(
        limits=limits,
        top=top,
        bottom=bottom,
        drills=drills,
        outline=None if outline is None else shapely.Polygon(outline.exterior),
        cutouts=tuple(Area(polygon, "board") for polygon in cutouts),
        openings=tuple(_areas(artwork, "soldermask_top", "mask")),
        legend=tuple(_areas(artwork, "legend_top", "legend")),
    )


def _areas(artwork: ForeignArtwork, layer: str, word: str) -> list[Area]:
    """Return a layer's polygons with names."""
    return [Area(polygon, f"{word}:{k}") for k, polygon in enumerate(artwork.layers[layer])]


def _joined(artwork: ForeignArtwork, name: str) -> Polygons:
    """Return a layer's copper as disjoint polygons, the largest first."""
    polygons = array_of(artwork.layers[name])
    if not len(polygons):
        return polygons
    i, j = shapely.STRtree(polygons).query(polygons, predicate="intersects")
    whole = merge(polygons, np.stack((i[i < j], j[i < j]), axis=1))
    bounds = shapely.bounds(whole)
    order = np.lexsort((bounds[:, 1], bounds[:, 0], -shapely.area(whole)))
    return np.asarray(whole[order])


def _drills(artwork: ForeignArtwork, limits: Limits) -> list[Drill]:
    """Return the drilled holes, vias first; both are numbered in file order."""
    lands = _lands(artwork, limits)
    vias = [(hole, lands[k]) for k, hole in enumerate(artwork.holes) if k in lands]
    others = [hole for k, hole in enumerate(artwork.holes) if k not in lands]
    found = [
        Drill(f"via:{n}", hole.x, hole.y, hole.diameter, True, land=land)
        for n, (hole, land) in enumerate(vias)
    ]
    return found + [
        Drill(f"hole:{n}", hole.x, hole.y, hole.diameter, hole.plated) for n, hole in enumerate(others)
    ]


def _lands(artwork: ForeignArtwork, limits: Limits) -> dict[int, float]:
    """Return the finished diameter [nm] of the round copper about each via, by the index of its hole."""
    drill, undercut = limits.nm("vias.drill") or 0.0, limits.nm("copper.undercut") or 0.0
    wanted = [k for k, hole in enumerate(artwork.holes) if _is_via_hole(hole, drill)]
    polygons = array_of(artwork.layers["copper_top"])
    if not wanted or not len(polygons):
        return {}
    low_x, low_y, high_x, high_y = shapely.bounds(polygons).T
    square = np.abs((high_x - low_x) - (high_y - low_y)) < 2.0 * _VIA_NM
    rounds = {}
    for polygon in polygons[square]:
        circle = fitted_circle(shapely.get_coordinates(polygon.exterior)[:-1], _VIA_NM)
        if circle is not None:
            spot = round(circle[0] / _VIA_NM), round(circle[1] / _VIA_NM)
            rounds[spot] = max(0.0, float(round(circle[2] - 2.0 * undercut)))
    places = {k: (round(artwork.holes[k].x / _VIA_NM), round(artwork.holes[k].y / _VIA_NM)) for k in wanted}
    return {k: rounds[place] for k, place in places.items() if place in rounds}


def _is_via_hole(hole: RoundHole, drill: float) -> bool:
    """Tell whether a hole is plated and as large as a via's."""
    return hole.plated and abs(hole.diameter - drill) <= _VIA_NM


def _named(artwork: ForeignArtwork, limits: Limits, plain: Board) -> Board:
    """Return the board with its conductors found and its pieces named."""
    joined = Connections(plain)
    cluster = joined.cluster.tolist()
    size: dict[int, float] = {}
    for label, piece in zip(cluster, joined.pieces, strict=True):
        size[label] = size.get(label, 0.0) + (0.0 if piece.role == "barrel" else piece.polygon.area)
    order = sorted(size, key=lambda label: (-size[label], label))
    net = {label: f"net:{n}" for n, label in enumerate(order)}
    count = len(plain.top.pieces)
    layers = []
    for layer, shift in ((plain.top, 0), (plain.bottom, count)):
        nets = [net[cluster[shift + k]] for k in range(len(layer.pieces))]
        pieces = [
            Piece(piece.polygon, f"copper:{shift + k}", nets[k], nets[k])
            for k, piece in enumerate(layer.pieces)
        ]
        layers.append(Layer(layer.name, tuple(pieces)))
    barrels = iter(cluster[count + len(plain.bottom.pieces) :])
    drills = [
        Drill(d.item, d.x, d.y, d.diameter, True, net[label], net[label], d.land)
        if d.plated and (label := next(barrels)) is not None
        else d
        for d in plain.drills
    ]
    return _board(artwork, limits, layers[0], layers[1], tuple(drills))
