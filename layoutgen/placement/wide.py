"""Loops through transistors and lines of free length, drawn as one cluster.

A part with two ends on a loop is a rigid step from one node to the other; a line of free length is one whose
legs add up to what closes the loop. So total lengths and closure of all loops of a stage, of a balanced pair
or of a feedback path are one linear program. The smaller loops inside it, such as its hybrids and dividers,
keep the drawings that they have by themselves, each turned and mirrored as it has to be: what is left to
choose are the turns of what joins them.
"""

from __future__ import annotations

import itertools
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from typing import ClassVar

from layoutgen.circuit import End, EndKind
from layoutgen.errors import WrongInputError
from layoutgen.placement.bodies import BodyLand, PartBody, beyond
from layoutgen.placement.bows import BowedSolver, LooseDemands
from layoutgen.placement.closure import Apart, Bar, Shape, solve_closure
from layoutgen.placement.cluster import ClusterPlan, ClusterSolver, Solution
from layoutgen.placement.demands import Demands
from layoutgen.placement.drawings import Drawing, Piece, Range
from layoutgen.placement.frame import Box, Pose, box_around, unit
from layoutgen.placement.symmetry import Mapping2, mirrored_alike
from layoutgen.placement.tour import Headings
from layoutgen.placement.walks import JoinedWalk
from layoutgen.placement.words import Word, headings_of

__all__ = ["WideSolver", "holds_more", "keeps_its_hand"]

_ROUNDS = 8  # parts that are pushed apart, one pair at a time
_SLACK = 20.0  # [nm]: what a length may be off when loops close
_TOUCH = 10  # [nm]: rounding must not decide
_FAR = 1e9  # longer than any line [nm]
_MOST_BENDS = 5  # bends of what joins the smaller loops
_EACH = (1, 2, 4)  # most bends of one line, the fewest first
_MOST_DRAWN = 8  # drawings for which what leaves them is varied
_MOST_TRIED = 80  # drawings whose program is solved
_MOST_LEAVING = 24  # ways for what leaves a drawing
_DRAWINGS_EACH = 2  # drawings of a smaller loop that are tried


@dataclass(frozen=True, slots=True)
class WideDemands(LooseDemands):
    """What is asked of the pieces of a wide cluster."""

    def bars(self, drawing: Drawing, roles: tuple[Headings, ...], *, loose: bool = False) -> list[Bar] | None:
        """Return what each piece asks, None where a line would have no length; ``loose`` with more play."""
        named = dict(zip(self.nets, roles, strict=True))
        bars = []
        for k, piece in enumerate(self.scheme.pieces):
            word = drawing.words[k]
            if not piece.is_line:
                bars.append(self._rigid(k, drawing.headings[k][0], roles, loose=loose))
            elif self.is_free(k):
                bars.append(Bar(least=self._least_free(k, word), free=True))
            else:
                try:
                    length = self.kit.lengths.length(piece.name, word, named)
                except WrongInputError:
                    return None
                bars.append(Bar(length, self._least(k, word)))
        return bars

    def is_free(self, k: int) -> bool:
        """True for a line of free length."""
        line = self.kit.model.sized.lines.get(self.scheme.pieces[k].name)
        return line is not None and line.free

    def _least_free(self, k: int, word: Word) -> tuple[int, ...]:
        return self._least(k, word) if word else (self.meetings.least_free(self.ends[k][0], to_port=False),)

    def offset(self, end: End, role: Headings) -> int:
        """Return how far a pad's outer edge lies from its node [nm], towards the part."""
        body = self.kit.model.bodies[end.element]
        land = body.land_at(end)
        others = [(other, heading) for other, heading in role if other != end]
        plain = Demands.offset(self, end, role)
        if len(others) == 1:
            is_line = others[0][0].kind is EndKind.LINE
            return body.node_of(land) if is_line and body.is_apart(land) else plain
        own = next(heading for other, heading in role if other == end)
        sides = [other for other, heading in others if (heading - own) % 180.0 == 90.0]
        onward = [other for other, heading in others if (heading - own) % 180.0 != 90.0]
        return max(plain, self.kit.room_ahead(end, sides, onward), self._clear_of(sides, body, land))

    def _clear_of(self, sides: Sequence[End], body: PartBody, land: BodyLand) -> int:
        """Return how far a transistor's pad keeps from a node [nm], clear of two-pad parts across there."""
        bodies = self.kit.model.bodies
        chips = [end for end in sides if end.kind is EndKind.PAD and len(bodies[end.element].lands) == 2]
        if len(body.lands) == 2 or not chips:
            return 0
        spans = [self.kit.span(bodies[e.element], bodies[e.element].land_at(e), 90.0) for e in chips]
        return beyond(body, land) + max(max(-low, high) for low, high in spans)

    def reach(self, k: int, word: Word, heading: float) -> Range | None:
        """Return the range of a piece's displacement [nm], with some room for corrections."""
        return (
            self._free_reach(k, word, heading)
            if self.is_free(k)
            else LooseDemands.reach(self, k, word, heading)
        )

    def _free_reach(self, k: int, word: Word, heading: float) -> Range:
        """Return the range of a line of free length [nm]."""
        bounds: list[float] = []
        directions = [unit(h) for h in headings_of(heading, word)]
        for axis in (0, 1):
            legs = list(zip((d[axis] for d in directions), self._least_free(k, word), strict=True))
            middle = sum(sign * leg for sign, leg in legs)
            low, high = (any(way * sign > 0 for sign, _ in legs) for way in (-1, 1))
            bounds += [-_FAR if low else middle, _FAR if high else middle]
        return bounds[0], bounds[1], bounds[2], bounds[3]


