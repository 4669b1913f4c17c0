"""Straight runs: what a line leads to when everything beyond it goes straight on.

A free line can be made as long, and can turn, so that the pinned part, the part of a given heading or the
port on a settled edge that stands at the end of lines of given length comes to lie where it must.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from layoutgen.circuit import End, EndKind
from layoutgen.placement.frame import Pose, ahead, to_world
from layoutgen.placement.kit import PinnedError
from layoutgen.placement.lay import Layer
from layoutgen.placement.state import Growth, Pending, nothing_laid
from layoutgen.placement.words import Route

__all__ = ["Run", "Runs"]


@dataclass(frozen=True, slots=True)
class Run:
    """What a straight run ends in, a part with a hint or a port, and where.

    ``pose`` is the part's, or the end of the port's copper and the heading there, seen from the line's far
    node by a traveller who stands at the origin heading east; ``lines`` counts the lines of given length
    between.
    """

    name: str
    is_port: bool
    pose: Pose
    lines: int

    def start_for(self, goal: Pose) -> Pose:
        """Return where the run must start, and heading where, so that it ends in a pose of the board."""
        start = Pose(0, 0, (goal.heading - self.pose.heading) % 360.0)
        x, y = to_world(start, self.pose.x, self.pose.y)
        return Pose(goal.x - x, goal.y - y, start.heading)


class _DryLayer(Layer):
    """Lays without regard to hints."""

    def _check_hint(self, growth: Growth, name: str, pose: Pose) -> None:
        """Let everything pass."""


@dataclass(slots=True)
class Runs:
    """Follows straight runs, each once."""

    layer: Layer
    _known: dict[End, Run | None] = field(default_factory=dict)

    def launch_length(self, port: str) -> int:
        """Return how much short of its port's place a line ends [nm]: on the pad of a launch."""
        return self.layer.kit.launch_length(port)

    def beyond(self, far: tuple[End, str] | None) -> Run | None:
        """Return what a line leads to from its far end; None when nothing there binds it.

        A further free line, a loop, a bank or a strip to a port takes up what is needed: the run binds not.
        """
        if far is None or far[1] not in self.layer.kit.tour.hubs:
            return None
        if far[0] not in self._known:
            self._known[far[0]] = self._followed(far[0], far[1])
        return self._known[far[0]]

    def _followed(self, end: End, net: str) -> Run | None:
        hub = self.layer.kit.tour.hubs[net]
        if hub.arrival != end or hub.bank or hub.cluster is not None:
            return None
        layer = _DryLayer(self.layer.kit)
        growth, lines = Growth(state=nothing_laid()), 0
        try:
            layer.arrive(growth, hub, Pose(0, 0, 0.0))
            while True:
                found = self._hinted(growth, lines)
                step = None if found is not None else self._straight_on(growth)
                if step is None:
                    return found
                growth.pending.remove(step)
                if step.end.kind is EndKind.PAD:
                    layer.pad_arm(growth, step, 0.0)
                    continue
                ended = self._along(layer, growth, step, lines)
                if ended is not None:
                    return ended
                lines += 1
        except PinnedError:
            return None

    def _hinted(self, growth: Growth, lines: int) -> Run | None:
        """Return the first part laid that has a place or heading of its own."""
        layout = self.layer.kit.model.file.layout
        hints = {} if layout is None else layout.hints
        name = next((name for name in growth.parts if name in hints), None)
        return None if name is None else Run(name, False, growth.parts[name], lines)

    def _straight_on(self, growth: Growth) -> Pending | None:
        """Return the one thing that waits to go straight on, of several the one on the straight path."""
        closers = self.layer.kit.tour.loops.closers
        waiting = [
            pending
            for pending in growth.pending
            if pending.turns == (0.0,) and pending.at.heading == 0.0 and pending.cluster is None
            if pending.end.element not in closers
        ]
        if len(waiting) > 1:
            spine = self.layer.kit.model.circuit.spine
            waiting = [pending for pending in waiting if pending.end.element in spine]
        return waiting[0] if len(waiting) == 1 else None

    def _along(self, layer: Layer, growth: Growth, step: Pending, lines: int) -> Run | None:
        """Lay a line of given length, or return where it ends when that is at a port.

        Raises:
            PinnedError: The run does not go on by a line of given length.
        """
        kit, name = self.layer.kit, step.end.element
        line = kit.model.sized.lines.get(name)
        if step.end.kind is not EndKind.LINE or line is None or line.free:
            raise PinnedError(name, "it takes any length")
        route = Route((), (kit.lengths.by_bends(name)[0],))
        port = kit.tour.port_at(kit.model.far_end(step.end))
        if port is not None:
            return Run(port, True, ahead(step.at, route.length), lines + 1)
        layer.line(growth, step.end, step.at, route)
        return None
