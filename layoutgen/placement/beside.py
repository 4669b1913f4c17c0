"""Parts in parallel: those between the same two nets stand side by side, joined by strips across."""

from __future__ import annotations

from layoutgen.circuit import End
from layoutgen.placement.bodies import PartBody
from layoutgen.placement.frame import Box, Pose, ahead, box_to_world, to_world
from layoutgen.placement.kit import Kit
from layoutgen.placement.state import Growth

__all__ = ["lay_beside"]


def lay_beside(kit: Kit, growth: Growth, body: PartBody, pose: Pose) -> None:
    """Lay the parts that stand beside one just laid, alternately to both sides, courtyards touching."""
    names = kit.tour.loops.beside.get(body.name, ())
    ends = {net: end for end, net in kit.model.ends[body.name]}
    across = (body.lands[0].heading + 90.0) % 360.0
    reach = {1: _lateral(body, across)[1], -1: -_lateral(body, across)[0]}
    for k, name in enumerate(names):
        side = growth.bank_side if k % 2 == 0 else -growth.bank_side
        other = kit.model.bodies[name]
        turned = _turned(kit, body, other, pose)
        low, high = _lateral(other, across + pose.heading - turned)
        near, far = (-low, high) if side > 0 else (high, -low)
        axis = Pose(pose.x, pose.y, (pose.heading + across) % 360.0)
        middle = ahead(axis, side * (reach[side] + near))
        at = Pose(middle.x, middle.y, turned)
        reach[side] += near + far
        growth.parts[name] = at
        growth.obstacles += kit.part_obstacles(other, at)
        for end, net in kit.model.ends[name]:
            _join(kit, growth, net, (body, pose, ends[net]), (other, at, end))


def _turned(kit: Kit, body: PartBody, other: PartBody, pose: Pose) -> float:
    """Return the heading [deg] that puts another part's pads beside those of the same net."""
    net = body.lands[0].net
    land = next(land for land in other.lands if land.net == net)
    return (pose.heading + body.lands[0].heading - land.heading) % 360.0


def _lateral(body: PartBody, across: float) -> tuple[int, int]:
    """Return how far the courtyard reaches, low and high [nm], along a heading of the part's frame."""
    box: Box = box_to_world(Pose(0, 0, -across % 360.0), body.courtyard)
    return box[0], box[2]


def _join(
    kit: Kit,
    growth: Growth,
    net: str,
    first: tuple[PartBody, Pose, End],
    second: tuple[PartBody, Pose, End],
) -> None:
    """Join two pads of a net by a strip across, as wide as the shorter pad is long."""
    lands = [body.land_at(end) for body, _, end in (first, second)]
    (a, pose, _), (_, at, _) = first, second
    start = to_world(pose, lands[0].x, lands[0].y)
    stop = to_world(at, lands[1].x, lands[1].y)
    upright = a.lands[0].heading + pose.heading
    corner = (start[0], stop[1]) if upright % 180.0 == 0.0 else (stop[0], start[1])
    width = min(land.along for land in lands)
    points = (start, stop) if corner == stop else (start, corner, stop)
    kit.strip(growth, net, width, points)
