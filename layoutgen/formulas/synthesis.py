"""Inversion of the analyses: width for an impedance, width and gap for two impedances.

Lengths are in units of the substrate height h.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from layoutgen.formulas.coupled import coupled_pair
from layoutgen.formulas.microstrip import hammerstad_jensen_1980_widening, wheeler_hammerstad_width
from layoutgen.formulas.numeric import Array, Flags, floats, increasing_root, within
from layoutgen.formulas.pour import microstrip_beside_pour

__all__ = ["PairSynthesisResult", "SynthesisResult", "coupled_dimensions", "width_for_impedance"]

_LOWEST, _HIGHEST = 1e-3, 1e3
_STEPS = 100
_HALVINGS = 8


class SynthesisResult(NamedTuple):
    """A width found for an impedance.

    Attributes:
        u: Strip width over substrate height, W/h [-].
        in_range: Whether the width exists and lies, with the inputs, in the analysis' range [-].
    """

    u: Array
    in_range: Flags


class PairSynthesisResult(NamedTuple):
    """Width and gap found for a coupled pair.

    Attributes:
        u: Width of each strip over substrate height, W/h [-].
        g: Gap between the strips over substrate height, S/h [-].
        in_range: Whether both exist and lie, with the inputs, in the analysis' range [-].
    """

    u: Array
    g: Array
    in_range: Flags


def width_for_impedance(
    z0: ArrayLike,
    er: ArrayLike,
    t: ArrayLike = 0.0,
    gap_left: ArrayLike = math.inf,
    gap_right: ArrayLike = math.inf,
) -> SynthesisResult:
    """Return the width at which a microstrip line, beside its pour, has the impedance asked for.

    Args:
        z0: Impedance asked for, quasi-static [ohm].
        er: Relative permittivity of the substrate [-].
        t: Conductor thickness over substrate height [-].
        gap_left: Gap to the pour on the left over substrate height; infinity for none [-].
        gap_right: Gap to the pour on the right over substrate height; infinity for none [-].

    Returns:
        SynthesisResult: u [-], in_range [-]. Where no width would do, the nearest end of 0.001..1000 with
        in_range false.

    Source: inversion of :func:`layoutgen.formulas.pour.microstrip_beside_pour`, by a bracketed secant search
        that starts at Wheeler and Hammerstad's closed form.
    Range: that of the analysis at the width found.
    Accuracy: 1e-9 of the width as an inverse; the model's own accuracy is the analysis'.

    >>> found = width_for_impedance(50.0, 9.8)
    >>> round(float(found.u), 3), bool(found.in_range)
    (0.971, True)
    """
    z0, er, t, gap_left, gap_right = np.broadcast_arrays(*floats(z0, er, t, gap_left, gap_right))
    usable = np.isfinite(z0) & (z0 > 0.0)
    target = np.log(np.where(usable, z0, 50.0))

    def excess(log_u: Array) -> Array:
        line = microstrip_beside_pour(np.exp(log_u), er, t, gap_left, gap_right)
        return np.asarray(target - np.log(line.impedance))

    thin = wheeler_hammerstad_width(np.exp(target), er)
    start = np.log(np.maximum(thin - hammerstad_jensen_1980_widening(thin, er, t), 0.3 * thin))
    log_u = increasing_root(excess, start, math.log(_LOWEST), math.log(_HIGHEST), slope=0.6)
    u = np.exp(log_u)
    line = microstrip_beside_pour(u, er, t, gap_left, gap_right)
    met = np.abs(np.log(line.impedance) - target) < 1e-8
    return SynthesisResult(np.asarray(u), np.asarray(line.in_range & met & usable))


def coupled_dimensions(
    z_even: ArrayLike,
    z_odd: ArrayLike,
    er: ArrayLike,
    t: ArrayLike = 0.0,
    gap_left: ArrayLike = math.inf,
    gap_right: ArrayLike = math.inf,
) -> PairSynthesisResult:
    """Return width and gap at which a coupled pair has the two impedances asked for.

    Args:
        z_even: Even-mode impedance asked for, quasi-static [ohm].
        z_odd: Odd-mode impedance asked for, quasi-static [ohm].
        er: Relative permittivity of the substrate [-].
        t: Conductor thickness over substrate height [-].
        gap_left: Gap from the left strip to the pour over substrate height; infinity for none [-].
        gap_right: Gap from the right strip to the pour over substrate height; infinity for none [-].

    Returns:
        PairSynthesisResult: u [-], g [-], in_range [-]; where no pair would do (z_even <= z_odd, or a gap
        outside 0.01..20) the last finite values with in_range false.

    Source: inversion of :func:`layoutgen.formulas.coupled.coupled_pair` by damped Newton steps in the
        logarithms of width and gap.
    Range: that of the analysis at the width and gap found.
    Accuracy: 1e-9 in both impedances as an inverse.

    >>> found = coupled_dimensions(59.031, 37.041, 10.0)
    >>> round(float(found.u), 2), round(float(found.g), 2)
    (1.0, 0.5)
    """
    z_even, z_odd, er, t, gap_left, gap_right = np.broadcast_arrays(
        *floats(z_even, z_odd, er, t, gap_left, gap_right)
    )
    usable = np.isfinite(z_even) & np.isfinite(z_odd) & (z_even > z_odd) & (z_odd > 0.0)
    target = np.log(np.stack([np.where(usable, z_even, 60.0), np.where(usable, z_odd, 40.0)]))

    def excess(x: Array) -> Array:
        pair = coupled_pair(np.exp(x[0]), np.exp(x[1]), er, t, gap_left, gap_right)
        return np.asarray(np.log(np.stack([pair.z_even, pair.z_odd])) - target)

    x, y = _newton_pair(excess, _pair_start(target, er))
    u, g = np.exp(x[0]), np.exp(x[1])
    pair = coupled_pair(u, g, er, t, gap_left, gap_right)
    met = usable & np.all(np.abs(y) < 1e-8, axis=0) & within(g, 0.0, 20.0)
    return PairSynthesisResult(np.asarray(u), np.asarray(g), np.asarray(pair.in_range & met))


def _pair_start(target: Array, er: Array) -> Array:
    """Return a first guess of (ln u, ln g) from the impedances' geometric mean and ratio."""
    u = wheeler_hammerstad_width(np.exp(0.5 * (target[0] + target[1])), er)
    coupling = np.tanh(0.5 * np.maximum(target[0] - target[1], 1e-6))
    log_g = np.clip(-0.5 - 1.2 * np.log(coupling / 0.2), math.log(0.03), math.log(10.0))
    return np.stack([np.clip(np.log(u), math.log(0.02), math.log(50.0)), log_g])


