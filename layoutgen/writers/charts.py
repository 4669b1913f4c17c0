"""The traces of a response that are worth showing, for plots and tables: reflections, transmissions."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from layoutgen.response import Response

__all__ = ["Groups", "Trace", "decibels", "match_traces", "trace_groups", "transmission_traces"]

_FLOOR_DB = -60.0

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Trace:
    """One S-parameter over the sweep: row, column, its name, wanted and as-drawn level (F,) [dB]."""

    row: int
    column: int
    name: str
    wanted: Floats
    as_drawn: Floats


def decibels(s: npt.ArrayLike) -> Floats:
    """Return levels [dB] of S-parameters [-], never below -200 dB."""
    return np.asarray(20.0 * np.log10(np.maximum(np.abs(s), 1e-10)), dtype=np.float64)


Groups = list[tuple[str, Sequence[Trace]]]
"""Traces that are plotted together, with what they are."""


def trace_groups(response: Response) -> Groups:
    """Return the reflections, and the transmissions where there are any."""
    groups: Groups = [("Reflection", match_traces(response))]
    through = transmission_traces(response)
    return [*groups, ("Transmission", through)] if through else groups


def match_traces(response: Response) -> list[Trace]:
    """Return the reflection at each port."""
    return [_trace(response, k, k) for k in range(len(response.ports))]


def transmission_traces(response: Response) -> list[Trace]:
    """Return the transmission between each pair of ports that sees more than -60 dB somewhere."""
    count = len(response.ports)
    traces = [_trace(response, row, column) for column in range(count) for row in range(column + 1, count)]
    return [t for t in traces if max(t.wanted.max(), t.as_drawn.max()) > _FLOOR_DB]


def _trace(response: Response, row: int, column: int) -> Trace:
    name = response.ports[row] if row == column else f"{response.ports[column]} to {response.ports[row]}"
    wanted, drawn = decibels(response.wanted[:, row, column]), decibels(response.as_drawn[:, row, column])
    return Trace(row, column, name, wanted, drawn)
