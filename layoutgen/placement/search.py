"""The search: lay one pending thing after another, keeping the few best drawings so far.

A beam search, deterministic: states are extended in a fixed order of elements (the straight path first,
then shunt parts and stubs, then feeds with their banks, supply lines last), candidates are tried from the
cheapest on and rejected by clearance, and the best states by board area and bends go on.
"""

from __future__ import annotations

import heapq
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, field, replace
from functools import partial
from itertools import islice

from layoutgen.circuit import End, EndKind
from layoutgen.circuit.queries import ends_of, is_shunt
from layoutgen.placement.budgets import LineLengths
from layoutgen.placement.clearance import Kind, clearance_table, edge_margins
from layoutgen.placement.frame import Pose
from layoutgen.placement.lay import Layer, PinnedError
from layoutgen.placement.model import GROUND, Model
from layoutgen.placement.neighbours import Neighbours
from layoutgen.placement.records import Choice, Choices
from layoutgen.placement.routes import RouteChoice, Router
from layoutgen.placement.state import EDGES, Growth, Pending, State
from layoutgen.placement.tour import Tour
from layoutgen.placement.words import route_points

__all__ = ["Effort", "Failure", "Search", "drawing_cost"]

_BEND_COST = 0.02  # of the board's area for each bend: a fold must save at least that
_BEND_AREA = 10e12  # [nm^2] for each bend besides: on a small board, too, a straight stub is worth its room
_CROSSING_COST = 0.05  # for each element of an input that lies beside an output, or the other way round


_CROWDING = 3.0  # bends that a stub is worth on the side away from the feeds
_LOOK_AHEAD = 60  # ways tried for what leads to a port before a candidate is taken as shut in


def drawing_cost(area: float, bends: float, crossings: int) -> float:
    """Return what a drawing costs [nm^2]: its area, more for bends and for input beside output."""
    return area * (1.0 + _BEND_COST * bends + _CROSSING_COST * crossings) + _BEND_AREA * bends


@dataclass(frozen=True, slots=True)
class Effort:
    """How hard to look: states kept, candidates accepted for each, whether the straight path may fold."""

    beam: int = 6
    accepted: int = 3
    fold_spine: bool = False
    tight_edges: bool = False
    any_side: bool = False


@dataclass(frozen=True, slots=True)
class Failure:
    """What could not be laid, and what stood in the way, for the message."""

    element: str
    reason: str
    depth: int


@dataclass(frozen=True, slots=True)
class Way:
    """One way to lay an element: the choice made, the least extent and bends it brings, how to lay it."""

    element: str
    choice: Choice
    extent: tuple[float, float, float, float]
    bends: float
    lay: Callable[[Growth], None]
    crowding: float = 0.0


