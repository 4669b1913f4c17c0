"""Copper that carries direct current: lines, strips of pairs, common strips; how narrow each is drawn."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
import shapely

from layoutgen.checks.board import Board
from layoutgen.checks.facing import edges_of, facing
from layoutgen.checks.planar import CORNER_LIMITS, TOLERANCE_NM, Floats, whole
from layoutgen.geometry import Point

__all__ = ["Carrier", "Neck", "carriers", "necks"]

_ROLES = frozenset(("line", "pair", "strip"))


@dataclass(frozen=True, slots=True)
class Carrier:
    """An element of copper with its direct current [A], drawn width [nm], and a place on it [nm]."""

    item: str
    current: float
    width: float
    at: Point


@dataclass(frozen=True, slots=True)
class Neck:
    """A place where a carrier is narrower than asked: its width [nm] and its middle [nm]."""

    width: float
    at: Point


def carriers(board: Board) -> Iterator[Carrier]:
    """Yield the elements whose direct current is not zero, in file order; currents as magnitudes."""
    if board.artwork is None:
        return
    placement = board.artwork.placement
    currents = placement.sized.circuit.dc.currents
    for line in placement.lines.values():
        if current := abs(currents.get(line.name, 0.0)):
            yield Carrier(line.name, current, line.width, _halfway(line.path))
    for pair in placement.pairs.values():
        currents_of = [abs(currents.get(f"{pair.name}:{k}", 0.0)) for k in (0, 1)]
        if max(currents_of) > 0.0:
            path = pair.paths[int(currents_of[1] > currents_of[0])]
            yield Carrier(pair.name, max(currents_of), pair.width, _halfway(path))
    for strip in placement.strips:
        if strip.current:
            yield Carrier(strip.name, abs(strip.current), strip.width, _halfway(strip.path))


def _halfway(path: tuple[Point, ...]) -> Point:
    """Return the middle of a centre-line."""
    middle = shapely.LineString(path).interpolate(0.5, normalized=True)
    return whole(middle.x, middle.y)


def necks(board: Board, carrier: Carrier, needed: float) -> Iterator[Neck]:
    """Yield the places where a carrier's copper is narrower than needed [nm].

    Its own copper is judged together with what it touches, so that an overlapped end is no neck, and only
    places on its own outline count. Corners are left out as for ``copper.min_width``. Beside a hole the
    copper on all sides of it counts together.
    """
    layer = board.top
    own = [k for k, p in enumerate(layer.pieces) if p.item == carrier.item and p.role in _ROLES]
    if not own:
        return
    i, j = layer.touching.T
    met = np.union1d(j[np.isin(i, own)], i[np.isin(j, own)])
    around = [k for k in np.union1d(met, own).tolist() if layer.nodes[k] == layer.nodes[own[0]]]
    edges = edges_of(shapely.get_parts(shapely.union_all(layer.polygons[around])))
    limit = needed - TOLERANCE_NM
    places = facing(edges, limit, CORNER_LIMITS * needed, across_copper=True)
    rim = shapely.boundary(shapely.union_all(layer.polygons[own]))
    on = shapely.dwithin(shapely.points(places.first), rim, TOLERANCE_NM)
    on &= shapely.dwithin(shapely.points(places.second), rim, TOLERANCE_NM)
    split = edges.ring[places.i] != edges.ring[places.j]
    for k in np.flatnonzero(on).tolist():
        first, second = places.first[k], places.second[k]
        width = float(places.distance[k])
        if split[k]:
            width = _section(edges.polygons[edges.polygon[places.i[k]]], first, second)
        if width < limit:
            yield Neck(width, whole(*((first + second) / 2.0).tolist()))


def _section(copper: shapely.Polygon, first: Floats, second: Floats) -> float:
    """Return the width [nm] of copper from outline to outline on the line through two points, less holes."""
    way = (second - first) / np.hypot(*(second - first))
    x0, y0, x1, y1 = copper.bounds
    reach = np.hypot(x1 - x0, y1 - y0) * way
    across = shapely.LineString([first - reach, second + reach])
    outer = shapely.get_parts(across.intersection(shapely.Polygon(copper.exterior)))
    middle = shapely.Point((first + second) / 2.0)
    whole_way = min(outer, key=lambda part: part.distance(middle))
    return float(whole_way.intersection(copper).length)
