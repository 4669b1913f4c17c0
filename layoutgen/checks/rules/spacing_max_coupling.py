"""Parallel runs of lines that are not meant to couple stay weakly coupled.

What: the coupling between two lines over the length they run in parallel is at most
``spacing.max_coupling``.
Why: a few per cent of the output led back to the input is enough to make an amplifier oscillate.
How measured: k = (Ze - Zo) / (Ze + Zo) of a symmetric coupled pair at the drawn gap, times sin(beta l) up to
a quarter wave, at the band's upper edge; for unequal widths the geometric mean of k at both. Legs of two
different lines that run in parallel within a degree, up to ten heights apart; places left out as for
``spacing.min_line_heights``, of the length too. Pour between the lines lowers the coupling and is not taken
into account. 0.01 dB above the limit pass.
Source: Kirschning and Jansen 1984 with thickness (see the formulas); mean and product with sin are
choices of this project, good for weak coupling.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np
import shapely

from layoutgen.artwork import Artwork
from layoutgen.checks.board import Board
from layoutgen.checks.neighbours import Leg, Neighbours, neighbours
from layoutgen.checks.outcome import Hit, Outcome, Rule, mm, named
from layoutgen.checks.planar import Floats, middle
from layoutgen.checks.records import NotChecked
from layoutgen.formulas.constants import C0
from layoutgen.formulas.coupled import coupled_pair

__all__ = ["RULE"]

NAME = "spacing.max_coupling"
_FARTHEST_HEIGHTS = 10.0
_MOST_PERMITTIVITY = 18.0
_PARALLEL = math.sin(math.radians(1.0))


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each pair of parallel legs that couple too much."""
    limit = board.limits.number(NAME)
    if limit is None or board.artwork is None or board.height is None:
        return
    if board.artwork.placement.sized.circuit.file.substrate.relative_permittivity > _MOST_PERMITTIVITY:
        yield NotChecked(NAME, f"the formula holds up to a relative permittivity of {_MOST_PERMITTIVITY:g}")
        return
    for pair in neighbours(board.artwork, _FARTHEST_HEIGHTS * board.height, board.height):
        a, b = pair.first, pair.second
        lap = _overlap(pair)
        if a.line == b.line or lap <= 0.0:
            continue
        coupling = _coupling(board.artwork, board.height, (a, b), pair.distance, lap)
        if coupling > limit + 0.01:
            where = f"{mm(pair.distance)} apart over {mm(lap)}"
            yield Hit(
                rule=NAME,
                text=f"{a.line} and {b.line} couple by {coupling:.1f} dB, {where}, at most {limit:g} dB",
                items=named(a.line, b.line),
                at=middle(pair.one, pair.other),
                measured=coupling,
                limit=limit,
                unit="dB",
                nets=named(*(net for net in (*a.nets, *b.nets) if net != "open")),
            )


def _overlap(pair: Neighbours) -> float:
    """Return the length [nm] over which what counts of two legs runs in parallel, 0 for radial stubs."""
    a, b = pair.first, pair.second
    if a.shape is not None or b.shape is not None or a.length == 0.0 or b.length == 0.0:
        return 0.0
    ax, ay = (a.end[0] - a.start[0]) / a.length, (a.end[1] - a.start[1]) / a.length
    bx, by = (b.end[0] - b.start[0]) / b.length, (b.end[1] - b.start[1]) / b.length
    if abs(ax * by - ay * bx) > _PARALLEL:
        return 0.0
    spans = [np.sort(_centre_line(copper) @ (ax, ay)) for copper in (pair.one, pair.other)]
    return max(0.0, float(min(span[1] for span in spans) - max(span[0] for span in spans)))


def _centre_line(copper: shapely.Polygon) -> Floats:
    """Return the ends (2, 2) [nm] of a straight leg's centre-line, from its four corners."""
    corners = shapely.get_coordinates(copper)[:4]
    return np.asarray((corners[:2] + corners[:1:-1]) / 2.0)


def _coupling(artwork: Artwork, height: float, legs: tuple[Leg, Leg], gap: float, lap: float) -> float:
    """Return the coupling [dB] of two parallel legs, lengths in [nm].

    Widths and gaps outside the formula's range are taken at its edge.
    """
    file = artwork.placement.sized.circuit.file
    er, t = file.substrate.relative_permittivity, file.substrate.copper_thickness * 1e9 / height
    u = np.clip([leg.width / height for leg in legs], 0.1, 10.0)
    pair = coupled_pair(u, np.clip(gap / height, 0.1, 10.0), er, min(t, 0.1))
    k = (pair.z_even - pair.z_odd) / (pair.z_even + pair.z_odd)
    ee = float(np.mean((pair.ee_even + pair.ee_odd) / 2.0))
    turn = 2.0 * math.pi * file.design.band[1] * math.sqrt(ee) / C0 * lap * 1e-9
    strength = math.sqrt(float(k[0] * k[1])) * math.sin(min(turn, math.pi / 2.0))
    return 20.0 * math.log10(max(strength, 1e-12))


RULE = Rule(names=(NAME,), find=find, needs_circuit=True)
