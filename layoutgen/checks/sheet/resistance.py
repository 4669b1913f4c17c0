"""The resistance of a sheet between two electrodes, for comparison with closed forms."""

from __future__ import annotations

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.checks.sheet.mesh import mesh_of
from layoutgen.checks.sheet.recovery import missing_power
from layoutgen.checks.sheet.solve import solve

__all__ = ["sheet_resistance"]


def sheet_resistance(
    polygon: shapely.Polygon,
    first: BaseGeometry,
    second: BaseGeometry,
    reach: float = 1.0,
    fineness: float = 1.0,
) -> float:
    """Return the resistance between two ideal electrodes on a sheet, in squares [-].

    What linear triangles lose is put back (see :mod:`~layoutgen.checks.sheet.recovery`).

    Args:
        polygon: The sheet [nm].
        first: One electrode; points within ``reach`` [nm] of it are tied.
        second: The other one.
        reach: How near a point is to count as on an electrode [nm].
        fineness: As in :func:`~layoutgen.checks.sheet.mesh.mesh_of` [-].

    Raises:
        ValueError: No mesh fits the outline, or an electrode meets no point of it.
    """
    mesh = mesh_of(polygon, fineness=fineness)
    if mesh is None:
        raise ValueError("no mesh fits the outline")
    points = np.asarray(shapely.points(mesh.points), dtype=object)
    groups = [np.flatnonzero(shapely.dwithin(points, one, reach)) for one in (first, second)]
    if not all(len(group) for group in groups):
        raise ValueError("an electrode meets no point of the sheet")
    loads = np.zeros(len(points))
    loads[groups[0][0]], loads[groups[1][0]] = 1.0, -1.0
    flow = solve(mesh, loads, groups)
    return float(flow.potential[groups[0][0]] - flow.potential[groups[1][0]]) + missing_power(flow)
