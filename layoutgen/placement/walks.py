"""Walks over clusters of many pieces: smaller loops keep their drawings, bends are spread over the lines."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence

from layoutgen.placement.drawings import Drawing, Range, Scheme, Step, Walk, walked_steps
from layoutgen.placement.words import Word, reversed_word

__all__ = ["Fixed", "JoinedWalk"]

_MOST_STEPS = 15_000
"""Steps of a walk for one number of bends after which the rest is left out."""

Fixed = Mapping[int, tuple[int, tuple[float, float], Word]]
"""By piece: the smaller loop it belongs to, the headings of its ends in that loop's drawing, its word."""


class JoinedWalk(Walk):
    """A walk in which the pieces of a smaller loop keep their drawing, turned and mirrored together.

    No other line takes more than ``each`` bends. With ``straight``, nodes with a stub or feed beside two
    pieces lead straight through.
    """

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
        self.through = [straight and self._leads_through(hub) for hub in range(len(scheme.outer))]

    def _leads_through(self, hub: int) -> bool:
        """True for a node of two pieces, no smaller loop's, beside which something leaves."""
        inner = self.scheme.inner(hub)
        return len(inner) == 2 and all(k not in self.fixed for k, _ in inner)

    def _go(self, at: int, left: int) -> Iterator[Drawing]:
        if at == len(self.steps):
            if left == 0:
                yield self._drawing()
            return
        step = self.steps[at]
        for heading in self._leaving(step, at):
            for word in self._words(step, left):
                self.count += 1
                if self.count > _MOST_STEPS:
                    return
                if self._take(step, heading, word):
                    sets = self._frame(step, heading)
                    yield from self._go(at + 1, left - (0 if step.piece in self.fixed else len(word)))
                    if sets:
                        del self.frames[self.fixed[step.piece][0]]
                    self._give_back(step)

    def _frame(self, step: Step, heading: float) -> bool:
        """Note how a smaller loop lies, by the first of its pieces; True where that was not known."""
        if step.piece not in self.fixed or self.fixed[step.piece][0] in self.frames:
            return False
        loop, headings, _ = self.fixed[step.piece]
        own = headings[0 if step.forward else 1]
        self.frames[loop] = (self.mirror, (heading - self.mirror * own) % 360.0)
        return True

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
