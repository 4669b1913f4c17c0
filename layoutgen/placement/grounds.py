"""Ground vias of parts with leads in rows: set so that the ways of the signal leads stay free.

Each ground pad gets as many vias as the rules ask for, and a stem of copper to them. Tried in this order of
cost: a row across just outside the pad, a column, either of them farther out or to one side, and under the
body. Where there is no room for all, some pads get fewer or none, which the checks then tell.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, replace
from functools import partial
from itertools import islice

from layoutgen.geometry import Point
from layoutgen.placement.bodies import (
    BESIDE_OPENING,
    CLEAR,
    OVERLAP,
    BodyLand,
    PartBody,
    clear_of,
    ground_copper,
)
from layoutgen.placement.frame import Box, Pose, box_to_world, to_world
from layoutgen.placement.model import GROUND, Limits
from layoutgen.placement.state import leg_boxes

__all__ = ["fit_ground_vias"]

_STEP = 100_000  # [nm] between places tried
_FARTHEST = 1_600_000  # [nm] sideways
_OUTWARD = (0, 200_000, 500_000, 900_000)  # [nm] farther out than need be
_MOST_OPTIONS = 60  # places kept for one pad
_MOST_TRIED = 300  # of them tried for one part
_COLUMN = 50_000  # what a column costs more than a row [nm]
_INWARD = 400_000  # what vias under the body cost more than vias outside [nm]
_LANE = 20_000_000  # how far the way of a lead is kept free [nm]
_ROUNDING = 10  # [nm]

Vias = tuple[list[Point], list[Box]]
"""Axes of vias, and the copper that joins them to their pad [nm]."""


@dataclass(slots=True)
class _Yard:
    """What stands around a part's pads: signal copper and ways of leads, vias under pads, pads on ground."""

    body: PartBody
    limits: Limits
    signals: list[Box]
    thermal: list[Point]
    tried: int = 0

    @property
    def rows(self) -> list[BodyLand]:
        """The pads on ground that have their vias outside."""
        lands = self.body.lands
        return [land for land in lands if land.net == GROUND and land.ground is None and land.has_copper]

    def filled(self) -> dict[str, Vias] | None:
        """Return vias for the pads with rows of them, by pin; None where there is no room for some."""
        options = {land: list(islice(self._options(land), _MOST_OPTIONS)) for land in self.rows}
        if self.thermal:
            options = _left(options, lambda vias: self.are_apart(vias, (self.thermal, [])))
        return self._settled(options)

    def _options(self, land: BodyLand) -> Iterator[Vias]:
        """Yield the vias that a pad might have if it were the only one, the cheapest first."""
        return (vias for vias in _choices(land, self.limits) if self.takes(land, vias))

    def _settled(self, options: Mapping[BodyLand, list[Vias]]) -> dict[str, Vias] | None:
        """Return vias for pads, that of fewest options first, each the cheapest that leaves others room."""
        if not options:
            return {}
        land = min(options, key=lambda land: len(options[land]))
        rest = {other: some for other, some in options.items() if other is not land}
        for vias in options[land]:
            self.tried += 1
            if self.tried > _MOST_TRIED:
                return None
            left = _left(rest, partial(self.are_apart, vias))
            others = self._settled(left) if all(left.values()) else None
            if others is not None:
                return {land.pin: vias, **others}
        return None

    def are_apart(self, vias: Vias, stands: Vias) -> bool:
        """True when vias keep their pitch from others, and no slit is left between the copper of the two."""
        near = any(math.dist(axis, other) < self.limits.pitch for axis in vias[0] for other in stands[0])
        return not near and all(self._is_whole(box, other) for box in vias[1] for other in stands[1])

    def takes(self, land: BodyLand, vias: Vias) -> bool:
        """True where vias of a pad, with their copper, may stand beside the part's pads."""
        clear = max(self.limits.gap, CLEAR)
        if not all(clear_of(box, other, clear) for box in vias[1] for other in self.signals):
            return False
        lands = [other.box for other in self.body.lands if other.net == GROUND and other is not land]
        whole = all(self._is_whole(box, other) for box in vias[1] for other in lands)
        return whole and all(self._takes_via(land, axis) for axis in vias[0])

    def _is_whole(self, box: Box, other: Box) -> bool:
        """True unless a slit too narrow for etching would be left between two pieces of ground copper."""
        return not clear_of(box, other, 1) or clear_of(box, other, self.limits.gap)

    def _takes_via(self, land: BodyLand, axis: Point) -> bool:
        """True where one via may stand: apart from others, off all pads' openings, nearest to its own pad."""
        limits, own = self.limits, _distance(land.box, axis)
        off = limits.land / 2 + limits.expansion + BESIDE_OPENING - 1
        others = [other for other in self.body.lands if other is not land and other.has_copper]
        if own < off or any(self._is_at(other, axis, own, off) for other in others):
            return False
        wall = limits.drill / 2 + max(limits.pitch - limits.drill, limits.hole)
        if any(math.dist(axis, (h.x, h.y)) < h.diameter / 2 + wall for h in self.body.holes):
            return False
        cutout = self.body.cutout
        return cutout is None or _distance(cutout, axis) >= limits.land / 2 + limits.edge

    def _is_at(self, other: BodyLand, axis: Point, own: float, off: float) -> bool:
        """True where a via would count as another ground pad's, or lie in a pad's opening."""
        away = _distance(other.box, axis)
        return away < off or (other.net == GROUND and away <= own)


