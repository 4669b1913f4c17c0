"""Open lines joined end to end into outlines, small gaps closed and told.

Ends that lie nearest to each other are joined first, each end at most once.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt

from layoutgen.geometry import Point

__all__ = ["GAP_NM", "TOLD_NM", "Chains", "joined_lines"]

Floats = npt.NDArray[np.float64]

GAP_NM = 25_000.0
"""Ends nearer to each other than this are joined [nm]: a fifth of the narrowest gaps board houses make."""
TOLD_NM = 500.0
"""Gaps wider than this are told when they are closed [nm]."""
_NEIGHBOURS = 8
"""Ends looked at about each end [-]."""


@dataclass(frozen=True, slots=True, eq=False)
class Chains:
    """Outlines (N, 2) that closed, lines (N, 2) that did not, and the closed gaps: place [nm], width [nm]."""

    loops: tuple[Floats, ...]
    left: tuple[Floats, ...]
    gaps: tuple[tuple[Point, float], ...]


def joined_lines(lines: Sequence[Floats]) -> Chains:
    """Return open lines (N, 2) [nm] joined at their ends; ends farther apart than 25 um stay apart."""
    if not lines:
        return Chains((), (), ())
    ends = np.array([end for line in lines for end in (line[0], line[-1])])
    lengths = np.array([float(np.hypot(*np.diff(line, axis=0).T).sum()) for line in lines])
    mate: dict[int, int] = {}
    gaps: list[tuple[Point, float]] = []
    for distance, a, b in _near_ends(ends, lengths):
        if a in mate or b in mate:
            continue
        mate[a], mate[b] = b, a
        if distance > TOLD_NM:
            x, y = ((ends[a] + ends[b]) / 2.0).tolist()
            gaps.append(((round(x), round(y)), distance))
    loops, left = _walked(lines, mate)
    return Chains(tuple(loops), tuple(left), tuple(gaps))


def _near_ends(ends: Floats, lengths: Floats) -> Iterator[tuple[float, int, int]]:
    """Yield pairs of ends within reach, the nearest first; a line's own ends only when it is long."""
    from scipy.spatial import cKDTree

    count = min(_NEIGHBOURS, len(ends))
    tree: Any = cKDTree(ends)
    distance, other = tree.query(ends, k=count, distance_upper_bound=GAP_NM)
    found = set()
    for a in range(len(ends)):
        for d, b in zip(np.atleast_1d(distance[a]).tolist(), np.atleast_1d(other[a]).tolist(), strict=True):
            own = a // 2 == b // 2
            if math.isfinite(d) and a != b and not (own and lengths[a // 2] <= 4.0 * GAP_NM):
                found.add((d, min(a, b), max(a, b)))
    yield from sorted(found)


def _walked(lines: Sequence[Floats], mate: dict[int, int]) -> tuple[list[Floats], list[Floats]]:
    """Return the closed outlines and the open lines that the joined ends make."""
    loops: list[Floats] = []
    left: list[Floats] = []
    done: set[int] = set()
    starts = [end for end in range(2 * len(lines)) if end not in mate]
    for start in [*starts, *range(0, 2 * len(lines), 2)]:
        if start // 2 in done:
            continue
        points, closed = _walk(lines, mate, start, done)
        (loops if closed else left).append(points)
    return loops, left


def _walk(lines: Sequence[Floats], mate: dict[int, int], start: int, done: set[int]) -> tuple[Floats, bool]:
    """Return the points met from one end on, and whether the way came back to it."""
    parts: list[Floats] = []
    end = start
    while True:
        line = lines[end // 2]
        done.add(end // 2)
        parts.append(line if end % 2 == 0 else line[::-1])
        beyond = mate.get(end ^ 1)
        if beyond is None:
            return _without_repeats(np.concatenate(parts)), False
        if beyond == start:
            return _without_repeats(np.concatenate(parts)), True
        end = beyond


def _without_repeats(points: Floats) -> Floats:
    """Return points without those that repeat the one before."""
    keep = np.ones(len(points), dtype=bool)
    keep[1:] = (np.abs(np.diff(points, axis=0)) > 0.0).any(axis=1)
    return np.asarray(points[keep])
