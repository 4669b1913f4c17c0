"""The pour keeps the distance from lines that it was set.

What: the distance from each line, coupled pair and radial stub to the pour is at least the one it was
sized with.
Why: nearer pour lowers the line's impedance below what was allowed for.
How measured: exactly, from the finished copper of the line to the finished pour. Left out: pour inside
part outlines; the last such distance of a line before its end on gnd, counted from the axis of its via.
Lands of vias, and copper between ground pads and their vias, are not pour. Chords of arcs: 1 um short of
the distance passes.
Source: the distance is the sizing's, from ``ground.max_impedance_shift`` or ``ground.gap`` of the circuit
file.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping

import numpy as np
import shapely

from layoutgen.artwork import Artwork
from layoutgen.checks.board import Board
from layoutgen.checks.drawn import pour_gaps
from layoutgen.checks.fences import part_outlines
from layoutgen.checks.nodes import GROUND, ground_end, tail_of
from layoutgen.checks.outcome import Outcome, Rule, named, too_small
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
    away = part_outlines(board.artwork, TOLERANCE_NM).union(_own_ground(board))
    pour = np.array([p for whole in pours for p in parts(whole.difference(away))], dtype=object)
    tree = shapely.STRtree(pour)
    for item, line in _lines(board, board.artwork, gaps).items():
        limit = gaps[item]
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


def _lines(board: Board, artwork: Artwork, gaps: Mapping[str, float]) -> dict[str, Geometry]:
    """Return the copper of each line that has a distance to keep, without its last before gnd."""
    found: dict[str, list[shapely.Polygon]] = {}
    for piece in board.top.pieces:
        if piece.role in _LINE_ROLES and piece.item in gaps:
            found.setdefault(piece.item, []).append(piece.polygon)
    lines = {item: shapely.union_all(polygons) for item, polygons in found.items()}
    for line in artwork.placement.lines.values():
        if line.name in lines and ground_end(line.nets) is not None:
            lines[line.name] = lines[line.name].difference(tail_of(line, gaps[line.name]))
    return lines


RULE = Rule(names=(NAME,), find=find, keyless=True, needs_circuit=True)
