"""T-junctions and crosses of microstrip lines. Lengths are in units of the substrate height h.

Planes are counted from the crossing of the centre-lines outwards: each line starts d beyond it, so a line
drawn from centre-line to centre-line is electrically d shorter than its copper.
"""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from layoutgen.formulas.constants import C0, EPS0, ETA0, MU0
from layoutgen.formulas.microstrip import hammerstad_jensen_1980
from layoutgen.formulas.numeric import Array, Flags, floats, within
from layoutgen.formulas.steps import line_constants

__all__ = ["FIELD_FIT", "HAMMERSTAD_1981", "CrossResult", "TeeResult", "cross", "hammerstad_1981_tee", "tee"]

FIELD_FIT = "fit to field solutions"
HAMMERSTAD_1981 = "Hammerstad 1981"


class TeeResult(NamedTuple):
    """A T-junction's planes and shunt susceptance.

    Attributes:
        d_a: Plane of the first main line from the crossing, over h [-].
        d_b: Plane of the second main line from the crossing, over h [-].
        d_side: Plane of the side line from the crossing, over h [-].
        susceptance: Shunt susceptance at the common point [S].
        in_range: Whether the inputs lie in the range of the better model [-].
        model: Which model gave each value, FIELD_FIT or HAMMERSTAD_1981 [-].
    """

    d_a: Array
    d_b: Array
    d_side: Array
    susceptance: Array
    in_range: Flags
    model: NDArray[np.str_]


class CrossResult(NamedTuple):
    """A four-arm junction's planes and shunt susceptance.

    Attributes:
        d_w: Plane of the west line from the crossing, over h [-].
        d_e: Plane of the east line from the crossing, over h [-].
        d_n: Plane of the north line from the crossing, over h [-].
        d_s: Plane of the south line from the crossing, over h [-].
        susceptance: Shunt susceptance at the common point [S].
        in_range: Whether the inputs lie in the range of the better model [-].
        model: Which model gave each value [-].
    """

    d_w: Array
    d_e: Array
    d_n: Array
    d_s: Array
    susceptance: Array
    in_range: Flags
    model: NDArray[np.str_]


def tee(
    u_a: ArrayLike, u_b: ArrayLike, u_side: ArrayLike, er: ArrayLike, fh: ArrayLike, t: ArrayLike = 0.0
) -> TeeResult:
    """Return the reference planes and the susceptance of a T-junction.

    Args:
        u_a: Width of one main line over substrate height [-].
        u_b: Width of the other main line over substrate height [-].
        u_side: Width of the side line over substrate height [-].
        er: Relative permittivity of the substrate [-].
        fh: Frequency times substrate height [Hz m].
        t: Conductor thickness over substrate height; enters through the lines' constants only [-].

    Returns:
        TeeResult: planes over h [-], susceptance [S], in_range [-], model [-].

    Source: fits made for this project to field solutions; Hammerstad 1981 outside their range.
    Range: all widths 0.5 to 5, er 1 to 13.
    Accuracy: d_a, d_b 0.03 h, d_side 0.03 h, susceptance 0.06 mS at fh = 1e6 Hz m.

    >>> result = tee(1.0, 1.0, 1.0, 3.66, 1e6)
    >>> round(float(result.d_a), 2), round(float(result.d_side), 2)
    (0.08, 1.0)
    """
    u_a, u_b, u_side, er, fh, t = np.broadcast_arrays(*floats(u_a, u_b, u_side, er, fh, t))
    in_range = within(er, 1.0, 13.0) & within(t, 0.0, 0.1)
    for u in (u_a, u_b, u_side):
        in_range = in_range & within(u, 0.5, 5.0)
    widths = [np.clip(u, 0.1, 20.0) for u in (u_a, u_b, u_side)]
    fit = _fit(widths, np.clip(er, 1.0, 20.0), fh, t)
    old = hammerstad_1981_tee(u_a, u_b, u_side, er, fh, t)
    d_a, d_b, d_side, susceptance = (
        np.where(in_range, new, published) for new, published in zip(fit, old[:4], strict=True)
    )
    model = np.where(in_range, FIELD_FIT, HAMMERSTAD_1981)
    return TeeResult(d_a, d_b, d_side, susceptance, in_range, model)


