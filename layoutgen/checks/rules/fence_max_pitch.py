"""The fence along the pour leaves no gap that a wave passes.

What: along each pour edge that faces a line, consecutive via axes are at most ``fence.max_pitch`` apart,
and at most ``fence.max_pitch_wavelengths`` of c / (f sqrt(er)) at the band's upper edge; the smaller one
governs and names the finding. ``vias.min_pitch`` wins over both: then ``fence.max_pitch`` says for which
frequency the row would do.
Why: the pour with a sparse row of vias guides waves between the planes, past the filter it stands beside.
How measured: a row is asked for where a pour edge faces a line within two of the line's gaps, over
stretches longer than the pitch, not within 0.3 mm of part outlines. Vias on gnd within
``fence.max_edge_distance`` of the stretch count that stand behind it, in ground copper all the way to their
foot on it (on both sides of a narrow piece of pour), in the order of these feet; the distance of two is the
way along the edge, or around a corner the straight line between the axes, at most twice the depth of each
behind the edge shorter; the ends of a stretch count as axes. A micrometre above the limit passes (rows are
laid on whole nanometres along arcs drawn as chords).
Source: a twentieth of a wavelength in the slab is common practice (public pages on microwave boards).
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from itertools import pairwise
from typing import NamedTuple

import numpy as np
import numpy.typing as npt
import shapely

from layoutgen.checks.board import Board
from layoutgen.checks.fences import ground_copper, nearest_line, stretches, unfenced
from layoutgen.checks.nodes import GROUND
from layoutgen.checks.outcome import Hit, Outcome, Rule, mm, named
from layoutgen.checks.planar import TOLERANCE_NM, Geometry, whole
from layoutgen.checks.records import NotChecked
from layoutgen.formulas.constants import C0
from layoutgen.geometry import Point

__all__ = ["RULE"]

PITCH = "fence.max_pitch"
WAVELENGTHS = "fence.max_pitch_wavelengths"
_PITCH_TOLERANCE_NM = 1_000.0


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each gap in a row of vias."""
    if (reason := unfenced(board)) is not None:
        yield from (NotChecked(name, reason) for name in RULE.names if board.limits.get(name) is not None)
        return
    name, limit = _governing(board)
    least = board.limits.nm("vias.min_pitch") or 0.0
    if limit < least:
        yield _too_close(board, limit, least)
        name, limit = PITCH, least
    ground = ground_copper(board)
    for stretch in stretches(board):
        if stretch.length > limit:
            yield from _gaps(board, stretch, ground, name, limit)


def _wavelength(board: Board) -> float:
    """Return the wavelength in the slab [nm] at the band's upper edge."""
    assert board.artwork is not None
    file = board.artwork.placement.sized.circuit.file
    return C0 / (file.design.band[1] * math.sqrt(file.substrate.relative_permittivity)) * 1e9


def _governing(board: Board) -> tuple[str, float]:
    """Return the rule that governs and its pitch [nm]."""
    given = []
    if (pitch := board.limits.nm(PITCH)) is not None:
        given.append((pitch, PITCH))
    if (share := board.limits.number(WAVELENGTHS)) is not None:
        given.append((share * _wavelength(board), WAVELENGTHS))
    pitch, name = min(given)
    return name, pitch


def _too_close(board: Board, asked: float, least: float) -> Hit:
    """Return the hit for a fence that the vias' own pitch keeps from being as dense as asked."""
    text = f"the fence asks for a pitch of {mm(asked)}, vias.min_pitch allows {mm(least)}"
    if (share := board.limits.number(WAVELENGTHS)) is not None and board.artwork is not None:
        top = board.artwork.placement.sized.circuit.file.design.band[1]
        frequency = top * share * _wavelength(board) / least
        text = f"{text}, which would do up to {frequency / 1e9:.3f} GHz by {WAVELENGTHS}"
    return Hit(
        rule=PITCH,
        text=text,
        items=("pour",),
        measured=least / 1e6,
        limit=asked / 1e6,
        unit="mm",
        nets=(GROUND,),
    )


