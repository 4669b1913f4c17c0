"""What the response stage hands on: S-parameters of what was wanted and of what was drawn."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt

__all__ = [
    "CLOSE_ENOUGH",
    "NOTE_RULE",
    "Correction",
    "DeviceView",
    "Doubt",
    "FeedView",
    "Holder",
    "PinView",
    "Response",
    "Stability",
]

CLOSE_ENOUGH = 0.02
"""Largest |as drawn - wanted| in the band up to which the drawing counts as the schematic [-]."""

_FEW = 3  # names in one sentence

NOTE_RULE = "response"
"""The name that the response's notes stand under in the list of findings."""


def _no_spots() -> npt.NDArray[np.float64]:
    """Return no frequencies."""
    return np.zeros(0)


def _no_matrices() -> npt.NDArray[np.complex128]:
    """Return no S-parameters."""
    return np.zeros((0, 0, 0), dtype=np.complex128)


@dataclass(frozen=True, slots=True, kw_only=True)
class Holder:
    """What holds the difference: an element, what it adds, and how large it were ``without`` [-].

    ``alike`` are further elements of which the same is meant: its mirror images, or all of its kind.
    """

    element: str
    what: str
    without: float
    alike: tuple[str, ...] = ()

    @property
    def cause(self) -> str:
        """What is added, for a sentence on the element."""
        if len(self.alike) > _FEW:
            return f"{self.what}, and those of {len(self.alike)} more"
        return f"{self.what}, and those of {', '.join(self.alike)}" if self.alike else self.what


@dataclass(frozen=True, slots=True, kw_only=True)
class Correction:
    """What adjusting the lengths has done for the band.

    ``after`` is the largest |as drawn - wanted| of all S-parameters in the band, without losses [-], and
    ``before`` what it would be were the same drawing's lengths not adjusted, and ``unallowed`` what it would
    be were they just the schematic's, with nothing allowed for at ends and bends. ``losses`` is the largest
    change of an S-parameter in the band by the losses of lines and vias [-]; ``angles`` are the budget
    entries ``response_correction`` by line or pair [rad]. ``reachable`` is ``after`` when that is at most
    ``CLOSE_ENOUGH``, else what the best lengths would leave [-]; when that is still above, ``holders`` name
    what holds it, the strongest first.
    """

    before: float
    after: float
    losses: float
    angles: Mapping[str, float]
    reachable: float
    holders: tuple[Holder, ...] = ()
    unallowed: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class PinView:
    """What a transistor pin sees looking into the board, at the view's frequencies [ohm].

    ``pin`` is as ``Q1.gate``; ``device`` is the device's own impedance by the circuit file, None where it is
    given by data: a board that shows its conjugate is matched.
    """

    pin: str
    device: complex | None
    wanted: tuple[complex, ...]
    as_drawn: tuple[complex, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class FeedView:
    """How nearly open a bias feed looks: the net it leaves, its DC ports, the impedance looking in [ohm]."""

    net: str
    ports: tuple[str, ...]
    wanted: tuple[complex, ...]
    as_drawn: tuple[complex, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Stability:
    """A transistor's stability where it is least within the sweep: K and mu [-] at a frequency [Hz].

    ``unstable`` are the lowest and highest frequency of the sweep with mu of at most 1 [Hz], None for none.
    """

    part: str
    k: float
    mu: float
    at: float
    unstable: tuple[float, float] | None


@dataclass(frozen=True, slots=True, kw_only=True)
class DeviceView:
    """What transistors and feeds see: at the band edges, the design frequency and its second harmonic [Hz].

    ``frequencies`` are the lower band edge, the design frequency, the upper band edge, and the second
    harmonic of the design frequency unless measured data end before it.
    """

    frequencies: tuple[float, ...]
    pins: tuple[PinView, ...]
    feeds: tuple[FeedView, ...]
    stability: tuple[Stability, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Doubt:
    """Where the circuit model is not to be believed: a place [nm] on the board or None, elements, reason."""

    at: tuple[int, int] | None
    items: tuple[str, ...]
    reason: str


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Response:
    """S-parameters between the ports of the response, over the sweep.

    ``ports`` are names (RF ports in file order, then terminations as ``Q1.gate``); ``impedances`` [ohm] are
    the ports' own, to which ``wanted`` and ``as_drawn`` (F, N, N) [-] refer, as power waves; ``frequencies``
    (F,) [Hz]; ``spots`` (3,) [Hz] are the lower band edge, the design frequency and the upper band edge,
    with ``wanted_at_spots`` and ``as_drawn_at_spots`` (3, N, N) [-]; ``notes`` are assumptions for the
    findings list: (rule, element, text). ``correction`` says how near the band comes, ``device`` what
    transistors and feeds see (None without any), ``doubts`` where a field solution is worth its time.
    Arrays are read-only.
    """

    ports: tuple[str, ...]
    impedances: tuple[complex, ...]
    frequencies: npt.NDArray[np.float64]
    wanted: npt.NDArray[np.complex128]
    as_drawn: npt.NDArray[np.complex128]
    notes: tuple[tuple[str, str, str], ...] = ()
    spots: npt.NDArray[np.float64] = field(default_factory=_no_spots)
    wanted_at_spots: npt.NDArray[np.complex128] = field(default_factory=_no_matrices)
    as_drawn_at_spots: npt.NDArray[np.complex128] = field(default_factory=_no_matrices)
    correction: Correction | None = None
    device: DeviceView | None = None
    doubts: tuple[Doubt, ...] = ()
