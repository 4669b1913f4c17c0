"""The potential of a sheet that carries direct current: linear finite elements on triangles.

div(grad v) = 0 with the current fed in and taken out over areas, or at ideal electrodes; the outline is
tight. Sheet resistance is 1 ohm here; the caller scales. Source: any text on the method; the discrete
Laplacian of linear triangles.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt
import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.checks.sheet.mesh import Mesh

__all__ = ["Flow", "gradients", "loads_on", "slopes", "solve"]

Floats = npt.NDArray[np.float64]
Ints = npt.NDArray[np.intp]


@dataclass(frozen=True, slots=True, eq=False)
class Flow:
    """A solved sheet: potential (N,) at the mesh's points for 1 ohm a square [V]; ``density`` (M,) [A/nm]."""

    mesh: Mesh
    potential: Floats
    density: Floats

    @property
    def power(self) -> float:
        """Dissipated power for 1 ohm a square [W]: equals the sum of terminal currents times potentials."""
        return float((self.density**2 * self.mesh.areas).sum())


def loads_on(mesh: Mesh, region: BaseGeometry, current: float) -> Floats:
    """Return the current (N,) [A] into each point where a current enters evenly over a region [nm].

    The region is taken as the triangles whose middles lie in it; where it holds none, as the point nearest
    to its middle.
    """
    loads = np.zeros(len(mesh.points))
    x, y = mesh.centres.T
    inside = np.flatnonzero(shapely.intersects_xy(region, x, y))
    if not len(inside):
        middle = shapely.get_coordinates(region.centroid)[0]
        loads[int(np.argmin(np.hypot(*(mesh.points - middle).T)))] = current
        return loads
    areas = mesh.areas[inside]
    np.add.at(loads, mesh.triangles[inside].ravel(), np.repeat(areas / 3.0, 3))
    return np.asarray(loads * (current / areas.sum()))


def solve(mesh: Mesh, loads: Floats, electrodes: Sequence[Ints] = ()) -> Flow:
    """Return the flow that currents cause; its potential is 0 on average.

    Args:
        mesh: The triangles; all of one piece.
        loads: Current (N,) into each point [A]; their sum is 0.
        electrodes: Groups of points that ideal metal ties together.
    """
    from scipy.sparse import csc_matrix
    from scipy.sparse.linalg import splu

    index = _tied(len(mesh.points), electrodes)
    count = int(index.max()) + 1
    row, column, value = _stiffness(mesh)
    matrix = csc_matrix((value, (index[row], index[column])), shape=(count, count))
    right = np.bincount(index, weights=loads, minlength=count)
    solver: Any = splu(matrix[1:, 1:], permc_spec="MMD_AT_PLUS_A", options={"SymmetricMode": True})
    solved = np.concatenate(([0.0], solver.solve(right[1:])))
    potential = solved[index] - solved[index].mean()
    return Flow(mesh, potential, np.hypot(*gradients(mesh, potential).T))


def _tied(count: int, electrodes: Sequence[Ints]) -> Ints:
    """Return for each point the number of its unknown; points of one electrode share one."""
    label = np.arange(count, dtype=np.intp)
    for points in electrodes:
        label[points] = points.min()
    return np.asarray(np.unique(label, return_inverse=True)[1], dtype=np.intp)


def slopes(mesh: Mesh) -> tuple[Floats, Floats]:
    """Return for each triangle the gradients (M, 3, 2) of its points' hat functions [1/nm], and its area."""
    corners = mesh.points[mesh.triangles]
    opposite = np.roll(corners, -2, axis=1) - np.roll(corners, -1, axis=1)
    areas = mesh.areas
    return np.stack((-opposite[..., 1], opposite[..., 0]), axis=2) / (2.0 * areas[:, None, None]), areas


def _stiffness(mesh: Mesh) -> tuple[Ints, Ints, Floats]:
    """Return the entries of the discrete Laplacian: rows, columns, values."""
    hats, areas = slopes(mesh)
    local = np.einsum("mik,mjk,m->mij", hats, hats, areas)
    row = np.repeat(mesh.triangles, 3, axis=1)
    column = np.tile(mesh.triangles, (1, 3))
    return row.ravel(), column.ravel(), local.ravel()


def gradients(mesh: Mesh, potential: Floats) -> Floats:
    """Return the gradient (M, 2) of the potential in each triangle [V/nm]."""
    return np.asarray(np.einsum("mik,mi->mk", slopes(mesh)[0], potential[mesh.triangles]))
