"""Banks: the shunt parts that stand on a common strip, in the order in which the feed meets them."""

from __future__ import annotations

from collections import deque
from collections.abc import Mapping

from layoutgen.circuit.queries import GROUND, ends_of, is_device_pin, is_shunt, is_supply
from layoutgen.circuit.records import End, EndKind
from layoutgen.reading import CircuitFile

__all__ = ["bank_order", "feed_end"]

_FAR = 1 << 30


def bank_order(file: CircuitFile, ends: tuple[End, ...]) -> tuple[str, ...]:
    """Return a net's shunt parts in bank order; empty when there are fewer than two.

    Capacitors by value, smallest first, ties in file order; other kinds after them in file order.
    """
    shunts = [end.element for end in ends if end.kind is EndKind.PAD and is_shunt(file.parts[end.element])]
    return tuple(sorted(shunts, key=lambda name: _rank(file, name))) if len(shunts) > 1 else ()


def _rank(file: CircuitFile, name: str) -> tuple[bool, float]:
    """Return the sort key of a shunt part."""
    part = file.parts[name]
    capacitor = part.kind == "capacitor" and part.value is not None
    return (not capacitor, part.value if capacitor and part.value is not None else 0.0)


def feed_end(file: CircuitFile, ends: Mapping[str, tuple[End, ...]], net: str) -> End | None:
    """Return the end of a net that leads to an RF port or a pin.

    A port or pin on the net itself comes first, then lines that RF is asked of and parts before supply
    lines, then the shorter way to an RF port or pin, then file order. Where nothing leads to one, it is the
    first end that is not a shunt part.
    """
    candidates = [end for end in ends[net] if not (end.kind is EndKind.PAD and _is_shunt_end(file, end))]
    ranked = [(_preference(file, ends, net, end), i) for i, end in enumerate(candidates)]
    return candidates[min(ranked)[1]] if ranked else None


def _is_shunt_end(file: CircuitFile, end: End) -> bool:
    """Tell whether an end belongs to a shunt part."""
    return is_shunt(file.parts[end.element])


def _preference(
    file: CircuitFile, ends: Mapping[str, tuple[End, ...]], net: str, end: End
) -> tuple[bool, bool, int]:
    """Return the sort key of a candidate: leads nowhere, is a supply line, steps on the way."""
    steps = _steps_to_rf(file, ends, net, end)
    supply = end.kind is EndKind.LINE and is_supply(file.lines[end.element])
    return (steps == _FAR, supply, steps)


def _steps_to_rf(file: CircuitFile, ends: Mapping[str, tuple[End, ...]], net: str, end: End) -> int:
    """Return how many elements lie between an end and the nearest RF port or pin, its own net left out."""
    if _is_goal(file, end):
        return 0
    seen = {net, GROUND}
    waiting = deque((far, 1) for far in _nets_beyond(file, end.element, seen))
    while waiting:
        at, steps = waiting.popleft()
        if at in seen:
            continue
        seen.add(at)
        if any(_is_goal(file, other) for other in ends[at]):
            return steps
        for other in ends[at]:
            waiting.extend((far, steps + 1) for far in _nets_beyond(file, other.element, seen))
    return _FAR


def _is_goal(file: CircuitFile, end: End) -> bool:
    """Tell whether an end is an RF port or a pin."""
    return is_device_pin(file, end) or (end.kind is EndKind.PORT and file.ports[end.element].kind == "rf")


def _nets_beyond(file: CircuitFile, element: str, seen: set[str]) -> list[str]:
    """Return the nets of an element that were not seen yet, in the element's order."""
    return [net for _, net in ends_of(file, element) if net not in seen]
