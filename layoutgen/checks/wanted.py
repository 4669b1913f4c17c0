"""Where the circuit wants copper: pads, ports, centre-lines, rays through stubs; and what of it lies bare."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import NamedTuple

import numpy as np
import shapely

from layoutgen.artwork import Artwork
from layoutgen.checks.board import Board, Layer
from layoutgen.checks.drawn import disc
from layoutgen.checks.nodes import GROUND, OPEN
from layoutgen.checks.planar import CHORD_NM, Geometry, array_of
from layoutgen.placement import Bend, PlacedLine, PlacedPort, PlacedRadial

__all__ = ["Wanted", "bare_places"]

_STEP_NM = 2_000.0
_REACH_NM = 1_000.0
_LEAST_SINE = 0.1
_RAYS = (-0.45, 0.0, 0.45)
"""Where rays run through a radial stub, in its sector [-]."""


class Wanted(NamedTuple):
    """A place that has to lie on copper: the element, its net, and the place [nm]: a line or an area."""

    item: str
    net: str
    place: Geometry


def bare_places(board: Board, artwork: Artwork) -> Iterator[tuple[Wanted, Geometry]]:
    """Yield the places that do not lie on top copper, each with what of it lies bare by over a micrometre.

    Where an unplated hole was drilled nothing is wanted.
    """
    wanted = list(_wanted(artwork))
    places = array_of([one.place for one in wanted])
    held = np.zeros(len(wanted), dtype=bool)
    if wanted and board.top.pieces:
        held[board.top.tree.query(places, predicate="covered_by")[0]] = True
    drilled = shapely.union_all([disc(drill, _REACH_NM) for drill in board.drills if not drill.plated])
    for k in np.flatnonzero(~held).tolist():
        bare = _bare(board.top, places[k]).difference(drilled)
        if not bare.is_empty:
            yield wanted[k], bare


def _bare(top: Layer, place: Geometry) -> Geometry:
    """Return what of a place lies farther than a micrometre from all copper of a layer."""
    if not top.pieces:
        return place
    x0, y0, x1, y1 = place.bounds
    around = shapely.box(x0 - _STEP_NM, y0 - _STEP_NM, x1 + _STEP_NM, y1 + _STEP_NM)
    near = top.polygons[top.tree.query(around, predicate="intersects")]
    return place.difference(shapely.union_all(shapely.intersection(near, around)).buffer(_REACH_NM))


def _wanted(artwork: Artwork) -> Iterator[Wanted]:
    """Yield the places that have to lie on copper."""
    placement = artwork.placement
    for part in placement.parts.values():
        for pad in part.pads:
            if (outline := pad.outline.polygon(CHORD_NM)).area > 0.0:
                yield Wanted(part.name, pad.net, outline)
    for port in placement.ports.values():
        yield Wanted(port.name, port.net, _at_port(port))
    for line in placement.lines.values():
        yield Wanted(line.name, line.nets[0], _along(line))
    for pair in placement.pairs.values():
        for strip, path in enumerate(pair.paths):
            nets = [net for net in pair.nets[2 * strip : 2 * strip + 2] if net not in (GROUND, OPEN)]
            yield Wanted(pair.name, (*nets, GROUND)[0], shapely.LineString(path))
    for stub in placement.radials.values():
        yield Wanted(stub.name, stub.nets[0], _rays(stub))


def _at_port(port: PlacedPort) -> shapely.LineString:
    """Return the first two micrometres of the way from a port into the board."""
    turn = np.radians(port.heading)
    inside = port.x + _STEP_NM * np.cos(turn), port.y + _STEP_NM * np.sin(turn)
    return shapely.LineString([(port.x, port.y), inside])


def _along(line: PlacedLine) -> Geometry:
    """Return a line's centre-line, without what its mitred bends cut off."""
    corners = [shapely.Point(line.path[bend.vertex]).buffer(_cut_off(line, bend)) for bend in line.bends]
    return shapely.LineString(line.path).difference(shapely.union_all(corners))


def _cut_off(line: PlacedLine, bend: Bend) -> float:
    """Return how far from a bend's vertex its mitre cuts into the centre-line [nm].

    A mitre of M times the diagonal of the corner cuts (M - 1/2) w / (sin cos) of half the turn off each leg.
    """
    deep = max(0.0, bend.mitre_percent / 100.0 - 0.5)
    return _STEP_NM + 2.0 * deep * line.width / max(abs(math.sin(math.radians(bend.turn))), _LEAST_SINE)


def _rays(stub: PlacedRadial) -> shapely.MultiLineString:
    """Return rays through a radial stub, from its inner radius to its arc."""
    rays = []
    for share in _RAYS:
        turn = np.radians(stub.heading + share * stub.sector_deg)
        way = np.array((np.cos(turn), np.sin(turn)))
        ends = [np.array(stub.apex) + radius * way for radius in (stub.inner_radius, stub.outer_radius)]
        rays.append(shapely.LineString(ends))
    return shapely.MultiLineString(rays)
