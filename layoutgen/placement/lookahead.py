"""Looking ahead: whether what leads to a port, or closes a loop, still has a way when something is laid."""

from __future__ import annotations

import itertools
from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, field, replace
from itertools import islice

from layoutgen.circuit import End
from layoutgen.placement.clearance import Kind, Obstacles
from layoutgen.placement.frame import Pose, box_around
from layoutgen.placement.kit import PinnedError
from layoutgen.placement.neighbours import Neighbours
from layoutgen.placement.state import Growth, Pending, State
from layoutgen.placement.ways import Way, Ways

__all__ = ["LookAhead"]

_NEARBY = 40_000_000  # [nm]: farther away nothing is looked at again
_MOST_WAYS = 40  # ways tried before a candidate is taken as shut in
_STRIDE = 7  # of the ways with the same turns to the same edge, one of so many is tried: they differ in legs

Spot = tuple[End, Pose]


@dataclass(slots=True)
class LookAhead:
    """Finds ways out; remembers, by spot, the last one that was clear, to be tried first.

    ``port_order`` returns what is wrong with the order of ports in a candidate, or None.
    """

    ways: Ways
    neighbours: Neighbours
    margins: Mapping[Kind, int]
    port_order: Callable[[Growth], str | None]
    _witness: dict[Spot, Way] = field(default_factory=dict)

    def shut_in(self, grown: State, growth: Growth) -> tuple[str | None, dict[Spot, Growth]]:
        """Return what would have no way with a candidate laid, or None and the ways out that were found.

        Args:
            grown: The state with the candidate laid.
            growth: The candidate; its state holds the ways out that were clear before.
        """
        escapes: dict[Spot, Growth] = {}
        added = Obstacles.empty().plus(growth.obstacles)
        for pending in self._nearby(grown, growth):
            mate = self.ways.mate(pending, grown)
            if mate is None and not self.ways.tour.ends_in_port(pending.end):
                continue
            spot = pending.end, pending.at
            found = self._still_open(grown, growth, added, pending, mate)
            found = found or self._way(grown, pending, self._leaves_ports_open if mate else None)
            if found is None:
                aim = "close its loop" if mate else "its edge"
                return f"{pending.end.element} would have no way to {aim}", {}
            escapes[spot] = found
        return None, escapes

    def _nearby(self, grown: State, growth: Growth) -> Iterator[Pending]:
        """Yield the pending things that something new may shut in: its own, and those not far from it."""
        boxes = [item.box for item in growth.obstacles if not item.corridor]
        if not boxes:
            return
        x0, y0, x1, y1 = box_around([corner for box in boxes for corner in (box[:2], box[2:])])
        for pending in grown.pending:
            near_x = x0 - _NEARBY <= pending.at.x <= x1 + _NEARBY
            if near_x and y0 - _NEARBY <= pending.at.y <= y1 + _NEARBY:
                yield pending

    def _still_open(
        self, grown: State, growth: Growth, added: Obstacles, pending: Pending, mate: Pending | None
    ) -> Growth | None:
        """Return the way out that was clear before, if the candidate leaves it clear.

        Only what the candidate adds is looked at: all else was there when the way was found.
        """
        before = growth.state.escapes.get((pending.end, pending.at))
        if before is None or before.state.bounds != grown.bounds:
            return None
        if any(p is not None and self.ways.model.net_of(p.end) in growth.used for p in (pending, mate)):
            return None
        way = replace(before, state=grown)
        if not way.bounds.holds(way.extent(self.margins)) or self.port_order(way) is not None:
            return None
        return None if self.neighbours.between(growth, added, way) else way

    def _way(
        self, state: State, pending: Pending, suits: Callable[[State, Growth], bool] | None = None
    ) -> Growth | None:
        """Return a way of laying a pending thing that is clear, and suits, None where there is none."""
        base, spot = self.ways.without(state, pending), (pending.end, pending.at)
        before = [self._witness[spot]] if spot in self._witness else []
        some = islice(_thinned(self.ways.of(pending, state)), _MOST_WAYS)
        for way in itertools.chain(before, some):
            trial = Growth(state=base, bounds=state.bounds)
            try:
                way.lay(trial)
            except PinnedError:
                continue
            if self._is_clear(trial) and (suits is None or suits(base, trial)):
                self._witness[spot] = way
                return trial
        return None

    def _is_clear(self, trial: Growth) -> bool:
        """True when a trial lies on the board, its ports in order, and clear of all else."""
        inside = trial.bounds.holds(trial.extent(self.margins))
        return inside and self.port_order(trial) is None and self.neighbours.conflict(trial) is None

    def _leaves_ports_open(self, base: State, trial: Growth) -> bool:
        """True when a line that closes a loop leaves a way to their edges for ports beside it."""
        grown, model = trial.applied(trial.extent(self.margins), 0.0), self.ways.model
        nets = set(model.owner_nets[next(iter(trial.lines))])
        near = [p for p in base.pending if model.net_of(p.end) in nets]
        return all(self._way(grown, p) is not None for p in near if self.ways.tour.ends_in_port(p.end))


def _thinned(ways: Iterable[Way]) -> Iterator[Way]:
    """Yield the first of the ways of each shape, and some of the others."""
    seen: dict[object, int] = {}
    for way in ways:
        count = seen[way.choice.shape] = seen.get(way.choice.shape, -1) + 1
        if count % _STRIDE == 0:
            yield way
