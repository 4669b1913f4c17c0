"""The independent loops of the schematic."""

from __future__ import annotations

from collections import deque

from layoutgen.circuit.graph import Graph

__all__ = ["independent_loops"]


def independent_loops(graph: Graph) -> tuple[tuple[str, ...], ...]:
    """Return one tuple of element names for each independent loop, in order round the loop.

    Nets and elements are the nodes of a graph whose edges are ends. Each edge that closes a loop when the
    edges are added in file order gives the shortest loop through it among those already there, so the loops
    are as many as there are independent ones, and short. A loop starts at its element that stands first in
    the file.
    """
    order = {name: i for i, name in enumerate(graph.nets_of)}
    joined = _Joined()
    closing = []
    near: dict[tuple[bool, str], list[tuple[bool, str]]] = {}
    for element, nets in graph.nets_of.items():
        for net in nets:
            if joined.join((True, element), (False, net)):
                near.setdefault((True, element), []).append((False, net))
                near.setdefault((False, net), []).append((True, element))
            else:
                closing.append((element, net))
    loops = []
    for element, net in closing:
        path = _shortest(near, (True, element), (False, net))
        loops.append(_from_first([name for is_element, name in path if is_element], order))
        near[True, element].append((False, net))
        near[False, net].append((True, element))
    return tuple(loops)


class _Joined:
    """Sets of nodes that hang together."""

    def __init__(self) -> None:
        """Start with every node alone."""
        self.parent: dict[tuple[bool, str], tuple[bool, str]] = {}

    def join(self, a: tuple[bool, str], b: tuple[bool, str]) -> bool:
        """Join two nodes; False when they hung together before."""
        a, b = self._root(a), self._root(b)
        self.parent[a] = b
        return a != b

    def _root(self, node: tuple[bool, str]) -> tuple[bool, str]:
        """Return the node that stands for a set."""
        while self.parent.setdefault(node, node) != node:
            self.parent[node] = node = self.parent[self.parent[node]]
        return node


def _shortest(
    near: dict[tuple[bool, str], list[tuple[bool, str]]], start: tuple[bool, str], goal: tuple[bool, str]
) -> list[tuple[bool, str]]:
    """Return the nodes of the shortest path from start to goal, both included."""
    came: dict[tuple[bool, str], tuple[bool, str] | None] = {start: None}
    waiting = deque([start])
    while goal not in came:
        node = waiting.popleft()
        for other in near[node]:
            if other not in came:
                came[other] = node
                waiting.append(other)
    path = [goal]
    while (before := came[path[-1]]) is not None:
        path.append(before)
    return path[::-1]


def _from_first(loop: list[str], order: dict[str, int]) -> tuple[str, ...]:
    """Return the loop from its first element by file order, in the direction of the earlier neighbour."""
    at = min(range(len(loop)), key=lambda i: order[loop[i]])
    turned = loop[at:] + loop[:at]
    back = [turned[0], *turned[:0:-1]]
    return tuple(min(turned, back, key=lambda names: [order[name] for name in names]))
