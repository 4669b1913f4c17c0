"""A pad on a line, and the series gap under a chip part."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from layoutgen.formulas.numeric import Array, Flags, floats, within
from layoutgen.formulas.steps import line_constants

__all__ = ["GapResult", "chip_gap", "pad_excess"]


def pad_excess(
    u_line: ArrayLike, u_pad: ArrayLike, length: ArrayLike, er: ArrayLike, t: ArrayLike = 0.0
) -> Array:
    """Return by how much a pad makes a matched line electrically longer than its centre-line.

    A short piece of length p with constants L'p, C'p between matched lines with L', C' delays by
    p (L'p/Z0 + C'p Z0)/2 to first order, with Z0^2 = L'/C'; the line itself by p sqrt(L'C'). The difference
    over the line's own delay per length is p [(C'p/C' + L'p/L')/2 - 1].

    Args:
        u_line: Width of the line over substrate height [-].
        u_pad: Width of the pad over substrate height [-].
        length: Length of the pad along the line over substrate height [-].
        er: Relative permittivity of the substrate [-].
        t: Conductor thickness over substrate height [-].

    Returns:
        Extra electrical length over substrate height [-]; a little below zero for slightly narrower
        pads, whose wave is faster.

    Source: first-order line theory; the steps at the pad's ends are not in it.
    Range: pads short against the wavelength (below about 20 degrees).
    Accuracy: first order in the pad's electrical length.

    >>> float(pad_excess(1.0, 1.0, 2.0, 3.66))
    0.0
    >>> round(float(pad_excess(1.0, 2.0, 1.0, 3.66)), 2)
    0.1
    """
    length = floats(length)[0]
    l_line, c_line = line_constants(u_line, er, t)
    l_pad, c_pad = line_constants(u_pad, er, t)
    return np.asarray(length * (0.5 * (c_pad / c_line + l_pad / l_line) - 1.0))


class GapResult(NamedTuple):
    """A series gap as a pi network.

    Attributes:
        series: Capacitance across the gap [F].
        shunt: Capacitance from each edge to ground [F].
        in_range: Whether the inputs lie in the formula's range [-].
    """

    series: Array
    shunt: Array
    in_range: Flags


def chip_gap(w: ArrayLike, gap: ArrayLike, h: ArrayLike, er: ArrayLike) -> GapResult:
    """Return the capacitances of the gap between two equal strips, such as the lands of a chip part.

    Args:
        w: Width of the strips [m].
        gap: Gap between the strips' ends [m].
        h: Height of the substrate [m].
        er: Relative permittivity of the substrate [-].

    Returns:
        GapResult: series and shunt capacitance [F], in_range [-].

    Source: R. Garg and I. J. Bahl, "Microstrip discontinuities", Int. J. Electronics 45 (1978), pp. 81-87;
        two public codes differ on the break at 0.3 or 0.5 of the width, 0.3 is taken.
    Range: 0.5 <= w/h <= 2, 0.1 <= gap/w <= 1, 2.5 <= er <= 15; a wider gap is taken as 1, a negative
        series value as none.
    Accuracy: 7 % claimed (from memory), not measured here.

    >>> round(float(chip_gap(1e-3, 0.3e-3, 1e-3, 9.6).series) * 1e15)
    48
    """
    w, gap, h, er = floats(w, gap, h, er)
    u, ratio = w / h, gap / w
    in_range = within(u, 0.5, 2.0) & within(ratio, 0.1, 1.0) & within(er, 2.5, 15.0)
    u, ratio, er = np.clip(u, 0.05, 20.0), np.clip(ratio, 0.01, 1.0), np.clip(er, 1.0, 1e3)
    m_odd = u * (0.619 * np.log10(u) - 0.3853)
    odd = (er / 9.6) ** 0.8 * ratio**m_odd * np.exp(4.26 - 1.453 * np.log10(u))
    near = ratio <= 0.3
    m_even = np.where(near, 0.8675, 1.565 / u**0.16 - 1.0)
    k_even = np.where(near, 2.043 * u**0.12, 1.97 - 0.03 / u)
    even = 12.0 * (er / 9.6) ** 0.9 * ratio**m_even * np.exp(k_even)
    series = np.maximum(0.5 * odd - 0.25 * even, 0.0) * w * 1e-12
    shunt = 0.5 * even * w * 1e-12
    return GapResult(series, shunt, np.broadcast_to(in_range, np.shape(series)))
