"""Which nets are one conductor: lines and strips of coupled pairs join their nets; ``gnd`` joins nothing.

A line or strip that ends on ``gnd`` is taken as cut there: its copper belongs to its other net up to the cut.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping

import shapely
from shapely.ops import substring

from layoutgen.artwork import Artwork
from layoutgen.geometry import Point
from layoutgen.placement import PlacedLine, PlacedPair
from layoutgen.reading import CircuitFile

__all__ = ["GROUND", "OPEN", "ground_end", "joined_nets", "pair_tails", "tail_of"]

GROUND = "gnd"
OPEN = "open"


def joined_nets(file: CircuitFile) -> Mapping[str, str]:
    """Return for each net the first net (in file order) of those that lines join it to, itself included."""
    parent: dict[str, str] = {net: net for net in _nets(file)}

    def root(net: str) -> str:
        while parent[net] != net:
            net = parent[net]
        return net

    rank = {net: k for k, net in enumerate(parent)}
    for a, b in _conductors(file):
        low, high = sorted((root(a), root(b)), key=rank.__getitem__)
        parent[high] = low
    return {net: root(net) for net in parent}


def _nets(file: CircuitFile) -> Iterator[str]:
    """Yield the circuit's nets, repeats included, ``gnd`` first."""
    yield GROUND
    for port in file.ports.values():
        yield port.net
    for line in file.lines.values():
        yield from line.nets
    for pair in file.coupled.values():
        yield from (net for net in pair.nets if net != OPEN)
    for part in file.parts.values():
        yield from (*(part.nets or ()), *(part.pins or {}).values())


def _conductors(file: CircuitFile) -> Iterator[tuple[str, str]]:
    """Yield the pairs of nets that copper joins by design, ``gnd`` left out."""
    strips = [line.nets for line in file.lines.values()]
    for pair in file.coupled.values():
        strips += [pair.nets[:2], pair.nets[2:]]
    for nets in strips:
        if len(nets) == 2 and GROUND not in nets and OPEN not in nets:
            yield nets[0], nets[1]


def ground_end(nets: tuple[str, ...]) -> int | None:
    """Return which end of a line lies on ``gnd``: 0, 1, or None."""
    return nets.index(GROUND) if GROUND in nets else None


def tail_of(line: PlacedLine, length: float, end: int | None = None) -> shapely.Polygon:
    """Return the region of a line's last ``length`` [nm] before its end on ``gnd``, and what lies past it.

    The region is twice as wide as the line; it never takes more than nine tenths of the line. ``end`` 0 or 1
    asks for the end on that net of the line instead.
    """
    end = ground_end(line.nets) if end is None else end
    path: list[Point] = list(line.path) if end == 0 else list(line.path[::-1])
    centre = shapely.LineString(path)
    wanted = min(length, 0.9 * centre.length)
    tail = shapely.get_coordinates(substring(centre, 0.0, wanted)).tolist()
    (x0, y0), (x1, y1) = tail[0], tail[1]
    back = 2.0 * line.width / shapely.Point(x0, y0).distance(shapely.Point(x1, y1))
    tail[0] = [x0 - back * (x1 - x0), y0 - back * (y1 - y0)]
    grown = shapely.LineString(tail).buffer(
        line.width, cap_style="flat", join_style="mitre", mitre_limit=10.0
    )
    return shapely.Polygon(grown.exterior)


def pair_tails(pair: PlacedPair, length: float) -> Iterator[tuple[int, shapely.Polygon]]:
    """Yield the ends (0 to 3) of a coupled pair on ``gnd``, each with the region of its last ``length`` [nm].

    The region holds what lies past the end too. Sideways it reaches to the middle of the gap, so that it
    never holds the other strip; it takes no more than nine tenths of its own.
    """
    for index, net in enumerate(pair.nets):
        if net == GROUND:
            (x0, y0), (x1, y1) = pair.paths[index // 2][:: 1 if index % 2 == 0 else -1]
            whole = shapely.Point(x0, y0).distance(shapely.Point(x1, y1))
            back, on = 2.0 * pair.width / whole, min(length / whole, 0.9)
            ends = [(x0 + t * (x1 - x0), y0 + t * (y1 - y0)) for t in (-back, on)]
            half = (pair.width + pair.gap) / 2.0
            yield index, shapely.Polygon(shapely.LineString(ends).buffer(half, cap_style="flat").exterior)


def drawn_conductors(artwork: Artwork) -> Mapping[str, str]:
    """Return the net off ``gnd`` of each line that ends on it."""
    placed = artwork.placement.lines.values()
    return {line.name: line.nets[1 - end] for line in placed if (end := ground_end(line.nets)) is not None}
