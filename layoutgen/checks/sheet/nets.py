"""Which copper carries direct current, where it enters and leaves, and the solved sheet of each net.

A current enters a pad evenly over its outline, a port over a square at its end, a line or a strip of a
coupled pair that ends on gnd evenly at the barrels of its vias. Nets that lines join are one sheet. The
ground's own copper is left out.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.checks.ground_ends import ground_ends
from layoutgen.checks.nodes import GROUND, joined_nets
from layoutgen.checks.planar import CHORD_NM, array_of, parts
from layoutgen.checks.records import NotChecked
from layoutgen.checks.sheet.mesh import mesh_of
from layoutgen.checks.sheet.recovery import missing_power
from layoutgen.checks.sheet.solve import Flow, loads_on, solve

if TYPE_CHECKING:
    from layoutgen.artwork import Artwork
    from layoutgen.checks.board import Board
    from layoutgen.placement import PlacedPort

__all__ = ["NetSheet", "Sheets", "Terminal", "sheets_of"]

_LEAST_A = 1e-6
"""Currents below this are not looked at [A]."""
_UNBALANCED = 1e-6
"""Largest sum of terminal currents that counts as none, in the largest of them [-]."""
_FINE = 4.0
"""Triangle edges across a region where a current enters, at least [-]."""
_END_ROLES = ("line", "pair", "ground")
"""Copper on gnd that belongs to the end of a line or strip there, when it bears the line's name."""
NAME = "current crowding"


@dataclass(frozen=True, slots=True, eq=False)
class Terminal:
    """A place where current enters copper (negative: leaves): element, region [nm], current [A]."""

    item: str
    region: BaseGeometry
    current: float


@dataclass(frozen=True, slots=True, eq=False)
class NetSheet:
    """One piece of copper with its flow: the first of its nets, its terminals, currents through it.

    ``drop`` [V] is the largest difference of potential between two terminals (mean over each), ``power`` [W]
    the heat in the copper, both with what linear triangles lose put back; ``flow.density`` (M,) is the sheet
    current density in each triangle [A/nm].
    """

    net: str
    terminals: tuple[Terminal, ...]
    flow: Flow
    drop: float
    power: float

    @property
    def largest(self) -> float:
        """The largest terminal current [A]."""
        return max(abs(terminal.current) for terminal in self.terminals)


@dataclass(frozen=True, slots=True, eq=False)
class Sheets:
    """The solved sheets, and the nets that could not be solved."""

    solved: tuple[NetSheet, ...]
    skipped: tuple[NotChecked, ...]


def sheets_of(board: Board) -> Sheets:
    """Return the flow in every piece of copper off gnd that carries current; none without a circuit."""
    if board.artwork is None or board.thickness is None:
        return Sheets((), ())
    found = _terminals(board, board.artwork)
    solved: list[NetSheet] = []
    skipped: list[NotChecked] = []
    for node, terminals in found.items():
        for copper in _copper(board, node, terminals):
            outcome = _solved(board, node, copper, _inside(copper, terminals))
            if isinstance(outcome, NetSheet):
                solved.append(outcome)
            elif outcome is not None:
                skipped.append(outcome)
    return Sheets(tuple(solved), tuple(dict.fromkeys(skipped)))


def _terminals(board: Board, artwork: Artwork) -> Mapping[str, list[Terminal]]:
    """Return the terminals of each node that carry current, ``gnd`` left out."""
    nodes = joined_nets(artwork.placement.sized.circuit.file)
    found: dict[str, list[Terminal]] = {}
    for net, terminal in (*_at_pads(artwork), *_at_ports(artwork), *_at_vias(board)):
        if net != GROUND and abs(terminal.current) > _LEAST_A:
            found.setdefault(nodes.get(net, net), []).append(terminal)
    return found


def _at_pads(artwork: Artwork) -> Iterator[tuple[str, Terminal]]:
    """Yield what parts put into the copper at their pads: net, terminal."""
    currents = artwork.placement.sized.circuit.dc.currents
    parts_of = artwork.placement.sized.circuit.file.parts
    for part in artwork.placement.parts.values():
        nets = parts_of[part.name].nets
        for pad in part.pads:
            outline = pad.outline.polygon(CHORD_NM)
            if nets is None:
                into = -currents.get(f"{part.name}.{pad.pin}", 0.0)
            else:
                into = currents.get(part.name, 0.0) * (-1.0 if pad.net == nets[0] else 1.0)
            if outline.area > 0.0:
                yield pad.net, Terminal(part.name, outline, into)


