"""A single microstrip line: impedance, effective permittivity, their dispersion, and a direct synthesis.

Lengths are in units of the substrate height h: ``u = W/h``, ``t`` the conductor's thickness over h.
Frequency enters as ``fh``, the product of frequency and height [Hz m]; 1 GHz mm is 1e6 Hz m.
"""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from layoutgen.formulas.constants import C0, ETA0
from layoutgen.formulas.numeric import Array, Flags, floats, within

__all__ = [
    "LineResult",
    "hammerstad_1975",
    "hammerstad_jensen_1980",
    "hammerstad_jensen_1980_widening",
    "jansen_kirschning_1983_impedance",
    "kirschning_jansen_1982_in_range",
    "kirschning_jansen_1982_permittivity",
    "wheeler_hammerstad_width",
]

GHZ_MM = 1e6
_TINY = 1e-300


class LineResult(NamedTuple):
    """A line's quasi-static values, each with the broadcast shape of the inputs.

    Attributes:
        impedance: Characteristic impedance [ohm].
        effective_permittivity: Effective relative permittivity [-].
        in_range: Whether the inputs lie in the formula's stated range [-].
    """

    impedance: Array
    effective_permittivity: Array
    in_range: Flags


def hammerstad_jensen_1980(u: ArrayLike, er: ArrayLike, t: ArrayLike = 0.0) -> LineResult:
    """Return impedance and effective permittivity of a microstrip line, quasi-static.

    Args:
        u: Strip width over substrate height, W/h [-].
        er: Relative permittivity of the substrate [-].
        t: Conductor thickness over substrate height [-].

    Returns:
        LineResult: impedance [ohm], effective permittivity [-], in_range [-].

    Source: E. Hammerstad and O. Jensen, "Accurate models for microstrip computer-aided design", IEEE MTT-S
        Digest 1980, pp. 407-409.
    Range: 0.01 <= u <= 100, 1 <= er <= 128, 0 <= t <= 0.3 and t <= u; outside it the nearest usable value is
        taken for an input without meaning (u <= 0, er < 1, t < 0) and in_range is false.
    Accuracy: against two-dimensional field solutions made for this project (u 0.1-8, er 2.2-9.8): impedance
        0.09 / 0.18 / 0.28 % and permittivity 0.18 / 0.62 / 0.54 % at t = 0 / 0.035 / 0.07; to t = 0.3 with
        t <= u 0.9 % in impedance (u 0.1-10, er 1-12.9).

    >>> line = hammerstad_jensen_1980(1.0, 9.8)
    >>> round(float(line.impedance), 2), round(float(line.effective_permittivity), 3)
    (49.29, 6.579)
    """
    u, er, t = floats(u, er, t)
    in_range = within(u, 0.01, 100.0) & within(er, 1.0, 128.0) & within(t, 0.0, 0.3) & (t <= u)
    u, er, t = np.clip(u, 1e-6, 1e6), np.clip(er, 1.0, 1e4), np.clip(t, 0.0, 1e3)
    if not np.any(t > 0.0):
        ee = _permittivity(u, er)
        return _shaped(_air_impedance(u) / np.sqrt(ee), ee, in_range)
    du_air = _air_widening(u, t)
    du = 0.5 * du_air * (1.0 + 1.0 / np.cosh(np.sqrt(er - 1.0)))
    z_air, ee = _air_impedance(u + du), _permittivity(u + du, er)
    return _shaped(z_air / np.sqrt(ee), ee * (_air_impedance(u + du_air) / z_air) ** 2, in_range)


def _shaped(impedance: Array, ee: Array, in_range: Flags) -> LineResult:
    """Return the result with one shape, that of the flags, which have seen all inputs."""
    shape = np.shape(in_range)
    if np.shape(impedance) != shape:
        impedance, ee = np.broadcast_to(impedance, shape), np.broadcast_to(ee, shape)
    return LineResult(impedance, ee, in_range)


