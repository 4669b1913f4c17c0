"""The stage's one public function: both responses of an artwork."""

from __future__ import annotations

from pathlib import Path
from typing import TypeVar

import numpy as np
import numpy.typing as npt

from layoutgen.artwork import Artwork
from layoutgen.response.copper import Copper
from layoutgen.response.device import Board, device_view, passive_data
from layoutgen.response.doubts import find_doubts
from layoutgen.response.drawn import drawn_network
from layoutgen.response.figures import correction_figures
from layoutgen.response.holders import MANY_PORTS
from layoutgen.response.parts import response_ports, terminals
from layoutgen.response.records import CLOSE_ENOUGH, NOTE_RULE, Correction, DeviceView, Response
from layoutgen.response.solve import solve
from layoutgen.response.sweep import Sweep, plan_sweep
from layoutgen.response.threads import one_thread
from layoutgen.response.trace import trace_copper
from layoutgen.response.wanted import wanted_network

__all__ = ["respond"]

_CHUNK = 2048  # frequencies of one network: bounds the memory of long sweeps

ArrayType = TypeVar("ArrayType", bound=npt.NDArray[np.generic])


@one_thread()
def respond(artwork: Artwork, folder: Path | None = None) -> Response:
    """Return the wanted and the as-drawn S-parameters of an artwork.

    Args:
        artwork: The drawing, with everything it was made from.
        folder: What the paths of data files start from; None: the folder of the circuit file.

    Raises:
        WrongInputError: Data files that cannot be used or do not cover the band, all in one go.
    """
    file = artwork.placement.sized.circuit.file
    sweep = plan_sweep(file, folder)
    frequencies = np.concatenate([sweep.frequencies, sweep.spots])
    copper = trace_copper(artwork)
    parts = [frequencies[start : start + _CHUNK] for start in range(0, frequencies.size, _CHUNK)]
    wanted = np.concatenate([solve(wanted_network(artwork.placement, f, sweep.data)) for f in parts])
    drawn = np.concatenate([solve(drawn_network(artwork, f, sweep.data, copper=copper)) for f in parts])
    ports = response_ports(file)
    count = sweep.frequencies.size
    correction = correction_figures(artwork, sweep.data, copper)
    return Response(
        ports=tuple(name for name, _ in ports),
        impedances=tuple(impedance for _, impedance in ports),
        frequencies=_frozen(sweep.frequencies),
        wanted=_frozen(wanted[:count]),
        as_drawn=_frozen(drawn[:count]),
        notes=(*sweep.notes, *copper.notes, *_remainder(correction, len(ports))),
        spots=_frozen(sweep.spots),
        wanted_at_spots=_frozen(wanted[count:]),
        as_drawn_at_spots=_frozen(drawn[count:]),
        correction=correction,
        device=_device(artwork, sweep, copper),
        doubts=find_doubts(artwork, copper),
    )


def _device(artwork: Artwork, sweep: Sweep, copper: Copper) -> DeviceView | None:
    """Return what the transistors and feeds of an artwork see."""
    file = artwork.placement.sized.circuit.file
    data = passive_data(file, sweep.data)
    nets = {name: port.net for name, port in file.ports.items()}
    for name, part in file.parts.items():
        nets |= {f"{name}.{pin}": net for pin, net in terminals(part)}
    wanted = Board(lambda f: wanted_network(artwork.placement, f, data), nets)
    drawn = Board(
        lambda f: drawn_network(artwork, f, data, copper=copper), {**copper.ports, **copper.terminals}
    )
    return device_view(file, sweep.data, wanted, drawn, sweep.frequencies)


def _remainder(correction: Correction, ports: int) -> tuple[tuple[str, str, str], ...]:
    """Return a note when the band does not come near enough to the schematic, naming what holds it."""
    if correction.after <= CLOSE_ENOUGH:
        return ()
    text = f"as drawn and wanted differ by up to {correction.after:.3f} in the band, without losses"
    if correction.reachable <= CLOSE_ENOUGH:
        return ((NOTE_RULE, "", f"{text}; other lengths would bring that to {correction.reachable:.3f}"),)
    if not correction.holders:
        few = ports <= MANY_PORTS
        held = "no single element holds it" if few else "what holds it is not known for so many ports"
        return ((NOTE_RULE, "", f"{text}; {held}"),)
    held = "; ".join(f"{h.without:.3f} without {h.cause}" for h in correction.holders[:1])
    return ((NOTE_RULE, correction.holders[0].element, f"{text}; {held}"),)


def _frozen(values: ArrayType) -> ArrayType:
    """Return an array that can no longer be written to."""
    values.setflags(write=False)
    return values
