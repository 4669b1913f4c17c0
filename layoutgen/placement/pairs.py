"""Boxes that stand for coupled pairs and radial stubs."""

from __future__ import annotations

import math

from layoutgen.placement.clearance import Kind, Obstacle
from layoutgen.placement.frame import Box, Pose, box_to_world
from layoutgen.placement.kit import Kit
from layoutgen.placement.state import edge_of_heading
from layoutgen.sizing import SizedRadial
from layoutgen.units import to_nm

__all__ = ["pair_obstacles", "sector_slices"]

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
