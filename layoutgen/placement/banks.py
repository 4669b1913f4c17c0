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
        arrival = [] if hub.arrival is None else [self._half(hub.arrival, width)]
        back = self._beyond_axis(hub.bank[0], width, arrival)
        on = self._beyond_axis(hub.bank[-1], width, [0, *(self._half(arm.end, width) for arm in hub.arms)])
        self.kit.strip(growth, hub.net, width, (ahead(at, -back).point, ahead(exit_pose, on).point))
        for arm in hub.arms:
            turns: tuple[float, ...] = (0.0, side, -side) if arm.turn is None else (arm.turn, -side)
            offset = width // 2 - OVERLAP if arm.end.kind is EndKind.PAD else 0
            if offset and arm.turn == 0.0 and len(hub.arms) == 1 and before is not None:
                turns, offset = (0.0,), max(offset, before + _SPACE + self._courtyard_beyond(arm.end))
            growth.pending.append(Pending(arm.end, exit_pose, turns, max(0, offset)))

    def _courtyard_beyond(self, end: End) -> int:
        """Return how far a part's courtyard reaches beyond the pad at one of its ends [nm]."""
        body = self.kit.model.bodies[end.element]
        return beyond(body, body.land_at(end))

    def _half(self, end: End, width: int) -> int:
        """Return half the width [nm] of what goes on straight from the end of a bank's strip."""
        return (self.kit.across(end) if end.kind in (EndKind.LINE, EndKind.COUPLED) else width) // 2

    def _beyond_axis(self, end: End, width: int, halves: list[int]) -> int:
        """Return how far a bank's strip reaches beyond the axis of the part at its end [nm].

        It ends on the axis, but goes on to the pad's edge where a line that begins there, of a half width or
        (0) across the strip, would face the pad over a slit too narrow for etching.
        """
        land = self.kit.model.bodies[end.element].land_at(end)
        room = width // 2 - land.along
        return land.across // 2 if any(self.kit.is_slit(room - half) for half in halves) else 0

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
