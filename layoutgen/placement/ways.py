"""The ways open to each thing that is to be laid: sides, routes, drawings; how each would be built."""

from __future__ import annotations

import itertools
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field, replace
from functools import partial

from layoutgen.circuit import End, EndKind
from layoutgen.placement.bows import BowedSolver
from layoutgen.placement.budgets import LineLengths
from layoutgen.placement.cluster import ClusterPlan, ClusterSolver, Solution
from layoutgen.placement.frame import Box, Pose, hull
from layoutgen.placement.kit import Kit
from layoutgen.placement.lay import Layer
from layoutgen.placement.lay_cluster import Pinning, lay_cluster
from layoutgen.placement.model import GROUND, Model
from layoutgen.placement.pairs import side_away
from layoutgen.placement.records import Choice
from layoutgen.placement.rooms import Rooms
from layoutgen.placement.routes import RouteChoice, Router
from layoutgen.placement.runs import Runs
from layoutgen.placement.state import EDGES, Growth, Pending, State
from layoutgen.placement.tour import Headings, Tour, end_key
from layoutgen.placement.turned import sides_of_leads
from layoutgen.placement.wide import WideSolver, keeps_its_hand
from layoutgen.placement.words import Word, route_points

__all__ = ["Way", "Ways"]

_CROWDING = 6.0  # bends that a stub is worth on the side away from the feeds
_CLUSTER_BENDS = 3.0  # what a bend inside a loop counts for
_LOPSIDED = 12.0  # bends that a symmetric drawing of a symmetric loop is worth
_SLENDER = 2.0  # bends for each unit by which a loop is more slender than
_PLAIN_SLENDERNESS = 2.0  # this: long against wide [-]
_FOLDED = 50.0  # bends that a pair folded back beside the one before it counts for: where nothing else does

Extent = tuple[float, float, float, float]


@dataclass(frozen=True, slots=True)
class Way:
    """One way to lay an element: the choice made, the least extent and bends it brings, how to lay it."""

    element: str
    choice: Choice
    extent: Extent
    bends: float
    lay: Callable[[Growth], None]
    crowding: float = 0.0
    forecast: tuple[Box, ...] = ()


