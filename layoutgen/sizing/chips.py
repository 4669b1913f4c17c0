"""Chip parts: bodies by case code and the land patterns that IPC-7351's equations give for them."""

from __future__ import annotations

import math
from dataclasses import dataclass

__all__ = ["BODIES", "FILLETS", "Body", "Fillet", "LandPattern", "courtyard_excess", "land_pattern"]

MM = 1e-3

FABRICATION = 0.05 * MM
PLACEMENT = 0.05 * MM
"""Tolerances F and P of the equations [m]; the published codes use 0.025 to 0.1 mm, sources differ."""


@dataclass(frozen=True, slots=True)
class Body:
    """A chip's body: length, width and terminal as (least, most) [m]."""

    length: tuple[float, float]
    width: tuple[float, float]
    terminal: tuple[float, float]


def _body(
    length: float, dl: float, width: float, below: float, above: float, terminal: float, dt: float
) -> Body:
    """Return a body from nominal sizes and tolerances [mm]."""
    return Body(
        ((length - dl) * MM, (length + dl) * MM),
        ((width - below) * MM, (width + above) * MM),
        ((terminal - dt) * MM, (terminal + dt) * MM),
    )


BODIES: dict[str, Body] = {
    # 0201 to 1206: agree in three resistor datasheets; capacitors have the same nominal sizes
    "0201": _body(0.60, 0.03, 0.30, 0.03, 0.03, 0.10, 0.05),
    "0402": _body(1.00, 0.10, 0.50, 0.05, 0.05, 0.20, 0.10),
    "0603": _body(1.60, 0.10, 0.80, 0.10, 0.15, 0.30, 0.20),
    "0805": _body(2.00, 0.15, 1.25, 0.10, 0.15, 0.40, 0.20),
    "1206": _body(3.20, 0.20, 1.60, 0.15, 0.15, 0.50, 0.20),
    # from memory
    "1210": _body(3.20, 0.20, 2.50, 0.20, 0.20, 0.50, 0.25),
    "2010": _body(5.00, 0.20, 2.50, 0.15, 0.15, 0.60, 0.25),
    "2512": _body(6.35, 0.20, 3.15, 0.20, 0.20, 0.60, 0.25),
}


@dataclass(frozen=True, slots=True)
class Fillet:
    """Solder fillet goals toe, heel, side, and courtyard excess [m]."""

    toe: float
    heel: float
    side: float
    courtyard: float


FILLETS: dict[tuple[bool, str], Fillet] = {
    # (0603 or larger, density); nominal values agree with a change record that quotes IPC-7351B, the rest
    # from memory
    (True, "most"): Fillet(0.55 * MM, 0.0, 0.05 * MM, 0.5 * MM),
    (True, "nominal"): Fillet(0.35 * MM, 0.0, 0.0, 0.25 * MM),
    (True, "least"): Fillet(0.15 * MM, 0.0, -0.05 * MM, 0.1 * MM),
    (False, "most"): Fillet(0.30 * MM, 0.0, 0.05 * MM, 0.20 * MM),
    (False, "nominal"): Fillet(0.20 * MM, 0.0, 0.0, 0.15 * MM),
    (False, "least"): Fillet(0.10 * MM, 0.0, -0.05 * MM, 0.10 * MM),
}


@dataclass(frozen=True, slots=True)
class LandPattern:
    """A chip's lands: outer distance Z, inner distance G, width X across the part [m]."""

    z: float
    g: float
    x: float

    @property
    def pad_length(self) -> float:
        """Length of a pad along the part [m]."""
        return 0.5 * (self.z - self.g)

    @property
    def centre(self) -> float:
        """Distance of a pad's middle from the part's middle [m]."""
        return 0.25 * (self.z + self.g)


def land_pattern(
    case: str,
    density: str = "nominal",
    fabrication: float = FABRICATION,
    placement: float = PLACEMENT,
    rounded: bool = True,
) -> LandPattern:
    """Return the land pattern of a chip.

    Args:
        case: Inch code, a key of ``BODIES``.
        density: ``most``, ``nominal`` or ``least``.
        fabrication: Fabrication tolerance F [m].
        placement: Placement tolerance P [m].
        rounded: Whether Z, G and X are rounded to 0.05 mm (0.02 mm below 0603).

    Source: IPC-7351's equations from independent public codes that agree; the largest gap between the
        terminals with the root-sum-square tolerance (from memory). The standard's own text was not read.

    >>> pattern = land_pattern("0603")
    >>> [round(value * 1e3, 3) for value in (pattern.z, pattern.g, pattern.x)]
    [2.4, 0.7, 0.95]
    """
    body, large = BODIES[case], is_large(case)
    goal = FILLETS[large, density]
    (l_min, l_max), (w_min, w_max), (t_min, t_max) = body.length, body.width, body.terminal
    c_length, c_width, c_terminal = l_max - l_min, w_max - w_min, t_max - t_min
    c_gap = math.hypot(c_length, c_terminal, c_terminal)
    gap_max = (l_max - 2.0 * t_min) - 0.5 * ((c_length + 2.0 * c_terminal) - c_gap)
    z = l_min + 2.0 * goal.toe + math.hypot(c_length, fabrication, placement)
    g = gap_max - 2.0 * goal.heel - math.hypot(c_gap, fabrication, placement)
    x = w_min + 2.0 * goal.side + math.hypot(c_width, fabrication, placement)
    if not rounded:
        return LandPattern(z, g, x)
    step = 0.05 * MM if large else 0.02 * MM
    return LandPattern(*(round(value / step) * step for value in (z, g, x)))


def is_large(case: str) -> bool:
    """Tell whether a chip is a 0603 or larger, for which IPC-7351 has its own fillet goals."""
    return case not in ("0201", "0402")


def courtyard_excess(case: str | None, density: str) -> float:
    """Return the courtyard excess [m] of a chip; a part with a footprint has that of the large ones."""
    return FILLETS[case is None or is_large(case), density].courtyard
