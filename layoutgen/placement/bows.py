"""Loops whose lines are a little too long for a straight drawing: the longer ones bow aside.

A branch-line coupler of several sections, or a hybrid of which one side is a degree longer, closes with
straight lines but for some tenths of a millimetre, less than any fold of right angles takes up. A linear
program says which straight lines of a drawing have to reach less far than they are long, and by how much;
each of those gets a bow, aside by a small angle, along, and back, the steepest that has room.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import ClassVar

from layoutgen.errors import WrongInputError
from layoutgen.placement.closure import Bar, surplus
from layoutgen.placement.cluster import ClusterPlan, ClusterSolver, Solution
from layoutgen.placement.demands import Demands
from layoutgen.placement.drawings import Drawing, Range, drawings
from layoutgen.placement.frame import unit
from layoutgen.placement.symmetry import mirrored_alike
from layoutgen.placement.tour import Headings
from layoutgen.placement.walks import JoinedWalk
from layoutgen.placement.words import Word, bow_word, least_legs

__all__ = ["BowedSolver", "LooseDemands", "closed_before"]

_OPEN = "open"  # marks, among what is known, clusters that close by no drawing without bows
_PLAY = 8  # times as far apart as elsewhere may the nodes of two-pad parts lie
_REACH_HEIGHTS = 36.0  # by how many heights a part's nodes may lie farther apart than its pads, about
_ANGLES = (90.0, 45.0, 30.0, 22.5, 15.0, 10.0, 7.5, 5.0, 3.0)  # of bows, the steepest first [deg]
_MOST_BOWED = 0.4  # of its length may a straight line reach less far [-]
_MOST_BENDS = 2  # bends of a drawing before its lines bow
_MOST_DRAWN_EVENLY = 6  # of them, drawings for which roles and aims are varied
_MOST_EVEN = 6  # bends of a drawing with one in a line at most
_MOST_LOOKED_AT = 24  # drawings of one number of bends whose surplus is worked out
_MOST_DRAWN = 12  # drawings, with the ways for what leaves them, that are bowed
_MOST_LEAVING = 16  # ways for what leaves the loop
_AIMS = ((1.0, 1.0), (1.0, 0.15), (0.15, 1.0))
_MOST_ANGLES = 2  # for each line
_BEST_SIDES = 4  # of them, the symmetric ones first
_MOST_SIDES = 16  # ways to choose to which side each line bows
_NOTHING = 40.0  # surplus below this does not count [nm]


@dataclass(frozen=True, slots=True)
class LooseDemands(Demands):
    """What is asked of the pieces of a cluster, with longer strips beside two-pad parts between junctions."""

    def _rigid(self, k: int, heading: float, roles: tuple[Headings, ...], *, loose: bool = False) -> Bar:
        """Return what a part asks: its vector, and by how much its nodes may lie farther apart."""
        found = Demands._rigid(self, k, heading, roles, loose=loose)
        few = len(self.kit.model.bodies[self.scheme.pieces[k].name].lands) == 2
        return Bar(vector=found.vector, play=_PLAY * found.play if few else 0)

    def reach(self, k: int, word: Word, heading: float) -> Range | None:
        """Return the range of a piece's displacement [nm], with some room for corrections."""
        if self.scheme.pieces[k].is_line:
            return Demands.reach(self, k, word, heading)
        body = self.kit.model.bodies[self.scheme.pieces[k].name]
        a, b = (body.land_at(end) for end in self.ends[k])
        long = math.dist((a.x, a.y), (b.x, b.y)) + _REACH_HEIGHTS * self.kit.model.limits.height
        return -long, long, -long, long