def _gaps(
    board: Board, stretch: shapely.LineString, ground: Geometry, name: str, limit: float
) -> Iterator[Hit]:
    """Yield the gaps in the row along one stretch of the ground's copper."""
    for gap, at in _row(board, stretch, ground, limit):
        if gap > limit + _PITCH_TOLERANCE_NM:
            line = nearest_line(board, at)
            yield Hit(
                rule=name,
                text=f"fence beside {line}: {mm(gap)} between axes, at most {mm(limit)}",
                items=named(line, "pour"),
                at=at,
                measured=gap / 1e6,
                limit=limit / 1e6,
                unit="mm",
                nets=(GROUND,),
            )


def _row(
    board: Board, stretch: shapely.LineString, ground: Geometry, limit: float
) -> Iterator[tuple[float, Point]]:
    """Yield the distances of consecutive axes along a stretch [nm], each with the middle between them."""
    reach = (board.limits.nm("fence.max_edge_distance") or limit) + TOLERANCE_NM
    near = board.drill_tree.query(stretch, predicate="dwithin", distance=reach)
    vias = [board.drills[k] for k in np.sort(near).tolist() if board.drills[k].is_via]
    axes = np.array([(via.x, via.y) for via in vias if via.node == GROUND]).reshape(-1, 2)
    (x0, y0), (x1, y1) = shapely.get_coordinates(stretch)[[0, -1]].tolist()
    behind = [foot for foot in _feet(stretch, axes, reach) if ground.covers(foot.way(stretch))]
    feet = [_Foot(0.0, x0, y0, 0.0), *sorted(behind), _Foot(stretch.length, x1, y1, 0.0)]
    for a, b in pairwise(feet):
        middle = stretch.interpolate((a.along + b.along) / 2.0)
        yield _apart(a, b), whole(middle.x, middle.y)


class _Foot(NamedTuple):
    """Where an axis stands by a stretch: way along it, the axis itself, its distance behind the edge [nm]."""

    along: float
    x: float
    y: float
    depth: float

    def way(self, stretch: shapely.LineString) -> shapely.LineString:
        """Return the straight way from the axis to its foot."""
        foot = stretch.interpolate(self.along)
        return shapely.LineString([(self.x, self.y), (foot.x, foot.y)])


def _apart(a: _Foot, b: _Foot) -> float:
    """Return the distance of two axes that follow each other along an edge [nm].

    Around a corner of pour the edge is longer than the row behind it, by twice the depth of each axis at
    most: so much may the straight way be shorter.
    """
    along = b.along - a.along
    return min(along, max(math.hypot(b.x - a.x, b.y - a.y), along - 2.0 * (a.depth + b.depth)))


def _feet(stretch: shapely.LineString, axes: npt.NDArray[np.float64], reach: float) -> Iterator[_Foot]:
    """Yield where axes (N, 2) [nm] stand by a stretch.

    An axis in a narrow piece of pour, with the stretch running past on both sides, has a foot on each; one
    behind a corner, as far from both its edges, too: rounding must not decide which one it stands by.
    """
    points = shapely.get_coordinates(stretch)
    step = np.diff(points, axis=0)
    length = np.hypot(*step.T)
    before = np.concatenate(([0.0], np.cumsum(length)))[:-1]
    for x, y in axes.tolist():
        offset = np.array([x, y]) - points[:-1]
        share = np.clip(np.einsum("nk,nk->n", offset, step) / length**2, 0.0, 1.0)
        away = np.hypot(*(offset - share[:, None] * step).T)
        close = np.flatnonzero(away <= reach)
        for group in np.split(close, np.flatnonzero(np.diff(close) > 1) + 1):
            nearest = group[away[group] <= away[group].min(initial=np.inf) + TOLERANCE_NM]
            for best in dict.fromkeys(nearest[[0, -1]].tolist() if len(nearest) else ()):
                yield _Foot(float(before[best] + share[best] * length[best]), x, y, float(away[best]))


RULE = Rule(names=(PITCH, WAVELENGTHS), find=find, needs_circuit=True)
