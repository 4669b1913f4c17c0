"""Meshes of tees and bends for the sheet solution, and the excess values that the formulas are fitted to.

Arms of finite length miss what endless ones couple along their line; a tee's side line is corrected for it by
3/(4 pi length), a bend is left with arms of 8 h, as circuits have them.
"""

from __future__ import annotations

import math
from functools import lru_cache
from itertools import pairwise

import numpy as np

from tests.published.sheet3d import Sheet, capacitance, inductances, make_sheet

FIRST, LARGEST, GROWTH = 0.03, 0.9, 1.8


def graded(length: float, first: float, both: bool = False) -> np.ndarray:
    """Return points from 0 to a length whose steps grow from the start, or from both ends."""
    if both:
        half = graded(0.5 * length, first)
        return np.concatenate([half, length - half[-2::-1]])
    points, step = [0.0], first
    while points[-1] < length:
        points.append(points[-1] + step)
        step = min(step * GROWTH, LARGEST)
    return np.array(points) * (length / points[-1])


def lines(low: float, high: float, marks: list[float]) -> np.ndarray:
    """Return grid lines from low to high, refined at the marks."""
    stops, parts = sorted({low, high, *marks}), []
    for a, b in pairwise(stops):
        part = graded(b - a, FIRST, both=a in marks and b in marks)
        if a not in marks:
            part = (b - a) - part[::-1]
        parts.append(a + part[:-1])
    return np.concatenate([*parts, [high]])


def on_grid(x: np.ndarray, y: np.ndarray, inside, edge_of) -> Sheet:
    """Return the cells of a grid that lie inside, as triangles; ``edge_of`` numbers the border's middles."""
    middles = np.meshgrid(0.5 * (x[1:] + x[:-1]), 0.5 * (y[1:] + y[:-1]), indexing="ij")
    i, j = np.nonzero(inside(*middles))
    index = np.arange(x.size * y.size).reshape(x.size, y.size)
    a, b, c, d = index[i, j], index[i + 1, j], index[i + 1, j + 1], index[i, j + 1]
    even = ((i + j) % 2 == 0)[:, None]
    halves = [
        np.where(even, np.c_[a, b, c], np.c_[a, b, d]),
        np.where(even, np.c_[a, c, d], np.c_[b, c, d]),
    ]
    used, triangles = np.unique(np.concatenate(halves), return_inverse=True)
    points = np.stack(np.meshgrid(x, y, indexing="ij"), axis=-1).reshape(-1, 2)[used]
    triangles = triangles.reshape(-1, 3)
    return make_sheet(points, triangles, _edges(points, triangles, edge_of))


def _edges(points: np.ndarray, triangles: np.ndarray, edge_of) -> list[np.ndarray]:
    """Return the points of each numbered border; sides numbered -1 are open ends."""
    sides = np.sort(triangles[:, [[0, 1], [1, 2], [2, 0]]].reshape(-1, 2), axis=1)
    sides, count = np.unique(sides, axis=0, return_counts=True)
    border = sides[count == 1]
    number = edge_of(*points[border].mean(axis=1).T)
    return [np.unique(border[number == k]) for k in range(number.max() + 1)]


def straight_sheet(u: float, arm: float) -> Sheet:
    """Return a strip of twice an arm's length."""
    x, y = lines(-arm, arm, [0.0]), lines(-0.5 * u, 0.5 * u, [-0.5 * u, 0.5 * u])
    return on_grid(
        x,
        y,
        lambda px, py: np.ones_like(px, dtype=bool),
        lambda px, py: np.where(np.abs(np.abs(px) - arm) < 1e-9, -1, np.where(py < 0.0, 0, 1)),
    )


@lru_cache(maxsize=64)
def straight_inductance(u: float, arm: float) -> float:
    """Return half of what a straight strip of two arms has, open ends included."""
    return 0.5 * float(inductances(straight_sheet(u, arm))[0, 0])


def tee_sheet(u_a: float, u_b: float, u_side: float, arm: float) -> Sheet:
    """Return a tee: mains to the west (a) and east (b) that step at x = 0, side line to the north."""
    marks_x = [-0.5 * u_side, 0.5 * u_side] + ([0.0] if u_a != u_b else [])
    marks_y = sorted({-0.5 * u_a, 0.5 * u_a, -0.5 * u_b, 0.5 * u_b})

    def inside(x, y):
        main = np.where(x < 0.0, np.abs(y) < 0.5 * u_a, np.abs(y) < 0.5 * u_b)
        return main | ((np.abs(x) < 0.5 * u_side) & (y > 0.0))

    def edge_of(x, y):
        open_end = (np.abs(np.abs(x) - arm) < 1e-9) | (np.abs(y - arm) < 1e-9)
        return np.where(open_end, -1, np.where(y <= 0.0, 0, np.where(x < 0.0, 1, 2)))

    top = 0.5 * max(u_a, u_b)
    return on_grid(lines(-arm, arm, marks_x), lines(-top, arm, marks_y), inside, edge_of)


