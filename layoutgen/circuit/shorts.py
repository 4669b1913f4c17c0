"""Shorted supplies: a dc port that lines and inductors join to ground or to another voltage."""

from __future__ import annotations

from collections import deque
from collections.abc import Mapping

from layoutgen.circuit.queries import GROUND, net_of, other_end
from layoutgen.circuit.records import End
from layoutgen.origin import Fault
from layoutgen.reading import CircuitFile

__all__ = ["short_faults"]


def short_faults(file: CircuitFile, ends: Mapping[str, tuple[End, ...]]) -> list[Fault]:
    """Return one fault for each dc port on a path of lines and inductors to gnd or to another voltage.

    A pair of ports is reported once, at the later of the two.
    """
    faults = []
    earlier: dict[str, str] = {}  # net -> port
    for name, port in file.ports.items():
        if port.kind != "dc":
            continue
        found = _way_to_another_voltage(file, ends, name, earlier)
        if found is not None:
            target, path = found
            through = f"through {', '.join(path)}" if path else f"on net {port.net} itself"
            faults.append(
                Fault(
                    file.location(f"ports.{name}"),
                    f"ports.{name}",
                    f"{port.voltage:g} V joined to {target} {through}",
                    "no path of lines and inductors from a dc port to gnd or to another voltage",
                )
            )
        earlier.setdefault(port.net, name)
    return faults


def _way_to_another_voltage(
    file: CircuitFile, ends: Mapping[str, tuple[End, ...]], port: str, earlier: Mapping[str, str]
) -> tuple[str, tuple[str, ...]] | None:
    """Return what another voltage is called and the elements on the shortest way to it, or None."""
    voltage = file.ports[port].voltage
    start = file.ports[port].net
    seen = {start}
    waiting: deque[tuple[str, tuple[str, ...]]] = deque([(start, ())])
    while waiting:
        net, path = waiting.popleft()
        if net == GROUND:
            return "gnd", path
        other = earlier.get(net)
        if other is not None and file.ports[other].voltage != voltage:
            return f"ports.{other} at {file.ports[other].voltage:g} V", path
        for element, far in _conductors(file, ends[net]):
            if far not in seen:
                seen.add(far)
                waiting.append((far, (*path, element)))
    return None


def _conductors(file: CircuitFile, ends: tuple[End, ...]) -> list[tuple[str, str]]:
    """Return (element, far net) for each line, strip of a pair and inductor that leaves a net."""
    found = []
    for end in ends:
        part = file.parts.get(end.element)
        if part is not None and part.kind != "inductor":
            continue
        far = other_end(file, end)
        if far is not None:
            found.append((end.element, net_of(file, far)))
    return found
