"""How a board lies while it is drawn: always the same way, however its hints turned or mirrored it.

Rows of vias begin somewhere, ties are broken somehow, and booleans round halves of a nanometre upwards. So
that none of this depends on how a board happens to lie, it is first moved so that its straight path begins
heading east and the first element off its middle, in the file's order, lies to the north. What is drawn then
is moved back.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from layoutgen.artwork.attitude import Attitude
from layoutgen.geometry import Point
from layoutgen.placement import (
    PlacedHole,
    PlacedLine,
    PlacedPad,
    PlacedPart,
    PlacedPort,
    PlacedVia,
    Placement,
)

__all__ = ["attitude_of", "moved"]


def attitude_of(placement: Placement) -> Attitude:
    """Return the movement of a placed board to how it is drawn."""
    quarters = round(-_first_heading(placement) / 90.0) % 4
    turned = Attitude(placement.width, placement.height, quarters)
    height = turned.size[1]
    aside = (2 * turned.point(point)[1] - height for point in _places(placement))
    side = next((y for y in aside if y), 1)
    if side > 0:
        return turned
    return Attitude(placement.width, placement.height, -quarters % 4, mirrored=True)


def _first_heading(placement: Placement) -> float:
    """Return the heading [deg] with which the straight path begins: of its port, or of the first thing."""
    path = placement.sized.circuit.spine
    first = [placement.ports[name] for name in (*path, *placement.ports) if name in placement.ports]
    headings = [port.heading for port in first]
    headings += [part.heading for part in placement.parts.values()]
    headings += [stub.heading for stub in placement.radials.values()]
    return headings[0] if headings else 0.0


def _places(placement: Placement) -> Iterator[Point]:
    """Yield points of all that has a place, kind by kind in the file's order."""
    for line in placement.lines.values():
        yield from line.path
    for pair in placement.pairs.values():
        yield from (point for path in pair.paths for point in path)
    for part in placement.parts.values():
        yield from ((pad.x, pad.y) for pad in part.pads)
    yield from ((via.x, via.y) for via in placement.vias)
    yield from ((port.x, port.y) for port in placement.ports.values())
    yield from ((hole.x, hole.y) for hole in placement.holes)


def moved(placement: Placement, by: Attitude) -> Placement:
    """Return a placed board as it lies after a movement."""
    if by.is_rest:
        return placement
    width, height = by.size
    return replace(
        placement,
        width=width,
        height=height,
        lines={name: _line(line, by) for name, line in placement.lines.items()},
        pairs={
            name: replace(pair, paths=(by.points(pair.paths[0]), by.points(pair.paths[1])))
            for name, pair in placement.pairs.items()
        },
        radials={
            name: replace(stub, apex=by.point(stub.apex), heading=by.heading(stub.heading))
            for name, stub in placement.radials.items()
        },
        parts={name: _part(part, by) for name, part in placement.parts.items()},
        ports={name: _port(port, by) for name, port in placement.ports.items()},
        strips=tuple(replace(strip, path=by.points(strip.path)) for strip in placement.strips),
        vias=tuple(_via(via, by) for via in placement.vias),
        holes=tuple(_hole(hole, by) for hole in placement.holes),
        ground_shapes=tuple((by.ring(ring), origin) for ring, origin in placement.ground_shapes),
    )


def _line(line: PlacedLine, by: Attitude) -> PlacedLine:
    """Return a moved line; a mirror turns its bends the other way."""
    sign = -1.0 if by.mirrored else 1.0
    bends = tuple(replace(bend, turn=sign * bend.turn) for bend in line.bends)
    return replace(line, path=by.points(line.path), bends=bends)


def _part(part: PlacedPart, by: Attitude) -> PlacedPart:
    """Return a moved part: mirrored with its board, which is drawn but never made."""
    x, y = by.point((part.x, part.y))
    return replace(
        part,
        x=x,
        y=y,
        heading=by.heading(part.heading),
        pads=tuple(_pad(pad, by) for pad in part.pads),
        outline=by.ring(part.outline),
        courtyard=by.ring(part.courtyard),
        cutout=None if part.cutout is None else by.ring(part.cutout),
    )


def _pad(pad: PlacedPad, by: Attitude) -> PlacedPad:
    """Return a moved pad."""
    x, y = by.point((pad.x, pad.y))
    return replace(pad, x=x, y=y, outline=by.ring(pad.outline), heading=by.heading(pad.heading))


def _port(port: PlacedPort, by: Attitude) -> PlacedPort:
    """Return a moved port."""
    x, y = by.point((port.x, port.y))
    return replace(port, x=x, y=y, heading=by.heading(port.heading), edge=by.edge(port.edge))


def _via(via: PlacedVia, by: Attitude) -> PlacedVia:
    """Return a moved via."""
    x, y = by.point((via.x, via.y))
    return replace(via, x=x, y=y)


def _hole(hole: PlacedHole, by: Attitude) -> PlacedHole:
    """Return a moved hole."""
    x, y = by.point((hole.x, hole.y))
    return replace(hole, x=x, y=y)
