"""Banks: shunt parts side by side along a common strip."""

from __future__ import annotations

from dataclasses import dataclass

from layoutgen.circuit import End, EndKind
from layoutgen.placement.bodies import OVERLAP, BodyLand, PartBody, beyond
from layoutgen.placement.frame import Pose, ahead
from layoutgen.placement.kit import Kit
from layoutgen.placement.state import Growth, Pending
from layoutgen.placement.tour import Hub

__all__ = ["Banks"]

_SPACE = 200_000  # between neighbouring bank parts [nm]; common practice, no source


@dataclass(slots=True)
class Banks:
    """Lays banks."""

    kit: Kit

    def lay(self, growth: Growth, hub: Hub, at: Pose) -> None:
        """Lay shunt parts along a strip, the first on the node, all to one side; leave the rest pending."""
        width = self.kit.bank_width(hub)
        side = 90.0 * growth.bank_side
        position, before = 0, None
        for end in hub.bank:
            body = self.kit.model.bodies[end.element]
            low, high = self.kit.span(body, body.land_at(end), side)
            if before is not None:
                position += before + _SPACE - low
            before = high
            self._part(growth, end, ahead(at, position), side, width)
        exit_pose = ahead(at, position)
        if position:
            self.kit.strip(growth, hub.net, width, (at.point, exit_pose.point))
        for arm in hub.arms:
            turns = (0.0, side, -side) if arm.turn is None else (arm.turn, -side)
            offset = width // 2 - OVERLAP if arm.end.kind is EndKind.PAD else 0
            growth.pending.append(Pending(arm.end, exit_pose, turns, max(0, offset)))

    def lay_beyond(self, growth: Growth, hub: Hub, body: PartBody, land: BodyLand, outer: Pose) -> None:
        """Lay a bank that a pad leads to: a strip from the pad's outer edge, then the parts."""
        first = self.kit.model.bodies[hub.bank[0].element]
        low, high = self.kit.span(first, first.land_at(hub.bank[0]), 90.0)
        start = ahead(outer, beyond(body, land) + max(-low, high) + _SPACE)
        width = self.kit.bank_width(hub)
        self.kit.strip(growth, hub.net, width, (ahead(outer, -OVERLAP).point, start.point))
        self.lay(growth, hub, start)

    def _part(self, growth: Growth, end: End, axis: Pose, side: float, width: int) -> None:
        """Lay one bank part beside its axis on the strip: pad centred on it, or at its edge if it is wide."""
        body = self.kit.model.bodies[end.element]
        land = body.land_at(end)
        inward = max(0, (width - land.along) // 2)
        outer = ahead(axis.turned(side), inward - land.along / 2)
        pose = body.entered_by(land, outer, edge="outer")
        growth.parts[body.name] = pose
        growth.obstacles += self.kit.part_obstacles(body, pose)
