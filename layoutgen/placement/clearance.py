"""What stands where during the search, and whether something new may stand beside it.

Everything laid is kept as axis-parallel boxes (exact for routes of right angles, a little larger than the
copper otherwise). Two things that meet in a net are compared without the part of each line that lies within
three substrate heights, or the spacing rule if more, of the shared node: there they are meant to be near.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from enum import IntEnum
from typing import NamedTuple

import numpy as np
import numpy.typing as npt

from layoutgen.placement.frame import Box
from layoutgen.placement.model import Limits

__all__ = ["Kind", "Obstacle", "Obstacles", "clearance_table", "edge_margins", "too_near"]

Ints = npt.NDArray[np.int64]

_MANY = 150  # boxes from which on those far away are left out first
_ROUNDING = 2  # [nm]: edges of odd widths are rounded to the grid


class Kind(IntEnum):
    """What an obstacle is, as far as distances go; a lead is a strip that turns away at a part's pad."""

    LINE = 0
    SUPPLY = 1
    PAD = 2
    STRIP = 3
    GROUND = 4
    BODY = 5
    CUTOUT = 6
    HOLE = 7
    LEAD = 8


class Obstacle(NamedTuple):
    """One box [nm] of an element; a corridor is kept clear but does not count to the board's extent.

    ``at_edges`` names the board edges that the box runs up to (a port's copper): there it keeps ``inset``
    [nm] from the profile instead of its kind's margin. ``net`` is a pad's; ``nets`` are those of one strip of
    a coupled pair.
    """

    box: Box
    kind: Kind
    owner: str
    corridor: bool = False
    at_edges: tuple[str, ...] = ()
    inset: int = 0
    net: str | None = None
    nets: frozenset[str] | None = None

    def reach(self, margins: Mapping[Kind, int]) -> tuple[int, int, int, int]:
        """Return the box with its margin to the profile [nm] on each side."""
        plain = margins[self.kind]
        if not self.at_edges:
            x0, y0, x1, y1 = self.box
            return x0 - plain, y0 - plain, x1 + plain, y1 + plain
        west, south, east, north = (
            self.inset if edge in self.at_edges else plain for edge in ("west", "south", "east", "north")
        )
        return self.box[0] - west, self.box[1] - south, self.box[2] + east, self.box[3] + north


def clearance_table(limits: Limits, pour_gap: int) -> Ints:
    """Return the least distance [nm] between kinds (9, 9), symmetric.

    Lines keep the spacing rule from lines and strips, and the pour's distance from other parts' ground and
    pads; courtyards may touch; the rest keeps what etching and soldering need (common practice, no source:
    one substrate height, at least 0.2 mm).
    """
    small = max(limits.gap, 200_000)
    height = max(small, limits.height)
    via = max(0, limits.pitch - limits.land)
    rows: dict[tuple[Kind, Kind], int] = {
        (Kind.LINE, Kind.LINE): limits.spacing,
        (Kind.LINE, Kind.SUPPLY): limits.spacing,
        (Kind.SUPPLY, Kind.SUPPLY): limits.spacing,
        (Kind.LINE, Kind.PAD): max(pour_gap, height),
        (Kind.LINE, Kind.STRIP): limits.spacing,
        (Kind.LINE, Kind.GROUND): max(pour_gap, small),
        (Kind.LINE, Kind.BODY): height,
        (Kind.SUPPLY, Kind.PAD): height,
        (Kind.SUPPLY, Kind.STRIP): height,
        (Kind.SUPPLY, Kind.GROUND): small,
        (Kind.SUPPLY, Kind.BODY): small,
        (Kind.PAD, Kind.PAD): small,
        (Kind.PAD, Kind.STRIP): height,
        (Kind.PAD, Kind.GROUND): small,
        (Kind.STRIP, Kind.STRIP): height,
        (Kind.STRIP, Kind.GROUND): small,
        (Kind.STRIP, Kind.BODY): small,
        (Kind.GROUND, Kind.GROUND): via,
        (Kind.LINE, Kind.LEAD): height,
        (Kind.SUPPLY, Kind.LEAD): height,
        (Kind.PAD, Kind.LEAD): small,
        (Kind.STRIP, Kind.LEAD): height,
        (Kind.GROUND, Kind.LEAD): small,
        (Kind.BODY, Kind.LEAD): small,
        (Kind.LEAD, Kind.LEAD): small,
    }
    table = np.zeros((len(Kind), len(Kind)), dtype=np.int64)
    for (a, b), value in rows.items():
        table[a, b] = table[b, a] = value + _ROUNDING if value else 0
    for kind in (Kind.LINE, Kind.SUPPLY, Kind.PAD, Kind.STRIP, Kind.GROUND, Kind.LEAD):
        table[kind, Kind.CUTOUT] = table[Kind.CUTOUT, kind] = limits.edge
        table[kind, Kind.HOLE] = table[Kind.HOLE, kind] = max(limits.hole, limits.edge)
    return table


