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
    return np.asarray(_mean_of_one_and(k) / _mean_of_one_and(k_prime))


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
    function: Callable[[Array], Array], start: Array, low: float, high: float, tolerance: float = 1e-13
) -> Array:
    """Find where an increasing function of one variable is zero, for a whole array at once.

    Secant steps inside a bracket that every evaluation narrows; a step that leaves the bracket, or is not
    finite, becomes a bisection. Where there is no zero the nearer end of the bracket is returned.

    Args:
        function: Maps an array [-] to an array of the same shape [-], each element for itself.
        start: First guess [-], anywhere.
        low: Lower end of the bracket [-].
        high: Upper end of the bracket [-].
        tolerance: The step [-] at which an element counts as found.

    >>> round(float(increasing_root(lambda x: x**3 - 8.0, np.array(1.0), 0.0, 10.0)), 12)
    2.0
    """
    x = np.clip(start, low, high)
    below, above = np.full_like(x, low), np.full_like(x, high)
    y = function(x)
    x_old, y_old = x, y
    step = np.where(y > 0.0, -1e-3, 1e-3)
    for _ in range(_ROOT_STEPS):
        below, above = np.where(y <= 0.0, x, below), np.where(y >= 0.0, x, above)
        proposed = x + step
        stuck = (np.abs(step) <= tolerance) | (y == 0.0)
        outside = ~stuck & ~((proposed > below) & (proposed < above))
        new = np.where(
            stuck, np.clip(proposed, below, above), np.where(outside, 0.5 * (below + above), proposed)
        )
        x_old, y_old, x = x, y, new
        if np.all(stuck | (above - below <= tolerance)):
            break
        y = function(x)
        step = _secant_step(x, y, x_old, y_old)
    return np.asarray(x)


def _secant_step(x: Array, y: Array, x_old: Array, y_old: Array) -> Array:
    """Return the secant's step from x; zero where the two points coincide."""
    rise = y - y_old
    level = rise == 0.0
    return np.asarray(np.where(level, 0.0, -y * (x - x_old) / np.where(level, 1.0, rise)))
