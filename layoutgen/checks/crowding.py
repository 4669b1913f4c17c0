"""Where direct current crowds: cuts across the solved sheets, with what they pass through."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import NamedTuple

import numpy as np

from layoutgen.checks.board import Board
from layoutgen.checks.planar import whole
from layoutgen.checks.sheet import Cut, NetSheet, cuts
from layoutgen.geometry import Point

__all__ = ["CUT_ERROR", "Crowded", "crowded"]

CUT_ERROR = 0.005
"""How far the mesh may be off in a cut's mean density [-]: half a per cent passes."""


class Crowded(NamedTuple):
    """A cut with the item it passes through and the net, and its middle [nm]."""

    cut: Cut
    item: str
    net: str
    at: Point


def crowded(board: Board, above: Callable[[NetSheet], float]) -> Iterator[Crowded]:
    """Yield the cuts that may carry too much, in the order of nets.

    Args:
        board: The board.
        above: Sheet current density [A/nm] below which nothing of a net is too much.
    """
    for sheet in board.sheets.solved:
        found = cuts(sheet.flow, above(sheet))
        owners = board.top.owners(np.array([(cut.x, cut.y) for cut in found]).reshape(-1, 2))
        for cut, owner in zip(found, owners, strict=True):
            item = board.top.pieces[owner].item if owner >= 0 else board.top.nearest_item(cut.x, cut.y)
            yield Crowded(cut, item, sheet.net, whole(cut.x, cut.y))