def tee_planes(u_a: float, u_b: float, u_side: float, arm: float = 9.0) -> tuple[float, float, float]:
    """Return the planes of both mains and of the side line, outwards from the crossing [h]."""
    form = inductances(tee_sheet(u_a, u_b, u_side, arm))
    side = -form[0, 1]
    excess = np.array([form[0, 0] - side, form[1, 1] - side, side])
    short, long = (
        np.array([straight_inductance(u, x) for u in (u_a, u_b, u_side)]) for x in (arm, arm + 1.0)
    )
    excess -= short
    excess[2] -= 3.0 / (4.0 * math.pi * arm)
    return tuple(float(value) for value in -excess / (long - short))


def bend_sheet(u: float, angle: float, mitre: float, arm: float) -> Sheet:
    """Return a bend [rad] with a share of its diagonal cut off; arms are counted from the inner corner."""
    across, along = graded(1.0, FIRST, both=True), graded(arm, FIRST)
    half = 0.5 * angle
    middle = (1.0 - mitre) * u / math.cos(half) * np.array([-math.sin(half), math.cos(half)])
    facet = (u - middle[1]) / math.sin(half) if mitre > 0.0 else 0.0
    outer = _outer_edge(middle, facet, half, u, arm, len(along))
    inner = np.stack([along, np.zeros_like(along)], axis=-1)
    grid = inner[:, None] * (1.0 - across)[:, None] + outer[:, None] * across[:, None]
    turn = np.array([[math.cos(half), -math.sin(half)], [math.sin(half), math.cos(half)]])
    one = grid @ turn
    both = np.concatenate([(one * [-1.0, 1.0])[::-1], one[1:]])
    return _folded(both, len(along) - 1)


def _outer_edge(middle, facet, half, u, arm, count) -> np.ndarray:
    """Return points on the outer border: half of the facet, then along the line."""
    on_facet = max(2, min(6, count // 3)) if facet > 0.0 else 0
    end = middle + facet * np.array([math.cos(half), math.sin(half)])
    rest = graded(1.0, 0.02)
    steps = np.interp(np.linspace(0.0, 1.0, count - on_facet), np.linspace(0.0, 1.0, rest.size), rest)
    straight = np.stack([end[0] + steps * (arm - end[0]), np.full_like(steps, u)], axis=-1)
    share = np.linspace(0.0, 1.0, on_facet, endpoint=False)[:, None]
    return np.concatenate([middle + share * (end - middle), straight])


def _folded(grid: np.ndarray, fold: int) -> Sheet:
    """Return a curvilinear grid (N, K, 2) as triangles that are symmetric about a row."""
    rows, columns, _ = grid.shape
    index = np.arange(rows * columns).reshape(rows, columns)
    a, b, c, d = (
        index[i : rows - 1 + i, j : columns - 1 + j].ravel() for i, j in ((0, 0), (1, 0), (1, 1), (0, 1))
    )
    before = (np.repeat(np.arange(rows - 1), columns - 1) < fold)[:, None]
    halves = [
        np.where(before, np.c_[a, b, c], np.c_[a, b, d]),
        np.where(before, np.c_[a, c, d], np.c_[b, c, d]),
    ]
    return make_sheet(grid.reshape(-1, 2), np.concatenate(halves), (index[:, 0], index[:, -1]))


def bend_length(u: float, angle_deg: float, mitre: float, er: float, arm: float = 8.0) -> float:
    """Return a bend's equivalent length less that of its centre-line [h], with arms of 8 h."""
    angle = math.radians(angle_deg)
    shapes = (
        bend_sheet(u, angle, mitre, arm),
        bend_sheet(u, 0.0, 0.0, arm),
        bend_sheet(u, 0.0, 0.0, arm + 1.0),
    )
    length = 0.0
    for bend, short, long in (
        [float(inductances(shape)[0, 0]) for shape in shapes],
        [capacitance(shape, er) for shape in shapes],
    ):
        length += (bend - short) / (long - short)
    return length - u * math.tan(0.5 * angle)
