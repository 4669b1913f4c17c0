"""Limits of copper and clearance: current, heat, resistance, voltage, average power. SI units.

IPC-2221's equation takes an area in square mils; the conversion is inside. The standards' own texts were not
read: values agree with independent public code and pages that quote them.
"""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from layoutgen.formulas.constants import COPPER_TEMPERATURE_COEFFICIENT, ETA0, MU0
from layoutgen.formulas.numeric import Array, Flags, floats, within

__all__ = [
    "CLEARANCE_CONDITIONS",
    "IPC2221_MAX_CURRENT",
    "PowerResult",
    "average_power",
    "barrel_resistance",
    "barrel_section",
    "dc_resistance",
    "ipc2221_barrel_current",
    "ipc2221_barrel_rise",
    "ipc2221_current",
    "ipc2221_in_range",
    "ipc2221_rise",
    "ipc2221_width",
    "ipc2221b_clearance",
    "peak_voltage",
]

IPC2221_MAX_CURRENT = 35.0
"""Upper end of the external conductors' chart [A]."""

_SQUARE_MIL = 25.4e-6**2
_EXTERNAL = 0.048
_INTERNAL = 0.024

CLEARANCE_CONDITIONS = ("B1", "B2", "B3", "B4", "A5", "A6", "A7")
"""Columns of IPC-2221B table 6-1, in the table's order."""

_STEPS_V = (15.0, 30.0, 50.0, 100.0, 150.0, 170.0, 250.0, 300.0, 500.0)
_CLEARANCES_MM = {
    "B1": (0.05, 0.05, 0.1, 0.1, 0.2, 0.2, 0.2, 0.2, 0.25),
    "B2": (0.1, 0.1, 0.6, 0.6, 0.6, 1.25, 1.25, 1.25, 2.5),
    "B3": (0.1, 0.1, 0.6, 1.5, 3.2, 3.2, 6.4, 12.5, 12.5),
    "B4": (0.05, 0.05, 0.13, 0.13, 0.4, 0.4, 0.4, 0.4, 0.8),
    "A5": (0.13, 0.13, 0.13, 0.13, 0.4, 0.4, 0.4, 0.4, 0.8),
    "A6": (0.13, 0.25, 0.4, 0.5, 0.8, 0.8, 0.8, 0.8, 1.5),
    "A7": (0.13, 0.13, 0.13, 0.13, 0.4, 0.4, 0.4, 0.8, 0.8),
}
_MM_PER_VOLT = {
    "B1": 0.0025,
    "B2": 0.005,
    "B3": 0.025,
    "B4": 0.00305,
    "A5": 0.00305,
    "A6": 0.00305,
    "A7": 0.00305,
}


def ipc2221_current(width: ArrayLike, thickness: ArrayLike, rise: ArrayLike, internal: bool = False) -> Array:
    """Return the current that warms a conductor by a given amount.

    Args:
        width: Conductor width [m].
        thickness: Conductor thickness [m].
        rise: Temperature rise [K].
        internal: Whether the conductor lies inside the board [-].

    Returns:
        Current [A].

    Source: IPC-2221, I = k dT^0.44 A^0.725 with A in square mils, k 0.048 external, 0.024 internal.
    Range: up to 35 A external (17.5 A internal), 10 to 100 K, width to 10 mm, copper 17 to 105 um (from
        memory); see :func:`ipc2221_in_range`.
    Accuracy: a conservative chart for boards without planes; the internal half was never measured.

    >>> round(float(ipc2221_current(1e-3, 35e-6, 10.0)), 3)
    2.392
    """
    width, thickness, rise = floats(width, thickness, rise)
    return _current(np.maximum(width, 0.0) * np.maximum(thickness, 0.0), rise, internal)


def _current(section: Array, rise: Array, internal: bool) -> Array:
    """Return the current [A] of a section [m^2]."""
    factor = _INTERNAL if internal else _EXTERNAL
    return np.asarray(factor * np.maximum(rise, 0.0) ** 0.44 * (section / _SQUARE_MIL) ** 0.725)


