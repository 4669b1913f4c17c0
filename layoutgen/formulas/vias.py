"""Vias to ground: inductance of one and of several, resistance, and the line length they stand for. SI."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike

from layoutgen.formulas.constants import ETA0, MU0
from layoutgen.formulas.limits import barrel_resistance
from layoutgen.formulas.microstrip import hammerstad_jensen_1980
from layoutgen.formulas.numeric import Array, Flags, floats, within

__all__ = [
    "goldfarb_pucel_1991",
    "via_array_inductance",
    "via_equivalent_length",
    "via_inductance",
    "via_inductance_in_range",
    "via_resistance",
]


def goldfarb_pucel_1991(r: ArrayLike, h: ArrayLike) -> Array:
    """Return the published inductance of a round via to the ground plane.

    Args:
        r: Radius of the via, outside of its barrel [m].
        h: Height of the substrate [m].

    Returns:
        Inductance [H]. The paper does not say which plane it is counted from.

    Source: M. E. Goldfarb and R. A. Pucel, "Modeling via hole grounds in microstrip", IEEE Microwave and
        Guided Wave Letters 1 (1991), pp. 135-137.
    Range: h 0.1 to 0.63 mm, h below 0.03 wavelengths, 0.1 <= r/h <= 0.75 (partly from memory).
    Accuracy: -19 to +165 % against field solutions with the plane at the axis: see :func:`via_inductance`.

    >>> round(float(goldfarb_pucel_1991(150e-6, 508e-6)) * 1e12, 1)
    82.6
    """
    r, h = floats(r, h)
    slant = np.hypot(r, h)
    return np.asarray(MU0 / (2.0 * math.pi) * (h * np.log((h + slant) / r) + 1.5 * (r - slant)))


def via_inductance(r: ArrayLike, h: ArrayLike, w: ArrayLike | None = None) -> Array:
    """Return the inductance of a round via at the end of a strip, counted from the via's axis.

    Without a width it is :func:`goldfarb_pucel_1991`. With the strip's width two effects are added that a
    bare post does not have: the strip's current is drawn together at the post (the logarithm), and the
    reference plane lies at the axis, so the strip's inductance over one radius is taken off.

    Args:
        r: Radius of the via, outside of its barrel [m].
        h: Height of the substrate [m].
        w: Width of the strip that ends there, half a width past the axis; None for a bare post [m].

    Returns:
        Inductance from the plane at the via's axis to ground [H].

    Source: Goldfarb-Pucel 1991 with a correction fitted for this project to field solutions.
    Range: 0.1 <= r/h <= 0.4, 1 <= w/h <= 2.5, 2r < w.
    Accuracy: 14 % (r/h 0.15, 0.25, 0.4; w/h 1 and 2), where the value is smallest; else 4 %.

    >>> round(float(via_inductance(0.25e-3, 1e-3, 1e-3)) * 1e9, 3)
    0.163
    """
    bare = goldfarb_pucel_1991(r, h)
    if w is None:
        return bare
    r, h, w = floats(r, h, w)
    u = np.clip(w / h, 0.05, 50.0)
    line = hammerstad_jensen_1980(u, 1.0).impedance / ETA0
    spread = 0.0665 + 0.0225 * np.log(u)
    return np.asarray(bare + MU0 * (h * spread - r * line))


def via_inductance_in_range(r: ArrayLike, h: ArrayLike, w: ArrayLike) -> Flags:
    """Say whether a via at a strip's end lies in the range of :func:`via_inductance`.

    Args:
        r: Radius of the via, outside of its barrel [m].
        h: Height of the substrate [m].
        w: Width of the strip that ends there [m].

    Returns:
        True inside the range [-].

    Source: that of :func:`via_inductance`.
    Range: any.
    Accuracy: exact.

    >>> bool(via_inductance_in_range(0.15e-3, 0.508e-3, 1e-3))
    True
    """
    r, h, w = floats(r, h, w)
    return within(r / h, 0.1, 0.4) & within(w / h, 1.0, 2.5) & (2.0 * r < w)


def via_array_inductance(count: int, pitch: ArrayLike, r: ArrayLike, h: ArrayLike) -> Array:
    """Return the inductance of equal vias in a straight row, fed in parallel.

    The mutual inductance of two posts is taken as Goldfarb and Pucel's expression with the distance in
    place of the radius, which is Neumann's integral with their constant; all vias have the same voltage.

    Args:
        count: Number of vias, at least 1 [-].
        pitch: Distance between neighbouring axes [m].
        r: Radius of a via, outside of its barrel [m].
        h: Height of the substrate [m].

    Returns:
        Inductance of the row [H], more than that of one via over the count.

    Raises:
        ValueError: The count is below 1.

    Source: own reasoning on Goldfarb-Pucel 1991; not published.
    Range: pitch >= 2r, as there.
    Accuracy: not measured; it lies between one via's value and that over the count.

    >>> one, two = (float(via_array_inductance(n, 0.8e-3, 0.15e-3, 0.5e-3)) for n in (1, 2))
    >>> one / 2 < two < one
    True
    """
    if count < 1:
        raise ValueError(f"count is {count}, must be at least 1")
    pitch, r, h = np.broadcast_arrays(*floats(pitch, r, h))
    places = np.arange(count)
    apart = np.abs(places[:, None] - places[None, :])
    distance = np.where(apart == 0, r[..., None, None], apart * pitch[..., None, None])
    matrix = goldfarb_pucel_1991(distance, h[..., None, None])
    currents = np.linalg.solve(matrix, np.ones((*pitch.shape, count, 1)))
    return np.asarray(1.0 / currents.sum(axis=(-2, -1)))


def via_resistance(
    frequency: ArrayLike, r: ArrayLike, h: ArrayLike, plating: ArrayLike, conductivity: ArrayLike
) -> Array:
    """Return a via's resistance with skin effect.

    Args:
        frequency: Frequency [Hz].
        r: Radius of the via, outside of its barrel [m].
        h: Height of the substrate [m].
        plating: Thickness of the plating [m].
        conductivity: Conductivity of the plating [S/m].

    Returns:
        Resistance [ohm].

    Source: M. E. Goldfarb and R. A. Pucel 1991, R = Rdc sqrt(1 + f/fd) (from memory).
    Range: plating < r.
    Accuracy: not measured here.

    >>> round(float(via_resistance(0.0, 0.15e-3, 1.6e-3, 25e-6, 58e6)) * 1e3, 3)
    1.277
    """
    frequency, r, h, plating, conductivity = floats(frequency, r, h, plating, conductivity)
    corner = 1.0 / (math.pi * MU0 * conductivity * plating**2)
    dc = barrel_resistance(h, 2.0 * r, plating, conductivity)
    return np.asarray(dc * np.sqrt(1.0 + frequency / corner))


def via_equivalent_length(L: ArrayLike, z0: ArrayLike, beta: ArrayLike, frequency: ArrayLike) -> Array:
    """Return the length of shorted line that has the reactance of a via at a frequency.

    Args:
        L: Inductance of the via [H].
        z0: Impedance of the line [ohm].
        beta: Phase constant of the line at the frequency [rad/m].
        frequency: Frequency [Hz].

    Returns:
        Length [m], below a quarter wave.

    Source: definition, 2 pi f L = Z0 tan(beta l).
    Range: any.
    Accuracy: exact.

    >>> round(float(via_equivalent_length(0.1e-9, 50.0, 80.0, 2e9)) * 1e3, 3)
    0.314
    """
    L, z0, beta, frequency = floats(L, z0, beta, frequency)
    return np.asarray(np.arctan(2.0 * math.pi * frequency * L / z0) / beta)
