"""Lines with mitred bends: from a centre-line with sharp corners to the copper's outline."""

from __future__ import annotations

import itertools
import math
from collections.abc import Sequence

from layoutgen.geometry.ring import Point, Ring

__all__ = ["mitre_for_turn", "mitre_reach", "path_length", "stroke", "turn_degrees"]


def path_length(path: Sequence[Point]) -> float:
    """Return the length [nm] of a centre-line through its sharp corners."""
    return math.fsum(math.dist(a, b) for a, b in itertools.pairwise(path))


def turn_degrees(before: Point, at: Point, after: Point) -> float:
    """Return the turn [deg] at a vertex, counter-clockwise positive, in (-180, 180]."""
    ax, ay, bx, by = at[0] - before[0], at[1] - before[1], after[0] - at[0], after[1] - at[1]
    return math.degrees(math.atan2(ax * by - ay * bx, ax * bx + ay * by))


def mitre_for_turn(percent: float, turn: float, width: float, min_neck: float) -> float:
    """Return the mitre [%] to draw for a turn, from that of a right angle.

    The share of the corner's excess area that is cut away is kept the same as for a right angle (a choice of
    this project: no published formula is known for other angles), which gives M sqrt(2) sin(|turn| / 2).
    Then it is reduced where needed so that the neck left on the diagonal is at least ``min_neck``.

    Args:
        percent: Mitre of a right angle, cut part of the diagonal [%].
        turn: Angle of the bend [deg].
        width: Line width [any length unit].
        min_neck: Least copper left on the diagonal [same unit].
    """
    half = math.radians(abs(turn)) / 2.0
    diagonal = width / math.cos(half)
    most = 100.0 * max(0.0, 1.0 - min_neck / diagonal)
    return min(percent * math.sqrt(2.0) * math.sin(half), most)


def mitre_reach(percent: float, turn: float, width: float) -> float:
    """Return how far from its vertex a mitred bend reaches along the centre-line [unit of ``width``].

    The chamfer cuts each outer edge at X / sin(|turn| / 2) from the outer corner, X the cut part of the
    diagonal (for a right angle 2 W M / 100); the outer corner lies W/2 tan(|turn| / 2) past the vertex. The
    inner corner lies that much before it, so the reach is never less.
    """
    half = math.radians(abs(turn)) / 2.0
    overhang = 0.5 * width * math.tan(half)
    cut = percent / 100.0 * width / math.cos(half) / math.sin(half)
    return max(overhang, cut - overhang)


def stroke(path: Sequence[Point], width: int, mitres: Sequence[float] = ()) -> Ring:
    """Return the outline of a line of one width along a centre-line, ends cut square, bends mitred.

    Args:
        path: Vertices with sharp corners [nm], at least two.
        width: Copper width [nm].
        mitres: Cut part of the diagonal of each inner vertex [%]; empty for none.

    Raises:
        ValueError: A path too short, or as many mitres as inner vertices are not given.
    """
    if len(path) < 2:
        raise ValueError("a line needs two vertices")
    if mitres and len(mitres) != len(path) - 2:
        raise ValueError(f"{len(path) - 2} bends but {len(mitres)} mitres")
    left: list[Point] = []
    right: list[Point] = []
    half = width / 2.0
    _square_end(path[0], path[1], path[0], half, left, right)
    for i in range(1, len(path) - 1):
        _bend(path[i - 1], path[i], path[i + 1], half, mitres[i - 1] if mitres else 0.0, left, right)
    _square_end(path[-2], path[-1], path[-1], half, left, right)
    return Ring(tuple(point for point, _ in itertools.groupby(right + left[::-1])))


def _square_end(a: Point, b: Point, at: Point, half: float, left: list[Point], right: list[Point]) -> None:
    """Append the two corners of a square end at ``at`` of the segment a-b."""
    length = math.dist(a, b)
    nx, ny = -(b[1] - a[1]) / length * half, (b[0] - a[0]) / length * half
    left.append((round(at[0] + nx), round(at[1] + ny)))
    right.append((round(at[0] - nx), round(at[1] - ny)))


def _bend(
    a: Point, b: Point, c: Point, half: float, mitre: float, left: list[Point], right: list[Point]
) -> None:
    """Append inner corner and (mitred) outer corner of the bend at b."""
    turn = math.radians(turn_degrees(a, b, c))
    la, lc = math.dist(a, b), math.dist(b, c)
    ux, uy = (b[0] - a[0]) / la, (b[1] - a[1]) / la
    vx, vy = (c[0] - b[0]) / lc, (c[1] - b[1]) / lc
    overhang = half * math.tan(abs(turn) / 2.0)
    side = 1.0 if turn > 0 else -1.0  # the inner side is left for a left turn
    inner = (b[0] - side * uy * half - ux * overhang, b[1] + side * ux * half - uy * overhang)
    outer = (b[0] + side * uy * half + ux * overhang, b[1] - side * ux * half + uy * overhang)
    cut = mitre / 100.0 * 2.0 * half / math.cos(turn / 2.0) / math.sin(abs(turn) / 2.0) if turn else 0.0
    first = (round(outer[0] - ux * cut), round(outer[1] - uy * cut))
    second = (round(outer[0] + vx * cut), round(outer[1] + vy * cut))
    outside, inside = (right, left) if turn > 0 else (left, right)
    inside.append((round(inner[0]), round(inner[1])))
    outside.append(first)
    if second != first:
        outside.append(second)
