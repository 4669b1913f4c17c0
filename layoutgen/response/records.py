"""What the response stage hands on: S-parameters of what was wanted and of what was drawn."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt

__all__ = ["NOTE_RULE", "Response"]

NOTE_RULE = "response"
"""The name that the response's notes stand under in the list of findings."""


def _no_spots() -> npt.NDArray[np.float64]:
    """Return no frequencies."""
    return np.zeros(0)


def _no_matrices() -> npt.NDArray[np.complex128]:
    """Return no S-parameters."""
    return np.zeros((0, 0, 0), dtype=np.complex128)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Response:
    """S-parameters between the ports of the response, over the sweep.

    ``ports`` are names (RF ports in file order, then terminations as ``Q1.gate``); ``impedances`` [ohm] are
    the ports' own, to which ``wanted`` and ``as_drawn`` (F, N, N) [-] refer, as power waves; ``frequencies``
    (F,) [Hz]; ``spots`` (3,) [Hz] are the lower band edge, the design frequency and the upper band edge,
    with ``wanted_at_spots`` and ``as_drawn_at_spots`` (3, N, N) [-]; ``notes`` are assumptions for the
    findings list: (rule, element, text). Arrays are read-only.
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
