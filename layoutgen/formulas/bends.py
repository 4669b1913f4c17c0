"""Bends of a microstrip line. Lengths are in units of the substrate height h."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from layoutgen.formulas.microstrip import hammerstad_jensen_1980_widening
from layoutgen.formulas.numeric import Array, Flags, floats, within

__all__ = ["BendResult", "bend_excess", "douville_james_1978_mitre"]

_Fit = tuple[tuple[tuple[float, float], ...], ...]

_RIGHT_ANGLE: _Fit = (
    ((-0.271, -0.020), (-0.087, -0.040), (0.122, -0.031), (0.465, 0.043)),
    ((-0.220, 0.029), (-1.102, -0.100), (0.683, 0.228), (0.647, -0.062)),
    ((-0.051, -0.102), (-0.227, 0.304), (0.577, -0.326), (-1.572, 0.079)),
)
_HALF_RIGHT_ANGLE: _Fit = (
    ((-0.063, 0.000), (-0.199, -0.252), (1.063, 0.308), (-0.474, -0.028)),
    ((-0.046, 0.008), (-1.217, -0.070), (2.417, 0.327), (-0.171, -0.038)),
    ((-0.010, -0.027), (0.504, 0.522), (-2.541, -0.748), (0.736, 0.099)),
)


class BendResult(NamedTuple):
    """A bend as a change of length.

    Attributes:
        length_change: What to add to the unmitred centre-line through the sharp corner, over h [-].
        in_range: Whether the inputs lie in the fit's range [-].
    """

    length_change: Array
    in_range: Flags


def douville_james_1978_mitre(u: ArrayLike) -> Array:
    """Return the mitre of a right-angle bend that reflects least.

    The mitre is the share of the corner's diagonal that is cut off, counted from the outer corner; the
    chamfer's leg on each outer edge is 2 W M/100.

    Args:
        u: Strip width over substrate height, W/h [-].

    Returns:
        Mitre [%].

    Source: R. J. P. Douville and D. S. James, "Experimental study of symmetric microstrip bends and their
        compensation", IEEE T-MTT 26 (1978), pp. 175-182.
    Range: 0.25 <= u <= 2.75, 2.5 <= er <= 25.
    Accuracy: within 4 points, where the standing wave ratio stays below 1.1.

    >>> round(float(douville_james_1978_mitre(1.0)), 2)
    68.85
    """
    (u,) = floats(u)
    return np.asarray(52.0 + 65.0 * np.exp(-1.35 * np.maximum(u, 0.0)))


def bend_excess(
    u: ArrayLike, er: ArrayLike, mitre_percent: ArrayLike, angle_deg: ArrayLike = 90.0, t: ArrayLike = 0.0
) -> BendResult:
    """Return what a bend adds to the centre-line's length to give the electrically equivalent length.

    The bend delays by p (C/C' + L/L')/2 to first order, with C and L its whole capacitance and inductance
    between the planes through its inner corner; the centre-line through the sharp corner measures
    u tan(angle/2) between these. The difference is negative: a bend is shorter than its centre-line.

    Args:
        u: Strip width over substrate height, W/h [-].
        er: Relative permittivity of the substrate [-].
        mitre_percent: Part of the corner's diagonal cut off; 0 for an unmitred bend [%].
        angle_deg: Angle by which the line turns [deg].
        t: Conductor thickness over substrate height; the strip is taken as a thin one that is wider by
            Hammerstad and Jensen's amount [-].

    Returns:
        BendResult: length change over h [-], in_range [-].

    Source: fits made for this project to field-solved C and L of 96 bends of 45 and 90 degrees, with arms of
        8 heights (endless ones would shorten a right angle by 0.04 h more at u = 1, 0.06 h at u = 2); other
        angles by a power of the angle through both.
    Range: 0.3 <= u <= 6, 1 <= er <= 13, t <= 0.2, angles to 90 degrees, mitres to 8 points beyond
        Douville and James' optimum, to 15 points where that is below 70 %.
    Accuracy: 0.02 h against the reference table of right angles; against the fitted bends 0.02 h at 90 and
        0.03 h at 45 degrees; 0.04 h at 60 degrees, not fitted.

    >>> round(float(bend_excess(1.0, 3.66, 68.85).length_change), 2)
    -0.83
    """
    u, er, mitre, angle, t = floats(u, er, mitre_percent, angle_deg, t)
    in_range = within(u, 0.3, 6.0) & within(er, 1.0, 13.0) & within(angle, 0.0, 90.0) & within(t, 0.0, 0.2)
    optimum = douville_james_1978_mitre(u)
    deepest = np.maximum(optimum + 8.0, np.minimum(optimum + 15.0, 70.0))
    in_range = in_range & within(mitre, 0.0, 100.0) & (mitre <= deepest)
    u, t = np.clip(u, 0.1, 10.0), np.clip(t, 0.0, 0.3)
    u = u + hammerstad_jensen_1980_widening(u, 1.0, t)
    m, er = np.clip(mitre / 100.0, 0.0, 1.0), np.clip(er, 1.0, 20.0)
    right, half = _fitted(_RIGHT_ANGLE, u, m, er), _fitted(_HALF_RIGHT_ANGLE, u, m, er)
    power = -np.log2(np.clip(half / right, 0.005, 0.5))
    change = right * (np.clip(angle, 0.0, 120.0) / 90.0) ** power
    return BendResult(np.asarray(change), np.broadcast_to(in_range, np.shape(change)))


def _fitted(coefficients: _Fit, u: Array, m: Array, er: Array) -> Array:
    """Return the length change [-] of one angle: rows by width, columns by mitre and permittivity."""
    by_mitre = (np.ones_like(m), m**2, m**3, m**6)
    total = np.zeros(np.broadcast_shapes(np.shape(u), np.shape(m), np.shape(er)))
    for width, row in zip((np.ones_like(u), u, np.sqrt(u)), coefficients, strict=True):
        for mitre, (constant, slope) in zip(by_mitre, row, strict=True):
            total = total + width * mitre * (constant + slope / er)
    return np.asarray(np.minimum(total, -1e-3))
