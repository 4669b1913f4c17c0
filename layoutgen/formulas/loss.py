"""Losses of a line: skin depth, surface resistance, roughness, conductor and dielectric attenuation. SI."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike, NDArray

from layoutgen.formulas.constants import C0, ETA0, MU0
from layoutgen.formulas.numeric import Array, floats

__all__ = [
    "conductor_attenuation",
    "dielectric_attenuation",
    "hammerstad_bekkadal_1975",
    "hammerstad_jensen_1980_conductor_attenuation",
    "propagation_constant",
    "skin_depth",
    "surface_resistance",
]


def skin_depth(frequency: ArrayLike, conductivity: ArrayLike) -> Array:
    """Return the depth at which a current has fallen to 1/e.

    Args:
        frequency: Frequency [Hz].
        conductivity: Conductivity of the metal, not magnetic [S/m].

    Returns:
        Skin depth [m].

    Source: textbook, exact for a flat good conductor.
    Range: thickness above about three skin depths.
    Accuracy: exact there.

    >>> round(float(skin_depth(1e9, 58e6)) * 1e6, 3)
    2.09
    """
    frequency, conductivity = floats(frequency, conductivity)
    return np.asarray(1.0 / np.sqrt(math.pi * frequency * MU0 * conductivity))


def surface_resistance(frequency: ArrayLike, conductivity: ArrayLike) -> Array:
    """Return the resistance of a smooth surface per square.

    Args:
        frequency: Frequency [Hz].
        conductivity: Conductivity of the metal, not magnetic [S/m].

    Returns:
        Surface resistance [ohm].

    Source: textbook, exact for a flat good conductor.
    Range: thickness above about three skin depths.
    Accuracy: exact there.

    >>> round(float(surface_resistance(10e9, 58e6)) * 1e3, 2)
    26.09
    """
    frequency, conductivity = floats(frequency, conductivity)
    return np.asarray(np.sqrt(math.pi * frequency * MU0 / conductivity))


def hammerstad_bekkadal_1975(roughness: ArrayLike, depth: ArrayLike) -> Array:
    """Return the factor by which surface roughness raises the conductor loss.

    Args:
        roughness: Root-mean-square roughness of the copper [m].
        depth: Skin depth [m].

    Returns:
        Factor, 1 to 2 [-].

    Source: E. O. Hammerstad and F. Bekkadal, "Microstrip Handbook", ELAB report STF44 A74169, 1975.
    Range: any; it saturates at 2 and under-predicts rough foil above some GHz (from memory).
    Accuracy: an empirical fit, not measured here.

    >>> round(float(hammerstad_bekkadal_1975(1e-6, 1e-6)), 3)
    1.605
    """
    roughness, depth = floats(roughness, depth)
    return np.asarray(1.0 + 2.0 / math.pi * np.arctan(1.4 * (roughness / depth) ** 2))


def conductor_attenuation(
    frequency: ArrayLike,
    z0: ArrayLike,
    width: ArrayLike,
    conductivity: ArrayLike,
    roughness: ArrayLike = 0.0,
) -> Array:
    """Return the conductor's attenuation with a uniform current: Rs/(Z0 W) times the roughness factor.

    Args:
        frequency: Frequency [Hz].
        z0: Characteristic impedance [ohm].
        width: Strip width [m].
        conductivity: Conductivity of the metal [S/m].
        roughness: Root-mean-square roughness of the copper [m].

    Returns:
        Attenuation [Np/m].

    Source: D. M. Pozar, "Microwave Engineering" (from memory; it reproduces his alumina example).
    Range: strips wide against the height, conductors thicker than three skin depths.
    Accuracy: high for narrow strips' ground side and low at their edges; a factor of 1.5 is possible.

    >>> round(float(conductor_attenuation(10e9, 50.0, 0.483e-3, 58.13e6)), 2)
    1.08
    """
    z0, width = floats(z0, width)
    rough = hammerstad_bekkadal_1975(roughness, skin_depth(frequency, conductivity))
    return np.asarray(surface_resistance(frequency, conductivity) / (z0 * width) * rough)


def hammerstad_jensen_1980_conductor_attenuation(
    frequency: ArrayLike,
    z0: ArrayLike,
    width: ArrayLike,
    conductivity: ArrayLike,
    roughness: ArrayLike = 0.0,
) -> Array:
    """Return the conductor's attenuation with Hammerstad and Jensen's current distribution factor.

    It is :func:`conductor_attenuation` times exp[-1.2 (Z0/eta0)^0.7]; the two differ by 25 % at 50 ohm.

    Args:
        frequency: Frequency [Hz].
        z0: Characteristic impedance [ohm].
        width: Strip width [m].
        conductivity: Conductivity of the metal [S/m].
        roughness: Root-mean-square roughness of the copper [m].

    Returns:
        Attenuation [Np/m].

    Source: E. Hammerstad and O. Jensen, IEEE MTT-S Digest 1980, pp. 407-409.
    Range: conductors thicker than three skin depths.
    Accuracy: not measured here.

    >>> round(float(hammerstad_jensen_1980_conductor_attenuation(10e9, 50.0, 0.483e-3, 58.13e6)), 2)
    0.81
    """
    (z0,) = floats(z0)
    uniform = conductor_attenuation(frequency, z0, width, conductivity, roughness)
    return np.asarray(uniform * np.exp(-1.2 * (z0 / ETA0) ** 0.7))


def dielectric_attenuation(
    frequency: ArrayLike, er: ArrayLike, ee: ArrayLike, loss_tangent: ArrayLike
) -> Array:
    """Return the substrate's attenuation.

    Args:
        frequency: Frequency [Hz].
        er: Relative permittivity of the substrate [-].
        ee: Effective permittivity of the line [-].
        loss_tangent: Loss tangent of the substrate [-].

    Returns:
        Attenuation [Np/m]; at er = 1, where the filling factor is undefined, that of the filled space.

    Source: textbook, k0 er (ee-1) tan(delta) / [2 sqrt(ee) (er-1)]; exact to first order in the loss tangent.
    Range: loss_tangent << 1.
    Accuracy: that of ee.

    >>> round(float(dielectric_attenuation(10e9, 9.9, 6.665, 0.001)), 3)
    0.256
    """
    frequency, er, ee, loss_tangent = floats(frequency, er, ee, loss_tangent)
    empty = np.abs(er - 1.0) < 1e-12
    filling = np.where(empty, 1.0, (ee - 1.0) / np.where(empty, 1.0, er - 1.0))
    k0 = 2.0 * math.pi * frequency / C0
    return np.asarray(0.5 * k0 * er * filling * loss_tangent / np.sqrt(ee))


def propagation_constant(
    frequency: ArrayLike, ee: ArrayLike, attenuation: ArrayLike
) -> NDArray[np.complex128]:
    """Return the complex propagation constant of a line.

    Args:
        frequency: Frequency [Hz].
        ee: Effective permittivity at that frequency [-].
        attenuation: Conductor's and substrate's attenuation together [Np/m].

    Returns:
        Attenuation plus j times the phase constant [1/m].

    Source: definition.
    Range: any.
    Accuracy: exact.

    >>> gamma = complex(propagation_constant(1e9, 4.0, 0.5))
    >>> round(gamma.real, 3), round(gamma.imag, 3)
    (0.5, 41.917)
    """
    frequency, ee, attenuation = floats(frequency, ee, attenuation)
    return np.asarray(attenuation + 2j * math.pi * frequency * np.sqrt(ee) / C0)