def hammerstad_jensen_1980_widening(u: ArrayLike, er: ArrayLike, t: ArrayLike) -> Array:
    """Return by how much a thin strip must be wider to stand for a thick one.

    Args:
        u: Strip width over substrate height, W/h [-].
        er: Relative permittivity of the substrate; 1 for the inductance [-].
        t: Conductor thickness over substrate height [-].

    Returns:
        Additional width over substrate height [-].

    Source: E. Hammerstad and O. Jensen, IEEE MTT-S Digest 1980, pp. 407-409.
    Range: that of :func:`hammerstad_jensen_1980`.
    Accuracy: that of it.

    >>> round(float(hammerstad_jensen_1980_widening(1.0, 1.0, 0.07)), 3)
    0.112
    """
    u, er, t = floats(u, er, t)
    u, er, t = np.clip(u, 1e-6, 1e6), np.clip(er, 1.0, 1e4), np.clip(t, 0.0, 1e3)
    return np.asarray(0.5 * _air_widening(u, t) * (1.0 + 1.0 / np.cosh(np.sqrt(er - 1.0))))


def _air_widening(u: Array, t: Array) -> Array:
    """Return the widening [-] of the strip in air."""
    reach = 4.0 * math.e * np.tanh(np.sqrt(6.517 * u)) ** 2
    return np.asarray(t / math.pi * np.log1p(reach / np.maximum(t, _TINY)))


def _air_impedance(u: Array) -> Array:
    """Return the impedance [ohm] of the thin strip in air."""
    f = 6.0 + (2.0 * math.pi - 6.0) * np.exp(-((30.666 / u) ** 0.7528))
    return np.asarray(ETA0 / (2.0 * math.pi) * np.log(f / u + np.sqrt(1.0 + 4.0 / (u * u))))


def _permittivity(u: Array, er: Array) -> Array:
    """Return the effective permittivity [-] of the thin strip."""
    u_squared = u * u
    fourth = u_squared * u_squared
    a = (
        1.0
        + np.log((fourth + u_squared / 2704.0) / (fourth + 0.432)) / 49.0
        + np.log1p((u / 18.1) ** 3) / 18.7
    )
    b = 0.564 * ((er - 0.9) / (er + 3.0)) ** 0.053
    return np.asarray(0.5 * (er + 1.0) + 0.5 * (er - 1.0) * (1.0 + 10.0 / u) ** (-a * b))


def hammerstad_1975(u: ArrayLike, er: ArrayLike) -> LineResult:
    """Return the textbooks' simple analysis of a thin microstrip line.

    Kept because printed examples use it; its permittivity is not good enough for lengths.

    Args:
        u: Strip width over substrate height, W/h [-].
        er: Relative permittivity of the substrate [-].

    Returns:
        LineResult: impedance [ohm], effective permittivity [-], in_range [-].

    Source: E. O. Hammerstad, "Equations for microstrip circuit design", European Microwave Conference 1975,
        pp. 268-272, as the textbooks print it.
    Range: 0.05 <= u <= 20, 1 <= er <= 16 (from memory); no thickness.
    Accuracy: up to 2.7 % in permittivity (1.3 % in length) against field solutions.

    >>> line = hammerstad_1975(1.0, 2.55)
    >>> round(float(line.impedance), 1)
    89.8
    """
    u, er = floats(u, er)
    in_range = within(u, 0.05, 20.0) & within(er, 1.0, 16.0)
    u, er = np.clip(u, 1e-6, 1e6), np.clip(er, 1.0, 1e4)
    filling = 1.0 / np.sqrt(1.0 + 12.0 / u) + 0.04 * np.maximum(1.0 - u, 0.0) ** 2
    ee = 0.5 * (er + 1.0) + 0.5 * (er - 1.0) * filling
    narrow = 60.0 * np.log(8.0 / u + 0.25 * u)
    wide = 120.0 * math.pi / (u + 1.393 + 0.667 * np.log(u + 1.444))
    return _shaped(np.where(u <= 1.0, narrow, wide) / np.sqrt(ee), ee, in_range)


