"""Copper that carries signals and supplies: outlines of lines, pairs, radial stubs, strips and pads."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.artwork.board import GND, OPEN, board_area, has_area
from layoutgen.artwork.limits import Limits
from layoutgen.artwork.records import Shape
from layoutgen.geometry import (
    Point,
    Ring,
    band,
    cut,
    grow,
    joined,
    offset_ring,
    overlap,
    pieces,
    rings_of,
    sector_cover,
    sector_ring,
    stroke,
)
from layoutgen.origin import Origin
from layoutgen.placement import PlacedLine, PlacedPad, PlacedPair, PlacedPart, PlacedRadial, Placement, Strip
from layoutgen.units import to_nm

__all__ = ["Conductor", "conductors_of", "copper_shapes"]

_SKEW_MARGIN_NM = 30
"""Added to offsets of outlines that are not parallel to the axes, which come out up to 20 nm short [nm]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Conductor:
    """One piece of signal copper: finished outlines [nm] and the area that the pour stays out of.

    ``copper`` is the finished copper as polygons, ``rings`` the same as outlines with true arcs, ``drawn``
    the artwork (grown by the undercut), ``gap`` the pour's distance [nm], ``keepout`` the copper grown by it.
    ``rf`` tells bare from covered copper; ``guarded`` is True for what wants a via fence beside it.
    """

    name: str
    role: str
    net: str
    rf: bool
    guarded: bool
    copper: BaseGeometry
    rings: tuple[Ring, ...]
    drawn: tuple[Ring, ...]
    gap: int
    keepout: BaseGeometry
    origin: Origin


def conductors_of(placement: Placement, limits: Limits) -> tuple[Conductor, ...]:
    """Return all signal copper: lines, pairs, radial stubs, strips, then pads that are not on ground.

    Lines and strips are cut back where they would come nearer than ``limits.edge`` to a cut-out or to the
    profile; the pads of a part are not, and a port with ``to_edge`` runs to the profile.
    """
    room = _Room(placement, limits)
    gaps = _net_gaps(placement, limits)
    out = [_line(line, room) for line in placement.lines.values()]
    for pair in placement.pairs.values():
        out.extend(_pair(pair, room))
    out.extend(_radial(radial, room, gaps) for radial in placement.radials.values())
    out.extend(_strip(strip, room, gaps) for strip in placement.strips)
    for part in placement.parts.values():
        out.extend(
            _pad(part, pad, room, gaps) for pad in part.pads if pad.net != GND and has_area(pad.outline)
        )
    return tuple(out)


def copper_shapes(conductors: Sequence[Conductor]) -> Iterator[Shape]:
    """Yield the drawn outlines of signal copper."""
    for piece in conductors:
        for ring in piece.drawn:
            yield Shape(layer="copper_top", outline=ring, net=piece.net, role=piece.role, origin=piece.origin)


