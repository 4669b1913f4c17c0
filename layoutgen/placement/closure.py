"""The legs of a loop cluster from one linear program: loops close, lines have their lengths, all compact.

Unknown are the hubs' coordinates and the lines' legs; every equation is linear for a given drawing. The
program makes the box around the drawing small. When there is no solution, an elastic version, in which lines
may be longer or shorter than asked at a price, names the line that stands in the way and by how much.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from layoutgen.geometry import Point
from layoutgen.placement.drawings import Drawing, Scheme
from layoutgen.placement.frame import unit
from layoutgen.placement.words import headings_of, is_bow

__all__ = ["Apart", "Bar", "Shape", "Strain", "solve_closure", "strain", "surplus"]

Floats = npt.NDArray[np.float64]

_MM = 1e6
_SPREAD = 0.02  # what the least surplus of a leg counts against the size of the box
_PLAY = 10.0  # what a strip beside a part counts
_FREE = 0.1  # what the length of a free line counts
_STRAIN = 1e3  # what a wrong length counts
_PART_STRAIN = 5e3  # what a wrong part counts: lines are more easily changed


@dataclass(frozen=True, slots=True)
class Bar:
    """What a drawing asks of one piece [nm]: a line's length and least legs, or a part's fixed vector.

    ``play`` is by how much a part's nodes may lie farther apart, a strip filling the rest; a ``free`` line is
    as long as its legs.
    """

    length: int = 0
    least: tuple[int, ...] = ()
    vector: tuple[int, int] | None = None
    play: int = 0
    free: bool = False


@dataclass(frozen=True, slots=True)
class Apart:
    """Two hubs of which one lies at least so far [nm] beyond the other along an axis (0 east, 1 north)."""

    axis: int
    low: int
    high: int
    least: int


@dataclass(frozen=True, slots=True)
class Shape:
    """A solved cluster [nm]: hubs, each line's legs from its first end (empty for parts), hubs and bends.

    ``more`` is by how much the nodes of each part lie farther apart than they must.
    """

    hubs: tuple[Point, ...]
    legs: tuple[tuple[int, ...], ...]
    vertices: tuple[Point, ...]
    more: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Strain:
    """How much longer (positive) or shorter each piece would have to be [nm] for the loops to close."""

    changes: tuple[float, ...]

    @property
    def total(self) -> float:
        """All changes together [nm]."""
        return sum(abs(change) for change in self.changes)


class _Program:
    """Rows of the linear program; variables: hubs' x and y, legs, box, least surplus, and line strains."""

    def __init__(self, scheme: Scheme, drawing: Drawing, bars: Sequence[Bar]) -> None:
        self.scheme, self.drawing, self.bars = scheme, drawing, bars
        hubs = len(scheme.outer)
        self.leg_at: list[int] = []
        at = 2 * hubs
        for bar in bars:
            self.leg_at.append(at)
            at += len(bar.least)
        self.box_at, self.spread_at = at, at + 4
        self.strain_at = at + 5
        self.size = self.strain_at + 2 * len(bars)
        self.equal: list[tuple[dict[int, float], float]] = []
        self.below: list[tuple[dict[int, float], float]] = []

    def build(self, mirror: Iterable[tuple[int, int]]) -> None:
        """Fill the rows in; ``mirror`` are pairs of variables' numbers (see :meth:`leg`) to be equal.

        A bow lies in the middle of its line.
        """
        for k in range(len(self.bars)):
            self._piece(k)
        bows = [k for k, word in enumerate(self.drawing.words) if is_bow(word)]
        even = ((self.leg(k, i), self.leg(k, 4 - i)) for k in bows for i in (0, 1))
        for a, b in (*mirror, *even):
            if a != b:
                self.equal.append(({a: 1.0, b: -1.0}, 0.0))

    def keep_apart(self, item: Apart) -> None:
        """Keep two hubs apart along an axis."""
        first = item.axis * len(self.scheme.outer)
        self.below.append(({first + item.low: 1.0, first + item.high: -1.0}, -item.least / _MM))

    def leg(self, piece: int, index: int) -> int:
        """Return the number of a leg's variable."""
        return self.leg_at[piece] + index

    def _piece(self, k: int) -> None:
        piece, bar = self.scheme.pieces[k], self.bars[k]
        hubs = len(self.scheme.outer)
        directions = [unit(h) for h in headings_of(self.drawing.headings[k][0], self.drawing.words[k])]
        vector = (0, 0) if bar.vector is None else bar.vector
        plus, minus = self.strain_at + 2 * k, self.strain_at + 2 * k + 1
        for axis in (0, 1):
            row = {axis * hubs + piece.b: 1.0, axis * hubs + piece.a: -1.0}
            for i in range(len(bar.least)):
                row[self.leg(k, i)] = -directions[i][axis]
            if bar.vector is not None and vector[axis]:
                row |= {plus: -float(np.sign(vector[axis])), minus: float(np.sign(vector[axis]))}
            self.equal.append((row, vector[axis] / _MM))
            self._inside(axis, {axis * hubs + piece.a: 1.0})
            self._inside(axis, {axis * hubs + piece.b: 1.0})
            for i in range(1, len(bar.least)):
                bend = {axis * hubs + piece.a: 1.0}
                bend |= {self.leg(k, j): directions[j][axis] for j in range(i)}
                self._inside(axis, bend)
        if bar.least and not bar.free:
            total = {self.leg(k, i): 1.0 for i in range(len(bar.least))} | {plus: -1.0, minus: 1.0}
            self.equal.append((total, bar.length / _MM))
        for i, least in enumerate(bar.least[: len(bar.least) if len(bar.least) > 1 else 0]):
            self.below.append(({self.spread_at: 1.0, self.leg(k, i): -1.0}, -least / _MM))

    def _inside(self, axis: int, point: dict[int, float]) -> None:
        """Keep a coordinate inside the box."""
        low, high = self.box_at + 2 * axis, self.box_at + 2 * axis + 1
        self.below.append(({low: 1.0, **{v: -c for v, c in point.items()}}, 0.0))
        self.below.append(({**point, high: -1.0}, 0.0))

    def solve(
        self, aim: tuple[float, float], most: float | None, spare: Sequence[float] = ()
    ) -> Floats | None:
        """Return the solution [mm] that is best by width and height times ``aim``.

        ``most`` is the greatest change of any length [mm], None for any change; ``spare`` is, by piece, by
        how much it may reach less far than it is long [mm].
        """
        from scipy.optimize import linprog  # slow to import, and few circuits have loops

        cost = np.zeros(self.size)
        for axis, weight in enumerate(aim):
            cost[self.box_at + 2 * axis], cost[self.box_at + 2 * axis + 1] = -weight, weight
        cost[self.spread_at] = -_SPREAD
        for k, bar in enumerate(self.bars):
            at = self.strain_at + 2 * k
            cost[at : at + 2] = _STRAIN if bar.vector is None else _PART_STRAIN
        bounds: list[tuple[float | None, float | None]] = [(None, None)] * self.size
        bounds[0] = bounds[len(self.scheme.outer)] = (0.0, 0.0)
        for k, bar in enumerate(self.bars):
            for i, least in enumerate(bar.least):
                cost[self.leg(k, i)] = _FREE if bar.free else 0.0
                bounds[self.leg(k, i)] = (least / _MM, None)
        bounds[self.spread_at] = (0.0, 1e3)
        for v in range(self.strain_at, self.size):
            bounds[v] = (0.0, most)
        for k, more in enumerate(spare):
            bounds[self.strain_at + 2 * k + 1] = (0.0, max(more, most or 0.0))
        for k, bar in enumerate(self.bars):
            if bar.play and most is not None:
                cost[self.strain_at + 2 * k] = _PLAY
                bounds[self.strain_at + 2 * k] = (0.0, max(bar.play / _MM, most))
        equal, wanted = _matrix(self.equal, self.size)
        below, limits = _matrix(self.below, self.size)
        found = linprog(cost, A_ub=below, b_ub=limits, A_eq=equal, b_eq=wanted, bounds=bounds, method="highs")
        return np.asarray(found.x, dtype=np.float64) if found.success and found.x is not None else None


