"""Which routes a line may take from where it starts: tidy shapes, hinted words, ways to a port's edge."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field

from layoutgen.circuit import End
from layoutgen.placement.budgets import LineLengths
from layoutgen.placement.frame import Box, Pose, unit
from layoutgen.placement.headed import ROUND_WORDS, TARGET_WORDS, is_slanted, turn_to, words_to
from layoutgen.placement.kit import PIN_TOLERANCE
from layoutgen.placement.meetings import Meetings
from layoutgen.placement.model import Model
from layoutgen.placement.runs import Run, Runs
from layoutgen.placement.state import BOARD_STEP, EDGES, State, edge_of_heading
from layoutgen.placement.tour import Tour
from layoutgen.placement.words import (
    Route,
    Word,
    fixed_shapes,
    least_legs,
    meeting_routes,
    route_points,
    solve_legs,
)
from layoutgen.reading import Hint
from layoutgen.units import to_nm

__all__ = ["RouteChoice", "Router"]

_MM = 1_000_000
_OPPOSITE = {"east": "west", "west": "east", "north": "south", "south": "north"}
_STRETCHES = (0, 1 * _MM, 2 * _MM, 4 * _MM, 8 * _MM)
_JOGS = (0, 2 * _MM, 5 * _MM)


@dataclass(frozen=True, slots=True)
class RouteChoice:
    """A route to try, and the edge it ends at for a line to a port.

    ``forecast`` are boxes [nm] where what hangs on the line is known to come to lie.
    """

    route: Route
    edge: str | None = None
    forecast: tuple[Box, ...] = ()


@dataclass(slots=True)
class Router:
    """Yields routes for lines; holds the circuit, no state."""

    model: Model
    tour: Tour
    lengths: LineLengths
    runs: Runs
    meetings: Meetings = field(init=False)

    def __post_init__(self) -> None:
        """Set the helper up."""
        self.meetings = Meetings(self.model, self.tour)

    def choices(self, end: End, start: Pose, state: State, *, straight: bool) -> Iterator[RouteChoice]:
        """Yield routes for a line from one end, the plainest first.

        Args:
            end: The line's end at the start.
            start: Node point and heading out of it.
            state: What is laid so far, and what is known of the board.
            straight: Only the straight route, where the line need not turn to its port.
        """
        name = end.element
        far = self.meetings.far(end)
        hinted = self._hinted_word(end)
        port = self.tour.port_at(far)
        if hinted is not None:
            yield from self._hinted(end, start, hinted, state, port)
        elif port is not None:
            yield from self._to_port(end, start, state, port, straight=straight)
        elif aimed := list(self._aimed(end, start, state, straight=straight)):
            yield from aimed
        elif self.model.sized.lines[name].free:
            yield from self._free(end, straight=straight)
        else:
            lengths = self.lengths.by_bends(name, state.roles)
            shapes = fixed_shapes(lengths, self.meetings.rules(end))
            for route in shapes:
                if not straight or not route.word:
                    yield RouteChoice(route)

    def closing(self, end: End, start: Pose, target: Pose, state: State) -> Iterator[RouteChoice]:
        """Yield routes for a line between two placed nodes, that of fewest bends first.

        Args:
            end: The line's end at the start.
            start: Node point and heading out of it.
            target: The other node, and the heading on arriving there.
            state: What is laid so far.
        """
        hinted = self._hinted_word(end)
        words = [hinted[0]] if hinted is not None else [*TARGET_WORDS, *ROUND_WORDS]
        for word in words:
            if (start.heading + sum(word)) % 360.0 != target.heading:
                continue
            for route in self._closing(end, start, target, state, word, hinted):
                if route_points(start, route)[1] == target:
                    yield RouteChoice(route)

    def _closing(
        self,
        end: End,
        start: Pose,
        target: Pose,
        state: State,
        word: Word,
        hinted: tuple[Word, tuple[int | None, ...]] | None,
    ) -> Iterator[Route]:
        name = end.element
        if self.model.sized.lines[name].free and hinted is None:
            yield from meeting_routes(word, self._least(end, word), start, target.x, target.y, _STRETCHES)
            return
        total = None
        if not self.model.sized.lines[name].free:
            lengths = self.lengths.by_bends(name, state.roles)
            if len(word) >= len(lengths):
                return
            total = self.lengths.length(name, word, state.roles)
        fixed = () if hinted is None else hinted[1]
        least = self._fixed_least(end, word)
        if fixed:
            least = tuple(m if leg is None else 1 for leg, m in zip(fixed, least, strict=True))
        route = solve_legs(word, least, start, total=total, x=target.x, y=target.y, fixed=fixed)
        if route is not None:
            yield route

    def leaves_as_hinted(self, end: End, first_heading: float, last_heading: float) -> bool:
        """True when a line keeps its ``leave`` hint; headings [deg] are those of travel."""
        hint = self._hint(end.element)
        if hint is None or hint.leave is None:
            return True
        wanted = hint.leave % 360.0
        leaving = first_heading if end.index == 0 else (last_heading + 180.0) % 360.0
        return leaving == wanted

    def hinted_turns(self, name: str) -> Word | None:
        """Return a line's hinted turns as seen from its first net."""
        hint = self._hint(name)
        return None if hint is None or hint.route is None else hint.route.turns

    def _hint(self, name: str) -> Hint | None:
        layout = self.model.file.layout
        return layout.hints.get(name) if layout is not None else None

    # -- free and targeted ---------------------------------------------------------------------------

    def _free(self, end: End, *, straight: bool) -> Iterator[RouteChoice]:
        least = self.meetings.least_free(end, to_port=False)
        for more in _STRETCHES:
            yield RouteChoice(Route((), (least + more,)))
        if straight:
            return
        rules = self.meetings.rules(end)
        for turn in (90.0, -90.0):
            for more in _STRETCHES:
                yield RouteChoice(Route((turn,), (rules.first + more, rules.last)))
                if more and self.meetings.with_closer(end):
                    yield RouteChoice(Route((turn,), (rules.first, rules.last + more)))
                    yield RouteChoice(Route((turn,), (rules.first + more, rules.last + more)))

    def _to_port(
        self, end: End, start: Pose, state: State, port: str, *, straight: bool
    ) -> Iterator[RouteChoice]:
        asked = self.model.file.ports[port].edge
        edges = (
            [asked] if asked is not None else sorted(EDGES, key=lambda e: turn_to(start.heading, EDGES[e]))
        )
        for edge in edges:
            on = start.heading == EDGES[edge]
            yield from self._to_edge(end, start, state, port, edge, straight=straight and on)

    def _to_edge(
        self, end: End, start: Pose, state: State, port: str, edge: str, *, straight: bool
    ) -> Iterator[RouteChoice]:
        name = end.element
        across, along = self._port_targets(state, port, edge)
        words = words_to(start.heading, EDGES[edge])
        if straight:
            words = [w for w in words if not w]
        x, y = (along, across) if unit(EDGES[edge])[0] else (across, along)
        if not self.model.sized.lines[name].free:
            yield from self._fixed_to_edge(end, start, state, words, (x, y), edge)
            return
        for word in words:
            if across is not None:
                route = solve_legs(word, self._least(end, word), start, x=x, y=y)
                if route is not None:
                    yield RouteChoice(route, edge)
                continue
            for route in self._stretched(end, word):
                goal = self._whole_step(route, start, state, port, edge) if along is None else along
                ended = _end_at(route, start, goal, edge)
                if ended is not None and ended.legs[-1] >= route.legs[-1]:
                    yield RouteChoice(ended, edge)

    def _whole_step(self, route: Route, start: Pose, state: State, port: str, edge: str) -> int | None:
        """Return where a line to a port's launch ends [nm] so that the board comes in whole steps.

        None where that is no matter: without a launch, or where the opposite edge is not settled.
        """
        length, opposite = self.runs.launch_length(port), _OPPOSITE[edge]
        if not length or not state.bounds.known(opposite):
            return None
        ux, uy = unit(EDGES[edge])
        inset = 0 if self.model.file.ports[port].to_edge else self.model.limits.edge
        end = route_points(start, route)[1]
        along, sign = (end.x if ux else end.y), round(ux + uy)
        span = abs(round(along - state.bounds.at(opposite))) + length + inset
        return along + sign * (-span % BOARD_STEP)

    def _least(self, end: End, word: Word, *, to_port: bool = True) -> tuple[int, ...]:
        if not word:
            return (self.meetings.least_free(end, to_port=to_port),)
        return least_legs(word, self.meetings.rules(end))

    def _stretched(self, end: End, word: Word) -> Iterator[Route]:
        """Yield a word with its least legs, then with longer first and middle legs to go round things."""
        least = self._least(end, word)
        if not word:
            yield Route(word, least)
            return
        for more in _STRETCHES:
            for jog in _JOGS if len(word) > 1 else (0,):
                yield Route(word, (least[0] + more, *(leg + jog for leg in least[1:-1]), least[-1]))

    def _fixed_to_edge(
        self,
        end: End,
        start: Pose,
        state: State,
        words: list[Word],
        target: tuple[int | None, int | None],
        edge: str,
    ) -> Iterator[RouteChoice]:
        """Yield routes of given length that end at an edge, or settle where it is."""
        name = end.element
        x, y = target
        lengths = self.lengths.by_bends(name, state.roles)
        shapes = (r for r in fixed_shapes(lengths, self.meetings.rules(end)) if r.word in words)
        if x is None and y is None:
            slanted = [word for word in words if is_slanted(word)]
            yield from (RouteChoice(route, edge) for route in self._slanted(end, start, state, slanted))
            yield from (RouteChoice(route, edge) for route in shapes)
            return
        exact = [
            solved
            for word in words
            if len(word) < len(lengths)
            for least in (self._fixed_least(end, word),)
            for total in (self._total(name, word, state),)
            if (solved := solve_legs(word, least, start, total=total, x=x, y=y)) is not None
        ]
        some = exact or _nearly_to_edge(shapes, start, target, edge)
        yield from (RouteChoice(route, edge) for route in some)

    def _fixed_least(self, end: End, word: Word) -> tuple[int, ...]:
        return least_legs(word, self.meetings.rules(end))

    def _port_targets(self, state: State, port: str, edge: str) -> tuple[int | None, int | None]:
        """Return the port's coordinates across and along its edge's heading, where they are settled [nm]."""
        record = self.model.file.ports[port]
        ux, uy = unit(EDGES[edge])
        along = None
        if state.bounds.known(edge):
            inset = 0 if record.to_edge else self.model.limits.edge
            inset += self.runs.launch_length(port)
            along = round(state.bounds.at(edge) - (ux + uy) * inset)
        across = None
        low = "south" if ux else "west"
        if record.at is not None and state.bounds.known(low):
            across = round(state.bounds.at(low)) + to_nm(record.at)
        return across, along

    # -- aims ----------------------------------------------------------------------------------------

    def _aimed(self, end: End, start: Pose, state: State, *, straight: bool) -> Iterator[RouteChoice]:
        """Yield routes that bring what stands at the end of a straight run to where it must be."""
        run = self.runs.beyond(self.meetings.far(end))
        free = self.model.sized.lines[end.element].free
        if run is None or (run.lines and not free):
            return
        if run.is_port:
            yield from self._to_edge_by_run(end, start, state, run, straight=straight)
            return
        hint = self._hint(run.name)
        if hint is None:
            return
        if hint.at is not None and state.bounds.known("west") and state.bounds.known("south"):
            x, y = round(state.bounds.x0) + to_nm(hint.at[0]), round(state.bounds.y0) + to_nm(hint.at[1])
            heading = start.heading + run.pose.heading if hint.heading is None else hint.heading
            yield from self._to_pose(end, start, run.start_for(Pose(x, y, heading % 360.0)), state)
        elif hint.heading is not None:
            yield from self._turned(end, start, state, (hint.heading - run.pose.heading) % 360.0)

    def _to_edge_by_run(
        self, end: End, start: Pose, state: State, run: Run, *, straight: bool
    ) -> Iterator[RouteChoice]:
        """Yield routes of a free line after which lines of given length end at an edge that is settled."""
        edge = self.model.file.ports[run.name].edge or edge_of_heading(start.heading)
        if edge is None or not state.bounds.known(edge) or not self.model.sized.lines[end.element].free:
            return
        across, along = self._port_targets(state, run.name, edge)
        x, y = (along, across) if unit(EDGES[edge])[0] else (across, along)
        goal = run.start_for(Pose(x or 0, y or 0, EDGES[edge]))
        for word in words_to(start.heading, goal.heading):
            if straight and word:
                continue
            route = solve_legs(
                word,
                self._least(end, word, to_port=False),
                start,
                x=None if x is None else goal.x,
                y=None if y is None else goal.y,
            )
            if route is not None:
                yield RouteChoice(route)

    def _turned(self, end: End, start: Pose, state: State, heading: float) -> Iterator[RouteChoice]:
        """Yield routes by which a line turns to a heading [deg]; none where it has it already."""
        words = words_to(start.heading, heading)
        if () in words:
            return
        if self.model.sized.lines[end.element].free:
            for word in words:
                yield from (RouteChoice(route) for route in self._stretched(end, word))
            return
        slanted = [word for word in words if is_slanted(word)]
        yield from (RouteChoice(route) for route in self._slanted(end, start, state, slanted))
        lengths = self.lengths.by_bends(end.element, state.roles)
        for route in fixed_shapes(lengths, self.meetings.rules(end)):
            if route.word in words:
                yield RouteChoice(route)

    def _slanted(self, end: End, start: Pose, state: State, words: list[Word]) -> Iterator[Route]:
        """Yield routes of given length with turns that are no quarter turns, spare length spread evenly."""
        for word in words:
            total = self._total(end.element, word, state)
            route = solve_legs(word, self._fixed_least(end, word), start, total=total)
            if route is not None:
                yield route

    def _total(self, name: str, word: Word, state: State) -> int:
        """Return the centre-line length [nm] of a line of given length with the turns of a word."""
        if is_slanted(word):
            return self.lengths.length(name, word, state.roles)
        return self.lengths.by_bends(name, state.roles)[len(word)]

    def _to_pose(self, end: End, start: Pose, target: Pose, state: State) -> Iterator[RouteChoice]:
        name = end.element
        free = self.model.sized.lines[name].free
        lengths = None if free else self.lengths.by_bends(name, state.roles)
        for word in words_to(start.heading, target.heading):
            if lengths is not None and len(word) >= len(lengths):
                continue
            total = None if lengths is None else self._total(name, word, state)
            least = self._least(end, word, to_port=False) if free else self._fixed_least(end, word)
            route = solve_legs(word, least, start, total=total, x=target.x, y=target.y)
            if route is not None:
                yield RouteChoice(route)

    # -- hints ---------------------------------------------------------------------------------------

    def _hinted_word(self, end: End) -> tuple[Word, tuple[int | None, ...]] | None:
        """Return a line's hinted turns and legs as travelled from one end."""
        hint = self._hint(end.element)
        if hint is None or hint.route is None:
            return None
        turns = hint.route.turns
        legs = tuple(None if leg is None else to_nm(leg) for leg in hint.route.lengths)
        if end.index == 0:
            return turns, legs
        return tuple(-turn for turn in reversed(turns)), legs[::-1]

    def _hinted(
        self,
        end: End,
        start: Pose,
        hinted: tuple[Word, tuple[int | None, ...]],
        state: State,
        port: str | None,
    ) -> Iterator[RouteChoice]:
        word, legs = hinted
        name = end.element
        free = self.model.sized.lines[name].free
        total = None if free else self.lengths.length(name, word, state.roles)
        edge = None
        x = y = None
        if port is not None:
            out = (start.heading + sum(word)) % 360.0
            edge = next((e for e, heading in EDGES.items() if heading == out), None)
            if edge is not None:
                across, along = self._port_targets(state, port, edge)
                x, y = (along, across) if unit(out)[0] else (across, along)
        least = tuple(
            1 if leg is not None else m
            for leg, m in zip(legs, least_legs(word, self.meetings.rules(end)), strict=True)
        )
        route = solve_legs(word, least, start, total=total, x=x, y=y, fixed=legs)
        if route is not None:
            yield RouteChoice(route, edge)


def _end_at(route: Route, start: Pose, along: int | None, edge: str) -> Route | None:
    """Return the route with its last leg cut or stretched to end at a coordinate [nm], if it is known."""
    if along is None:
        return route
    ux, uy = unit(EDGES[edge])
    end = route_points(start, route)[1]
    more = round((along - (end.x if ux else end.y)) * (ux + uy))
    last = route.legs[-1] + more
    return Route(route.word, (*route.legs[:-1], last)) if last > 0 else None


def _nearly_to_edge(
    shapes: Iterable[Route], start: Pose, target: tuple[int | None, int | None], edge: str
) -> Iterator[Route]:
    """Yield the shapes that end short of an edge by less than a step of the board's size."""
    ux, uy = unit(EDGES[edge])
    axis = 0 if ux else 1
    for route in shapes:
        last = route_points(start, route)[1].point
        along, across = target[axis], target[1 - axis]
        short = 0 if along is None else (along - last[axis]) * (ux + uy)
        if 0 <= short < BOARD_STEP and (across is None or abs(across - last[1 - axis]) <= PIN_TOLERANCE):
            yield route
