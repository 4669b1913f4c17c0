"""A microstrip line beside a coplanar ground pour, and the grounded coplanar line.

Lengths are in units of the substrate height h. Capacitances inside are per length, in units of EPS0.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike

from layoutgen.formulas.constants import ETA0
from layoutgen.formulas.microstrip import LineResult, hammerstad_jensen_1980
from layoutgen.formulas.numeric import Array, Flags, elliptic_ratio, floats, increasing_root, within

__all__ = [
    "NO_POUR_GAP",
    "ghione_naldi_1983",
    "grounded_coplanar",
    "microstrip_beside_pour",
    "pour_capacitance_increment",
    "pour_gap_for_shift",
]

NO_POUR_GAP = 6.0
"""Gap in substrate heights from which on a pour counts as none [-]."""

_FADE_FROM = 5.0


def ghione_naldi_1983(u: ArrayLike, er: ArrayLike, gap: ArrayLike) -> LineResult:
    """Return the thin conductor-backed coplanar line, by conformal mapping.

    Args:
        u: Strip width over substrate height, W/h [-].
        er: Relative permittivity of the substrate [-].
        gap: Slot width on both sides over substrate height [-].

    Returns:
        LineResult: impedance [ohm], effective permittivity [-], in_range [-].

    Source: G. Ghione and C. Naldi, "Parameters of coplanar waveguides with lower ground plane", Electronics
        Letters 19 (1983), pp. 734-735.
    Range: gap <= 1; wider slots are flagged, because the magnetic wall in the slot is then wrong.
    Accuracy: impedance +0.05 / 0.21 / 0.86 / 2.9 % at gap 0.25 / 0.5 / 1 / 2 (field solutions).

    >>> line = ghione_naldi_1983(0.6 / 0.635, 9.8, 0.25 / 0.635)
    >>> round(float(line.impedance), 1)
    42.3
    """
    u, er, gap = floats(u, er, gap)
    in_range = within(u, 0.01, 100.0) & within(er, 1.0, 128.0) & within(gap, 1e-3, 1.0)
    above, below = _slot_ratios(np.clip(u, 1e-6, 200.0), np.clip(gap, 1e-9, 1e6))
    er = np.clip(er, 1.0, 1e4)
    ee = (above + er * below) / (above + below)
    z = ETA0 / (2.0 * (above + below) * np.sqrt(ee))
    return LineResult(z, ee, np.broadcast_to(in_range, np.shape(ee)))


def _slot_ratios(u: Array, s: Array) -> tuple[Array, Array]:
    """Return K(k)/K(k') [-] of the half-space above the strip and of the slab below it."""
    total = u + 2.0 * s
    wide, wide_prime = u / total, 2.0 * np.sqrt(s * (u + s)) / total
    a, b = 0.25 * math.pi * u, 0.25 * math.pi * total
    shrink_a, shrink_b = np.exp(-2.0 * a), np.exp(-2.0 * b)
    k = np.tanh(a) / np.tanh(b)
    product = -np.expm1(-2.0 * (b - a)) * -np.expm1(-2.0 * (b + a))
    k_prime = 2.0 * np.exp(-a) * np.sqrt(product) / ((1.0 + shrink_a) * (1.0 - shrink_b))
    above, below = elliptic_ratio(np.stack([wide, k]), np.stack([wide_prime, k_prime]))
    return above, below


def microstrip_beside_pour(
    u: ArrayLike,
    er: ArrayLike,
    t: ArrayLike = 0.0,
    gap_left: ArrayLike = math.inf,
    gap_right: ArrayLike = math.inf,
) -> LineResult:
    """Return impedance and effective permittivity of a microstrip line with coplanar pour beside it.

    Args:
        u: Strip width over substrate height, W/h [-].
        er: Relative permittivity of the substrate [-].
        t: Conductor thickness of strip and pour over substrate height [-].
        gap_left: Gap to the pour on the left over substrate height; infinity for none [-].
        gap_right: Gap to the pour on the right over substrate height; infinity for none [-].

    Returns:
        LineResult: impedance [ohm], effective permittivity [-], in_range [-].

    Source: blend made for this project of Ghione-Naldi 1983 and Hammerstad-Jensen 1980 capacitances,
        C = (C_GN^p + C_HJ^p)^(1/p), p = 23 s^0.25 + 97 (er-1)/(er+1), with a side-wall term for the
        thickness; unequal gaps by the mean of the two symmetric capacitances and a term for the charge that
        gathers at the nearer pour. Pours at NO_POUR_GAP or more count as none, the increment fading out over
        the last height; without any pour the result is exactly :func:`hammerstad_jensen_1980`.
    Range: 0.2 <= u <= 8, 1 <= er <= 13, t <= 0.2, gaps >= 0.12; with no pour that of Hammerstad-Jensen.
    Accuracy: 0.32 % in impedance and 0.66 % in permittivity on the reference tables; 0.8 % and 1.0 % on some
        450 further cases over the whole range, fitted or not (field solutions made for this project).

    >>> round(float(microstrip_beside_pour(1.0, 3.66, 0.07, 0.5, 0.5).impedance), 1)
    62.0
    """
    u, er, t, gap_left, gap_right = floats(u, er, t, gap_left, gap_right)
    bare = hammerstad_jensen_1980(u, er, t)
    if np.all(gap_left >= NO_POUR_GAP) and np.all(gap_right >= NO_POUR_GAP):
        shape = np.broadcast_shapes(np.shape(bare.impedance), gap_left.shape, gap_right.shape)
        return LineResult(
            np.broadcast_to(bare.impedance, shape),
            np.broadcast_to(bare.effective_permittivity, shape),
            np.broadcast_to(bare.in_range, shape),
        )
    c_air = ETA0 / (bare.impedance * np.sqrt(bare.effective_permittivity))
    shape = np.broadcast_shapes(u.shape, er.shape, t.shape, gap_left.shape, gap_right.shape)
    with_air = np.stack([np.broadcast_to(er, shape), np.ones(shape)])
    more, more_air = pour_capacitance_increment(u, with_air, t, gap_left, gap_right)
    factor, factor_air = 1.0 + more / (c_air * bare.effective_permittivity), 1.0 + more_air / c_air
    none = np.minimum(gap_left, gap_right) >= NO_POUR_GAP
    in_range = bare.in_range & (none | _pour_in_range(u, er, t, np.minimum(gap_left, gap_right)))
    return LineResult(
        bare.impedance / np.sqrt(factor * factor_air),
        bare.effective_permittivity * (factor / factor_air),
        np.broadcast_to(in_range, np.shape(factor)),
    )


def _pour_in_range(u: Array, er: Array, t: Array, gap: Array) -> Flags:
    """Say where the blend was compared with field solutions."""
    return within(u, 0.2, 8.0) & within(er, 1.0, 13.0) & within(t, 0.0, 0.2) & within(gap, 0.12, math.inf)


def pour_capacitance_increment(
    u: ArrayLike, er: ArrayLike, t: ArrayLike, gap_left: ArrayLike, gap_right: ArrayLike
) -> Array:
    """Return what the pour adds to a microstrip line's capacitance per length, in units of EPS0.

    Args:
        u: Strip width over substrate height, W/h [-].
        er: Relative permittivity of the substrate; 1 for the air line [-].
        t: Conductor thickness over substrate height [-].
        gap_left: Gap to the pour on the left over substrate height [-].
        gap_right: Gap to the pour on the right over substrate height [-].

    Returns:
        Increment over EPS0 [-]; zero from NO_POUR_GAP on.

    Source: the blend of :func:`microstrip_beside_pour`.
    Range: as there.
    Accuracy: as there.
    """
    u, er, t, gap_left, gap_right = floats(u, er, t, gap_left, gap_right)
    u, er, t = np.clip(u, 1e-6, 200.0), np.clip(er, 1.0, 1e4), np.clip(t, 0.0, 1e3)
    left, right = np.clip(gap_left, 1e-6, NO_POUR_GAP), np.clip(gap_right, 1e-6, NO_POUR_GAP)
    thin = hammerstad_jensen_1980(u, er)
    bare = ETA0 * np.sqrt(thin.effective_permittivity) / thin.impedance
    wide, near, far = np.broadcast_arrays(u, left, right)
    above, below = _slot_ratios(wide, np.stack([near, far]))
    more_left, more_right = (
        _thin_increment(er, bare, s, above[k], below[k]) for k, s in enumerate((left, right))
    )
    walls = 0.5 * (_wall_increment(u, er, t, left) + _wall_increment(u, er, t, right))
    mean = 0.5 * (more_left + more_right)
    return np.asarray(mean + walls + (bare + mean) * _crowding(u, er, more_left / bare, more_right / bare))


def _thin_increment(er: Array, bare: Array, s: Array, above: Array, below: Array) -> Array:
    """Return the increment [-] of the thin strip with the pour at the gap s on both sides."""
    slot = 2.0 * (above + er * below)
    power = 23.0 * s**0.25 + 97.0 * (er - 1.0) / (er + 1.0)
    larger, smaller = np.maximum(bare, slot), np.minimum(bare, slot)
    blend = larger * (1.0 + (smaller / larger) ** power) ** (1.0 / power)
    return np.asarray((blend - bare) * _fade(s))


def _wall_increment(u: Array, er: Array, t: Array, s: Array) -> Array:
    """Return what facing side walls add [-] with the pour at the gap s on both sides."""
    if not np.any(t > 0.0):
        return np.zeros(())
    plates = 2.0 * t / s * np.exp(-0.903 * er / (er + 1.0) * s**1.233)
    return np.asarray(plates / (1.0 + 0.568 * t**0.523 * u**-0.505 * s**0.781) * _fade(s))


def _fade(s: Array) -> Array:
    """Return 1 for near pours, falling to 0 at NO_POUR_GAP [-]."""
    share = np.clip((NO_POUR_GAP - s) / (NO_POUR_GAP - _FADE_FROM), 0.0, 1.0)
    return np.asarray(share * share * (3.0 - 2.0 * share))


def _crowding(u: Array, er: Array, left: Array, right: Array) -> Array:
    """Return by what share [-] unequal gaps raise the capacitance over the mean of the symmetric ones.

    A strip's charge gathers at its nearer pour; the narrower the strip, the more of it can.
    """
    uneven = np.abs(np.log((1.0 + 10.33 * left) / (1.0 + 10.33 * right)))
    return np.asarray(0.0120 * uneven**1.807 * np.exp(-2.01 * u) * (2.0 / (er + 1.0)) ** 0.372)


def grounded_coplanar(u: ArrayLike, er: ArrayLike, t: ArrayLike, gap: ArrayLike) -> LineResult:
    """Return a coplanar line over a ground plane: the microstrip beside a pour at equal gaps.

    Args:
        u: Strip width over substrate height, W/h [-].
        er: Relative permittivity of the substrate [-].
        t: Conductor thickness over substrate height [-].
        gap: Slot width on both sides over substrate height [-].

    Returns:
        LineResult: impedance [ohm], effective permittivity [-], in_range [-].

    Source: as :func:`microstrip_beside_pour`.
    Range: as there.
    Accuracy: as there.

    >>> round(float(grounded_coplanar(2.0 / 0.787, 2.2, 0.0, 0.3 / 0.787).impedance), 1)
    48.8
    """
    return microstrip_beside_pour(u, er, t, gap, gap)


def pour_gap_for_shift(u: ArrayLike, er: ArrayLike, t: ArrayLike, shift: ArrayLike) -> Array:
    """Return the distance of a pour on both sides that lowers a bare line's impedance by a given share.

    Args:
        u: Strip width over substrate height, W/h [-].
        er: Relative permittivity of the substrate [-].
        t: Conductor thickness over substrate height [-].
        shift: Relative fall of the impedance, 0.01 for 1 % [-].

    Returns:
        Gap over substrate height [-], at most NO_POUR_GAP and at least 0.02.

    Source: inversion of :func:`microstrip_beside_pour`.
    Range: as there.
    Accuracy: the gap for 1 % is found within 0.1 h of field solutions.

    >>> round(float(pour_gap_for_shift(1.0, 3.66, 0.0, 0.01)), 1)
    2.0
    """
    u, er, t, shift = floats(u, er, t, shift)
    u, er, t, shift = np.broadcast_arrays(u, er, t, shift)
    bare = hammerstad_jensen_1980(u, er, t).impedance

    def excess(log_gap: Array) -> Array:
        gap = np.exp(log_gap)
        return np.asarray(microstrip_beside_pour(u, er, t, gap, gap).impedance / bare - 1.0 + shift)

    start = np.full(np.shape(bare), math.log(2.0))
    return np.asarray(np.exp(increasing_root(excess, start, math.log(0.02), math.log(NO_POUR_GAP))))
