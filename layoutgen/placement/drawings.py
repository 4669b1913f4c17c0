"""Drawings of a loop cluster: which way each end leaves its net, and which turns each line takes.

Only directions are decided here, no lengths: a depth-first walk over the cluster gives every end a heading
and every line a word, few bends first. A loop is kept when its turns add up to a full circle and when, by the
ranges that its legs have, it can close at all.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from typing import ClassVar

from layoutgen.placement.words import Word, reversed_word

__all__ = ["Drawing", "Piece", "Range", "Scheme", "Step", "Walk", "drawings", "walked_steps"]

MOST_BENDS = 8
"""Most bends of a whole cluster [-]; with four a line can take up any surplus."""

MOST_STEPS = 25_000
"""Steps of the walk for one number of bends after which the rest is left out."""

_L, _R = 90.0, -90.0
_WORDS: tuple[tuple[Word, ...], ...] = (
    ((),),
    ((_L,), (_R,)),
    ((_L, _L), (_R, _R), (_L, _R), (_R, _L)),
    ((_L, _R, _R), (_R, _L, _L), (_L, _L, _R), (_R, _R, _L), (_L, _L, _L), (_R, _R, _R)),
    ((_L, _R, _R, _L), (_R, _L, _L, _R), (_L, _L, _R, _R), (_R, _R, _L, _L)),
)
_HEADINGS = (0.0, 90.0, 180.0, 270.0)

Range = tuple[float, float, float, float]
"""Least and greatest displacement east, then north [nm]."""


@dataclass(frozen=True, slots=True)
class Piece:
    """A line or part of a cluster between hubs ``a`` and ``b``; a part turns its path by ``turn`` [deg].

    ``data`` is equal for pieces of equal size; ``word`` is a line's hinted word, from a to b.
    """

    name: str
    a: int
    b: int
    is_line: bool
    turn: float
    data: object
    word: Word | None = None


@dataclass(frozen=True, slots=True)
class Scheme:
    """A cluster as hubs and pieces; ``outer`` is the number of ends that leave the cluster at each hub."""

    pieces: tuple[Piece, ...]
    outer: tuple[int, ...]

    def inner(self, hub: int) -> list[tuple[int, bool]]:
        """Return the pieces at a hub, each with True where it is the piece's first end."""
        return [
            (k, end)
            for k, p in enumerate(self.pieces)
            for end in (True, False)
            if hub == (p.a if end else p.b)
        ]

    def is_straight(self, hub: int) -> bool:
        """True where only two ends meet: there a line goes straight on."""
        return len(self.inner(hub)) + self.outer[hub] == 2


@dataclass(frozen=True, slots=True)
class Drawing:
    """By piece: outgoing heading [deg] of its first and second end, and its word from first to second."""

    headings: tuple[tuple[float, float], ...]
    words: tuple[Word, ...]

    @property
    def bends(self) -> int:
        """Number of bends of all lines [-]."""
        return sum(len(word) for word in self.words)

    def at(self, scheme: Scheme, hub: int) -> list[float]:
        """Return the headings of the inner ends at a hub."""
        return [self.headings[k][0 if first else 1] for k, first in scheme.inner(hub)]

    def is_mirrored(self, mapping: Sequence[tuple[int, bool]]) -> bool:
        """True when the drawing is its own mirror image under an automorphism (piece, direction kept)."""
        axis = None
        for k, (other, keeps) in enumerate(mapping):
            image = self.headings[other] if keeps else self.headings[other][::-1]
            word = self.words[other] if keeps else reversed_word(self.words[other])
            if word != tuple(-turn for turn in self.words[k]):
                return False
            for mine, its in zip(self.headings[k], image, strict=True):
                total = (mine + its) % 360.0
                if axis is None:
                    axis = total
                elif axis != total:
                    return False
        return True


