"""The stage's verb: try with more and more effort, and say what would do when nothing does."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from contextlib import suppress
from dataclasses import dataclass, replace
from itertools import islice

from layoutgen.errors import InfeasibleError, LayoutgenError
from layoutgen.placement.bows import closed_before
from layoutgen.placement.chains import chained, holds_chain, told, unchained
from layoutgen.placement.cluster import ClusterSolver
from layoutgen.placement.explain import explain_loop
from layoutgen.placement.finish import finish, frame_of
from layoutgen.placement.leads import LeadLengths, fit_leads, with_single_leads
from layoutgen.placement.likes import Note, with_like_lines
from layoutgen.placement.made import as_chained, as_led, as_spaced, as_wide, keeps_folds
from layoutgen.placement.model import Model, line_heights, other_heights
from layoutgen.placement.records import Choices, Placement
from layoutgen.placement.remedies import Remedies
from layoutgen.placement.requests import with_spacing, with_spine_to
from layoutgen.placement.search import Effort, Failure, Search, drawing_cost
from layoutgen.placement.start import first_states, join_root
from layoutgen.placement.state import State
from layoutgen.placement.stubs import refuse_hidden_stubs
from layoutgen.placement.tour import plan_tour
from layoutgen.placement.ways import Ways
from layoutgen.placement.wide import holds_more
from layoutgen.sizing import SizedCircuit

__all__ = ["fits", "place"]

_EFFORTS = (
    Effort(beam=4),
    Effort(beam=16, accepted=5, any_side=True),
    Effort(beam=16, accepted=5, any_side=True, tight_edges=True, only_margins=True),
    Effort(beam=24, accepted=6, any_side=True, tight_edges=True, fold_spine=True),
)
_WIDE_EFFORTS = 2  # tried with loops drawn with all that lies on them
_MOST_GOALS = 3  # ports to which the straight path is led in turn where none is found otherwise
_CHAINS = ((0.0, True), (1.0, False), (1.0, True), (3.0, False), (3.0, True))
"""How chains are tried in turn where none as short as can be does: how much longer, whether combed."""

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
    again = None if like is None else _as_before(sized, like)
    found = again or _searched(sized)
    if isinstance(found, Placement):
        return found
    raise _infeasible(found, placed_before=like is not None)


def fits(sized: SizedCircuit) -> bool:
    """Tell whether a sized circuit has a placement, without looking for what would do where it has none."""
    try:
        return isinstance(_searched(sized), Placement)
    except LayoutgenError:
        return False


@dataclass(frozen=True, slots=True)
class _Nothing:
    """A search that found no place: what it went over, its reason, the first loop that does not close."""

    ways: Ways
    failure: Failure | None
    open_loop: ClusterSolver | None


def _searched(sized: SizedCircuit) -> Placement | _Nothing:
    """Return the placement of a circuit, or why there is none.

    Where the shortest chains do not fit, others are tried, then another straight path, and then other
    distances between lines.
    """
    found = _tried(sized, _EFFORTS)
    if isinstance(found, Placement):
        return found
    chains = _with_other_chains(sized) if holds_chain(found.ways.model.sized) else None
    return chains or _with_other_spine(sized) or _with_other_spacing(sized) or found


def _with_other_chains(sized: SizedCircuit) -> Placement | None:
    """Return the placement of a circuit whose chains are longer, or the lines on them straight, or None."""
    for longer, combed in _CHAINS:
        found = _tried(sized, _EFFORTS[:2], longer=longer, combed=combed)
        if isinstance(found, Placement):
            return as_chained(found, longer, combed)
    return None


def _with_other_spine(sized: SizedCircuit) -> Placement | None:
    """Return the placement of a circuit whose straight path leads to another RF port, or None.

    Of three arms the one must go straight on whose port lies ahead, whichever comes first in the file.
    """
    file = sized.circuit.file
    if file.layout.spine is not None:
        return None
    others = [
        name for name, port in file.ports.items() if port.kind == "rf" and name not in sized.circuit.spine
    ]
    for port in others[:_MOST_GOALS]:
        found = _quickly(with_spine_to(sized, port), 1)
        if found is not None:
            return as_led(found, port)
    return None


def _with_other_spacing(sized: SizedCircuit) -> Placement | None:
    """Return the placement of a circuit with lines farther apart, else nearer, than the rule asks; or None.

    Only what takes little time is tried, and the nearest first: where that has no place, it ends there.
    """
    wider, nearer = other_heights(sized.circuit.rules)
    found = next((found for heights in wider if (found := _spaced(sized, heights)) is not None), None)
    if found is not None or not nearer:
        return found
    nearest = _spaced(sized, nearer[-1])
    if nearest is None:
        return None
    return next((found for heights in nearer[:-1] if (found := _spaced(sized, heights)) is not None), nearest)


def _spaced(sized: SizedCircuit, heights: float) -> Placement | None:
    """Return the placement with another distance of lines [substrate heights], None where there is none.

    Legs of one line keep the circuit's own rule even so.
    """
    found = _changed(with_spacing(sized, heights))
    if found is None or not keeps_folds(found, line_heights(sized.circuit.rules)):
        return None
    return as_spaced(found, sized, heights)


def _as_before(sized: SizedCircuit, like: Choices) -> Placement | None:
    """Return the placement that earlier choices give, None where they no longer fit."""
    if like.spine_to is not None:
        found = _replayed(with_spine_to(sized, like.spine_to), like)
        return None if found is None else as_led(found, like.spine_to)
    if like.heights is None:
        return _replayed(sized, like)
    found = _replayed(with_spacing(sized, like.heights), like)
    return None if found is None else as_spaced(found, sized, like.heights)


def _replayed(sized: SizedCircuit, like: Choices) -> Placement | None:
    """Return the placement that earlier choices give, None where they no longer fit.

    Lines at loops are drawn alike only where the loops do not close otherwise.
    """
    walked = chained(with_single_leads(sized), like.longer, combed=like.combed)
    for circuit, notes in _variants(walked):
        model = Model(circuit)
        fit_leads(model)
        ways = _widely(model, _small_loops(model)) if like.wide else _walked(model, frozenset(), bows=True)
        again = _again(ways, like)
        if again is not None:
            found = finish(model, ways.lengths, again, like.effort)
            found = _whole(as_wide(found) if like.wide else found, sized, notes)
            return as_chained(found, like.longer, like.combed)
    return None


def _variants(walked: SizedCircuit) -> Iterator[tuple[SizedCircuit, tuple[Note, ...]]]:
    """Yield a circuit as it is, then with like lines at its loops drawn alike, if that is another."""
    yield walked, ()
    with suppress(InfeasibleError):  # a loop without a line
        alike, notes = with_like_lines(walked)
        if notes:
            yield alike, notes


def _whole(found: Placement, sized: SizedCircuit, notes: tuple[Note, ...]) -> Placement:
    """Return a placement as one of the circuit asked for, with more notes."""
    whole = unchained(found, sized)
    return replace(whole, notes=whole.notes + notes)


def _tried(
    sized: SizedCircuit,
    efforts: tuple[Effort, ...],
    *,
    closed: bool = False,
    longer: float = 0.0,
    combed: bool = False,
) -> Placement | _Nothing:
    """Return the placement by the first effort that finds one, or why there is none.

    With ``closed``, a circuit with a loop that does not close without bows is not looked at further;
    ``longer`` and ``combed`` are as for :func:`chained`.

    Raises:
        InfeasibleError: A loop without a line, which cannot be drawn as one with what lies on it, either.
    """
    notes: tuple[Note, ...] = ()
    walked = chained(with_single_leads(sized), longer, combed=combed)
    try:
        ways, open_loop = _prepared(Model(walked))
    except InfeasibleError:
        model = Model(walked)
        fit_leads(model)
        lone = _placed_widely(model, (), efforts)
        if lone is None:
            raise
        return _whole(lone, sized, notes)
    if open_loop is not None:
        alike, notes = with_like_lines(walked)
        ways, open_loop = _prepared(Model(alike)) if notes else (ways, open_loop)
    if open_loop is not None and not closed:
        bowed, still_open = _prepared(ways.model, before=ways)
        ways, open_loop = (bowed, None) if still_open is None else (ways, open_loop)
    found = None if closed and open_loop is not None else _placed(ways, efforts)
    return _whole(found, sized, notes) if isinstance(found, Placement) else _Nothing(ways, found, open_loop)


def _placed(ways: Ways, efforts: tuple[Effort, ...]) -> Placement | Failure | None:
    """Return the placement by the first effort that finds one, else the first reason.

    After the first, loops are drawn with the transistors and free lines on them.
    """
    model = ways.model
    failure: Failure | None = None
    for number, effort in enumerate(efforts):
        if effort.only_margins and model.file.board.size is None:
            continue  # the board grows as it must: nothing would be laid otherwise
        best, found = _attempt(ways, effort)
        if best is not None:
            return finish(model, ways.lengths, best, number)
        failure = failure or found  # the plainest drawing's reason is the one to tell
        if number == 0 and (wide := _placed_widely(model, ways.clusters, efforts)) is not None:
            return wide
    return failure


def _placed_widely(
    model: Model, inside: Sequence[ClusterSolver], efforts: tuple[Effort, ...]
) -> Placement | None:
    """Return the placement in which loops are drawn with the transistors and free lines on them, or None.

    Args:
        model: The circuit.
        inside: Its loops without those.
        efforts: As for :func:`_tried`.
    """
    ways = _widely(model, inside)
    is_other = any(holds_more(solver) for solver in ways.clusters)
    if not is_other or not all(solver.solutions() for solver in ways.clusters):
        return None
    for number, effort in enumerate(efforts[:_WIDE_EFFORTS]):
        best, _ = _attempt(ways, effort)
        if best is not None:
            return as_wide(finish(model, ways.lengths, best, number))
    return None


def _small_loops(model: Model) -> Sequence[ClusterSolver]:
    """Return the loops of a circuit without transistors and free lines; none where some loop has no line."""
    try:
        return _walked(model, frozenset(), bows=True).clusters
    except InfeasibleError:
        return ()


def _widely(model: Model, inside: Sequence[ClusterSolver]) -> Ways:
    """Return the walk with its ways that draws loops with the transistors and free lines on them."""
    tour = plan_tour(model, wide=True)
    return Ways(model, tour, LeadLengths(model, tour), inside=inside)


def _prepared(model: Model, before: Ways | None = None) -> tuple[Ways, ClusterSolver | None]:
    """Return the walk with its ways; loops that no drawing closes are cut, and the first one is told.

    Where some did not close ``before``, straight lines of loops may bow to take up what they are too long.
    """
    cut: frozenset[str] = frozenset()
    first: ClusterSolver | None = None
    fit_leads(model)
    known = {} if before is None else closed_before(before.known)
    while True:
        ways = replace(_walked(model, cut, bows=before is not None), known=known)
        wrong = next((solver for solver in ways.clusters if not solver.solutions()), None)
        if wrong is None:
            return ways, first
        first = first or wrong
        cut |= set(ways.tour.loops.clusters[wrong.number].elements)


def _walked(model: Model, cut: frozenset[str], *, bows: bool) -> Ways:
    """Return the walk with its ways; loops that hold a ``cut`` element are cut.

    Raises:
        InfeasibleError: A loop that can be neither drawn nor cut.
        WrongInputError: A line has no positive length after its corrections, or a stub no room.
    """
    tour = plan_tour(model, cut)
    lengths = LeadLengths(model, tour)
    refuse_hidden_stubs(model, tour, lengths)
    for name, line in model.sized.lines.items():
        if not line.free:
            lengths.by_bends(name)
    return Ways(model, tour, lengths, bows=bows)


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


def _infeasible(nothing: _Nothing, *, placed_before: bool) -> InfeasibleError:
    """Return the error for a circuit without a place, with a remedy that was tried."""
    if nothing.open_loop is not None:
        return explain_loop(nothing.open_loop, _open_loop, _changed)
    model, failure = nothing.ways.model, nothing.failure
    element = failure.element if failure is not None else model.circuit.spine[0]
    reason = told(failure.reason, model.sized) if failure is not None else "no placement was found"
    if placed_before and model.sized.corrections:
        return InfeasibleError(element, reason, "the lengths before their correction would do")
    remedy = Remedies(model, _changed, lambda: _roomy(nothing.ways)).best(element)
    return InfeasibleError(element, reason, remedy)


def _changed(sized: SizedCircuit) -> Placement | None:
    """Return the placement of a changed circuit; None where there is none, or the change is no good."""
    return _quickly(sized, 2)


def _quickly(sized: SizedCircuit, most: int) -> Placement | None:
    """Return the placement of a circuit with the first few efforts; None where there is none."""
    try:
        found = _tried(sized, _EFFORTS[:most], closed=True)
    except LayoutgenError:
        return None
    return found if isinstance(found, Placement) else None


def _open_loop(sized: SizedCircuit) -> ClusterSolver | None:
    """Return the first loop of a circuit that no drawing closes."""
    return _prepared(Model(with_single_leads(sized)))[1]


def _roomy(ways: Ways) -> tuple[int, int] | None:
    """Return the size [nm] of the board that would be drawn if none were given."""
    for effort in _EFFORTS[:2]:
        state, _ = _attempt(ways, effort, sized_board=False)
        if state is not None:
            frame = frame_of(state)
            return frame.width, frame.height
    return None
