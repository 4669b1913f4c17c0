"""Walks over clusters of many pieces: smaller loops keep their drawings, bends are spread over the lines."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from typing import ClassVar

from layoutgen.placement.drawings import Range, Scheme, Step, Walk, walked_steps
from layoutgen.placement.words import Word, reversed_word

__all__ = ["Fixed", "JoinedWalk"]

Fixed = Mapping[int, tuple[int, tuple[float, float], Word]]
"""By piece: the smaller loop it belongs to, the headings of its ends in that loop's drawing, its word."""


class JoinedWalk(Walk):
    """A walk in which the pieces of a smaller loop keep their drawing, turned and mirrored together.

    No other line takes more than ``each`` bends. With ``straight``, nodes with a stub or feed beside two
    pieces lead straight through.
    """

    MOST: ClassVar[int] = 15_000

    def __init__(
        self,
        scheme: Scheme,
        entry: int,
        reach: Callable[[int, Word, float], Range | None],
        fixed: Fixed,
        *,
        each: int,
        straight: bool,
    ) -> None:
        """Set out from a hub; see :func:`layoutgen.placement.drawings.drawings`."""
        super().__init__(scheme, entry, reach)
        self.steps = walked_steps(scheme, entry, early=True)
        self.fixed, self.each, self.mirror = fixed, each, 1.0
        self.frames: dict[int, tuple[float, float]] = {}
        self.framed_by: dict[int, int] = {}
        self.through = [straight and self._leads_through(hub) for hub in range(len(scheme.outer))]

    def _leads_through(self, hub: int) -> bool:
        """True for a node of two pieces, no smaller loop's, beside which something leaves."""
        inner = self.scheme.inner(hub)
        return len(inner) == 2 and all(k not in self.fixed for k, _ in inner)

    def _bends(self, step: Step, word: Word) -> int:
        return 0 if step.piece in self.fixed else len(word)

    def _take(self, step: Step, heading: float, word: Word) -> bool:
        """Draw a step, and note how a smaller loop lies by the first of its pieces."""
        if not super()._take(step, heading, word):
            return False
        if step.piece in self.fixed and self.fixed[step.piece][0] not in self.frames:
            loop, headings, _ = self.fixed[step.piece]
            own = headings[0 if step.forward else 1]
            self.frames[loop] = (self.mirror, (heading - self.mirror * own) % 360.0)
            self.framed_by[loop] = step.piece
        return True

    def _give_back(self, step: Step) -> None:
        super()._give_back(step)
        if step.piece in self.fixed:
            loop = self.fixed[step.piece][0]
            if self.framed_by.get(loop) == step.piece:
                del self.frames[loop], self.framed_by[loop]

    def _leaving(self, step: Step, at: int) -> Sequence[float]:
        some = super()._leaving(step, at)
        used = self.used[step.start]
        if self.through[step.start] and used:
            some = [heading for heading in some if heading == (used[0] + 180.0) % 360.0]
        if step.piece not in self.fixed or self.fixed[step.piece][0] not in self.frames:
            return some
        loop, headings, _ = self.fixed[step.piece]
        mirror, turn = self.frames[loop]
        wanted = (mirror * headings[0 if step.forward else 1] + turn) % 360.0
        return [heading for heading in some if heading == wanted]

    def _words(self, step: Step, left: int) -> Iterator[Word]:
        if step.piece not in self.fixed:
            yield from super()._words(step, min(left, self.each))
            return
        loop, _, word = self.fixed[step.piece]
        own = word if step.forward else reversed_word(word)
        for mirror in (self.frames[loop][0],) if loop in self.frames else (1.0, -1.0):
            self.mirror = mirror
            yield tuple(mirror * turn for turn in own)
