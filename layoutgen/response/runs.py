"""Parallel runs of lines that are no pair: how strongly they would couple, which the network leaves out.

In: a placement. Out: :class:`Run`, one for each two straight legs side by side. The coupling is that of a
symmetric coupled pair at the gap between the legs, the geometric mean for unequal widths, over the length
side by side up to a quarter wave, at the band's upper edge; pour between them, which lowers it, is not
counted. Mean and product with the sine are choices of this project, good for weak coupling.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from layoutgen.formulas.constants import C0
from layoutgen.formulas.coupled import coupled_pair
from layoutgen.placement import Placement
from layoutgen.response.chain import FloatArray

__all__ = ["Run", "parallel_runs"]

_NM = 1e-9
_PARALLEL = math.sin(math.radians(1.0))
_FARTHEST = 10.0  # substrate heights


@dataclass(frozen=True, slots=True)
class Run:
    """Two legs side by side: elements, middle [nm], gap and length [m], coupling [dB]."""

    items: tuple[str, str]
    at: tuple[int, int]
    gap: float
    length: float
    coupling: float


def parallel_runs(placement: Placement) -> Iterator[Run]:
    """Yield all runs of different elements up to ten substrate heights apart, in file order."""
    names, starts, ends, widths = _legs(placement)
    if not names:
        return
    height = placement.sized.circuit.file.substrate.height
    lengths = np.linalg.norm(ends - starts, axis=1)
    headings = (ends - starts) / lengths[:, None]
    for i in range(len(names)):
        rest = slice(i + 1, None)
        ahead, aside = headings[i], np.array([-headings[i][1], headings[i][0]])
        turn = np.abs(headings[rest] @ aside)
        along = np.sort(np.stack([(p[rest] - starts[i]) @ ahead for p in (starts, ends)]), axis=0)
        lap = np.minimum(lengths[i], along[1]) - np.maximum(0.0, along[0])
        offset = np.abs((0.5 * (starts[rest] + ends[rest]) - starts[i]) @ aside)
        gap = offset - 0.5 * (widths[i] + widths[rest])
        found = (turn < _PARALLEL) & (lap > 0.0) & (gap > 0.0) & (gap < _FARTHEST * height)
        for k in np.flatnonzero(found).tolist():
            j = i + 1 + k
            if names[i] == names[j]:
                continue
            middle = starts[i] + ahead * 0.5 * (max(0.0, along[0, k]) + min(lengths[i], along[1, k]))
            sign = math.copysign(0.5, float((starts[j] - starts[i]) @ aside))
            at = (middle + sign * offset[k] * aside) / _NM
            sizes = float(gap[k]), float(lap[k])
            coupling = _coupling(placement, (widths[i], widths[j]), *sizes)
            yield Run((names[i], names[j]), (round(at[0]), round(at[1])), *sizes, coupling)


def _legs(placement: Placement) -> tuple[list[str], FloatArray, FloatArray, FloatArray]:
    """Return names (L,), starts and ends (L, 2) [m] and widths (L,) [m] of all straight legs."""
    paths = [(line.name, line.width, line.path) for line in placement.lines.values()]
    paths += [(pair.name, pair.width, path) for pair in placement.pairs.values() for path in pair.paths]
    legs = [(name, width, a, b) for name, width, path in paths for a, b in itertools.pairwise(path) if a != b]
    starts, ends = (np.array([leg[k] for leg in legs], dtype=float).reshape(-1, 2) * _NM for k in (2, 3))
    return [leg[0] for leg in legs], starts, ends, np.array([leg[1] for leg in legs], dtype=float) * _NM


def _coupling(placement: Placement, widths: tuple[float, float], gap: float, length: float) -> float:
    """Return the coupling [dB] of two legs [m]; beyond the formula's range its edge is taken."""
    file = placement.sized.circuit.file
    h, er = file.substrate.height, min(file.substrate.relative_permittivity, 18.0)
    u, g = np.clip(np.array(widths) / h, 0.1, 10.0), float(np.clip(gap / h, 0.1, 10.0))
    pair = coupled_pair(u, g, er, min(file.substrate.copper_thickness / h, 0.1))
    k = (pair.z_even - pair.z_odd) / (pair.z_even + pair.z_odd)
    ee = float(np.mean(0.5 * (pair.ee_even + pair.ee_odd)))
    turn = 2.0 * math.pi * file.design.band[1] * math.sqrt(ee) / C0 * length
    strength = math.sqrt(float(np.prod(k))) * math.sin(min(turn, 0.5 * math.pi))
    return 20.0 * math.log10(max(strength, 1e-12))
