"""The response correction: lengths at which the drawing does what the schematic did.

In: an artwork. Out: by line and pair given by angle, the correction [rad] for ``size_circuit``; bounded least
squares over the S-parameters in the band, without losses (``fit``). Mirror images and like lines of a loop
get equal corrections. A line is drawn longer or shorter by half its angle and by 15 degrees at most, and only
as far as it helps.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from layoutgen.artwork import Artwork
from layoutgen.response.chain import FloatArray
from layoutgen.response.fit import fitted
from layoutgen.response.match import Match, resized
from layoutgen.response.sweep import part_data
from layoutgen.response.threads import one_thread
from layoutgen.response.trace import trace_copper
from layoutgen.sizing import SizedCircuit

__all__ = ["MOST_CHANGE", "LengthFit", "correct_lengths"]

MOST_CHANGE = math.radians(15.0)
"""Bound of a correction [rad]; half the line's angle and half its copper are others."""

_WORTH = 2e-3  # of the largest difference of S [-]; less is not worth another drawing
_LEAST = 1e-4  # corrections below are left out [rad]


@dataclass(frozen=True, slots=True)
class LengthFit:
    """Corrections [rad] that a next drawing should have, by line or pair, and what they promise.

    ``now``, ``uncorrected`` and ``expected`` are the largest |as drawn - wanted| in the band, without losses
    [-]: of this drawing, of this drawing without its corrections, and with the new ones.
    """

    corrections: Mapping[str, float]
    now: float = 0.0
    uncorrected: float = 0.0
    expected: float = 0.0


@one_thread()
def correct_lengths(
    artwork: Artwork, folder: Path | None = None, sized: SizedCircuit | None = None
) -> LengthFit:
    """Return the corrections that a next drawing should have.

    They are those of this drawing, unchanged, when others would lower the largest difference by less
    than 0.002.

    Args:
        artwork: The drawing, with the corrections it was made with.
        folder: What the paths of data files start from; None: the folder of the circuit file.
        sized: The sizes that the next drawing will have, where they are others.

    Raises:
        WrongInputError: Data files that cannot be used or do not cover the band.
    """
    old = artwork.placement.sized
    copper = trace_copper(artwork) if sized is None else resized(trace_copper(artwork), old, sized)
    match = Match(artwork, part_data(old.circuit.file, folder), copper)
    if not match.groups or not match.wanted.size:
        return LengthFit(old.corrections)
    x = fitted(match, *_bounds(match))
    found = match.difference(np.array([0.0 * x, -match.total, x]))
    now, uncorrected, expected = np.max(np.abs(found), axis=(1, 2, 3)).tolist()
    if expected > now - _WORTH:
        return LengthFit(old.corrections, now, uncorrected, now)
    return LengthFit(_by_name(match, match.total + x), now, uncorrected, expected)


def _by_name(match: Match, total: FloatArray) -> dict[str, float]:
    """Return the corrections [rad] by line or pair, those too small to draw left out."""
    return {
        name: round(-longer, 6)
        for group, longer in zip(match.groups, total.tolist(), strict=True)
        for name in group
        if abs(longer) >= _LEAST
    }


def _bounds(match: Match) -> tuple[FloatArray, FloatArray]:
    """Return the least and the largest change (G,) [rad], counted from the drawing."""
    sized = match.artwork.placement.sized
    asked = np.array([(sized.lines.get(g[0]) or sized.pairs[g[0]]).angle for g in match.groups], dtype=float)
    most = np.minimum(0.5 * asked, MOST_CHANGE)
    low = np.maximum(-most, match.total - 0.5 * match.own)
    return np.minimum(low - match.total, 0.0), np.maximum(most - match.total, 0.0)
