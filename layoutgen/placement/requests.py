"""Other requests: a sized circuit with another board size, other hints, other angles, all else as it was."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import replace

from layoutgen.reading import CircuitFile, Hint
from layoutgen.sizing import SizedCircuit

__all__ = ["as_drawn_might_be", "with_angles", "with_free_line", "with_hint", "with_port_order", "with_size"]

_UNLIKE = 3e-3  # step by which the pour as drawn may make one line's wavelength unlike the next one's [-]


def _with_file(sized: SizedCircuit, file: CircuitFile) -> SizedCircuit:
    return replace(sized, circuit=replace(sized.circuit, file=file))


def with_size(sized: SizedCircuit, width: int, height: int) -> SizedCircuit:
    """Return the circuit on a board of a given size [nm]."""
    file = sized.circuit.file
    board = file.board.model_copy(update={"size": (width * 1e-9, height * 1e-9)})
    return _with_file(sized, file.model_copy(update={"board": board}))


def with_hint(sized: SizedCircuit, name: str, hint: Hint) -> SizedCircuit:
    """Return the circuit with another hint for one element."""
    file = sized.circuit.file
    if file.layout is None:
        return sized
    layout = file.layout.model_copy(update={"hints": {**file.layout.hints, name: hint}})
    return _with_file(sized, file.model_copy(update={"layout": layout}))


def with_port_order(sized: SizedCircuit, names: Sequence[str]) -> SizedCircuit:
    """Return the circuit with its ports in another order."""
    file = sized.circuit.file
    return _with_file(sized, file.model_copy(update={"ports": {name: file.ports[name] for name in names}}))


def with_angles(sized: SizedCircuit, degrees: Mapping[str, float]) -> SizedCircuit:
    """Return the circuit with other angles [deg] asked of some lines."""
    lines, records = dict(sized.lines), dict(sized.circuit.file.lines)
    for name, angle in degrees.items():
        lines[name] = replace(lines[name], angle=math.radians(angle))
        records[name] = records[name].model_copy(update={"angle": math.radians(angle)})
    changed = _with_file(sized, sized.circuit.file.model_copy(update={"lines": records}))
    return replace(changed, lines=lines)


def with_free_line(sized: SizedCircuit, name: str) -> SizedCircuit:
    """Return the circuit with the length of one line left to the placer."""
    file = sized.circuit.file
    record = file.lines[name].model_copy(update={"length": "free", "angle": None})
    line = replace(sized.lines[name], free=True, length=0.0, angle=None)
    changed = _with_file(sized, file.model_copy(update={"lines": {**file.lines, name: record}}))
    return replace(changed, lines={**sized.lines, name: line})


def as_drawn_might_be(sized: SizedCircuit) -> SizedCircuit:
    """Return the circuit with phase constants a little unlike, as the pour of a drawing makes them."""
    lines = {
        name: replace(line, beta=line.beta * (1.0 + _UNLIKE * (k % 3)))
        for k, (name, line) in enumerate(sized.lines.items())
    }
    return replace(sized, lines=lines)