def edge_margins(limits: Limits, pour_gap: int, ground_ring: int, *, tight: bool) -> dict[Kind, int]:
    """Return how far inside the profile [nm] each kind stays.

    With ground, lines want their pour and a ring with vias all round; ``tight`` asks only what the rules do.
    Ground copper of parts and lines ends with lands of vias, whose holes keep a distance of their own.
    """
    ring = 0 if tight else ground_ring
    beside = 0 if tight or not ground_ring else pour_gap + ring
    return {
        Kind.LINE: limits.margin + beside,
        Kind.SUPPLY: limits.margin + (0 if tight else ring),
        Kind.PAD: limits.margin + (0 if tight else ring),
        Kind.STRIP: limits.margin + (0 if tight else ring),
        Kind.LEAD: limits.margin + (0 if tight else ring),
        Kind.GROUND: max(limits.margin, limits.hole_edge - (limits.land - limits.drill) // 2),
        Kind.BODY: limits.margin,
        Kind.CUTOUT: limits.margin + max(ring, limits.margin),
        Kind.HOLE: max(limits.hole_edge, limits.margin, limits.margin + limits.hole + ring),
    }


class Obstacles:
    """An immutable pile of boxes with vectorised distance queries."""

    __slots__ = ("boxes", "corridors", "items", "kinds")

    def __init__(self, items: tuple[Obstacle, ...], boxes: Ints, kinds: Ints, corridors: Ints) -> None:
        """Take the arrays over; use :meth:`empty` and :meth:`plus`."""
        self.items, self.boxes, self.kinds, self.corridors = items, boxes, kinds, corridors

    @classmethod
    def empty(cls) -> Obstacles:
        """Return a pile without boxes."""
        none = np.zeros(0, dtype=np.int64)
        return cls((), np.zeros((0, 4), dtype=np.int64), none, none)

    def plus(self, new: Sequence[Obstacle]) -> Obstacles:
        """Return the pile with more boxes on it."""
        boxes, kinds, corridors = _arrays(new)
        return Obstacles(
            self.items + tuple(new),
            np.concatenate([self.boxes, boxes]),
            np.concatenate([self.kinds, kinds]),
            np.concatenate([self.corridors, corridors]),
        )

    def conflicts(self, new: Sequence[Obstacle], table: Ints) -> list[tuple[Obstacle, Obstacle]]:
        """Return the pairs (new, old) that are nearer than the table [nm] allows."""
        if not new or not self.items:
            return []
        boxes, kinds, _ = _arrays(new)
        near_by = self._within(boxes, int(table.max())) if len(self.items) > _MANY else None
        old = self.boxes if near_by is None else self.boxes[near_by]
        old_kinds = self.kinds if near_by is None else self.kinds[near_by]
        need = table[kinds[:, None], old_kinds[None, :]]
        rows, columns = np.nonzero(_nearer(boxes, old, need))
        found = columns if near_by is None else near_by[columns]
        return [(new[i], self.items[j]) for i, j in zip(rows.tolist(), found.tolist(), strict=True)]

    def _within(self, boxes: Ints, reach: int) -> Ints:
        """Return the numbers of the boxes that lie within a reach [nm] of the box around some."""
        x0, y0 = boxes[:, 0].min() - reach, boxes[:, 1].min() - reach
        x1, y1 = boxes[:, 2].max() + reach, boxes[:, 3].max() + reach
        mine = self.boxes
        inside = (mine[:, 0] < x1) & (mine[:, 2] > x0) & (mine[:, 1] < y1) & (mine[:, 3] > y0)
        return np.nonzero(inside)[0]


def too_near(left: Sequence[Obstacle], right: Sequence[Obstacle], table: Ints) -> bool:
    """Return whether any of a few boxes is nearer to any of others than the table [nm] allows."""
    for a in left:
        for b in right:
            need = int(table[a.kind, b.kind])
            dx = max(a.box[0] - b.box[2], b.box[0] - a.box[2])
            dy = max(a.box[1] - b.box[3], b.box[1] - a.box[3])
            if need == 0:
                if dx < 0 and dy < 0:
                    return True
            elif max(dx, 0) ** 2 + max(dy, 0) ** 2 < need * need:
                return True
    return False


def _arrays(items: Sequence[Obstacle]) -> tuple[Ints, Ints, Ints]:
    boxes = np.array([item.box for item in items], dtype=np.int64).reshape(-1, 4)
    kinds = np.array([int(item.kind) for item in items], dtype=np.int64)
    corridors = np.array([int(item.corridor) for item in items], dtype=np.int64)
    return boxes, kinds, corridors


def _nearer(a: Ints, b: Ints, need: Ints) -> npt.NDArray[np.bool_]:
    """Return where boxes (N, 4) and (M, 4) are nearer than ``need`` (N, M) [nm]; where that is 0, overlap."""
    dx = np.maximum(a[:, None, 0] - b[:, 2], b[:, 0] - a[:, None, 2])
    dy = np.maximum(a[:, None, 1] - b[:, 3], b[:, 1] - a[:, None, 3])
    overlap = (dx < 0) & (dy < 0) & (need == 0)
    x, y = np.maximum(dx, 0).astype(np.float64), np.maximum(dy, 0).astype(np.float64)
    result: npt.NDArray[np.bool_] = (x * x + y * y < need * need) | overlap
    return result
