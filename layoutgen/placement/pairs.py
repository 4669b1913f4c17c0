"""Boxes that stand for coupled pairs and radial stubs."""

from __future__ import annotations

import math

from layoutgen.circuit import End
from layoutgen.placement.bodies import OVERLAP
from layoutgen.placement.clearance import Kind, Obstacle
from layoutgen.placement.frame import Box, Pose, box_to_world, to_world
from layoutgen.placement.kit import Kit
from layoutgen.placement.model import GROUND, Model
from layoutgen.placement.state import Growth, LaidPair, State, edge_of_heading
from layoutgen.sizing import SizedRadial
from layoutgen.units import to_nm

__all__ = ["ground_strip_end", "is_folded_back", "pair_obstacles", "sector_slices", "side_away"]

_SLICES = 8  # boxes that stand for a radial stub's sector


def pair_obstacles(kit: Kit, name: str, pose: Pose, offset: int, length: int) -> list[Obstacle]:
    """Return the boxes of both strips [nm]; where a strip ends in a port it may run up to the edge.

    Args:
        kit: The circuit.
        name: The pair.
        pose: Where the first strip begins, heading along it.
        offset: How far to the left the second strip lies [nm], negative for the right.
        length: Centre-line length [nm].
    """
    out = []
    width = to_nm(kit.model.sized.pairs[name].width)
    ends = {end.index: net for end, net in kit.model.ends[name]}
    for line, sideways in ((0, 0), (1, offset)):
        box = box_to_world(pose, (0, sideways - width // 2, length, sideways + width // 2))
        edges = []
        for index, turn in ((2 * line, 180.0), (2 * line + 1, 0.0)):
            port = kit.carries_port(ends.get(index, ""))
            edge = edge_of_heading(pose.heading + turn)
            if port is not None and edge is not None:
                edges.append((edge, kit.inset(port)))
        inset = min((value for _, value in edges), default=0)
        at_edges = tuple(edge for edge, _ in edges)
        nets = frozenset(net for index, net in ends.items() if index // 2 == line)
        out.append(Obstacle(box, Kind.LINE, name, at_edges=at_edges, inset=inset, nets=nets))
    return out


def ground_strip_end(kit: Kit, growth: Growth, end: End, at: Pose, outward: int) -> None:
    """Put a row of vias across the end of a pair's strip that lies on gnd, and the copper that joins them.

    The axes lie in the plane of the strip's end, as its length has it. The row is moved away from the other
    strip, and from what that leads to, as far as copper and holes must, and so far that no land reaches
    beyond the edge of a strip that is wider.

    Args:
        kit: The circuit.
        growth: The candidate.
        end: The strip's end.
        at: Its point, heading out of the pair.
        outward: 1 when the other strip lies to the right of that heading, -1 to the left.
    """
    limits, width = kit.model.limits, kit.model.widths[end.element]
    room, edge = _room_inward(kit, end)
    fit = 1 + 2 * max(0, (width - limits.land) // 2 // limits.pitch)
    count = max(limits.ground_vias, fit)
    first = max(-(count - 1) * limits.pitch // 2, -room, min(0, (limits.land - width) // 2))
    last = first + (count - 1) * limits.pitch
    spots = [(0, outward * y) for y in range(first, last + 1, limits.pitch)]
    growth.line_vias += [(end.element, to_world(at, x, y)) for x, y in spots]
    half = limits.land // 2
    inner, outer = min(first - half, max(-(width // 2), -edge)), max(width // 2, last + half)
    box = _strip_box(at, outward, (-half, inner, half, outer))
    growth.line_grounds.append((end.element, box))
    growth.obstacles.append(Obstacle(box, Kind.GROUND, end.element))
    if inner > -(width // 2):  # joined beside the strip, short of its end, where no line comes near
        bridge = _strip_box(at, outward, (-half, -(width // 2), 0, inner + OVERLAP))
        growth.line_grounds.append((end.element, bridge))


def _strip_box(at: Pose, outward: int, box: Box) -> Box:
    """Return a box told along a strip's end and outward from its axis [nm] on the board."""
    low, high = sorted((outward * box[1], outward * box[3]))
    return box_to_world(at, (box[0], low, box[2], high))


def _room_inward(kit: Kit, end: End) -> tuple[int, int]:
    """Return how far towards the other strip a via's axis, and copper, on gnd may lie [nm]; from the axis.

    A via of the other strip's own end on gnd keeps the pitch; other copper that begins there keeps the gap.
    """
    limits, pair = kit.model.limits, kit.model.sized.pairs[end.element]
    pitch = to_nm(pair.width) + to_nm(pair.gap)
    net = kit.model.file.coupled[end.element].nets[end.index ^ 2]
    if net == GROUND:
        return (pitch - limits.pitch) // 2, to_nm(pair.width) // 2
    met = kit.model.circuit.nets[net].ends if net in kit.model.circuit.nets else ()
    widest = max([to_nm(pair.width), *(kit.across(other) for other in met)])
    edge = pitch - math.ceil(widest / 2) - limits.gap
    return edge - limits.land // 2, edge


def side_away(model: Model, state: State, end: End, start: Pose) -> int | None:
    """Return on which side a pair's other strip lies away from that of the pair it follows directly.

    Pairs in a row, each joined to the next by one strip in line, are a staircase: an end folded back would
    lie beside the open end of the pair before, and couple to it (common practice, no source).

    Args:
        model: The circuit.
        state: What is laid.
        end: The end by which the pair is entered.
        start: Its node and heading into the pair.

    Returns:
        1 for the left of the traveller, -1 for the right, None where no pair comes just before, in line.
    """
    net = model.net_of(end)
    for met in model.circuit.nets[net].ends if net in model.circuit.nets else ():
        laid = state.pairs.get(met.element)
        if laid is None or met.element == end.element or not _is_joined_once(model, met.element, end.element):
            continue
        side = laid.side if met.index < 2 else -laid.side
        out = (laid.pose.heading + (0.0 if met.index in (1, 3) else 180.0)) % 360.0
        if out == start.heading % 360.0:
            return -side if met.index in (1, 3) else side
    return None


def _is_joined_once(model: Model, one: str, two: str) -> bool:
    """True for two pairs that share a single net: both strips of a coupler's sections go on side by side."""
    return len(model.owner_nets[one] & model.owner_nets[two]) == 1


def is_folded_back(a: tuple[LaidPair, bool], b: tuple[LaidPair, bool]) -> bool:
    """Return whether strips of two pairs lie on one side of what joins the pairs: no staircase.

    Args:
        a: A pair, and whether its strip is the second.
        b: The other pair, and the same.
    """
    ways = [
        (pair.pose.heading + 90.0 * pair.side * (1 if is_second else -1)) % 360.0
        for pair, is_second in (a, b)
    ]
    return (ways[0] - ways[1]) % 360.0 != 180.0


def sector_slices(stub: SizedRadial) -> list[Box]:
    """Return boxes, in the frame of a radial stub's apex, that cover its sector [nm]."""
    inner, outer = to_nm(stub.inner_radius), to_nm(stub.outer_radius)
    half = min(stub.sector, math.pi) / 2.0
    near = round(inner * math.cos(half))
    out = []
    for k in range(_SLICES):
        x0 = near + (outer - near) * k // _SLICES
        x1 = near + (outer - near) * (k + 1) // _SLICES
        reach = outer if math.cos(half) < 1e-9 else min(outer, round(x1 * math.tan(half)) + 1)
        out.append((x0, -reach, x1, reach))
    return out
