"""Leads that turn away: what hangs on a lead beside another signal lead goes off to the other side.

Straight on, a bank or a junction with shunt parts would stand beside the line of the neighbouring lead. Only
looked at when all went straight on and found no place.
"""

from __future__ import annotations

from layoutgen.circuit import End, EndKind
from layoutgen.placement.bodies import OVERLAP, BodyLand, PartBody
from layoutgen.placement.clearance import Kind
from layoutgen.placement.frame import Pose, ahead
from layoutgen.placement.kit import Kit
from layoutgen.placement.model import GROUND
from layoutgen.placement.state import Growth
from layoutgen.placement.tour import Hub

__all__ = ["sides_of_leads", "turn_away"]

_SPACE = 200_000  # [nm] between a part and what stands beside it; common practice, no source


def turn_away(kit: Kit, growth: Growth, hub: Hub, outer: Pose) -> Pose | None:
    """Lay the strip of a lead that turns away from its neighbour; return the node of what hangs on it.

    Args:
        kit: The circuit.
        growth: The candidate.
        hub: The net that the lead leads to, with a bank or several arms.
        outer: Middle of the pad's outer edge, heading out.

    Returns:
        The node with the heading of a traveller who arrives there; None for a lead that goes straight on.
    """
    pad = hub.arrival
    assert pad is not None  # the lead itself
    body = kit.model.bodies[pad.element]
    land = body.land_at(pad)
    near = sides_of_leads(kit, body, land)
    if not kit.turns_leads or len(near) != 1:
        return None
    side = -next(iter(near))
    width = min(kit.hub_strip_width(hub), land.across)
    corner = ahead(outer, kit.room_ahead(pad, (), ()) or _SPACE + width // 2)
    node = ahead(corner.turned(90.0 * side), _reach(kit, hub, body, land, side))
    back = ahead(outer, -land.along // 2 if body.is_joined(land) else -OVERLAP)
    kit.strip(growth, hub.net, width, (back.point, corner.point, node.point), Kind.LEAD)
    return node


def sides_of_leads(kit: Kit, body: PartBody, land: BodyLand) -> set[int]:
    """Return to which sides of a lead, 1 left and -1 right, another signal lead is near in the same row."""
    near = 2 * kit.model.limits.near
    sides = set()
    for other in body.lands:
        box = body.seen_ahead(land, other.box)
        flush = other.has_copper and other.heading == land.heading and abs(box[2]) < near
        middle = (box[1] + box[3]) // 2
        if flush and other.net not in (GROUND, land.net) and abs(middle) < near:
            sides.add(1 if middle > 0 else -1)
    return sides


def _reach(kit: Kit, hub: Hub, body: PartBody, land: BodyLand, side: int) -> int:
    """Return how far from the lead's axis the first thing on its net stands [nm], clear of the part."""
    shunts: list[End] = [*hub.bank[:1]]
    shunts += [arm.end for arm in hub.arms if arm.end.kind is EndKind.PAD]
    half = 0
    for end in shunts:
        other = kit.model.bodies[end.element]
        low, high = kit.span(other, other.land_at(end), 90.0)
        half = max(half, -low, high)
    across = max((kit.across(arm.end) // 2 for arm in hub.arms), default=0)
    _, low, _, high = body.seen_ahead(land, body.courtyard)
    return max(land.across, high if side > 0 else -low) + max(half, across) + _SPACE