def kirschning_jansen_1982_permittivity(ee: ArrayLike, u: ArrayLike, er: ArrayLike, fh: ArrayLike) -> Array:
    """Return the effective permittivity of a microstrip line at a frequency.

    Args:
        ee: Quasi-static effective permittivity [-].
        u: Strip width over substrate height, W/h [-].
        er: Relative permittivity of the substrate [-].
        fh: Frequency times substrate height [Hz m].

    Returns:
        Effective permittivity at that frequency [-].

    Source: M. Kirschning and R. H. Jansen, "Accurate model for effective dielectric constant of microstrip
        with validity up to millimetre-wave frequencies", Electronics Letters 18 (1982), pp. 272-273.
    Range: 0.1 <= u <= 100, er <= 20, h up to 0.13 free-space wavelengths (fh <= 39e6 Hz m) (from memory).
    Accuracy: 0.6 % claimed (from memory).

    >>> round(float(kirschning_jansen_1982_permittivity(1.883, 3.079, 2.2, 1.27e6 * 10)), 3)
    1.938
    """
    ee, u, er, fh = floats(ee, u, er, fh)
    fn = np.clip(fh / GHZ_MM, 0.0, 1e5)
    u, er = np.clip(u, 1e-6, 1e6), np.clip(er, 1.0, 1e4)
    p1, p2, p3, p4 = dispersion_terms(u, er, fn)
    p = p1 * p2 * ((0.1844 + p3 * p4) * fn) ** 1.5763
    return np.asarray(er - (er - ee) / (1.0 + p))


def kirschning_jansen_1982_in_range(u: ArrayLike, er: ArrayLike, fh: ArrayLike) -> Flags:
    """Say whether a line lies in the range of :func:`kirschning_jansen_1982_permittivity`.

    Args:
        u: Strip width over substrate height, W/h [-].
        er: Relative permittivity of the substrate [-].
        fh: Frequency times substrate height [Hz m].

    Returns:
        True inside the range [-].

    Source: that of :func:`kirschning_jansen_1982_permittivity`.
    Range: any.
    Accuracy: exact.

    >>> bool(kirschning_jansen_1982_in_range(1.0, 3.5, 2.2e9 * 0.508e-3))
    True
    """
    return within(u, 0.1, 100.0) & within(er, 1.0, 20.0) & within(fh, 0.0, 0.13 * C0)


def dispersion_terms(u: Array, er: Array, fn: Array) -> tuple[Array, Array, Array, Array]:
    """Return P1 to P4 [-] of the paper for a normalised frequency fn [GHz mm]."""
    p1 = 0.27488 + (0.6315 + 0.525 / (1.0 + 0.0157 * fn) ** 20) * u - 0.065683 * np.exp(-8.7513 * u)
    p2 = -0.33622 * np.expm1(-0.03442 * er)
    p3 = -0.0363 * np.exp(-4.6 * u) * np.expm1(-((fn / 38.7) ** 4.97))
    p4 = 1.0 - 2.751 * np.expm1(-((er / 15.916) ** 8))
    return p1, p2, p3, p4


def jansen_kirschning_1983_impedance(
    z0: ArrayLike, ee: ArrayLike, ee_f: ArrayLike, u: ArrayLike, er: ArrayLike, fh: ArrayLike
) -> Array:
    """Return the impedance of a microstrip line at a frequency, power-current definition.

    Args:
        z0: Quasi-static impedance [ohm].
        ee: Quasi-static effective permittivity [-].
        ee_f: Effective permittivity at the frequency [-].
        u: Strip width over substrate height, W/h [-].
        er: Relative permittivity of the substrate [-].
        fh: Frequency times substrate height [Hz m].

    Returns:
        Impedance at that frequency [ohm].

    Source: R. H. Jansen and M. Kirschning, "Arguments and an accurate model for the power-current
        formulation of microstrip characteristic impedance", AEU 37 (1983), pp. 108-112; coefficients from
        memory, checked against an independent public implementation.
    Range: 0.1 <= u <= 10, 1 <= er <= 18, fh <= 30e6 Hz m.
    Accuracy: not known against a field solution; the definition of impedance is a convention at frequency.

    >>> round(float(jansen_kirschning_1983_impedance(50.0, 1.883, 1.883, 3.08, 2.2, 0.0)), 6)
    50.0
    """
    z0, ee, ee_f, u, er, fh = floats(z0, ee, ee_f, u, er, fh)
    fn = np.clip(fh / GHZ_MM, 0.0, 1e2)
    u, er = np.clip(u, 1e-3, 1e2), np.clip(er, 1.0, 40.0)
    r8, r9 = _impedance_powers(u, er, fn)
    numerator = 0.9408 * ee_f**r8 - 0.9603
    denominator = (0.9408 - r9) * ee**r8 - 0.9603
    usable = (numerator * denominator > 0.0) & (fn > 0.0)
    ratio = np.where(usable, numerator, 1.0) / np.where(usable, denominator, 1.0)
    return np.asarray(z0 * ratio ** _impedance_exponent(u, er, fn))


