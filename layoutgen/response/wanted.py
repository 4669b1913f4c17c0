"""The wanted response: the circuit file taken literally.

In: a placement (for the lines that are as drawn: free ones, and those given by their length) and the parts'
data. Out: a :class:`Network` of ideal lines whose angles are proportional to frequency, parts by value or
data, and radial stubs; no losses, vias, pads or junctions. Both modes of a coupled pair have the same
angle. DC ports are open.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from layoutgen.circuit import OPEN
from layoutgen.placement import Placement
from layoutgen.reading import CircuitFile
from layoutgen.response.chain import FloatArray, line
from layoutgen.response.medium import medium_of
from layoutgen.response.network import GROUND, Block, Branch, Network, Port, between, coupled_pair
from layoutgen.response.parts import part_elements, response_ports, terminals
from layoutgen.response.touchstone import PartData

__all__ = ["wanted_network"]


def wanted_network(placement: Placement, frequencies: FloatArray, data: Mapping[str, PartData]) -> Network:
    """Return the schematic's network at frequencies (B,) [Hz], positive."""
    file = placement.sized.circuit.file
    branches = [
        *_lines(placement, frequencies),
        *_pairs(placement, frequencies),
        *_radials(placement, frequencies),
    ]
    blocks: list[Block] = []
    for name, part in file.parts.items():
        found = part_elements(part, dict(terminals(part)), data.get(name), frequencies)
        branches += found[0]
        blocks += found[1]
    return Network(frequencies.size, _ports(file), tuple(branches), (), tuple(blocks))


def _ports(file: CircuitFile) -> tuple[Port, ...]:
    """Return the response's ports at their nets."""
    nets = {name: port.net for name, port in file.ports.items()}
    for name, part in file.parts.items():
        nets |= {f"{name}.{pin}": net for pin, net in terminals(part)}
    return tuple(Port(nets[name], impedance) for name, impedance in response_ports(file))


def _lines(placement: Placement, frequencies: FloatArray) -> Iterator[Branch]:
    """Yield the ideal lines."""
    sized = placement.sized
    share = frequencies / sized.circuit.file.design.frequency
    for name, asked in sized.lines.items():
        far = asked.nets[1] if len(asked.nets) == 2 else f"end of {name}"
        impedance = asked.asked_impedance if asked.asked_impedance is not None else asked.impedance
        angle = asked.angle if asked.angle is not None else placement.lines[name].angle
        yield between(asked.nets[0], far, line(impedance, angle * share))


def _pairs(placement: Placement, frequencies: FloatArray) -> Iterator[Branch]:
    """Yield the modes of the ideal coupled pairs."""
    sized = placement.sized
    file = sized.circuit.file
    share = frequencies / file.design.frequency
    for name, asked in sized.pairs.items():
        ends = [f"end {k} of {name}" if net == OPEN else net for k, net in enumerate(asked.nets)]
        even = file.coupled[name].even_impedance or asked.even_impedance
        odd = file.coupled[name].odd_impedance or asked.odd_impedance
        angle = (asked.angle if asked.angle is not None else placement.pairs[name].angle) * share
        yield from coupled_pair((ends[0], ends[1], ends[2], ends[3]), line(even, angle), line(odd, angle))


def _radials(placement: Placement, frequencies: FloatArray) -> Iterator[Branch]:
    """Yield the radial stubs, by the radial-line equation with the permittivity of the design frequency."""
    circuit = placement.sized.circuit
    medium = medium_of(circuit, frequencies, lossless=True)
    for stub in placement.sized.radials.values():
        chain = medium.radial(
            stub.sector, stub.inner_radius, stub.outer_radius, circuit.file.design.frequency
        )
        yield between(stub.nets[0], GROUND, chain)
