"""Closed outlines without a fill: which are copper, which are holes in it.

An outline that lies in no other is copper. One inside another is a hole where it runs the other way round
than the outermost outline about it; where directions mean nothing (outlines joined from single lines), it is
a hole when the next one about it is copper. Outlines of holes are given to the smallest copper that holds
them.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import shapely

__all__ = ["Loop", "areas_of"]


@dataclass(frozen=True, slots=True, eq=False)
class Loop:
    """An outline as a valid polygon [nm] and the direction it was drawn in: 1, -1, or 0 for none."""

    polygon: shapely.Polygon
    turn: int


def areas_of(loops: Sequence[Loop], *, directed: bool = True) -> list[shapely.Polygon]:
    """Return the polygons with holes that outlines stand for, in the order of their outer outlines.

    Args:
        loops: The outlines.
        directed: False takes every second outline as a hole, whatever its direction.
    """
    polygons = np.empty(len(loops), dtype=object)
    polygons[:] = [loop.polygon for loop in loops]
    about = _containers(polygons)
    area = shapely.area(polygons) if len(loops) else np.zeros(0)
    sign: dict[int, int] = {}
    holes: dict[int, dict[tuple[float, ...], shapely.Polygon]] = {}
    for k in sorted(range(len(loops)), key=lambda k: (-area[k], k)):
        outer = sorted(about.get(k, ()), key=lambda j: (area[j], j))
        sign[k] = _sign(loops, k, outer, sign, directed)
        if sign[k] < 0 and not _given(loops[k].polygon, [j for j in outer if sign[j] > 0], holes):
            sign[k] = 1
    found = [_with_holes(loops[k].polygon, holes.get(k, {})) for k in range(len(loops)) if sign[k] > 0]
    return [part for parts in found for part in parts]


def _containers(polygons: np.ndarray[tuple[int], np.dtype[np.object_]]) -> dict[int, list[int]]:
    """Return for each outline those that hold it; of equal ones none holds another."""
    if len(polygons) < 2:
        return {}
    tree = shapely.STRtree(polygons)
    outer, inner = tree.query(polygons, predicate="covers")
    area = shapely.area(polygons)
    real = area[outer] > area[inner] * (1.0 + 1e-9)
    found: dict[int, list[int]] = {}
    for j, k in zip(outer[real].tolist(), inner[real].tolist(), strict=True):
        found.setdefault(k, []).append(j)
    return found


def _sign(loops: Sequence[Loop], k: int, outer: list[int], sign: dict[int, int], directed: bool) -> int:
    """Return 1 for an outline of copper, -1 for one of a hole."""
    if not outer:
        return 1
    turns = loops[k].turn * loops[outer[-1]].turn
    return turns if directed and turns else -sign[outer[0]]


def _given(
    hole: shapely.Polygon, outer: list[int], holes: dict[int, dict[tuple[float, ...], shapely.Polygon]]
) -> bool:
    """Give a hole to the smallest copper about it that does not have it yet; False when there is none."""
    for j in outer:
        if hole.bounds not in holes.setdefault(j, {}):
            holes[j][hole.bounds] = hole
            return True
    return False


def _with_holes(
    shell: shapely.Polygon, holes: dict[tuple[float, ...], shapely.Polygon]
) -> list[shapely.Polygon]:
    """Return a polygon with its holes taken out; several where they cut it in pieces."""
    if not holes:
        return [shell]
    whole = shapely.Polygon(shell.exterior, [hole.exterior for hole in holes.values()])
    if whole.is_valid:
        return [whole]
    rest = shell.difference(shapely.union_all(list(holes.values())))
    return [part for part in shapely.get_parts(rest) if part.geom_type == "Polygon"]
