"""Ports: where copper meets the board's edge, by a line, a pair, or a strip from pads and junctions."""

from __future__ import annotations

from dataclasses import dataclass, replace

from layoutgen.circuit import End, EndKind
from layoutgen.geometry import Point
from layoutgen.placement.bodies import OVERLAP
from layoutgen.placement.clearance import Kind
from layoutgen.placement.frame import Pose, ahead, unit
from layoutgen.placement.kit import PIN_TOLERANCE, Kit, PinnedError, root_edge
from layoutgen.placement.launches import settle_at_edge
from layoutgen.placement.model import strip_owner
from layoutgen.placement.state import EDGES, Growth, LaidPort, Pending, edge_of_heading
from layoutgen.placement.tour import Hub
from layoutgen.units import to_nm

__all__ = ["Ports"]

_LEAST_STRIP = 100_000  # between a pair's end and the profile [nm]


@dataclass(slots=True)
class Ports:
    """Lays ports and the strips that carry them."""

    kit: Kit

    def at_line(self, growth: Growth, end: End, at: Pose, line: str) -> None:
        """Put a port at the end of a line, whose route was chosen to end there."""
        edge = self._edge(end, at)
        if end.element in self.kit.launches:
            self.launch(growth, end, at, edge)
            return
        free = self.kit.model.sized.lines[line].free
        movable = not growth.bounds.known(edge) and free
        if not movable:
            self._settle(growth, end, at, edge)
        width = self.kit.model.widths[line]
        growth.ports[end.element] = LaidPort(end.element, at.point, edge, width, line, movable)

    def at_pair(self, growth: Growth, end: End, at: Pose, pair: str) -> None:
        """Put a port at the end of a coupled pair, carried on by a strip to where the edge will be."""
        edge = self._edge(end, at)
        width = self.kit.model.widths[pair]
        if growth.bounds.known(edge) and not self._distance(growth, end, at, edge):
            if self._off(growth, end, at, edge):
                raise PinnedError(end.element, "its pair ends at the edge, away from the port's place")
            if end.element in self.kit.launches:
                self.launch(growth, end, at, edge)
                return
            growth.ports[end.element] = LaidPort(end.element, at.point, edge, width, pair, movable=False)
            return
        start = at if growth.bounds.known(edge) else ahead(at, _LEAST_STRIP)
        self.by_strip(growth, end, start, at.point, width)

    def by_strip(self, growth: Growth, end: End, start: Pose, back: Point, width: int) -> None:
        """Run a strip to the board's edge for a port.

        Args:
            growth: The candidate.
            end: The port's end.
            start: Least end of the strip and its heading, out of the board.
            back: Where the strip's copper begins.
            width: The strip's width [nm].
        """
        edge, net = self._edge(end, start), self.kit.net(end)
        points = (back, *self._to_edge(growth, end, start, edge))
        known = growth.bounds.known(edge)
        self.kit.strip(growth, net, width, points)
        if end.element in self.kit.launches:
            self.launch(growth, end, Pose(*points[-1], start.heading), edge)
            return
        self._mark_edge(growth, end, edge, None if known else edge)
        if not known:
            self.kit.keep_way(growth, strip_owner(net), Kind.STRIP, points[-1], edge, width)
        growth.ports[end.element] = LaidPort(
            end.element, points[-1], edge, width, strip_owner(net), movable=not known
        )

    def launch(self, growth: Growth, end: End, at: Pose, edge: str) -> None:
        """Lay a port's launch where its copper arrives, and settle the board's edge by it.

        Args:
            growth: The candidate.
            end: The port's end.
            at: Where copper meets the launch's pad, heading out of the board.
            edge: The edge it leaves by.
        """
        launch, net, first = self.kit.launches[end.element], self.kit.net(end), len(growth.obstacles)
        port = ahead(at, self.kit.launch_length(end.element))
        self._settle(growth, end, port, edge)
        self.kit.strip(growth, net, launch.land.across, (at.point, port.point))
        pose = launch.pose(at)
        growth.parts[launch.body.name] = pose
        growth.obstacles += self.kit.part_obstacles(launch.body, pose)
        settle_at_edge(growth, edge, first, round(growth.bounds.at(edge)))
        growth.ports[end.element] = LaidPort(
            end.element, port.point, edge, launch.land.across, strip_owner(net), movable=False
        )

    def root_launch(self, growth: Growth, end: End, pose: Pose) -> Pose:
        """Lay the launch of the first port, which stands at a pose; return where its pad ends."""
        out = ahead(pose, self.kit.launch_length(end.element))
        self.launch(growth, end, out.turned(180.0), root_edge(self.kit.model, end.element))
        return out

    def arm(self, growth: Growth, pending: Pending, turn: float) -> None:
        """Run a strip from a junction to the edge for a port that is an arm of it."""
        net = self.kit.net(pending.end)
        node = pending.at.turned(turn)
        growth.use(net, node.heading)
        width = self.kit.hub_strip_width(self.kit.tour.hubs[net])
        out = ahead(node, self.kit.model.reach_at(net) + self.kit.model.limits.near)
        self.by_strip(growth, pending.end, out, node.point, width)

    def root_strip(self, growth: Growth, hub: Hub, port: str, pose: Pose) -> tuple[Pose, int]:
        """Lay the strip from the first port to pads or a junction; return its far end and width [nm]."""
        out = ahead(pose, self.kit.model.limits.near + self.kit.model.reach_at(hub.net))
        width = self.kit.hub_strip_width(hub)
        edge = root_edge(self.kit.model, port)
        known = growth.bounds.known(edge)
        self.kit.strip(growth, hub.net, width, (pose.point, ahead(out, OVERLAP).point))
        first = growth.obstacles[-1]
        growth.obstacles[-1] = first._replace(at_edges=(edge,), inset=self.kit.inset(port))
        if not known:
            growth.strips[-1] = replace(growth.strips[-1], root_edge=edge, inset=self.kit.inset(port))
            self.kit.keep_way(growth, strip_owner(hub.net), Kind.STRIP, pose.point, edge, width)
        return out, width

    # -- edges ---------------------------------------------------------------------------------------

    def _edge(self, end: End, at: Pose) -> str:
        """Return the edge that a heading leaves by; it must be the port's."""
        edge = edge_of_heading(at.heading)
        asked = self.kit.model.file.ports[end.element].edge
        if edge is None or (asked is not None and asked != edge):
            raise PinnedError(end.element, f"its copper arrives heading {at.heading:g} deg")
        return edge

    def _settle(self, growth: Growth, end: End, at: Pose, edge: str) -> None:
        """Settle an edge by copper of given length that ends at it."""
        if growth.bounds.known(edge):
            return
        ux, uy = unit(EDGES[edge])
        inset = self.kit.inset(end.element)
        growth.bounds = growth.bounds.fixed(edge, (at.x if ux else at.y) + (ux + uy) * inset)

    def _is_placed(self, growth: Growth, end: End, edge: str) -> bool:
        """True when a port has a place along its edge that is already settled."""
        low = "south" if unit(EDGES[edge])[0] else "west"
        return self.kit.model.file.ports[end.element].at is not None and growth.bounds.known(low)

    def _distance(self, growth: Growth, end: End, at: Pose, edge: str) -> int:
        """Return how far beyond a pose the port's copper ends [nm]; 0 where the edge is not settled."""
        if not growth.bounds.known(edge):
            return 0
        ux, uy = unit(EDGES[edge])
        kept = self.kit.inset(end.element) + self.kit.launch_length(end.element)
        goal = growth.bounds.at(edge) - (ux + uy) * kept
        gap = round((goal - (at.x if ux else at.y)) * (ux + uy))
        if gap < -PIN_TOLERANCE:
            raise PinnedError(end.element, f"its copper would reach {-gap / 1e6:.2f} mm too far {edge}")
        return max(0, gap)

    def _off(self, growth: Growth, end: End, at: Pose, edge: str) -> int:
        """Return how far to the left of a pose the port's place along its edge lies [nm]."""
        if not self._is_placed(growth, end, edge):
            return 0
        ux, uy = unit(EDGES[edge])
        low = "south" if ux else "west"
        asked = self.kit.model.file.ports[end.element].at
        goal = round(growth.bounds.at(low)) + to_nm(asked if asked is not None else 0.0)
        return round((goal - (at.y if ux else at.x)) * (ux - uy))

    def _to_edge(self, growth: Growth, end: End, start: Pose, edge: str) -> list[Point]:
        """Return the vertices of a strip from its least end to the edge: straight, or beside to ``at``."""
        sideways = self._off(growth, end, start, edge)
        room = self.kit.model.limits.spacing if sideways else 0
        distance = max(self._distance(growth, end, start, edge), 0)
        if not growth.bounds.known(edge):
            distance = room
        elif distance < room:
            raise PinnedError(end.element, "there is no room for a strip to its place along the edge")
        if not sideways:
            return [ahead(start, distance).point]
        return [start.point, ahead(start, 0, sideways).point, ahead(start, distance, sideways).point]

    def _mark_edge(self, growth: Growth, end: End, edge: str, open_edge: str | None) -> None:
        """Let the last strip end at an edge, open while that has no place yet."""
        inset = self.kit.inset(end.element)
        growth.strips[-1] = replace(growth.strips[-1], open_edge=open_edge, inset=inset)
        growth.obstacles[-1] = growth.obstacles[-1]._replace(at_edges=(edge,), inset=inset)

    def root_can_move(self, hub: Hub) -> bool:
        """True when the first port's edge may still be moved outward: a free line or a strip leaves it."""
        if hub.arrival is not None and hub.arrival.element in self.kit.launches:
            return False
        if hub.bank or len(hub.arms) != 1 or hub.cluster is not None:
            return True
        end = hub.arms[0].end
        if end.kind is EndKind.LINE:
            return self.kit.model.sized.lines[end.element].free
        return end.kind is EndKind.PAD
