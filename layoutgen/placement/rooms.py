"""Room for equal branches: free lines spread them, so that what hangs on each lies clear of the other.

A branch that splits further is laid once by itself, as if nothing else were there; how far it reaches to
either side says how far the free line that leads to it must swerve, and what was chosen inside is chosen
again when its turn comes. Equal branches at any depth are looked at once.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, field

from layoutgen.circuit import End, EndKind
from layoutgen.geometry import Point
from layoutgen.placement.frame import Box, Pose, box_around, unit
from layoutgen.placement.model import GROUND
from layoutgen.placement.records import Choice
from layoutgen.placement.routes import RouteChoice, Router
from layoutgen.placement.state import EDGES, Bounds, Growth, Pending, State, nothing_laid
from layoutgen.placement.tour import Tour, end_key
from layoutgen.placement.words import Route, least_legs, route_points

__all__ = ["Rooms"]

_LEAST_WEIGHT = 4  # elements beyond a free line from which on it makes room
_HEAVY = 12  # elements
_EXTRA = (0, 1_000_000, 3_000_000)  # more than needed [nm]
_SLACK = 100_000  # [nm]: by so much like branches may differ when their widths follow the pour

Span = tuple[int, int]


@dataclass(slots=True)
class Rooms:
    """What branches need to either side, each kind of branch laid once.

    ``lay`` returns the best state that finishes a state, None when there is none; ``arrive`` leaves what
    follows in a net pending.
    """

    tour: Tour
    router: Router
    lay: Callable[[State], State | None]
    arrive: Callable[[Growth, str, Pose], None]
    chosen: dict[tuple[str, float], Choice] = field(default_factory=dict)
    _boxes: dict[tuple[int, float], Box | None] = field(default_factory=dict)

    def routes(self, pending: Pending, start: Pose, state: State) -> list[RouteChoice] | None:
        """Return the routes of a free line that make room between two equal branches; None for any other."""
        end = pending.end
        partner = self._partner(end, state)
        if partner is None or not self._spreads(end):
            return None
        centre = ((pending.at.x + partner[0]) / 2, (pending.at.y + partner[1]) / 2)
        axis = 0 if abs(partner[0] - pending.at.x) > abs(partner[1] - pending.at.y) else 1
        return [
            RouteChoice(route, forecast=self._forecast(end, route_points(start, route)[1], centre, axis))
            for route in self._routes(end, start, centre)
        ]

    def _forecast(self, end: End, arrival: Pose, centre: tuple[float, float], axis: int) -> tuple[Box, ...]:
        """Return where a branch will lie, and where its mirror image will."""
        local = self._box(end, arrival.heading)
        if local is None:
            return ()
        x, y = arrival.point
        box = (local[0] + x, local[1] + y, local[2] + x, local[3] + y)
        other = list(box)
        twice = round(2 * centre[axis])
        other[axis], other[axis + 2] = twice - box[axis + 2], twice - box[axis]
        return box, (other[0], other[1], other[2], other[3])

    def _partner(self, end: End, state: State) -> Point | None:
        """Return the node from which the other of two equal arms leaves or left."""
        name = self.tour.siblings.get(end_key(end))
        if name is None:
            return None
        waiting = next((p.at.point for p in state.pending if end_key(p.end) == name), None)
        if waiting is not None:
            return waiting
        element, index = name.rsplit(":", 1)
        laid = state.lines.get(element)
        return None if laid is None else laid.points[0 if laid.start == int(index) else -1]

    def _spreads(self, end: End) -> bool:
        """True for a free line to a branch that splits further."""
        line = self.router.model.sized.lines.get(end.element)
        weight = self.tour.weight.get((end.element, end.index), 0)
        return end.kind is EndKind.LINE and line is not None and line.free and weight >= _LEAST_WEIGHT

    def _routes(self, end: End, start: Pose, centre: tuple[float, float]) -> Iterator[Route]:
        """Yield routes that keep a branch on its side of the centre between the two arms."""
        offset = _left_of(start, centre)  # of the centre, to the left of the start
        for turn in (90.0, -90.0):
            if turn * offset < 0:
                yield from self._swerves(end, start, turn, abs(offset))
            if turn * offset <= 0:
                yield from self._single_turns(end, start, turn, centre, beside=offset != 0.0)
        if offset == 0.0 and self._span(end, start.heading) is not None:
            least = least_legs((90.0,), self.router.meetings.rules(end))
            for extra in _EXTRA:
                yield Route((), (sum(least) + extra,))

    def _swerves(self, end: End, start: Pose, turn: float, offset: float) -> Iterator[Route]:
        """Yield swerves away from the centre for arms that leave side by side."""
        span = self._span(end, start.heading)
        if span is None:
            return
        first, jog, last = least_legs((turn, -turn), self.router.meetings.rules(end))
        need = round((-span[0] if turn > 0 else span[1]) + self._gap - offset)
        for extra in _EXTRA:
            yield Route((turn, -turn), (first, max(jog, need + extra), last))

    def _single_turns(
        self, end: End, start: Pose, turn: float, centre: tuple[float, float], *, beside: bool
    ) -> Iterator[Route]:
        """Yield single turns: away from the centre, or along it for arms that leave back to back."""
        heading = (start.heading + turn) % 360.0
        span = self._span(end, heading)
        if span is None:
            return
        ux, uy = unit(start.heading)
        along = (centre[0] - start.x) * ux + (centre[1] - start.y) * uy
        need = 0 if beside else round(along + self._gap + (span[1] if turn > 0 else -span[0]))
        rules = self.router.meetings.rules(end)
        for extra in _EXTRA:
            yield Route((turn,), (max(rules.first, need) + extra, rules.last))

    @property
    def _gap(self) -> int:
        """What each branch keeps from the centre [nm]."""
        return self.router.model.limits.spacing // 2 + _SLACK

    def _span(self, end: End, heading: float) -> Span | None:
        """Return how far what hangs on a line reaches [nm], low and high to the left of its arrival."""
        box = self._box(end, heading)
        if box is None:
            return None
        ux, uy = unit(heading)
        sides = [round(-x * uy + y * ux) for x, y in ((box[0], box[1]), (box[2], box[3]))]
        return min(sides), max(sides)

    def _box(self, end: End, heading: float) -> Box | None:
        """Return the box around what hangs on a line that arrives at the origin with a heading."""
        edges = self.tour.edges.get((end.element, end.index), frozenset())
        if len(edges) == 1 and heading != EDGES[next(iter(edges))] and self._is_heavy(end):
            return None
        key = (self.tour.likeness.get(end_key(end), -1), heading)
        if key not in self._boxes:
            self._boxes[key] = self._measured(end, heading)
        return self._boxes[key]

    def _is_heavy(self, end: End) -> bool:
        """True for a branch so large that it is only laid towards the edge of its ports."""
        return self.tour.weight.get((end.element, end.index), 0) > _HEAVY

    def _measured(self, end: End, heading: float) -> Box | None:
        far = (item for item in self.router.model.ends[end.element] if item[0].index != end.index)
        net = next(net for _, net in far if net != GROUND)
        growth = Growth(state=nothing_laid(), bounds=Bounds())
        self.arrive(growth, net, Pose(0, 0, heading))
        found = self.lay(growth.applied((0, 0, 0, 0), 0.0))
        if found is None:
            return None
        for name, choice in found.ways.items():
            self.chosen.setdefault((name, choice.heading), choice)
        boxes = [item.box for item in found.obstacles.items if not item.corridor]
        return box_around([corner for box in boxes for corner in (box[:2], box[2:])])


def _left_of(start: Pose, point: tuple[float, float]) -> float:
    """Return how far a point lies to the left of a pose [nm]."""
    ux, uy = unit(start.heading)
    return -(point[0] - start.x) * uy + (point[1] - start.y) * ux
