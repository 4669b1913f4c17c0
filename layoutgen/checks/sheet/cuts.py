"""Cuts across a current along lines of one potential: how much passes, over what length.

A line of one potential is a cross-section: all current crosses it at a right angle. The mean density over it
is what a neck, a tee, a taper or the rim of a pad carries, and does not depend on how fine the mesh is, as
the largest density at an inner corner does. The current through it is that between the mesh's points on both
sides, which no coarseness of the triangles loses or adds to.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from layoutgen.checks.netgraph import clusters
from layoutgen.checks.sheet.mesh import Mesh
from layoutgen.checks.sheet.solve import Flow, slopes

__all__ = ["Cut", "cuts"]

Floats = npt.NDArray[np.float64]

_MOST = 48


@dataclass(frozen=True, slots=True)
class Cut:
    """A cut: its middle [nm], length [nm], and the current through it [A]."""

    x: float
    y: float
    length: float
    current: float

    @property
    def density(self) -> float:
        """Mean sheet current density [A/nm]."""
        return self.current / self.length


def cuts(flow: Flow, above: float) -> list[Cut]:
    """Return cuts through the triangles that carry more than a density [A/nm], at most 48.

    Cuts elsewhere pass only triangles that carry less.
    """
    hot = np.flatnonzero(flow.density > above)
    if not len(hot):
        return []
    levels = flow.potential[flow.mesh.triangles].mean(axis=1)
    if len(hot) > _MOST:
        hottest = hot[np.argsort(-flow.density[hot], kind="stable")[: _MOST // 2]]
        by_level = hot[np.argsort(levels[hot], kind="stable")]
        spread = by_level[np.linspace(0, len(hot) - 1, _MOST - len(hottest)).astype(np.intp)]
        hot = np.unique(np.concatenate((hottest, spread)))
    return [_cut(flow, int(triangle), float(levels[triangle])) for triangle in hot]


def _cut(flow: Flow, triangle: int, level: float) -> Cut:
    """Return the line of one potential through the middle of a triangle."""
    corners = flow.potential[flow.mesh.triangles]
    crossed = np.flatnonzero((corners.min(axis=1) < level) & (corners.max(axis=1) > level))
    length, middle = _segments(flow, crossed, level)
    label = _connected(flow, crossed, level)
    mine = label == label[np.searchsorted(crossed, triangle)]
    length, middle = length[mine], middle[mine]
    total = float(length.sum())
    x, y = ((middle * length[:, None]).sum(axis=0) / total).tolist()
    return Cut(x, y, total, _through(flow, crossed[mine], level))


def _through(flow: Flow, crossed: npt.NDArray[np.intp], level: float) -> float:
    """Return the current [A] through triangles from their points above a potential to those below."""
    triangles = flow.mesh.triangles[crossed]
    gradients, areas = slopes(Mesh(flow.mesh.points, triangles))
    levels = flow.potential[triangles]
    falling = np.einsum("mik,mi->mk", gradients, levels)
    upper = np.einsum("mik,mi->mk", gradients, (levels > level).astype(float))
    return float(((falling * upper).sum(axis=1) * areas).sum())


def _segments(flow: Flow, crossed: npt.NDArray[np.intp], level: float) -> tuple[Floats, Floats]:
    """Return length [nm] and middle of the line's piece in each crossed triangle."""
    ends = np.full((len(crossed), 3, 2), np.nan)
    for k in range(3):
        a, b = (flow.mesh.triangles[crossed, (k + n) % 3] for n in (0, 1))
        va, vb = flow.potential[a], flow.potential[b]
        meets = (va < level) != (vb < level)
        with np.errstate(divide="ignore", invalid="ignore"):
            share = (level - va) / (vb - va)
        at = flow.mesh.points[a] + share[:, None] * (flow.mesh.points[b] - flow.mesh.points[a])
        ends[meets, k] = at[meets]
    middle = np.nanmean(ends, axis=1)
    reach = np.nan_to_num(np.hypot(*(ends - middle[:, None, :]).transpose(2, 0, 1)), nan=0.0)
    return reach.sum(axis=1), middle


def _connected(flow: Flow, crossed: npt.NDArray[np.intp], level: float) -> npt.NDArray[np.intp]:
    """Return for each crossed triangle the first of those that its piece of the line hangs together with."""
    count = len(flow.mesh.points)
    keys, owners = [], []
    for k in range(3):
        a, b = (flow.mesh.triangles[crossed, (k + n) % 3] for n in (0, 1))
        meets = (flow.potential[a] < level) != (flow.potential[b] < level)
        keys.append((np.minimum(a, b) * count + np.maximum(a, b))[meets])
        owners.append(np.flatnonzero(meets))
    key, owner = np.concatenate(keys), np.concatenate(owners)
    order = np.argsort(key, kind="stable")
    same = np.flatnonzero(np.diff(key[order]) == 0)
    pairs = np.column_stack((owner[order[same]], owner[order[same + 1]]))
    return clusters(len(crossed), np.asarray(pairs, dtype=np.intp))