@dataclass(slots=True)
class Search:
    """One run of the search over one circuit."""

    model: Model
    tour: Tour
    lengths: LineLengths
    effort: Effort
    layer: Layer = field(init=False)
    router: Router = field(init=False)
    neighbours: Neighbours = field(init=False)
    failure: Failure | None = field(init=False, default=None)

    def __post_init__(self) -> None:
        """Set the helpers up."""
        self.layer = Layer(self.model, self.tour, self.lengths)
        self.router = Router(self.model, self.tour, self.lengths)
        table = clearance_table(self.model.limits, self.model.default_gap)
        self.neighbours = Neighbours(self.model, self.lengths, table)
        self.margins = edge_margins(
            self.model.limits, self.model.default_gap, self.model.ground_ring, tight=self.effort.tight_edges
        )
        self._spine = frozenset(self.model.circuit.spine)

    margins: Mapping[Kind, int] = field(init=False)
    _spine: frozenset[str] = field(init=False)

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
            states = grown[: self.effort.beam]
            depth += 1
        return states

    def replay(self, start: State, choices: Choices) -> State | None:
        """Return the state that earlier choices give with this circuit's lengths, None if they do not fit."""
        state = start
        while state.pending:
            pending = self._next(state)
            chosen = choices.ways.get(_key(pending.end))
            if chosen is None:
                return None
            base = replace(state, pending=tuple(p for p in state.pending if p is not pending))
            ways = [w for w in self._ways_to_lay(pending, base) if w.choice.shape == chosen.shape]
            if not ways:
                return None
            way = min(ways, key=lambda w: _difference(w.choice, chosen))
            growth = self._built(base, way, 0)
            if growth is None or self._conflict(growth) is not None:
                return None
            extent, crossings = growth.extent(self.margins), self._crossings(growth)
            cost = self._cost(base, extent, growth.bends, crossings)
            state = growth.applied(extent, cost, crossings, (_key(pending.end), way.choice))
        return state

    def _next(self, state: State) -> Pending:
        """Return the pending thing to lay next: the same for all states of one depth."""
        return min(state.pending, key=lambda p: self._priority(p.end))

    def _priority(self, end: End) -> tuple[int, int, int, str, int]:
        file = self.model.file
        weight = self.tour.weight.get((end.element, end.index), 0)
        if end.element in self._spine:
            group, order = 0, self.model.circuit.spine.index(end.element)
        elif end.kind is EndKind.PAD and is_shunt(file.parts[end.element]):
            group, order = 1, 0
        elif weight <= 1:
            group, order = 2, 0
        elif self._ends_in_port(end):
            group, order = 4, 0
        else:
            group, order = 3, -weight
        return group, order, self._file_order(end), end.element, end.index

    def _ends_in_port(self, end: End) -> bool:
        """True for a line or port that only leads to a port."""
        weight = self.tour.weight.get((end.element, end.index), 0)
        return weight <= 2 and self.tour.leads_to_port.get((end.element, end.index), False)

    def _file_order(self, end: End) -> int:
        file = self.model.file
        names = [*file.lines, *file.coupled, *file.parts, *file.ports]
        return names.index(end.element)

    # -- extending -----------------------------------------------------------------------------------

    def _extend(self, state: State, element: End, depth: int) -> Iterator[State]:
        """Yield the cheapest states that lay the pending element, at most as many as are accepted.

        Ways are kept in a heap by what they cost at least; one is built only when it comes to the top, and
        checked for clearance only when, built, it comes to the top again.
        """
        pending = next(p for p in state.pending if p.end == element)
        base = replace(state, pending=tuple(p for p in state.pending if p is not pending))
        heap: list[tuple[float, int, Way, Growth | None]] = [
            (self._cost(base, way.extent, way.bends, base.crossings), order, way, None)
            for order, way in enumerate(self._ways_to_lay(pending, base))
        ]
        if not heap:
            self._fail(
                depth, element.element, "no route leads where it must, or as its hint asks"
            )
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
            extent, key = growth.extent(self.margins), _key(element)
            grown = growth.applied(extent, cost, self._crossings(growth), (key, way.choice))
            conflict = self._conflict(growth) or self._shut_in(grown, growth)
            if conflict is None:
                accepted += 1
                yield grown
            else:
                self._fail(depth, element.element, conflict)

    def _conflict(self, growth: Growth) -> str | None:
        return self._port_order(growth) or self.neighbours.conflict(growth)

    def _shut_in(self, grown: State, growth: Growth) -> str | None:
        """Return what is wrong when something new that leads to a port would have no way out."""
        for pending in growth.pending:
            if self._ends_in_port(pending.end) and not self._has_way(grown, pending):
                return f"{pending.end.element} would have no way to its edge"
        return None

    def _has_way(self, state: State, pending: Pending) -> bool:
        """True when at least one way of laying a pending thing is clear."""
        for way in islice(self._ways_to_lay(pending, state), _LOOK_AHEAD):
            trial = Growth(state=state, bounds=state.bounds)
            try:
                way.lay(trial)
            except PinnedError:
                continue
            if trial.bounds.holds(trial.extent(self.margins)) and self._conflict(trial) is None:
                return True
        return False

    def _built(self, base: State, way: Way, depth: int) -> Growth | None:
        """Return a way as a candidate inside what is known of the board, or None."""
        growth = Growth(state=base, bounds=base.bounds)
        try:
            way.lay(growth)
            growth.bends += way.crowding
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
        stages = {self.tour.stages[net] for net in self.model.owner_nets.get(owner, ())}
        return stages.pop() if len(stages) == 1 else None

    def _ways_to_lay(self, pending: Pending, state: State) -> Iterator[Way]:
        """Yield the ways open to a pending thing."""
        used = state.used.get(self._net(pending.end), ())
        for turn in pending.turns:
            heading = (pending.at.heading + turn) % 360.0
            if heading in used or self._leads_away(pending, heading):
                continue
            crowding = _CROWDING if self._joins_feeds(pending, heading) else 0.0
            for way in self._ways(pending, turn, state):
                yield replace(way, bends=way.bends + crowding, crowding=crowding) if crowding else way

    def _joins_feeds(self, pending: Pending, heading: float) -> bool:
        """True when a stub or shunt part would leave to the side where the feeds go, and has a choice."""
        key = (pending.end.element, pending.end.index)
        if len(pending.turns) < 2 or self.tour.leads_to_port.get(key, False):
            return False
        asked = {port.edge for port in self.model.file.ports.values() if port.kind == "dc" and port.edge}
        return any(EDGES[edge] == heading for edge in asked)

    def _leads_away(self, pending: Pending, heading: float) -> bool:
        """True when an arm could leave towards the edge that its ports ask for, and this is not the way."""
        edges = self.tour.edges.get((pending.end.element, pending.end.index), frozenset())
        if self.effort.any_side or len(edges) != 1 or len(pending.turns) < 2:
            return False
        wanted = EDGES[next(iter(edges))]
        choices = [(pending.at.heading + turn) % 360.0 for turn in pending.turns]
        return wanted in choices and heading == (wanted + 180.0) % 360.0

    def _net(self, end: End) -> str:
        return next(net for found, net in ends_of(self.model.file, end.element) if found.index == end.index)

    def _ways(self, pending: Pending, turn: float, state: State) -> Iterator[Way]:
        end, layer, extent = pending.end, self.layer, state.extent
        if end.kind is EndKind.LINE and self.model.file.lines[end.element].shape == "radial":
            yield Way(
                end.element, Choice(turn, 1), extent, 0.0, partial(layer.radial, pending=pending, turn=turn)
            )
        elif end.kind is EndKind.LINE:
            yield from self._line_ways(pending, turn, state)
        elif end.kind is EndKind.COUPLED:
            length, start = self.lengths.pair_length(end.element), pending.at.turned(turn)
            for side in (1, -1):
                lay_pair = partial(layer.pair, end=end, start=start, side=side, length=length)
                yield Way(end.element, Choice(turn, side), extent, 0.0, lay_pair)
        elif end.kind is EndKind.PORT:
            yield Way(
                end.element, Choice(turn, 1), extent, 0.0, partial(layer.port_arm, pending=pending, turn=turn)
            )
        else:
            for side in (1, -1) if self._meets_bank(end) else (1,):
                lay_part = partial(layer.pad_arm, pending=pending, turn=turn, bank_side=side)
                yield Way(end.element, Choice(turn, side), extent, 0.0, lay_part)

    def _line_ways(self, pending: Pending, turn: float, state: State) -> Iterator[Way]:
        end, start = pending.end, pending.at.turned(turn)
        straight = end.element in self._spine and not self.effort.fold_spine
        sides = (1, -1) if self._meets_bank(end) else (1,)
        weight = self.layer.bend_weight(end)
        for choice in self.router.choices(end, start, state.bounds, straight=straight):
            last = (start.heading + sum(choice.route.word)) % 360.0
            if not self.router.leaves_as_hinted(end, start.heading, last):
                continue
            extent = self._line_extent(end, start, choice, state)
            for side in sides:
                lay = partial(
                    self.layer.line,
                    end=end,
                    start=start,
                    route=choice.route,
                    edge=choice.edge,
                    bank_side=side,
                )
                made = Choice(turn, side, choice.route.word, choice.route.legs, choice.edge)
                yield Way(end.element, made, extent, weight * len(choice.route.word), lay)

    def _line_extent(
        self, end: End, start: Pose, choice: RouteChoice, state: State
    ) -> tuple[float, float, float, float]:
        """Return the least extent [nm] that a route brings about: a bound for the cost of building it."""
        points = route_points(start, choice.route)[0]
        x0, y0, x1, y1 = state.extent
        half = self.model.widths[end.element] / 2
        return (
            min(x0, *(p[0] - half for p in points)),
            min(y0, *(p[1] - half for p in points)),
            max(x1, *(p[0] + half for p in points)),
            max(y1, *(p[1] + half for p in points)),
        )

    def _meets_bank(self, end: End) -> bool:
        """True when an element leads straight, or through parts, into a bank: its side is then a choice."""
        seen, stack = set(), [end]
        while stack:
            here = stack.pop()
            for far, net in ends_of(self.model.file, here.element):
                if far.index == here.index or net == GROUND or net in seen:
                    continue
                seen.add(net)
                hub = self.tour.hubs[net]
                if hub.bank:
                    return True
                if hub.arrival == far and len(hub.arms) == 1 and hub.arms[0].end.kind is EndKind.PAD:
                    stack.append(hub.arms[0].end)
        return False

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


def _key(end: End) -> str:
    """Return the name under which a choice is kept."""
    return f"{end.element}:{end.index}"


def _difference(a: Choice, b: Choice) -> int:
    """Return how far the legs of two routes of one shape differ [nm]."""
    return sum(abs(p - q) for p, q in zip(a.legs, b.legs, strict=True))
