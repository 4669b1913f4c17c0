"""How far the drawing is from the schematic in the band, without losses, and what lengths can do about it.

In: an artwork and the parts' data. Out: :class:`Match`, which gives the difference of S-parameters at any
change of the lengths of lines given by angle, and its derivatives. Nothing is drawn here: the change is made
to the traced copper.
"""

from __future__ import annotations

from collections.abc import Mapping
from copy import copy as shallow_copy
from dataclasses import replace

import numpy as np

from layoutgen.artwork import Artwork
from layoutgen.response.chain import ComplexArray, FloatArray
from layoutgen.response.copper import Copper
from layoutgen.response.drawn import DrawnBoard, drawing_of
from layoutgen.response.medium import medium_of
from layoutgen.response.mirror import length_groups
from layoutgen.response.solve import solve
from layoutgen.response.touchstone import PartData
from layoutgen.response.trace import trace_copper
from layoutgen.response.wanted import wanted_network
from layoutgen.sizing import SizedCircuit

__all__ = ["Match", "in_band", "resized"]

_POINTS = (3, 21)  # fewest and most frequencies in the band
_VALUES = 200_000  # S-parameters of one network over the band
_BATCH = 4_000_000  # S-parameters worked out at once
_STEP = 1e-3  # of the derivatives [rad]


def in_band(band: tuple[float, float], ports: int) -> FloatArray:
    """Return the frequencies at which the band is judged [Hz], fewer for very many ports."""
    return np.linspace(*band, int(np.clip(_VALUES // max(1, ports) ** 2, *_POINTS)))


def resized(copper: Copper, old: SizedCircuit, new: SizedCircuit) -> Copper:
    """Return the copper with the widths and gaps of another sizing, its lines as long electrically."""
    lines = {name: (line, new.lines[name]) for name, line in old.lines.items()}
    pairs = {name: (pair, new.pairs[name]) for name, pair in old.pairs.items()}
    pieces = [
        replace(
            piece,
            width=lines[piece.line][1].width,
            length=piece.length * lines[piece.line][0].beta / lines[piece.line][1].beta,
        )
        if piece.line
        else piece
        for piece in copper.pieces
    ]
    return replace(
        copper,
        pieces=tuple(pieces),
        joints=tuple(
            replace(j, arms=[replace(arm, width=pieces[arm.piece].width) for arm in j.arms])
            for j in copper.joints
        ),
        pairs=tuple(
            replace(
                pair,
                width=pairs[pair.line][1].width,
                gap=pairs[pair.line][1].gap,
                length=pair.length * pairs[pair.line][0].beta / pairs[pair.line][1].beta,
            )
            for pair in copper.pairs
        ),
    )


class Match:
    """As drawn against wanted, at the frequencies ``frequencies`` (F,) [Hz].

    ``groups`` are the names whose lengths move together; ``total`` (G,) [rad] is how much longer the drawing
    already makes them than their budgets alone would. A change ``x`` (G,) [rad, at the design frequency] is
    counted from there.
    """

    def __init__(self, artwork: Artwork, data: Mapping[str, PartData], copper: Copper | None = None) -> None:
        """Trace the copper and solve the schematic's network."""
        self.artwork, self.data = artwork, data
        self.copper = copper or trace_copper(artwork)
        sized = artwork.placement.sized
        design = sized.circuit.file.design
        one = wanted_network(artwork.placement, np.array([design.frequency]), data)
        self.frequencies = in_band(design.band, len(one.ports))
        self.wanted = solve(wanted_network(artwork.placement, self.frequencies, data))
        self._medium = medium_of(sized.circuit, self.frequencies, lossless=True)
        self._board = self._board_of(self.copper)
        self.groups = length_groups(sized.circuit.file)
        self.total = np.array([-sized.corrections.get(group[0], 0.0) for group in self.groups])
        self.own = np.array([self._copper_angle(group) for group in self.groups])

    def _beta(self, name: str) -> float:
        """Return a line's or pair's phase constant at the design frequency [rad/m]."""
        sized = self.artwork.placement.sized
        line = sized.lines.get(name)
        return line.beta if line is not None else sized.pairs[name].beta

    def _copper_angle(self, group: tuple[str, ...]) -> float:
        """Return the electrical length [rad] of the shortest centre-line of a group, as drawn."""
        placement = self.artwork.placement
        lengths = {name: line.centre_line for name, line in placement.lines.items()}
        lengths |= {name: pair.centre_line for name, pair in placement.pairs.items()}
        return min(self._beta(name) * lengths[name] * 1e-9 for name in group)

    def with_copper(self, copper: Copper) -> Match:
        """Return the same with other copper: what if that were drawn."""
        other = shallow_copy(self)
        other.copper, other._board = copper, self._board_of(copper)
        return other

    def difference(self, changes: FloatArray) -> ComplexArray:
        """Return as drawn minus wanted, (V, F, N, N) [-], for changes (V, G) [rad]."""
        return np.concatenate([self._drawn(part) for part in self._batches(changes)]) - self.wanted

    def _batches(self, changes: FloatArray) -> list[FloatArray]:
        """Return the changes in parts whose results fit into memory."""
        count = max(1, _BATCH // max(1, self.wanted.size))
        return [changes[start : start + count] for start in range(0, len(changes), count)]

    def _drawn(self, changes: FloatArray) -> ComplexArray:
        """Return the lossless S-parameters as drawn, (V, F, N, N) [-]."""
        longer = {
            name: changes[:, k, None] / self._beta(name)
            for k, group in enumerate(self.groups)
            for name in group
        }
        s = solve(self._board.network({"": np.zeros((len(changes), 1)), **longer}))
        return s.reshape(len(changes), self.frequencies.size, *s.shape[1:])

    def unallowed(self) -> ComplexArray:
        """Return as drawn minus wanted, (F, N, N) [-], were every length just what the schematic asks for.

        Nothing is then taken off or added for tees, steps, bends, open ends, pads and vias.
        """
        sized, placement = self.artwork.placement.sized, self.artwork.placement
        longer = {}
        for name in (name for group in self.groups for name in group):
            placed = placement.lines.get(name) or placement.pairs[name]
            asked = sized.lines.get(name) or sized.pairs[name]
            change = (asked.angle or 0.0) / asked.beta - placed.centre_line * 1e-9
            longer[name] = np.full(self.frequencies.shape, change)
        return solve(self._board.network(longer)) - self.wanted

    def _board_of(self, copper: Copper) -> DrawnBoard:
        """Return the artwork's lossless board with some other copper."""
        return DrawnBoard(drawing_of(self.artwork, copper), self._medium, self.data)

    def around(self, x: FloatArray) -> tuple[ComplexArray, ComplexArray]:
        """Return the difference at x, as a vector (M,), and its derivatives (M, G) [1/rad]."""
        steps = np.vstack([x, x + _STEP * np.eye(x.size)])
        found = self.difference(steps).reshape(len(steps), -1)
        return found[0], ((found[1:] - found[0]) / _STEP).T
