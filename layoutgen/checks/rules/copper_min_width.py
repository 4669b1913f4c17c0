"""Copper is nowhere narrower than the etching can leave.

What: the distance across finished copper between facing edges of one outline, lines, tapers, necks of
mitres and slivers of pour alike, is at least ``copper.min_width``.
Why: narrower copper may be etched through or lift off; a narrow line also misses its impedance.
How measured: exactly, on the joined copper of each layer, between facing edges found through a tree over
all edges, not on centre-lines. Two places of one outline less than 3.5 limits apart along it are a corner
and are not counted, so copper tapering to a point is counted where its angle is below about 33 degrees.
Copper of one net that meets in a single point only (two corners, a void that touches the outline) measures 0.
Finished copper is the artwork less ``copper.undercut`` on each edge. A distance 10 nm short of the limit
passes (rounding to whole nanometres, chords of arcs).
Source: the limit is the board house's; the 3.5 limits are a choice of this project.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import shapely

from layoutgen.checks.board import Board, Layer
from layoutgen.checks.outcome import Hit, Outcome, Rule, named, too_small
from layoutgen.checks.planar import TOLERANCE_NM, whole
from layoutgen.checks.spots import item_at, net_at, spots

__all__ = ["RULE"]

NAME = "copper.min_width"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each neck."""
    limit = board.limits.nm(NAME)
    if limit is not None:
        for layer in board.layers:
            yield from _necks(layer, limit)
            yield from _pinched(layer, limit)


def _necks(layer: Layer, limit: float) -> Iterator[Hit]:
    """Yield a hit for each neck on one layer."""
    for spot in spots(layer, layer.necks(limit)):
        items = named(item_at(layer, spot.first), item_at(layer, spot.second))
        nets = named(net_at(layer, spot.first), net_at(layer, spot.second))
        text = f"copper of {' and '.join(items)} is wide only"
        yield too_small(NAME, text, spot.distance, limit, spot.at, items, nets, layer.name)


def _pinched(layer: Layer, limit: float) -> Iterator[Hit]:
    """Yield a hit for each point by which alone copper of one net hangs together."""
    for x, y in layer.pinches.tolist():
        near = layer.tree.query(shapely.Point(x, y), predicate="dwithin", distance=TOLERANCE_NM)
        pieces = [layer.pieces[k] for k in np.sort(near).tolist()]
        if len({piece.node for piece in pieces}) == 1:  # of several nets it is a short
            items, nets = named(*(p.item for p in pieces)), named(*(p.net or "" for p in pieces))
            text = f"copper of {' and '.join(items)} meets in a point, wide only"
            yield too_small(NAME, text, 0.0, limit, whole(x, y), items, nets, layer.name)


RULE = Rule(names=(NAME,), find=find)