def _fit(widths: list[Array], er: Array, fh: Array, t: Array) -> tuple[Array, Array, Array, Array]:
    """Return planes [-] and susceptance [S] of the fit."""
    u_a, u_b, u_side = widths
    d_a, d_side_a = _equal_mains(u_a, u_side)
    d_b, d_side_b = _equal_mains(u_b, u_side)
    c = 0.5 * (_excess_capacitance(u_a, u_side, er) + _excess_capacitance(u_b, u_side, er))
    d_side = 0.5 * (d_side_a + d_side_b)
    c_a, c_b, c_side = (line_constants(u, er, t)[1] for u in (u_a, u_b, u_side))
    total = c + c_a * d_a + c_b * d_b + c_side * d_side
    return d_a, d_b, d_side, np.asarray(2.0 * math.pi * fh * EPS0 * total)


def _equal_mains(u: Array, u_side: Array) -> tuple[Array, Array]:
    """Return main and side plane [-] of a tee with equal main lines."""
    x, y = np.log(u), np.log(u_side)
    main = np.exp(-2.5666 - 0.5494 * x + 1.6489 * y + 0.1085 * x * y - 0.0497 * y * y - 0.1023 * x * x)
    plate = 1.0 / line_constants(u, 1.0)[0]
    r = line_constants(u, 1.0)[0] / line_constants(u_side, 1.0)[0]
    side = plate * (-0.0629 + 0.3489 * r + 0.3678 * np.exp(-2.0 * r) + 0.0346 * x - 0.0180 * r * x)
    return np.asarray(main), np.asarray(side)


def _excess_capacitance(u: Array, u_side: Array, er: Array) -> Array:
    """Return the excess capacitance over EPS0 h with all planes at the crossing [-]."""
    x, y = np.log(u), np.log(u_side)
    c, c_side = line_constants(u, er)[1], line_constants(u_side, er)[1]
    overlap = -0.5 * c_side * u - 0.5 * (c - er * u) * u_side
    shape = -2.3678 - 0.6329 * x - 0.3728 * y - 0.2912 * x * y + 0.2264 * y * y - 0.2540 * x * y * y
    return np.asarray(overlap + shape - er * (0.4892 + 0.0168 * x))


