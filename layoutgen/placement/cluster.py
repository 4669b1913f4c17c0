"""Loop clusters: from the schematic's loop to drawings with lengths, the compact and symmetric ones first."""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field, replace

from layoutgen.circuit import End, EndKind
from layoutgen.circuit.queries import ends_of
from layoutgen.errors import WrongInputError
from layoutgen.geometry import Point
from layoutgen.placement.bodies import beyond
from layoutgen.placement.closure import Bar, Shape, Strain, solve_closure, strain
from layoutgen.placement.drawings import MOST_BENDS, Drawing, Piece, Range, Scheme, drawings
from layoutgen.placement.frame import Pose, unit
from layoutgen.placement.kit import Kit, world
from layoutgen.placement.routes import Router
from layoutgen.placement.tour import Headings
from layoutgen.placement.words import Word, headings_of, least_legs

__all__ = ["ClusterPlan", "ClusterSolver", "Solution"]

MOST_DRAWINGS = 6
"""Drawings of a cluster for which roles and aims are varied [-]."""

MOST_PROGRAMS = 200
"""Linear programs spent on finding them [-]."""

_MORE_BENDS = 1  # how many bends more than the fewest are looked at
_AIMS = ((1.0, 1.0), (1.0, 0.15), (0.15, 1.0))
_MOST_ROLES = 16
_MOST_STRAINED = 60  # drawings looked at to say why a loop does not close
_PLAY_HEIGHTS = 4  # by how many heights a part's nodes may lie farther apart than they must
_SLACK = 20.0  # [nm]: what a length may be off when loops close; under 0.001 deg to 100 GHz
_ROUGH_HEIGHTS = 3.0  # by how many heights roles of junctions may change a length, at most