@dataclass(slots=True)
class Ways:
    """Lists the ways; holds the circuit, and what was worked out for its loop clusters."""

    model: Model
    tour: Tour
    lengths: LineLengths
    layer: Layer = field(init=False)
    router: Router = field(init=False)
    clusters: list[ClusterSolver] = field(init=False)
    fold_spine: bool = False
    any_side: bool = False
    bows: bool = False
    inside: Sequence[ClusterSolver] | None = None
    known: dict[object, list[Solution]] = field(default_factory=dict)
    rooms: Rooms | None = field(init=False, default=None)
    _spine: frozenset[str] = field(init=False)

    def __post_init__(self) -> None:
        """Set the helpers up."""
        kit = Kit(self.model, self.tour, self.lengths)
        self.layer = Layer(kit)
        self.router = Router(self.model, self.tour, self.lengths, Runs(self.layer))
        count = len(self.tour.loops.clusters)
        self.clusters = [self._solver(kit, k, self.known) for k in range(count)]
        self._spine = frozenset(self.model.circuit.spine)

    def _solver(self, kit: Kit, number: int, known: dict[object, list[Solution]]) -> ClusterSolver:
        """Return what draws a cluster."""
        if self.inside is not None:
            return WideSolver(kit, self.router, number, known, inside=self.inside)
        return (BowedSolver if self.bows else ClusterSolver)(kit, self.router, number, known)

    def mate(self, pending: Pending, state: State) -> Pending | None:
        """Return the other end of a line that closes a loop, where that waits too."""
        if pending.end.element not in self.tour.loops.closers:
            return None
        both = (p for p in state.pending if p.end.element == pending.end.element)
        return next((p for p in both if p.end != pending.end), None)

    def without(self, state: State, pending: Pending) -> State:
        """Return a state without a pending thing, and without its other end where it closes a loop."""
        gone = (pending, self.mate(pending, state))
        return replace(state, pending=tuple(p for p in state.pending if p not in gone))

    def is_ready(self, pending: Pending, state: State) -> bool:
        """True unless something closes a loop and its other node has no place yet."""
        closes = pending.end.element in self.tour.loops.closers
        return not closes or self.mate(pending, state) is not None

    # -- listing -------------------------------------------------------------------------------------

    def of(self, pending: Pending, state: State, word: Word | None = None) -> Iterator[Way]:
        """Yield the ways open to a pending thing; ``state`` may hold it still, or not any more.

        With a ``word``, only lines that take these turns are listed, and all else.
        """
        if pending.cluster is not None:
            yield from self._cluster_ways(pending, state)
            return
        mate = self.mate(pending, state)
        used = state.used.get(self._net(pending.end), ())
        for turn in pending.turns:
            heading = (pending.at.heading + turn) % 360.0
            if heading in used or self._leads_away(pending, heading):
                continue
            crowding = _CROWDING if self._joins_feeds(pending, heading) else 0.0
            ways = self._ways(pending, turn, state, word)
            if mate is not None:
                ways = self._closing_ways(pending, mate, turn, state)
            for way in ways:
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
        if self.any_side or len(edges) != 1 or len(pending.turns) < 2:
            return False
        wanted = EDGES[next(iter(edges))]
        choices = [(pending.at.heading + turn) % 360.0 for turn in pending.turns]
        return wanted in choices and heading == (wanted + 180.0) % 360.0

    def _net(self, end: End) -> str:
        return self.model.net_of(end)

    def _ways(self, pending: Pending, turn: float, state: State, word: Word | None) -> Iterator[Way]:
        end, layer, extent, here = pending.end, self.layer, state.extent, pending.at.heading
        if end.kind is EndKind.LINE and self.model.file.lines[end.element].shape == "radial":
            yield Way(
                end.element,
                Choice(turn, 1, heading=here),
                extent,
                0.0,
                partial(layer.radial, pending=pending, turn=turn),
            )
        elif end.kind is EndKind.LINE:
            yield from self._line_ways(pending, turn, state, word)
        elif end.kind is EndKind.COUPLED:
            yield from self._pair_ways(pending, turn, state)
        elif end.kind is EndKind.PORT:
            yield Way(
                end.element,
                Choice(turn, 1, heading=here),
                extent,
                0.0,
                partial(layer.ports.arm, pending=pending, turn=turn),
            )
        else:
            for more, side in itertools.product(self._offsets(), (1, -1) if self._meets_bank(end) else (1,)):
                farther = replace(pending, offset=pending.offset + more)
                lay_part = partial(layer.pad_arm, pending=farther, turn=turn, bank_side=side)
                choice = Choice(turn, side, legs=(more,), heading=here)
                yield Way(end.element, choice, extent, 0.0, lay_part)

    def _pair_ways(self, pending: Pending, turn: float, state: State) -> Iterator[Way]:
        """Yield the sides of a pair; of one that follows another the side away, late also the other."""
        end, start = pending.end, pending.at.turned(turn)
        length = self.lengths.pair_length(end.element, state.roles)
        away = side_away(self.model, state, end, start)
        for side in (1, -1):
            folded = _FOLDED if away == -side else 0.0
            if folded and not self.any_side:
                continue
            lay = partial(self.layer.pair, end=end, start=start, side=side, length=length)
            choice = Choice(turn, side, heading=pending.at.heading)
            yield Way(end.element, choice, state.extent, folded, lay, crowding=folded)

    def _offsets(self) -> tuple[int, ...]:
        """Return how much farther from its node than it must a part may stand [nm]."""
        return (0, self.model.limits.spacing) if self.any_side else (0,)

    def _line_ways(self, pending: Pending, turn: float, state: State, word: Word | None) -> Iterator[Way]:
        """Yield the ways of a line, for each role that it may have at a cluster it leads to."""
        entered = self._cluster_beyond(pending.end)
        if entered is None:
            yield from self._lines_of(pending, turn, state, word, None)
            return
        net = entered.nets[entered.entry]
        for role in entered.entry_roles():
            promising = replace(state, roles={**state.roles, net: role})
            yield from self._lines_of(pending, turn, promising, word, (net, role))

    def _cluster_beyond(self, end: End) -> ClusterSolver | None:
        """Return the cluster that a line of given length enters: its length depends on how it is met."""
        if self.model.sized.lines[end.element].free:
            return None
        for far, net in self.model.ends[end.element]:
            hub = self.tour.hubs.get(net)
            if far != end and hub is not None and hub.cluster is not None and hub.arrival == far:
                return self.clusters[hub.cluster]
        return None

    def _lines_of(
        self,
        pending: Pending,
        turn: float,
        state: State,
        word: Word | None,
        promise: tuple[str, Headings] | None,
    ) -> Iterator[Way]:
        end, start = pending.end, pending.at.turned(turn)
        straight = self._goes_straight(end) and not self.fold_spine and not self._leads_back(end, start)
        straight = straight and not (self.any_side and self._leaves_beside_lead(end))
        sides = (1, -1) if self._meets_bank(end) else (1,)
        weight = self.layer.lines.bend_weight(end)
        spread = self.rooms.routes(pending, start, state) if self.rooms is not None else None
        choices = self.router.choices(end, start, state, straight=straight) if spread is None else spread
        back = self._leads_back(end, start)
        for choice in choices:
            if (word is not None and choice.route.word != word) or (back and not choice.route.word):
                continue
            last = (start.heading + sum(choice.route.word)) % 360.0
            if not self.router.leaves_as_hinted(end, start.heading, last):
                continue
            extent = self._line_extent(end, start, choice, state)
            for side in sides:
                lay = partial(
                    self._lay_line, end=end, start=start, choice=choice, bank_side=side, promise=promise
                )
                made = Choice(
                    turn,
                    side,
                    choice.route.word,
                    choice.route.legs,
                    choice.edge,
                    promise,
                    pending.at.heading,
                )
                bends = weight * len(choice.route.word)
                yield Way(end.element, made, extent, bends, lay, forecast=choice.forecast)

    def _lay_line(
        self,
        growth: Growth,
        end: End,
        start: Pose,
        choice: RouteChoice,
        bank_side: int,
        promise: tuple[str, Headings] | None,
    ) -> None:
        """Lay a line, and note the role at a cluster for which it has its length."""
        if promise is not None:
            growth.roles[promise[0]] = promise[1]
        self.layer.line(growth, end, start, choice.route, choice.edge, bank_side)

    def _line_extent(
        self, end: End, start: Pose, choice: RouteChoice, state: State
    ) -> tuple[float, float, float, float]:
        """Return the least extent [nm] that a route brings about: a bound for the cost of building it."""
        x, y = zip(*route_points(start, choice.route)[0], strict=True)
        half = self.model.widths[end.element] / 2
        route = (min(x) - half, min(y) - half, max(x) + half, max(y) + half)
        forecast = ((x0 - half, y0 - half, x1 + half, y1 + half) for x0, y0, x1, y1 in choice.forecast)
        return hull((state.extent, route, *forecast))

    def _meets_bank(self, end: End) -> bool:
        """True when an element leads straight, or through parts, into a bank: its side is then a choice."""
        seen, stack = set(), [end]
        while stack:
            here = stack.pop()
            for far, net in self.model.ends[here.element]:
                if far.index == here.index or net == GROUND or net in seen:
                    continue
                seen.add(net)
                hub = self.tour.hubs[net]
                if hub.bank:
                    return True
                if hub.arrival == far and len(hub.arms) == 1 and hub.arms[0].end.kind is EndKind.PAD:
                    stack.append(hub.arms[0].end)
        return False

    def _leaves_beside_lead(self, end: End) -> bool:
        """True for a line that leaves one of two signal leads side by side: the two must part."""
        kit = self.layer.kit
        pads = [other for other in self.model.circuit.nets[self._net(end)].ends if other.kind is EndKind.PAD]
        bodies = [(kit.model.bodies[pad.element], pad) for pad in pads]
        return any(bool(sides_of_leads(kit, body, body.land_at(pad))) for body, pad in bodies)

    def _leads_back(self, end: End, start: Pose) -> bool:
        """True for a free line of the straight path that leaves away from the edge to which the path goes."""
        line = self.model.sized.lines[end.element]
        last = self.model.file.ports.get(self.model.circuit.spine[-1])
        if not line.free or last is None or last.edge is None or end.element not in self._spine:
            return False
        arrival = self.tour.hubs[self._net(end)].arrival
        if arrival is None or arrival.kind is not EndKind.PAD:
            return False  # it goes on from a port or a loop
        return start.heading == (EDGES[last.edge] + 180.0) % 360.0

    def _goes_straight(self, end: End) -> bool:
        """True for an element of the straight path, unless it is one of two equal arms."""
        return end.element in self._spine and end_key(end) not in self.tour.siblings

    # -- loops ---------------------------------------------------------------------------------------

    def _closing_ways(self, pending: Pending, mate: Pending, turn: float, state: State) -> Iterator[Way]:
        """Yield the ways of a line between two placed nodes."""
        end, start = pending.end, pending.at.turned(turn)
        weight = self.layer.lines.bend_weight(end)
        used = state.used.get(self._net(mate.end), ())
        for other in mate.turns:
            out = (mate.at.heading + other) % 360.0
            if out in used:
                continue
            target = mate.at.turned(other + 180.0)
            for choice in self.router.closing(end, start, target, state):
                if not self.router.leaves_as_hinted(end, start.heading, target.heading):
                    continue
                lay = partial(self.layer.lines.closing, end=end, mate=mate, start=start, route=choice.route)
                made = Choice(turn, 1, choice.route.word, choice.route.legs, heading=pending.at.heading)
                extent = self._line_extent(end, start, choice, state)
                yield Way(end.element, made, extent, weight * len(choice.route.word), lay)

    def _cluster_ways(self, pending: Pending, state: State) -> Iterator[Way]:
        """Yield the drawings of a loop cluster, each also mirrored."""
        assert pending.cluster is not None  # asked for clusters only
        solver = self.clusters[pending.cluster]
        for solution in solver.solutions():
            if not self._keeps_promise(solver, solution, state):
                continue
            for mirror in (1,) if keeps_its_hand(solver) else (1, -1):
                yield self._cluster_way(pending, state, solver, solution, mirror)

    def cluster_way(self, pending: Pending, state: State, plan: ClusterPlan, mirror: int) -> Way | None:
        """Return the way of a drawing chosen earlier, None where it no longer closes."""
        assert pending.cluster is not None  # asked for clusters only
        solver = self.clusters[pending.cluster]
        solution = None if mirror < 0 and keeps_its_hand(solver) else solver.solve_again(plan)
        if solution is None or not self._keeps_promise(solver, solution, state):
            return None
        return self._cluster_way(pending, state, solver, solution, mirror)

    def _keeps_promise(self, solver: ClusterSolver, solution: Solution, state: State) -> bool:
        """True unless the line that arrives was given its length for another role at the entry."""
        promised = state.roles.get(solver.nets[solver.entry])
        if promised is None:
            return True
        return solver.role_key(promised) == solver.role_key(solution.roles[solver.entry])

    def _cluster_way(
        self, pending: Pending, state: State, solver: ClusterSolver, solution: Solution, mirror: int
    ) -> Way:
        pinning = Pinning.of(solver, solution, pending.at, mirror)
        points = [pinning.point(point) for path in solver.paths(solution) for point in path]
        x0, y0, x1, y1 = state.extent
        extent = (
            min(x0, *(p[0] for p in points)),
            min(y0, *(p[1] for p in points)),
            max(x1, *(p[0] for p in points)),
            max(y1, *(p[1] for p in points)),
        )
        legs = tuple(leg for found in solution.shape.legs for leg in found)
        lopsided = 0.0 if solution.symmetric or not solver.may_be_symmetric else _LOPSIDED
        lopsided += _SLENDER * max(0.0, solution.slenderness - _PLAIN_SLENDERNESS)
        lay = partial(
            lay_cluster, layer=self.layer, solver=solver, solution=solution, at=pending.at, mirror=mirror
        )
        return Way(
            pending.end.element,
            Choice(0.0, mirror, (), legs, plan=solution.plan, heading=pending.at.heading),
            extent,
            _CLUSTER_BENDS * solution.plan.drawing.bends + lopsided,
            lay,
            crowding=lopsided,
        )
