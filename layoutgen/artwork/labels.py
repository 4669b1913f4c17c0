"""Names for people on the ``reference`` layer: ports, nets, lines, and the mark of the origin."""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Sequence

from layoutgen.artwork.board import BOARD, GND
from layoutgen.artwork.records import Label
from layoutgen.geometry import Point
from layoutgen.origin import Origin
from layoutgen.placement import Placement

__all__ = ["reference_labels"]

_HEIGHT_NM = 500_000


def reference_labels(placement: Placement) -> list[Label]:
    """Return all labels: their anchors are the middles of what they name.

    The origin is marked by a cross, then come ports, elements, parts, and each net once, where it is met
    first: on a pad, else at the end of a line.
    """
    labels = [_label("+", (0, 0), BOARD)]
    labels += [_label(port.name, (port.x, port.y), port.origin) for port in placement.ports.values()]
    for line in placement.lines.values():
        middle, rotation = _middle(line.path)
        labels.append(_label(line.name, middle, line.origin, rotation))
    for pair in placement.pairs.values():
        middle, rotation = _middle(pair.paths[0])
        labels.append(_label(pair.name, middle, pair.origin, rotation))
    for radial in placement.radials.values():
        reach, angle = radial.outer_radius / 2.0, math.radians(radial.heading)
        x, y = radial.apex[0] + reach * math.cos(angle), radial.apex[1] + reach * math.sin(angle)
        labels.append(_label(radial.name, (round(x), round(y)), radial.origin))
    labels += [_label(part.name, (part.x, part.y), part.origin) for part in placement.parts.values()]
    named: set[str] = set()
    for net, at, origin in _net_places(placement):
        if net not in named:
            named.add(net)
            labels.append(_label(net, at, origin))
    return labels


def _label(text: str, at: Point, origin: Origin, rotation: float = 0.0) -> Label:
    """Return a label on the reference layer."""
    return Label(
        layer="reference", text=text, x=at[0], y=at[1], height=_HEIGHT_NM, rotation=rotation, origin=origin
    )


def _middle(path: Sequence[Point]) -> tuple[Point, float]:
    """Return the middle of a path's longest leg, and the rotation [deg] that reads along it upright."""
    a, b = max(itertools.pairwise(path), key=lambda leg: math.dist(*leg))
    angle = math.degrees(math.atan2(b[1] - a[1], b[0] - a[0])) % 180.0
    rotation = angle if angle <= 90.0 else angle - 180.0
    return (round((a[0] + b[0]) / 2), round((a[1] + b[1]) / 2)), rotation


def _net_places(placement: Placement) -> Iterator[tuple[str, Point, Origin]]:
    """Yield where nets are met: signal pads, then ends of lines and pairs, then ground pads."""
    pads = [(pad, part) for part in placement.parts.values() for pad in part.pads]
    yield from ((pad.net, (pad.x, pad.y), part.origin) for pad, part in pads if pad.net != GND)
    for line in placement.lines.values():
        yield from zip(line.nets, (line.path[0], line.path[-1]), itertools.repeat(line.origin), strict=False)
    for pair in placement.pairs.values():
        ends = [path[i] for path in pair.paths for i in (0, -1)]
        yield from ((net, at, pair.origin) for net, at in zip(pair.nets, ends, strict=True) if net != "open")
    yield from ((pad.net, (pad.x, pad.y), part.origin) for pad, part in pads if pad.net == GND)