def hammerstad_1981_tee(
    u_a: ArrayLike, u_b: ArrayLike, u_side: ArrayLike, er: ArrayLike, fh: ArrayLike, t: ArrayLike = 0.0
) -> TeeResult:
    """Return the reference planes and the susceptance of a T-junction by the published formulas.

    Args:
        u_a: Width of one main line over substrate height [-].
        u_b: Width of the other main line over substrate height [-].
        u_side: Width of the side line over substrate height [-].
        er: Relative permittivity of the substrate [-].
        fh: Frequency times substrate height [Hz m].
        t: Conductor thickness over substrate height [-].

    Returns:
        TeeResult: planes over h [-], susceptance [S], in_range [-], model [-].

    Source: E. Hammerstad, "Computer-aided design of microstrip couplers with accurate discontinuity models",
        IEEE MTT-S Digest 1981, pp. 54-56 (partly from memory).
    Range: not stated by any source seen; in_range is always false.
    Accuracy: planes 0.16 to 0.4 h off against field solutions.

    >>> result = hammerstad_1981_tee(1.0, 1.0, 1.0, 2.2, 0.0)
    >>> round(float(result.d_a), 2), round(float(result.d_side), 2)
    (0.16, 0.92)
    """
    u_a, u_b, u_side, er, fh, t = np.broadcast_arrays(*floats(u_a, u_b, u_side, er, fh, t))
    lines = [hammerstad_jensen_1980(u, er, t) for u in (u_a, u_b, u_side)]
    z_a, z_b, z_s = (line.impedance for line in lines)
    ee_a, ee_b = lines[0].effective_permittivity, lines[1].effective_permittivity
    plate_a, plate_b, plate_s = (
        ETA0 / (line.impedance * np.sqrt(line.effective_permittivity)) for line in lines
    )
    share_a, share_b = fh * 2.0 * MU0 / z_a, fh * 2.0 * MU0 / z_b
    r, q = np.sqrt(z_a * z_b) / z_s, share_a * share_b
    d_a = 0.055 * plate_s * z_a / z_s * (1.0 - 2.0 * z_a / z_s * share_a**2)
    d_b = 0.055 * plate_s * z_b / z_s * (1.0 - 2.0 * z_b / z_s * share_b**2)
    mean = np.sqrt(plate_a * plate_b)
    d_s = mean * (0.5 - r * (0.05 + 0.7 * np.exp(-1.6 * r) + 0.25 * r * q - 0.17 * np.log(r)))
    n_a = _turns_squared(share_a, z_a / z_s, d_s / plate_a)
    n_b = _turns_squared(share_b, z_b / z_s, d_s / plate_b)
    waves = fh**2 * np.sqrt(ee_a * ee_b) / C0**2
    bracket = 1.0 + 0.9 * np.log(r) + 4.5 * r * q - 4.4 * np.exp(-1.3 * r) - 20.0 * (z_s / ETA0) ** 2
    b = 5.5 * np.sqrt(plate_a * plate_b * waves) * (er + 2.0) / er * np.sqrt(np.maximum(d_a * d_b, 0.0))
    b = b / plate_s / (z_s * np.sqrt(n_a * n_b)) * bracket
    none = np.zeros(np.shape(b), dtype=np.bool_)
    return TeeResult(d_a, d_b, d_s, b, none, np.where(none, "", HAMMERSTAD_1981))


def _turns_squared(share: Array, ratio: Array, offset: Array) -> Array:
    """Return the square of the transformer's turns ratio [-], kept positive."""
    return np.asarray(np.maximum(1.0 - math.pi * share**2 * (ratio**2 / 12.0 + (0.5 - offset) ** 2), 0.05))


def cross(
    u_w: ArrayLike,
    u_e: ArrayLike,
    u_n: ArrayLike,
    u_s: ArrayLike,
    er: ArrayLike,
    fh: ArrayLike,
    t: ArrayLike = 0.0,
) -> CrossResult:
    """Return the reference planes and the susceptance of a cross, taken as two tees at one point.

    West and east are the main lines of both tees, north and south the side lines; the main lines' planes and
    the susceptances of the two tees add.

    Args:
        u_w: Width of the west line over substrate height [-].
        u_e: Width of the east line over substrate height [-].
        u_n: Width of the north line over substrate height [-].
        u_s: Width of the south line over substrate height [-].
        er: Relative permittivity of the substrate [-].
        fh: Frequency times substrate height [Hz m].
        t: Conductor thickness over substrate height [-].

    Returns:
        CrossResult: planes over h [-], susceptance [S], in_range [-], model [-].

    Source: own approximation from :func:`tee`; no better source.
    Range: that of :func:`tee`.
    Accuracy: not measured.

    >>> result = cross(1.0, 1.0, 1.0, 1.0, 3.66, 1e6)
    >>> round(float(result.d_n), 1)
    1.0
    """
    north, south = tee(u_w, u_e, u_n, er, fh, t), tee(u_w, u_e, u_s, er, fh, t)
    return CrossResult(
        north.d_a + south.d_a,
        north.d_b + south.d_b,
        north.d_side,
        south.d_side,
        north.susceptance + south.susceptance,
        north.in_range & south.in_range,
        np.where(north.in_range & south.in_range, FIELD_FIT, HAMMERSTAD_1981),
    )
