"""Laying one thing after another: lines, parts, banks, strips, ports, each with what follows from it."""

from __future__ import annotations

import math
from dataclasses import dataclass, field, replace

from layoutgen.circuit import End, EndKind
from layoutgen.circuit.queries import ends_of
from layoutgen.geometry import Point
from layoutgen.placement.bodies import OVERLAP, BodyLand, PartBody
from layoutgen.placement.budgets import LineLengths, strip_width
from layoutgen.placement.clearance import Kind, Obstacle
from layoutgen.placement.frame import Box, Pose, ahead, box_to_world, to_world, unit
from layoutgen.placement.model import GROUND, Model, strip_owner
from layoutgen.placement.state import (
    EDGES,
    Device,
    Growth,
    LaidLine,
    LaidPair,
    LaidPort,
    LaidRadial,
    LaidStrip,
    Pending,
    corridor_box,
    leg_boxes,
)
from layoutgen.placement.tour import Hub, Tour
from layoutgen.placement.words import Route, route_points
from layoutgen.sizing import SizedRadial
from layoutgen.units import to_nm

__all__ = ["Layer", "PinnedError", "root_edge"]

_PIN_TOLERANCE = 5  # [nm]: rounding of solved legs
_RF_BEND_WEIGHT = 10.0  # a fold in a stub must save ten times what one in a feed must
_SLICES = 8  # boxes that stand for a radial stub's sector
_BANK_SPACE = 200_000  # between neighbouring bank parts [nm]; common practice, no source


class PinnedError(Exception):
    """A hint asks for what the candidate cannot give; carries element and what was wrong."""

    def __init__(self, element: str, what: str) -> None:
        """Keep both."""
        super().__init__(what)
        self.element, self.what = element, what


