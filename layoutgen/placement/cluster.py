"""Loop clusters: from the schematic's loop to drawings with lengths, the compact and symmetric ones first."""

from __future__ import annotations

import itertools
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field, replace
from typing import ClassVar

from layoutgen.circuit import End
from layoutgen.circuit.queries import ends_of
from layoutgen.geometry import Point
from layoutgen.placement.closure import Shape, Strain, solve_closure, strain
from layoutgen.placement.demands import Demands
from layoutgen.placement.drawings import MOST_BENDS, Drawing, Piece, Scheme, drawings
from layoutgen.placement.frame import unit
from layoutgen.placement.kit import Kit
from layoutgen.placement.routes import Router
from layoutgen.placement.symmetry import Mapping2, automorphisms, mirrored_alike
from layoutgen.placement.tour import Headings
from layoutgen.placement.words import headings_of

__all__ = ["ClusterPlan", "ClusterSolver", "Solution"]

MOST_DRAWINGS = 6
"""Drawings of a cluster for which roles and aims are varied [-]."""

MOST_PROGRAMS = 200
"""Linear programs spent on finding them [-]."""

_MORE_BENDS = 1  # how many bends more than the fewest are looked at
_AIMS = ((1.0, 1.0), (1.0, 0.15), (0.15, 1.0))
_MOST_ROLES = 16
_MOST_STRAINED = 60  # drawings looked at to say why a loop does not close
_SLACK = 20.0  # [nm]: what a length may be off when loops close; under 0.001 deg to 100 GHz
_ROUGH_HEIGHTS = 3.0  # by how many heights roles of junctions may change a length, at most


@dataclass(frozen=True, slots=True)
class ClusterPlan:
    """What was chosen for a cluster: its drawing, headings [deg] of the outer ends by hub, and the aim."""

    drawing: Drawing
    outer: tuple[tuple[float, ...], ...]
    aim: tuple[float, float]


@dataclass(frozen=True, slots=True)
class Solution:
    """A plan with its lengths [nm], in the plan's frame; ``symmetric`` when it is its own mirror image."""

    plan: ClusterPlan
    shape: Shape
    roles: tuple[Headings, ...]
    symmetric: bool

    @property
    def size(self) -> tuple[int, int]:
        """Width and height of the box around the hubs and bends [nm]."""
        xs = [p[0] for p in self.shape.vertices]
        ys = [p[1] for p in self.shape.vertices]
        return max(xs) - min(xs), max(ys) - min(ys)

    @property
    def slenderness(self) -> float:
        """Length over width of the box around the loop [-]."""
        width, height = self.size
        return max(width, height) / max(1, min(width, height))


