"""Fewer unknowns before the solution: chains become one two-port, ends become admittances.

In: a :class:`Network`. Out: an equivalent one, with the same ports. A node that joins just two plain
two-ports, with or without a shunt admittance, is removed by multiplying chain parameters; that is exact at
every frequency, at half-wave lengths too. A two-port that ends on ground, or in a node with nothing else,
becomes an admittance at its other node, unless that would be large at some frequency: a stub that shorts its
node stays a two-port, whose equations are regular. What no port sees is left out.
"""

from __future__ import annotations

from collections import defaultdict, deque
from collections.abc import Iterable, Iterator
from dataclasses import replace

import numpy as np
import numpy.typing as npt

from layoutgen.response.chain import Chain, ComplexArray, cascade, reverse, shunt
from layoutgen.response.network import GROUND, Block, Branch, Network, Shunt

__all__ = ["islands", "reduce_network"]

_LARGEST = 1e3  # of an end that becomes an admittance [S]: larger ones would cost digits


def reduce_network(network: Network) -> Network:
    """Return the network without unseen parts, with every chain of two-ports as one two-port."""
    seen = _reached(_neighbours(network), (port.node for port in network.ports))
    branches = [b for b in network.branches if _nodes(b) & seen]
    blocks = tuple(b for b in network.blocks if _nodes(b) & seen)
    admittances = _sum_by_node(s for s in network.shunts if s.node in seen)
    elements: list[Branch | Block] = [*blocks, *(b for b in branches if not _is_plain(b))]
    kept = {GROUND, *(port.node for port in network.ports)}.union(*map(_nodes, elements))
    joined = _Joining(branches, admittances, kept).run()
    shunts = tuple(Shunt(node, value) for node, value in admittances.items())
    return Network(network.size, network.ports, tuple(joined), shunts, blocks)


def _nodes(element: Branch | Block) -> set[str]:
    """Return the nodes of an element, ground left out."""
    if isinstance(element, Block):
        names = {node for pair in element.ends for node in pair}
    else:
        names = {node for node, _ in element.near + element.far}
    return names - {GROUND}


def _is_plain(branch: Branch) -> bool:
    """True for a two-port between single nodes of weight 1."""
    return len(branch.near) == len(branch.far) == 1 and branch.near[0][1] == branch.far[0][1] == 1.0


def islands(network: Network) -> Iterator[tuple[npt.NDArray[np.intp], Network]]:
    """Yield the parts of a network that nothing but ground joins, with the numbers of their ports."""
    near = _neighbours(network)
    left = list(range(len(network.ports)))
    while left:
        inside = _reached(near, [network.ports[left[0]].node])
        numbers = [k for k in left if network.ports[k].node in inside]
        left = [k for k in left if k not in numbers]
        yield (
            np.array(numbers),
            replace(
                network,
                ports=tuple(network.ports[k] for k in numbers),
                branches=tuple(b for b in network.branches if _nodes(b) & inside),
                shunts=tuple(s for s in network.shunts if s.node in inside),
                blocks=tuple(b for b in network.blocks if _nodes(b) & inside),
            ),
        )


def _neighbours(network: Network) -> dict[str, set[str]]:
    """Return the nodes that an element joins to each node."""
    near: dict[str, set[str]] = defaultdict(set)
    elements: list[Branch | Block] = [*network.branches, *network.blocks]
    for nodes in map(_nodes, elements):
        for node in nodes:
            near[node] |= nodes
    return near


def _reached(near: dict[str, set[str]], start: Iterable[str]) -> set[str]:
    """Return the nodes that are reached from some, other than through ground."""
    seen: set[str] = set()
    waiting = list(start)
    while waiting:
        node = waiting.pop()
        if node not in seen:
            seen.add(node)
            waiting.extend(near[node] - seen)
    return seen