@dataclass(slots=True)
class Layer:
    """Lays things into a growing candidate; knows the circuit, holds no state of its own."""

    model: Model
    tour: Tour
    lengths: LineLengths
    _turned: dict[tuple[str, float], list[Obstacle]] = field(default_factory=dict)
    _spans: dict[tuple[str, float], tuple[int, int]] = field(default_factory=dict)

    # -- lines ---------------------------------------------------------------------------------------

    def line(
        self,
        growth: Growth,
        end: End,
        start: Pose,
        route: Route,
        edge: str | None = None,
        bank_side: int = 1,
    ) -> None:
        """Lay a line from one of its ends along a route, and what it leads to.

        Args:
            growth: The candidate.
            end: The end at the start pose.
            start: Node point and heading out of it.
            route: Word and legs.
            edge: The board edge at which it ends, for a line to a port.
            bank_side: Where a bank it leads to puts its parts: 1 left of the strip, -1 right.
        """
        growth.bank_side = bank_side
        growth.use(self._net(end), start.heading)
        points, arrival = route_points(start, route)
        name = end.element
        line = self.model.sized.lines[name]
        open_edge = edge if edge is not None and line.free and not growth.bounds.known(edge) else None
        root = self._root_edge(end)
        open_root = root if root is not None and line.free and not growth.bounds.known(root) else None
        growth.lines[name] = LaidLine(
            name, end.index, points, route, self.lengths.ends(name), open_edge, open_root
        )
        growth.bends += len(route.word) * self.bend_weight(end)
        self._line_obstacles(growth, end, points, edge)
        far = next((found for found in ends_of(self.model.file, name) if found[0].index != end.index), None)
        if far is None:
            return
        if far[1] == GROUND:
            self._ground_end(growth, name, arrival)
            return
        self.arrive(growth, self.tour.hubs[far[1]], arrival)

    def bend_weight(self, end: End) -> float:
        """Return what a bend counts for: a feed or supply may fold, a stub or matching line better not."""
        feeds = self.tour.leads_to_port.get((end.element, end.index), False)
        off_path = end.element not in self.model.circuit.spine
        return 1.0 if off_path and feeds else _RF_BEND_WEIGHT

    def _line_obstacles(self, growth: Growth, end: End, points: tuple[Point, ...], edge: str | None) -> None:
        """Add a line's boxes; where it ends in a port it runs up to the edge, and its way is kept clear."""
        name = end.element
        width, kind, last = self.model.widths[name], self._line_kind(name), len(points) - 2
        root = self._root_edge(end)
        inset = 0 if self._runs_to_edge(name) else self.model.limits.edge
        for i, box in enumerate(leg_boxes(points, width)):
            edges = (root if i == 0 else None, edge if i == last else None)
            at_edges = tuple(e for e in edges if e is not None)
            growth.obstacles.append(Obstacle(box, kind, name, at_edges=at_edges, inset=inset))
        laid = growth.lines[name]
        if laid.open_edge is not None:
            self._keep_way(growth, name, kind, points[-1], laid.open_edge, width)
        if laid.root_edge is not None:
            self._keep_way(growth, name, kind, points[0], laid.root_edge, width)

    def _keep_way(self, growth: Growth, owner: str, kind: Kind, point: Point, edge: str, width: int) -> None:
        """Keep the way from a point to the board's edge clear."""
        box = corridor_box(point, EDGES[edge], width)
        growth.obstacles.append(Obstacle(box, kind, owner, corridor=True))

    def _root_edge(self, end: End) -> str | None:
        """Return the edge at which the walk begins, for the line that leaves the first port."""
        hub = self.tour.hubs[self._net(end)]
        arrival = hub.arrival
        if arrival is None or arrival.kind is not EndKind.PORT or hub.bank or len(hub.arms) != 1:
            return None
        return root_edge(self.model, arrival.element)

    def _runs_to_edge(self, name: str) -> bool:
        """True when a line ends in a port whose copper runs to the profile."""
        nets = self.model.file.lines[name].nets
        return any(port.to_edge and port.net in nets for port in self.model.file.ports.values())

    def _line_kind(self, name: str) -> Kind:
        return Kind.LINE if self.model.sized.lines[name].rf else Kind.SUPPLY

    def _ground_end(self, growth: Growth, name: str, at: Pose) -> None:
        """Put a via on the line's end, more beside it as the width allows, or behind it, and their copper."""
        limits = self.model.limits
        width = self.model.widths[name]
        pairs = max(0, (width - limits.land) // 2 // limits.pitch)
        spots = [(0, 0)]
        for k in range(1, pairs + 1):
            spots += [(0, k * limits.pitch), (0, -k * limits.pitch)]
        behind = 1
        while len(spots) < limits.ground_vias:
            spots.append((behind * limits.pitch, 0))
            behind += 1
        growth.line_vias += [(name, to_world(at, x, y)) for x, y in spots]
        half = max(width // 2, limits.land // 2)
        box = box_to_world(
            at, (-limits.land // 2, -half, (behind - 1) * limits.pitch + limits.land // 2, half)
        )
        growth.line_grounds.append((name, box))
        growth.obstacles.append(Obstacle(box, Kind.GROUND, name))

    # -- arriving at a net ---------------------------------------------------------------------------

    def arrive(self, growth: Growth, hub: Hub, at: Pose) -> None:
        """Go on from the end of a line: lay what must lie here, leave the rest pending."""
        growth.use(hub.net, at.heading + 180.0)
        if hub.bank:
            self._bank(growth, hub, at)
            return
        if len(hub.arms) == 1:
            self._single(growth, hub.arms[0].end, hub, at)
            return
        self._leave_arms(growth, hub, at)

    def _single(self, growth: Growth, end: End, hub: Hub, at: Pose) -> None:
        if end.kind is EndKind.PAD:
            self._part_by_inner_edge(growth, end, at)
        elif end.kind is EndKind.PORT:
            self._port_at(growth, end, at, self._carrier_of(growth, hub), strip_width(self.model, hub))
        else:
            growth.pending.append(Pending(end, at, (0.0,)))

    def _carrier_of(self, growth: Growth, hub: Hub) -> str:
        arrival = hub.arrival
        return arrival.element if arrival is not None else hub.net

    def _leave_arms(self, growth: Growth, hub: Hub, at: Pose) -> None:
        for arm in hub.arms:
            turns = (90.0, -90.0) if arm.turn is None else (arm.turn,)
            growth.pending.append(Pending(arm.end, at, turns, self._arm_offset(hub, arm.end, arm.turn)))

    def _arm_offset(self, hub: Hub, end: End, turn: float | None) -> int:
        """Return how far from the node a pad arm's outer edge lies [nm]: at the edge of the copper across."""
        if end.kind is not EndKind.PAD:
            return 0
        across = []
        for other, heading in hub.canonical_headings():
            is_side = heading in (90.0, 270.0)
            crosses = not is_side if turn is None else is_side
            if other != end and crosses and other.element in self.model.widths:
                across.append(self.model.widths[other.element] // 2)
        if not across:
            return 0
        return max(0, max(across) - OVERLAP)

    # -- parts ---------------------------------------------------------------------------------------

    def _part_by_inner_edge(self, growth: Growth, end: End, at: Pose) -> None:
        body = self.model.bodies[end.element]
        land = body.land_at(end)
        self.part(growth, end, body.entered_by(land, at, edge="inner"))

    def pad_arm(self, growth: Growth, pending: Pending, turn: float, bank_side: int = 1) -> None:
        """Lay a part whose pad is an arm of a junction; a bank it leads to lies left (1) or right (-1)."""
        growth.bank_side = bank_side
        end = pending.end
        body = self.model.bodies[end.element]
        land = body.land_at(end)
        net = self._net(end)
        node = pending.at.turned(turn)
        growth.use(net, node.heading)
        outer = ahead(node, pending.offset)
        if turn == 0.0 and pending.offset:
            hub = self.tour.hubs[net]
            width = min(strip_width(self.model, hub), land.across)
            self._strip(growth, net, width, (node.point, ahead(outer, OVERLAP).point))
        self.part(growth, end, body.entered_by(land, outer, edge="outer"))

    def _net(self, end: End) -> str:
        return next(net for found, net in ends_of(self.model.file, end.element) if found.index == end.index)

    def part(self, growth: Growth, entered: End, pose: Pose) -> None:
        """Lay a part at a pose, and go on from its other pads."""
        body = self.model.bodies[entered.element]
        self._check_hint(growth, body.name, pose)
        growth.parts[body.name] = pose
        growth.obstacles += self._part_obstacles(body, pose)
        self._note_device(growth, entered, body, pose)
        for end, net in ends_of(self.model.file, body.name):
            if end.index == entered.index or net == GROUND:
                continue
            hub = self.tour.hubs[net]
            if hub.arrival == end:
                self._arrive_by_pad(growth, hub, body, body.land_at(end), pose)

    def _note_device(self, growth: Growth, entered: End, body: PartBody, pose: Pose) -> None:
        """Remember a transistor's plane: what comes before it should stay behind it."""
        if self.model.file.parts[body.name].kind != "transistor":
            return
        ux, uy = unit(pose.heading + body.land_at(entered).heading + 180.0)
        if ux and uy:
            return
        axis = 0 if ux else 1
        stage = self.tour.stages[self._net(entered)]
        growth.devices.append(Device(stage, axis, ux + uy, (pose.x, pose.y)[axis]))

    def _check_hint(self, growth: Growth, name: str, pose: Pose) -> None:
        layout = self.model.file.layout
        hint = layout.hints.get(name) if layout is not None else None
        if hint is None:
            return
        if hint.heading is not None and hint.heading % 360.0 != pose.heading:
            raise PinnedError(
                name, f"it would be heading {pose.heading:g} deg, the hint says {hint.heading:g} deg"
            )
        if hint.at is not None:
            self._pin(growth, name, pose, (to_nm(hint.at[0]), to_nm(hint.at[1])))

    def _pin(self, growth: Growth, name: str, pose: Pose, at: Point) -> None:
        """Settle the board's west and south edges by a pinned part, or check that it lies where it must."""
        for edge, here, wanted in (("west", pose.x, at[0]), ("south", pose.y, at[1])):
            if not growth.bounds.known(edge):
                growth.bounds = growth.bounds.fixed(edge, here - wanted)
            off = here - wanted - growth.bounds.at(edge)
            if abs(off) > _PIN_TOLERANCE:
                raise PinnedError(name, f"it would lie {abs(off) / 1e6:.3f} mm from where the hint puts it")

    def _arrive_by_pad(self, growth: Growth, hub: Hub, body: PartBody, land: BodyLand, pose: Pose) -> None:
        """Go on from a pad: a line starts at its inner edge, all else beyond its outer edge."""
        outer, inner = _world(pose, land.outer), _world(pose, land.inner)
        growth.use(hub.net, outer.heading + 180.0)
        if hub.bank:
            first = self.model.bodies[hub.bank[0].element]
            gap = _beyond(body, land) + _half_along(first, first.land_at(hub.bank[0])) + _BANK_SPACE
            start = ahead(outer, gap)
            self._strip(growth, hub.net, self._bank_width(hub), (ahead(outer, -OVERLAP).point, start.point))
            self._bank(growth, hub, start)
            return
        if len(hub.arms) == 1 and hub.arms[0].end.kind in (EndKind.LINE, EndKind.COUPLED):
            growth.pending.append(Pending(hub.arms[0].end, inner, (0.0,)))
            return
        if len(hub.arms) == 1:
            self._pad_to(growth, hub, hub.arms[0].end, (body, land), outer)
            return
        self._junction_beyond(growth, hub, land, outer)

    def _pad_to(
        self, growth: Growth, hub: Hub, end: End, left: tuple[PartBody, BodyLand], outer: Pose
    ) -> None:
        """Join a pad to the one other pad, or port, of its net by a strip."""
        body, land = left
        back = ahead(outer, -OVERLAP).point
        if end.kind is EndKind.PORT:
            at = ahead(outer, self.model.limits.spacing)
            self._strip(growth, hub.net, land.across, (back, at.point))
            self._port_at(growth, end, at, strip_owner(hub.net), land.across)
            return
        other = self.model.bodies[end.element]
        met = other.land_at(end)
        gap = max(_beyond(body, land) + _beyond(other, met), self.model.limits.gap)
        there = ahead(outer, gap)
        width = min(land.across, met.across)
        self._strip(growth, hub.net, width, (back, ahead(there, OVERLAP).point))
        self.part(growth, end, other.entered_by(met, there, edge="outer"))

    def _junction_beyond(self, growth: Growth, hub: Hub, land: BodyLand, outer: Pose) -> None:
        """Put a junction's node just beyond a pad and leave its arms pending."""
        half = 0
        for arm in hub.arms:
            if arm.turn is None:
                half = max(half, self._half_width(arm.end))
        node = ahead(outer, max(0, half - OVERLAP))
        if half:
            width = min(strip_width(self.model, hub), land.across)
            self._strip(growth, hub.net, width, (ahead(outer, -OVERLAP).point, node.point))
        self._leave_arms(growth, hub, node)

    def _half_width(self, end: End) -> int:
        if end.kind is EndKind.PAD:
            return self.model.bodies[end.element].land_at(end).across // 2
        return self.model.widths.get(end.element, 0) // 2

    # -- banks ---------------------------------------------------------------------------------------

    def _bank_width(self, hub: Hub) -> int:
        """Return a bank's strip width [nm]: as wide as feed, pads and current need."""
        widths = [
            self.model.widths[end.element]
            for end in self.model.circuit.nets[hub.net].ends
            if end.element in self.model.widths
        ]
        pads = [self.model.bodies[end.element].land_at(end).along for end in hub.bank]
        return max([*widths, min(pads)])

    def _bank(self, growth: Growth, hub: Hub, at: Pose) -> None:
        """Lay shunt parts along a strip, the first on the node, all to one side; leave the rest pending."""
        width = self._bank_width(hub)
        side = 90.0 * growth.bank_side
        position, before = 0, None
        for end in hub.bank:
            body = self.model.bodies[end.element]
            land = body.land_at(end)
            low, high = self._span(body, land, side)
            if before is not None:
                position += before + _BANK_SPACE - low
            before = high
            self._bank_part(growth, end, ahead(at, position), side, width)
        exit_pose = ahead(at, position)
        if position:
            self._strip(growth, hub.net, width, (at.point, exit_pose.point))
        for arm in hub.arms:
            turns = (0.0, side, -side) if arm.turn is None else (arm.turn, -side)
            offset = width // 2 - OVERLAP if arm.end.kind is EndKind.PAD else 0
            growth.pending.append(Pending(arm.end, exit_pose, turns, max(0, offset)))

    def _bank_part(self, growth: Growth, end: End, axis: Pose, side: float, width: int) -> None:
        """Lay one bank part beside its axis on the strip: pad centred on it, or at its edge if it is wide."""
        body = self.model.bodies[end.element]
        land = body.land_at(end)
        inward = max(0, (width - land.along) // 2)
        outer = ahead(axis.turned(side), inward - land.along / 2)
        pose = body.entered_by(land, outer, edge="outer")
        growth.parts[body.name] = pose
        growth.obstacles += self._part_obstacles(body, pose)

    def _span(self, body: PartBody, land: BodyLand, side: float) -> tuple[int, int]:
        """Return a bank part's reach along the strip, remembered."""
        key = (body.name, side)
        if key not in self._spans:
            self._spans[key] = _span_along(body, land, side)
        return self._spans[key]

    def _part_obstacles(self, body: PartBody, pose: Pose) -> list[Obstacle]:
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

    def _strip(self, growth: Growth, net: str, width: int, points: tuple[tuple[int, int], ...]) -> None:
        if points[0] == points[-1]:
            return
        growth.strips.append(LaidStrip(net, width, points))
        owner = strip_owner(net)
        growth.obstacles += [Obstacle(box, Kind.STRIP, owner) for box in leg_boxes(points, width)]

    # -- ports ---------------------------------------------------------------------------------------

    def port_arm(self, growth: Growth, pending: Pending, turn: float) -> None:
        """Run a strip from a junction to the edge for a port that is an arm of it."""
        net = self._net(pending.end)
        node = pending.at.turned(turn)
        growth.use(net, node.heading)
        hub = self.tour.hubs[net]
        width = self._bank_width(hub) if hub.bank else strip_width(self.model, hub)
        out = ahead(node, self.model.reach_at(net) + self.model.limits.spacing)
        self._strip(growth, net, width, (node.point, out.point))
        self._port_at(growth, pending.end, out, strip_owner(net), width)

    def _port_at(self, growth: Growth, end: End, at: Pose, carrier: str, width: int) -> None:
        """Put a port at the end of its copper; settle its edge where the copper's length is given."""
        edge = next((name for name, out in EDGES.items() if out == at.heading), None)
        port = self.model.file.ports[end.element]
        if edge is None or (port.edge is not None and port.edge != edge):
            raise PinnedError(end.element, f"its line arrives heading {at.heading:g} deg")
        line = self.model.sized.lines.get(carrier)
        movable = not growth.bounds.known(edge) and (line is None or line.free)
        if not movable and not growth.bounds.known(edge):
            inset = 0 if port.to_edge else self.model.limits.edge
            ux, uy = unit(at.heading)
            growth.bounds = growth.bounds.fixed(edge, (at.x if ux else at.y) + (ux + uy) * inset)
        if movable and line is None:
            self._open_strip(growth, edge)
        growth.ports[end.element] = LaidPort(end.element, at.point, edge, width, carrier, movable)

    def _open_strip(self, growth: Growth, edge: str) -> None:
        """Let the last strip run on to the edge, and keep its way clear."""
        strip = growth.strips.pop()
        growth.strips.append(LaidStrip(strip.net, strip.width, strip.points, edge))
        last = growth.obstacles.pop()
        growth.obstacles.append(replace(last, at_edges=(edge,), inset=self.model.limits.edge))
        self._keep_way(growth, strip_owner(strip.net), Kind.STRIP, strip.points[-1], edge, strip.width)

    # -- where the walk begins -----------------------------------------------------------------------

    def root_can_move(self, hub: Hub) -> bool:
        """True when a free line leaves the first port: its edge may then still be moved outward."""
        if hub.bank or len(hub.arms) != 1:
            return False
        line = self.model.sized.lines.get(hub.arms[0].end.element)
        return line is not None and line.free

    def leave_port(self, growth: Growth, hub: Hub, pose: Pose) -> tuple[str, int]:
        """Go on from the first port; return what carries it and how wide [nm] that is."""
        growth.use(hub.net, pose.heading + 180.0)
        if not hub.bank and len(hub.arms) == 1 and hub.arms[0].end.kind in (EndKind.LINE, EndKind.COUPLED):
            end = hub.arms[0].end
            growth.pending.append(Pending(end, pose, (0.0,)))
            return end.element, self.model.widths[end.element]
        out = ahead(pose, self.model.limits.spacing + self.model.reach_at(hub.net))
        width = self._bank_width(hub) if hub.bank else strip_width(self.model, hub)
        self._strip(growth, hub.net, width, (pose.point, ahead(out, OVERLAP).point))
        first = growth.obstacles[-1]
        edge = root_edge(self.model, next(end.element for end in (hub.arrival,) if end is not None))
        growth.obstacles[-1] = replace(first, at_edges=(edge,), inset=self.model.limits.edge)
        if hub.bank:
            self._bank(growth, hub, out)
        elif len(hub.arms) == 1:
            end = hub.arms[0].end
            body = self.model.bodies[end.element]
            self.part(growth, end, body.entered_by(body.land_at(end), out, edge="outer"))
        else:
            self._leave_arms(growth, hub, out)
        return strip_owner(hub.net), width

    def begin_without_port(self, growth: Growth, root: End, pose: Pose) -> None:
        """Begin at the first end of an element, for a circuit (or a piece of one) without a port."""
        if root.kind is EndKind.PAD:
            self.part(growth, root, pose)
            hub = self.tour.hubs[self._net(root)]
            body = self.model.bodies[root.element]
            self._arrive_by_pad(growth, hub, body, body.land_at(root), pose)
            return
        growth.pending.append(Pending(root, pose, (0.0,)))
        self.arrive(growth, self.tour.hubs[self._net(root)], pose.turned(180.0))

    # -- bodies without a route ----------------------------------------------------------------------

    def radial(self, growth: Growth, pending: Pending, turn: float) -> None:
        """Lay a radial stub with its apex on the node."""
        name = pending.end.element
        stub = self.model.sized.radials[name]
        pose = pending.at.turned(turn)
        growth.use(self._net(pending.end), pose.heading)
        growth.radials[name] = LaidRadial(name, pose)
        growth.obstacles += [
            Obstacle(box_to_world(pose, box), Kind.LINE, name) for box in sector_slices(stub)
        ]

    def pair(self, growth: Growth, end: End, start: Pose, side: int, length: int) -> None:
        """Lay a coupled pair entered at one of its ends, and go on from the others.

        Args:
            growth: The candidate.
            end: The end at the start pose.
            start: Node point and heading out of it, along the pair.
            side: 1 when the other line lies to the left of the traveller, -1 to the right.
            length: Centre-line length [nm].
        """
        growth.use(self._net(end), start.heading)
        record = self.model.sized.pairs[end.element]
        pitch = to_nm(record.width) + to_nm(record.gap)
        backwards, second = end.index in (1, 3), end.index in (2, 3)
        along = ahead(start, length).turned(180.0) if backwards else start
        lateral = -side if backwards else side
        pose = ahead(along, 0, lateral * pitch) if second else along
        b_side = -lateral if second else lateral
        growth.pairs[end.element] = LaidPair(end.element, pose, b_side, length)
        width = to_nm(record.width)
        for offset in (0, b_side * pitch):
            box = box_to_world(pose, (0, offset - width // 2, length, offset + width // 2))
            growth.obstacles.append(Obstacle(box, Kind.LINE, end.element))
        for other, net in ends_of(self.model.file, end.element):
            if other.index == end.index or net == GROUND:
                continue
            hub = self.tour.hubs[net]
            if hub.arrival == other:
                node = ahead(
                    pose, length if other.index in (1, 3) else 0, b_side * pitch if other.index > 1 else 0
                )
                self.arrive(growth, hub, node if other.index in (1, 3) else node.turned(180.0))


def part_obstacles(body: PartBody, pose: Pose) -> list[Obstacle]:
    """Return a part's boxes at a pose: pads, ground copper, courtyard, cut-out, holes."""
    name = body.name
    out = [Obstacle(box_to_world(pose, box), Kind.BODY, name) for box in body.solid]
    for land in body.lands:
        if land.has_copper:
            kind = Kind.GROUND if land.net == GROUND else Kind.PAD
            out.append(Obstacle(box_to_world(pose, land.box), kind, name, net=land.net))
    out += [Obstacle(box_to_world(pose, box), Kind.GROUND, name) for box in body.grounds]
    if body.cutout is not None:
        out.append(Obstacle(box_to_world(pose, body.cutout), Kind.CUTOUT, name))
    for hole in body.holes:
        r = hole.diameter // 2 + 1
        box: Box = (hole.x - r, hole.y - r, hole.x + r, hole.y + r)
        out.append(Obstacle(box_to_world(pose, box), Kind.HOLE, name))
    return out


def _world(pose: Pose, local: Pose) -> Pose:
    """Return a pose given in a part's frame as a pose of the board."""
    x, y = to_world(pose, local.x, local.y)
    return Pose(x, y, (pose.heading + local.heading) % 360.0)


def _beyond(body: PartBody, land: BodyLand) -> int:
    """Return how far the courtyard reaches beyond a pad's outer edge [nm]."""
    turned = Pose(0, 0, -land.heading % 360.0)
    courtyard = box_to_world(turned, body.courtyard)
    edge = to_world(turned, land.outer.x, land.outer.y)[0]
    return max(0, courtyard[2] - edge)


def _half_along(body: PartBody, land: BodyLand) -> int:
    """Return half a part's breadth across the direction in which it leaves a strip [nm]."""
    low, high = _span_along(body, land, 90.0)
    return max(-low, high)


def _span_along(body: PartBody, land: BodyLand, side: float) -> tuple[int, int]:
    """Return a bank part's reach [nm] along the strip, from its axis, back and forth.

    ``side`` [deg] is the turn from the strip's heading to the part.
    """
    pose = Pose(0, 0, (180.0 + side - land.heading) % 360.0)
    x0, _, x1, _ = body.extent(pose)
    axis = to_world(pose, land.x, land.y)[0]
    return x0 - axis, x1 - axis


def root_edge(model: Model, port: str) -> str:
    """Return the edge of the port where the walk begins: as written, else west."""
    return model.file.ports[port].edge or "west"


def sector_slices(stub: SizedRadial) -> list[Box]:
    """Return boxes, in the frame of a radial stub's apex, that cover its sector [nm]."""
    inner, outer = to_nm(stub.inner_radius), to_nm(stub.outer_radius)
    half = min(stub.sector, math.pi) / 2.0
    near = round(inner * math.cos(half))
    out = []
    for k in range(_SLICES):
        x0 = near + (outer - near) * k // _SLICES
        x1 = near + (outer - near) * (k + 1) // _SLICES
        reach = outer if math.cos(half) < 1e-9 else min(outer, round(x1 * math.tan(half)) + 1)
        out.append((x0, -reach, x1, reach))
    return out
