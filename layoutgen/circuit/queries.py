"""Small questions about the schematic that later stages ask: an element's nets, its other end, its role."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from layoutgen.circuit.records import End, EndKind, Net
from layoutgen.reading import CircuitFile, Line, Part

__all__ = [
    "GROUND",
    "OPEN",
    "collect_ends",
    "element_key",
    "elements",
    "ends_of",
    "is_device_pin",
    "is_shunt",
    "is_supply",
    "lines_at",
    "net_of",
    "other_end",
    "two_nets",
]

GROUND = "gnd"
OPEN = "open"
_TWO_PAD_KINDS = ("resistor", "capacitor", "inductor")
_TABLES = ("ports", "lines", "coupled", "parts")


def ends_of(file: CircuitFile, element: str) -> tuple[tuple[End, str], ...]:
    """Return an element's ends with their nets, in the order of its ``nets`` or ``pins``.

    Open ends (a line's missing second net, ``open`` of a coupled pair) are left out.

    Raises:
        KeyError: No element has that name.
    """
    if element in file.ports:
        return ((End(element, 0, EndKind.PORT), file.ports[element].net),)
    if element in file.lines:
        return tuple((End(element, i, EndKind.LINE), net) for i, net in enumerate(file.lines[element].nets))
    if element in file.coupled:
        nets = file.coupled[element].nets
        return tuple((End(element, i, EndKind.COUPLED), net) for i, net in enumerate(nets) if net != OPEN)
    part = file.parts[element]
    if part.nets is not None:
        return tuple((End(element, i, EndKind.PAD), net) for i, net in enumerate(part.nets))
    pins = part.pins or {}
    return tuple((End(element, i, EndKind.PAD, pin), net) for i, (pin, net) in enumerate(pins.items()))


def elements(file: CircuitFile) -> tuple[str, ...]:
    """Return all element names: ports, lines, coupled pairs, parts, each in file order."""
    return (*file.ports, *file.lines, *file.coupled, *file.parts)


def collect_ends(file: CircuitFile) -> dict[str, tuple[End, ...]]:
    """Return every net's ends: ports, lines, coupled pairs, parts, each in file order; ``gnd`` too."""
    found: dict[str, list[End]] = {}
    for name in elements(file):
        for end, net in ends_of(file, name):
            found.setdefault(net, []).append(end)
    return {net: tuple(ends) for net, ends in found.items()}


def net_of(file: CircuitFile, end: End) -> str:
    """Return the net that an end lies on.

    Raises:
        KeyError: The element has no such end.
    """
    for candidate, net in ends_of(file, end.element):
        if candidate.index == end.index:
            return net
    raise KeyError(f"{end.element} has no end {end.index}")


def other_end(file: CircuitFile, end: End) -> End | None:
    """Return the far end through a line, a strip of a coupled pair or a two-pad part.

    None for ports, for parts that are not two-pad parts, and where the far end is open.
    """
    partner = end.index ^ 1
    if end.kind is EndKind.PORT or is_device_pin(file, end):
        return None
    return next((other for other, _ in ends_of(file, end.element) if other.index == partner), None)


def lines_at(net: Net) -> tuple[End, ...]:
    """Return the ends of lines and coupled pairs in a net, in file order."""
    return tuple(end for end in net.ends if end.kind in (EndKind.LINE, EndKind.COUPLED))


def two_nets(part: Part) -> tuple[str, str] | None:
    """Return the nets of a two-pad part, None for others.

    Two-pad are parts written with ``nets``, and resistors, capacitors and inductors written with two pins.
    """
    if part.nets is not None:
        return part.nets
    pins = tuple((part.pins or {}).values())
    return (pins[0], pins[1]) if part.kind in _TWO_PAD_KINDS and len(pins) == 2 else None


def is_device_pin(file: CircuitFile, end: End) -> bool:
    """Tell whether an end is a pin of a device: of a part that is no two-pad part."""
    return end.kind is EndKind.PAD and two_nets(file.parts[end.element]) is None


def is_shunt(part: Part) -> bool:
    """Tell whether a two-pad part has one end on ``gnd``."""
    nets = two_nets(part)
    return nets is not None and GROUND in nets


def is_supply(line: Line) -> bool:
    """Tell whether a line may be a DC supply: nothing of RF is asked of it, no impedance, angle or shape.

    A width may be given when the length is ``free``; a line with width and length is taken as RF.
    """
    plain = line.impedance is None and line.angle is None and line.shape is None
    loose = line.width is None or line.length == "free"
    return plain and loose and line.kind == "microstrip"


def element_key(file: CircuitFile, element: str) -> str:
    """Return the key path of an element's table, such as ``lines.stub_in``."""
    tables: Sequence[Mapping[str, object]] = (file.ports, file.lines, file.coupled, file.parts)
    table = next(name for name, held in zip(_TABLES, tables, strict=True) if element in held)
    return f"{table}.{element}"