def drawings(
    scheme: Scheme, entry: int, reach: Callable[[int, Word, float], Range | None], bends: int
) -> Iterator[Drawing]:
    """Yield the drawings of a cluster with a number of bends; the first end at the entry leaves east.

    Args:
        scheme: The cluster.
        entry: The hub at which the walk begins.
        reach: For a piece's number, its word from first to second end and the first end's heading: the range
            of its displacement, or None where it has no room for that word.
        bends: Number of bends of all lines together [-].
    """
    yield from Walk(scheme, entry, reach).run(bends)


@dataclass(frozen=True, slots=True)
class Step:
    """One piece as walked: from a hub to a hub, and whether it closes a loop (then the way round it)."""

    piece: int
    forward: bool
    start: int
    stop: int
    loop: tuple[tuple[int, bool], ...] = ()


class Walk:
    """Depth first over the steps, with headings and words as they stand."""

    MOST: ClassVar[int] = MOST_STEPS

    def __init__(self, scheme: Scheme, entry: int, reach: Callable[[int, Word, float], Range | None]) -> None:
        """Set out from a hub; the arguments are those of :func:`drawings`."""
        self.scheme, self.entry, self.reach = scheme, entry, reach
        self.steps = walked_steps(scheme, entry)
        self.headings: dict[tuple[int, bool], float] = {}
        self.words: dict[int, Word] = {}
        self.used: list[list[float]] = [[] for _ in scheme.outer]
        self.straight = [scheme.is_straight(hub) for hub in range(len(scheme.outer))]
        self.ranges: dict[int, Range] = {}
        self.count = 0

    def run(self, bends: int) -> Iterator[Drawing]:
        """Yield the drawings with a number of bends."""
        yield from self._go(0, bends)

    def _go(self, at: int, left: int) -> Iterator[Drawing]:
        if at == len(self.steps):
            if left == 0:
                yield self._drawing()
            return
        step = self.steps[at]
        for heading in self._leaving(step, at):
            for word in self._words(step, left):
                self.count += 1
                if self.count > self.MOST:
                    return
                if self._take(step, heading, word):
                    yield from self._go(at + 1, left - self._bends(step, word))
                    self._give_back(step)

    def _drawing(self) -> Drawing:
        pieces = range(len(self.scheme.pieces))
        return Drawing(
            tuple((self.headings[k, True], self.headings[k, False]) for k in pieces),
            tuple(self.words[k] for k in pieces),
        )

    def _leaving(self, step: Step, at: int) -> Sequence[float]:
        """Return the headings with which a step may leave its hub."""
        if at == 0:
            return (0.0,)
        used = self.used[step.start]
        if self.straight[step.start] and used:
            return ((used[0] + 180.0) % 360.0,)
        return [heading for heading in _HEADINGS if heading not in used]

    def _words(self, step: Step, left: int) -> Iterator[Word]:
        """Yield the words a step may take, as walked."""
        piece = self.scheme.pieces[step.piece]
        if not piece.is_line:
            yield ()
        elif piece.word is not None:
            if len(piece.word) <= left:
                yield piece.word if step.forward else reversed_word(piece.word)
        else:
            for words in _WORDS[: left + 1]:
                yield from words

    def _take(self, step: Step, heading: float, word: Word) -> bool:
        """Draw a step, if its end fits; False, and nothing changed, if not."""
        piece = self.scheme.pieces[step.piece]
        turn = sum(word) if piece.is_line else piece.turn if step.forward else -piece.turn
        arriving = (heading + turn + 180.0) % 360.0
        used = self.used[step.stop]
        if arriving in used or (self.straight[step.stop] and used and (used[0] + 180.0) % 360.0 != arriving):
            return False
        own = word if step.forward else reversed_word(word)
        first = heading if step.forward else arriving
        found = self.reach(step.piece, own, first)
        if found is None:
            return False
        self.headings[step.piece, step.forward], self.headings[step.piece, not step.forward] = (
            heading,
            arriving,
        )
        self.words[step.piece], self.ranges[step.piece] = own, found
        self.used[step.start].append(heading)
        used.append(arriving)
        if step.loop and not self._closes(step.loop):
            self._give_back(step)
            return False
        return True

    def _bends(self, step: Step, word: Word) -> int:
        """Return how many of the bends to be spent a step takes."""
        return len(word)

    def _give_back(self, step: Step) -> None:
        self.used[step.stop].pop()
        self.used[step.start].pop()

    def _closes(self, loop: tuple[tuple[int, bool], ...]) -> bool:
        """True when a loop turns once round and its ends can meet."""
        total, low, high = 0.0, [0.0, 0.0], [0.0, 0.0]
        for (k, forward), (following, onward) in zip(loop, loop[1:] + loop[:1], strict=True):
            piece = self.scheme.pieces[k]
            turn = sum(self.words[k]) if piece.is_line else piece.turn
            arriving = self.headings[k, not forward] + 180.0
            between = (self.headings[following, onward] - arriving + 180.0) % 360.0 - 180.0
            total += (turn if forward else -turn) + between
            x0, x1, y0, y1 = self.ranges[k]
            sign = 1 if forward else -1
            for axis, (a, b) in enumerate(((x0, x1), (y0, y1))):
                low[axis] += a if sign > 0 else -b
                high[axis] += b if sign > 0 else -a
        meets = all(low[axis] <= 0.0 <= high[axis] for axis in (0, 1))
        return abs(total) == 360.0 and meets


