"""Small numerical helpers that several formulas share: types, ranges, elliptic ratio, root search."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import ArrayLike, NDArray

__all__ = ["Array", "Flags", "elliptic_ratio", "floats", "increasing_root", "within"]

Array = NDArray[np.float64]
Flags = NDArray[np.bool_]

_AGM_STEPS = 40
_ROOT_STEPS = 200
_ROOT_PRODUCT = 1e-14
_ROOT_WIDTH = 1e-13


def floats(*values: ArrayLike) -> list[Array]:
    """Return the values as arrays of floats, not yet broadcast.

    Args:
        values: Numbers or arrays of any shape, each in its own unit [-].
    """
    return [np.asarray(value, dtype=np.float64) for value in values]


def within(value: ArrayLike, low: float, high: float) -> Flags:
    """Say which values lie in the closed range, give or take 1e-9 of a limit; NaN lies outside.

    Args:
        value: Numbers or an array, in any one unit [-].
        low: Lower limit, in the same unit [-].
        high: Upper limit, in the same unit [-].

    >>> within([0.5, 2.0], 0.0, 1.0).tolist()
    [True, False]
    """
    array = np.asarray(value, dtype=np.float64)
    return np.asarray((array >= low - 1e-9 * abs(low)) & (array <= high * (1.0 + 1e-9)))


def elliptic_ratio(k: ArrayLike, k_prime: ArrayLike) -> Array:
    """Return K(k)/K(k') of complete elliptic integrals by the arithmetic-geometric mean.

    Both moduli are asked for because either may be too near to 1 to give the other by subtraction.

    Args:
        k: Modulus, 0 < k <= 1 [-].
        k_prime: Complementary modulus sqrt(1 - k^2) [-].

    Source: Gauss; K(k) = (pi/2)/agm(1, k').
    Range: any k with k, k' > 0.
    Accuracy: 1e-14 relative.

    >>> float(elliptic_ratio(0.5**0.5, 0.5**0.5))
    1.0
    """
    k, k_prime = np.broadcast_arrays(k, k_prime)
    means = _mean_of_one_and(np.stack([k, k_prime]))
    return np.asarray(means[0] / means[1])


def _mean_of_one_and(k: ArrayLike) -> Array:
    """Return the arithmetic-geometric mean of 1 and k."""
    small = np.asarray(k, dtype=np.float64)
    large = np.ones_like(small)
    for _ in range(_AGM_STEPS):
        large, small = 0.5 * (large + small), np.sqrt(large * small)
        if np.all(np.abs(large - small) <= 4e-16 * large):
            break
    return large


def increasing_root(
    function: Callable[[Array], Array], start: Array, low: float, high: float, slope: float = 1.0
) -> Array:
    """Find where an increasing function of one variable is zero, for a whole array at once.

    Secant steps inside a bracket that every evaluation narrows; a step that leaves the bracket becomes a
    bisection. An element is found when the product of its last two steps is below 1e-14: the error left by a
    secant step is about that product. Where there is no zero the nearer end of the bracket is returned.

    Args:
        function: Maps an array [-] to an array of the same shape [-], each element for itself.
        start: First guess [-], anywhere.
        low: Lower end of the bracket [-].
        high: Upper end of the bracket [-].
        slope: Guess of the slope for the first step [-].

    >>> round(float(increasing_root(lambda x: x**3 - 8.0, np.array(1.0), 0.0, 10.0)), 12)
    2.0
    """
    x = np.clip(start, low, high)
    below, above = np.full_like(x, low), np.full_like(x, high)
    y = function(x)
    step, last = -y / slope, np.ones_like(x)
    for _ in range(_ROOT_STEPS):
        below, above = np.where(y <= 0.0, x, below), np.where(y >= 0.0, x, above)
        proposed = x + step
        found = (np.abs(step * last) <= _ROOT_PRODUCT) | (above - below <= _ROOT_WIDTH)
        leaves = (proposed <= below) | (proposed >= above)
        new = np.where(leaves, np.where(found, x, 0.5 * (below + above)), proposed)
        if np.all(found):
            return np.asarray(new)
        last = new - x
        y_old, y = y, function(new)
        step, x = _secant_step(last, y, y_old), new
    return np.asarray(x)


def _secant_step(last: Array, y: Array, y_old: Array) -> Array:
    """Return the secant's next step after a step from y_old to y; zero where both are the same."""
    rise = y - y_old
    level = rise == 0.0
    return np.asarray(np.where(level, 0.0, -y * last / np.where(level, 1.0, rise)))
