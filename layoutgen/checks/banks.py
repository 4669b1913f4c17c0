"""Banks as drawn: the feed's end, and how far along the common strip each part stands."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import shapely

from layoutgen.artwork import Artwork
from layoutgen.checks.planar import CHORD_NM, Geometry
from layoutgen.circuit import End, Net
from layoutgen.geometry import Point
from layoutgen.placement import PlacedPad, Placement
from layoutgen.reading import CircuitFile

__all__ = ["Bank", "Member", "banks"]


@dataclass(frozen=True, slots=True, eq=False)
class Member:
    """A part of a bank: its live pad [nm], its way along the strip from the feed [nm], its due rank."""

    part: str
    pad: shapely.Polygon
    way: float
    rank: tuple[bool, float]


@dataclass(frozen=True, slots=True, eq=False)
class Bank:
    """A bank: its net, its feed's name and end [nm] (a line's end across its width), parts as drawn."""

    net: str
    feed: str
    end: Geometry
    members: tuple[Member, ...]


def banks(artwork: Artwork) -> Iterator[Bank]:
    """Yield the banks whose feed is placed, parts in the order the feed meets them."""
    placement = artwork.placement
    circuit = placement.sized.circuit
    for net in circuit.nets.values():
        end = None if net.feed is None else _feed_end(placement, net.feed, net.name)
        if len(net.bank) > 1 and net.feed is not None and end is not None:
            members = sorted(
                _members(placement, circuit.file, net, end), key=lambda m: (m.way, m.rank, m.part)
            )
            yield Bank(net.name, net.feed.element, end, tuple(members))


def _feed_end(placement: Placement, feed: End, net: str) -> Geometry | None:
    """Return where a feed ends: across a line's width, a part's pad, or a port; None when not placed."""
    if (line := placement.lines.get(feed.element)) is not None:
        return _across(line.path if feed.index else line.path[::-1], line.width)
    if (pair := placement.pairs.get(feed.element)) is not None:
        path = pair.paths[feed.index // 2]
        return _across(path if feed.index % 2 else path[::-1], pair.width)
    if (part := placement.parts.get(feed.element)) is not None:
        return next((pad.outline.polygon(CHORD_NM) for pad in part.pads if pad.net == net), None)
    port = placement.ports.get(feed.element)
    return None if port is None else shapely.Point(port.x, port.y)


def _across(path: tuple[Point, ...], width: float) -> shapely.LineString:
    """Return the line across the last point of a centre-line, as long as the line is wide."""
    (ax, ay), (bx, by) = path[-2], path[-1]
    share = width / 2.0 / shapely.Point(ax, ay).distance(shapely.Point(bx, by))
    nx, ny = -(by - ay) * share, (bx - ax) * share
    return shapely.LineString([(bx - nx, by - ny), (bx + nx, by + ny)])


def _members(placement: Placement, file: CircuitFile, net: Net, end: Geometry) -> Iterator[Member]:
    """Yield the parts of a bank with their ways from the feed."""
    strip = next((s for s in placement.strips if s.net == net.name and len(s.path) > 1), None)
    for name in net.bank:
        pad = _live_pad(placement, name, net.name)
        if pad is None:
            continue
        outline = pad.outline.polygon(CHORD_NM)
        centre = outline.centroid
        if strip is None:
            way = float(centre.distance(end.centroid))
        else:
            axis = shapely.LineString(strip.path)
            way = abs(axis.project(centre) - axis.project(end.centroid))
        part = file.parts[name]
        ranked = part.kind == "capacitor" and part.value is not None
        yield Member(name, outline, round(way, -3), (not ranked, part.value or 0.0 if ranked else 0.0))


def _live_pad(placement: Placement, part: str, net: str) -> PlacedPad | None:
    """Return a part's pad on the bank's net."""
    pads = placement.parts[part].pads if part in placement.parts else ()
    return next((pad for pad in pads if pad.net == net), None)
