"""Other requests: a sized circuit with another board size, other hints, other angles, all else as it was."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import replace

from layoutgen.circuit import build_circuit
from layoutgen.errors import LayoutgenError
from layoutgen.placement.chains import holds_chain
from layoutgen.reading import CircuitFile, Hint, SpacingRules
from layoutgen.sizing import SizedCircuit

__all__ = [
    "as_drawn_might_be",
    "with_angles",
    "with_free_line",
    "with_hint",
    "with_port_order",
    "with_size",
    "with_spacing",
    "with_spine_to",
]

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


def with_spacing(sized: SizedCircuit, heights: float) -> SizedCircuit:
    """Return the circuit with another rule for the distance of its lines [substrate heights]."""
    rules = sized.circuit.rules
    table = (rules.spacing or SpacingRules()).model_copy(update={"min_line_heights": heights})
    changed = rules.model_copy(update={"spacing": table})
    return replace(sized, circuit=replace(sized.circuit, rules=changed))


def with_spine_to(sized: SizedCircuit, port: str) -> SizedCircuit:
    """Return the circuit whose straight path leads from its first RF port to another one than the next."""
    ports = sized.circuit.file.ports
    first = next(name for name in ports if ports[name].kind == "rf")
    order = [first, port, *(name for name in ports if name not in (first, port))]
    spine = with_port_order(sized, order).circuit.spine
    return replace(sized, circuit=replace(sized.circuit, spine=spine))


def with_port_order(sized: SizedCircuit, names: Sequence[str]) -> SizedCircuit:
    """Return the circuit with its ports in another order, and the straight path that follows from it.

    Where nets are chains of junctions the straight path stays.
    """
    circuit, ports = sized.circuit, sized.circuit.file.ports
    changed = _with_file(
        sized, circuit.file.model_copy(update={"ports": {name: ports[name] for name in names}})
    )
    if holds_chain(sized):
        return changed
    try:
        built = build_circuit(changed.circuit.file, circuit.rules)
    except LayoutgenError:  # what the walk leaves out may be all that a net holds
        return changed
    return replace(changed, circuit=replace(changed.circuit, nets=built.nets, spine=built.spine))


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
