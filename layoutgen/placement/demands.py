"""What a drawing of a loop cluster asks of each piece: lengths and least legs of lines, vectors of parts."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from layoutgen.circuit import End, EndKind
from layoutgen.errors import WrongInputError
from layoutgen.placement.bodies import beyond
from layoutgen.placement.closure import Bar
from layoutgen.placement.drawings import Drawing, Range, Scheme
from layoutgen.placement.frame import Pose, unit
from layoutgen.placement.kit import Kit, world
from layoutgen.placement.meetings import Meetings
from layoutgen.placement.tour import Headings
from layoutgen.placement.words import Word, headings_of, least_legs

__all__ = ["Demands"]

_PLAY_HEIGHTS = 4  # by how many heights a part's nodes may lie farther apart than they must
_LOOSE_HEIGHTS = 6  # the same, where a drawing is symmetric only so
_FAR = 1e9  # longer than any line [nm]


@dataclass(frozen=True, slots=True)
class Demands:
    """One cluster: its scheme, and by hub or piece the nets, ends and outer ends that it stands for."""

    kit: Kit
    meetings: Meetings
    scheme: Scheme
    nets: tuple[str, ...]
    ends: tuple[tuple[End, End], ...]
    outer: tuple[tuple[End, ...], ...]

    def roles(self, drawing: Drawing, outer: tuple[tuple[float, ...], ...]) -> tuple[Headings, ...]:
        """Return, by hub, every end with its outgoing heading in the plan's frame."""
        out = []
        for hub in range(len(self.nets)):
            inner = [
                (self.ends[k][0 if first else 1], drawing.headings[k][0 if first else 1])
                for k, first in self.scheme.inner(hub)
            ]
            out.append((*zip(self.outer[hub], outer[hub], strict=True), *inner))
        return tuple(out)

    def bars(self, drawing: Drawing, roles: tuple[Headings, ...], *, loose: bool = False) -> list[Bar] | None:
        """Return what each piece asks, None where a line would have no length; ``loose`` with more play."""
        named = dict(zip(self.nets, roles, strict=True))
        bars = []
        for k, piece in enumerate(self.scheme.pieces):
            if not piece.is_line:
                bars.append(self._rigid(k, drawing.headings[k][0], roles, loose=loose))
                continue
            word = drawing.words[k]
            try:
                length = self.kit.lengths.length(piece.name, word, named)
            except WrongInputError:
                return None
            bars.append(Bar(length, self._least(k, word)))
        return bars

    def _rigid(self, k: int, heading: float, roles: tuple[Headings, ...], *, loose: bool) -> Bar:
        """Return what a part asks: its vector, with play where both its pads are arms of junctions."""
        vector, piece = self.vector(k, heading, roles), self.scheme.pieces[k]
        heights = _LOOSE_HEIGHTS if loose else _PLAY_HEIGHTS
        has_play = all(len(roles[hub]) > 2 for hub in (piece.a, piece.b)) and 0 in vector
        return Bar(vector=vector, play=heights * self.kit.model.limits.height if has_play else 0)

    def _least(self, k: int, word: Word) -> tuple[int, ...]:
        return least_legs(word, self.meetings.rules(self.ends[k][0]))

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

    def reach(self, k: int, word: Word, heading: float) -> Range | None:
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

    def any_reach(self, k: int, word: Word, heading: float) -> Range | None:
        """Return the range of a piece that may be as long as it likes [nm]."""
        directions = [unit(h) for h in headings_of(heading, word)]
        found = [
            bound
            for axis in (0, 1)
            for bound in (
                min(0.0, *(_FAR * d[axis] for d in directions)),
                max(0.0, *(_FAR * d[axis] for d in directions)),
            )
        ]
        return (
            (found[0], found[1], found[2], found[3])
            if self.scheme.pieces[k].is_line
            else (-_FAR, _FAR, -_FAR, _FAR)
        )
