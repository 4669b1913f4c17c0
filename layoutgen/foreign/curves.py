"""Curves as chords: every vertex lies on the curve, no chord farther from it than the tolerance."""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt

__all__ = ["arc", "bulged", "ellipse", "fitted_circle"]

Floats = npt.NDArray[np.float64]

_FEWEST = 8
"""Chords of a whole turn at least [-]."""
_MOST = 100_000
"""Chords of one curve at most [-]."""
_WIDEST_GAP = 1.0
"""Widest angle between neighbouring vertices of what counts as a circle [rad]."""
_ROUND_STEPS_NM = (10_000.0, 1_000.0, 100.0, 10.0)
_COARSEST_GRID_NM = 1_000
"""Widest grid that vertices are taken to be rounded to [nm]."""


def _steps(radius: float, sweep: float, tolerance: float) -> int:
    """Return how many chords a sweep [rad] of a radius needs; radius and tolerance in one unit."""
    step = 2.0 * math.acos(max(0.0, 1.0 - tolerance / radius)) if radius > tolerance else math.pi / 4.0
    step = min(step, 2.0 * math.pi / _FEWEST)
    return max(1, min(_MOST, math.ceil(abs(sweep) / step - 1e-9)))


def arc(middle: tuple[float, float], radius: float, start: float, sweep: float, tolerance: float) -> Floats:
    """Return the points (N, 2) of an arc from an angle [rad] over a signed sweep [rad], ends included."""
    turn = start + sweep * np.linspace(0.0, 1.0, _steps(radius, sweep, tolerance) + 1)
    return np.column_stack((middle[0] + radius * np.cos(turn), middle[1] + radius * np.sin(turn)))


def ellipse(
    middle: tuple[float, float],
    major: tuple[float, float],
    ratio: float,
    start: float,
    sweep: float,
    tolerance: float,
) -> Floats:
    """Return the points (N, 2) of an elliptic arc.

    Args:
        middle: Its middle.
        major: The half major axis as a vector.
        ratio: Minor to major axis [-].
        start: First parameter, not the angle [rad].
        sweep: Signed way in the parameter [rad].
        tolerance: Largest distance of a chord from the curve, in the unit of the coordinates.
    """
    longest = math.hypot(*major) * max(1.0, abs(ratio))
    t = start + sweep * np.linspace(0.0, 1.0, _steps(longest, sweep, tolerance) + 1)
    minor = (-major[1] * ratio, major[0] * ratio)
    return np.column_stack([middle[k] + major[k] * np.cos(t) + minor[k] * np.sin(t) for k in (0, 1)])


def bulged(points: Floats, bulges: list[float], closed: bool, tolerance: float) -> Floats:
    """Return the vertices (N, 2) of a polyline, its arcs as chords; a closed one does not repeat its first.

    Args:
        points: The polyline's vertices (N, 2).
        bulges: For the edge after each vertex tan(angle / 4), positive counter-clockwise [-].
        closed: Whether an edge leads from the last vertex to the first.
        tolerance: Largest distance of a chord from its arc, in the unit of the coordinates.
    """
    if not any(bulges):
        return points
    out: list[Floats] = []
    last = len(points) if closed else len(points) - 1
    for i in range(last):
        start, end = points[i], points[(i + 1) % len(points)]
        edge = _bulge_arc(start, end, bulges[i], tolerance) if bulges[i] else np.stack((start, end))
        out.append(edge[:-1])
    if not closed:
        out.append(points[-1:])
    return np.concatenate(out)


def _bulge_arc(start: Floats, end: Floats, bulge: float, tolerance: float) -> Floats:
    """Return the points of one bulged edge, ends included and exact."""
    (dx, dy), (mx, my) = (end - start).tolist(), ((start + end) / 2.0).tolist()
    if dx == dy == 0.0:
        return np.stack((start, end))
    sweep = 4.0 * math.atan(bulge)
    radius = math.hypot(dx, dy) * (1.0 + bulge * bulge) / (4.0 * abs(bulge))
    offset = (1.0 - bulge * bulge) / (4.0 * bulge)
    middle = (mx - offset * dy, my + offset * dx)
    first = math.atan2(float(start[1]) - middle[1], float(start[0]) - middle[0])
    points = arc(middle, radius, first, sweep, tolerance)
    points[0], points[-1] = start, end
    return points


def fitted_circle(points: Floats, off: float) -> tuple[float, float, float] | None:
    """Return middle and diameter of the circle on which all points (N, 2) lie; None when they do not.

    Vertices rounded to a grid tell the diameter to that grid's diagonal only: of the diameters within it the
    roundest is returned, in steps of 10 um, 1 um, 100 nm or 10 nm.

    Args:
        points: Vertices of an outline, the first not repeated [nm].
        off: How far a vertex may lie off the circle [nm].
    """
    if len(points) < _FEWEST:
        return None
    low, high = points.min(axis=0), points.max(axis=0)
    centre = (low + high) / 2.0
    local = points - centre
    matrix = np.column_stack((2.0 * local, np.ones(len(local))))
    solved, _, rank, _ = np.linalg.lstsq(matrix, (local**2).sum(axis=1), rcond=None)
    if rank < 3:
        return None
    middle = solved[:2]
    radii = np.hypot(*(local - middle).T)
    radius = float(radii.mean())
    turns = np.sort(np.arctan2(*(local - middle).T))
    gaps = np.diff(np.append(turns, turns[0] + 2.0 * np.pi))
    if float(np.abs(radii - radius).max()) > off or float(gaps.max()) > _WIDEST_GAP:
        return None
    return float(centre[0] + middle[0]), float(centre[1] + middle[1]), _roundest(2.0 * radius, points)


def _roundest(diameter: float, points: Floats) -> float:
    """Return the roundest diameter [nm] within what the grid of the vertices (N, 2) [nm] leaves open."""
    whole = np.rint(points).astype(np.int64)
    grid = min(int(np.gcd.reduce(whole - whole[0], axis=None)), _COARSEST_GRID_NM)
    near = (step * round(diameter / step) for step in _ROUND_STEPS_NM)
    return next((size for size in near if abs(size - diameter) <= math.sqrt(2.0) * grid), diameter)