class _Room:
    """Where copper may be: the board, its inset, what cut-outs keep clear, and who ends at the profile."""

    def __init__(self, placement: Placement, limits: Limits) -> None:
        self.placement, self.limits = placement, limits
        self.board = board_area(placement)
        self.inset = board_area(placement, limits.edge)
        cutouts = [part.cutout.polygon() for part in placement.parts.values() if part.cutout is not None]
        self.cutouts = joined(grow(cutout, limits.edge) for cutout in cutouts)
        self.to_edge = {port.net for port in placement.ports.values() if port.to_edge}
        self.port_ends = {(port.x, port.y) for port in placement.ports.values()}
        self.coplanar = _coplanar_gaps(placement, limits)

    def trimmed(
        self, ring: Ring, nets: Sequence[str], pair: str = ""
    ) -> tuple[BaseGeometry, tuple[Ring, ...]]:
        """Return finished copper and its outlines, cut back from cut-outs, the profile and strips of pairs.

        Args:
            ring: The outline.
            nets: What the copper carries at its ends.
            pair: The coupled pair that it is a strip of, if of one.
        """
        whole = _valid(ring)
        limit = self.board if self.to_edge.intersection(nets) else self.inset
        off = joined([*pieces(self.cutouts), *self._other_strips(set(nets) - {OPEN}, pair)])
        if ring.polygon().is_valid and limit.covers(whole) and off.disjoint(whole):
            return whole, (ring,)
        left = cut(overlap(whole, limit), off)
        return left, tuple(rings_of(piece)[0] for piece in pieces(left))

    def _other_strips(self, nets: set[str], pair: str) -> Iterator[BaseGeometry]:
        """Yield what copper that meets one strip of a coupled pair must keep off: the other one, and a gap.

        A line or another pair's strip, wider than the strip it feeds, is notched there, at its end, by less
        than that gap's length. A pair's own strips lie as far apart as its gap says, whatever the rules.
        """
        for other in self.placement.pairs.values():
            own = [nets.intersection(other.nets[2 * i : 2 * i + 2]) for i in (0, 1)]
            for i in (0, 1):
                if other.name != pair and own[1 - i] and not own[i]:
                    yield grow(stroke(other.paths[i], other.width).polygon(), self.limits.min_gap)

    def drawn(self, rings: Sequence[Ring]) -> tuple[Ring, ...]:
        """Return the artwork of finished outlines, grown by the undercut: at the profile past it, too.

        Copper that runs to the profile would else be etched back from it.
        """
        return tuple(offset_ring(ring, self.limits.undercut) for ring in rings)

    def reach(self, end: Point, net: str, gap: int) -> int:
        """Return how far the pour's keep-out reaches past a line's end [nm].

        Nothing past an end on ground, which the pour is to meet; to the profile and beyond past a port; past
        an end at a grounded coplanar line, which the pour is to follow, no more than that one's own distance.
        """
        if net == GND:
            return 0
        if end in self.port_ends:
            return gap + 2 * self.limits.margin
        return min(gap, self.coplanar.get(net, gap))


def _coplanar_gaps(placement: Placement, limits: Limits) -> Mapping[str, int]:
    """Return the pour's distance from the nearest-poured grounded coplanar line at each net that has one."""
    gaps: dict[str, int] = {}
    for name, line in placement.sized.circuit.file.lines.items():
        if line.kind == "grounded_coplanar" and name in placement.lines:
            gap = _gap(placement.sized.lines[name].pour_gap, limits)
            gaps.update({net: min(gap, gaps.get(net, gap)) for net in line.nets})
    return gaps


def _valid(ring: Ring) -> BaseGeometry:
    """Return an outline's area, also where it crosses itself (legs shorter than the line is wide)."""
    polygon = ring.polygon()
    return polygon if polygon.is_valid else joined(pieces(shapely.make_valid(polygon)))


def _net_gaps(placement: Placement, limits: Limits) -> Mapping[str, int]:
    """Return the pour's distance for each net [nm]: the largest of the lines that end in it."""
    gaps: dict[str, int] = {}
    sized = placement.sized
    members = [(m.nets, m.pour_gap) for m in sized.lines.values()]
    members += [(m.nets, m.pour_gap) for m in sized.pairs.values()]
    members += [(m.nets, m.pour_gap) for m in sized.radials.values()]
    for nets, pour_gap in members:
        for net in nets:
            gaps[net] = max(_gap(pour_gap, limits), gaps.get(net, 0))
    return gaps


def _line(line: PlacedLine, room: _Room) -> Conductor:
    """Return a line's copper: the mitred stroke along its centre-line."""
    sized = room.placement.sized.lines[line.name]
    gap = _gap(sized.pour_gap, room.limits)
    mitres = [0.0] * (len(line.path) - 2)
    for bend in line.bends:
        mitres[bend.vertex - 1] = bend.mitre_percent
    copper, rings = room.trimmed(stroke(line.path, line.width, mitres), line.nets)
    ends = (line.nets[0], line.nets[1] if len(line.nets) > 1 else OPEN)
    return Conductor(
        name=line.name,
        role="line",
        net=_own_net(line.nets),
        rf=sized.rf,
        guarded=True,
        copper=copper,
        rings=rings,
        drawn=room.drawn(rings),
        gap=gap,
        keepout=_around(line.path, line.width, ends, gap, room),
        origin=line.origin,
    )