Mapping2 = tuple[tuple[int, bool], ...]


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
    scheme: Scheme = field(init=False)
    nets: tuple[str, ...] = field(init=False)
    ends: tuple[tuple[End, End], ...] = field(init=False)
    outer: tuple[tuple[End, ...], ...] = field(init=False)
    _found: list[Solution] | None = field(init=False, default=None)

    def __post_init__(self) -> None:
        """Read the cluster from the walk."""
        tour, file = self.kit.tour, self.kit.model.file
        cluster = tour.loops.clusters[self.number]
        self.nets = cluster.nets
        hub = {net: i for i, net in enumerate(self.nets)}
        pieces, ends = [], []
        for name in cluster.elements:
            (a, net_a), (b, net_b) = ends_of(file, name)[:2]
            pieces.append(self._piece(name, hub[net_a], hub[net_b], a, b))
            ends.append((a, b))
        outer = []
        for net in self.nets:
            found = tour.hubs[net]
            arrival = () if found.arrival is None or found.arrival in found.inner else (found.arrival,)
            outer.append((*arrival, *(arm.end for arm in found.arms)))
        self.ends, self.outer = tuple(ends), tuple(outer)
        self.scheme = Scheme(tuple(pieces), tuple(len(ends) for ends in self.outer))

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
        return replace(solution, roles=self._roles(solution.plan.drawing, solution.plan.outer))

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
            self.router.rules(self.ends[k][0]) if p.is_line else 0 for k, p in enumerate(self.scheme.pieces)
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
        roles = self._roles(plan.drawing, plan.outer)
        bars = self._bars(plan.drawing, roles)
        if bars is None:
            return None
        mapping = self._mirror(plan.drawing)
        shape = None
        if mapping is not None and _alike(bars, mapping):
            shape = solve_closure(self.scheme, plan.drawing, bars, plan.aim, mapping, _SLACK)
        symmetric = shape is not None
        shape = shape or solve_closure(self.scheme, plan.drawing, bars, plan.aim, slack=_SLACK)
        return None if shape is None else Solution(plan, shape, roles, symmetric)

    def _roughly(self, drawing: Drawing) -> Solution | None:
        """Return a drawing with lengths as they would be but for the roles of what leaves the loop."""
        plan = ClusterPlan(drawing, self._any_outer(drawing), (1.0, 1.0))
        roles = self._roles(drawing, plan.outer)
        bars = self._bars(drawing, roles)
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
            some = list(drawings(self.scheme, self.entry, self._reach, bends))
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
            some = list(drawings(self.scheme, self.entry, self._any_reach, bends))
            some.sort(key=lambda drawing: self._mirror(drawing) is None)
            for drawing in some[: _MOST_STRAINED - tried]:
                tried += 1
                bars = self._bars(drawing, self._roles(drawing, self._any_outer(drawing)))
                found = None if bars is None else strain(self.scheme, drawing, bars)
                if found is not None and (best is None or found.total < best.total):
                    best = found
        return best

    def _any_reach(self, k: int, word: Word, heading: float) -> Range | None:
        """Return the range of a piece that may be as long as it likes [nm]."""
        far = 1e9
        directions = [unit(h) for h in headings_of(heading, word)]
        found = [
            bound
            for axis in (0, 1)
            for bound in (
                min(0.0, *(far * d[axis] for d in directions)),
                max(0.0, *(far * d[axis] for d in directions)),
            )
        ]
        return (
            (found[0], found[1], found[2], found[3])
            if self.scheme.pieces[k].is_line
            else (-far, far, -far, far)
        )

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

    # -- what a drawing asks -------------------------------------------------------------------------

    def _roles(self, drawing: Drawing, outer: tuple[tuple[float, ...], ...]) -> tuple[Headings, ...]:
        """Return, by hub, every end with its outgoing heading in the plan's frame."""
        out = []
        for hub in range(len(self.nets)):
            inner = [
                (self.ends[k][0 if first else 1], drawing.headings[k][0 if first else 1])
                for k, first in self.scheme.inner(hub)
            ]
            out.append((*zip(self.outer[hub], outer[hub], strict=True), *inner))
        return tuple(out)

    def _bars(self, drawing: Drawing, roles: tuple[Headings, ...]) -> list[Bar] | None:
        """Return what each piece asks, None where a line would have no length."""
        named = dict(zip(self.nets, roles, strict=True))
        bars = []
        for k, piece in enumerate(self.scheme.pieces):
            if not piece.is_line:
                bars.append(self._rigid(k, drawing.headings[k][0], roles))
                continue
            word = drawing.words[k]
            try:
                length = self.kit.lengths.length(piece.name, word, named)
            except WrongInputError:
                return None
            bars.append(Bar(length, self._least(k, word)))
        return bars

    def _rigid(self, k: int, heading: float, roles: tuple[Headings, ...]) -> Bar:
        """Return what a part asks: its vector, with play where both its pads are arms of junctions."""
        vector, piece = self.vector(k, heading, roles), self.scheme.pieces[k]
        loose = all(len(roles[hub]) > 2 for hub in (piece.a, piece.b)) and 0 in vector
        return Bar(vector=vector, play=_PLAY_HEIGHTS * self.kit.model.limits.height if loose else 0)

    def _least(self, k: int, word: Word) -> tuple[int, ...]:
        return least_legs(word, self.router.rules(self.ends[k][0]))

    def vector(self, k: int, heading: float, roles: Sequence[Headings]) -> tuple[int, int]:
        """Return the way from a part's first node to its second [nm]; ``heading`` leads into the part."""
        piece = self.scheme.pieces[k]
        start = Pose(0, 0, heading)
        pose = self.part_pose(k, start, roles)
        body = self.kit.model.bodies[piece.name]
        outer = world(pose, body.land_at(self.ends[k][1]).outer)
        offset = self.offset(self.ends[k][1], roles[piece.b])
        ux, uy = unit(outer.heading)
        return round(outer.x + ux * offset), round(outer.y + uy * offset)

    def part_pose(self, k: int, start: Pose, roles: Sequence[Headings], more: int = 0) -> Pose:
        """Return a part's pose for the pose at its first node, heading into it; ``more`` is split evenly."""
        end = self.ends[k][0]
        body = self.kit.model.bodies[end.element]
        land = body.land_at(end)
        offset = self.offset(end, roles[self.scheme.pieces[k].a]) + more // 2
        ux, uy = unit(start.heading)
        at = Pose(round(start.x + ux * offset), round(start.y + uy * offset), start.heading)
        return body.entered_by(land, at, edge="outer")

    def offset(self, end: End, role: Headings) -> int:
        """Return how far a pad's outer edge lies from its node [nm], towards the part.

        With one line the node is the pad's inner edge; with one other pad it is half-way between the two; as
        an arm of a junction the pad begins at the edge of the copper across.
        """
        model = self.kit.model
        land = model.bodies[end.element].land_at(end)
        others = [(other, heading) for other, heading in role if other != end]
        if len(others) == 1 and others[0][0].kind in (EndKind.LINE, EndKind.COUPLED):
            return -land.along
        if len(others) == 1 and others[0][0].kind is EndKind.PAD:
            other = model.bodies[others[0][0].element]
            gap = beyond(model.bodies[end.element], land) + beyond(other, other.land_at(others[0][0]))
            return max(gap, model.limits.gap) // 2
        own = next(heading for other, heading in role if other == end)
        across = [
            model.widths[other.element] // 2
            for other, heading in others
            if (heading - own) % 180.0 == 90.0 and other.element in model.widths
        ]
        return self.kit.beside(across)

    def _reach(self, k: int, word: Word, heading: float) -> Range | None:
        """Return the range of a piece's displacement [nm], with some room for corrections."""
        piece, slack = self.scheme.pieces[k], 3.0 * self.kit.model.limits.height
        if not piece.is_line:
            lands = self.kit.model.bodies[piece.name].lands
            long = math.dist((lands[0].x, lands[0].y), (lands[-1].x, lands[-1].y)) + 2 * slack
            return -long, long, -long, long
        lengths = self.kit.lengths.by_bends(piece.name)
        if len(word) >= len(lengths):
            return None
        least = self._least(k, word) if word else (lengths[0],)
        spare = lengths[len(word)] - sum(least) + slack
        if spare < 0:
            return None
        out: list[float] = []
        directions = [unit(h) for h in headings_of(heading, word)]
        for axis in (0, 1):
            signs = [d[axis] for d in directions]
            middle = sum(s * leg for s, leg in zip(signs, least, strict=True))
            low = middle - slack - (spare if min(signs) < 0 else 0.0)
            high = middle + slack + (spare if max(signs) > 0 else 0.0)
            out += [low, high]
        return out[0], out[1], out[2], out[3]

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


