"""Laying a loop cluster as a whole: lines and parts where a solution puts them, what leaves it pending."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from layoutgen.circuit import End, EndKind
from layoutgen.geometry import Point
from layoutgen.placement.bodies import OVERLAP
from layoutgen.placement.cluster import ClusterSolver, Solution
from layoutgen.placement.frame import Pose, ahead, unit
from layoutgen.placement.kit import PinnedError
from layoutgen.placement.lay import Layer
from layoutgen.placement.state import Growth, Pending
from layoutgen.placement.tour import Headings
from layoutgen.placement.words import Route

__all__ = ["Pinning", "lay_cluster"]

_BEND_WEIGHT = 3.0  # what a bend inside a loop counts for


@dataclass(frozen=True, slots=True)
class Pinning:
    """How a solution's frame lies on the board: mirrored (-1) or not (1), then turned [deg], then moved."""

    mirror: int
    turn: float
    origin: Point

    @classmethod
    def of(cls, solver: ClusterSolver, solution: Solution, at: Pose, mirror: int) -> Pinning:
        """Return the pinning that puts the entry at a pose, the arrival's end pointing back along it."""
        entry = solver.entry
        turn = (at.heading + 180.0 - mirror * solution.plan.outer[entry][0]) % 360.0
        bare = cls(mirror, turn, (0, 0)).point(solution.shape.hubs[entry])
        return cls(mirror, turn, (at.x - bare[0], at.y - bare[1]))

    def heading(self, heading: float) -> float:
        """Return a heading of the plan's frame on the board [deg]."""
        return (self.mirror * heading + self.turn) % 360.0

    def point(self, point: Point) -> Point:
        """Return a point of the plan's frame on the board [nm]."""
        x, y = point[0], self.mirror * point[1]
        ux, uy = unit(self.turn)
        return round(x * ux - y * uy) + self.origin[0], round(x * uy + y * ux) + self.origin[1]

    def pose(self, point: Point, heading: float) -> Pose:
        """Return a pose of the plan's frame on the board."""
        x, y = self.point(point)
        return Pose(x, y, self.heading(heading))


def lay_cluster(
    growth: Growth, layer: Layer, solver: ClusterSolver, solution: Solution, at: Pose, mirror: int
) -> None:
    """Lay a solution of a cluster entered at a pose.

    Args:
        growth: The candidate.
        layer: Lays single things.
        solver: The cluster.
        solution: Drawing and lengths.
        at: Node at which it is entered, heading as the traveller that arrives.
        mirror: -1 to lay the mirror image, else 1.
    """
    pinning = Pinning.of(solver, solution, at, mirror)
    growth.roles.update(zip(solver.nets, solution.roles, strict=True))
    for k, piece in enumerate(solver.scheme.pieces):
        first, second = solution.plan.drawing.headings[k]
        start = pinning.pose(solution.shape.hubs[piece.a], first)
        if piece.is_line:
            word = tuple(mirror * turn for turn in solution.plan.drawing.words[k])
            _check_leave(layer, solver.ends[k][0], start.heading)
            layer.lines.alone(
                growth, solver.ends[k][0], start, Route(word, solution.shape.legs[k]), weight=_BEND_WEIGHT
            )
        else:
            growth.use(solver.nets[piece.a], start.heading)
            _part(growth, layer, solver, solution, k, start)
        growth.use(solver.nets[piece.b], pinning.heading(second))
    for hub in range(len(solver.nets)):
        _hub(growth, layer, solver, solution, pinning, hub)


def _check_leave(layer: Layer, end: End, heading: float) -> None:
    """Check that a line keeps its ``leave`` hint."""
    if not layer.kit.leaves_as_hinted(end, heading):
        raise PinnedError(end.element, "it cannot leave as its hint asks and close its loop")


def _part(
    growth: Growth, layer: Layer, solver: ClusterSolver, solution: Solution, k: int, start: Pose
) -> None:
    """Lay a part of a loop."""
    end = solver.ends[k][0]
    layer.part_alone(growth, end, solver.demands.part_pose(k, start, solution.roles, solution.shape.more[k]))


def _hub(
    growth: Growth, layer: Layer, solver: ClusterSolver, solution: Solution, pinning: Pinning, hub: int
) -> None:
    """Join the pads at a hub to its node, and leave pending what leaves the cluster there."""
    role, net = solution.roles[hub], solver.nets[hub]
    point = solution.shape.hubs[hub]
    for end, heading in role:
        if end.kind is EndKind.PAD and end not in solver.outer[hub]:
            k = next(i for i, ends in enumerate(solver.ends) if end in ends)
            _strip_to_pad(
                growth, layer, solver, role, (end, pinning.pose(point, heading)), solution.shape.more[k]
            )
    arrival = layer.kit.tour.hubs[net].arrival
    for end, heading in zip(solver.outer[hub], solution.plan.outer[hub], strict=True):
        if end != arrival:
            offset = max(0, solver.demands.offset(end, role)) if end.kind is EndKind.PAD else 0
            growth.pending.append(Pending(end, pinning.pose(point, heading), (0.0,), offset))


def _strip_to_pad(
    growth: Growth, layer: Layer, solver: ClusterSolver, role: Headings, pad: tuple[End, Pose], more: int
) -> None:
    """Lay a strip from a node to a pad's edge, unless a line runs through between the two."""
    end, node = pad
    play = (more + 1) // 2
    offset = solver.demands.offset(end, role) + play
    if offset <= 0 or (_is_crossed(role, end) and not more):
        return
    net, kit = layer.kit.net(end), layer.kit
    width = kit.across(end) if kit.is_slit(play) else kit.joint_width(net, end, _opposite(role, end))
    layer.kit.strip(growth, net, width, (node.point, ahead(node, offset + OVERLAP).point))


def _opposite(role: Headings, pad: End) -> End | None:
    """Return what leaves a node opposite to a pad."""
    own = next(heading for end, heading in role if end == pad)
    return next((end for end, heading in role if (heading - own) % 360.0 == 180.0), None)


def _is_crossed(role: Headings, pad: End) -> bool:
    """True when lines leave a node on both sides of a pad's heading."""
    own = next(heading for end, heading in role if end == pad)
    sides: Sequence[float] = [
        (heading - own) % 360.0 for end, heading in role if end.kind in (EndKind.LINE, EndKind.COUPLED)
    ]
    return 90.0 in sides and 270.0 in sides
