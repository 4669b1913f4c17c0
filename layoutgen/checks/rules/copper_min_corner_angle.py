"""No notch in the copper is so sharp that it holds etchant.

What: at each inside corner of finished copper the angle of the empty notch is at least
``copper.min_corner_angle``.
Why: etchant is held in a sharp notch and goes on etching there.
How measured: on the joined copper of each layer, after steps below 10 nm are smoothed; the angle between
the two edges that meet. Inward turns that follow each other within 5 um of outline are one corner, so that a
tip cut off or rounded by so little is as sharp as its flanks. Points of copper that stick out are not
notches: ``copper.min_width`` finds those sharper than about 33 degrees. The two notches of a radial stub on
its host line are exempt, with a note. 0.05 degrees below the limit pass.
Source: common practice, no source; the exemption is the circuit file's meaning.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import NamedTuple

import numpy as np
import shapely

from layoutgen.checks.board import Board, Layer
from layoutgen.checks.facing import Edges, edges_of
from layoutgen.checks.outcome import Hit, Outcome, Rule, named
from layoutgen.checks.planar import TOLERANCE_NM, Bools, Floats, Ints, whole

__all__ = ["RULE"]

NAME = "copper.min_corner_angle"
_ANGLE_TOLERANCE = math.radians(0.05)
_STEP_NM = 1_000.0
_BLUNT_NM = 5_000.0
"""Turns that follow each other within this way along an outline [nm] are one corner."""


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each sharp notch, a note for each exempt one."""
    limit = board.limits.number(NAME)
    if limit is not None:
        for layer in board.layers:
            yield from _notches(layer, limit)


def _notches(layer: Layer, limit: float) -> Iterator[Hit]:
    """Yield the sharp notches of one layer."""
    edges = edges_of(np.asarray(shapely.simplify(layer.merged, TOLERANCE_NM), dtype=object))
    if not len(edges.start):
        return
    corners = _corners(edges)
    sharp = corners.kept(corners.opening < limit - _ANGLE_TOLERANCE)
    step = _STEP_NM * np.ones((len(sharp.first), 1))
    before, after = sharp.first, _next_edges(edges)[sharp.last]
    back = edges.end[before] - np.minimum(step, edges.length[before][:, None] / 2.0) * edges.direction[before]
    on = edges.start[after] + np.minimum(step, edges.length[after][:, None] / 2.0) * edges.direction[after]
    first, second = layer.owners(back, 3.0 * TOLERANCE_NM), layer.owners(on, 3.0 * TOLERANCE_NM)
    places = (edges.end[sharp.first] + edges.end[sharp.last]) / 2.0
    for k, angle in enumerate(sharp.opening.tolist()):
        yield _hit(layer, first[k], second[k], places[k].tolist(), angle, limit)


class _Corners(NamedTuple):
    """Inside corners: the edges (N,) that end at the first and last turn of each, openings (N,) [rad]."""

    first: Ints
    last: Ints
    opening: Floats

    def kept(self, mask: Bools) -> _Corners:
        """Return the corners where the mask is True."""
        return _Corners(self.first[mask], self.last[mask], self.opening[mask])


def _corners(edges: Edges) -> _Corners:
    """Return the inside corners of outlines; turns within a short way of each other are one."""
    after = _next_edges(edges)
    before, next_ = edges.direction, edges.direction[after]
    cross = before[:, 0] * next_[:, 1] - before[:, 1] * next_[:, 0]
    turn = np.arctan2(cross, np.einsum("nk,nk->n", before, next_))
    inward = np.flatnonzero(turn < 0.0)
    found = [_Corners(inward, inward, math.pi + turn[inward])]
    blunt = (turn < 0.0) & (turn[after] < 0.0) & (edges.length[after] <= _BLUNT_NM)
    rings = np.unique(edges.ring[blunt])
    starts, ends = np.searchsorted(edges.ring, rings), np.searchsorted(edges.ring, rings, side="right")
    spans = zip(starts.tolist(), ends.tolist(), strict=True)
    found += [_runs(np.arange(start, end), edges.length, turn) for start, end in spans]
    return _Corners(*(np.concatenate(column) for column in zip(*found, strict=True)))


def _runs(own: Ints, length: Floats, turn: Floats) -> _Corners:
    """Return the corners of one ring that several turns make up.

    Args:
        own: The ring's edges, in order.
        length: Length of each edge [nm].
        turn: Turn at the end of each edge [rad], inward negative.
    """
    twice = np.concatenate((own, own))
    way, turned = np.cumsum(length[twice]), np.cumsum(turn[twice])
    start = np.flatnonzero(turn[own] < 0.0)
    outward = np.append(np.flatnonzero(turn[twice] >= 0.0), len(twice))
    end = np.searchsorted(way, way[start] + _BLUNT_NM, side="right")
    end = np.minimum(end, outward[np.searchsorted(outward, start)]) - 1
    start, end = start[end > start], end[end > start]
    opening = math.pi + turned[end] - turned[start] + turn[twice[start]]
    return _Corners(twice[start], twice[end], np.maximum(opening, 0.0))


def _next_edges(edges: Edges) -> Ints:
    """Return for each edge the index of the one that follows it on its ring (N,)."""
    after = np.arange(1, len(edges.ring) + 1)
    last = np.flatnonzero(np.append(edges.ring[1:] != edges.ring[:-1], True))
    after[last] = np.concatenate(([0], last[:-1] + 1))
    return after


def _hit(layer: Layer, first: int, second: int, place: list[float], angle: float, limit: float) -> Hit:
    """Return the hit of one notch between two pieces."""
    owners = [layer.pieces[k] for k in (first, second) if k >= 0]
    items = named(*(piece.item for piece in owners))
    exempt = [piece.role for piece in owners].count("radial") == 1 and len(owners) == 2
    text = f"notch of {math.degrees(angle):.1f} deg in copper of {' and '.join(items)}"
    reason = "exempt at a radial stub" if exempt else f"at least {math.degrees(limit):.1f} deg"
    return Hit(
        rule=NAME,
        text=f"{text}, {reason}",
        items=items,
        at=whole(*place),
        measured=math.degrees(angle),
        limit=math.degrees(limit),
        unit="deg",
        layer=layer.name,
        nets=named(*(piece.net or "" for piece in owners)),
        note=exempt,
    )


RULE = Rule(names=(NAME,), find=find)
