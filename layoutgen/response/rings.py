"""Which elements of a schematic lie on loops, and which on the same ones.

In: the nets of each element. Out: a number for each element on a loop, the same for those that a chain of
loops with common elements joins (a biconnected piece). Loops are found from a spanning tree of nets and
elements: each end that the tree leaves out closes one.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Iterable, Mapping

from layoutgen.circuit import GROUND, OPEN

__all__ = ["loop_numbers"]

_Node = tuple[bool, str]  # is an element, name


def loop_numbers(nets: Mapping[str, Iterable[str]]) -> dict[str, int]:
    """Return a number for each element of two or more nets that lies on a loop; ground closes none.

    Args:
        nets: The nets of each element by name.

    >>> loop_numbers({"a": ["p", "q"], "b": ["q", "r"], "c": ["r", "p"], "tail": ["p", "s"]})
    {'a': 0, 'b': 0, 'c': 0}
    """
    near: dict[_Node, list[_Node]] = {}
    for name, joined in nets.items():
        for net in dict.fromkeys(joined):
            if net not in (GROUND, OPEN):
                near.setdefault((False, net), []).append((True, name))
                near.setdefault((True, name), []).append((False, net))
    above, left_out = _spanning_tree(near)
    group = {node: node for node in near}
    closed: set[_Node] = set()
    for ends in left_out:
        way = _way_between(*ends, above)
        closed |= way
        first = min(_last(group, node) for node in way)
        for node in way:
            group[_last(group, node)] = first
    numbers: dict[_Node, int] = {}
    return {
        name: numbers.setdefault(_last(group, (True, name)), len(numbers))
        for name in nets
        if (True, name) in closed
    }


def _spanning_tree(
    near: Mapping[_Node, list[_Node]],
) -> tuple[dict[_Node, tuple[_Node | None, int]], list[tuple[_Node, _Node]]]:
    """Return each node's next one towards its root, a net, with its depth, and the ends that are left out."""
    above: dict[_Node, tuple[_Node | None, int]] = {}
    left_out = []
    for root in (node for node in near if not node[0]):
        if root in above:
            continue
        above[root] = None, 0
        waiting = deque([root])
        while waiting:
            node = waiting.popleft()
            for other in near[node]:
                if other not in above:
                    above[other] = node, above[node][1] + 1
                    waiting.append(other)
                elif other != above[node][0] and above[other][1] >= above[node][1]:
                    left_out.append((node, other))
    return above, left_out


def _way_between(a: _Node, b: _Node, above: Mapping[_Node, tuple[_Node | None, int]]) -> set[_Node]:
    """Return the nodes on the tree's way from one to another, but for the one nearest to the root."""
    way: set[_Node] = set()
    while a != b:
        if above[a][1] < above[b][1]:
            a, b = b, a
        way.add(a)
        following = above[a][0]
        assert following is not None
        a = following
    return way


def _last(group: Mapping[_Node, _Node], node: _Node) -> _Node:
    """Return the node that stands for a node's group."""
    while group[node] != node:
        node = group[node]
    return node