@dataclass(slots=True)
class WideSolver(BowedSolver):
    """A cluster of lines, two-pad parts and transistors; ``inside`` are the smaller loops by themselves."""

    DEMANDS: ClassVar[type[Demands]] = WideDemands
    inside: Sequence[ClusterSolver] = field(default=())

    def _piece(self, name: str, a: int, b: int, first: End, second: End) -> Piece:
        model = self.kit.model
        if name in model.sized.lines and model.sized.lines[name].free:
            hinted = self.router.hinted_turns(name)
            return Piece(name, a, b, True, 0.0, (model.widths[name], "free"), hinted)
        if name in model.sized.lines:
            return ClusterSolver._piece(self, name, a, b, first, second)
        body = model.bodies[name]
        lands = [body.land_at(end) for end in (first, second)]
        turn = (lands[1].heading - lands[0].heading) % 360.0 - 180.0
        return Piece(name, a, b, False, turn, tuple(land.box for land in lands))

    def _all(self) -> Iterator[Solution]:
        """Yield the solutions of the drawings with fewest bends."""
        for bends, each, straight in itertools.product(range(_MOST_BENDS + 1), _EACH, (True, False)):
            found = list(self._with(bends, each, straight=straight)) if each <= max(bends, 1) else []
            yield from found
            if found:
                return

    def _with(self, bends: int, each: int, *, straight: bool) -> Iterator[Solution]:
        """Yield the solutions of the drawings in which what joins the smaller loops has a number of bends."""
        some = list(itertools.islice(self._joined(bends, each, straight=straight), 4 * _MOST_TRIED))
        some.sort(key=lambda drawing: self._mirror(drawing) is None)
        drawn = 0
        for drawing in some[:_MOST_TRIED]:
            solutions = list(self._varied(drawing))
            yield from solutions
            drawn += bool(solutions)
            if drawn >= _MOST_DRAWN:
                return

    def solve(self, plan: ClusterPlan) -> Solution | None:
        """Return a plan with its lengths, parts clear of one another; None where its loops cannot close."""
        roles = self.demands.roles(plan.drawing, plan.outer)
        bars = self.demands.bars(plan.drawing, roles)
        if bars is None:
            return None
        mapping = self._mirror(plan.drawing)
        maps = [mapping] if mapping is not None and mirrored_alike(bars, mapping) else []
        for chosen in (*maps, ()):
            shape = self._parted(plan, bars, roles, chosen)
            if shape is not None:
                return Solution(plan, shape, roles, symmetric=bool(chosen))
        return None

    def _parted(
        self, plan: ClusterPlan, bars: Sequence[Bar], roles: tuple[Headings, ...], mapping: Mapping2
    ) -> Shape | None:
        """Return the shape in which parts that would overlap are pushed apart, None where there is none."""
        apart: list[Apart] = []
        for _ in range(_ROUNDS):
            shape = solve_closure(
                self.scheme, plan.drawing, bars, plan.aim, mapping, slack=_SLACK, apart=apart
            )
            clash = None if shape is None else self._clash(plan, shape, roles)
            if shape is None or clash is None:
                return shape
            apart.append(clash)
        return None

    def _clash(self, plan: ClusterPlan, shape: Shape, roles: tuple[Headings, ...]) -> Apart | None:
        """Return how the hubs of the first two parts that overlap must lie, None where none do."""
        boxes = {
            k: self._box(k, plan, shape, roles) for k, p in enumerate(self.scheme.pieces) if not p.is_line
        }
        gap = self.kit.model.limits.height
        for (i, a), (j, b) in itertools.combinations(boxes.items(), 2):
            if set(self._hubs(i)) & set(self._hubs(j)):
                continue  # they meet: what lies between their pads sees to their distance
            over = [min(a[x + 2] - b[x], b[x + 2] - a[x]) + gap for x in (0, 1)]
            if min(over) > _TOUCH:
                return self._pushed((i, a), (j, b), shape, gap)
        return None

    def _pushed(self, one: tuple[int, Box], other: tuple[int, Box], shape: Shape, gap: int) -> Apart:
        """Return how far apart the first hubs of two parts must lie, along the axis of their distance."""
        centres = [[box[axis] + box[axis + 2] for axis in (0, 1)] for _, box in (one, other)]
        axis = max((0, 1), key=lambda x: abs(centres[0][x] - centres[1][x]))
        (i, a), (j, b) = (one, other) if centres[0][axis] <= centres[1][axis] else (other, one)
        low, high = self._hubs(i)[0], self._hubs(j)[0]
        beyond = a[axis + 2] - shape.hubs[low][axis]
        before = shape.hubs[high][axis] - b[axis]
        return Apart(axis, low, high, beyond + before + gap)

    def _hubs(self, k: int) -> tuple[int, int]:
        return self.scheme.pieces[k].a, self.scheme.pieces[k].b

    def _box(self, k: int, plan: ClusterPlan, shape: Shape, roles: tuple[Headings, ...]) -> Box:
        """Return the box around a part and its ground copper [nm], in the plan's frame."""
        start = Pose(*shape.hubs[self.scheme.pieces[k].a], plan.drawing.headings[k][0])
        pose = self.demands.part_pose(k, start, roles, shape.more[k])
        found = self.kit.part_obstacles(self.kit.model.bodies[self.scheme.pieces[k].name], pose)
        return box_around([corner for item in found for corner in (item.box[:2], item.box[2:])])

    def _varied(self, drawing: Drawing) -> Iterator[Solution]:
        """Yield solutions of one drawing for the ways of what leaves it."""
        plain = self._roughly(drawing)
        if plain is None:
            return
        choices = [self._outer_choices(plain, hub) for hub in range(len(self.nets))]
        for outer in itertools.islice(itertools.product(*choices), _MOST_LEAVING):
            solution = self.solve(ClusterPlan(drawing, outer, (1.0, 1.0)))
            if solution is not None:
                yield solution

    def _joined(self, bends: int, each: int, *, straight: bool) -> Iterator[Drawing]:
        """Yield drawings made of those of the smaller loops and of what joins them.

        Args:
            bends: Bends of all that joins them together.
            each: Most bends of one line of it.
            straight: Only those in which nodes with a stub or feed beside two pieces lead straight through.
        """
        options = [self._drawings_of(solver) for solver in self.inside]
        for chosen in itertools.product(*options):
            fixed = {k: (loop, *found[k]) for loop, found in enumerate(chosen) for k in found}
            reach = self.demands.reach
            walk = JoinedWalk(self.scheme, self.entry, reach, fixed, each=each, straight=straight)
            yield from walk.run(bends)

    def _drawings_of(self, solver: ClusterSolver) -> list[dict[int, tuple[tuple[float, float], Word]]]:
        """Return the best drawings of a smaller loop, by the numbers of its pieces here."""
        here = {piece.name: k for k, piece in enumerate(self.scheme.pieces)}
        names = [piece.name for piece in solver.scheme.pieces]
        if not all(name in here for name in names):
            return [{}]
        some = dict.fromkeys(solution.plan.drawing for solution in solver.solutions())
        return [
            {here[name]: (drawing.headings[k], drawing.words[k]) for k, name in enumerate(names)}
            for drawing in itertools.islice(some, _DRAWINGS_EACH)
        ] or [{}]


