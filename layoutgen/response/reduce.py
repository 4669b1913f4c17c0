"""Fewer unknowns before the solution: chains of two-ports become one, and what no port sees is left out.

In: a :class:`Network`. Out: an equivalent one, with the same ports. A node that joins just two plain
two-ports, with or without a shunt admittance, is removed by multiplying chain parameters; that is exact at
every frequency, at half-wave lengths too.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Iterator
from dataclasses import replace

import numpy as np
import numpy.typing as npt

from layoutgen.response.chain import Chain, ComplexArray, cascade, reverse, shunt
from layoutgen.response.network import GROUND, Block, Branch, Network, Shunt

__all__ = ["islands", "reduce_network"]


def reduce_network(network: Network) -> Network:
    """Return the network without unseen parts, with every chain of two-ports as one two-port."""
    seen = _reached(_neighbours(network), (port.node for port in network.ports))
    branches = [b for b in network.branches if _nodes(b) & seen]
    blocks = tuple(b for b in network.blocks if _nodes(b) & seen)
    admittances = _sum_by_node(s for s in network.shunts if s.node in seen)
    elements: list[Branch | Block] = [*blocks, *(b for b in branches if not _is_plain(b))]
    kept = {GROUND, *(port.node for port in network.ports)}.union(*map(_nodes, elements))
    joined = _join_chains(branches, admittances, kept)
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


def _join_chains(
    branches: list[Branch], admittances: dict[str, ComplexArray], kept: set[str]
) -> list[Branch]:
    """Join the two-ports at every node that needs no unknown; takes used admittances out of the table."""
    pool: dict[int, Branch] = dict(enumerate(branches))
    at: dict[str, list[int]] = defaultdict(list)
    for key, branch in pool.items():
        for node, _ in branch.near + branch.far:
            at[node].append(key)
    for node in list(at):
        keys = at[node]
        if node in kept or len(keys) != 2 or keys[0] == keys[1]:
            continue
        first, second = _away(pool.pop(keys[0]), node, False), _away(pool.pop(keys[1]), node, True)
        pool[keys[0]] = Branch(first.near, second.far, _through(first.chain, second.chain, admittances, node))
        ends = at[second.far[0][0]]
        ends[ends.index(keys[1])] = keys[0]
    return [pool[key] for key in sorted(pool)]


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
