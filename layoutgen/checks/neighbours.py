"""Lines that are not meant to couple: straight pieces of lines, and which of them stand in each other's way.

A place is counted for a pair of lines only where it is farther along its line from each node the two
share than 3 h beyond what else reaches out from that node (half the widest line there, a pad). Nodes
joined by a part, or by a line no longer than 3 h, count as one, and so do the two ends of a coupled pair that
lie beside each other with a gap of up to 3 h: one that is open or on gnd lies at its partner's node there.
Between legs of one line the bends between them take the place of the node. Lines of a coupled pair are meant
to couple; a radial stub is not judged against lines it meets.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import shapely

from layoutgen.artwork import Artwork
from layoutgen.checks.nodes import GROUND, OPEN
from layoutgen.checks.planar import CHORD_NM, TOLERANCE_NM
from layoutgen.geometry import Point, Ring
from layoutgen.placement import PlacedPart, Placement
from layoutgen.reading import Part

__all__ = ["Leg", "Neighbours", "legs_of", "neighbours"]

NODE_HEIGHTS = 3.0
"""How far from a shared node [substrate heights] lines may be near each other."""


@dataclass(frozen=True, slots=True, eq=False)
class Leg:
    """A straight piece of a line (or a radial stub as a whole), from ``start`` to ``end`` [nm].

    ``line`` is the element, ``strip`` tells the strips of a pair apart; ``before`` and ``after`` [nm] are the
    ways along the line from its ends to this leg's; ``nets`` are those at the line's two ends, ``nodes`` the
    nets of the nodes those ends lie at: of an open or grounded end of a pair its partner's.
    """

    line: str
    strip: int
    number: int
    start: Point
    end: Point
    width: float
    before: float
    after: float
    nets: tuple[str, str]
    nodes: tuple[str, str]
    shape: shapely.Polygon | None = None

    @property
    def length(self) -> float:
        """Length [nm] from start to end."""
        return float(np.hypot(self.end[0] - self.start[0], self.end[1] - self.start[1]))

    def copper(self, cut_start: float = 0.0, cut_end: float = 0.0) -> shapely.Polygon | None:
        """Return the leg's copper with lengths [nm] cut off at both ends; None when nothing is left."""
        if self.shape is not None:
            return self.shape if max(cut_start, cut_end) <= 0.0 else None
        cut_start, cut_end = max(cut_start, 0.0), max(cut_end, 0.0)
        length = self.length
        if cut_start + cut_end >= length:
            return None
        ux, uy = (self.end[0] - self.start[0]) / length, (self.end[1] - self.start[1]) / length
        a, b, half = cut_start, length - cut_end, self.width / 2.0
        corners = [(a, -half), (b, -half), (b, half), (a, half)]
        x0, y0 = self.start
        return shapely.Polygon([(x0 + s * ux - n * uy, y0 + s * uy + n * ux) for s, n in corners])


@dataclass(frozen=True, slots=True, eq=False)
class Neighbours:
    """Two legs nearer than asked: their distance [nm] and the copper of both that counts."""

    first: Leg
    second: Leg
    distance: float
    one: shapely.Polygon
    other: shapely.Polygon


def legs_of(placement: Placement) -> list[Leg]:
    """Return the legs of all lines, strips of pairs and radial stubs, in file order."""
    legs: list[Leg] = []
    for line in placement.lines.values():
        nets = (line.nets[0], line.nets[1] if len(line.nets) > 1 else OPEN)
        legs.extend(_legs(line.name, 0, line.path, line.width, nets, nets))
    for pair in placement.pairs.values():
        for strip, path in enumerate(pair.paths):
            nets, nodes = _of_strip(pair.nets, strip)
            legs.extend(_legs(pair.name, strip, path, pair.width, nets, nodes))
    for stub in placement.radials.values():
        shape = _sector(stub.apex, stub.heading, stub.sector_deg, stub.outer_radius)
        nets = (stub.nets[0], OPEN)
        legs.append(Leg(stub.name, 0, 0, stub.apex, stub.apex, 0.0, 0.0, 0.0, nets, nets, shape))
    return legs


def _of_strip(nets: tuple[str, ...], strip: int) -> tuple[tuple[str, str], tuple[str, str]]:
    """Return the nets at the two ends of a pair's strip, and the nets of the nodes they lie at."""
    own, beside = nets[2 * strip : 2 * strip + 2], nets[2 - 2 * strip : 4 - 2 * strip]
    at = [partner if net in (OPEN, GROUND) else net for net, partner in zip(own, beside, strict=True)]
    return (own[0], own[1]), (at[0], at[1])


def _legs(
    line: str,
    strip: int,
    path: tuple[Point, ...],
    width: float,
    nets: tuple[str, str],
    nodes: tuple[str, str],
) -> Iterator[Leg]:
    """Yield the legs of one centre-line."""
    lengths = [float(np.hypot(b[0] - a[0], b[1] - a[1])) for a, b in pairwise(path)]
    total, done = sum(lengths), 0.0
    for k, length in enumerate(lengths):
        yield Leg(line, strip, k, path[k], path[k + 1], width, done, total - done - length, nets, nodes)
        done += length


