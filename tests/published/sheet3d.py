"""Quasi-static field solution of thin microstrip shapes in three dimensions, behind the junctions' fits.

A thin sheet at height 1 over a ground plane at height 0, cut into triangles. The capacitance comes from a
charge that is constant on each triangle, with the images of the grounded slab; the inductance from a stream
function that is linear on each triangle and constant along each side edge, with the image in the ground
plane. Excess values are differences to straight strips of the same mesh, whose open ends cancel. Lengths are
in units of the substrate height, inductances over MU0, capacitances over EPS0.

The shapes and their excess values are in ``sheet_shapes``.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np
import scipy.linalg
import scipy.sparse
from scipy.spatial import cKDTree

NEAR = 2.2
IMAGE_LIMIT = 1e-4
POINTS = np.array(
    [[1 / 3] * 3]
    + [np.roll([0.059715871789770, 0.470142064105115, 0.470142064105115], k) for k in range(3)]
    + [np.roll([0.797426985353087, 0.101286507323456, 0.101286507323456], k) for k in range(3)]
)
WEIGHTS = np.array([0.225] + [0.132394152788506] * 3 + [0.125939180544827] * 3)


@dataclass(frozen=True)
class Sheet:
    """Points (N, 2) [h], triangles (M, 3) counter-clockwise, and the points of each side edge."""

    points: np.ndarray
    triangles: np.ndarray
    edges: tuple[np.ndarray, ...]

    @cached_property
    def corners(self) -> np.ndarray:
        """The triangles' corners (M, 3, 2) [h]."""
        return self.points[self.triangles]

    @cached_property
    def centres(self) -> np.ndarray:
        """The triangles' centres (M, 2) [h]."""
        return self.corners.mean(axis=1)

    @cached_property
    def areas(self) -> np.ndarray:
        """The triangles' areas (M,) [h^2]."""
        (ax, ay), (bx, by) = (self.corners[:, k].T - self.corners[:, 0].T for k in (1, 2))
        return 0.5 * (ax * by - ay * bx)

    @cached_property
    def sizes(self) -> np.ndarray:
        """The triangles' longest sides (M,) [h]."""
        sides = self.corners - np.roll(self.corners, 1, axis=1)
        return np.hypot(sides[..., 0], sides[..., 1]).max(axis=1)


def make_sheet(points, triangles, edges) -> Sheet:
    """Return the sheet with all triangles counter-clockwise."""
    sheet = Sheet(points, triangles, tuple(edges))
    turned = np.where((sheet.areas < 0.0)[:, None], triangles[:, ::-1], triangles)
    return Sheet(points, turned, tuple(edges))


def potential(corners, at, height) -> np.ndarray:
    """Return the integral of 1/R over each triangle, seen from points a height above, exactly."""
    total = np.zeros(len(at))
    for k in range(3):
        start, along = corners[:, k], corners[:, (k + 1) % 3] - corners[:, k]
        length = np.hypot(along[:, 0], along[:, 1])
        lx, ly = (along / length[:, None]).T
        ax, ay = (start - at).T
        off, first = ax * ly - ay * lx, ax * lx + ay * ly
        last = first + length
        square = off**2 + height**2
        near, far = np.sqrt(first**2 + square), np.sqrt(last**2 + square)
        log = np.log(_sum(far, last, square)) - np.log(_sum(near, first, square))
        total += np.where(np.abs(off) < 1e-14, 0.0, off * log)
        if height > 0.0:
            angles = (np.arctan2(off * s, square + height * r) for s, r in ((last, far), (first, near)))
            total -= height * (next(angles) - next(angles))
    return total


def _sum(radius, along, square) -> np.ndarray:
    """Return radius + along without cancellation."""
    safe = np.where(along >= 0.0, radius + along, square / np.maximum(radius - along, 1e-300))
    return np.maximum(safe, 1e-300)


