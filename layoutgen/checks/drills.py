"""What the rules on holes share: the layer of a hole, its connections to copper, pairs of near holes."""

from __future__ import annotations

from collections.abc import Iterator
from typing import NamedTuple

import numpy as np
import shapely

from layoutgen.checks.board import Board, Drill, Layer
from layoutgen.checks.planar import Geometry, near_points, whole
from layoutgen.geometry import Point

__all__ = ["NearDrills", "drill_layer", "near_drills", "touched", "wall_middle"]


class NearDrills(NamedTuple):
    """Two holes, the distance of their axes [nm], and the middle between their walls [nm]."""

    first: Drill
    second: Drill
    pitch: float
    at: Point


def drill_layer(drill: Drill) -> str:
    """Return the layer that a hole is drawn on."""
    return "drill_plated" if drill.plated else "drill_nonplated"


def near_drills(board: Board, web: float) -> Iterator[NearDrills]:
    """Yield the pairs of holes whose walls are nearer to each other than a distance [nm]."""
    if not board.drills:
        return
    reach = board.drill_radii + float(board.drill_radii.max()) + web
    i, j = near_points(board.drill_tree, board.drill_points, np.maximum(reach, 0.0))
    i, j = i[i < j], j[i < j]
    pitch = shapely.distance(board.drill_points[i], board.drill_points[j])
    for k in np.flatnonzero(pitch - board.drill_radii[i] - board.drill_radii[j] < web).tolist():
        a, b = board.drills[i[k]], board.drills[j[k]]
        yield NearDrills(a, b, float(pitch[k]), _between(a, b, float(pitch[k])))


def _between(a: Drill, b: Drill, pitch: float) -> Point:
    """Return the middle of the web between two holes."""
    share = 0.5 if pitch == 0.0 else 0.5 + (a.diameter - b.diameter) / (4.0 * pitch)
    return whole(a.x + share * (b.x - a.x), a.y + share * (b.y - a.y))


def wall_middle(drill: Drill, point: shapely.Point, other: Geometry) -> tuple[float, Point]:
    """Return the distance from a hole's wall to a geometry [nm], and the middle between them.

    Args:
        drill: The hole.
        point: Its axis.
        other: What is measured to; the distance is negative where it comes inside the wall.
    """
    _, (x, y) = shapely.get_coordinates(shapely.shortest_line(point, other)).tolist()
    distance = float(np.hypot(x - drill.x, y - drill.y))
    share = 0.5 * (1.0 + drill.diameter / 2.0 / distance) if distance > 0.0 else 0.0
    at = whole(drill.x + share * (x - drill.x), drill.y + share * (y - drill.y))
    return distance - drill.diameter / 2.0, at


def touched(board: Board, layer: Layer) -> dict[int, list[int]]:
    """Return for each plated hole (by its index) the pieces of a layer that its barrel meets, in order."""
    plated = [k for k, drill in enumerate(board.drills) if drill.plated]
    if not plated or not layer.pieces:
        return {k: [] for k in plated}
    points, radii = board.drill_points[plated], board.drill_radii[plated]
    spots, pieces = near_points(layer.tree, points, radii)
    found: dict[int, list[int]] = {k: [] for k in plated}
    for spot, piece in sorted(zip(spots.tolist(), pieces.tolist(), strict=True)):
        found[plated[spot]].append(piece)
    return found
