"""Radial stubs: a sector of copper that looks like a short circuit to ground. SI units, angles in radians."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike

from layoutgen.formulas.constants import C0, ETA0
from layoutgen.formulas.ends import open_end
from layoutgen.formulas.microstrip import hammerstad_jensen_1980, kirschning_jansen_1982_permittivity
from layoutgen.formulas.numeric import Array, floats, increasing_root

__all__ = ["radial_stub_line", "radial_stub_radius", "radial_stub_reactance"]


def radial_stub_reactance(
    f: ArrayLike, h: ArrayLike, er_eff: ArrayLike, angle: ArrayLike, r_inner: ArrayLike, r_outer: ArrayLike
) -> Array:
    """Return the input reactance of an open radial line at its inner arc.

    Args:
        f: Frequency [Hz].
        h: Height of the substrate [m].
        er_eff: Effective permittivity of the sector [-].
        angle: Angle of the sector [rad].
        r_inner: Radius of the inner arc, where it is fed [m].
        r_outer: Radius at which it is open; the drawn radius plus the open-end extension [m].

    Returns:
        Reactance [ohm], negative below the radius that looks short.

    Source: radial line theory, eta h / (sqrt(ee) angle r_inner) times a quotient of Bessel functions of
        orders 0 and 1 (from memory); its static limit is the sector's plate capacitance, which is tested.
    Range: r_outer > r_inner > 0.
    Accuracy: exact for a radial line with magnetic side walls.

    >>> x = radial_stub_reactance(5e9, 0.508e-3, 3.5, math.pi / 3, 0.3e-3, 3e-3)
    >>> round(float(x), 2)
    -80.97
    """
    f, h, er_eff, angle, r_inner, r_outer = floats(f, h, er_eff, angle, r_inner, r_outer)
    k = 2.0 * math.pi * f * np.sqrt(er_eff) / C0
    numerator, denominator = _bessel_pair(k * r_inner, k * r_outer)
    return np.asarray(ETA0 * h / (np.sqrt(er_eff) * angle * r_inner) * numerator / denominator)


def _bessel_pair(inner: Array, outer: Array) -> tuple[Array, Array]:
    """Return J0(i) Y1(o) - Y0(i) J1(o) and J1(i) Y1(o) - Y1(i) J1(o) [-]."""
    from scipy.special import j0, j1, y0, y1

    j, y = j1(outer), y1(outer)
    return np.asarray(j0(inner) * y - y0(inner) * j), np.asarray(j1(inner) * y - y1(inner) * j)


def radial_stub_line(
    f: ArrayLike,
    h: ArrayLike,
    er: ArrayLike,
    angle: ArrayLike,
    r_inner: ArrayLike,
    r_outer: ArrayLike,
    t: ArrayLike = 0.0,
) -> tuple[Array, Array]:
    """Return the effective permittivity and the open-end extension of a sector.

    Both are those of a strip as wide as the sector's chord at its mean radius.

    Args:
        f: Frequency [Hz].
        h: Height of the substrate [m].
        er: Relative permittivity of the substrate [-].
        angle: Angle of the sector [rad].
        r_inner: Radius of the inner arc [m].
        r_outer: Drawn radius of the outer arc [m].
        t: Conductor thickness over substrate height [-].

    Returns:
        Effective permittivity at the frequency [-] and extension [m].

    Source: common practice, no source.
    Range: that of the line formulas at the chord's width.
    Accuracy: not measured.

    >>> ee, extension = radial_stub_line(2e9, 0.5e-3, 3.55, math.pi / 3, 0.5e-3, 9e-3)
    >>> round(float(ee), 2)
    3.15
    """
    f, h, er, angle, r_inner, r_outer = floats(f, h, er, angle, r_inner, r_outer)
    u = (r_inner + r_outer) * np.sin(0.5 * angle) / h
    ee = hammerstad_jensen_1980(u, er, t).effective_permittivity
    return kirschning_jansen_1982_permittivity(ee, u, er, f * h), np.asarray(open_end(u, er, t) * h)


def radial_stub_radius(
    f: ArrayLike, h: ArrayLike, er: ArrayLike, angle: ArrayLike, r_inner: ArrayLike, t: ArrayLike = 0.0
) -> Array:
    """Return the outer radius to draw so that a radial stub looks like a short circuit.

    Args:
        f: Frequency at which it looks short [Hz].
        h: Height of the substrate [m].
        er: Relative permittivity of the substrate [-].
        angle: Angle of the sector [rad].
        r_inner: Radius of the inner arc, where it is fed [m].
        t: Conductor thickness over substrate height [-].

    Returns:
        Drawn outer radius [m].

    Source: zero of :func:`radial_stub_reactance` with the values of :func:`radial_stub_line`.
    Range: that of those.
    Accuracy: 1e-9 as an inverse.

    >>> round(float(radial_stub_radius(2.245e9, 0.508e-3, 3.55, math.pi / 3, 0.6e-3)) * 1e3, 1)
    10.9
    """
    f, h, er, angle, r_inner, t = np.broadcast_arrays(*floats(f, h, er, angle, r_inner, t))
    quarter = 0.25 * C0 / f

    def excess(share: Array) -> Array:
        drawn = r_inner + share * quarter
        ee, extension = radial_stub_line(f, h, er, angle, r_inner, drawn, t)
        k = 2.0 * math.pi * f * np.sqrt(ee) / C0
        return np.asarray(_bessel_pair(k * r_inner, k * (drawn + extension))[0] * k * r_inner)

    share = increasing_root(excess, np.full(f.shape, 0.3), 1e-6, 1.0)
    return np.asarray(r_inner + share * quarter)
