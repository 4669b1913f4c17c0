"""Stubs too short to be drawn: they would lie inside the copper that they leave, or short it to ground."""

from __future__ import annotations

import math

from layoutgen.circuit import End, EndKind
from layoutgen.errors import WrongInputError
from layoutgen.origin import Fault
from layoutgen.placement.budgets import LineLengths
from layoutgen.placement.model import GROUND, Model
from layoutgen.placement.tour import Hub, Tour
from layoutgen.sizing import SizedLine

__all__ = ["refuse_hidden_stubs"]

_MM = 1e6
_SLACK = 30_000  # [nm]: what the pour as drawn may change of widths, so that the angle named does for good


def refuse_hidden_stubs(model: Model, tour: Tour, lengths: LineLengths) -> None:
    """Refuse stubs that do not stick out of what they leave.

    An open stub must stick out by the least width of copper; one that ends on gnd by the land of its via, the
    pour's distance, and the gap that the pour keeps from what it leaves.

    Raises:
        WrongInputError: Stubs that are too short, each with the least angle or length that works.
    """
    faults = [
        _fault(model, line, length, least)
        for line in model.sized.lines.values()
        if not line.free and (end := _foot(model, line.name)) is not None
        for length in (lengths.by_bends(line.name)[0],)
        for least in (_host_reach(model, tour.hubs[model.net_of(end)], end) + _beyond(model, line.name),)
        if length < least - _SLACK
    ]
    if faults:
        raise WrongInputError(faults)


def _foot(model: Model, name: str) -> End | None:
    """Return the end by which a stub leaves its host; None for a line that is no stub."""
    on_nets = [end for end, net in model.ends[name] if net != GROUND]
    return on_nets[0] if len(on_nets) == 1 else None


def _beyond(model: Model, name: str) -> int:
    """Return how far a stub must stick out [nm]."""
    limits = model.limits
    if all(net != GROUND for _, net in model.ends[name]):
        return limits.neck
    pour = model.pour_gap(name) if model.has_ground else 0
    return limits.land // 2 + limits.gap + pour


def _host_reach(model: Model, hub: Hub, end: End) -> int:
    """Return how far the copper that a stub leaves reaches along it from its node [nm].

    Where the headings at the node come with a loop's drawing, only what reaches so far in any of them.
    """
    others = [other for other in model.circuit.nets[hub.net].ends if other != end]
    if hub.bank:
        return 0
    if len(others) == 1 and others[0].kind is EndKind.PAD:
        body = model.bodies[others[0].element]
        return max(0, -body.node_of(body.land_at(others[0])))
    halves = {other: model.widths.get(other.element, 0) // 2 for other in others}
    if hub.cluster is not None:
        return min(halves.values(), default=0)
    headings = dict(hub.canonical_headings())
    across = [half for other, half in halves.items() if (headings[other] - headings[end]) % 180.0 == 90.0]
    return max(across, default=0)


def _fault(model: Model, line: SizedLine, length: int, least: int) -> Fault:
    """Return the fault of a stub with what would do."""
    by_length = line.angle is None or line.length is not None
    key = f"lines.{line.name}.{'length' if by_length else 'angle'}"
    found = f"a stub whose end lies {length / _MM:.3f} mm from its node, inside or too near to what it leaves"
    if by_length:
        allowed = f"at least {math.ceil(least / _MM * 1e3) / 1e3:.3f} mm"
    else:
        angle = math.degrees((line.angle or 0.0) + line.beta * (least - length) * 1e-9)
        allowed = f"at least {math.ceil(angle * 100.0 + 1.0) / 100.0:.2f} deg"
    return Fault(model.file.location(key), key, found, allowed)
