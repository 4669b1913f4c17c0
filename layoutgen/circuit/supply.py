"""Which nets are DC nets: those that a supply reaches without passing a line that RF is asked of."""

from __future__ import annotations

from collections.abc import Mapping

from layoutgen.circuit.queries import (
    GROUND,
    element_key,
    ends_of,
    is_device_pin,
    is_shunt,
    is_supply,
    net_of,
    other_end,
)
from layoutgen.circuit.records import End, EndKind
from layoutgen.origin import Fault
from layoutgen.reading import CircuitFile

__all__ = ["dc_nets", "joins_dc_only", "width_faults"]


def dc_nets(file: CircuitFile, ends: Mapping[str, tuple[End, ...]]) -> frozenset[str]:
    """Return the nets that hold a dc port, or are reached from one through supply lines or parts.

    A supply line without width leads on, but not into an RF junction: a net where two or more lines, pairs
    or pins of RF meet and nothing bypasses them to ground. A supply line with a width, or a part other than
    a capacitor, leads on only into a net where nothing of RF meets, or one such end and a bypass. ``gnd``
    and nets with an RF port are never DC nets.
    """
    reached = {port.net for port in file.ports.values() if port.kind == "dc"}
    reached -= {port.net for port in file.ports.values() if port.kind == "rf"}
    waiting = sorted(reached)
    while waiting:
        for end in ends[waiting.pop()]:
            far = other_end(file, end)
            if far is None:
                continue
            net = net_of(file, far)
            if net not in reached and _leads_on(file, end.element, ends[net], net):
                reached.add(net)
                waiting.append(net)
    return frozenset(reached)


def _leads_on(file: CircuitFile, element: str, ends: tuple[End, ...], net: str) -> bool:
    """Tell whether an element carries a supply on, as DC, into a net with these ends."""
    if net == GROUND or any(_is_rf_port(file, end) for end in ends):
        return False
    line = file.lines.get(element)
    if line is not None and not is_supply(line):
        return False
    part = file.parts.get(element)
    if line is None and (part is None or part.kind == "capacitor"):
        return False
    rf, bypassed = _rf_ends(file, ends), _is_bypassed(file, ends)
    if line is not None and line.width is None:
        return rf <= 1 or bypassed
    return rf == 0 or (rf == 1 and bypassed)


def _is_rf_port(file: CircuitFile, end: End) -> bool:
    """Tell whether an end is an RF port."""
    return end.kind is EndKind.PORT and file.ports[end.element].kind == "rf"


def _rf_ends(file: CircuitFile, ends: tuple[End, ...]) -> int:
    """Return how many lines that RF is asked of, strips of pairs and pins end among these."""
    return sum(
        end.kind is EndKind.COUPLED or is_device_pin(file, end) or _is_rf_line(file, end) for end in ends
    )


def _is_rf_line(file: CircuitFile, end: End) -> bool:
    """Tell whether an end belongs to a line that RF is asked of, radial stubs apart."""
    if end.kind is not EndKind.LINE:
        return False
    line = file.lines[end.element]
    return line.shape is None and not is_supply(line)


def _is_bypassed(file: CircuitFile, ends: tuple[End, ...]) -> bool:
    """Tell whether a shunt part or a radial stub holds the net at RF ground."""
    return any(
        (end.kind is EndKind.PAD and is_shunt(file.parts[end.element]))
        or (end.kind is EndKind.LINE and file.lines[end.element].shape == "radial")
        for end in ends
    )


def joins_dc_only(file: CircuitFile, element: str, dc: frozenset[str]) -> bool:
    """Tell whether a line joins DC nets only (ground beside a DC net counts as one)."""
    nets = {net for _, net in ends_of(file, element)}
    return bool(nets & dc) and nets <= dc | {GROUND}


def width_faults(file: CircuitFile, dc: frozenset[str]) -> list[Fault]:
    """Return a fault for each line with neither impedance nor width that does not join DC nets only."""
    return [
        Fault(
            file.location(element_key(file, name)),
            element_key(file, name),
            f"neither impedance nor width, on nets {', '.join(line.nets)}",
            "impedance or width; both may be left out only where all nets are reached from a dc port",
        )
        for name, line in file.lines.items()
        if line.shape is None
        and line.impedance is None
        and line.width is None
        and not joins_dc_only(file, name, dc)
    ]
