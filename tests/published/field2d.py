"""A quasi-static field solution of microstrip cross-sections by finite elements: the outside check.

It shares nothing with the package: Laplace's equation on a box, biquadratic elements on a tensor mesh that is
refined towards every conductor corner, capacitance from the field energy. Lengths are in units of the substrate
height. The open space is bracketed by a grounded and a magnetic box wall, of which the mean is taken.

>>> from tests.published.field2d import solve_line
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from skfem import Basis, BilinearForm, ElementQuad2, MeshQuad, condense, solve
from skfem.helpers import dot, grad

ETA0 = 376.730313668
FAR = 60.0
FINEST = 5e-4
GROWTH = 1.9
POUR_COUNTS_TO = 20.0


@dataclass(frozen=True)
class Line:
    """Impedance [ohm] and effective permittivity [-] of one mode."""

    impedance: float
    effective_permittivity: float


@dataclass(frozen=True)
class Conductor:
    """A strip from x = left to right [h], at a potential [V]."""

    left: float
    right: float
    potential: float


@BilinearForm
def _energy(u, v, w):
    return w.permittivity * dot(grad(u), grad(v))


def solve_line(
    u: float, er: float, t: float = 0.0, gap_left: float = math.inf, gap_right: float = math.inf
) -> Line:
    """Solve one strip of width u between grounded pours at the given gaps."""
    strip = Conductor(-0.5 * u, 0.5 * u, 1.0)
    pours = _pours(-0.5 * u - gap_left, 0.5 * u + gap_right)
    return _mode([strip, *pours], er, t, share=1.0)


def solve_pair(
    u: float, g: float, er: float, t: float = 0.0, gap_left: float = math.inf, gap_right: float = math.inf
) -> tuple[Line, Line]:
    """Solve even and odd mode of two strips of width u, g apart, between grounded pours."""
    pours = _pours(-u - 0.5 * g - gap_left, u + 0.5 * g + gap_right)
    modes = []
    for left in (1.0, -1.0):
        strips = [Conductor(-u - 0.5 * g, -0.5 * g, left), Conductor(0.5 * g, u + 0.5 * g, 1.0)]
        modes.append(_mode([*strips, *pours], er, t, share=0.5))
    return modes[0], modes[1]


def _pours(left_edge: float, right_edge: float) -> list[Conductor]:
    """Return the grounded pours outside of the two edges; one far away is left out."""
    pours = []
    if left_edge > -POUR_COUNTS_TO:
        pours.append(Conductor(-FAR, left_edge, 0.0))
    if right_edge < POUR_COUNTS_TO:
        pours.append(Conductor(right_edge, FAR, 0.0))
    return pours


def _mode(conductors: list[Conductor], er: float, t: float, share: float) -> Line:
    """Return the line that the conductors' potentials make; share is each strip's part of the energy."""
    mesh = _mesh(conductors, t)
    basis = Basis(mesh, ElementQuad2())
    x, y = basis.doflocs
    potential, fixed = np.zeros(x.size), np.abs(y) < 1e-9
    for c in conductors:
        inside = (x > c.left - 1e-9) & (x < c.right + 1e-9) & (y > 1.0 - 1e-9) & (y < 1.0 + t + 1e-9)
        potential[inside], fixed = c.potential, fixed | inside
    wall = (np.abs(np.abs(x) - FAR) < 1e-9) | (np.abs(y - FAR) < 1e-9)
    below = basis.interpolate(np.zeros(x.size)).value * 0.0 + (mesh.p[1, mesh.t].mean(axis=0) < 1.0)[:, None]
    capacitance = []
    for slab in (er, 1.0):
        stiffness = _energy.assemble(basis, permittivity=np.where(below > 0.5, slab, 1.0))
        both = [_capacitance(stiffness, potential, dofs) for dofs in (fixed, fixed | wall)]
        capacitance.append(share * 0.5 * sum(both))
    c, c_air = capacitance
    return Line(ETA0 / math.sqrt(c * c_air), c / c_air)


def _capacitance(stiffness, potential, fixed) -> float:
    """Return twice the energy over EPS0 with the given potentials held."""
    field = solve(*condense(stiffness, x=potential, D=np.flatnonzero(fixed)))
    return float(field @ (stiffness @ field))


def _mesh(conductors: list[Conductor], t: float) -> MeshQuad:
    """Return a tensor mesh of the box, refined towards the conductors' corners."""
    ends = {edge for c in conductors for edge in (c.left, c.right) if abs(edge) < FAR}
    columns = _graded([-FAR, *sorted(ends), FAR], first_is_corner=False)
    rows = _graded([0.0, 1.0, *([1.0 + t] if t > 0.0 else []), FAR], first_is_corner=False)
    return MeshQuad.init_tensor(columns, rows)


def _graded(marks: list[float], first_is_corner: bool) -> np.ndarray:
    """Return grid lines between the marks, geometrically refined towards every inner mark."""
    lines = [marks[0]]
    for index, (low, high) in enumerate(zip(marks, marks[1:], strict=False)):
        left = index > 0 or first_is_corner
        right = index < len(marks) - 2
        lines.extend((low + (high - low) * share for share in _shares(high - low, left, right)))
    return np.array(lines)


def _shares(length: float, left: bool, right: bool) -> np.ndarray:
    """Return the grid lines (0, 1] of one interval, refined at the ends asked for."""
    reach = length / (2.0 if left and right else 1.0)
    count = max(3, math.ceil(math.log1p(reach * (GROWTH - 1.0) / FINEST) / math.log(GROWTH)))
    sizes = GROWTH ** np.arange(count)
    if left and right:
        sizes = np.concatenate([sizes, sizes[::-1]])
    elif right:
        sizes = sizes[::-1]
    lines = np.cumsum(sizes) / sizes.sum()
    lines[-1] = 1.0
    return lines
