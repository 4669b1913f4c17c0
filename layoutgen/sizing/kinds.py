"""Which lines are plain ones, radial stubs, RF or supply lines."""

from __future__ import annotations

from layoutgen.circuit import GROUND, Circuit, is_supply
from layoutgen.reading import CircuitFile, Line

__all__ = ["is_rf", "radial_names", "single_lines"]


def single_lines(file: CircuitFile) -> dict[str, Line]:
    """Return the lines that are no radial stubs, in file order."""
    return {name: line for name, line in file.lines.items() if line.shape is None}


def radial_names(file: CircuitFile) -> tuple[str, ...]:
    """Return the radial stubs, in file order."""
    return tuple(name for name, line in file.lines.items() if line.shape == "radial")


def is_rf(circuit: Circuit, line: Line) -> bool:
    """Tell whether RF is asked of a line, or it joins anything but DC nets (ground beside one counts)."""
    nets = [circuit.nets[name] for name in line.nets if name != GROUND]
    return not is_supply(line) or not nets or not all(net.is_dc for net in nets)
