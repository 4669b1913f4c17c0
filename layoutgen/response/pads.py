"""A placed pad as the response sees it: its inner edge, how it points, its size.

In: placed parts. Out: :class:`PadFrame`, one for each terminal. Positions and sizes in nanometres.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from layoutgen.circuit import GROUND
from layoutgen.geometry import Point
from layoutgen.placement import PlacedPad, PlacedPart, Placement
from layoutgen.reading import Part
from layoutgen.response.parts import terminals
from layoutgen.response.paths import SNAP

__all__ = ["PadFrame", "pad_frames"]


@dataclass(frozen=True, slots=True)
class PadFrame:
    """One terminal's pad: middle of its inner edge, unit vector towards where a line leaves, sizes [nm].

    ``plane`` is how far outward from the inner edge the part itself ends: zero, or the pad's length when
    measured data include the pad. ``on_carrier`` is True for a pin that meets the carrier and has no copper.
    """

    part: str
    terminal: str
    net: str
    x: float
    y: float
    ux: float
    uy: float
    along: float
    across: float
    plane: float
    on_carrier: bool

    @property
    def key(self) -> str:
        """The terminal's name, such as ``Q1.gate``."""
        return f"{self.part}.{self.terminal}"

    @property
    def heading(self) -> float:
        """Outgoing heading [deg]."""
        return math.degrees(math.atan2(self.uy, self.ux))

    def at(self, distance: float) -> tuple[float, float]:
        """Return the point [nm] at a distance [nm] outward from the inner edge."""
        return self.x + distance * self.ux, self.y + distance * self.uy

    def place(self, point: tuple[float, float]) -> tuple[float, float]:
        """Return how far outward from the inner edge, and how far to its left, a point lies [nm]."""
        dx, dy = point[0] - self.x, point[1] - self.y
        return dx * self.ux + dy * self.uy, dy * self.ux - dx * self.uy

    def meets(self, path: Sequence[tuple[float, float]]) -> list[float]:
        """Return how far outward from the inner edge [nm] the pad's axis meets a path, never negative."""
        found = []
        for (p, aside_p), (q, aside_q) in itertools.pairwise(map(self.place, path)):
            if max(abs(aside_p), abs(aside_q)) <= SNAP:
                nearest = max(0.0, min(p, q)) if max(p, q) >= -SNAP else max(p, q)
            elif min(aside_p, aside_q) <= SNAP and max(aside_p, aside_q) >= -SNAP:
                share = min(1.0, max(0.0, aside_p / (aside_p - aside_q)))
                nearest = p + share * (q - p)
            else:
                continue
            if nearest >= -SNAP:
                found.append(max(0.0, nearest))
        return found


def pad_frames(placement: Placement) -> Iterator[PadFrame]:
    """Yield the pads of all terminals, in file order."""
    for name, part in placement.sized.circuit.file.parts.items():
        placed = placement.parts[name]
        for index, (terminal, net) in enumerate(terminals(part)):
            pad = _pad(placed, part, terminal, index)
            if pad is not None:
                yield _frame(name, part, terminal, net, pad)


def _pad(placed: PlacedPart, part: Part, terminal: str, index: int) -> PlacedPad | None:
    """Return the pad of a terminal: by its pin's name, or by its place in a two-pad part."""
    if part.nets is not None:
        return placed.pads[index]
    return next((pad for pad in placed.pads if pad.pin == terminal), None)


def _frame(name: str, part: Part, terminal: str, net: str, pad: PlacedPad) -> PadFrame:
    """Return a pad's frame from its outline."""
    ux, uy = math.cos(math.radians(pad.heading)), math.sin(math.radians(pad.heading))
    outline: tuple[Point, ...] = pad.outline.chords()
    along = [x * ux + y * uy for x, y in outline]
    across = [y * ux - x * uy for x, y in outline]
    inner, middle = min(along), 0.5 * (min(across) + max(across))
    length = max(along) - inner
    includes_pad = part.data is not None and part.planes == "pad_outer"
    return PadFrame(
        part=name,
        terminal=terminal,
        net=net,
        x=inner * ux - middle * uy,
        y=inner * uy + middle * ux,
        ux=ux,
        uy=uy,
        along=length,
        across=max(across) - min(across),
        plane=length if includes_pad else 0.0,
        on_carrier=net == GROUND and (pad.ground == "flange" or length == 0.0),
    )