def ipc2221_rise(current: ArrayLike, width: ArrayLike, thickness: ArrayLike, internal: bool = False) -> Array:
    """Return the temperature rise of a conductor that carries a given current.

    Args:
        current: Current, either sign [A].
        width: Conductor width [m].
        thickness: Conductor thickness [m].
        internal: Whether the conductor lies inside the board [-].

    Returns:
        Temperature rise [K].

    Source: inverse of :func:`ipc2221_current`.
    Range: as there.
    Accuracy: as there.

    >>> round(float(ipc2221_rise(2.392, 1e-3, 35e-6)), 2)
    10.0
    """
    current, width, thickness = floats(current, width, thickness)
    return _rise(current, width * thickness, internal)


def _rise(current: Array, section: Array, internal: bool) -> Array:
    """Return the temperature rise [K] of a section [m^2]."""
    one_kelvin = _current(section, np.ones_like(section), internal)
    return np.asarray((np.abs(current) / one_kelvin) ** (1.0 / 0.44))


def ipc2221_width(current: ArrayLike, thickness: ArrayLike, rise: ArrayLike, internal: bool = False) -> Array:
    """Return the width at which a current warms a conductor by a given amount.

    Args:
        current: Current, either sign [A].
        thickness: Conductor thickness [m].
        rise: Temperature rise [K].
        internal: Whether the conductor lies inside the board [-].

    Returns:
        Width [m]; zero for no current.

    Source: inverse of :func:`ipc2221_current`.
    Range: as there.
    Accuracy: as there.

    >>> round(float(ipc2221_width(2.392, 35e-6, 10.0)) * 1e3, 3)
    1.0
    """
    current, thickness, rise = floats(current, thickness, rise)
    factor = _INTERNAL if internal else _EXTERNAL
    square_mils = (np.abs(current) / (factor * rise**0.44)) ** (1.0 / 0.725)
    return np.asarray(square_mils * _SQUARE_MIL / thickness)


def ipc2221_in_range(current: ArrayLike, rise: ArrayLike, internal: bool = False) -> Flags:
    """Say whether current and temperature rise lie on the IPC-2221 chart.

    Args:
        current: Current, either sign [A].
        rise: Temperature rise [K].
        internal: Whether the conductor lies inside the board [-].

    Returns:
        True up to 35 A external or 17.5 A internal and up to 100 K; small currents and rises count as in
        range, because the curve is conservative there [-].

    Source: IPC-2221's charts (from memory).
    Range: any.
    Accuracy: exact.

    >>> bool(ipc2221_in_range(36.0, 20.0))
    False
    """
    current, rise = floats(current, rise)
    top = 0.5 * IPC2221_MAX_CURRENT if internal else IPC2221_MAX_CURRENT
    return within(np.abs(current), 0.0, top) & within(rise, 0.0, 100.0)


def barrel_section(drill: ArrayLike, plating: ArrayLike, finished: bool = False) -> Array:
    """Return the copper's cross-section of a plated hole.

    Args:
        drill: Diameter of the drilled hole, or of the finished hole [m].
        plating: Thickness of the plating [m].
        finished: Whether the diameter is that of the finished hole [-].

    Returns:
        Section [m^2].

    Source: geometry.
    Range: plating <= drill/2 when the hole is as drilled; thicker plating fills the hole.
    Accuracy: exact.

    >>> round(float(barrel_section(0.3e-3, 25e-6)) * 1e6, 4)
    0.0216
    """
    drill, plating = floats(drill, plating)
    outer = drill + 2.0 * plating if finished else drill
    inner = np.maximum(outer - 2.0 * plating, 0.0)
    return np.asarray(0.25 * math.pi * (outer**2 - inner**2))


