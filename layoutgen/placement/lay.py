"""Laying one thing after another: lines, parts, pairs, each with what follows from it."""

from __future__ import annotations

from dataclasses import dataclass, field

from layoutgen.circuit import End, EndKind
from layoutgen.geometry import Point
from layoutgen.placement.banks import Banks
from layoutgen.placement.beside import lay_beside
from layoutgen.placement.bodies import OVERLAP, BodyLand, PartBody, beyond
from layoutgen.placement.clearance import Kind, Obstacle
from layoutgen.placement.frame import Pose, ahead, box_to_world, to_world, unit
from layoutgen.placement.kit import PIN_TOLERANCE, Kit, PinnedError, world
from layoutgen.placement.lines import Lines
from layoutgen.placement.model import GROUND, strip_owner
from layoutgen.placement.pairs import ground_strip_end, pair_obstacles, sector_slices
from layoutgen.placement.ports import Ports
from layoutgen.placement.state import (
    Device,
    Growth,
    LaidPair,
    LaidRadial,
    Pending,
)
from layoutgen.placement.tour import Hub
from layoutgen.placement.turned import turn_away
from layoutgen.placement.words import Route
from layoutgen.units import to_nm

__all__ = ["Layer"]


@dataclass(slots=True)
class Layer:
    """Lays things into a growing candidate; knows the circuit, holds no state of its own."""

    kit: Kit
    lines: Lines = field(init=False)
    ports: Ports = field(init=False)
    banks: Banks = field(init=False)

    def __post_init__(self) -> None:
        """Set the helpers up."""
        self.lines, self.ports, self.banks = Lines(self.kit), Ports(self.kit), Banks(self.kit)

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
        arrival = self.lines.alone(growth, end, start, route, edge)
        far = self._far(end)
        if far is None:
            return
        if far[1] == GROUND:
            self.lines.ground_end(growth, end.element, arrival)
            return
        self.arrive(growth, self.kit.tour.hubs[far[1]], arrival)

    def _far(self, end: End) -> tuple[End, str] | None:
        return self.kit.model.far_end(end)

    # -- arriving at a net ---------------------------------------------------------------------------

    def arrive(self, growth: Growth, hub: Hub, at: Pose) -> None:
        """Go on from the end of a line: lay what must lie here, leave the rest pending."""
        growth.use(hub.net, at.heading + 180.0)
        if hub.cluster is not None:
            self._enter_cluster(growth, hub, at)
        elif hub.bank:
            self.banks.lay(growth, hub, at)
        elif len(hub.arms) == 1:
            self._single(growth, hub.arms[0].end, hub, at)
        else:
            self._leave_arms(growth, hub, at)

    def _enter_cluster(self, growth: Growth, hub: Hub, at: Pose) -> None:
        """Leave a whole cluster pending at the net where it is entered."""
        growth.pending.append(Pending(hub.inner[0], at, (0.0,), cluster=hub.cluster))

    def _single(self, growth: Growth, end: End, hub: Hub, at: Pose) -> None:
        if end.kind is EndKind.PAD:
            self._part_by_inner_edge(growth, end, at)
        elif end.kind is EndKind.PORT:
            self._port_after(growth, end, hub, at)
        else:
            growth.pending.append(Pending(end, at, (0.0,)))

    def _port_after(self, growth: Growth, end: End, hub: Hub, at: Pose) -> None:
        """Put a port at the end of the line or pair that arrived at its net."""
        carrier = hub.arrival
        assert carrier is not None  # a net is met by something
        if carrier.element in self.kit.model.sized.lines:
            self.ports.at_line(growth, end, at, carrier.element)
        else:
            self.ports.at_pair(growth, end, at, carrier.element)

    def _leave_arms(self, growth: Growth, hub: Hub, at: Pose) -> None:
        for arm in hub.arms:
            turns = (90.0, -90.0) if arm.turn is None else (arm.turn,)
            growth.pending.append(Pending(arm.end, at, turns, self._arm_offset(hub, arm.end, arm.turn)))

    def _arm_offset(self, hub: Hub, end: End, turn: float | None) -> int:
        """Return how far from the node a pad arm's outer edge lies [nm]: at the edge of the copper across."""
        if end.kind is not EndKind.PAD:
            return 0
        widths = self.kit.model.widths
        across = []
        for other, heading in hub.canonical_headings():
            is_side = heading in (90.0, 270.0)
            crosses = not is_side if turn is None else is_side
            if other == end or not crosses:
                continue
            if other.element in widths:
                across.append(widths[other.element] // 2)
            elif other.kind is EndKind.PAD and turn is None:
                across.append(self.kit.joint_width(hub.net, other, self._facing(hub, other)) // 2)
        offset = self.kit.beside(across)
        offset = max(offset, self._room_for(hub, end, turn))
        if turn != 0.0:
            return offset
        beside = self._side_parts(hub, end)
        return max(offset, beside + self._courtyard_beyond(end)) if beside else offset

    def _room_for(self, hub: Hub, pad: End, turn: float | None) -> int:
        """Return how far from the node a pad arm's outer edge must lie [nm], clear of its neighbours."""
        others = [(end, heading in (90.0, 270.0)) for end, heading in hub.canonical_headings() if end != pad]
        across = [end for end, is_side in others if is_side == (turn == 0.0)]
        onward = [end for end, is_side in others if is_side != (turn == 0.0)]
        return self.kit.room_ahead(pad, across, onward)

    def _facing(self, hub: Hub, end: End) -> End | None:
        """Return what leaves a junction opposite to an end on its straight path, the widest of several."""
        if end != hub.arrival:
            return hub.arrival
        onward = [arm.end for arm in hub.arms if arm.turn == 0.0] or list(hub.inner)
        return max(onward, key=self.kit.across, default=None)

    def _side_parts(self, hub: Hub, end: End) -> int:
        """Return how far the parts beside a junction reach along its straight path [nm], 0 without any."""
        sides = [arm.end for arm in hub.arms if arm.turn is None and arm.end != end]
        return max((self._breadth(side) for side in sides if side.kind is EndKind.PAD), default=0)

    def _breadth(self, end: End) -> int:
        """Return how far a part reaches to either side of the pad by which it leaves a junction [nm]."""
        body = self.kit.model.bodies[end.element]
        low, high = self.kit.span(body, body.land_at(end), 90.0)
        return max(-low, high)

    def _courtyard_beyond(self, end: End) -> int:
        """Return how far a part's courtyard reaches beyond the pad at one of its ends [nm]."""
        body = self.kit.model.bodies[end.element]
        return beyond(body, body.land_at(end))

    # -- parts ---------------------------------------------------------------------------------------

    def _part_by_inner_edge(self, growth: Growth, end: End, at: Pose) -> None:
        body = self.kit.model.bodies[end.element]
        land = body.land_at(end)
        if not body.is_apart(land):
            self.part(growth, end, body.entered_by(land, at, edge="inner"))
            return
        outer = ahead(at, body.node_of(land))
        arrival = self.kit.tour.hubs[self.kit.net(end)].arrival
        width = land.across if arrival is None else self.kit.across(arrival)
        self.kit.lead(growth, end, outer.turned(180.0), at, width)
        self.part(growth, end, body.entered_by(land, outer, edge="outer"))

    def pad_arm(self, growth: Growth, pending: Pending, turn: float, bank_side: int = 1) -> None:
        """Lay a part whose pad is an arm of a junction; a bank it leads to lies left (1) or right (-1)."""
        growth.bank_side = bank_side
        end = pending.end
        body = self.kit.model.bodies[end.element]
        land = body.land_at(end)
        net = self.kit.net(end)
        node = pending.at.turned(turn)
        growth.use(net, node.heading)
        outer = ahead(node, pending.offset)
        if pending.offset and (turn == 0.0 or pending.offset > self.kit.edge_at(net)):
            width = self.kit.joint_width(net, end, self.kit.tour.hubs[net].arrival)
            self.kit.strip(growth, net, width, (node.point, ahead(outer, OVERLAP).point))
        self.part(growth, end, body.entered_by(land, outer, edge="outer"))

    def part(self, growth: Growth, entered: End, pose: Pose) -> None:
        """Lay a part at a pose, and go on from its other pads."""
        body = self.kit.model.bodies[entered.element]
        self.part_alone(growth, entered, pose)
        for end, net in self.kit.model.ends[body.name]:
            if end.index == entered.index or net == GROUND:
                continue
            hub = self.kit.tour.hubs[net]
            if hub.arrival == end:
                self._arrive_by_pad(growth, hub, body, body.land_at(end), pose)

    def part_alone(self, growth: Growth, entered: End, pose: Pose) -> None:
        """Lay a part at a pose, and those that stand beside it."""
        body = self.kit.model.bodies[entered.element]
        self._check_hint(growth, body.name, pose)
        growth.parts[body.name] = pose
        for bond in body.bonds:
            path = tuple(to_world(pose, x, y) for x, y in bond.path)
            self.kit.strip(growth, bond.net, bond.width, path)
        growth.obstacles += self.kit.part_obstacles(body, pose)
        self._note_device(growth, entered, body, pose)
        lay_beside(self.kit, growth, body, pose)

    def _note_device(self, growth: Growth, entered: End, body: PartBody, pose: Pose) -> None:
        """Remember a transistor's plane: what comes before it should stay behind it."""
        if self.kit.model.file.parts[body.name].kind != "transistor":
            return
        ux, uy = unit(pose.heading + body.land_at(entered).heading + 180.0)
        if ux and uy:
            return
        axis = 0 if ux else 1
        stage = self.kit.tour.stages[self.kit.net(entered)]
        growth.devices.append(Device(stage, axis, ux + uy, (pose.x, pose.y)[axis]))

    def _check_hint(self, growth: Growth, name: str, pose: Pose) -> None:
        layout = self.kit.model.file.layout
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
            if abs(off) > PIN_TOLERANCE:
                raise PinnedError(name, f"it would lie {abs(off) / 1e6:.3f} mm from where the hint puts it")

    def _arrive_by_pad(self, growth: Growth, hub: Hub, body: PartBody, land: BodyLand, pose: Pose) -> None:
        """Go on from a pad: a line starts at its inner edge, all else beyond its outer edge."""
        outer, inner = world(pose, land.outer), world(pose, land.inner)
        away = turn_away(self.kit, growth, hub, outer) if hub.bank or len(hub.arms) > 1 else None
        growth.use(hub.net, (outer if away is None else away).heading + 180.0)
        if hub.cluster is not None:
            self._junction_beyond(growth, hub, (body, land), outer)
        elif away is not None and hub.bank:
            self.banks.lay(growth, hub, away)
        elif away is not None:
            self._leave_arms(growth, hub, away)
        elif hub.bank:
            self.banks.lay_beyond(growth, hub, body, land, outer)
        elif len(hub.arms) == 1 and hub.arms[0].end.kind in (EndKind.LINE, EndKind.COUPLED):
            onward = hub.arms[0].end
            node = ahead(outer, body.node_of(land)) if body.is_apart(land) else inner
            if body.is_apart(land) and hub.arrival is not None:
                self.kit.lead(growth, hub.arrival, outer, node, self.kit.across(onward))
            growth.pending.append(Pending(onward, node, (0.0,)))
        elif len(hub.arms) == 1:
            self._pad_to(growth, hub, hub.arms[0].end, (body, land), outer)
        else:
            self._junction_beyond(growth, hub, (body, land), outer)

    def _pad_to(
        self, growth: Growth, hub: Hub, end: End, left: tuple[PartBody, BodyLand], outer: Pose
    ) -> None:
        """Join a pad to the one other pad, or port, of its net by a strip."""
        body, land = left
        back = ahead(outer, -OVERLAP).point
        if end.kind is EndKind.PORT:
            start = ahead(outer, self.kit.model.limits.near)
            self.ports.by_strip(growth, end, start, back, land.across)
            return
        other = self.kit.model.bodies[end.element]
        met = other.land_at(end)
        there = ahead(outer, self.pad_gap((body, land), (other, met)))
        width = min(land.across, met.across)
        kind = Kind.LEAD if max(len(body.lands), len(other.lands)) > 2 else Kind.STRIP
        self.kit.strip(growth, hub.net, width, (back, ahead(there, OVERLAP).point), kind)
        self.part(growth, end, other.entered_by(met, there, edge="outer"))

    def pad_gap(self, left: tuple[PartBody, BodyLand], right: tuple[PartBody, BodyLand]) -> int:
        """Return the distance of two pads' outer edges [nm] at which their parts' courtyards touch."""
        gap = self.kit.model.limits.gap
        clear = (
            left[0].free_from(left[1], right[1].across / 2, gap),
            right[0].free_from(right[1], left[1].across / 2, gap),
        )
        return max(beyond(*left) + beyond(*right), gap, *clear)

    def _junction_beyond(
        self, growth: Growth, hub: Hub, left: tuple[PartBody, BodyLand], outer: Pose
    ) -> None:
        """Put a junction's node just beyond a pad and leave its arms, or its cluster, pending."""
        body, land = left
        sides = [*(arm.end for arm in hub.arms if arm.turn is None), *hub.inner]
        widths = self.kit.model.widths
        reach = self.kit.beside([widths[end.element] // 2 for end in sides if end.element in widths])
        parts = max((self._breadth(end) for end in sides if end.kind is EndKind.PAD), default=0)
        if parts:
            reach = max(reach, parts + beyond(body, land))
        assert hub.arrival is not None  # the pad itself
        onward = [arm.end for arm in hub.arms if arm.turn == 0.0]
        reach = max(reach, self.kit.room_ahead(hub.arrival, sides, onward))
        node = ahead(outer, reach)
        if reach:
            width = self.kit.joint_width(hub.net, hub.arrival, self._facing(hub, hub.arrival))
            self.kit.lead(growth, hub.arrival, outer, node, width)
        if hub.cluster is not None:
            self._enter_cluster(growth, hub, node)
        else:
            self._leave_arms(growth, hub, node)

    # -- where the walk begins -----------------------------------------------------------------------

    def leave_port(self, growth: Growth, hub: Hub, pose: Pose) -> tuple[str, int]:
        """Go on from the first port; return what carries it and how wide [nm] that is."""
        growth.use(hub.net, pose.heading + 180.0)
        assert hub.arrival is not None  # the port itself
        if hub.arrival.element in self.kit.launches:
            pose = self.ports.root_launch(growth, hub.arrival, pose)
        single = hub.arms[0].end if len(hub.arms) == 1 and hub.cluster is None and not hub.bank else None
        if single is not None and single.kind in (EndKind.LINE, EndKind.COUPLED):
            growth.pending.append(Pending(single, pose, (0.0,)))
            launched = growth.ports.get(hub.arrival.element)
            own = single.element, self.kit.model.widths[single.element]
            return own if launched is None else (launched.carrier, launched.width)
        out, width = self.ports.root_strip(growth, hub, hub.arrival.element, pose)
        if hub.cluster is not None:
            self._enter_cluster(growth, hub, out)
        elif hub.bank:
            self.banks.lay(growth, hub, out)
        elif single is not None:
            body = self.kit.model.bodies[single.element]
            self.part(growth, single, body.entered_by(body.land_at(single), out, edge="outer"))
        else:
            self._leave_arms(growth, hub, out)
        return strip_owner(hub.net), width

    def begin_without_port(self, growth: Growth, root: End, pose: Pose) -> None:
        """Begin at the first end of an element, for a circuit (or a piece of one) without a port."""
        if root.kind is EndKind.PAD:
            self.part(growth, root, pose)
            hub = self.kit.tour.hubs[self.kit.net(root)]
            body = self.kit.model.bodies[root.element]
            self._arrive_by_pad(growth, hub, body, body.land_at(root), pose)
            return
        growth.pending.append(Pending(root, pose, (0.0,)))
        self.arrive(growth, self.kit.tour.hubs[self.kit.net(root)], pose.turned(180.0))

    # -- bodies without a route ----------------------------------------------------------------------

    def radial(self, growth: Growth, pending: Pending, turn: float) -> None:
        """Lay a radial stub with its apex on the node."""
        name = pending.end.element
        stub = self.kit.model.sized.radials[name]
        pose = pending.at.turned(turn)
        growth.use(self.kit.net(pending.end), pose.heading)
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
        growth.use(self.kit.net(end), start.heading)
        record = self.kit.model.sized.pairs[end.element]
        pitch = to_nm(record.width) + to_nm(record.gap)
        backwards, second = end.index in (1, 3), end.index in (2, 3)
        along = ahead(start, length).turned(180.0) if backwards else start
        lateral = -side if backwards else side
        pose = ahead(along, 0, lateral * pitch) if second else along
        b_side = -lateral if second else lateral
        growth.pairs[end.element] = LaidPair(end.element, pose, b_side, length)
        growth.obstacles += pair_obstacles(self.kit, end.element, pose, b_side * pitch, length)
        for other, net in self.kit.model.ends[end.element]:
            if other.index == end.index:
                continue
            onward = other.index in (1, 3)
            node = ahead(pose, length if onward else 0, b_side * pitch if other.index > 1 else 0)
            out = node if onward else node.turned(180.0)
            if net == GROUND:
                outward = b_side if (other.index > 1) == onward else -b_side
                ground_strip_end(self.kit, growth, other, out, outward)
            elif self.kit.tour.hubs[net].arrival == other:
                self.arrive(growth, self.kit.tour.hubs[net], out)
