"""The supplies of a board in the order of switching on, from the bias point alone.

A supply that feeds only pins without current of their own is a control (a gate or a base): it comes first,
negative ones before positive ones. Then come supplies that feed pins with a current, then the others.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from layoutgen.circuit import GROUND, conductor_keys, two_nets
from layoutgen.reading import CircuitFile
from layoutgen.writers.records import Result

__all__ = ["Supply", "supplies_of"]

_CONDUCTING = ("resistor", "inductor")


@dataclass(frozen=True, slots=True, kw_only=True)
class Supply:
    """A dc port: voltage [V], current [A] that it delivers, the pins it reaches; ``control`` when none draws.

    ``current`` is positive out of the supply's positive terminal into the board, negative when the board
    pushes current back into it.
    """

    port: str
    voltage: float
    current: float
    control: bool
    pins: tuple[str, ...]


def supplies_of(result: Result) -> list[Supply]:
    """Return the dc ports in the order of switching on; switching off is the other way round."""
    file, dc = result.circuit.file, result.circuit.dc
    drawing = _drawing_pins(file)
    found = []
    for name, port in file.ports.items():
        if port.kind != "dc":
            continue
        pins = tuple(_pins_on(file, _reached(file, port.net)))
        found.append(
            Supply(
                port=name,
                voltage=port.voltage or 0.0,
                current=-dc.currents.get(name, 0.0),
                control=bool(pins) and not drawing.intersection(pins),
                pins=pins,
            )
        )
    return sorted(found, key=_rank)


def _rank(supply: Supply) -> tuple[int, bool]:
    """Return controls, then supplies of devices, then others; negative voltages first in each."""
    return (0 if supply.control else 1 if supply.pins else 2), supply.voltage >= 0.0


def _drawing_pins(file: CircuitFile) -> set[str]:
    """Return the pins that a current enters or leaves, as ``Q1.drain``."""
    return {
        f"{name}.{pin}"
        for name, part in file.parts.items()
        for draw in part.dc
        if draw.current
        for pin in (draw.from_, draw.to)
    }


def _reached(file: CircuitFile, start: str) -> set[str]:
    """Return the nets that direct current can reach from one, without passing ground."""
    reached, waiting = {start}, [start]
    joined = _joined(file)
    while waiting:
        for net in joined.get(waiting.pop(), ()):
            if net not in reached and net != GROUND:
                reached.add(net)
                waiting.append(net)
    return reached


def _joined(file: CircuitFile) -> Mapping[str, list[str]]:
    """Return for each net those next to it through lines, pairs, inductors and resistors."""
    ways = list(conductor_keys(file).values())
    for part in file.parts.values():
        nets = two_nets(part)
        if nets and (part.kind in _CONDUCTING or (part.kind == "other" and part.series_resistance > 0.0)):
            ways.append(nets)
    joined: dict[str, list[str]] = {}
    for first, second in ways:
        joined.setdefault(first, []).append(second)
        joined.setdefault(second, []).append(first)
    return joined


def _pins_on(file: CircuitFile, nets: set[str]) -> list[str]:
    """Return the devices' pins that lie on some nets, in file order."""
    return [
        f"{name}.{pin}"
        for name, part in file.parts.items()
        if two_nets(part) is None
        for pin, net in (part.pins or {}).items()
        if net in nets and net != GROUND
    ]