def interaction(sheet: Sheet, height: float) -> np.ndarray:
    """Return the double integral of 1/R over all pairs of triangles (M, M) a height apart [h^3]."""
    distance = np.sqrt(_squares(sheet) + height**2)
    np.fill_diagonal(distance, np.maximum(np.diag(distance), 1.0))
    mean = 1.0 / distance
    i, j = _near_pairs(sheet, height)
    close = np.zeros(len(i))
    for point, weight in zip(POINTS, WEIGHTS, strict=True):
        at = np.einsum("k,nkd->nd", point, sheet.corners[i])
        close += weight * potential(sheet.corners[j], at, height)
    mean[i, j] = mean[j, i] = close / sheet.areas[j]
    return mean * np.outer(sheet.areas, sheet.areas)


def _squares(sheet: Sheet) -> np.ndarray:
    """Return the squared distances of all centres (M, M) [h^2]."""
    x, y = sheet.centres.T
    return np.subtract.outer(x, x) ** 2 + np.subtract.outer(y, y) ** 2


def _near_pairs(sheet: Sheet, height: float) -> tuple[np.ndarray, np.ndarray]:
    """Return pairs too near for their centres to stand for them, the smaller triangle first."""
    tree, reach = cKDTree(sheet.centres), NEAR * (sheet.sizes + sheet.sizes.max())
    found = tree.query_ball_point(sheet.centres, np.sqrt(np.maximum(reach**2 - height**2, 0.0)))
    i = np.repeat(np.arange(len(found)), [len(near) for near in found])
    j = np.concatenate([np.asarray(near, dtype=int) for near in found])
    apart = np.hypot(*(sheet.centres[i] - sheet.centres[j]).T)
    smaller = (sheet.sizes[i] < sheet.sizes[j]) | ((sheet.sizes[i] == sheet.sizes[j]) & (i <= j))
    kept = smaller & (np.hypot(apart, height) < NEAR * (sheet.sizes[i] + sheet.sizes[j]))
    return i[kept], j[kept]


def capacitance(sheet: Sheet, er: float) -> float:
    """Return the sheet's capacitance to ground over EPS0."""
    k = (er - 1.0) / (er + 1.0)
    images = 1 if k == 0.0 else math.ceil(math.log(IMAGE_LIMIT) / math.log(k)) + 1
    matrix = interaction(sheet, 0.0) - (1.0 + k) * interaction(sheet, 2.0)
    squares, areas = _squares(sheet), np.outer(sheet.areas, sheet.areas)
    for n in range(2, images + 1):
        matrix -= (1.0 + k) * (-k) ** (n - 1) * areas / np.sqrt(squares + 4.0 * n * n)
    charge = scipy.linalg.solve(matrix * 2.0 / (er + 1.0) / (4.0 * math.pi), sheet.areas, assume_a="pos")
    return float(sheet.areas @ charge)


def inductances(sheet: Sheet) -> np.ndarray:
    """Return twice the energy over MU0 as a form of the stream function on all edges but the first."""
    mutual = (interaction(sheet, 0.0) - interaction(sheet, 2.0)) / (4.0 * math.pi)
    energy = sum(slope.T @ (slope.T @ mutual).T for slope in _slopes(sheet))
    fixed = np.concatenate(sheet.edges)
    free = np.setdiff1d(np.arange(len(sheet.points)), fixed)
    stream = np.zeros((len(sheet.points), len(sheet.edges) - 1))
    for k, edge in enumerate(sheet.edges[1:]):
        stream[edge, k] = 1.0
    drive = -energy[np.ix_(free, fixed)] @ stream[fixed]
    stream[free] = scipy.linalg.solve(energy[np.ix_(free, free)], drive, assume_a="pos")
    return stream.T @ energy @ stream


def _slopes(sheet: Sheet):
    """Return the gradient of a function of the points, on each triangle, as two sparse matrices."""
    ahead, behind = np.roll(sheet.corners, -1, axis=1), np.roll(sheet.corners, -2, axis=1)
    dx = (ahead[..., 1] - behind[..., 1]) / (2.0 * sheet.areas[:, None])
    dy = (behind[..., 0] - ahead[..., 0]) / (2.0 * sheet.areas[:, None])
    rows = np.repeat(np.arange(len(sheet.triangles)), 3)
    shape = (len(sheet.triangles), len(sheet.points))
    return [scipy.sparse.csr_matrix((d.ravel(), (rows, sheet.triangles.ravel())), shape) for d in (dx, dy)]
