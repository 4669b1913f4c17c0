"""Points along a path [nm]: where they lie, and which way the path goes there."""

from __future__ import annotations

import itertools
import math
from collections.abc import Sequence

__all__ = ["SNAP", "direction_at", "heading", "position_on"]

SNAP = 20.0
"""What lies within this is one point [nm]: turned positions are rounded."""

_XY = tuple[float, float]


def heading(start: _XY, end: _XY) -> float:
    """Return the heading [deg] from one point to another, 0 <= heading < 360."""
    return math.degrees(math.atan2(end[1] - start[1], end[0] - start[0])) % 360.0


def position_on(path: Sequence[_XY], at: _XY) -> float | None:
    """Return how far along a path [nm] a point lies, None when it lies more than SNAP beside it.

    >>> position_on([(0, 0), (0, 1000), (500, 1000)], (300, 1005))
    1300.0
    """
    before = 0.0
    for a, b in itertools.pairwise(path):
        length = math.dist(a, b)
        share = ((at[0] - a[0]) * (b[0] - a[0]) + (at[1] - a[1]) * (b[1] - a[1])) / length**2
        share = min(1.0, max(0.0, share))
        foot = (a[0] + share * (b[0] - a[0]), a[1] + share * (b[1] - a[1]))
        if math.dist(foot, at) <= SNAP:
            return before + share * length
        before += length
    return None


def direction_at(path: Sequence[_XY], position: float, forward: bool) -> float:
    """Return the heading [deg] in which a path leaves one of its points, forward or backward.

    >>> path = [(0, 0), (0, 1000), (500, 1000)]
    >>> direction_at(path, 1000.0, True), direction_at(path, 1000.0, False)
    (0.0, 270.0)
    """
    before = 0.0
    legs = list(itertools.pairwise(path))
    for a, b in legs:
        before += math.dist(a, b)
        if position < before - SNAP or (not forward and position <= before + SNAP):
            break
    return heading(a, b) if forward else heading(b, a)
