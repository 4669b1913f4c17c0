"""The as-drawn response: the network of what was placed.

In: an artwork and the parts' data. Out: a :class:`Network` of dispersive, lossy lines beside the pour they
got, coupled pairs by their modes, junctions, bends and open ends by formula, pads, chip gaps, ground vias
and parts. Parallel runs of different lines, and pads of more than two on one part, are not coupled here.

:class:`DrawnBoard` keeps what does not change with the lengths of lines, so that many lengths are quick.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import numpy as np

from layoutgen.artwork import Artwork
from layoutgen.formulas.pads import chip_gap
from layoutgen.reading import Part
from layoutgen.response.chain import FloatArray, series
from layoutgen.response.copper import ChipGap, Copper
from layoutgen.response.junctions import junction_effect, own_change, post_impedance
from layoutgen.response.medium import LineSection, Medium, medium_of
from layoutgen.response.network import (
    GROUND,
    Block,
    Branch,
    Network,
    Port,
    Shunt,
    between,
    coupled_pair,
    spread,
)
from layoutgen.response.parts import part_elements, response_ports, terminals
from layoutgen.response.touchstone import PartData
from layoutgen.response.trace import trace_copper

__all__ = ["Drawing", "DrawnBoard", "drawing_of", "drawn_network"]

_NM = 1e-9


@dataclass(frozen=True, slots=True, eq=False)
class Drawing:
    """What of an artwork carries RF.

    ``radials`` are sector [rad], inner and drawn outer radius [m] by stub; ``ports`` the response's ports
    with their impedances [ohm].
    """

    copper: Copper
    parts: Mapping[str, Part]
    ports: tuple[tuple[str, complex], ...]
    radials: Mapping[str, tuple[float, float, float]]


def drawing_of(artwork: Artwork, copper: Copper | None = None) -> Drawing:
    """Return what of an artwork carries RF; ``copper`` when it is already traced."""
    file = artwork.placement.sized.circuit.file
    radials = {
        name: (math.radians(stub.sector_deg), stub.inner_radius * _NM, stub.outer_radius * _NM)
        for name, stub in artwork.placement.radials.items()
    }
    return Drawing(copper or trace_copper(artwork), dict(file.parts), response_ports(file), radials)


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
    medium = medium_of(artwork.placement.sized.circuit, frequencies, lossless)
    return DrawnBoard(drawing_of(artwork, copper), medium, data).network()


class DrawnBoard:
    """A drawing on a board, at the frequencies and samples of a medium."""

    def __init__(
        self,
        drawing: Drawing,
        medium: Medium,
        data: Mapping[str, PartData],
        scales: Mapping[str, FloatArray] | None = None,
    ) -> None:
        """Work out everything but the chains of lines.

        Args:
            drawing: What carries RF.
            medium: The board.
            data: Measured data by part.
            scales: By part, what its value is multiplied by [-], to the medium's shape.
        """
        self.drawing, self.medium = drawing, medium
        self._shunts: list[Shunt] = []
        self._lines = list(self._sections())
        self._pairs = list(self._modes())
        self._others = self._fixed()
        self._blocks = self._add_parts(data, scales or {})

    def network(self, longer: Mapping[str, FloatArray] | None = None) -> Network:
        """Return the network.

        Args:
            longer: By line or pair, what its length is changed by [m], in a shape that goes with the
                medium's; the network's batch is then all of them laid out flat.
        """
        more = longer or {}
        copper, drawing = self.drawing.copper, self.drawing
        branches = [
            between(piece.near, piece.far, section.chain(length + more.get(piece.line, 0.0)))
            for piece, (section, length) in zip(copper.pieces, self._lines, strict=True)
        ]
        for pair, (even, odd) in zip(copper.pairs, self._pairs, strict=True):
            length = pair.length + more.get(pair.line, 0.0)
            branches += coupled_pair(pair.nodes, even.chain(length), odd.chain(length))
        at = {**copper.ports, **copper.terminals}
        ports = tuple(Port(at[name], impedance) for name, impedance in drawing.ports)
        shape = np.broadcast_shapes(self.medium.shape, *(np.shape(value) for value in more.values()))
        elements = (*branches, *self._others), tuple(self._shunts), tuple(self._blocks)
        return spread(Network(math.prod(shape), ports, *elements), shape)

    def _sections(self) -> Iterator[tuple[LineSection, FloatArray]]:
        """Yield the section of each piece and its length with what ends and bends add [m]."""
        copper, medium = self.drawing.copper, self.medium
        lengths = [piece.length + own_change(piece, medium) for piece in copper.pieces]
        for joint in copper.joints:
            effect = junction_effect(joint, medium)
            for number, change in effect.changes:
                lengths[number] = lengths[number] + change
            if effect.susceptance is not None:
                self._shunts.append(Shunt.susceptance(joint.node, effect.susceptance))
        for piece, length in zip(copper.pieces, lengths, strict=True):
            yield medium.line(piece.width, *piece.gaps), length

    def _modes(self) -> Iterator[tuple[LineSection, LineSection]]:
        """Yield the even and the odd mode of each coupled pair."""
        for pair in self.drawing.copper.pairs:
            even, odd = self.medium.pair(pair.width, pair.gap, pair.pour_gap)
            if pair.equal_modes:
                mean = 0.5 * (even.wave_number + odd.wave_number)
                even, odd = LineSection(even.impedance, mean), LineSection(odd.impedance, mean)
            yield even, odd

    def _fixed(self) -> list[Branch]:
        """Return ground vias, ties and radial stubs."""
        copper, medium = self.drawing.copper, self.medium
        found = [between(post.node, GROUND, series(post_impedance(post, medium))) for post in copper.posts]
        found += [between(one, other, series(0.0)) for one, other in copper.ties]
        for name, node in copper.radials.items():
            found.append(between(node, GROUND, medium.radial(*self.drawing.radials[name])))
        return found

    def _add_parts(self, data: Mapping[str, PartData], scales: Mapping[str, FloatArray]) -> list[Block]:
        """Add the parts between their terminals; return the blocks of those with data."""
        copper = self.drawing.copper
        blocks: list[Block] = []
        for name, part in self.drawing.parts.items():
            nodes = {terminal: copper.terminals[f"{name}.{terminal}"] for terminal, _ in terminals(part)}
            frequencies = self.medium.frequencies
            own, measured = part_elements(part, nodes, data.get(name), frequencies, scales.get(name, 1.0))
            blocks += measured
            if own and name in copper.gaps:
                own = (self._across(copper.gaps[name], own[0]),)
            self._others += own
        return blocks

    def _across(self, gap: ChipGap, part: Branch) -> Branch:
        """Return a chip part with the capacitance of the gap under it in parallel; add those to ground."""
        medium = self.medium
        width, apart = gap.width + medium.width_change, gap.gap - medium.width_change
        found = chip_gap(width, apart, medium.height, medium.er)
        ends = [node for node in gap.nodes if node != GROUND]
        self._shunts += [Shunt.susceptance(node, medium.omega * found.shunt) for node in ends]
        z = part.chain.b
        return between(*gap.nodes, series(z / (1.0 + z * 1j * medium.omega * found.series)))