def holds_more(solver: ClusterSolver) -> bool:
    """Return whether a cluster holds what only wide ones do: a line of free length, or a transistor."""
    model = solver.kit.model
    free = any(name in model.sized.lines and model.sized.lines[name].free for name in _names(solver))
    return free or any(name in model.bodies and len(model.ends[name]) > 2 for name in _names(solver))


def _names(solver: ClusterSolver) -> list[str]:
    return [piece.name for piece in solver.scheme.pieces]


def keeps_its_hand(solver: ClusterSolver) -> bool:
    """Return whether no mirror image of a cluster may be laid: footprints turn, never mirror."""
    bodies = solver.kit.model.bodies
    for ends, piece in zip(solver.ends, solver.scheme.pieces, strict=True):
        if not piece.is_line and len(bodies[piece.name].lands) > 2:
            a, b = (bodies[piece.name].land_at(end) for end in ends)
            if piece.turn or _is_aside((a.x, a.y), (b.x, b.y), a.heading):
                return True
    return False


def _is_aside(first: tuple[int, int], second: tuple[int, int], heading: float) -> bool:
    """True when two pads of a part do not lie opposite each other along a heading [deg]."""
    ux, uy = unit(heading)
    return abs((second[0] - first[0]) * uy - (second[1] - first[1]) * ux) > 1.0
