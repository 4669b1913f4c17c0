"""The search: lay one pending thing after another, keeping the few best drawings so far.

A beam search, deterministic: states are extended in a fixed order of elements (the straight path first,
then shunt parts and stubs, then feeds with their banks, supply lines last), candidates are tried from the
cheapest on and rejected by clearance, and the best states by board area and bends go on.
"""

from __future__ import annotations

import heapq
import itertools
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field, replace

from layoutgen.circuit import End, EndKind
from layoutgen.circuit.queries import is_shunt
from layoutgen.placement.clearance import Kind, clearance_table, edge_margins
from layoutgen.placement.cluster import ClusterPlan
from layoutgen.placement.frame import Pose
from layoutgen.placement.kit import PinnedError
from layoutgen.placement.lookahead import LookAhead
from layoutgen.placement.model import Model
from layoutgen.placement.neighbours import Neighbours
from layoutgen.placement.records import Choice, Choices
from layoutgen.placement.rooms import Rooms
from layoutgen.placement.state import Growth, Pending, State
from layoutgen.placement.tour import Tour, end_key
from layoutgen.placement.ways import Way, Ways

__all__ = ["Effort", "Failure", "Search", "drawing_cost"]

_BEND_COST = 0.02  # of the board's area for each bend: a fold must save at least that
_BEND_AREA = 10e12  # [nm^2] for each bend besides: on a small board, too, a straight stub is worth its room
_DISORDER = 6.0  # bends that arms in the file order of their ports are worth
_CROSSING_COST = 0.05  # for each element of an input that lies beside an output, or the other way round


_CROWD = 300  # boxes from which on fewer drawings are kept, so that time grows with the circuit only
_CROWDED_BEAM = 2


def drawing_cost(area: float, bends: float, crossings: int) -> float:
    """Return what a drawing costs [nm^2]: its area, more for bends and for input beside output."""
    return area * (1.0 + _BEND_COST * bends + _CROSSING_COST * crossings) + _BEND_AREA * bends


@dataclass(frozen=True, slots=True)
class Effort:
    """How hard to look: states kept, candidates accepted for each, whether the straight path may fold.

    ``only_margins`` marks an effort that differs from the one before by its margins to the profile alone.
    """

    beam: int = 6
    accepted: int = 3
    fold_spine: bool = False
    tight_edges: bool = False
    any_side: bool = False
    only_margins: bool = False


@dataclass(frozen=True, slots=True)
class Failure:
    """What could not be laid, and what stood in the way, for the message."""

    element: str
    reason: str
    depth: int


