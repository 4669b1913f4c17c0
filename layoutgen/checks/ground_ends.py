"""Ends of lines and of coupled pairs' strips on gnd: their vias, and the direct current that leaves there."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from layoutgen.checks.nodes import GROUND, ground_end
from layoutgen.geometry import Point

if TYPE_CHECKING:
    from layoutgen.artwork import Artwork
    from layoutgen.checks.board import Board, Drill
    from layoutgen.placement import PlacedPair

__all__ = ["GroundEnd", "ground_ends"]


@dataclass(frozen=True, slots=True)
class GroundEnd:
    """An end on gnd: the line or pair, the net at its other end, the vias of its own.

    ``current`` [A] flows from that net into gnd; it is the same in each via.
    """

    item: str
    net: str
    vias: tuple[Drill, ...]
    current: float

    @property
    def share(self) -> float:
        """Current [A] in each via; 0 without vias."""
        return self.current / len(self.vias) if self.vias else 0.0


def ground_ends(board: Board) -> list[GroundEnd]:
    """Return the ends on gnd in file order; none without a circuit.

    A pair's vias belong each to the strip's end that they stand nearest to.
    """
    if board.artwork is None:
        return []
    return [*_of_lines(board, board.artwork), *_of_pairs(board, board.artwork)]


def _own_vias(board: Board, name: str) -> list[Drill]:
    """Return the vias set for a line or pair."""
    return [via for via in board.vias if via.purpose == f"line:{name}"]


def _of_lines(board: Board, artwork: Artwork) -> Iterator[GroundEnd]:
    """Yield the ends of lines on gnd."""
    currents = artwork.placement.sized.circuit.dc.currents
    for line in artwork.placement.lines.values():
        if (end := ground_end(line.nets)) is not None:
            into = currents.get(line.name, 0.0) * (1.0 if end == 1 else -1.0)
            yield GroundEnd(line.name, line.nets[1 - end], tuple(_own_vias(board, line.name)), into)


def _of_pairs(board: Board, artwork: Artwork) -> Iterator[GroundEnd]:
    """Yield the ends of pairs' strips on gnd."""
    currents = artwork.placement.sized.circuit.dc.currents
    for pair in artwork.placement.pairs.values():
        ends = [index for index, net in enumerate(pair.nets) if net == GROUND]
        vias = _own_vias(board, pair.name) if ends else []
        nearest = _nearest(pair, ends, vias)
        for k, index in enumerate(ends):
            strip, end = divmod(index, 2)
            into = currents.get(f"{pair.name}:{strip}", 0.0) * (1.0 if end == 1 else -1.0)
            own = tuple(via for via, at in zip(vias, nearest, strict=True) if at == k)
            yield GroundEnd(pair.name, pair.nets[index ^ 1], own, into)


def _nearest(pair: PlacedPair, ends: list[int], vias: list[Drill]) -> list[int]:
    """Return for each via which of a pair's ends on gnd it stands nearest to."""
    places: list[Point] = [pair.paths[index // 2][-(index % 2)] for index in ends]
    return [int(np.argmin([np.hypot(x - via.x, y - via.y) for x, y in places])) for via in vias]