def _left(
    options: Mapping[BodyLand, list[Vias]], suits: Callable[[Vias], bool]
) -> dict[BodyLand, list[Vias]]:
    """Return the options that suit, by pad."""
    return {land: [vias for vias in some if suits(vias)] for land, some in options.items()}


def fit_ground_vias(body: PartBody, widths: Mapping[str, int], limits: Limits) -> PartBody:
    """Return a body whose ground vias stand clear of its signal leads.

    Args:
        body: The part with the rows it has when nothing is in their way.
        widths: By net, how wide what leaves a lead is [nm]; the way of a lead is kept free so wide, from just
            beyond the row of leads, or from a via's land farther on, or, where neither leaves room, only as
            wide as the lead.
        limits: The rules' distances.
    """
    room = max(limits.gap, CLEAR) + OVERLAP
    past = limits.expansion + BESIDE_OPENING + limits.land + room
    if _are_free(body, widths, room, limits):
        return body
    tries = (_fitted(body, widths, start, limits) for start in (room, past, _LANE))
    fits = next((found for found in tries if found is not None), None)
    fits = _as_far(body, limits) if fits is None else fits
    vias, grounds = list[Point](), list[Box]()
    for land in body.lands:
        axes, copper = fits[land.pin] if land.pin in fits else ground_copper(land, limits)
        vias += axes
        grounds += copper
    return replace(body, vias=tuple(vias), grounds=tuple(grounds))


def _as_far(body: PartBody, limits: Limits) -> dict[str, Vias]:
    """Return vias for as many ground pads as there is room for, by pin: fewer than asked, or none, for some.

    The checks tell which pads lack vias.
    """
    yard = _yard(body, {}, _LANE, limits)
    stands: Vias = (yard.thermal, [])
    out: dict[str, Vias] = {}
    for land in yard.rows:
        counts = range(limits.ground_vias, 0, -1)
        some = (_choices(land, replace(limits, ground_vias=count)) for count in counts)
        fits = (vias for vias in itertools.chain.from_iterable(some) if yard.takes(land, vias))
        found = next((vias for vias in fits if yard.are_apart(vias, stands)), ([], []))
        stands = [*stands[0], *found[0]], [*stands[1], *found[1]]
        out[land.pin] = found
    return out


