"""A symmetric step in width of a microstrip line. Lengths are in units of the substrate height h."""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from layoutgen.formulas.constants import ETA0
from layoutgen.formulas.ends import hammerstad_open_end
from layoutgen.formulas.microstrip import hammerstad_jensen_1980
from layoutgen.formulas.numeric import Array, Flags, floats, within

__all__ = ["StepResult", "line_constants", "step"]


class StepResult(NamedTuple):
    """A step as two changes of length, each with the broadcast shape of the inputs.

    Attributes:
        d_1: Length that the line of the first argument gains at the step, over h [-].
        d_2: Length that the line of the second argument gains at the step, over h [-].
        L: Excess inductance over MU0 h [-].
        C: Excess capacitance over EPS0 h [-].
        in_range: Whether the inputs lie in the fit's range [-].
    """

    d_1: Array
    d_2: Array
    L: Array
    C: Array
    in_range: Flags


def line_constants(u: ArrayLike, er: ArrayLike, t: ArrayLike = 0.0) -> tuple[Array, Array]:
    """Return a line's inductance and capacitance per length in units of MU0 and EPS0.

    Args:
        u: Strip width over substrate height, W/h [-].
        er: Relative permittivity of the substrate [-].
        t: Conductor thickness over substrate height [-].

    Returns:
        Inductance per length over MU0 [-] and capacitance per length over EPS0 [-].

    Source: Hammerstad-Jensen 1980.
    Range: as there.
    Accuracy: as there.

    >>> inductance, capacitance = line_constants(1.0, 1.0)
    >>> round(float(inductance * capacitance), 12)
    1.0
    """
    line = hammerstad_jensen_1980(u, er, t)
    inductance = line.impedance * np.sqrt(line.effective_permittivity) / ETA0
    return np.asarray(inductance), np.asarray(line.effective_permittivity / inductance)


def step(u1: ArrayLike, u2: ArrayLike, er: ArrayLike, t: ArrayLike = 0.0) -> StepResult:
    """Return a symmetric step in width as length changes of the two lines that meet there.

    The two lines longer by d_1 and d_2 carry the step's whole excess inductance and capacitance, so nothing
    lumped remains. Book formulas for the excess inductance or capacitance are off by factors of 2 to 4.

    Args:
        u1: Width of one line over substrate height; wider or narrower than the other [-].
        u2: Width of the other line over substrate height [-].
        er: Relative permittivity of the substrate [-].
        t: Conductor thickness over substrate height; enters through the lines' constants only [-].

    Returns:
        StepResult: length changes over h [-], L over MU0 h [-], C over EPS0 h [-], in_range [-].

    Source: fits made for this project to field solutions at zero thickness; the inductance has the form of a
        step between two parallel-plate guides.
    Range: 0.5 <= u1, u2 <= 5, 1 <= er <= 13.
    Accuracy: 0.015 h in d_1 and d_2 (planes known to about as much).

    >>> result = step(5.0, 0.5, 9.8)
    >>> round(float(result.d_1), 2), round(float(result.d_2), 2)
    (0.27, 0.16)
    """
    u1, u2, er, t = floats(u1, u2, er, t)
    in_range = within(u1, 0.5, 5.0) & within(u2, 0.5, 5.0) & within(er, 1.0, 13.0) & within(t, 0.0, 0.1)
    u1, u2, er = np.clip(u1, 0.01, 100.0), np.clip(u2, 0.01, 100.0), np.clip(er, 1.0, 1e3)
    swapped = u1 < u2
    wide, narrow = np.maximum(u1, u2), np.minimum(u1, u2)
    l_wide, c_wide = line_constants(wide, er, t)
    l_narrow, c_narrow = line_constants(narrow, er, t)
    excess_l = step_inductance(wide, narrow, l_wide / l_narrow)
    excess_c = step_capacitance(wide, narrow, er, c_wide)
    determinant = l_wide * c_narrow - l_narrow * c_wide
    equal = np.abs(determinant) < 1e-9 * l_narrow * c_wide
    determinant = np.where(equal, 1.0, determinant)
    d_wide = np.where(equal, 0.0, (excess_l * c_narrow - excess_c * l_narrow) / determinant)
    d_narrow = np.where(equal, 0.0, (excess_c * l_wide - excess_l * c_wide) / determinant)
    return StepResult(
        np.where(swapped, d_narrow, d_wide),
        np.where(swapped, d_wide, d_narrow),
        excess_l,
        excess_c,
        np.broadcast_to(in_range, np.shape(excess_c)),
    )


def step_inductance(wide: Array, narrow: Array, ratio: Array) -> Array:
    """Return the excess inductance over MU0 h [-]; ratio is that of the equivalent plate widths."""
    a = np.clip(ratio, 1e-9, 1.0 - 1e-9)
    plates = (a + 1.0 / a) * np.log((1.0 + a) / (1.0 - a)) - 2.0 * np.log(4.0 * a / (1.0 - a * a))
    share = 0.2909 + 0.0852 * np.log(wide) + 0.0689 * np.log(narrow)
    return np.asarray(np.where(wide == narrow, 0.0, plates / (2.0 * math.pi) * np.maximum(share, 0.0)))


def step_capacitance(wide: Array, narrow: Array, er: Array, c_wide: Array) -> Array:
    """Return the excess capacitance over EPS0 h [-]."""
    near = -np.expm1(-0.818 * (0.5 * (wide - narrow)) ** 1.0121)
    return np.asarray(c_wide * hammerstad_open_end(wide, er) * (1.0 - narrow / wide) * near)