def _matrix(rows: Sequence[tuple[dict[int, float], float]], size: int) -> tuple[Floats, Floats]:
    matrix = np.zeros((len(rows), size))
    for i, (row, _) in enumerate(rows):
        for variable, value in row.items():
            matrix[i, variable] += value
    return matrix, np.array([value for _, value in rows])


def solve_closure(
    scheme: Scheme,
    drawing: Drawing,
    bars: Sequence[Bar],
    aim: tuple[float, float] = (1.0, 1.0),
    mapping: Sequence[tuple[int, bool]] = (),
    slack: float = 0.0,
    apart: Sequence[Apart] = (),
) -> Shape | None:
    """Return hubs and legs of a drawing in whole nanometres, or None where its loops cannot close.

    Args:
        scheme: The cluster.
        drawing: Headings and words.
        bars: What each piece asks.
        aim: What a millimetre of width and of height of the box costs [-].
        mapping: By piece, the one that is its mirror image and whether it runs the same way; empty for none.
        slack: By how much any length may be off [nm].
        apart: Hubs that must lie apart.
    """
    program = _Program(scheme, drawing, bars)
    program.build(_mirrored(program, mapping))
    for item in apart:
        program.keep_apart(item)
    found = program.solve(aim, slack / _MM)
    return None if found is None else _rounded(program, found)


def _mirrored(program: _Program, mapping: Sequence[tuple[int, bool]]) -> list[tuple[int, int]]:
    """Return the pairs of legs that a mirror image makes equal."""
    mirror = []
    for k, (other, keeps) in enumerate(mapping):
        count = len(program.bars[k].least)
        mirror += [
            (program.leg(k, i), program.leg(other, i if keeps else count - 1 - i)) for i in range(count)
        ]
    return mirror


