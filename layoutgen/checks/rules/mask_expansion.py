"""Mask openings clear the pads they belong to.

What: the mask opening reaches at least ``mask.expansion`` beyond the outline of each pad, on every side.
Why: the mask is printed a little off its place; mask on a pad keeps solder away.
How measured: from the pad's outline to the outline of the joined openings around it, exact; negative or
no figure where the pad is not inside an opening. Where the board ends first (a pad at its cut-out) only
the board counts. 10 nm short of the limit passes.
Source: the limit is the board house's.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import shapely

from layoutgen.checks.board import Board
from layoutgen.checks.drawn import joined
from layoutgen.checks.outcome import Hit, Outcome, Rule, too_small
from layoutgen.checks.planar import CHORD_NM, TOLERANCE_NM, Geometry, middle
from layoutgen.placement import PlacedPad

__all__ = ["RULE"]

NAME = "mask.expansion"
_LAYER = "soldermask_top"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each pad whose opening is too small or missing."""
    limit = board.limits.nm(NAME)
    if limit is None or board.artwork is None:
        return
    openings = joined(board.openings) if board.openings else np.array([], dtype=object)
    for part in board.artwork.placement.parts.values():
        for pad in part.pads:
            outline = pad.outline.polygon(CHORD_NM)
            if outline.area > 0.0:
                yield from _pad(board, openings, part.name, pad, outline, limit)


def _pad(
    board: Board,
    openings: np.ndarray[tuple[int], np.dtype[np.object_]],
    part: str,
    pad: PlacedPad,
    outline: shapely.Polygon,
    limit: float,
) -> Iterator[Hit]:
    """Yield the hit of one pad."""
    host = next((o for o in openings[shapely.intersects(openings, outline.centroid)]), None)
    name = f"mask opening of pad {pad.pin} of {part}" if pad.pin else f"mask opening of {part}"
    items, nets = (part,), (pad.net,)
    covered = shapely.MultiPolygon() if host is None else host
    bare = _on_board(board, outline.difference(covered))
    if host is None and bare.is_empty:  # the pad lies off the board: the edge rule's matter
        return
    if host is None or bare.area > TOLERANCE_NM * outline.length:
        at = middle(bare, outline)
        text = f"{name} leaves {bare.area / 1e12:.4f} mm^2 of the pad covered"
        yield Hit(
            rule=NAME, text=text, items=items, at=at, limit=limit / 1e6, unit="mm", layer=_LAYER, nets=nets
        )
        return
    rim = _on_board(board, host.boundary)
    distance = float(outline.distance(rim)) if not rim.is_empty else limit
    if distance < limit - TOLERANCE_NM:
        at = middle(outline, rim)
        yield too_small(NAME, f"{name} reaches beyond it by", distance, limit, at, items, nets, _LAYER)


def _on_board(board: Board, geometry: Geometry) -> Geometry:
    """Return what of a geometry lies on the board, off its cut-outs."""
    if board.outline is not None:
        geometry = geometry.intersection(board.outline.buffer(-TOLERANCE_NM, join_style="mitre"))
    for cutout in board.cutouts:
        geometry = geometry.difference(cutout.polygon.buffer(TOLERANCE_NM, join_style="mitre"))
    return geometry


RULE = Rule(names=(NAME,), find=find, needs_circuit=True)
