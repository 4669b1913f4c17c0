"""No notch in the copper is so sharp that it holds etchant.

What: at each inside corner of finished copper the angle of the empty notch is at least
``copper.min_corner_angle``.
Why: etchant is held in a sharp notch and goes on etching there.
How measured: on the joined copper of each layer, after steps below 10 nm are smoothed; the angle between
the two edges that meet. Points of copper that stick out are not notches: ``copper.min_width`` finds those
sharper than about 33 degrees. The two notches of a radial stub on its host line are exempt, with a note.
0.05 degrees below the limit pass.
Source: common practice, no source; the exemption is the circuit file's meaning.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np
import numpy.typing as npt
import shapely

from layoutgen.checks.board import Board, Layer
from layoutgen.checks.facing import Edges, edges_of
from layoutgen.checks.outcome import Hit, Outcome, Rule, named
from layoutgen.checks.planar import TOLERANCE_NM, whole

__all__ = ["RULE"]

NAME = "copper.min_corner_angle"
_ANGLE_TOLERANCE = math.radians(0.05)
_STEP_NM = 1_000.0


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
    after = _next_edges(edges)
    before, next_ = edges.direction, edges.direction[after]
    cross = before[:, 0] * next_[:, 1] - before[:, 1] * next_[:, 0]
    turn = np.arctan2(cross, np.einsum("nk,nk->n", before, next_))
    opening = math.pi + turn
    sharp = np.flatnonzero((turn < 0.0) & (opening < limit - _ANGLE_TOLERANCE))
    step = _STEP_NM * np.ones((len(sharp), 1))
    back = edges.end[sharp] - np.minimum(step, edges.length[sharp][:, None] / 2.0) * before[sharp]
    on = edges.end[sharp] + np.minimum(step, edges.length[after[sharp]][:, None] / 2.0) * next_[sharp]
    first, second = layer.owners(back, 3.0 * TOLERANCE_NM), layer.owners(on, 3.0 * TOLERANCE_NM)
    for k, edge in enumerate(sharp.tolist()):
        place, angle = edges.end[edge].tolist(), float(opening[edge])
        yield _hit(layer, first[k], second[k], place, angle, limit)


def _next_edges(edges: Edges) -> npt.NDArray[np.intp]:
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