def ipc2221_barrel_current(
    drill: ArrayLike, plating: ArrayLike, rise: ArrayLike, internal: bool = False
) -> Array:
    """Return the current that warms a via's barrel by a given amount, the barrel taken as a conductor.

    Args:
        drill: Diameter of the drilled hole [m].
        plating: Thickness of the plating [m].
        rise: Temperature rise [K].
        internal: Whether the factor of internal conductors is taken [-].

    Returns:
        Current [A].

    Source: IPC-2221's equation on the barrel's section (common practice).
    Range: as :func:`ipc2221_current`.
    Accuracy: conservative; a published test carried four times as much, the trace governing.

    >>> round(float(ipc2221_barrel_current(0.3e-3, 25e-6, 10.0)), 2)
    1.69
    """
    return _current(barrel_section(drill, plating), floats(rise)[0], internal)


def ipc2221_barrel_rise(
    current: ArrayLike, drill: ArrayLike, plating: ArrayLike, internal: bool = False
) -> Array:
    """Return the temperature rise of a via's barrel, taken as a conductor.

    Args:
        current: Current, either sign [A].
        drill: Diameter of the drilled hole [m].
        plating: Thickness of the plating [m].
        internal: Whether the factor of internal conductors is taken [-].

    Returns:
        Temperature rise [K].

    Source: inverse of :func:`ipc2221_barrel_current`.
    Range: as there.
    Accuracy: as there.

    >>> round(float(ipc2221_barrel_rise(1.6862, 0.3e-3, 25e-6)), 1)
    10.0
    """
    return _rise(floats(current)[0], barrel_section(drill, plating), internal)


def dc_resistance(
    length: ArrayLike,
    width: ArrayLike,
    thickness: ArrayLike,
    conductivity: ArrayLike,
    temperature: ArrayLike = 20.0,
) -> Array:
    """Return the resistance of a copper strip at a temperature.

    Args:
        length: Length of the strip [m].
        width: Width of the strip [m].
        thickness: Thickness of the strip [m].
        conductivity: Conductivity at 20 degC [S/m].
        temperature: Temperature of the copper [degC].

    Returns:
        Resistance [ohm].

    Source: definition; copper's coefficient 0.00393 per kelvin about 20 degC (IACS).
    Range: -40 to 150 degC.
    Accuracy: that of the conductivity.

    >>> round(float(dc_resistance(50e-3, 2e-3, 35e-6, 58e6)) * 1e3, 1)
    12.3
    """
    length, width, thickness, conductivity, temperature = floats(
        length, width, thickness, conductivity, temperature
    )
    warm = 1.0 + COPPER_TEMPERATURE_COEFFICIENT * (temperature - 20.0)
    return np.asarray(length / (conductivity * width * thickness) * warm)


def barrel_resistance(
    length: ArrayLike,
    drill: ArrayLike,
    plating: ArrayLike,
    conductivity: ArrayLike,
    temperature: ArrayLike = 20.0,
) -> Array:
    """Return the resistance of a via's barrel at a temperature.

    Args:
        length: Length of the barrel [m].
        drill: Diameter of the drilled hole [m].
        plating: Thickness of the plating [m].
        conductivity: Conductivity at 20 degC [S/m].
        temperature: Temperature of the copper [degC].

    Returns:
        Resistance [ohm].

    Source: definition.
    Range: as :func:`dc_resistance`.
    Accuracy: that of conductivity and plating.

    >>> round(float(barrel_resistance(1.6e-3, 0.3e-3, 25e-6, 58e6)) * 1e3, 3)
    1.277
    """
    return dc_resistance(length, barrel_section(drill, plating), 1.0, conductivity, temperature)


