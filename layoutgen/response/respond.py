"""The stage's one public function: both responses of an artwork."""

from __future__ import annotations

from pathlib import Path
from typing import TypeVar

import numpy as np
import numpy.typing as npt

from layoutgen.artwork import Artwork
from layoutgen.response.drawn import drawn_network
from layoutgen.response.parts import response_ports
from layoutgen.response.records import Response
from layoutgen.response.solve import solve
from layoutgen.response.sweep import plan_sweep
from layoutgen.response.trace import trace_copper
from layoutgen.response.wanted import wanted_network

__all__ = ["respond"]

_CHUNK = 2048  # frequencies of one network: bounds the memory of long sweeps

ArrayType = TypeVar("ArrayType", bound=npt.NDArray[np.generic])


def respond(artwork: Artwork, folder: Path | None = None) -> Response:
    """Return the wanted and the as-drawn S-parameters of an artwork.

    Args:
        artwork: The drawing, with everything it was made from.
        folder: What the paths of data files start from; None: the folder of the circuit file.

    Raises:
        WrongInputError: Data files that cannot be used or do not cover the band, all in one go.
    """
    file = artwork.placement.sized.circuit.file
    sweep = plan_sweep(file, Path(file.file).parent if folder is None else folder)
    frequencies = np.concatenate([sweep.frequencies, sweep.spots])
    copper = trace_copper(artwork)
    parts = [frequencies[start : start + _CHUNK] for start in range(0, frequencies.size, _CHUNK)]
    wanted = np.concatenate([solve(wanted_network(artwork.placement, f, sweep.data)) for f in parts])
    drawn = np.concatenate([solve(drawn_network(artwork, f, sweep.data, copper=copper)) for f in parts])
    ports = response_ports(file)
    count = sweep.frequencies.size
    return Response(
        ports=tuple(name for name, _ in ports),
        impedances=tuple(impedance for _, impedance in ports),
        frequencies=_frozen(sweep.frequencies),
        wanted=_frozen(wanted[:count]),
        as_drawn=_frozen(drawn[:count]),
        notes=(*sweep.notes, *copper.notes),
        spots=_frozen(sweep.spots),
        wanted_at_spots=_frozen(wanted[count:]),
        as_drawn_at_spots=_frozen(drawn[count:]),
    )


def _frozen(values: ArrayType) -> ArrayType:
    """Return an array that can no longer be written to."""
    values.setflags(write=False)
    return values
