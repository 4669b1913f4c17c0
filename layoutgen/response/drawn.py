"""The as-drawn response: the network of what was placed.

In: an artwork and the parts' data. Out: a :class:`Network` of dispersive, lossy lines beside the pour they
got, coupled pairs by their modes, junctions, bends and open ends by formula, pads, chip gaps, ground vias
and parts. Parallel runs of different lines, and pads of more than two on one part, are not coupled here.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping

import numpy as np

from layoutgen.artwork import Artwork
from layoutgen.formulas.pads import chip_gap
from layoutgen.response.chain import FloatArray, series
from layoutgen.response.copper import ChipGap, Copper
from layoutgen.response.junctions import junction_effect, own_change, post_impedance
from layoutgen.response.medium import Medium, medium_of
from layoutgen.response.network import GROUND, Block, Branch, Network, Port, Shunt, between, coupled_pair
from layoutgen.response.parts import part_elements, response_ports, terminals
from layoutgen.response.touchstone import PartData
from layoutgen.response.trace import trace_copper

__all__ = ["drawn_network"]

_NM = 1e-9


def drawn_network(
    artwork: Artwork,
    frequencies: FloatArray,
    data: Mapping[str, PartData],
    *,
    lossless: bool = False,
    copper: Copper | None = None,
) -> Network:
    """Return the artwork's network.

    Args:
        artwork: The drawing.
        frequencies: Frequencies (B,) [Hz], positive.
        data: Measured data by part.
        lossless: True leaves out the losses of lines and vias; those of the parts stay.
        copper: The artwork's copper when it is already traced.
    """
    circuit = artwork.placement.sized.circuit
    medium = medium_of(circuit, frequencies, lossless)
    traced = copper or trace_copper(artwork)
    shunts: list[Shunt] = []
    branches = list(_pieces(traced, medium, shunts))
    branches += [between(post.node, GROUND, series(post_impedance(post, medium))) for post in traced.posts]
    branches += [between(one, other, series(0.0)) for one, other in traced.ties]
    branches += _pairs(traced, medium)
    for name, node in traced.radials.items():
        stub = artwork.placement.radials[name]
        radii = stub.inner_radius * _NM, stub.outer_radius * _NM
        branches.append(between(node, GROUND, medium.radial(math.radians(stub.sector_deg), *radii)))
    blocks = _parts(artwork, traced, medium, data, branches, shunts)
    at = {**traced.ports, **traced.terminals}
    ports = tuple(Port(at[name], impedance) for name, impedance in response_ports(circuit.file))
    return Network(frequencies.size, ports, tuple(branches), tuple(shunts), tuple(blocks))


def _pieces(copper: Copper, medium: Medium, shunts: list[Shunt]) -> Iterator[Branch]:
    """Yield all lengths of line with what their ends and bends add; junctions leave their susceptance."""
    lengths = [piece.length + own_change(piece, medium) for piece in copper.pieces]
    for joint in copper.joints:
        effect = junction_effect(joint, medium)
        for number, change in effect.changes:
            lengths[number] = lengths[number] + change
        if effect.susceptance is not None:
            shunts.append(Shunt.susceptance(joint.node, effect.susceptance))
    for piece, length in zip(copper.pieces, lengths, strict=True):
        yield between(piece.near, piece.far, medium.line(piece.width, *piece.gaps).chain(length))


def _pairs(copper: Copper, medium: Medium) -> Iterator[Branch]:
    """Yield the modes of the coupled pairs."""
    for pair in copper.pairs:
        even, odd = medium.pair(pair.width, pair.gap, pair.pour_gap)
        yield from coupled_pair(pair.nodes, even.chain(pair.length), odd.chain(pair.length))


def _parts(
    artwork: Artwork,
    copper: Copper,
    medium: Medium,
    data: Mapping[str, PartData],
    branches: list[Branch],
    shunts: list[Shunt],
) -> list[Block]:
    """Add the parts between their terminals; return the blocks of those with data."""
    blocks: list[Block] = []
    for name, part in artwork.placement.sized.circuit.file.parts.items():
        nodes = {terminal: copper.terminals[f"{name}.{terminal}"] for terminal, _ in terminals(part)}
        own, measured = part_elements(part, nodes, data.get(name), medium.frequencies)
        blocks += measured
        branches += own
        if own and name in copper.gaps:
            _add_gap(copper.gaps[name], medium, branches, shunts)
    return blocks


def _add_gap(gap: ChipGap, medium: Medium, branches: list[Branch], shunts: list[Shunt]) -> None:
    """Add the capacitances of the gap under a chip part."""
    found = chip_gap(gap.width, gap.gap, medium.height, medium.er)
    if np.all(found.series > 0.0):
        branches.append(between(*gap.nodes, series(1.0 / (1j * medium.omega * found.series))))
    ends = [node for node in gap.nodes if node != GROUND]
    shunts += [Shunt.susceptance(node, medium.omega * found.shunt) for node in ends]
