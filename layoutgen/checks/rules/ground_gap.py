"""The pour keeps the distance from lines that it was set.

What: the distance from each line, coupled pair and radial stub to the pour is at least the one it was
sized with.
Where a line meets a grounded coplanar line, the pour follows that one up to their junction: the other's last
stretch, as long as the distances differ, keeps the coplanar line's distance only. A note tells.
Why: nearer pour lowers the line's impedance below what was allowed for.
How measured: exactly, from the finished copper of the line to the finished pour. Left out: pour inside
part outlines; the last such distance of a line before its end on gnd, counted from the axis of its via.
Lands of vias, and copper between ground pads and their vias, are not pour. Chords of arcs: 1 um short of
the distance passes.
Source: the distance is the sizing's, from ``ground.max_impedance_shift`` or ``ground.gap`` of the circuit
file.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping

import numpy as np
import shapely

from layoutgen.artwork import Artwork
from layoutgen.checks.board import Board
from layoutgen.checks.drawn import pour_gaps
from layoutgen.checks.fences import part_outlines
from layoutgen.checks.nodes import GROUND, ground_end, pair_tails, tail_of
from layoutgen.checks.outcome import Hit, Outcome, Rule, mm, named, too_small
from layoutgen.checks.planar import TOLERANCE_NM, Geometry, middle, parts
from layoutgen.checks.records import NotChecked

__all__ = ["RULE"]

NAME = "ground.gap"
_TOLERANCE_NM = 1_000.0
_LINE_ROLES = ("line", "pair", "radial")
_OWN_ROLES = ("pad", "ground", "land")


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each line that the pour comes too near to."""
    if board.artwork is None:
        return
    pours = [piece.polygon for piece in board.top.pieces if piece.role == "pour"]
    if not pours:
        yield NotChecked(NAME, "there is no pour")
        return
    gaps = pour_gaps(board.artwork)
    yield from _coplanar_notes(board.artwork, gaps)
    away = part_outlines(board.artwork, TOLERANCE_NM).union(_own_ground(board))
    pour = np.array([p for whole in pours for p in parts(whole.difference(away))], dtype=object)
    tree = shapely.STRtree(pour)
    for item, line, limit in _lines(board, board.artwork, gaps):
        near = np.sort(tree.query(line, predicate="dwithin", distance=max(limit - _TOLERANCE_NM, 0.0)))
        for k in near.tolist():
            distance = float(line.distance(pour[k]))
            if distance < limit - _TOLERANCE_NM:
                text, at = f"pour beside {item} at", middle(line, pour[k])
                yield too_small(NAME, text, distance, limit, at, named(item, "pour"), (GROUND,))


def _own_ground(board: Board) -> Geometry:
    """Return the ground copper of parts and lines: pour drawn over it is no pour."""
    own = [p.polygon for p in board.top.pieces if p.node == GROUND and p.role in (*_OWN_ROLES, *_LINE_ROLES)]
    return shapely.union_all(own)


def _lines(
    board: Board, artwork: Artwork, gaps: Mapping[str, float]
) -> Iterator[tuple[str, Geometry, float]]:
    """Yield the copper of each line with the distance it has to keep, without its last before gnd.

    Ends at a grounded coplanar line come apart from the rest.
    """
    found: dict[str, list[shapely.Polygon]] = {}
    for piece in board.top.pieces:
        if piece.role in _LINE_ROLES and piece.item in gaps:
            found.setdefault(piece.item, []).append(piece.polygon)
    lines = {item: shapely.union_all(polygons) for item, polygons in found.items()}
    for line in artwork.placement.lines.values():
        if line.name in lines and ground_end(line.nets) is not None:
            lines[line.name] = lines[line.name].difference(tail_of(line, gaps[line.name]))
    for pair in artwork.placement.pairs.values():
        for _, tail in pair_tails(pair, gaps[pair.name]) if pair.name in lines else ():
            lines[pair.name] = lines[pair.name].difference(tail)
    for name, end, near in coplanar_ends(artwork, gaps):
        if name in lines:
            tail = tail_of(artwork.placement.lines[name], gaps[name] - near, end)
            yield name, lines[name].intersection(tail), near
            lines[name] = lines[name].difference(tail)
    yield from ((name, line, gaps[name]) for name, line in lines.items())


def coplanar_ends(artwork: Artwork, gaps: Mapping[str, float]) -> Iterator[tuple[str, int, float]]:
    """Yield where lines meet a grounded coplanar line with nearer pour: line, its end, that distance [nm]."""
    placement = artwork.placement
    nearest: dict[str, float] = {}
    for name, asked in placement.sized.circuit.file.lines.items():
        if asked.kind == "grounded_coplanar" and name in gaps:
            nearest |= {net: min(gaps[name], nearest.get(net, math.inf)) for net in asked.nets}
    for line in placement.lines.values():
        for end, net in enumerate(line.nets):
            if net != GROUND and nearest.get(net, math.inf) < gaps.get(line.name, 0.0):
                yield line.name, end, nearest[net]


def _coplanar_notes(artwork: Artwork, gaps: Mapping[str, float]) -> Iterator[Hit]:
    """Yield a note for each end of a line beside which the pour follows a grounded coplanar line."""
    for name, end, near in coplanar_ends(artwork, gaps):
        net, at = artwork.placement.lines[name].nets[end], artwork.placement.lines[name].path[-end]
        text = (
            f"{name} meets a grounded coplanar line at net {net}: over the last {mm(gaps[name] - near)} "
            f"before that its pour may come nearer than {mm(gaps[name])}, to {mm(near)}"
        )
        yield Hit(rule=NAME, text=text, items=(name,), at=at, nets=(net,), note=True)


RULE = Rule(names=(NAME,), find=find, keyless=True, needs_circuit=True)
