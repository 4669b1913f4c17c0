"""What a line meets at its ends, and so what its legs must keep."""

from __future__ import annotations

import math
from dataclasses import dataclass, field

from layoutgen.circuit import End, EndKind
from layoutgen.geometry import mitre_for_turn, mitre_reach
from layoutgen.placement.bodies import beyond
from layoutgen.placement.model import GROUND, Model
from layoutgen.placement.tour import Tour
from layoutgen.placement.words import LegRules, Reach

__all__ = ["Meetings"]

_RF_LAUNCH = 3  # board heights: least length of a straight free line at a port of RF
_PAIR_LAUNCH = 4  # board heights: the same at a coupled pair, whose other strip's end is near the edge, too
_SUPPLY_LAUNCH = 2  # board heights: the same at a port of supply


@dataclass(slots=True)
class Meetings:
    """Answers for the ends of lines; holds the circuit, remembers the rules of each line only."""

    model: Model
    tour: Tour
    _rules: dict[End, LegRules] = field(default_factory=dict)

    def rules(self, end: End) -> LegRules:
        """Return what the legs of a line, travelled from one end, must keep."""
        if end not in self._rules:
            self._rules[end] = self._rules_of(end)
        return self._rules[end]

    def _rules_of(self, end: End) -> LegRules:
        model, name = self.model, end.element
        width, limits = model.widths[name], model.limits
        mitre = mitre_for_turn(model.sized.lines[name].mitre_percent, 90.0, width, limits.neck)
        bend = math.ceil(mitre_reach(mitre, 90.0, width))
        first = self._reach(end, self.model.net_of(end))
        far = self.far(end)
        last = Reach(0, 0) if far is None else self._reach(far[0], far[1])
        room = first.copper + 2 * model.pour_gap(name) + model.ground_ring + width // 2
        clear = room if model.has_ground else 0
        return LegRules.of(width, limits.spacing, bend, first=first, last=last, clear=clear)

    def far(self, end: End) -> tuple[End, str] | None:
        """Return a line's other end with its net, None for an open one."""
        return next((found for found in self.model.ends[end.element] if found[0].index != end.index), None)

    def _reach(self, end: End, net: str) -> Reach:
        """Return what lies at one end of a line."""
        model, limits = self.model, self.model.limits
        if net == GROUND:
            return Reach(limits.land // 2, limits.land, limits.land // 2)
        hub = self.tour.hubs[net]
        others = [other for other in model.circuit.nets[net].ends if other != end]
        pads = [model.bodies[other.element].land_at(other) for other in others if other.kind is EndKind.PAD]
        if any(other.kind is EndKind.COUPLED for other in others):
            return Reach(0, 0)
        if hub.bank:
            first = model.bodies[hub.bank[0].element]
            half = max(first.outline[3] - first.outline[1], first.outline[2] - first.outline[0]) // 2
            along = max(pad.along for pad in pads)
            return Reach(half, half + limits.height, max(along, self._widest(others)) // 2)
        if len(others) == 1 and pads and model.bodies[others[0].element].is_apart(pads[0]):
            return self._beyond_row(others[0])
        if len(others) == 1 and pads:
            outside = beyond(model.bodies[others[0].element], pads[0])
            return Reach(pads[0].along, pads[0].along + outside + limits.height, pads[0].across // 2)
        half = max([self._widest(others), *(pad.across for pad in pads)]) // 2
        return Reach(half, half + limits.spacing if half else 0, half)

    def _beyond_row(self, pad: End) -> Reach:
        """Return what lies at the end of a line whose node is beyond the leads in the row of its pad."""
        model = self.model
        body = model.bodies[pad.element]
        land = body.land_at(pad)
        node, row = body.node_of(land), body.free_from(land, math.inf, model.limits.gap)
        out = max(beyond(body, land), row) - node
        return Reach(max(0, -node), max(0, out) + model.limits.height, land.across // 2)

    def _widest(self, ends: list[End]) -> int:
        return max((self.model.widths.get(end.element, 0) for end in ends), default=0)

    def least_free(self, end: End, *, to_port: bool) -> int:
        """Return the least length [nm] of a straight free line: the same from a port as to one."""
        net, far = self.model.net_of(end), self.far(end)
        first = self._reach(end, net)
        last = Reach(0, 0) if far is None else self._reach(far[0], far[1])
        limits = self.model.limits
        if to_port or self._begins_at_port(net):
            return first.copper + last.copper + max(limits.spacing, self._launch(end.element) * limits.height)
        return first.copper + last.copper + limits.spacing

    def _launch(self, name: str) -> int:
        """Return the least length of a straight free line at a port [board heights]."""
        if not self.model.sized.lines[name].rf:
            return _SUPPLY_LAUNCH
        nets = [net for _, net in self.model.ends[name] if net != GROUND]
        ends = (end for net in nets for end in self.model.circuit.nets[net].ends)
        return _PAIR_LAUNCH if any(end.kind is EndKind.COUPLED for end in ends) else _RF_LAUNCH

    def _begins_at_port(self, net: str) -> bool:
        """True for the net of the port at which the walk begins."""
        hub = self.tour.hubs.get(net)
        return hub is not None and hub.arrival is not None and hub.arrival.kind is EndKind.PORT

    def with_closer(self, end: End) -> bool:
        """True when a line leads to a net where another line is to close a loop, and so needs room."""
        far = self.far(end)
        if far is None or far[1] == GROUND:
            return False
        closers = self.tour.loops.closers
        return any(other.element in closers for other in self.model.circuit.nets[far[1]].ends)
