"""The open end of a microstrip line. Lengths are in units of the substrate height h."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from layoutgen.formulas.microstrip import hammerstad_jensen_1980, hammerstad_jensen_1980_widening
from layoutgen.formulas.numeric import Array, Flags, floats, within

__all__ = ["hammerstad_open_end", "kirschning_jansen_koster_1981", "open_end", "open_end_in_range"]


def open_end(u: ArrayLike, er: ArrayLike, t: ArrayLike = 0.0) -> Array:
    """Return by how much an open end makes a line electrically longer than its copper.

    The published form of Kirschning, Jansen and Koster lies 5 to 9 % below field solutions over the whole
    range, .02 to .055 h; it is raised here by a share that falls with the permittivity. A thick end reaches
    further by half of the widening that stands for the thickness of a line: .054 h at t = 0.07 in air.

    Args:
        u: Strip width over substrate height, W/h [-].
        er: Relative permittivity of the substrate [-].
        t: Conductor thickness over substrate height [-].

    Returns:
        Extension over substrate height [-].

    Source: :func:`kirschning_jansen_koster_1981` times a correction fitted for this project.
    Range: 0.3 <= u <= 6, 1 <= er <= 13, t <= 0.2.
    Accuracy: 0.006 h against field solutions (u 0.5-4, er 2.2-9.8, t = 0); 0.012 h in air with t up to 0.14.

    >>> round(float(open_end(1.0, 9.8)), 3)
    0.339
    """
    u, er, t = floats(u, er, t)
    u, er = np.clip(u, 1e-3, 1e3), np.clip(er, 1.0, 1e3)
    thin = kirschning_jansen_koster_1981(u, er) * _rise(u, er)
    return np.asarray(thin + 0.5 * hammerstad_jensen_1980_widening(u, er, t))


def _rise(u: Array, er: Array) -> Array:
    """Return the ratio of the field-solved extension to the published one [-]."""
    return np.asarray(1.0655 + 0.0875 * er**-1.7 + 0.012 * np.tanh(u - 1.0))


def open_end_in_range(u: ArrayLike, er: ArrayLike, t: ArrayLike = 0.0) -> Flags:
    """Say whether an open end lies in the range of :func:`open_end`.

    Args:
        u: Strip width over substrate height, W/h [-].
        er: Relative permittivity of the substrate [-].
        t: Conductor thickness over substrate height [-].

    Returns:
        True inside the range [-].

    Source: that of :func:`open_end`.
    Range: any.
    Accuracy: exact.

    >>> bool(open_end_in_range(20.0, 3.5))
    False
    """
    return within(u, 0.3, 6.0) & within(er, 1.0, 13.0) & within(t, 0.0, 0.2)


def kirschning_jansen_koster_1981(u: ArrayLike, er: ArrayLike, t: ArrayLike = 0.0) -> Array:
    """Return the published extension of an open end; see :func:`open_end` for the better value.

    The product form is the right one: a form that is printed with ee and u joined in one factor is 6 to 60 %
    too long for u 0.5 to 3 (field solutions).

    Args:
        u: Strip width over substrate height, W/h [-].
        er: Relative permittivity of the substrate [-].
        t: Conductor thickness over substrate height; enters through the line's permittivity only [-].

    Returns:
        Extension over substrate height [-].

    Source: M. Kirschning, R. H. Jansen and N. H. L. Koster, "Accurate model for open end effect of microstrip
        lines", Electronics Letters 17 (1981), pp. 123-125.
    Range: 0.01 <= u <= 100, er <= 50 (from memory).
    Accuracy: 2.5 % claimed (from memory); 5 to 9 % low against field solutions.

    >>> round(float(kirschning_jansen_koster_1981(1.0, 2.2)), 3)
    0.388
    """
    u, er, t = floats(u, er, t)
    u, er = np.clip(u, 1e-3, 1e3), np.clip(er, 1.0, 1e3)
    ee = hammerstad_jensen_1980(u, er, t).effective_permittivity
    share = (ee**0.81 + 0.26) / (ee**0.81 - 0.189)
    xi1 = 0.434907 * share * (u**0.8544 + 0.236) / (u**0.8544 + 0.87)
    xi2 = 1.0 + u**0.371 / (2.358 * er + 1.0)
    xi3 = 1.0 + 0.5274 * np.arctan(0.084 * u ** (1.9413 / xi2)) / ee**0.9236
    xi4 = 1.0 + 0.0377 * np.arctan(0.067 * u**1.456) * (6.0 - 5.0 * np.exp(0.036 * (1.0 - er)))
    xi5 = 1.0 - 0.218 * np.exp(-7.5 * u)
    return np.asarray(xi1 * xi3 * xi5 / xi4)


def hammerstad_open_end(u: ArrayLike, er: ArrayLike, t: ArrayLike = 0.0) -> Array:
    """Return the older extension of an open end, kept as a second model.

    Args:
        u: Strip width over substrate height, W/h [-].
        er: Relative permittivity of the substrate [-].
        t: Conductor thickness over substrate height; enters through the line's permittivity only [-].

    Returns:
        Extension over substrate height [-].

    Source: E. O. Hammerstad 1975, as printed by Gupta, Garg and Bahl.
    Range: 0.3 <= u <= 2 (from memory).
    Accuracy: 5 % claimed (from memory); 3 to 19 % low against field solutions.

    >>> round(float(hammerstad_open_end(1.0, 9.8)), 3)
    0.315
    """
    u, er, t = floats(u, er, t)
    u = np.clip(u, 1e-6, 1e6)
    ee = hammerstad_jensen_1980(u, er, t).effective_permittivity
    return np.asarray(0.412 * (ee + 0.3) / (ee - 0.258) * (u + 0.264) / (u + 0.8))
