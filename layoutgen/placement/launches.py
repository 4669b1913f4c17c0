"""Launches: the pads of an edge connector, whose signal pad lies on the net of a port.

A part is taken as a port's launch when it has one signal net, that of the port, and ground pads on both sides
of its signal pad. It is no arm of the net then: the end of its pad away from the board is the port, as far
from the profile as any port's copper, and the pad is a strip as wide as itself, at whose other end the line
begins. The board's edge is settled where the launch is laid.
"""

from __future__ import annotations

from dataclasses import dataclass

from layoutgen.circuit.queries import two_nets
from layoutgen.placement.bodies import BodyLand, PartBody
from layoutgen.placement.frame import Pose, unit
from layoutgen.placement.model import GROUND, Model
from layoutgen.placement.state import EDGES, Growth
from layoutgen.reading import CircuitFile, Part

__all__ = ["Launch", "is_launch", "launches_of", "settle_at_edge"]


@dataclass(frozen=True, slots=True)
class Launch:
    """A port's launch: the part, and the pad that the port's copper runs over."""

    body: PartBody
    land: BodyLand

    def pose(self, at: Pose) -> Pose:
        """Return the part's pose when a traveller who leaves the board meets the near edge of its pad."""
        return self.body.entered_by(self.land, at, edge="outer")


def is_launch(file: CircuitFile, part: Part, body: PartBody) -> bool:
    """True for an edge connector at a port: one signal pad, on the port's net, ground to both sides of it."""
    signals = [land for land in body.lands if land.net != GROUND and land.has_copper]
    if part.pins is None or two_nets(part) is not None or len({land.net for land in signals}) != 1:
        return False
    if not any(port.net == signals[0].net for port in file.ports.values()):
        return False
    grounds = [body.seen_ahead(signals[0], land.box) for land in body.lands if land.net == GROUND]
    sides = {box[1] + box[3] > 0 for box in grounds if box[2] > -signals[0].along}
    return len(signals) == 1 and len(sides) == 2


def launches_of(model: Model) -> dict[str, Launch]:
    """Return the launches of a circuit's ports: parts of which the walk knows no signal pin."""
    out = {}
    for name, body in model.bodies.items():
        pins = model.file.parts[name].pins
        signal = next((land for land in body.lands if land.net != GROUND and land.has_copper), None)
        if pins is None or signal is None or any(net != GROUND for net in pins.values()):
            continue
        port = next(port for port, record in model.file.ports.items() if record.net == signal.net)
        out[port] = Launch(body, signal)
    return out


def settle_at_edge(growth: Growth, edge: str, first: int, profile: int) -> None:
    """Let what was laid from an obstacle's number on stand at an edge, however near or beyond it.

    Args:
        growth: The candidate.
        edge: The board's edge.
        first: Number of the first obstacle of the launch.
        profile: Coordinate of the profile [nm].
    """
    ux, uy = unit(EDGES[edge])
    for k in range(first, len(growth.obstacles)):
        item = growth.obstacles[k]
        reach = (item.box[2] if ux > 0 else item.box[0]) if ux else (item.box[3] if uy > 0 else item.box[1])
        room = round((profile - reach) * (ux + uy))
        growth.obstacles[k] = item._replace(at_edges=(edge,), inset=room)