def ipc2221b_clearance(voltage: ArrayLike, condition: str) -> Array:
    """Return the least clearance between conductors for a voltage.

    Voltages between the table's whole numbers belong to the next step (15.5 V to 16-30 V).

    Args:
        voltage: Peak or DC voltage between the conductors, either sign [V].
        condition: Column of the table: B1 internal; B2 external, uncoated, to 3050 m; B3 the same above
            3050 m; B4 external with permanent polymer; A5 external with conformal coating; A6 lead or
            termination, uncoated; A7 the same, coated [-].

    Returns:
        Clearance [m].

    Raises:
        ValueError: The condition is not a column of the table.

    Source: IPC-2221B (2012), table 6-1, from independent public code that cites it. Above 500 V the
        increment per volt is added to the value of the last step.
    Range: any voltage.
    Accuracy: the table's digits.

    >>> round(float(ipc2221b_clearance(600.0, "B1")) * 1e3, 4)
    0.5
    """
    if condition not in _CLEARANCES_MM:
        raise ValueError(f"condition {condition!r} is not one of {', '.join(CLEARANCE_CONDITIONS)}")
    volts = np.abs(floats(voltage)[0])
    column = np.array(_CLEARANCES_MM[condition])
    step = np.minimum(np.searchsorted(_STEPS_V, volts), len(column) - 1)
    return np.asarray((column[step] + _MM_PER_VOLT[condition] * np.maximum(volts - _STEPS_V[-1], 0.0)) * 1e-3)


class PowerResult(NamedTuple):
    """Average power that a line can carry, with the limits of a factor of two either way.

    Attributes:
        power: Average power of the formula [W].
        low: Half of it [W].
        high: Twice it [W].
        rise_per_watt: Temperature rise per watt carried [K/W].
    """

    power: Array
    low: Array
    high: Array
    rise_per_watt: Array


def average_power(
    frequency: ArrayLike,
    height: ArrayLike,
    width: ArrayLike,
    z0: ArrayLike,
    ee: ArrayLike,
    conductor: ArrayLike,
    dielectric: ArrayLike,
    thermal_conductivity: ArrayLike,
    rise: ArrayLike,
) -> PowerResult:
    """Return the average power that warms a matched microstrip line by a given amount.

    Args:
        frequency: Frequency [Hz].
        height: Substrate height [m].
        width: Strip width [m].
        z0: Characteristic impedance [ohm].
        ee: Effective permittivity [-].
        conductor: Conductor attenuation [Np/m].
        dielectric: Dielectric attenuation [Np/m].
        thermal_conductivity: Thermal conductivity of the substrate [W/(m K)].
        rise: Temperature rise allowed [K].

    Returns:
        PowerResult: power [W], half and twice it [W], rise per watt [K/W].

    Source: I. J. Bahl and K. C. Gupta, "Average power-handling capability of microstrip lines", IEE J.
        Microwaves, Optics and Acoustics 3 (1979), pp. 1-4 (from memory, derivation checked).
    Range: heat leaves through the substrate only, ground plane at ambient temperature.
    Accuracy: methods differ by 1.5 to 3 times: a warning, not a limit, hence low and high.

    >>> power = average_power(2e9, 0.635e-3, 0.617e-3, 50.0, 6.58, 0.39, 0.03, 30.0, 75.0).power
    >>> bool(8e3 < power < 14e3)
    True
    """
    frequency, height, width, z0, ee = floats(frequency, height, width, z0, ee)
    conductor, dielectric, conductivity, rise = floats(conductor, dielectric, thermal_conductivity, rise)
    wide = ETA0 * height / (z0 * np.sqrt(ee))
    crossover = z0 / (2.0 * MU0 * height)
    wide_f = width + (wide - width) / (1.0 + frequency / crossover)
    per_watt = 2.0 * height / conductivity * (conductor / wide + dielectric / (2.0 * wide_f))
    power = rise / per_watt
    return PowerResult(power, 0.5 * power, 2.0 * power, per_watt)


def peak_voltage(power: ArrayLike, z0: ArrayLike, reflection: ArrayLike = 0.0) -> Array:
    """Return the largest peak voltage on a line with a standing wave.

    Args:
        power: Forward power [W].
        z0: Characteristic impedance [ohm].
        reflection: Magnitude of the reflection coefficient [-].

    Returns:
        Peak voltage [V].

    Source: definition, sqrt(2 P Z0)(1 + |Gamma|).
    Range: any.
    Accuracy: exact.

    >>> float(peak_voltage(100.0, 50.0))
    100.0
    """
    power, z0, reflection = floats(power, z0, reflection)
    return np.asarray(np.sqrt(2.0 * power * z0) * (1.0 + np.abs(reflection)))
