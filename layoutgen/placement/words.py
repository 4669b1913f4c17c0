"""Routes as words of turns, with legs: the shapes a line of given length may take.

A word is a tuple of turns [deg]; a line with word (t1, ..., tk) has k + 1 legs. For a fixed word the end
point is linear in the legs, so lengths that meet a target come out of one linear program; without a target
the legs are taken from a short list of tidy proportions.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from layoutgen.geometry import Point
from layoutgen.placement.frame import Pose, unit

__all__ = [
    "LegRules",
    "Route",
    "Word",
    "bow_word",
    "fixed_shapes",
    "headings_of",
    "is_bow",
    "least_legs",
    "meeting_routes",
    "reversed_word",
    "route_points",
    "solve_legs",
]

Word = tuple[float, ...]

_L, _R = 90.0, -90.0
_MEANDER_ROWS = (2, 3, 4, 5, 6, 8)
_SOLVER_TOLERANCE_NM = 5.0
_GRID = 10  # [nm]: rounding of odd widths must not decide


@dataclass(frozen=True, slots=True)
class Route:
    """A word with its legs [nm]."""

    word: Word
    legs: tuple[int, ...]

    @property
    def length(self) -> int:
        """Centre-line length [nm]."""
        return sum(self.legs)


@dataclass(frozen=True, slots=True)
class Reach:
    """What lies at a line's end [nm].

    ``copper`` reaches along the line, no bend may touch it; a leg that runs across keeps ``beside`` away (to
    its edge); ``half`` is how far it reaches sideways, for the leg that comes back beside it.
    """

    copper: int
    beside: int
    half: int = 0


@dataclass(frozen=True, slots=True)
class LegRules:
    """What the legs of one line must keep [nm].

    ``first`` and ``last`` are the least first and last legs when there is a bend (they clear what the line
    leaves and meets), ``clear`` a roomier first leg that lets the pour in between, ``fold`` the least middle
    leg, centre to centre, so that neighbouring legs keep the spacing rule, ``last_fold`` that of the last
    fold, beside what the line meets, ``bend`` the reach of one bend. ``lead`` and ``tail`` are the least
    first and last legs before a bend that turns little, ``apart`` the spacing of legs.
    """

    width: int
    first: int
    last: int
    clear: int
    fold: int
    last_fold: int
    bend: int
    lead: int = 0
    tail: int = 0
    apart: int = 0

    @classmethod
    def of(cls, width: int, spacing: int, reach: int, *, first: Reach, last: Reach, clear: int) -> LegRules:
        """Derive the rules from a line's width, the spacing and the reach of one of its bends [nm].

        Args:
            width: Line width [nm].
            spacing: Least distance of neighbouring legs [nm].
            reach: How far a bend reaches from its vertex [nm].
            first: Copper and clearance at the start.
            last: Copper and clearance at the far end.
            clear: Roomier first leg [nm].
        """
        start = max(first.copper + reach, first.beside + width // 2 + _GRID)
        finish = max(last.copper + reach, last.beside + width // 2 + _GRID)
        fold = max(width + spacing, 2 * reach + width // 4)
        last_fold = max(fold, width // 2 + spacing + last.half)
        lead, tail = first.copper + reach, last.copper + reach
        return cls(width, start, finish, max(clear, start), fold, last_fold, reach, lead, tail, spacing)


def headings_of(start: float, word: Word) -> tuple[float, ...]:
    """Return the heading [deg] of every leg."""
    return tuple(itertools.accumulate(word, lambda h, t: (h + t) % 360.0, initial=start % 360.0))


def reversed_word(word: Word) -> Word:
    """Return a word as travelled from its other end."""
    return tuple(-turn for turn in reversed(word))


def route_points(start: Pose, route: Route) -> tuple[tuple[Point, ...], Pose]:
    """Return the vertices [nm] of a route and the pose at its end."""
    x, y, heading = float(start.x), float(start.y), start.heading % 360.0
    points = [start.point]
    for leg, turn in zip(route.legs, (*route.word, 0.0), strict=True):
        ux, uy = unit(heading)
        x, y = x + ux * leg, y + uy * leg
        points.append((round(x), round(y)))
        arrived, heading = heading, (heading + turn) % 360.0
    return tuple(points), Pose(*points[-1], arrived)


def least_legs(word: Word, rules: LegRules) -> tuple[int, ...]:
    """Return the least length [nm] of each leg of a word."""
    if not word:
        return (1,)
    if is_bow(word):
        return _bow_legs(word[0], rules)
    return (rules.first, *_folds(len(word) - 1, rules), rules.last)


def bow_word(angle: float) -> Word:
    """Return the word of a bow: aside by an angle [deg], along, and back; it takes up a little surplus."""
    return (angle, -angle, -angle, angle)


def is_bow(word: Word) -> bool:
    """True for a bow whose slanted legs are no right angles."""
    return len(word) == 4 and word[0] % 90.0 != 0.0 and word == bow_word(word[0])


def _bow_legs(angle: float, rules: LegRules) -> tuple[int, ...]:
    """Return the least legs of a bow [nm]: bends do not meet, and legs that face each other keep apart."""
    bend = rules.bend + rules.width // 8  # what a bend that turns little reaches farther than a right angle
    room = 2 * bend + rules.width // 4
    slant = max(room, math.ceil(rules.apart / math.cos(math.radians(angle))) + _GRID)
    along = max(room, rules.apart + math.ceil(rules.width * abs(math.sin(math.radians(angle)))) + _GRID)
    more = bend - rules.bend
    return rules.lead + more, slant, along, slant, rules.tail + more


def fixed_shapes(lengths: Sequence[int], rules: LegRules) -> Iterator[Route]:
    """Yield tidy shapes for a line of fixed length, the straight one first.

    Args:
        lengths: Centre-line length [nm] by number of bends: ``lengths[k]`` for k bends.
        rules: Least legs.
    """
    yield Route((), (lengths[0],))
    for turn in (_L, _R):
        yield from _one_bend(lengths, rules, turn)
        yield from _two_bends(lengths, rules, turn)
        yield from _three_bends(lengths, rules, turn)
        yield from _meanders(lengths, rules, turn)


def _first_legs(total: int, rules: LegRules) -> list[int]:
    """Return tidy first legs: just clear, roomy, and thirds of the whole."""
    legs = [rules.clear, rules.first, round(total / 3), round(total / 2), round(2 * total / 3)]
    return list(dict.fromkeys(leg for leg in legs if leg >= rules.first))


def _one_bend(lengths: Sequence[int], rules: LegRules, turn: float) -> Iterator[Route]:
    total = lengths[1]
    for first in [*_first_legs(total, rules), total - rules.last]:
        if first >= rules.first and total - first >= rules.last:
            yield Route((turn,), (first, total - first))


def _two_bends(lengths: Sequence[int], rules: LegRules, turn: float) -> Iterator[Route]:
    total, fold = lengths[2], rules.last_fold
    for first in _first_legs(total, rules):
        for middle in (fold, 2 * fold, total - first - rules.last):
            last = total - first - middle
            if middle >= fold and last >= rules.last:
                yield Route((turn, turn), (first, middle, last))
                yield Route((turn, -turn), (first, middle, last))
    half = (total - fold) // 2
    if half >= max(rules.first, rules.last):
        yield Route((turn, turn), (half, fold, total - half - fold))


def _three_bends(lengths: Sequence[int], rules: LegRules, turn: float) -> Iterator[Route]:
    """Out, along, back: the first leg leaves, the rest lies as a hairpin beside what it left."""
    total, fold = lengths[3], rules.last_fold
    for first in _first_legs(total, rules)[:2]:
        rest = total - first - fold
        row = rest // 2
        if row >= max(rules.fold, rules.last):
            yield Route((turn, -turn, -turn), (first, row, fold, rest - row))
        for last in (rules.last, 2 * rules.last):
            row = total - first - fold - last
            if row >= fold:
                yield Route((turn, -turn, turn), (first, row, fold, last))
                yield Route((turn, turn, -turn), (first, fold, row, last))


def _meanders(lengths: Sequence[int], rules: LegRules, turn: float) -> Iterator[Route]:
    """Rows to and fro: along the heading it left with, and across it."""
    for rows in _MEANDER_ROWS:
        bends = 2 * (rows - 1)
        if 2 < bends < len(lengths):
            folds = _folds(rows - 1, rules)
            row, spare = divmod(lengths[bends] - sum(folds), rows)
            if row >= max(rules.first, rules.last, rules.fold // 2):
                legs = _interleave([row + spare, *[row] * (rows - 1)], folds)
                yield Route(_to_and_fro(turn, rows), legs)
        if 3 < bends + 1 < len(lengths):
            yield from _cross_meander(lengths[bends + 1], rules, turn, rows)


def _cross_meander(total: int, rules: LegRules, turn: float, rows: int) -> Iterator[Route]:
    """Leave, turn, then rows across the heading; the last row ends the line."""
    folds = _folds(rows - 1, rules)
    for first in dict.fromkeys((rules.clear, rules.first)):
        row, spare = divmod(total - first - sum(folds), rows)
        if row >= max(rules.fold, rules.last):
            legs = _interleave([*[row] * (rows - 1), row + spare], folds)
            yield Route((turn, *_to_and_fro(-turn, rows)), (first, *legs))


def _to_and_fro(turn: float, rows: int) -> Word:
    """Return the turns between rows that run to and fro, the first pair by ``turn``."""
    return tuple(t for k in range(rows - 1) for t in ((turn, turn) if k % 2 == 0 else (-turn, -turn)))


def _folds(count: int, rules: LegRules) -> tuple[int, ...]:
    """Return the legs between rows, the last one with room for what the line meets."""
    return tuple(rules.fold if k < count - 1 else rules.last_fold for k in range(count))


def _interleave(rows: Sequence[int], folds: Sequence[int]) -> tuple[int, ...]:
    """Return rows with fold legs between them."""
    out = [rows[0]]
    for fold, row in zip(folds, rows[1:], strict=True):
        out += [fold, row]
    return tuple(out)


def solve_legs(
    word: Word,
    least: Sequence[int],
    start: Pose,
    *,
    total: int | None = None,
    x: int | None = None,
    y: int | None = None,
    fixed: Sequence[int | None] = (),
) -> Route | None:
    """Return the legs that give a word a total length and an end point, or None where none do.

    The linear program keeps every leg at its least or more and spreads what is spare evenly (it maximises
    the least surplus), or, for a free total, makes the line as short as it can.

    Args:
        word: Turns [deg].
        least: Least length of each leg [nm].
        start: Where the line starts and where it is heading.
        total: Centre-line length asked [nm]; None for free.
        x: East coordinate of the end asked [nm], or None.
        y: North coordinate of the end asked [nm], or None.
        fixed: Legs given [nm], None for free ones; empty when all are free.
    """
    count = len(word) + 1
    free = [i for i in range(count) if not fixed or fixed[i] is None]
    directions = [unit(heading) for heading in headings_of(start.heading, word)]
    asked = (
        (total, [1.0] * count),
        (None if x is None else x - start.x, [d[0] for d in directions]),
        (None if y is None else y - start.y, [d[1] for d in directions]),
    )
    given = fixed or [None] * count
    bounds = [
        (float(low), None) if leg is None else (float(leg), float(leg))
        for low, leg in zip(least, given, strict=True)
    ]
    found = _program(asked, bounds, least, free, spreads=total is not None)
    if found is None:
        return None
    legs = found if total is None else _mend_total(found, total, free)
    route = Route(word, tuple(legs))
    end = route_points(start, route)[1]
    off = max(abs(end.x - x) if x is not None else 0, abs(end.y - y) if y is not None else 0)
    return route if off <= _SOLVER_TOLERANCE_NM else None


def _program(
    asked: Sequence[tuple[int | None, list[float]]],
    bounds: Sequence[tuple[float, float | None]],
    least: Sequence[int],
    free: Sequence[int],
    *,
    spreads: bool,
) -> list[int] | None:
    """Return the legs [nm] that solve the linear program of :func:`solve_legs`, None where none do.

    Args:
        asked: Sums that the legs must make [nm], None for none, each with the legs' factors.
        bounds: Least and greatest length of each leg [nm].
        least: Least lengths, above which the surplus counts [nm].
        free: Numbers of the legs that are not given.
        spreads: Whether the least surplus is made as great as it can be; else the sum as small.
    """
    from scipy.optimize import linprog  # slow to import, and few lines need it

    count = len(bounds)
    rows = [[*row, 0.0] for value, row in asked if value is not None]
    wanted = [float(value) for value, _ in asked if value is not None]
    result = linprog(
        [0.0] * count + [-1.0] if spreads else [1.0] * count + [0.0],
        A_ub=[[-1.0 if j == i else 0.0 for j in range(count)] + [1.0] for i in free] or None,
        b_ub=[-float(least[i]) for i in free] or None,
        A_eq=rows or None,
        b_eq=wanted or None,
        bounds=[*bounds, (0.0, None)],
        method="highs",
    )
    if not result.success or result.x is None:
        return None
    return [round(float(leg)) for leg in result.x[:count]]


def meeting_routes(
    word: Word, least: Sequence[int], start: Pose, x: int, y: int, jogs: Sequence[int]
) -> Iterator[Route]:
    """Yield routes of free length that end at a point, the shortest first.

    Legs keep their least lengths; what is missing along an axis goes into one of the legs that run the right
    way, each of them in turn, or in halves into two of them.

    Args:
        word: Turns [deg]; quarter turns only.
        least: Least length of each leg [nm].
        start: Where the line starts and where it is heading.
        x: East coordinate of the end [nm].
        y: North coordinate of the end [nm].
        jogs: How much farther to go round things, where the word turns back [nm].
    """
    directions = [unit(heading) for heading in headings_of(start.heading, word)]
    for jog in jogs:
        fills = []
        for axis, goal in ((0, x - start.x), (1, y - start.y)):
            signs = [round(d[axis]) for d in directions]
            fills.append(list(_axis_fills(signs, least, goal, jog)))
        for along, across in itertools.product(*fills):
            yield Route(word, tuple(a + b for a, b in zip(along, across, strict=True)))


def _axis_fills(signs: Sequence[int], least: Sequence[int], goal: int, jog: int) -> Iterator[list[int]]:
    """Yield the legs along one axis (0 for the others) that add up to a displacement [nm]."""
    legs = [leg if sign else 0 for sign, leg in zip(signs, least, strict=True)]
    if jog:
        turns_back = 1 in signs and -1 in signs
        if turns_back:
            legs[signs.index(1)] += jog
            legs[signs.index(-1)] += jog
    missing = goal - sum(sign * leg for sign, leg in zip(signs, legs, strict=True))
    if missing == 0:
        yield legs
        return
    open_legs = [i for i, sign in enumerate(signs) if sign * missing > 0]
    for i in open_legs:
        yield [leg + (abs(missing) if j == i else 0) for j, leg in enumerate(legs)]
    if len(open_legs) > 1:
        half = abs(missing) // 2
        more = {open_legs[0]: half, open_legs[-1]: abs(missing) - half}
        yield [leg + more.get(j, 0) for j, leg in enumerate(legs)]


def _mend_total(legs: list[int], total: int, free: Sequence[int]) -> list[int]:
    """Put the rounding error of the sum into the longest free leg."""
    if free:
        longest = max(free, key=lambda i: legs[i])
        legs[longest] += total - sum(legs)
    return legs
