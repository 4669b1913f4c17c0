"""What the sizing stage hands on: every width, electrical length, correction and land, in SI units."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from layoutgen.circuit import Circuit

__all__ = ["BudgetEntry", "Land", "Lands", "SizedCircuit", "SizedLine", "SizedPair", "SizedRadial"]


@dataclass(frozen=True, slots=True)
class BudgetEntry:
    """One entry of a line's length budget: electrical angle [rad] by its cause and place.

    ``cause`` is one of line, bend, step, tee, cross, open_end, pad, via, port, response_correction; ``at``
    names the net, or ``bend N``.
    """

    cause: str
    angle: float
    at: str


@dataclass(frozen=True, slots=True, kw_only=True)
class SizedLine:
    """One line's cross-section and what it is worth, before it is placed.

    ``width`` is the finished copper's [m]; ``impedance`` [ohm] is that of the drawn cross-section, and
    ``asked_impedance`` what the file asked for (None when it gave the width); ``angle`` [rad] is the
    asked angle (None for lines by length until placed); ``length`` [m] the asked centre-line length (None
    by angle, 0.0 stands for free when ``free``); ``beta`` [rad/m] at the design frequency; ``pour_gap``
    [m] is the distance the pour is drawn at, ``gap_left`` and ``gap_right`` [m] what the sizing assumed
    (infinity: none); ``loss`` [dB/m]; ``spread`` [-] the relative impedance difference of the second,
    independent model; ``rf`` is False for a line that joins DC nets only and of which nothing of RF is asked;
    ``current`` [A] is a magnitude, ``temperature_rise`` [K] by IPC-2221; ``flags`` say which formulas are
    used outside their range. ``mitre_percent`` [%] is that of a right-angle bend, already reduced where the
    neck it leaves would be narrower than the current asks for, and ``bend_length`` [m] what such a bend adds.
    """

    name: str
    nets: tuple[str, ...]
    width: float
    impedance: float
    asked_impedance: float | None
    angle: float | None
    length: float | None
    free: bool
    rf: bool
    effective_permittivity: float
    beta: float
    pour_gap: float
    gap_left: float
    gap_right: float
    mitre_percent: float
    bend_length: float
    current: float
    temperature_rise: float
    loss: float
    spread: float
    flags: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class SizedPair:
    """A coupled pair's cross-section: width and gap [m], mode impedances [ohm], permittivities [-]."""

    name: str
    nets: tuple[str, ...]
    width: float
    gap: float
    even_impedance: float
    odd_impedance: float
    permittivity_even: float
    permittivity_odd: float
    angle: float | None
    length: float | None
    beta: float
    pour_gap: float
    currents: tuple[float, float]
    flags: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class SizedRadial:
    """A radial stub: sector [rad] and radii [m], and the pour's distance [m]."""

    name: str
    nets: tuple[str, ...]
    sector: float
    inner_radius: float
    outer_radius: float
    pour_gap: float
    flags: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Land:
    """One pad in its part's own frame at heading east: middle and size [m], outgoing heading [deg].

    ``heading`` is where a line leaves the pad; ``ground`` is None, ``flange`` or ``vias``; a pin that meets
    the carrier has size zero. ``thermal`` [K/W] is the target for vias under the pad.
    """

    pin: str
    net: str
    x: float
    y: float
    width: float
    height: float
    heading: float
    ground: str | None = None
    thermal: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Lands:
    """A part's footprint in its own frame: pads, body outline and courtyard [m], holes, cut-out.

    ``outline`` and ``courtyard`` are (x0, y0, x1, y1); ``cutout`` likewise or None; ``holes`` are
    (x, y, diameter, plated).
    """

    part: str
    pads: tuple[Land, ...]
    outline: tuple[float, float, float, float]
    courtyard: tuple[float, float, float, float]
    cutout: tuple[float, float, float, float] | None = None
    holes: tuple[tuple[float, float, float, bool], ...] = ()

    def pad(self, pin: str) -> Land:
        """Return the pad of one pin."""
        return next(land for land in self.pads if land.pin == pin)


@dataclass(frozen=True, slots=True, kw_only=True)
class SizedCircuit:
    """The circuit with every size that follows from formulas and rules alone.

    ``corrections`` are response corrections by line or pair [rad]: what the rest of the drawn circuit is
    taken to add to a line given by angle, so that its copper is drawn shorter by it (longer when negative).
    """

    circuit: Circuit
    lines: Mapping[str, SizedLine]
    pairs: Mapping[str, SizedPair]
    radials: Mapping[str, SizedRadial]
    lands: Mapping[str, Lands]
    default_pour_gap: float
    notes: tuple[str, ...] = ()
    corrections: Mapping[str, float] = field(default_factory=dict)
