"""The response correction: lengths at which the drawing does what the schematic did.

In: an artwork. Out: by line and pair given by angle, the correction [rad] for ``size_circuit``; bounded least
squares over the S-parameters in the band, without losses; mirror images get equal corrections. A line is
drawn longer or shorter by a quarter of its angle and by 15 degrees at most, and only as far as it helps:
a small price on every change leaves alone what the response does not feel.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from layoutgen.artwork import Artwork
from layoutgen.response.chain import FloatArray
from layoutgen.response.match import Match, resized
from layoutgen.response.sweep import part_data
from layoutgen.response.trace import trace_copper
from layoutgen.sizing import SizedCircuit

__all__ = ["MOST_CHANGE", "LengthFit", "correct_lengths"]

MOST_CHANGE = math.radians(15.0)
"""Bound of a correction [rad]; a quarter of the line's angle and half its copper are others."""

_PRICE = 4e-3  # what a change of a radian costs, as a difference of S [-]
_ROUNDS = 6
_SETTLED = 0.02  # of the cost, relative
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
    x = _fitted(match)
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


def _fitted(match: Match) -> FloatArray:
    """Return the change (G,) [rad] of least cost."""
    low, high = _bounds(match)
    x = np.clip(np.zeros(low.size), low, high)
    cost = np.inf
    for _ in range(_ROUNDS):
        difference, slope = match.around(x)
        before, cost = cost, _cost(match, x, difference)
        if cost > before * (1.0 - _SETTLED):
            break
        price = _PRICE**2 * difference.size
        curve = (slope.conj().T @ slope).real + price * np.eye(x.size)
        fall = (slope.conj().T @ difference).real + price * (match.total + x)
        step = _bounded_step(curve, fall, low - x, high - x)
        x = x + _shortened(match, x, step, cost) * step
    return x


def _cost(match: Match, x: FloatArray, difference: np.ndarray[tuple[int], np.dtype[np.complex128]]) -> float:
    """Return the sum of squares with the price of the changes."""
    squares = float(np.sum(np.abs(difference) ** 2))
    return squares + _PRICE**2 * difference.size * float(np.sum((match.total + x) ** 2))


def _shortened(match: Match, x: FloatArray, step: FloatArray, cost: float) -> float:
    """Return the largest share of a step that lowers the cost: 1, a half, a quarter, or none."""
    shares = np.array([1.0, 0.5, 0.25])
    tried = match.difference(x + shares[:, None] * step)
    for share, difference in zip(shares.tolist(), tried, strict=True):
        if _cost(match, x + share * step, difference.ravel()) < cost:
            return float(share)
    return 0.0


def _bounds(match: Match) -> tuple[FloatArray, FloatArray]:
    """Return the least and the largest change (G,) [rad], counted from the drawing."""
    sized = match.artwork.placement.sized
    asked = np.array([(sized.lines.get(g[0]) or sized.pairs[g[0]]).angle for g in match.groups], dtype=float)
    most = np.minimum(0.25 * asked, MOST_CHANGE)
    low = np.maximum(-most, match.total - 0.5 * match.own)
    return np.minimum(low - match.total, 0.0), np.maximum(most - match.total, 0.0)


def _bounded_step(curve: FloatArray, fall: FloatArray, low: FloatArray, high: FloatArray) -> FloatArray:
    """Return the minimum of half d curve d + fall d with low <= d <= high; what meets a bound stays there."""
    step = np.zeros(fall.size)
    free = np.ones(fall.size, dtype=np.bool_)
    while np.any(free):
        right = -fall[free] - curve[np.ix_(free, ~free)] @ step[~free]
        step[free] = np.linalg.solve(curve[np.ix_(free, free)], right)
        beyond = free & ((step < low) | (step > high))
        if not np.any(beyond):
            break
        step = np.where(beyond, np.clip(step, low, high), step)
        free &= ~beyond
    return step
