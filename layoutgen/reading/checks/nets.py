"""Checks of nets: each joins at least two ends; which lines carry direct current alone."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import NamedTuple

from layoutgen.reading.circuit_records import CoupledPair, Line, Part, Port
from layoutgen.reading.draft import Draft, Table
from layoutgen.reading.faults import SHOWN
from layoutgen.reading.wording import Path, nearest, quote

__all__ = ["check_nets", "possible_supplies"]

_RESERVED = ("gnd", "open")
_SHORT = 2
"""Names so short resemble any other [-]."""
_ENDS = {"ports": 1, "lines": 2, "coupled": 4, "parts": 4}
"""Ends that an element has, or may well have, whose nets cannot be read [-]."""
_CONDUCT = ("resistor", "inductor", "other")


class _End(NamedTuple):
    """One end of an element on a net."""

    net: str
    path: Path


def check_nets(draft: Draft) -> None:
    """Add a fault for each net that joins one end only; not done where elements could not be seen.

    Ends whose net is faulty or cannot be read may have been meant for such a net: while there are no more
    once-used nets than such ends, they are forgiven.
    """
    if draft.elements_missed:
        return
    ends, unread = _all_ends(draft)
    used: dict[str, list[_End]] = {}
    for end in ends:
        if end.path not in draft.faults.paths:
            used.setdefault(end.net, []).append(end)
    lonely = {net: found[0] for net, found in used.items() if len(found) == 1 and net not in _RESERVED}
    partners = _likely_slips(lonely)
    told = {net: end for net, end in lonely.items() if net not in partners.values()}
    if len(told) <= unread + _faulty_ends(draft, ends):
        return
    few = len(told) <= SHOWN
    for net, end in told.items():
        known = [other for other in (*used, "gnd") if other != net] if few else []
        found = f"the net {quote(net)}, used once"
        draft.faults.add(end.path, found, _advice(draft, net, partners, lonely, known))


def _faulty_ends(draft: Draft, ends: list[_End]) -> int:
    """Return how many ends may have been meant otherwise: one of a faulty port, two of other elements."""
    elements = {end.path[:2] for end in ends if draft.faults.about(end.path[:3])}
    return sum(1 if path[0] == "ports" else 2 for path in elements)


def _likely_slips(lonely: dict[str, _End]) -> dict[str, str]:
    """Return pairs of once-used nets that are likely one net in two spellings: later -> earlier."""
    pairs: dict[str, str] = {}
    names = list(lonely) if len(lonely) <= SHOWN else []
    for number, net in enumerate(names):
        free = [other for other in names[:number] if other not in pairs and other not in pairs.values()]
        if guess := nearest(net, free):
            pairs[net] = guess
    return pairs


def _advice(
    draft: Draft, net: str, partners: dict[str, str], lonely: dict[str, _End], known: list[str]
) -> str:
    """Return what is allowed instead of a once-used net, with the net that was most likely meant."""
    if net in partners:
        other = partners[net]
        line = draft.faults.line_of(lonely[other].path)
        return f"a net joins at least two ends; {quote(other)} ({line}) is used once too"
    guess = nearest(net, known) if len(net) > _SHORT else None
    return "a net joins at least two ends" + (f"; the nearest net is {quote(guess)}" if guess else "")


def _all_ends(draft: Draft) -> tuple[list[_End], int]:
    """Return every end of every element in file order, and how many ends cannot be read."""
    ends: list[_End] = []
    unread = 0
    for section, model in (("ports", Port), ("lines", Line), ("coupled", CoupledPair), ("parts", Part)):
        tables = list(draft.tables(section, model))
        unread += _ENDS[section] * (len(draft.names(section)) - len(tables))
        for _, table in tables:
            found = _ends(section, table)
            ends += found
            unread += 0 if found else _ENDS[section]
    return ends, unread


def _ends(section: str, table: Table) -> list[_End]:
    """Return the ends of one element, none when they cannot be read."""
    key = "net" if section == "ports" else "pins" if "pins" in table.raw else "nets"
    items = list(_items(table.raw.get(key), table.at(key)))
    readable = not table.meant & {"net", "nets", "pins"} and all(isinstance(net, str) for net, _ in items)
    return [_End(net, place) for net, place in items] if readable else []


def _items(value: object, path: Path) -> Iterator[tuple[str, Path]]:
    """Yield the nets in a text, list or table, with their paths."""
    if isinstance(value, str):
        yield value, path
    elif isinstance(value, Mapping):
        yield from ((net, (*path, pin)) for pin, net in value.items())
    elif isinstance(value, list | tuple):
        yield from ((net, (*path, number)) for number, net in enumerate(value))


def possible_supplies(draft: Draft) -> set[str]:
    """Return the names of the lines whose width may perhaps follow from the current.

    A line counts when its nets are reached from a DC port through lines without an angle, resistors,
    inductors and other parts, and hold no RF port. This only tells a forgotten impedance from a supply line
    at once with the file's other faults; the circuit stage decides. All lines count while a port is faulty.
    """
    if draft.faults.about(("ports",)):
        return set(draft.lines)
    reached = _reached_from_supplies(draft)
    reached -= {port.net for port in draft.ports.values() if port.kind == "rf"}
    return {
        name
        for name, line in draft.lines.items()
        if len(line.nets) == 2 and set(line.nets) <= reached | {"gnd"} and set(line.nets) & reached
    }


def _reached_from_supplies(draft: Draft) -> set[str]:
    """Return the nets reached from DC ports without passing ground, a capacitor or a line with an angle."""
    joined: dict[str, set[str]] = {}
    links = [line.nets for line in draft.lines.values() if line.angle is None and len(line.nets) == 2]
    links += [part.nets for part in draft.parts.values() if part.nets and part.kind in _CONDUCT]
    for nets in links:
        joined.setdefault(nets[0], set()).add(nets[-1])
        joined.setdefault(nets[-1], set()).add(nets[0])
    reached: set[str] = set()
    front = [port.net for port in draft.ports.values() if port.kind == "dc"]
    while front:
        net = front.pop()
        if net not in reached and net != "gnd":
            reached.add(net)
            front += sorted(joined.get(net, ()))
    return reached
