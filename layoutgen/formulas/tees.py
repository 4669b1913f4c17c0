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
from layoutgen.formulas.microstrip import hammerstad_jensen_1980, hammerstad_jensen_1980_widening
from layoutgen.formulas.numeric import Array, Flags, floats, within
from layoutgen.formulas.steps import line_constants, step_capacitance, step_inductance

__all__ = ["FIELD_FIT", "HAMMERSTAD_1981", "CrossResult", "TeeResult", "cross", "hammerstad_1981_tee", "tee"]

FIELD_FIT = "fit to field solutions"
HAMMERSTAD_1981 = "Hammerstad 1981"

_WIDTHS = (0.4, 8.0)
_WIDTHS_OF_USE = (0.2, 8.0)


_STEP_SHARES = (
    (-0.0966, 1.0332, -0.1475, 0.0211, -0.0317),
    (0.3881, -0.5516, -0.3772, 0.3531, 0.0217),
    (0.1329, -0.0283, -0.0754, -0.0152, 0.0437),
)
_SIDE_SHARES = (
    (0.2517, 0.0555, 0.0391, -0.0662, 0.0041),
    (-0.1727, -0.0644, -0.0316, 0.0677, -0.0370),
    (0.7496, -0.3173, 0.0245, 0.0317, -0.0073),
)


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
        t: Conductor thickness over substrate height; each line is taken as a thin one that is wider by
            Hammerstad and Jensen's amount [-].

    Returns:
        TeeResult: planes over h [-], susceptance [S], in_range [-], model [-].

    Source: fits made for this project to field solutions with long arms, unequal mains stepping at the side
        line's axis; Hammerstad 1981 outside their range, whose planes are off by up to 0.4 h.
    Range: all widths 0.4 to 8, er 1 to 13, t <= 0.2. From 0.2 to 0.4 the fit is still used, with the flag
        down: its planes stay within 0.25 h there, Hammerstad's are off by up to 1.3 h. The planes are
        quasi-static: at fh = 1e6 Hz m d_a moves by up to 0.04 h and d_side by 0.03 h.
    Accuracy: reference tables: planes 0.016 h, susceptance 0.05 mS at fh = 1e6 Hz m; 165 further tees of
        random widths: d_a, d_b 0.015 h and d_side 0.04 h to u = 6, 0.07 h to u = 8; six of them: 0.08 mS.
        Neighbouring arms that end within 12 h change d_side by .06 to .15 h, which no junction model holds.

    >>> result = tee(1.0, 1.0, 1.0, 3.66, 1e6)
    >>> round(float(result.d_a), 2), round(float(result.d_side), 2)
    (0.08, 1.0)
    """
    u_a, u_b, u_side, er, fh, t = np.broadcast_arrays(*floats(u_a, u_b, u_side, er, fh, t))
    substrate = within(er, 1.0, 13.0) & within(t, 0.0, 0.2)
    widths = np.stack([u_a, u_b, u_side])
    in_range = substrate & np.all(within(widths, *_WIDTHS), axis=0)
    usable = substrate & np.all(within(widths, *_WIDTHS_OF_USE), axis=0)
    fit = _fit(np.clip(widths, *_WIDTHS_OF_USE), np.clip(er, 1.0, 13.0), fh, np.clip(t, 0.0, 0.2))
    if np.all(usable):
        return TeeResult(*fit, in_range, _names(usable))
    old = hammerstad_1981_tee(u_a, u_b, u_side, er, fh, t)
    d_a, d_b, d_side, susceptance = (
        np.where(usable, new, published)
        for new, published in zip(fit, (old.d_a, old.d_b, old.d_side, old.susceptance), strict=True)
    )
    return TeeResult(d_a, d_b, d_side, susceptance, in_range, _names(usable))


def _names(fitted: Flags) -> NDArray[np.str_]:
    """Return the name of the model used for each element."""
    return np.asarray(np.where(fitted, FIELD_FIT, HAMMERSTAD_1981), dtype=np.str_)


def _fit(widths: Array, er: Array, fh: Array, t: Array) -> tuple[Array, Array, Array, Array]:
    """Return planes [-] and susceptance [S] of the fit."""
    u_a, u_b, u_side = widths + hammerstad_jensen_1980_widening(widths, 1.0, t)
    lines = np.stack([np.maximum(u_a, u_b), np.minimum(u_a, u_b), u_side])
    wide, narrow, _ = lines
    planes = _planes(lines)
    c_wide, c_narrow, c_side = line_constants(lines, er)[1]
    c = 0.5 * (
        _excess_capacitance(wide, u_side, er, c_wide, c_side)
        + _excess_capacitance(narrow, u_side, er, c_narrow, c_side)
    )
    c = c + 0.5 * step_capacitance(wide, narrow, er, c_wide)
    d_wide, d_narrow, d_side = planes
    c = c + c_wide * d_wide + c_narrow * d_narrow + c_side * d_side
    swapped = u_a < u_b
    d_a, d_b = np.where(swapped, d_narrow, d_wide), np.where(swapped, d_wide, d_narrow)
    return d_a, d_b, d_side, np.asarray(2.0 * math.pi * EPS0 * np.clip(fh, 0.0, 1e12) * c)


def _planes(lines: Array) -> tuple[Array, Array, Array]:
    """Return the planes [-] of the wide main, the narrow main and the side line, whose widths are stacked.

    Each main starts from its tee with equal mains, the side line from the narrow main's; what the step
    between the mains adds is split by two fitted shares, one of the step's own inductance and one of what
    separates the side line's two values.
    """
    wide, narrow, u_side = lines
    l_wide, l_narrow, l_side = line_constants(lines, 1.0)[0]
    d_wide, far = _equal_mains(wide, u_side, l_wide, l_side)
    d_narrow, near = _equal_mains(narrow, u_side, l_narrow, l_side)
    own, apart = step_inductance(wide, narrow, l_wide / l_narrow), (far - near) * l_side
    place = u_side / (u_side + 0.5 * (wide - narrow))
    logs = np.log(u_side), np.log(wide), np.log(narrow)
    more = [
        own * _share(_STEP_SHARES[k], place, *logs) - apart * _share(_SIDE_SHARES[k], place, *logs)
        for k in range(3)
    ]
    return (
        np.asarray(d_wide - more[0] / l_wide),
        np.asarray(d_narrow - more[1] / l_narrow),
        np.asarray(near - more[2] / l_side),
    )


def _share(coefficients: tuple[float, ...], place: Array, side: Array, wide: Array, narrow: Array) -> Array:
    """Return a fitted share [-], linear in the step's place beside the side line and in the widths' logs."""
    constant, by_place, by_side, by_wide, by_narrow = coefficients
    return np.asarray(constant + by_place * place + by_side * side + by_wide * wide + by_narrow * narrow)


def _equal_mains(u: Array, u_side: Array, inductance: Array, l_side: Array) -> tuple[Array, Array]:
    """Return main and side plane [-] of a tee with equal main lines."""
    x, y = np.log(u), np.log(u_side)
    main = np.exp(-2.5666 - 0.5494 * x + 1.6489 * y + 0.1085 * x * y - 0.0497 * y * y - 0.1023 * x * x)
    plate = 1.0 / inductance
    r = inductance / l_side
    side = plate * (-0.0629 + 0.3489 * r + 0.3678 * np.exp(-2.0 * r) + 0.0346 * x - 0.0180 * r * x)
    return np.asarray(main), np.asarray(side)


def _excess_capacitance(u: Array, u_side: Array, er: Array, c: Array, c_side: Array) -> Array:
    """Return the excess capacitance over EPS0 h with all planes at the crossing [-]."""
    x, y = np.log(u), np.log(u_side)
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
    arrays = np.broadcast_arrays(*floats(u_a, u_b, u_side, er, fh, t))
    widths = np.clip(np.stack(arrays[:3]), 1e-3, 1e3)
    d_a, d_b, d_side, b = _hammerstad(
        widths, np.clip(arrays[3], 1.0, 1e3), np.clip(arrays[4], 0.0, 1e8), arrays[5]
    )
    none = np.zeros(np.shape(b), dtype=np.bool_)
    return TeeResult(d_a, d_b, d_side, b, none, _names(none))


def _hammerstad(widths: Array, er: Array, fh: Array, t: Array) -> tuple[Array, Array, Array, Array]:
    """Return planes [-] and susceptance [S] of the published formulas."""
    line = hammerstad_jensen_1980(widths, er, t)
    (z_a, z_b, z_s), (ee_a, ee_b, _) = line.impedance, line.effective_permittivity
    plate_a, plate_b, plate_s = 1.0 / line_constants(widths, er, t)[0]
    share_a, share_b = fh * 2.0 * MU0 / z_a, fh * 2.0 * MU0 / z_b
    r, q = np.sqrt(z_a * z_b) / z_s, share_a * share_b
    d_a = 0.055 * plate_s * z_a / z_s * (1.0 - 2.0 * z_a / z_s * share_a**2)
    d_b = 0.055 * plate_s * z_b / z_s * (1.0 - 2.0 * z_b / z_s * share_b**2)
    mean = np.sqrt(plate_a * plate_b)
    d_s = mean * (0.5 - r * (0.05 + 0.7 * np.exp(-1.6 * r) + 0.25 * r * q - 0.17 * np.log(r)))
    n_squared = _turns_squared(share_a, z_a / z_s, d_s / plate_a)
    n_squared = np.sqrt(n_squared * _turns_squared(share_b, z_b / z_s, d_s / plate_b))
    waves = fh**2 * np.sqrt(ee_a * ee_b) / C0**2
    bracket = 1.0 + 0.9 * np.log(r) + 4.5 * r * q - 4.4 * np.exp(-1.3 * r) - 20.0 * (z_s / ETA0) ** 2
    planes = np.sqrt(np.maximum(d_a * d_b, 0.0)) / plate_s
    b = 5.5 * np.sqrt(plate_a * plate_b * waves) * (er + 2.0) / er * planes / (z_s * n_squared) * bracket
    return d_a, d_b, d_s, np.asarray(b)


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
    the susceptances of the two tees add. No star of four lines can be right for every path: choose as west
    and east the pair that carries the signal through. The path from north straight to south is then wrong:
    its planes are 0.14 h each in a cross of four lines with u = 1, not 1.0 h.

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

    Source: own approximation from :func:`tee`; no published source.
    Range: that of :func:`tee`.
    Accuracy: six crosses of field-solved inductance (widths 0.5 to 4): west to east 0.03 h in each plane,
        west to north 0.06 h of the narrower line in the sum; the susceptance is not measured.

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
        _names((north.model == FIELD_FIT) & (south.model == FIELD_FIT)),
    )