@dataclass(slots=True)
class BowedSolver(ClusterSolver):
    """A cluster whose lines may bow, where no drawing of right angles closes."""

    DEMANDS: ClassVar[type[Demands]] = LooseDemands

    def _all(self) -> Iterator[Solution]:
        """Yield the solutions without bows, or where there are none, those with few bends and least bowed."""
        found = False
        for solution in () if (_OPEN, self._key()) in self.known else ClusterSolver._all(self):
            found = True
            yield solution
        if not found:
            yield from self._bowed(0) or self._evenly() or self._bowed(_MOST_BENDS)

    def _evenly(self) -> list[Solution]:
        """Return the solutions of the drawings of fewest bends with one bend in a line at most.

        Where a cluster has many lines, a walk that tries all bends on its last ones first does not get there.
        """
        for bends in range(_MOST_EVEN + 1):
            walk = JoinedWalk(self.scheme, self.entry, self.demands.reach, {}, each=1, straight=False)
            some = sorted(walk.run(bends), key=lambda drawing: self._mirror(drawing) is None)
            solutions = (list(self._vary(drawing)) for drawing in some[:_MOST_LOOKED_AT])
            found = list(itertools.islice((some for some in solutions if some), _MOST_DRAWN_EVENLY))
            if found:
                return [solution for some in found for solution in some]
        return []

    def _bowed(self, most: int) -> list[Solution]:
        """Return the solutions of the drawings of fewest bends that close once their lines bow."""
        for bends in range(most + 1):
            solutions = (list(self._solved(plan, extra)) for plan, extra in self._loose(bends))
            found = list(itertools.islice((some for some in solutions if some), _MOST_DRAWN))
            if found:
                return [solution for some in found for solution in some]
        return []

    def _loose(self, bends: int) -> list[tuple[ClusterPlan, tuple[float, ...]]]:
        """Return drawings of a number of bends whose loops close by surplus, the least first.

        Like corners are met alike in all of them, as far as that is possible.
        """
        found = [
            (plan, extra)
            for drawing in itertools.islice(self._plain(bends), _MOST_LOOKED_AT)
            for outer in itertools.islice(itertools.product(*self._leaving(drawing)), _MOST_LEAVING)
            for plan in (ClusterPlan(drawing, outer, (1.0, 1.0)),)
            if (extra := self._surplus(plan)) is not None
        ]
        kinds = [self._kinds(plan) for plan, _ in found]
        fewest = min(kinds, default=0)
        best = [item for item, count in zip(found, kinds, strict=True) if count == fewest]
        return sorted(best, key=lambda item: _unevenness(item[1]))

    def _kinds(self, plan: ClusterPlan) -> int:
        """Return how many kinds of corners a plan has: by the widths that meet, and what lies straight on."""
        found = set()
        for hub, outer in enumerate(plan.outer):
            role = [
                (
                    plan.drawing.headings[k][0 if first else 1],
                    self.kit.across(self.ends[k][0 if first else 1]),
                )
                for k, first in self.scheme.inner(hub)
            ]
            onward = [width for heading, width in role if (heading + 180.0) % 360.0 in outer]
            found.add((tuple(sorted(width for _, width in role)), tuple(sorted(onward))))
        return len(found)

    def _leaving(self, drawing: Drawing) -> list[list[tuple[float, ...]]]:
        """Return, by hub, how its outer ends may leave."""
        plain = self._roughly(drawing)
        if plain is not None:
            return [self._outer_choices(plain, hub) for hub in range(len(self.nets))]
        out = []
        for hub, count in enumerate(self.scheme.outer):
            used = drawing.at(self.scheme, hub)
            free = [heading for heading in (0.0, 90.0, 180.0, 270.0) if heading not in used]
            out.append(list(itertools.permutations(free, count)))
        return out

    def _solved(self, plan: ClusterPlan, extra: tuple[float, ...]) -> Iterator[Solution]:
        """Yield the solutions of a plan with bows in the lines that have surplus [nm]."""
        for drawing in self._bows(plan, extra):
            for aim in _AIMS:
                solution = self.solve(ClusterPlan(drawing, plan.outer, aim))
                if solution is None:
                    break
                yield solution

    def _plain(self, bends: int) -> Iterator[Drawing]:
        """Yield the drawings in which straight lines may reach less far than they are long."""
        some = list(drawings(self.scheme, self.entry, self._reach, bends))
        some.sort(key=lambda drawing: self._mirror(drawing) is None)
        yield from some

    def _reach(self, k: int, word: Word, heading: float) -> Range | None:
        """Return the range of a piece's displacement [nm], a straight line's with what a bow takes up."""
        found = self.demands.reach(k, word, heading)
        if found is None or word or not self.scheme.pieces[k].is_line:
            return found
        ux, uy = unit(heading)
        less = _MOST_BOWED * self.kit.lengths.by_bends(self.scheme.pieces[k].name)[0]
        x0, x1, y0, y1 = found
        return x0 - max(ux, 0) * less, x1 - min(ux, 0) * less, y0 - max(uy, 0) * less, y1 - min(uy, 0) * less

    def _bows(self, plan: ClusterPlan, extra: tuple[float, ...]) -> Iterator[Drawing]:
        """Yield a drawing with bows in the lines that need them, to one side or the other, steep first."""
        roles = self.demands.roles(plan.drawing, plan.outer)
        angles = {k: self._angles(k, more, roles) for k, more in enumerate(extra) if more > _NOTHING}
        for number in range(max(map(len, angles.values()), default=0)):
            if all(angles.values()):
                chosen = {k: found[min(number, len(found) - 1)] for k, found in angles.items()}
                some = list(itertools.islice(self._sided(plan.drawing, chosen), _MOST_SIDES))
                some.sort(key=lambda bowed: self._mirror(bowed) is None)
                yield from some[:_BEST_SIDES]

    def _sided(self, drawing: Drawing, angles: dict[int, float]) -> Iterator[Drawing]:
        """Yield a drawing with every line that bows bowing to either side."""
        for signs in itertools.product((1.0, -1.0), repeat=len(angles)):
            words = list(drawing.words)
            for sign, (k, angle) in zip(signs, angles.items(), strict=True):
                words[k] = bow_word(sign * angle)
            yield Drawing(drawing.headings, tuple(words))

    def _surplus(self, plan: ClusterPlan) -> tuple[float, ...] | None:
        """Return by how much less far each line must reach than it is long [nm], evenly where it can be."""
        drawing = plan.drawing
        bars = self.demands.bars(drawing, self.demands.roles(drawing, plan.outer))
        if bars is None:
            return None
        pieces = zip(self.scheme.pieces, drawing.words, bars, strict=True)
        spare = [
            round(_MOST_BOWED * bar.length) if piece.is_line and not word and piece.word is None else 0
            for piece, word, bar in pieces
        ]
        mapping = self._mirror(drawing)
        found = None
        if mapping is not None and mirrored_alike(bars, mapping):
            found = surplus(self.scheme, drawing, bars, spare, mapping)
        return found or surplus(self.scheme, drawing, bars, spare)

    def _angles(self, k: int, more: float, roles: tuple[Headings, ...]) -> list[float]:
        """Return the steepest angles [deg] of bows that take a surplus [nm] up."""
        name = self.scheme.pieces[k].name
        named = dict(zip(self.nets, roles, strict=True))
        rules = self.router.meetings.rules(self.ends[k][0])
        found = []
        for angle in _ANGLES:
            word = bow_word(angle)
            try:
                length = self.kit.lengths.length(name, word, named)
                straight = self.kit.lengths.length(name, (), named)
            except WrongInputError:
                continue
            slant = (more + length - straight) / (2.0 - 2.0 * math.cos(math.radians(angle)))
            least = least_legs(word, rules)
            if slant >= least[1] and 2 * max(least[0], least[4]) + 2 * slant + least[2] <= length:
                found.append(angle)
        return found[:_MOST_ANGLES]


def closed_before(known: Mapping[object, list[Solution]]) -> dict[object, list[Solution]]:
    """Return what was found for clusters without bows, and which of them did not close, for other solvers."""
    return {key if found else (_OPEN, key): found for key, found in known.items()}


def _unevenness(extra: tuple[float, ...]) -> tuple[int, int]:
    """Return a key that is least where lines have equal surplus [nm], and little of it."""
    steps = [round(more / _NOTHING) for more in extra if more > _NOTHING]
    return len(set(steps)), sum(steps)