def automorphisms(scheme: Scheme) -> Iterator[Mapping2]:
    """Yield the ways to map a cluster on itself: by piece, its image and whether the direction is kept.

    Pieces are mapped on pieces of their kind; sizes may differ, as those of an unequal divider do.
    """
    hubs = len(scheme.outer)
    between: dict[tuple[int, int], list[tuple[int, bool]]] = {}
    for k, piece in enumerate(scheme.pieces):
        between.setdefault((piece.a, piece.b), []).append((k, True))
        between.setdefault((piece.b, piece.a), []).append((k, False))
    kinds = {pair: tuple(scheme.pieces[k].is_line for k, _ in found) for pair, found in between.items()}
    for image in _images([], hubs, kinds):
        for turned in (False, True):
            mapping: dict[int, tuple[int, bool]] = {}
            for (a, b), found in between.items():
                if a < b:
                    others = between[image[a], image[b]]
                    for (k, way), (other, its) in zip(found, others[::-1] if turned else others, strict=True):
                        mapping[k] = (other, way == its)
            if all(mapping[other][0] == k for k, (other, _) in mapping.items()):
                yield tuple(mapping[k] for k in range(len(scheme.pieces)))


def _images(
    image: list[int], hubs: int, kinds: dict[tuple[int, int], tuple[bool, ...]]
) -> Iterator[list[int]]:
    """Yield the permutations of hubs that keep what lies between them."""
    at = len(image)
    if at == hubs:
        yield image
        return
    for candidate in range(hubs):
        if candidate in image:
            continue
        trial = [*image, candidate]
        if all(kinds.get((at, i)) == kinds.get((candidate, trial[i])) for i in range(at)):
            yield from _images(trial, hubs, kinds)


def _alike(bars: Sequence[Bar], mapping: Mapping2) -> bool:
    """True when mirrored pieces ask for the same lengths."""
    return all(
        abs(bars[k].length - bars[other].length) <= 1 and len(bars[k].least) == len(bars[other].least)
        for k, (other, _) in enumerate(mapping)
    )


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
