"""Lengths that bring a drawing nearest to its schematic: least squares, then the largest difference lowered.

In: a :class:`Match` and bounds. Out: the change of each group's length. The S-parameters over the band are
fitted by bounded least squares with a small price on every change, so that what the response does not feel
stays alone. Where the largest difference is then still not close enough, the squares are weighted anew by
what they leave (Lawson 1961, from memory), which evens the differences out and lowers the largest.
"""

from __future__ import annotations

import numpy as np

from layoutgen.response.chain import ComplexArray, FloatArray
from layoutgen.response.match import Match
from layoutgen.response.records import CLOSE_ENOUGH

__all__ = ["evened_step", "fitted", "largest"]

_PRICE = 4e-3  # what a change of a radian costs, as a difference of S [-]
_ROUNDS = 6
_SETTLED = 0.02  # of the cost or of the largest difference, relative
_SWEEPS = 40  # of new weights
_SHARES = np.array([1.0, 0.5, 0.25])  # of a step


def largest(difference: ComplexArray) -> float:
    """Return the largest magnitude [-], zero of nothing."""
    return float(np.max(np.abs(difference), initial=0.0))


def fitted(match: Match, low: FloatArray, high: FloatArray) -> FloatArray:
    """Return the best change (G,) [rad] of the lengths, counted from the drawing.

    Args:
        match: As drawn against wanted.
        low: Least changes (G,) [rad].
        high: Largest changes (G,) [rad].
    """
    x = np.clip(np.zeros(low.size), low, high)
    cost = np.inf
    for _ in range(_ROUNDS):
        difference, slope = match.around(x)
        before, cost = cost, _cost(match, x, difference)
        if cost > before * (1.0 - _SETTLED):
            break
        weights = np.ones(difference.size)
        step = _weighted_step(*_real(difference, slope), weights, match.total + x, low - x, high - x)
        x = x + _shortened(match, x, step, cost) * step
    return x if largest(difference) <= CLOSE_ENOUGH else _evened(match, x, low, high)


def _cost(match: Match, x: FloatArray, difference: ComplexArray) -> float:
    """Return the sum of squares with the price of the changes."""
    squares = float(np.sum(np.abs(difference) ** 2))
    return squares + _PRICE**2 * difference.size * float(np.sum((match.total + x) ** 2))


def _shortened(match: Match, x: FloatArray, step: FloatArray, cost: float) -> float:
    """Return the largest share of a step that lowers the cost: 1, a half, a quarter, or none."""
    tried = match.difference(x + _SHARES[:, None] * step)
    for share, difference in zip(_SHARES.tolist(), tried, strict=True):
        if _cost(match, x + share * step, difference.ravel()) < cost:
            return float(share)
    return 0.0


def _evened(match: Match, x: FloatArray, low: FloatArray, high: FloatArray) -> FloatArray:
    """Return a change with a lower largest difference, found from x; x itself when there is none."""
    for _ in range(_ROUNDS):
        difference, slope = match.around(x)
        step = evened_step(difference, slope, match.total + x, low - x, high - x)
        tried = np.max(np.abs(match.difference(x + _SHARES[:, None] * step)), axis=(1, 2, 3))
        best = int(np.argmin(tried))
        if tried[best] > largest(difference) * (1.0 - _SETTLED):
            break
        x = x + _SHARES[best] * step
    return x


def evened_step(
    difference: ComplexArray, slope: ComplexArray, moved: FloatArray, low: FloatArray, high: FloatArray
) -> FloatArray:
    """Return the step (G,) [rad] that leaves the lowest largest difference, as far as derivatives tell.

    Args:
        difference: As drawn minus wanted (M,) [-].
        slope: Its derivatives (M, G) [1/rad].
        moved: What the lengths are changed by already (G,) [rad]; it has its price.
        low: Least step (G,) [rad].
        high: Largest step (G,) [rad].
    """
    base, rows = _real(difference, slope)
    weights, best, least = np.ones(difference.size), np.zeros(moved.size), largest(difference)
    for _ in range(_SWEEPS if moved.size else 0):
        step = _weighted_step(base, rows, weights, moved, low, high)
        left = np.hypot(*np.split(base + np.einsum("gm,g->m", rows, step), 2))
        if np.max(left) < least:
            best, least = step, float(np.max(left))
        weights = weights * left
        total = np.sum(weights)
        if total <= 0.0:
            break
        weights *= weights.size / total
    return best


def _real(difference: ComplexArray, slope: ComplexArray) -> tuple[FloatArray, FloatArray]:
    """Return a difference (2M,) and its derivatives (G, 2M), imaginary parts behind the real ones."""
    rows = np.concatenate([slope.real, slope.imag]).T
    return np.concatenate([difference.real, difference.imag]), np.ascontiguousarray(rows)


def _weighted_step(
    base: FloatArray,
    rows: FloatArray,
    weights: FloatArray,
    moved: FloatArray,
    low: FloatArray,
    high: FloatArray,
) -> FloatArray:
    """Return the step (G,) [rad] of least weighted squares, with the price of what has then been moved.

    The sums go by einsum: matrices of these few columns are quicker so than on several threads.
    """
    price = _PRICE**2 * weights.size
    scaled = rows * np.tile(weights, 2)
    curve = np.einsum("gm,hm->gh", scaled, rows) + price * np.eye(moved.size)
    return _bounded(curve, np.einsum("gm,m->g", scaled, base) + price * moved, low, high)


def _bounded(curve: FloatArray, fall: FloatArray, low: FloatArray, high: FloatArray) -> FloatArray:
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