@dataclass(slots=True)
class Search:
    """One run of the search over one circuit."""

    ways: Ways
    effort: Effort
    neighbours: Neighbours = field(init=False)
    failure: Failure | None = field(init=False, default=None)

    def __post_init__(self) -> None:
        """Set the helpers up."""
        self.ways.fold_spine, self.ways.any_side = self.effort.fold_spine, self.effort.any_side
        self.ways.layer.kit.turns_leads = self.effort.any_side
        table = clearance_table(self.model.limits, self.model.default_gap)
        self.neighbours = Neighbours(self.model, self.ways.lengths, table)
        self.margins = edge_margins(
            self.model.limits, self.model.default_gap, self.model.ground_ring, tight=self.effort.tight_edges
        )
        self._ahead = LookAhead(self.ways, self.neighbours, self.margins, self._port_order)
        self.ways.rooms = Rooms(self.tour, self.ways.router, self._best, self._arrive)
        self._spine = {name: i for i, name in enumerate(self.model.circuit.spine)}
        file = self.model.file
        names = [*file.lines, *file.coupled, *file.parts, *file.ports]
        self._positions = {name: i for i, name in enumerate(names)}

    @property
    def model(self) -> Model:
        """The circuit."""
        return self.ways.model

    @property
    def tour(self) -> Tour:
        """The walk over it."""
        return self.ways.tour

    margins: Mapping[Kind, int] = field(init=False)
    _spine: dict[str, int] = field(init=False)
    _stages: dict[str, int | None] = field(init=False, default_factory=dict)
    _ahead: LookAhead = field(init=False)
    _positions: dict[str, int] = field(init=False)

    def run(self, start: State) -> list[State]:
        """Return finished states, the best first; empty when there is no place (see ``failure``)."""
        states = [start]
        depth = 0
        while states[0].pending:
            element = self._next(states[0]).end
            grown: list[State] = []
            for state in states:
                grown += self._extend(state, element, depth)
            if not grown:
                return []
            grown.sort(key=lambda state: state.cost)
            crowded = len(grown[0].obstacles.items) > _CROWD
            states = grown[: min(self.effort.beam, _CROWDED_BEAM) if crowded else self.effort.beam]
            depth += 1
        return states

    def _best(self, start: State) -> State | None:
        """Return the best state that finishes one, for a branch laid by itself."""
        kept = self.failure
        found = self.run(start)
        self.failure = kept
        return found[0] if found else None

    def _arrive(self, growth: Growth, net: str, at: Pose) -> None:
        """Leave pending what follows in a net."""
        self.ways.layer.arrive(growth, self.tour.hubs[net], at)

    def replay(self, start: State, choices: Choices) -> State | None:
        """Return the state that earlier choices give with this circuit's lengths, None if they do not fit."""
        state = start
        while state.pending:
            pending = self._next(state)
            chosen = choices.ways.get(end_key(pending.end))
            if chosen is None or (pending.cluster is None) != (chosen.plan is None):
                return None
            base = self.ways.without(state, pending)
            way = self._way_like(pending, state, chosen)
            growth = None if way is None else self._built(base, way, 0)
            if way is None or growth is None or self._conflict(growth) is not None:
                return None
            state = self._grown(base, growth, way, end_key(pending.end))
        return state

    def _way_like(self, pending: Pending, state: State, chosen: Choice) -> Way | None:
        """Return the way of a shape chosen earlier whose legs are nearest to what they were."""
        if pending.cluster is not None and isinstance(chosen.plan, ClusterPlan):
            return self.ways.cluster_way(pending, state, chosen.plan, chosen.side)
        some = self.ways.of(pending, state, chosen.word)
        ways = [way for way in some if way.choice.shape == chosen.shape]
        return min(ways, key=lambda way: _difference(way.choice, chosen), default=None)

    def _next(self, state: State) -> Pending:
        """Return the pending thing to lay next: the same for all states of one depth."""
        ready = [pending for pending in state.pending if self.ways.is_ready(pending, state)]
        return min(ready, key=self._priority)

    def _priority(self, pending: Pending) -> tuple[int, int, int, str, int]:
        end, file = pending.end, self.model.file
        weight = self.tour.weight.get((end.element, end.index), 0)
        if pending.cluster is not None:
            group, order = self._cluster_order(pending.cluster)
        elif end.element in self.tour.loops.closers:
            group, order = 3, 1
        elif end.element in self._spine:
            group, order = 0, self._spine[end.element]
        elif end.kind is EndKind.PAD and is_shunt(file.parts[end.element]):
            group, order = 1, 0
        elif weight <= 1 and end.kind is not EndKind.PORT:
            group, order = 2, 0
        elif self.tour.ends_in_port(end):
            group, order = 4, 0
        else:
            group, order = 3, -weight
        return group, order, self._file_order(end), end.element, end.index

    def _cluster_order(self, number: int) -> tuple[int, int]:
        """Return when a cluster is laid: as its first element on the straight path, else by its weight."""
        names = self.tour.loops.clusters[number].elements
        on_path = [self._spine[name] for name in names if name in self._spine]
        return (
            (0, min(on_path)) if on_path else (3, -self.tour.weight.get((self.tour.entries[number], -1), 0))
        )

    def _file_order(self, end: End) -> int:
        return self._positions[end.element]

    # -- extending -----------------------------------------------------------------------------------

    def _extend(self, state: State, element: End, depth: int) -> Iterator[State]:
        """Yield the cheapest states that lay the pending element, at most as many as are accepted.

        Ways are kept in a heap by what they cost at least; one is built only when it comes to the top, and
        checked for clearance only when, built, it comes to the top again.
        """
        pending = next(p for p in state.pending if p.end == element)
        base = self.ways.without(state, pending)
        alike = self._as_before(pending, state, base, depth)
        if alike is not None:
            yield alike
            return
        heap: list[tuple[float, int, Way, Growth | None]] = [
            (self._cost(base, way.extent, way.bends, base.crossings), order, way, None)
            for order, way in enumerate(self.ways.of(pending, state))
        ]
        if not heap:
            self._fail(depth, element.element, "no route leads where it must, or as its hint asks")
        heapq.heapify(heap)
        accepted = 0
        while heap and accepted < self.effort.accepted:
            cost, order, way, growth = heapq.heappop(heap)
            if growth is None:
                growth = self._built(base, way, depth)
                if growth is not None:
                    extent = growth.extent(self.margins)
                    cost = self._cost(base, extent, growth.bends, self._crossings(growth))
                    heapq.heappush(heap, (cost, order, way, growth))
                continue
            extent, key = growth.extent(self.margins), end_key(element)
            grown = growth.applied(extent, cost, self._crossings(growth), (key, way.choice))
            conflict = self._conflict(growth)
            if conflict is None:
                conflict, escapes = self._ahead.shut_in(grown, growth)
                grown = replace(grown, escapes=escapes)
            if conflict is None:
                accepted += 1
                yield grown
            else:
                self._fail(depth, element.element, conflict)

    def _as_before(self, pending: Pending, state: State, base: State, depth: int) -> State | None:
        """Return the state that lays a thing as its twin was, mirrored, or as in the branch by itself."""
        key = end_key(pending.end)
        twin = self.tour.twins.get(key)
        first = None if twin is None else state.ways.get(twin.key)
        rooms = self.ways.rooms
        before = rooms.chosen.get((key, pending.at.heading)) if rooms is not None else None
        way = None
        if twin is not None and first is not None and twin.mirrors:
            way = self._mirrored_way(pending, state, first)
        elif (like := first or before) is not None:
            way = self._way_like(pending, state, like)
        growth = None if way is None else self._built(base, way, depth)
        if way is None or growth is None or self._conflict(growth) is not None:
            return None
        return self._grown(base, growth, way, key)

    def _mirrored_way(self, pending: Pending, state: State, twin: Choice) -> Way | None:
        """Return the mirror image of the way in which a twin was laid."""
        if pending.cluster is not None and isinstance(twin.plan, ClusterPlan):
            return self.ways.cluster_way(pending, state, twin.plan, -twin.side)
        some = self.ways.of(pending, state, twin.mirrored[2])
        found = [way for way in some if _answers(way.choice, twin)]
        return min(found, key=lambda way: _difference(way.choice, twin), default=None)

    def _grown(self, base: State, growth: Growth, way: Way, key: str) -> State:
        """Return the state with a candidate laid."""
        extent, crossings = growth.extent(self.margins), self._crossings(growth)
        cost = self._cost(base, extent, growth.bends, crossings)
        return growth.applied(extent, cost, crossings, (key, way.choice))

    def _conflict(self, growth: Growth) -> str | None:
        return self._port_order(growth) or self.neighbours.conflict(growth)

    def _built(self, base: State, way: Way, depth: int) -> Growth | None:
        """Return a way as a candidate inside what is known of the board, or None."""
        growth = Growth(state=base, bounds=base.bounds, forecast=way.forecast)
        try:
            way.lay(growth)
            growth.bends += way.crowding + _DISORDER * self._disorder(growth)
        except PinnedError as error:
            self._fail(depth, error.element, error.what)
            return None
        extent = growth.extent(self.margins)
        if not growth.bounds.holds(extent):
            self._fail(depth, way.element, self._beyond(growth, extent))
            return None
        return growth

    def _fail(self, depth: int, element: str, reason: str) -> None:
        """Keep the first reason found at the greatest depth."""
        if self.failure is None or depth > self.failure.depth:
            self.failure = Failure(element, reason, depth)

    def _beyond(self, growth: Growth, extent: tuple[float, float, float, float]) -> str:
        bounds = growth.bounds
        over = {
            "west": bounds.x0 - extent[0],
            "south": bounds.y0 - extent[1],
            "east": extent[2] - bounds.x1,
            "north": extent[3] - bounds.y1,
            "east or west": extent[2] - extent[0] - bounds.width,
            "north or south": extent[3] - extent[1] - bounds.height,
        }
        edge = max(over, key=lambda e: over[e])
        return f"it would reach {over[edge] / 1e6:.2f} mm too far {edge}"

    def _cost(
        self, state: State, extent: tuple[float, float, float, float], bends: float, crossings: int
    ) -> float:
        x0, y0, x1, y1 = extent
        return drawing_cost((x1 - x0) * (y1 - y0), state.bends + bends, crossings)

    def _crossings(self, growth: Growth) -> int:
        """Return how many elements lie on the wrong side of a transistor: input and output belong apart."""
        devices = (*growth.state.devices, *growth.devices)
        crossing = {
            item.owner
            for item in growth.obstacles
            for device in devices
            if not item.corridor and (stage := self._stage(item.owner)) is not None
            if device.is_crossed(item.box, stage)
        }
        return growth.state.crossings + len(crossing)

    def _stage(self, owner: str) -> int | None:
        """Return an element's stage; None for one that joins two, such as a transistor or feedback."""
        if owner not in self._stages:
            stages = {self.tour.stages[net] for net in self.model.owner_nets.get(owner, ())}
            self._stages[owner] = stages.pop() if len(stages) == 1 else None
        return self._stages[owner]

    def _disorder(self, growth: Growth) -> int:
        """Return how many arms side by side towards one edge stand against its ports' file order."""
        arms = [
            (self.tour.first_port[key], self.tour.edges[key], pending.at, _out(pending))
            for pending in growth.pending
            if len(pending.turns) == 1
            for key in ((pending.end.element, pending.end.index),)
            if key in self.tour.first_port
        ]
        wrong = 0
        for (first, edges, a, out), (second, others, b, other) in itertools.combinations(arms, 2):
            if out == other and edges == others and len(edges) <= 1:
                step = b.y - a.y if out in (0.0, 180.0) else b.x - a.x
                wrong += step * (second - first) < 0
        return wrong

    # -- ports ---------------------------------------------------------------------------------------

    def _port_order(self, growth: Growth) -> str | None:
        """Return what is wrong when ports along one edge would not come in file order."""
        ports = {**growth.state.ports, **growth.ports}
        order = list(self.model.file.ports)
        for name in growth.ports:
            for other, laid in ports.items():
                if other == name or laid.edge != growth.ports[name].edge:
                    continue
                if any(self.model.file.ports[p].at is not None for p in (name, other)):
                    continue
                axis = 1 if laid.edge in ("east", "west") else 0
                step = growth.ports[name].point[axis] - laid.point[axis]
                if (step > 0) != (order.index(name) > order.index(other)):
                    return f"port {name} would not come in file order with {other} on the {laid.edge} edge"
        return None


def _out(pending: Pending) -> float:
    """Return the heading [deg] with which a pending thing of one turn leaves."""
    return (pending.at.heading + pending.turns[0]) % 360.0


def _answers(choice: Choice, twin: Choice) -> bool:
    """True for a choice that is the mirror image of a twin's; a lone turn or side may be as it comes."""
    turn, side, word = twin.mirrored
    same_turn = choice.turn == turn or choice.turn == 0.0
    return choice.word == word and same_turn and choice.side in (side, twin.side)


def _difference(a: Choice, b: Choice) -> int:
    """Return how far the legs of two routes of one shape differ [nm]."""
    return sum(abs(p - q) for p, q in zip(a.legs, b.legs, strict=True))