def _are_free(body: PartBody, widths: Mapping[str, int], start: int, limits: Limits) -> bool:
    """True when nothing is in the way of the rows that a part's ground pads have."""
    found = [ground_copper(land, limits) for land in body.lands if land.ground is None]
    yard = _Yard(body, limits, list(_signal_copper(body, widths, start)), [])
    lands = [land for land in body.lands if land.ground is None]
    takes = all(yard.takes(land, vias) for land, vias in zip(lands, found, strict=True))
    return takes and all(yard.are_apart(a, b) for a, b in itertools.combinations(found, 2))


def _fitted(body: PartBody, widths: Mapping[str, int], start: int, limits: Limits) -> dict[str, Vias] | None:
    """Return the vias of each ground pad that has a row of them, by pin; None where there is no room."""
    return _yard(body, widths, start, limits).filled()


def _yard(body: PartBody, widths: Mapping[str, int], start: int, limits: Limits) -> _Yard:
    """Return what stands around a part's pads."""
    thermal = [ground_copper(land, limits)[0] for land in body.lands if land.ground == "vias"]
    signals = list(_signal_copper(body, widths, start))
    return _Yard(body, limits, signals, list(itertools.chain.from_iterable(thermal)))


def _signal_copper(body: PartBody, widths: Mapping[str, int], start: int) -> Iterator[Box]:
    """Yield the copper of a part's signal leads and the ways out of them, wide from a distance on [nm]."""
    for land in body.lands:
        if land.net != GROUND and land.has_copper:
            yield land.box
            lead, line = land.across // 2, max(land.across, widths.get(land.net, 0)) // 2
            yield box_to_world(land.outer, (0, -lead - _ROUNDING, _LANE, lead + _ROUNDING))
            yield box_to_world(land.outer, (start, -line - _ROUNDING, _LANE + start, line + _ROUNDING))
    for bond in body.bonds:
        yield from leg_boxes(bond.path, bond.width)


def _choices(land: BodyLand, limits: Limits) -> Iterator[Vias]:
    """Yield the ways to set a pad's vias, the cheapest first."""
    yield ground_copper(land, limits)
    shifts = range(0, _FARTHEST + 1, _STEP)
    options = sorted(
        (inward * _INWARD + column * _COLUMN + more + abs(shift), inward, column, more, shift)
        for inward, column, more in itertools.product((False, True), (False, True), _OUTWARD)
        for shift in {*shifts, *(-shift for shift in shifts)}
    )
    for _, inward, column, more, shift in options:
        yield _vias(land, limits, inward=inward, column=column, more=more, shift=shift)


def _vias(land: BodyLand, limits: Limits, *, inward: bool, column: bool, more: int, shift: int) -> Vias:
    """Return vias outside or inside a pad, in a column or a row across, moved out and to one side [nm]."""
    edge = land.inner if inward else land.outer
    frame = Pose(edge.x, edge.y, (edge.heading + 180.0) % 360.0) if inward else edge
    count, half = limits.ground_vias, limits.land // 2
    first = limits.expansion + half + BESIDE_OPENING + more
    steps = [k * limits.pitch for k in range(count)]
    middle = steps[-1] // 2
    local = [(first + s, shift) if column else (first, shift + s - middle) for s in steps]
    x0, x1 = local[0][0] - half, local[-1][0] + half
    y0, y1 = min(y for _, y in local) - half, max(y for _, y in local) + half
    stem = (-OVERLAP, -(land.across // 2), x0 + limits.land, land.across // 2)
    bar = (x0, min(y0, -(land.across // 2)), x1 if column else x0 + limits.land, max(y1, land.across // 2))
    boxes = [stem, (x0, y0, x1, y1)] if column and y0 <= 0 <= y1 else [stem, bar]
    return [to_world(frame, x, y) for x, y in local], [box_to_world(frame, box) for box in boxes]


def _distance(box: Box, point: Point) -> float:
    """Return how far a point lies from a box [nm]."""
    dx = max(box[0] - point[0], point[0] - box[2], 0)
    dy = max(box[1] - point[1], point[1] - box[3], 0)
    return math.hypot(dx, dy)
