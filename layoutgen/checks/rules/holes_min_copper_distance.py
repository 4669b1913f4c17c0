"""Holes keep away from copper that they must not meet.

What: from the wall of a plated hole to copper of another net, and from the wall of an unplated hole to
any copper, are at least ``holes.min_copper_distance``, on both layers.
Why: drills wander; a barrel that meets other copper shorts it, an unplated hole tears it.
How measured: axis to copper less the radius, exact. Copper under an unplated hole counts as drilled away,
so it measures 0. A plated hole that meets another net's copper is ``connectivity.short``. A line that
ends on gnd is taken as cut there, so that its own vias are not found. A plated hole without a net belongs
to what it meets. 10 nm short of the limit passes.
Source: the limit is the board house's.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from layoutgen.checks.board import Board, Layer
from layoutgen.checks.drills import touched, wall_middle
from layoutgen.checks.outcome import Hit, Outcome, Rule, named, too_small
from layoutgen.checks.planar import TOLERANCE_NM, near_points

__all__ = ["RULE"]

NAME = "holes.min_copper_distance"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each hole that is too near to copper."""
    limit = board.limits.nm(NAME)
    if limit is None or not board.drills:
        return
    own = _own_nodes(board)
    for layer in board.layers:
        if layer.pieces:
            yield from _near_copper(board, layer, limit, own)


def _own_nodes(board: Board) -> list[frozenset[str | None]]:
    """Return for each hole the nodes that it belongs to."""
    met = [touched(board, layer) for layer in board.layers]
    own: list[frozenset[str | None]] = []
    for k, drill in enumerate(board.drills):
        if drill.node is not None or not drill.plated:
            own.append(frozenset((drill.node,)))
            continue
        pieces = [board.layers[n].pieces[p] for n in (0, 1) for p in met[n].get(k, [])]
        own.append(frozenset(piece.node for piece in pieces))
    return own


def _near_copper(board: Board, layer: Layer, limit: float, own: list[frozenset[str | None]]) -> Iterator[Hit]:
    """Yield the holes that are too near to copper of one layer."""
    reach = np.maximum(board.drill_radii + limit - TOLERANCE_NM, 0.0)
    for k, n in sorted(zip(*map(list, near_points(layer.tree, board.drill_points, reach)), strict=True)):
        drill, piece = board.drills[k], layer.pieces[n]
        if drill.plated and piece.node in own[k]:
            continue
        gap, at = wall_middle(drill, board.drill_points[k], piece.polygon)
        if gap < limit - TOLERANCE_NM and not (drill.plated and gap <= 0.0):
            text = f"wall of {drill.item} to copper of {piece.item}"
            items, nets = named(drill.item, piece.item), named(drill.net or "", piece.net or "")
            yield too_small(NAME, text, max(gap, 0.0), limit, at, items, nets, layer.name)


RULE = Rule(names=(NAME,), find=find)