def _pair(pair: PlacedPair, room: _Room) -> Iterator[Conductor]:
    """Yield a coupled pair's two strips; the first one's keep-out also closes the slot between them."""
    gap = _gap(room.placement.sized.pairs[pair.name].pour_gap, room.limits)
    for i, path in enumerate(pair.paths):
        nets = pair.nets[2 * i : 2 * i + 2]
        copper, rings = room.trimmed(stroke(path, pair.width), nets, pair.name)
        keepout = _around(path, pair.width, (nets[0], nets[1]), gap, room)
        if i == 0:
            keepout = joined([keepout, _slot(pair)])
        yield Conductor(
            name=pair.name,
            role="pair",
            net=_own_net(nets),
            rf=True,
            guarded=True,
            copper=copper,
            rings=rings,
            drawn=room.drawn(rings),
            gap=gap,
            keepout=keepout,
            origin=pair.origin,
        )


def _radial(radial: PlacedRadial, room: _Room, gaps: Mapping[str, int]) -> Conductor:
    """Return a radial stub's copper, its outer edge a true arc."""
    frame = (radial.apex, radial.heading, radial.sector_deg, radial.inner_radius, radial.outer_radius)
    gap = _gap(room.placement.sized.radials[radial.name].pour_gap, room.limits)
    ring = sector_ring(*frame)
    return Conductor(
        name=radial.name,
        role="radial",
        net=_own_net(radial.nets),
        rf=True,
        guarded=True,
        copper=ring.polygon(),
        rings=(ring,),
        drawn=(sector_ring(*frame, room.limits.undercut),),
        gap=gap,
        keepout=grow(sector_cover(*frame), gap + _SKEW_MARGIN_NM),
        origin=radial.origin,
    )


def _strip(strip: Strip, room: _Room, gaps: Mapping[str, int]) -> Conductor:
    """Return the copper of a strip between pads or of a bank."""
    gap = gaps.get(strip.net, room.limits.default_gap)
    mitres = [0.0] * (len(strip.path) - 2)
    copper, rings = room.trimmed(stroke(strip.path, strip.width, mitres), (strip.net,))
    return Conductor(
        name=strip.name,
        role="strip",
        net=strip.net,
        rf=not _is_dc(room.placement, strip.net),
        guarded=False,
        copper=copper,
        rings=rings,
        drawn=room.drawn(rings),
        gap=gap,
        keepout=_around(strip.path, strip.width, (strip.net, strip.net), gap, room),
        origin=strip.origin,
    )


def _pad(part: PlacedPart, pad: PlacedPad, room: _Room, gaps: Mapping[str, int]) -> Conductor:
    """Return a part's signal pad; it stays whole beside the part's own cut-out."""
    gap = gaps.get(pad.net, room.limits.default_gap)
    copper = pad.outline.polygon()
    return Conductor(
        name=part.name,
        role="pad",
        net=pad.net,
        rf=False,
        guarded=False,
        copper=copper,
        rings=(pad.outline,),
        drawn=room.drawn((pad.outline,)),
        gap=gap,
        keepout=_clear_of(copper, gap),
        origin=part.origin,
    )


def _clear_of(copper: BaseGeometry, gap: int) -> BaseGeometry:
    """Return copper grown by a gap [nm], never less where its edges are not parallel to an axis."""
    straight = copper.area == shapely.box(*copper.bounds).area
    return grow(copper, gap if straight else gap + _SKEW_MARGIN_NM)


def _around(path: Sequence[Point], width: int, nets: tuple[str, str], gap: int, room: _Room) -> BaseGeometry:
    """Return the band that the pour stays out of along a line or strip."""
    start, end = (room.reach(at, net, gap) for at, net in zip((path[0], path[-1]), nets, strict=True))
    return band(path, math.ceil(width / 2) + gap, start, end)


def _slot(pair: PlacedPair) -> BaseGeometry:
    """Return the area between the two strips of a pair."""
    return joined(
        [shapely.MultiPoint([*pair.paths[0], *pair.paths[1]]).convex_hull.buffer(1, join_style="mitre")]
    )


def _gap(metres: float, limits: Limits) -> int:
    """Return a pour distance [nm]; the default one where the sizing has none."""
    return to_nm(metres) if math.isfinite(metres) else limits.default_gap


def _own_net(nets: Sequence[str]) -> str:
    """Return the first net that is neither ground nor the open end: the one a line's shape carries."""
    return next((net for net in nets if net not in (GND, OPEN)), GND)


def _is_dc(placement: Placement, net: str) -> bool:
    """True for a net that joins DC things only."""
    known = placement.sized.circuit.nets.get(net)
    return known is not None and known.is_dc
