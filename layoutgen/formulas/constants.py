"""Physical constants in SI units, the only copy in the package.

The magnetic and electric constants follow from the exact speed of light and ``MU0 = 4 pi 1e-7``; the
revised SI moved ``MU0`` by 5e-10 of its value, far below any accuracy stated here.
"""

from __future__ import annotations

import math

__all__ = ["C0", "COPPER_TEMPERATURE_COEFFICIENT", "EPS0", "ETA0", "MU0"]

C0 = 299_792_458.0
"""Speed of light in vacuum [m/s]."""

MU0 = 4e-7 * math.pi
"""Magnetic constant [H/m]."""

EPS0 = 1.0 / (MU0 * C0**2)
"""Electric constant [F/m]."""

ETA0 = MU0 * C0
"""Wave impedance of vacuum [ohm]."""

COPPER_TEMPERATURE_COEFFICIENT = 0.00393
"""Relative rise of copper's resistivity per kelvin, about 20 degC [1/K]."""
