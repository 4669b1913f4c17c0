"""The stage's verb: try with more and more effort, and say what would do when nothing does."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from itertools import islice

from layoutgen.errors import InfeasibleError, LayoutgenError
from layoutgen.placement.budgets import LineLengths
from layoutgen.placement.cluster import ClusterSolver
from layoutgen.placement.explain import explain_loop
from layoutgen.placement.finish import finish, frame_of
from layoutgen.placement.likes import Note, with_like_lines
from layoutgen.placement.model import Model
from layoutgen.placement.records import Choices, Placement
from layoutgen.placement.remedies import Remedies
from layoutgen.placement.search import Effort, Failure, Search, drawing_cost
from layoutgen.placement.start import first_states, join_root
from layoutgen.placement.state import State
from layoutgen.placement.stubs import refuse_hidden_stubs
from layoutgen.placement.tour import plan_tour
from layoutgen.placement.ways import Ways
from layoutgen.sizing import SizedCircuit

__all__ = ["place"]

_EFFORTS = (
    Effort(beam=4),
    Effort(beam=16, accepted=5, any_side=True),
    Effort(beam=16, accepted=5, any_side=True, tight_edges=True, only_margins=True),
    Effort(beam=24, accepted=6, any_side=True, tight_edges=True, fold_spine=True),
)
_SHIFTS = (6_000_000, -6_000_000, 12_000_000, -12_000_000, 25_000_000, -25_000_000)


def place(sized: SizedCircuit, like: Choices | None = None) -> Placement:
    """Return poses and centre-lines for a sized circuit.

    The search is deterministic: the same circuit gives the same placement.

    Args:
        sized: Every width, electrical length and land.
        like: What an earlier placement of the circuit decided; kept where it still fits, which saves the
            search when only lengths have changed a little.

    Raises:
        InfeasibleError: No placement was found, or a hint cannot be kept; names the element, what stands in
            its way, and the nearest size or hint that would do.
        WrongInputError: A line has no positive length after its corrections, or a junction too many arms.
    """
    found = _tried(sized, like, _EFFORTS)
    if isinstance(found, Placement):
        return found
    raise _infeasible(found)


@dataclass(frozen=True, slots=True)
class _Nothing:
    """A search that found no place: what it went over, its reason, the first loop that does not close."""

    ways: Ways
    failure: Failure | None
    open_loop: ClusterSolver | None


def _tried(
    sized: SizedCircuit, like: Choices | None, efforts: tuple[Effort, ...], *, closed: bool = False
) -> Placement | _Nothing:
    """Return the placement by the first effort that finds one, or why there is none.

    With ``closed``, a circuit with a loop that does not close is not looked at further.
    """
    notes: tuple[Note, ...] = ()
    ways, open_loop = _prepared(Model(sized))
    if open_loop is not None:
        alike, notes = with_like_lines(sized)
        ways, open_loop = _prepared(Model(alike)) if notes else (ways, open_loop)
    found = None if closed and open_loop is not None else _placed(ways, like, efforts)
    if isinstance(found, Placement):
        return replace(found, notes=found.notes + notes)
    return _Nothing(ways, found, open_loop)


def _placed(ways: Ways, like: Choices | None, efforts: tuple[Effort, ...]) -> Placement | Failure | None:
    """Return the placement by the first effort that finds one, else the first reason."""
    model = ways.model
    if like is not None and (again := _again(ways, like)) is not None:
        return finish(model, ways.lengths, again, like.effort)
    failure: Failure | None = None
    for number, effort in enumerate(efforts):
        if effort.only_margins and model.file.board.size is None:
            continue  # the board grows as it must: nothing would be laid otherwise
        best, found = _attempt(ways, effort)
        if best is not None:
            return finish(model, ways.lengths, best, number)
        failure = failure or found  # the plainest drawing's reason is the one to tell
    return failure


def _prepared(model: Model) -> tuple[Ways, ClusterSolver | None]:
    """Return the walk with its ways; loops that no drawing closes are cut, and the first one is told."""
    cut: frozenset[str] = frozenset()
    first: ClusterSolver | None = None
    while True:
        tour = plan_tour(model, cut)
        lengths = LineLengths(model, tour)
        refuse_hidden_stubs(model, tour, lengths)
        for name, line in model.sized.lines.items():
            if not line.free:
                lengths.by_bends(name)
        ways = Ways(model, tour, lengths)
        wrong = next((solver for solver in ways.clusters if not solver.solutions()), None)
        if wrong is None:
            return ways, first
        first = first or wrong
        cut |= set(tour.loops.clusters[wrong.number].elements)


def _again(ways: Ways, like: Choices) -> State | None:
    """Return the state that earlier choices give, None where they no longer fit."""
    if len(ways.tour.roots) > 1:
        return None
    search = Search(ways, _EFFORTS[like.effort])
    starts = first_states(ways.model, ways.tour, ways.layer, search.margins)
    start = next(islice(starts, like.start, None), None)
    return None if start is None else search.replay(start, like)


def _attempt(ways: Ways, effort: Effort, *, sized_board: bool = True) -> tuple[State | None, Failure | None]:
    """Return the best finished state of one effort over all starting frames, or why there is none."""
    best: tuple[float, State] | None = None
    failure: Failure | None = None
    search = Search(ways, effort)
    starts = first_states(ways.model, ways.tour, ways.layer, search.margins, sized_board=sized_board)
    for number, start in enumerate(starts):
        for state in _all_trees(search, replace(start, start=number)):
            frame = frame_of(state)
            cost = drawing_cost(frame.width * frame.height, state.bends, state.crossings)
            if best is None or cost < best[0]:
                best = (cost, state)
        failure = search.failure
        if best is not None and ways.model.file.board.size is not None:
            break
    return (None if best is None else best[1]), failure


def _all_trees(search: Search, start: State) -> Iterator[State]:
    """Yield finished states holding every separate tree of the circuit."""
    ways = search.ways
    states = search.run(start)
    for root in ways.tour.roots[1:]:
        following: list[State] = []
        for shift in _SHIFTS:
            for state in states[:2]:
                joined = join_root(ways.model, ways.tour, ways.layer, search.margins, state, root, shift)
                following = search.run(joined)
                if following:
                    break
            if following:
                break
        states = following
    yield from states


def _infeasible(nothing: _Nothing) -> InfeasibleError:
    """Return the error for a circuit without a place, with a remedy that was tried."""
    if nothing.open_loop is not None:
        return explain_loop(nothing.open_loop, _open_loop, _changed)
    model, failure = nothing.ways.model, nothing.failure
    element = failure.element if failure is not None else model.circuit.spine[0]
    reason = failure.reason if failure is not None else "no placement was found"
    if model.sized.corrections:  # a draft before it had a place
        return InfeasibleError(element, reason, "the lengths before their correction would do")
    remedy = Remedies(model, _changed, lambda: _roomy(nothing.ways)).best(element)
    return InfeasibleError(element, reason, remedy)


def _changed(sized: SizedCircuit) -> Placement | None:
    """Return the placement of a changed circuit; None where there is none, or the change is no good."""
    try:
        found = _tried(sized, None, _EFFORTS[:2], closed=True)
    except LayoutgenError:
        return None
    return found if isinstance(found, Placement) else None


def _open_loop(sized: SizedCircuit) -> ClusterSolver | None:
    """Return the first loop of a circuit that no drawing closes."""
    return _prepared(Model(sized))[1]


def _roomy(ways: Ways) -> tuple[int, int] | None:
    """Return the size [nm] of the board that would be drawn if none were given."""
    for effort in _EFFORTS[:2]:
        state, _ = _attempt(ways, effort, sized_board=False)
        if state is not None:
            frame = frame_of(state)
            return frame.width, frame.height
    return None
