"""Parts as elements of a network, by value with parasitics or by measured data; both responses share them.

In: a part of the circuit file and the nodes of its terminals. Out: branches and blocks. What stands between
a terminal and the board's nodes - pads, vias - is not known here.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from layoutgen.reading import CircuitFile, Part
from layoutgen.response.chain import ComplexArray, FloatArray, series
from layoutgen.response.network import GROUND, Block, Branch, between
from layoutgen.response.touchstone import PartData

__all__ = ["data_terminals", "part_elements", "part_impedance", "response_ports", "terminals"]


def terminals(part: Part) -> tuple[tuple[str, str], ...]:
    """Return a part's terminals with their nets: pins by name, two pads as ``0`` and ``1``."""
    if part.nets is not None:
        return tuple((str(index), net) for index, net in enumerate(part.nets))
    return tuple((part.pins or {}).items())


def data_terminals(part: Part) -> tuple[str, ...]:
    """Return the terminals that are the data's ports, in order, ``data_ports`` or the part's two ends."""
    if part.data_ports is not None:
        return part.data_ports
    return tuple(name for name, _ in terminals(part))


def response_ports(file: CircuitFile) -> tuple[tuple[str, complex], ...]:
    """Return the response's ports with their impedances [ohm].

    RF ports in file order, by their names, then terminations in file order, as ``Q1.gate``.
    """
    found = [
        (name, complex(port.impedance or 50.0)) for name, port in file.ports.items() if port.kind == "rf"
    ]
    for name, part in file.parts.items():
        found += [(f"{name}.{pin}", complex(z)) for pin, z in part.terminations.items()]
    return tuple(found)


def part_impedance(part: Part, omega: FloatArray, scale: float | FloatArray = 1.0) -> ComplexArray | None:
    """Return the series impedance (B,) [ohm] of a two-terminal part by its value; None when it has none.

    Args:
        part: A resistor, capacitor or inductor with its series resistance and inductance.
        omega: Angular frequency (B,) [rad/s], positive.
        scale: What the value is multiplied by [-]; series resistance and inductance stay.
    """
    if part.value is None:
        return None
    jw, value = 1j * omega, part.value * scale
    if part.kind == "resistor":
        own = value + 0.0 * jw
    elif part.kind == "inductor":
        own = jw * value
    elif part.kind == "capacitor":
        own = 1.0 / (jw * value)
    else:
        return None
    return np.asarray(own + part.series_resistance + jw * part.series_inductance, dtype=np.complex128)


def part_elements(
    part: Part,
    nodes: Mapping[str, str],
    data: PartData | None,
    frequencies: FloatArray,
    scale: float | FloatArray = 1.0,
) -> tuple[tuple[Branch, ...], tuple[Block, ...]]:
    """Return a part's branches and blocks; none for a part that is open at RF.

    Args:
        part: The part.
        nodes: Node of each terminal, by the names of :func:`terminals`.
        data: Its measured data, which stand in for the value.
        frequencies: Frequencies (B,) [Hz].
        scale: What the value is multiplied by [-]; measured data are taken as they are.
    """
    if data is not None:
        return _measured(part, nodes, data, frequencies)
    z = part_impedance(part, 2.0 * np.pi * frequencies, scale)
    if z is None or len(nodes) != 2:
        return (), ()
    first, second = nodes.values()
    return (between(first, second, series(z)),), ()


def _measured(
    part: Part, nodes: Mapping[str, str], data: PartData, frequencies: FloatArray
) -> tuple[tuple[Branch, ...], tuple[Block, ...]]:
    """Return the block of a part's data, its terminals beyond the data's ports joined as the common one."""
    s = data.at(frequencies)
    if part.pins is None:
        return (), (_two_pad_block(nodes, s, data.z0),)
    own = data_terminals(part)
    common = list(dict.fromkeys(node for name, node in nodes.items() if name not in own))
    reference = common[0] if common else GROUND
    joints = tuple(between(reference, other, series(0.0)) for other in common[1:])
    return joints, (Block(tuple((nodes[name], reference) for name in own), s, data.z0),)


def _two_pad_block(nodes: Mapping[str, str], s: ComplexArray, z0: FloatArray) -> Block:
    """Return the block of a part with two pads: two ports to ground, or one port between its ends."""
    first, second = nodes.values()
    if s.shape[-1] == 2:
        return Block(((first, GROUND), (second, GROUND)), s, z0)
    return Block(((first, second),), s, z0)
