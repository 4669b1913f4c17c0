"""What every laying of things needs: the circuit, the walk, lengths; strips, part bodies, ways kept clear."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from layoutgen.circuit import End, EndKind
from layoutgen.geometry import Point
from layoutgen.placement.bodies import OVERLAP, BodyLand, PartBody
from layoutgen.placement.budgets import LineLengths, strip_width
from layoutgen.placement.clearance import Kind, Obstacle
from layoutgen.placement.frame import Box, Pose, ahead, box_to_world, slices_to_world, to_world
from layoutgen.placement.launches import Launch, launches_of
from layoutgen.placement.model import GROUND, Model, strip_owner
from layoutgen.placement.state import EDGES, Growth, LaidStrip, corridor_box, leg_slices
from layoutgen.placement.tour import Hub, Tour

__all__ = ["Kit", "PinnedError", "part_obstacles", "root_edge", "span_along", "world"]

PIN_TOLERANCE = 5  # [nm]: rounding of solved legs


class PinnedError(Exception):
    """A candidate cannot be laid as something asks; carries element and what was wrong."""

    def __init__(self, element: str, what: str) -> None:
        """Keep both."""
        super().__init__(what)
        self.element, self.what = element, what


@dataclass(slots=True)
class Kit:
    """Lays single pieces into a growing candidate; knows the circuit, remembers turned bodies only.

    ``turns_leads`` lets leads turn away from one another, and stand farther off what they meet.
    """

    model: Model
    tour: Tour
    lengths: LineLengths
    turns_leads: bool = False
    launches: Mapping[str, Launch] = field(init=False)
    _turned: dict[tuple[str, float], list[Obstacle]] = field(default_factory=dict)
    _spans: dict[tuple[str, float], tuple[int, int]] = field(default_factory=dict)

    def __post_init__(self) -> None:
        """Find the ports' launches."""
        self.launches = launches_of(self.model)

    def launch_length(self, port: str) -> int:
        """Return how far the pad of a port's launch reaches from the end of the port's copper [nm], or 0.

        The pad itself keeps its distance from the profile, also where the port's copper does not.
        """
        launch = self.launches.get(port)
        return 0 if launch is None else launch.land.along + self.model.limits.edge - self.inset(port)

    def net(self, end: End) -> str:
        """Return the net of an end."""
        return self.model.net_of(end)

    def part_obstacles(self, body: PartBody, pose: Pose) -> list[Obstacle]:
        """Return a part's boxes at a pose; turned once per heading, then only moved."""
        key = (body.name, pose.heading)
        if key not in self._turned:
            self._turned[key] = part_obstacles(body, Pose(0, 0, pose.heading))
        x, y = pose.x, pose.y
        return [
            Obstacle((b[0] + x, b[1] + y, b[2] + x, b[3] + y), item.kind, item.owner, net=item.net)
            for item in self._turned[key]
            for b in (item.box,)
        ]

    def span(self, body: PartBody, land: BodyLand, side: float) -> tuple[int, int]:
        """Return a bank part's reach along the strip, remembered (see :func:`span_along`)."""
        key = (body.name, side)
        if key not in self._spans:
            self._spans[key] = span_along(body, land, side)
        return self._spans[key]

    def strip(
        self, growth: Growth, net: str, width: int, points: tuple[Point, ...], kind: Kind = Kind.STRIP
    ) -> None:
        """Lay a strip of a net; nothing where it has no length."""
        if points[0] == points[-1]:
            return
        growth.strips.append(LaidStrip(net, width, points))
        owner = strip_owner(net)
        growth.obstacles += [Obstacle(box, kind, owner) for leg in leg_slices(points, width) for box in leg]

    def keep_way(self, growth: Growth, owner: str, kind: Kind, point: Point, edge: str, width: int) -> None:
        """Keep the way from a point to the board's edge clear."""
        box = corridor_box(point, EDGES[edge], width)
        growth.obstacles.append(Obstacle(box, kind, owner, corridor=True))

    def leaves_as_hinted(self, end: End, heading: float) -> bool:
        """True when a line whose first end leaves with a heading [deg] keeps its ``leave`` hint."""
        layout = self.model.file.layout
        hint = layout.hints.get(end.element) if layout is not None else None
        return hint is None or hint.leave is None or heading == hint.leave % 360.0

    def across(self, end: End) -> int:
        """Return how wide the copper of an end is [nm], 0 for a port."""
        if end.kind is EndKind.PAD:
            return self.model.bodies[end.element].land_at(end).across
        return self.model.widths.get(end.element, 0)

    def beside(self, across: list[int]) -> int:
        """Return how far from a node a pad begins [nm], for the half widths of the lines that run across.

        It begins in the edge of the widest; where another is a little narrower, in that one's edge, so that
        no slit too narrow for etching is left.
        """
        widest, least = max(across, default=0), min(across, default=0)
        return max(0, (least if self.is_slit(widest - least) else widest) - OVERLAP)

    def joint_width(self, net: str, pad: End, facing: End | None) -> int:
        """Return the width [nm] of the strip between a node and a pad, at most as wide as the pad.

        It is as wide as what leaves the node opposite to the pad (``facing``), or as a bank's strip: a
        narrower one would leave a slit between the two.
        """
        hub = self.tour.hubs[net]
        wide = self.bank_width(hub) if hub.bank else 0 if facing is None else self.across(facing)
        return min(max(strip_width(self.model, net), wide), self.across(pad))

    def lead(self, growth: Growth, pad: End, outer: Pose, node: Pose, width: int) -> None:
        """Lay the strip from a pad, or from the bar across several, to the node beyond it.

        Args:
            growth: The candidate.
            pad: The pad's end.
            outer: Middle of its outer edge, heading out.
            node: The node, on the pad's axis.
            width: How wide the strip is at most [nm].
        """
        body = self.model.bodies[pad.element]
        land = body.land_at(pad)
        start = ahead(outer, -land.along // 2 if body.is_joined(land) else -OVERLAP)
        kind = Kind.LEAD if len(body.lands) > 2 else Kind.STRIP
        self.strip(growth, self.net(pad), min(width, land.across), (start.point, node.point), kind)

    def room_ahead(self, pad: End, sides: Sequence[End], onward: Sequence[End] = ()) -> int:
        """Return how far beyond a pad's outer edge its node must lie [nm], clear of the pad's neighbours.

        Args:
            pad: The pad's end.
            sides: What leaves the node across the pad's way out.
            onward: What goes on along it.
        """
        body = self.model.bodies[pad.element]
        land, gap = body.land_at(pad), self.model.limits.gap
        free_side = len(sides) < 2 and body.has_row_on_one_side(land)
        half = max((self.across(end) / 2 for end in onward), default=0.0)
        room = body.free_from(land, half if free_side else math.inf, gap)
        return room + max((self.across(end) // 2 for end in sides), default=0) if room else 0

    def edge_at(self, net: str) -> int:
        """Return how far from its node the copper of a net's lines, or of its bank's strip, reaches [nm]."""
        hub = self.tour.hubs[net]
        ends = self.model.circuit.nets[net].ends
        wide = [self.model.widths[end.element] for end in ends if end.element in self.model.widths]
        return max([*wide, self.bank_width(hub) if hub.bank else 0]) // 2

    def is_slit(self, room: int) -> bool:
        """True when copper of one net would be left apart by a room [nm] too narrow for safe etching."""
        return 0 < room < 2 * self.model.limits.gap + OVERLAP

    def inset(self, port: str) -> int:
        """Return how far short of the profile a port's copper ends [nm]."""
        return 0 if self.model.file.ports[port].to_edge else self.model.limits.edge

    def carries_port(self, net: str) -> str | None:
        """Return the first port on a net."""
        return next((name for name, port in self.model.file.ports.items() if port.net == net), None)

    def hub_strip_width(self, hub: Hub) -> int:
        """Return the width [nm] of the strip that joins a net to its port."""
        return self.bank_width(hub) if hub.bank else strip_width(self.model, hub.net)

    def bank_width(self, hub: Hub) -> int:
        """Return a bank's strip width [nm]: as wide as feed, pads and current need."""
        widths = [
            self.model.widths[end.element]
            for end in self.model.circuit.nets[hub.net].ends
            if end.element in self.model.widths
        ]
        pads = [self.model.bodies[end.element].land_at(end).along for end in hub.bank]
        return max([*widths, min(pads)])


def world(pose: Pose, local: Pose) -> Pose:
    """Return a pose given in a part's frame as a pose of the board."""
    x, y = to_world(pose, local.x, local.y)
    return Pose(x, y, (pose.heading + local.heading) % 360.0)


def span_along(body: PartBody, land: BodyLand, side: float) -> tuple[int, int]:
    """Return a bank part's reach [nm] along the strip, from its axis, back and forth.

    ``side`` [deg] is the turn from the strip's heading to the part.
    """
    pose = Pose(0, 0, (180.0 + side - land.heading) % 360.0)
    x0, _, x1, _ = body.extent(pose)
    axis = to_world(pose, land.x, land.y)[0]
    return x0 - axis, x1 - axis


def part_obstacles(body: PartBody, pose: Pose) -> list[Obstacle]:
    """Return a part's boxes at a pose: pads, ground copper, courtyard, cut-out, holes."""
    name = body.name
    out = [Obstacle(piece, Kind.BODY, name) for box in body.solid for piece in slices_to_world(pose, box)]
    for land in body.lands:
        if land.has_copper:
            kind = Kind.GROUND if land.net == GROUND else Kind.PAD
            out += [Obstacle(piece, kind, name, net=land.net) for piece in slices_to_world(pose, land.box)]
    out += [
        Obstacle(piece, Kind.GROUND, name) for box in body.grounds for piece in slices_to_world(pose, box)
    ]
    if body.cutout is not None:
        out += [Obstacle(piece, Kind.CUTOUT, name) for piece in slices_to_world(pose, body.cutout)]
    for hole in body.holes:
        r = hole.diameter // 2 + 1
        box: Box = (hole.x - r, hole.y - r, hole.x + r, hole.y + r)
        out.append(Obstacle(box_to_world(pose, box), Kind.HOLE, name))
    return out


def root_edge(model: Model, port: str) -> str:
    """Return the edge of the port where the walk begins: as written, else west."""
    return model.file.ports[port].edge or "west"