def _sum_by_node(shunts: Iterable[Shunt]) -> dict[str, ComplexArray]:
    """Return the total admittance [S] at each node."""
    total: dict[str, ComplexArray] = {}
    for element in shunts:
        total[element.node] = total.get(element.node, 0.0) + element.admittance
    return total


class _Joining:
    """Two-ports by number and by node, while they become fewer; takes and adds admittances of the table."""

    def __init__(self, branches: list[Branch], admittances: dict[str, ComplexArray], kept: set[str]) -> None:
        """Note which two-ports end in each node; nodes ``kept`` are not removed."""
        self.pool = dict(enumerate(branches))
        self.admittances, self.kept = admittances, kept
        self.at: dict[str, list[int]] = defaultdict(list)
        for key, branch in self.pool.items():
            for node, _ in branch.near + branch.far:
                self.at[node].append(key)
        self.waiting = deque(node for node in self.at if node != GROUND)

    def run(self) -> list[Branch]:
        """Return what is left when nothing more can be joined."""
        while self.waiting:
            node = self.waiting.popleft()
            for key in list(self.at[node]):
                self.end_on_ground(node, key)
            if node in self.kept:
                continue
            keys = self.at[node]
            if len(keys) == 1:
                self.end(node, keys[0])
            elif len(keys) == 2 and keys[0] != keys[1]:
                self.join(node, keys[0], keys[1])
        return [self.pool[key] for key in sorted(self.pool)]

    def end_on_ground(self, node: str, key: int) -> None:
        """Turn a plain two-port from a node to ground into an admittance there."""
        branch = self.pool[key]
        if not _is_plain(branch) or _nodes(branch) != {node}:
            return
        chain = _away(branch, node, True).chain
        grounded = GROUND in (branch.near[0][0], branch.far[0][0])
        if grounded and self.add(node, chain.d, chain.b):
            self.remove(key)

    def end(self, node: str, key: int) -> None:
        """Turn a two-port that ends in a node with nothing else into an admittance at its other node."""
        branch = _away(self.pool[key], node, False)
        other, chain = branch.near[0][0], branch.chain
        if other == GROUND:
            return
        load = self.admittances.get(node, 0.0)
        if self.add(other, chain.c + chain.d * load, chain.a + chain.b * load):
            self.admittances.pop(node, None)
            self.remove(key)
            self.waiting.append(other)

    def add(self, node: str, above: ComplexArray, below: ComplexArray) -> bool:
        """Add the admittance ``above / below`` [S] at a node; False when it is too large somewhere."""
        if np.any(np.abs(above) >= _LARGEST * np.abs(below)):
            return False
        self.admittances[node] = self.admittances.get(node, 0.0) + above / below
        return True

    def remove(self, key: int) -> None:
        """Take a two-port out."""
        branch = self.pool.pop(key)
        for node, _ in branch.near + branch.far:
            self.at[node].remove(key)

    def join(self, node: str, first: int, second: int) -> None:
        """Join two two-ports through a node into one, kept under the number of the first."""
        one, other = self.pool[first], self.pool[second]
        near, far = _away(one, node, False), _away(other, node, True)
        self.remove(first)
        self.remove(second)
        chain = _through(near.chain, far.chain, self.admittances, node)
        self.pool[first] = Branch(near.near, far.far, chain)
        for end, _ in near.near + far.far:
            self.at[end].append(first)
            if end != GROUND:
                self.waiting.append(end)


def _away(branch: Branch, node: str, leaving: bool) -> Branch:
    """Return the branch turned so that ``node`` is its near end (leaving) or its far end."""
    if (branch.near[0][0] == node) == leaving:
        return branch
    return Branch(branch.far, branch.near, reverse(branch.chain))


def _through(first: Chain, second: Chain, admittances: dict[str, ComplexArray], node: str) -> Chain:
    """Return the cascade of two chains with the node's own admittance between them."""
    if node in admittances:
        return cascade(first, shunt(admittances.pop(node)), second)
    return cascade(first, second)