def _at_ports(artwork: Artwork) -> Iterator[tuple[str, Terminal]]:
    """Yield what ports take out of the copper."""
    currents = artwork.placement.sized.circuit.dc.currents
    for port in artwork.placement.ports.values():
        yield port.net, Terminal(port.name, _port_square(port), -currents.get(port.name, 0.0))


def _port_square(port: PlacedPort) -> shapely.Polygon:
    """Return the square of copper at a port's end [nm]."""
    turn, half = np.radians(port.heading), port.width / 2.0
    along, across = np.array((np.cos(turn), np.sin(turn))), np.array((-np.sin(turn), np.cos(turn)))
    end = np.array((port.x, port.y), dtype=float)
    corners = [end - half * across, end + half * across]
    return shapely.Polygon([*corners, corners[1] + port.width * along, corners[0] + port.width * along])


def _at_vias(board: Board) -> Iterator[tuple[str, Terminal]]:
    """Yield what lines and strips of pairs that end on gnd lose at their vias, in equal shares."""
    for end in ground_ends(board):
        for via in end.vias:
            disc = shapely.Point(via.x, via.y).buffer(via.diameter / 2.0)
            yield end.net, Terminal(end.item, disc, -end.share)


def _copper(board: Board, node: str, terminals: Sequence[Terminal]) -> list[shapely.Polygon]:
    """Return a node's copper on the top as disjoint polygons, with the gnd ends of its lines and strips.

    To such an end belong the lands of its vias and the ground copper that leads to them.
    """
    meant = {terminal.item for terminal in terminals}
    ends = [end for end in ground_ends(board) if end.item in meant]
    names, vias = {end.item for end in ends}, {via.item for end in ends for via in end.vias}
    own = [
        piece.polygon
        for piece in board.top.pieces
        if piece.node == node
        or (piece.node == GROUND and piece.role in _END_ROLES and piece.item in names)
        or (piece.role == "land" and piece.item in vias)
    ]
    return parts(shapely.union_all(array_of(own))) if own else []


def _inside(copper: shapely.Polygon, terminals: Sequence[Terminal]) -> tuple[Terminal, ...]:
    """Return the terminals that lie on a piece of copper."""
    return tuple(terminal for terminal in terminals if copper.intersects(terminal.region.centroid))


def _solved(
    board: Board, node: str, copper: shapely.Polygon, terminals: tuple[Terminal, ...]
) -> NetSheet | NotChecked | None:
    """Return the flow in one piece of copper, or why there is none; None without current."""
    if not terminals:
        return None
    total = sum(terminal.current for terminal in terminals)
    if abs(total) > _UNBALANCED * max(abs(terminal.current) for terminal in terminals):
        return NotChecked(NAME, f"net {node}: its copper is in pieces, or more current enters than leaves")
    fine = np.array([(*_middle(t.region), np.sqrt(t.region.area) / _FINE) for t in terminals])
    mesh = mesh_of(copper, fine)
    if mesh is None:
        return NotChecked(NAME, f"net {node}: no mesh fits its copper")
    loads = [loads_on(mesh, terminal.region, terminal.current) for terminal in terminals]
    flow = solve(mesh, np.sum(loads, axis=0))
    levels = [float(load @ flow.potential) / t.current for load, t in zip(loads, terminals, strict=True)]
    ohms, power = _sheet_ohms(board), flow.power + missing_power(flow)
    drop = (max(levels) - min(levels)) * (power / flow.power if flow.power > 0.0 else 1.0)
    return NetSheet(node, terminals, flow, ohms * drop, ohms * power)


def _middle(region: BaseGeometry) -> tuple[float, float]:
    """Return the middle of a region [nm]."""
    return region.centroid.x, region.centroid.y


def _sheet_ohms(board: Board) -> float:
    """Return the copper's sheet resistance [ohm]."""
    assert board.artwork is not None
    substrate = board.artwork.placement.sized.circuit.file.substrate
    return float(1.0 / (substrate.conductivity * substrate.copper_thickness))