@dataclass(slots=True)
class ClusterSolver:
    """One cluster of a circuit: its scheme, and its solutions when they are first asked for.

    ``known`` holds what was found for clusters like it.
    """

    kit: Kit
    router: Router
    number: int
    known: dict[object, list[Solution]] = field(default_factory=dict)
    DEMANDS: ClassVar[type[Demands]] = Demands
    scheme: Scheme = field(init=False)
    nets: tuple[str, ...] = field(init=False)
    ends: tuple[tuple[End, End], ...] = field(init=False)
    outer: tuple[tuple[End, ...], ...] = field(init=False)
    demands: Demands = field(init=False)
    _found: list[Solution] | None = field(init=False, default=None)

    def __post_init__(self) -> None:
        """Read the cluster from the walk."""
        tour, file = self.kit.tour, self.kit.model.file
        cluster = tour.loops.clusters[self.number]
        self.nets = cluster.nets
        hub = {net: i for i, net in enumerate(self.nets)}
        pieces, ends = [], []
        for name in cluster.elements:
            (a, net_a), (b, net_b) = (item for item in ends_of(file, name) if item[1] in hub)
            pieces.append(self._piece(name, hub[net_a], hub[net_b], a, b))
            ends.append((a, b))
        outer = []
        for net in self.nets:
            found = tour.hubs[net]
            arrival = () if found.arrival is None or found.arrival in found.inner else (found.arrival,)
            outer.append((*arrival, *(arm.end for arm in found.arms)))
        self.ends, self.outer = tuple(ends), tuple(outer)
        self.scheme = Scheme(tuple(pieces), tuple(len(ends) for ends in self.outer))
        meetings = self.router.meetings
        self.demands = self.DEMANDS(self.kit, meetings, self.scheme, self.nets, self.ends, self.outer)

    def _piece(self, name: str, a: int, b: int, first: End, second: End) -> Piece:
        model = self.kit.model
        if name in model.sized.lines:
            data = (model.widths[name], self.kit.lengths.by_bends(name)[0])
            return Piece(name, a, b, True, 0.0, data, self.router.hinted_turns(name))
        body = model.bodies[name]
        turn = body.land_at(second).heading - body.land_at(first).heading - 180.0
        turn = (turn + 180.0) % 360.0 - 180.0
        return Piece(name, a, b, False, turn, (body.lands[0].box, body.lands[-1].box))

    @property
    def entry(self) -> int:
        """The hub at which the walk enters."""
        return self.nets.index(self.kit.tour.entries[self.number])

    # -- solutions -----------------------------------------------------------------------------------

    def solutions(self) -> list[Solution]:
        """Return the cluster's solutions, symmetric ones first, then by fewest bends and size."""
        if self._found is None:
            key = self._key()
            if key in self.known:
                self._found = [self._adopted(solution) for solution in self.known[key]]
            else:
                self._found = self.known[key] = self._searched()
        return self._found

    def _searched(self) -> list[Solution]:
        seen: dict[object, Solution] = {}
        for solution in self._all():
            seen.setdefault((solution.plan.outer, solution.shape), solution)
        return sorted(seen.values(), key=_rank)

    def _adopted(self, solution: Solution) -> Solution:
        """Return the solution of a like cluster as one of this cluster."""
        return replace(solution, roles=self.demands.roles(solution.plan.drawing, solution.plan.outer))

    def _key(self) -> str:
        """Return what makes two clusters alike: pieces without names, what leaves, what legs must keep."""
        if self._own_key is None:
            self._own_key = self._written_key()
        return self._own_key

    _own_key: str | None = field(init=False, default=None)

    def _written_key(self) -> str:
        pieces = [(p.a, p.b, p.is_line, p.turn, p.data, p.word) for p in self.scheme.pieces]
        ends = [[(e.kind, e.index, self.kit.across(e)) for e in found] for found in self.outer]
        rules = [
            self.router.meetings.rules(self.ends[k][0]) if p.is_line else 0
            for k, p in enumerate(self.scheme.pieces)
        ]
        return repr((pieces, ends, rules, self.entry))

    def entry_roles(self) -> list[Headings]:
        """Return the ways in which the arriving end may stand at the entry, the best solution's first."""
        found: dict[object, Headings] = {}
        for solution in self.solutions():
            role = solution.roles[self.entry]
            found.setdefault(self.role_key(role), role)
        return list(found.values())

    def role_key(self, role: Headings) -> object:
        """Return what two headings of the entry's ends have in common when they are alike for lengths."""
        base = role[0][1]
        turns = [(end, (heading - base) % 360.0) for end, heading in role]
        mirror = [(end, -turn % 360.0) for end, turn in turns]
        return min(tuple(sorted(turns)), tuple(sorted(mirror)))

    def solve_again(self, plan: ClusterPlan) -> Solution | None:
        """Return a plan with its lengths as :meth:`solve` does, remembered for clusters like this one."""
        key = (self._key(), plan)
        if key not in self.known:
            found = self.solve(plan)
            self.known[key] = [] if found is None else [found]
        return next((self._adopted(solution) for solution in self.known[key]), None)

    def solve(self, plan: ClusterPlan) -> Solution | None:
        """Return a plan with its lengths, None where its loops cannot close."""
        roles = self.demands.roles(plan.drawing, plan.outer)
        bars = self.demands.bars(plan.drawing, roles)
        if bars is None:
            return None
        mapping = self._mirror(plan.drawing)
        shape = None
        if mapping is not None and mirrored_alike(bars, mapping):
            shape = solve_closure(self.scheme, plan.drawing, bars, plan.aim, mapping, _SLACK)
            if shape is None and (loose := self.demands.bars(plan.drawing, roles, loose=True)) is not None:
                shape = solve_closure(self.scheme, plan.drawing, loose, plan.aim, mapping, _SLACK)
        symmetric = shape is not None
        shape = shape or solve_closure(self.scheme, plan.drawing, bars, plan.aim, slack=_SLACK)
        return None if shape is None else Solution(plan, shape, roles, symmetric)

    def _roughly(self, drawing: Drawing) -> Solution | None:
        """Return a drawing with lengths as they would be but for the roles of what leaves the loop."""
        plan = ClusterPlan(drawing, self._any_outer(drawing), (1.0, 1.0))
        roles = self.demands.roles(drawing, plan.outer)
        bars = self.demands.bars(drawing, roles, loose=self._mirror(drawing) is not None)
        if bars is None:
            return None
        slack = _ROUGH_HEIGHTS * self.kit.model.limits.height
        shape = solve_closure(self.scheme, drawing, bars, slack=slack)
        return None if shape is None else Solution(plan, shape, roles, symmetric=False)

    def _all(self) -> Iterator[Solution]:
        """Yield the solutions of the drawings with fewest bends, of the symmetric ones first."""
        drawn, spent, fewest = 0, 0, None
        for bends in range(MOST_BENDS + 1):
            if fewest is not None and bends > fewest + _MORE_BENDS:
                return
            some = list(drawings(self.scheme, self.entry, self.demands.reach, bends))
            some.sort(key=lambda drawing: self._mirror(drawing) is None)
            for drawing in some:
                if drawn >= MOST_DRAWINGS or spent >= MOST_PROGRAMS:
                    return
                spent += 1
                found = list(self._vary(drawing))
                yield from found
                if found:
                    drawn, fewest = drawn + 1, bends if fewest is None else fewest

    def strained(self) -> Strain | None:
        """Return the least changes of lengths with which a cluster without solution would close."""
        best: Strain | None = None
        tried = 0
        for bends in range(MOST_BENDS + 1):
            some = list(drawings(self.scheme, self.entry, self.demands.any_reach, bends))
            some.sort(key=lambda drawing: self._mirror(drawing) is None)
            for drawing in some[: _MOST_STRAINED - tried]:
                tried += 1
                bars = self.demands.bars(drawing, self.demands.roles(drawing, self._any_outer(drawing)))
                found = None if bars is None else strain(self.scheme, drawing, bars)
                if found is not None and (best is None or found.total < best.total):
                    best = found
        return best

    def _vary(self, drawing: Drawing) -> Iterator[Solution]:
        """Yield solutions of one drawing with all sensible headings of what leaves it, and several aims."""
        plain = self._roughly(drawing)
        if plain is None:
            return
        choices = [self._outer_choices(plain, hub) for hub in range(len(self.nets))]
        for outer in itertools.islice(itertools.product(*choices), _MOST_ROLES):
            for aim in _AIMS if drawing.bends else _AIMS[:1]:
                solution = self.solve(ClusterPlan(drawing, outer, aim))
                if solution is None:
                    break
                yield solution

    def _any_outer(self, drawing: Drawing) -> tuple[tuple[float, ...], ...]:
        """Return headings for what leaves each hub: the first that are free."""
        out = []
        for hub, count in enumerate(self.scheme.outer):
            used = drawing.at(self.scheme, hub)
            free = [heading for heading in _around(used) if heading not in used]
            out.append(tuple(free[:count]))
        return tuple(out)

    def _outer_choices(self, solution: Solution, hub: int) -> list[tuple[float, ...]]:
        """Return how the outer ends of a hub may leave: outward wherever that is possible."""
        drawing, count = solution.plan.drawing, self.scheme.outer[hub]
        used = drawing.at(self.scheme, hub)
        free = [heading for heading in _around(used) if heading not in used]
        open_ways = [heading for heading in free if not self._is_inward(solution, hub, heading)]
        if len(open_ways) < count:
            open_ways += [heading for heading in free if heading not in open_ways][: count - len(open_ways)]
        return list(itertools.permutations(open_ways, count))

    def _is_inward(self, solution: Solution, hub: int, heading: float) -> bool:
        """True when a ray from a hub meets the cluster again."""
        x, y = solution.shape.hubs[hub]
        ux, uy = unit(heading)
        for path in self.paths(solution):
            for a, b in itertools.pairwise(path):
                if (x, y) in (a, b) or not _meets((x, y), (ux, uy), a, b):
                    continue
                return True
        return False

    def paths(self, solution: Solution) -> list[tuple[Point, ...]]:
        """Return the polygon of every piece from its first end [nm], in the plan's frame."""
        out = []
        for k, piece in enumerate(self.scheme.pieces):
            points = [solution.shape.hubs[piece.a]]
            headings = headings_of(solution.plan.drawing.headings[k][0], solution.plan.drawing.words[k])
            for heading, leg in zip(headings, solution.shape.legs[k], strict=False):
                ux, uy = unit(heading)
                points.append((round(points[-1][0] + ux * leg), round(points[-1][1] + uy * leg)))
            if len(points) == 1:
                points.append(solution.shape.hubs[piece.b])
            out.append(tuple(points))
        return out

    @property
    def may_be_symmetric(self) -> bool:
        """True when the cluster can be mapped on itself, so that a symmetric drawing may exist."""
        return len(self._automorphisms()) > 1

    # -- symmetry ------------------------------------------------------------------------------------

    def _mirror(self, drawing: Drawing) -> Mapping2 | None:
        """Return the first automorphism under which a drawing is its own mirror image."""
        return next((m for m in self._automorphisms() if drawing.is_mirrored(m)), None)

    def _automorphisms(self) -> tuple[Mapping2, ...]:
        if self._maps is None:
            self._maps = tuple(automorphisms(self.scheme))
        return self._maps

    _maps: tuple[Mapping2, ...] | None = field(init=False, default=None)


def _rank(solution: Solution) -> tuple[bool, int, int]:
    width, height = solution.size
    return not solution.symmetric, solution.plan.drawing.bends, width * height


def _around(used: Sequence[float]) -> list[float]:
    """Return the four headings, those opposite to a used one first."""
    opposite = [(heading + 180.0) % 360.0 for heading in used]
    return [*dict.fromkeys([*opposite, 0.0, 90.0, 180.0, 270.0])]


def _meets(start: Point, way: tuple[float, float], a: Point, b: Point) -> bool:
    """True when a ray along an axis crosses or touches a segment along an axis, beyond its start."""
    axis = 0 if way[0] else 1
    side = 1 - axis
    low, high = sorted((a[side], b[side]))
    ahead = max((p[axis] - start[axis]) * way[axis] for p in (a, b))
    return low <= start[side] <= high and ahead > 0