def _newton_pair(excess: Callable[[Array], Array], x: Array) -> tuple[Array, Array]:
    """Return the zero (2, ...) of two functions of two variables, and the residuals there."""
    low = np.array([math.log(0.01), math.log(0.005)]).reshape((2,) + (1,) * (x.ndim - 1))
    high = np.array([math.log(100.0), math.log(60.0)]).reshape(low.shape)
    y = excess(x)
    for _ in range(_STEPS):
        step = np.clip(_newton_step(excess, x, y), -0.7, 0.7)
        size = np.linalg.norm(y, axis=0)
        if np.all((size < 1e-12) | (np.max(np.abs(step), axis=0) < 1e-12)):
            break
        share = np.ones_like(size)
        for _ in range(_HALVINGS):
            proposed = np.clip(x + share * step, low, high)
            y_proposed = excess(proposed)
            worse = np.linalg.norm(y_proposed, axis=0) > size
            if not np.any(worse & (size >= 1e-12)):
                break
            share = np.where(worse, 0.5 * share, share)
        x, y = proposed, y_proposed
    return x, y


def _newton_step(excess: Callable[[Array], Array], x: Array, y: Array) -> Array:
    """Return Newton's step (2, ...) with slopes from central differences."""
    h = 1e-5
    unit = np.eye(2).reshape((2, 2) + (1,) * (x.ndim - 1))
    du = (excess(x + h * unit[0]) - excess(x - h * unit[0])) / (2.0 * h)
    dg = (excess(x + h * unit[1]) - excess(x - h * unit[1])) / (2.0 * h)
    determinant = du[0] * dg[1] - dg[0] * du[1]
    determinant = np.where(np.abs(determinant) < 1e-12, np.copysign(1e-12, determinant), determinant)
    return np.stack(
        [(dg[0] * y[1] - dg[1] * y[0]) / determinant, (du[1] * y[0] - du[0] * y[1]) / determinant]
    )