def _impedance_powers(u: Array, er: Array, fn: Array) -> tuple[Array, Array]:
    """Return R8 and R9 [-] of the paper for a normalised frequency fn [GHz mm]."""
    r3 = 4.766 * np.exp(-3.228 * u**0.641)
    r4 = 0.016 + (0.0514 * er) ** 4.524
    r5 = (fn / 28.843) ** 12
    r6 = 22.2 * u**1.92
    sixth = (er - 1.0) ** 6
    r8 = 1.0 - 1.275 * np.expm1(-0.004625 * r3 * er**1.674 * (fn / 18.365) ** 2.745)
    r9 = 5.086 * r4 * r5 / (0.3838 + 0.386 * r4) * np.exp(-r6) / (1.0 + 1.2992 * r5) * sixth
    return np.asarray(r8), np.asarray(r9 / (1.0 + 10.0 * sixth))


def _impedance_exponent(u: Array, er: Array, fn: Array) -> Array:
    """Return R17 [-] of the paper for a normalised frequency fn [GHz mm]."""
    r7 = 1.206 + 0.3144 * np.exp(-0.03891 * er**1.4) * np.expm1(-0.2671 * u**7)
    r10 = 0.00044 * er**2.136 + 0.0184
    sixth = (fn / 19.47) ** 6
    r11 = sixth / (1.0 + 0.0962 * sixth)
    r12 = 1.0 / (1.0 + 0.00245 * u * u)
    r15 = 0.707 * r10 * (fn / 12.3) ** 1.097
    r16 = 1.0 - 0.0503 * er * er * r11 * np.expm1(-((u / 15.0) ** 6))
    return np.asarray(r7 * (1.0 - 1.1241 * r12 / r16 * np.exp(-0.026 * fn**1.15656 - r15)))


def wheeler_hammerstad_width(z0: ArrayLike, er: ArrayLike) -> Array:
    """Return the width of a thin microstrip line of given impedance in closed form.

    It shares nothing with :func:`hammerstad_jensen_1980`, so the two together show the spread of models.

    Args:
        z0: Impedance asked for [ohm].
        er: Relative permittivity of the substrate [-].

    Returns:
        Strip width over substrate height, W/h [-].

    Source: H. A. Wheeler 1965 and E. O. Hammerstad 1975, as printed by D. M. Pozar, "Microwave Engineering".
    Range: 0.05 <= u <= 20, 1 <= er <= 16 (from memory); no thickness.
    Accuracy: 1 % claimed; 0.26 % in impedance against field solutions (er 2.2-9.8, 20-120 ohm).

    >>> round(float(wheeler_hammerstad_width(50.0, 2.2)), 3)
    3.081
    """
    z0, er = floats(z0, er)
    z0, er = np.clip(z0, 1e-3, 1e4), np.clip(er, 1.0, 1e4)
    a = z0 / 60.0 * np.sqrt((er + 1.0) / 2.0) + (er - 1.0) / (er + 1.0) * (0.23 + 0.11 / er)
    a = np.clip(a, 0.5, 300.0)
    narrow = 8.0 * np.exp(-a) / (1.0 - 2.0 * np.exp(-2.0 * a))
    b = np.maximum(377.0 * math.pi / (2.0 * z0 * np.sqrt(er)), 1.5)
    dielectric = (er - 1.0) / (2.0 * er) * (np.log(b - 1.0) + 0.39 - 0.61 / er)
    wide = 2.0 / math.pi * (b - 1.0 - np.log(2.0 * b - 1.0) + dielectric)
    return np.asarray(np.where((narrow < 2.0) & (narrow > 0.0), narrow, wide))