def walked_steps(scheme: Scheme, entry: int, *, early: bool = False) -> list[Step]:
    """Return the pieces in the order of a depth-first walk, closing ones with the loop they close.

    Args:
        scheme: The cluster.
        entry: The hub at which the walk begins.
        early: Whether to go first where a loop closes soonest, instead of in file order.
    """
    steps: list[Step] = []
    trail: list[tuple[int, int, bool]] = []
    _visit(scheme, entry, set(), {entry}, trail, steps, early=early)
    return steps


def _ways_on(
    scheme: Scheme, hub: int, done: set[int], seen: set[int], *, early: bool
) -> list[tuple[int, bool]]:
    """Return the pieces at a hub, each with True where it is the piece's first end, in the order to go."""
    inner = scheme.inner(hub)
    return sorted(inner, key=lambda way: _way_back(scheme, way, done, seen)) if early else inner


def _way_back(scheme: Scheme, way: tuple[int, bool], done: set[int], seen: set[int]) -> int:
    """Return over how many pieces, beginning with one, a walk comes back to where it was."""
    piece = scheme.pieces[way[0]]
    reached, count = {piece.b if way[1] else piece.a}, 1
    gone = done | {way[0]}
    while not reached & seen and count <= len(scheme.pieces):
        onward = [(k, p) for k, p in enumerate(scheme.pieces) if k not in gone and {p.a, p.b} & reached]
        gone |= {k for k, _ in onward}
        reached = reached | {hub for _, p in onward for hub in (p.a, p.b)}
        count += 1
    return count


def _visit(
    scheme: Scheme,
    hub: int,
    done: set[int],
    seen: set[int],
    trail: list[tuple[int, int, bool]],
    steps: list[Step],
    *,
    early: bool,
) -> None:
    for k, first in _ways_on(scheme, hub, done, seen, early=early):
        if k in done:
            continue
        done.add(k)
        piece = scheme.pieces[k]
        far = piece.b if first else piece.a
        if far in seen:
            start = next(i for i, (left, _, _) in enumerate(trail) if left == far)
            loop = tuple((p, f) for _, p, f in trail[start:])
            steps.append(Step(k, first, hub, far, (*loop, (k, first))))
            continue
        seen.add(far)
        steps.append(Step(k, first, hub, far))
        trail.append((hub, k, first))
        _visit(scheme, far, done, seen, trail, steps, early=early)
        trail.pop()
