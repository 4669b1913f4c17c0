"""A line's own copper: its path, the boxes that stand for it, its ground end; nothing of what follows it."""

from __future__ import annotations

import math
from dataclasses import dataclass

from layoutgen.circuit import End, EndKind
from layoutgen.geometry import Point
from layoutgen.placement.clearance import Kind, Obstacle
from layoutgen.placement.frame import Pose, box_to_world, to_world
from layoutgen.placement.kit import Kit, root_edge
from layoutgen.placement.model import GROUND
from layoutgen.placement.state import Growth, LaidLine, Pending, leg_slices
from layoutgen.placement.words import Route, route_points

__all__ = ["Lines"]

_RF_BEND_WEIGHT = 10.0  # a fold in a matching line must save ten times what one in a feed must
_STUB_BEND_WEIGHT = 200.0  # a short stub folds where something is in its way, not to save room
_SHORT_STUB = math.radians(100.0)  # a quarter wave and a little more


@dataclass(slots=True)
class Lines:
    """Lays lines; knows the circuit, holds no state of its own."""

    kit: Kit

    def alone(
        self,
        growth: Growth,
        end: End,
        start: Pose,
        route: Route,
        edge: str | None = None,
        weight: float | None = None,
    ) -> Pose:
        """Lay a line's copper only; return the pose at its far end.

        ``weight`` is what each of its bends counts for, if not as :meth:`bend_weight` says.
        """
        growth.use(self.kit.net(end), start.heading)
        points, arrival = route_points(start, route)
        name = end.element
        free = self.kit.model.sized.lines[name].free
        is_open = edge is not None and free and not growth.bounds.known(edge)
        open_edge = edge if is_open and not self._meets_launch(end) else None
        root = self._root_edge(end)
        open_root = root if root is not None and free and not growth.bounds.known(root) else None
        growth.lines[name] = LaidLine(name, end.index, points, route, open_edge, open_root)
        growth.bends += len(route.word) * (self.bend_weight(end) if weight is None else weight)
        self._line_obstacles(growth, end, points, edge)
        return arrival

    def closing(self, growth: Growth, end: End, mate: Pending, start: Pose, route: Route) -> None:
        """Lay a line that closes a loop between two placed nodes."""
        arrival = self.alone(growth, end, start, route)
        growth.use(self.kit.net(mate.end), arrival.heading + 180.0)

    def bend_weight(self, end: End) -> float:
        """Return what a bend counts for: a feed or supply may fold, matching lines better not, stubs last."""
        if self._is_short_stub(end):
            return _STUB_BEND_WEIGHT
        tour = self.kit.tour
        feeds = tour.leads_to_port.get((end.element, end.index), False) or end.element in tour.loops.closers
        off_path = end.element not in self.kit.model.circuit.spine
        return 1.0 if off_path and feeds else _RF_BEND_WEIGHT

    def _is_short_stub(self, end: End) -> bool:
        """True for an open or grounded line on a net of RF that is not much longer than a quarter wave."""
        line = self.kit.model.sized.lines[end.element]
        ends = [net for _, net in self.kit.model.ends[end.element] if net != GROUND]
        if line.free or not line.rf or len(ends) != 1:
            return False
        return self.kit.lengths.by_bends(end.element)[0] * 1e-9 * line.beta <= _SHORT_STUB

    def _line_obstacles(self, growth: Growth, end: End, points: tuple[Point, ...], edge: str | None) -> None:
        """Add a line's boxes; where it ends in a port it runs up to the edge, and its way is kept clear."""
        name = end.element
        width, kind, last = self.kit.model.widths[name], self._line_kind(name), len(points) - 2
        root = self._root_edge(end)
        inset = 0 if self._runs_to_edge(name) else self.kit.model.limits.edge
        for i, leg in enumerate(leg_slices(points, width)):
            edges = (root if i == 0 else None, edge if i == last else None)
            at_edges = tuple(e for e in edges if e is not None)
            growth.obstacles += [Obstacle(box, kind, name, at_edges=at_edges, inset=inset) for box in leg]
        laid = growth.lines[name]
        if laid.open_edge is not None:
            self.kit.keep_way(growth, name, kind, points[-1], laid.open_edge, width)
        if laid.root_edge is not None:
            self.kit.keep_way(growth, name, kind, points[0], laid.root_edge, width)

    def _root_edge(self, end: End) -> str | None:
        """Return the edge at which the walk begins, for the line that leaves the first port."""
        hub = self.kit.tour.hubs[self.kit.net(end)]
        arrival = hub.arrival
        if arrival is None or arrival.kind is not EndKind.PORT or hub.bank or len(hub.arms) != 1:
            return None
        return None if hub.cluster is not None else root_edge(self.kit.model, arrival.element)

    def _meets_launch(self, end: End) -> bool:
        """True for a line, travelled from one end, that ends at a port's launch."""
        return self.kit.tour.port_at(self.kit.model.far_end(end)) in self.kit.launches

    def _runs_to_edge(self, name: str) -> bool:
        """True when a line ends in a port whose copper runs to the profile."""
        nets = self.kit.model.file.lines[name].nets
        return any(port.to_edge and port.net in nets for port in self.kit.model.file.ports.values())

    def _line_kind(self, name: str) -> Kind:
        return Kind.LINE if self.kit.model.sized.lines[name].rf else Kind.SUPPLY

    def ground_end(self, growth: Growth, name: str, at: Pose) -> None:
        """Put a via on the line's end, more beside it as the width allows, or behind it, and their copper."""
        limits = self.kit.model.limits
        width = self.kit.model.widths[name]
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
