"""Boards off their nominal values, many at once: what one batch of a tolerance analysis works out.

In: a drawing, its board, what varies and by how much. Out: the as-drawn response of each sample. One network
is built for a whole batch and solved in one call; everything here can be sent to another process.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import NamedTuple

import numpy as np

from layoutgen.reading import CircuitFile
from layoutgen.response.chain import ComplexArray, FloatArray
from layoutgen.response.drawn import Drawing, DrawnBoard
from layoutgen.response.limits import Limit
from layoutgen.response.medium import Medium
from layoutgen.response.solve import solve
from layoutgen.response.touchstone import PartData

__all__ = ["ETCHING", "HEIGHT", "PERMITTIVITY", "Found", "Job", "spreads"]

PERMITTIVITY, HEIGHT, ETCHING = "relative_permittivity", "height", "width"
"""Names of what varies for the whole board, as in ``[tolerance]``; parts go by their own."""


def spreads(file: CircuitFile, data: Mapping[str, PartData]) -> dict[str, float]:
    """Return what varies with its plus-minus limit: board quantities in their units, values as a share [-].

    Parts with measured data, and those without a value, do not vary.
    """
    given = file.tolerance
    if given is None:
        return {}
    board = {PERMITTIVITY: given.relative_permittivity, HEIGHT: given.height, ETCHING: given.width}
    valued = (name for name, part in file.parts.items() if part.value is not None and name not in data)
    return {
        name: limit for name, limit in (board | dict.fromkeys(valued, given.value)).items() if limit > 0.0
    }


class Found(NamedTuple):
    """What a batch of samples gave.

    ``measured`` (S, L) [-] are the worst magnitudes for each limit; ``off`` (S,) [-] the largest change from
    the nominal board in the band; ``least`` and ``most`` (F, N, N) [-] the range of all magnitudes.
    """

    measured: FloatArray
    off: FloatArray
    least: FloatArray
    most: FloatArray


@dataclass(frozen=True, slots=True, eq=False)
class Job:
    """All that a batch needs: the drawing, the nominal board at (F,) frequencies, data, what varies, limits.

    ``spread`` holds the plus-minus limits by name; ``wanted`` and ``nominal`` are (F, N, N) [-].
    """

    drawing: Drawing
    medium: Medium
    data: Mapping[str, PartData]
    spread: Mapping[str, float]
    limits: tuple[Limit, ...]
    wanted: ComplexArray
    nominal: ComplexArray

    def responses(self, shares: FloatArray) -> ComplexArray:
        """Return the responses (S, F, N, N) [-] of samples.

        Args:
            shares: Where each sample lies within the limits, (S, P) [-], -1 to 1, in the order of ``spread``.
        """
        off = {name: limit * shares[:, k, None] for k, (name, limit) in enumerate(self.spread.items())}
        medium = replace(
            self.medium,
            er=np.maximum(1.0, self.medium.er + off.pop(PERMITTIVITY, np.zeros((len(shares), 1)))),
            height=self.medium.height + off.pop(HEIGHT, 0.0),
            width_change=self.medium.width_change + off.pop(ETCHING, 0.0),
        )
        scales = {name: 1.0 + share for name, share in off.items()}
        s = solve(DrawnBoard(self.drawing, medium, self.data, scales).network())
        return s.reshape(len(shares), -1, *s.shape[1:])

    def run(self, shares: FloatArray) -> Found:
        """Work out a batch of samples (S, P) [-]."""
        s = self.responses(shares)
        sizes = np.abs(s)
        measured = [limit.measured(s, self.wanted) for limit in self.limits]
        return Found(
            measured=np.stack(measured, axis=1),
            off=np.asarray(np.max(np.abs(s - self.nominal), axis=(1, 2, 3))),
            least=np.min(sizes, axis=0),
            most=np.max(sizes, axis=0),
        )
