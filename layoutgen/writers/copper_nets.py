"""Which nets of the circuit are one piece of copper.

The circuit gives a line another net at each end; on the board both ends are the same conductor. A board house
compares copper with names, so what it is given is named by conductors, and so are netlists for testers.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence

from layoutgen.circuit import GROUND, OPEN
from layoutgen.reading import CircuitFile

__all__ = ["copper_net", "copper_nets"]


def copper_nets(file: CircuitFile, nets: Sequence[str]) -> dict[str, str]:
    """Return for each net the name of its conductor: ``gnd`` if it is that, else its first net.

    Args:
        file: The circuit; lines and both strips of coupled pairs join the nets at their ends.
        nets: All nets, in the order in which conductors are named.
    """
    parent = {net: net for net in (GROUND, *nets)}
    order = {net: k for k, net in enumerate(parent)}
    for first, second in _joints(file):
        a, b = _root(parent, first), _root(parent, second)
        low, high = (a, b) if order[a] <= order[b] else (b, a)
        parent[high] = low
    return {net: _root(parent, net) for net in parent}


def copper_net(conductors: Mapping[str, str], net: str | None) -> str | None:
    """Return the conductor of a shape's net; a name that is no net of the circuit stays as it is."""
    return None if net is None else conductors.get(net, net)


def _joints(file: CircuitFile) -> Iterator[tuple[str, str]]:
    """Yield the two nets at the ends of every conductor that has two."""
    for line in file.lines.values():
        if len(line.nets) == 2:
            yield line.nets[0], line.nets[1]
    for pair in file.coupled.values():
        for first, second in (pair.nets[:2], pair.nets[2:]):
            if OPEN not in (first, second):
                yield first, second


def _root(parent: Mapping[str, str], net: str) -> str:
    while parent[net] != net:
        net = parent[net]
    return net