def surplus(
    scheme: Scheme,
    drawing: Drawing,
    bars: Sequence[Bar],
    spare: Sequence[int],
    mapping: Sequence[tuple[int, bool]] = (),
    slack: float = 0.0,
) -> tuple[float, ...] | None:
    """Return by how much less far than they are long pieces must reach [nm] for the loops to close, at least.

    Args:
        scheme: The cluster.
        drawing: Headings and words.
        bars: What each piece asks.
        spare: By piece, the most by which it may reach less far [nm].
        mapping: As for :func:`solve_closure`.
        slack: By how much any length may be off [nm].

    Returns:
        A length for each piece, None where no surplus within ``spare`` closes the loops.
    """
    program = _Program(scheme, drawing, bars)
    program.build(_mirrored(program, mapping))
    found = program.solve((1.0, 1.0), slack / _MM, [most / _MM for most in spare])
    return None if found is None else tuple(float(v) * _MM for v in found[program.strain_at + 1 :: 2])


def strain(scheme: Scheme, drawing: Drawing, bars: Sequence[Bar]) -> Strain | None:
    """Return the least changes of lengths at which a drawing closes, None where none would do."""
    program = _Program(scheme, drawing, bars)
    program.build(())
    found = program.solve((1.0, 1.0), None)
    if found is None:
        return None
    changes = (found[program.strain_at :: 2] - found[program.strain_at + 1 :: 2]) * _MM
    return Strain(tuple(float(change) for change in changes))


def _rounded(program: _Program, found: Floats) -> Shape:
    """Return the solution on the nanometre grid: points on one leg share their coordinate exactly."""
    scheme, hubs = program.scheme, len(program.scheme.outer)
    points = [(float(found[h]), float(found[hubs + h])) for h in range(hubs)]
    chains: list[list[int]] = []
    for k, piece in enumerate(scheme.pieces):
        chain = [piece.a]
        directions = [unit(h) for h in headings_of(program.drawing.headings[k][0], program.drawing.words[k])]
        for i in range(len(program.bars[k].least) - 1):
            x, y = points[chain[-1]]
            leg = float(found[program.leg(k, i)])
            points.append((x + leg * directions[i][0], y + leg * directions[i][1]))
            chain.append(len(points) - 1)
        chains.append([*chain, piece.b])
    grid = [_snapped(program, points, chains, axis) for axis in (0, 1)]
    vertices = list(zip(*grid, strict=True))
    legs = []
    for k, chain in enumerate(chains):
        if is_bow(program.drawing.words[k]):
            legs.append(_bowed(program, found, k, math.dist(vertices[chain[0]], vertices[chain[-1]])))
            continue
        sizes = [
            abs(vertices[b][0] - vertices[a][0]) + abs(vertices[b][1] - vertices[a][1])
            for a, b in itertools.pairwise(chain)
        ]
        legs.append(tuple(sizes) if program.bars[k].least else ())
    more = tuple(_more(program.bars[k], vertices[p.a], vertices[p.b]) for k, p in enumerate(scheme.pieces))
    return Shape(tuple(vertices[:hubs]), tuple(legs), tuple(vertices), more)


def _bowed(program: _Program, found: Floats, k: int, apart: float) -> tuple[int, ...]:
    """Return the legs of a bow [nm] between ends that lie apart by a distance [nm].

    Its slanted legs are equal, so it ends on the line of its ends; the last leg takes what rounding leaves.
    """
    first, slant, along = (round(float(found[program.leg(k, i)]) * _MM) for i in range(3))
    reach = 2.0 * slant * math.cos(math.radians(program.drawing.words[k][0]))
    return first, slant, along, slant, round(apart - first - along - reach)


def _more(bar: Bar, start: Point, stop: Point) -> int:
    """Return by how much a part's nodes lie farther apart than its vector is long [nm]."""
    if bar.vector is None or not bar.play:
        return 0
    apart = abs(stop[0] - start[0]) + abs(stop[1] - start[1])
    return max(0, apart - abs(bar.vector[0]) - abs(bar.vector[1]))


def _snapped(
    program: _Program, points: Sequence[tuple[float, float]], chains: Sequence[Sequence[int]], axis: int
) -> list[int]:
    """Return one coordinate of every point [nm], equal for those that a leg across the axis joins."""
    group = list(range(len(points)))

    def root(i: int) -> int:
        while group[i] != i:
            i = group[i]
        return i

    for k, chain in enumerate(chains):
        headings = headings_of(program.drawing.headings[k][0], program.drawing.words[k])
        vector = program.bars[k].vector
        if is_bow(program.drawing.words[k]) and unit(headings[0])[axis] == 0.0:
            group[root(chain[-1])] = root(chain[0])
        for i, (a, b) in enumerate(itertools.pairwise(chain)):
            along = vector[axis] != 0 if vector is not None else unit(headings[i])[axis] != 0.0
            if not along:
                group[root(b)] = root(a)
    values: dict[int, list[float]] = {}
    for i, point in enumerate(points):
        values.setdefault(root(i), []).append(point[axis])
    mean = {key: round(sum(found) / len(found) * _MM) for key, found in values.items()}
    return [mean[root(i)] for i in range(len(points))]
