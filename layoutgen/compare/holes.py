"""Drilled holes of two artworks: added, removed, moved, drilled in another size."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any, Literal

import numpy as np

from layoutgen.checks.planar import whole
from layoutgen.compare.records import Change
from layoutgen.foreign import RoundHole

__all__ = ["changed_holes"]

_FARTHEST_NM = 2_000_000.0
"""A hole farther away than this is another hole [nm]."""


def changed_holes(old: Sequence[RoundHole], new: Sequence[RoundHole], tolerance: float) -> Iterator[Change]:
    """Yield what changed between two lists of drilled holes.

    Args:
        old: The first artwork's holes.
        new: The second's.
        tolerance: How far axes and diameters may differ [nm].
    """
    for plated in (True, False):
        before = [hole for hole in old if hole.plated == plated]
        after = [hole for hole in new if hole.plated == plated]
        left_old, left_new = set(range(len(before))), set(range(len(after)))
        for distance, i, j in _pairs(before, after):
            if i not in left_old or j not in left_new:
                continue
            resized = abs(before[i].diameter - after[j].diameter) > tolerance
            if resized and distance > tolerance:
                continue
            left_old.discard(i)
            left_new.discard(j)
            if distance > tolerance or resized:
                yield _changed(before[i], after[j], distance, resized)
        yield from (_lone("removed", before[i]) for i in sorted(left_old))
        yield from (_lone("added", after[j]) for j in sorted(left_new))


def _pairs(before: Sequence[RoundHole], after: Sequence[RoundHole]) -> list[tuple[float, int, int]]:
    """Return pairs of near holes, the nearest first."""
    if not before or not after:
        return []
    from scipy.spatial import cKDTree

    count = min(8, len(after))
    tree: Any = cKDTree(np.array([(hole.x, hole.y) for hole in after]))
    places = np.array([(hole.x, hole.y) for hole in before])
    distance, other = tree.query(places, k=count, distance_upper_bound=_FARTHEST_NM)
    distance, other = distance.reshape(len(before), count), other.reshape(len(before), count)
    i, k = np.nonzero(np.isfinite(distance))
    return sorted(zip(distance[i, k].tolist(), i.tolist(), other[i, k].tolist(), strict=True))


def _changed(before: RoundHole, after: RoundHole, distance: float, resized: bool) -> Change:
    """Return the change of a hole that is in both artworks."""
    place = f"hole at {after.x / 1e6:.4f}, {after.y / 1e6:.4f} mm"
    if resized:
        text = f"{place} is {after.diameter / 1e6:.4f} mm wide, was {before.diameter / 1e6:.4f} mm"
        return _change("resized", after, abs(after.diameter - before.diameter), text)
    text = f"{place} moved by {(after.x - before.x) / 1e3:.1f}, {(after.y - before.y) / 1e3:.1f} um"
    return _change("moved", after, distance, text)


def _lone(kind: Literal["added", "removed"], hole: RoundHole) -> Change:
    """Return the change of a hole that is in one artwork only."""
    text = f"hole of {hole.diameter / 1e6:.4f} mm {kind} at {hole.x / 1e6:.4f}, {hole.y / 1e6:.4f} mm"
    return _change(kind, hole, hole.diameter, text)


def _change(
    kind: Literal["added", "removed", "moved", "resized"], hole: RoundHole, size: float, text: str
) -> Change:
    """Return a change of a hole."""
    return Change(
        kind=kind,
        layer="drill_plated" if hole.plated else "drill_nonplated",
        severity="note",
        at=whole(hole.x, hole.y),
        net="",
        size=size,
        text=text,
    )