def _sector(apex: Point, heading: float, sector: float, radius: float) -> shapely.Polygon:
    """Return a radial stub's sector [nm]; angles in [deg]."""
    turns = np.radians(heading + sector * np.linspace(-0.5, 0.5, 61))
    rim = [(apex[0] + radius * np.cos(turn), apex[1] + radius * np.sin(turn)) for turn in turns]
    return shapely.Polygon([apex, *rim])


def neighbours(artwork: Artwork, limit: float, height: float) -> Iterator[Neighbours]:
    """Yield the pairs of legs that are nearer to each other than a limit [nm] and not meant to couple.

    Args:
        artwork: The drawing.
        limit: Distance asked for [nm].
        height: Substrate height [nm].
    """
    legs = legs_of(artwork.placement)
    copper = np.array([leg.copper() for leg in legs], dtype=object)
    if not len(copper):
        return
    nodes = _Nodes(artwork, NODE_HEIGHTS * height)
    i, j = shapely.STRtree(copper).query(copper, predicate="dwithin", distance=limit)
    for a, b in sorted(zip(i[i < j].tolist(), j[i < j].tolist(), strict=True)):
        one, other = _counted(legs[a], legs[b], nodes)
        if one is None or other is None:
            continue
        distance = float(one.distance(other))
        if distance < limit - TOLERANCE_NM:
            yield Neighbours(legs[a], legs[b], distance, one, other)


def _counted(a: Leg, b: Leg, nodes: _Nodes) -> tuple[shapely.Polygon | None, shapely.Polygon | None]:
    """Return the parts of two legs' copper that count for each other, None where nothing does."""
    if a.line == b.line:
        return _of_one_line(a, b, nodes.reach)
    cuts = []
    for leg, other in ((a, b), (b, a)):
        cuts.append(
            [nodes.kept_off(leg.nodes[end], other) - way for end, way in ((0, leg.before), (1, leg.after))]
        )
    return a.copper(*cuts[0]), b.copper(*cuts[1])


def _of_one_line(a: Leg, b: Leg, reach: float) -> tuple[shapely.Polygon | None, shapely.Polygon | None]:
    """Return what counts between two legs of one line: nothing within reach of the bends between."""
    first, second = (a, b) if a.number < b.number else (b, a)
    if first.strip != second.strip or second.number < first.number + 2:
        return None, None
    off = reach + first.width / 2.0
    return first.copper(0.0, off), second.copper(off, 0.0)


class _Nodes:
    """Which nets count as one node, and how far from it lines may be near each other."""

    def __init__(self, artwork: Artwork, reach: float) -> None:
        """Join the nets of each part, of each short line, and those beside each other in a narrow pair.

        Args:
            artwork: The drawing.
            reach: How far from a node lines may be near each other [nm].
        """
        self.reach = reach
        placement = artwork.placement
        file = placement.sized.circuit.file
        self._parent: dict[str, str] = {}
        for part in file.parts.values():
            self._join(_nets_of(part))
        for line in placement.lines.values():
            if line.centre_line <= reach:
                self._join(line.nets)
        for pair in placement.pairs.values():
            if pair.gap <= reach:
                self._join((pair.nets[0], pair.nets[2]))
                self._join((pair.nets[1], pair.nets[3]))
        self._out = self._outreach(placement, file.parts)

    def _join(self, nets: tuple[str, ...]) -> None:
        """Make one node of nets, gnd and open ends left out."""
        live = [net for net in nets if net not in (GROUND, OPEN)]
        for net in live[1:]:
            if self._root(net) != self._root(live[0]):
                self._parent[self._root(net)] = self._root(live[0])

    def _root(self, net: str) -> str:
        """Return the net that stands for a node."""
        while self._parent.get(net, net) != net:
            net = self._parent[net]
        return net

    def _outreach(self, placement: Placement, parts: Mapping[str, Part]) -> Mapping[str, float]:
        """Return how far [nm] copper reaches out from each node: half the widest line, or a part's size."""
        out: dict[str, float] = {}
        widths = [(line.nets, line.width) for line in placement.lines.values()]
        widths += [(pair.nets, pair.width) for pair in placement.pairs.values()]
        widths += [((strip.net,), strip.width) for strip in placement.strips]
        found = [(nets, width / 2.0) for nets, width in widths]
        found += [(_nets_of(parts[p.name]), _pad_size(p)) for p in placement.parts.values()]
        for nets, size in found:
            for net in nets:
                out[self._root(net)] = max(out.get(self._root(net), 0.0), size)
        return out

    def kept_off(self, net: str, other: Leg) -> float:
        """Return how far [nm] along a line from a net a place must be to count against another line.

        Minus infinity when the other line has no end at that node.
        """
        if net in (GROUND, OPEN):
            return -np.inf
        node = self._root(net)
        if node not in {self._root(far) for far in other.nodes if far not in (GROUND, OPEN)}:
            return -np.inf
        return self.reach + self._out.get(node, 0.0)


def _nets_of(part: Part) -> tuple[str, ...]:
    """Return the nets of a part's pads or pins."""
    return part.nets if part.nets is not None else tuple((part.pins or {}).values())


def _pad_size(part: PlacedPart) -> float:
    """Return the largest side [nm] of a part's pads."""
    boxes = [_outline(pad.outline).bounds for pad in part.pads]
    return max((max(x1 - x0, y1 - y0) for x0, y0, x1, y1 in boxes), default=0.0)


def _outline(ring: Ring) -> shapely.Polygon:
    """Return a ring as a polygon."""
    return ring.polygon(CHORD_NM)
