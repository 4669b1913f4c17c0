"""Bias feeds of a network: where they leave the path of the signal, and what they look like from there.

In: a network and the nodes of its DC ports. Out: for each feed the node it leaves, and the impedance looking
into it. A feed is all that hangs on one node, holds a DC port, and holds no port of the response.
"""

from __future__ import annotations

from collections import defaultdict, deque
from collections.abc import Mapping
from dataclasses import replace

import numpy as np

from layoutgen.response.chain import ComplexArray
from layoutgen.response.network import GROUND, Block, Branch, Network, Port
from layoutgen.response.solve import solve

__all__ = ["find_feeds"]

_Z0 = 50.0


def find_feeds(
    network: Network, supplies: Mapping[str, str]
) -> dict[tuple[str, ...], tuple[str, ComplexArray]]:
    """Return the feeds by the DC ports in them: node that they leave, impedance (F,) [ohm] looking in.

    Args:
        network: The network with its ports.
        supplies: Node of each DC port.
    """
    graph = _Graph(network)
    found: dict[tuple[str, ...], tuple[str, ComplexArray]] = {}
    for node in supplies.values():
        tee = graph.tee_before(node)
        if tee is None:
            continue
        beyond = graph.reached(node, tee)
        ports = tuple(name for name, at in supplies.items() if at in beyond)
        if ports not in found:
            found[ports] = tee, _looking_in(network, tee, beyond)
    return found


def _looking_in(network: Network, node: str, beyond: set[str]) -> ComplexArray:
    """Return the impedance (F,) [ohm] of what lies beyond a node."""
    alone = replace(
        network,
        ports=(Port(node, _Z0),),
        branches=tuple(b for b in network.branches if _nodes(b) & beyond),
        shunts=tuple(s for s in network.shunts if s.node in beyond),
        blocks=tuple(b for b in network.blocks if _nodes(b) & beyond),
    )
    s = solve(alone)[:, 0, 0]
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(_Z0 * (1.0 + s) / (1.0 - s))


def _nodes(element: Branch | Block) -> set[str]:
    """Return the nodes of an element, ground left out."""
    if isinstance(element, Block):
        return {node for pair in element.ends for node in pair} - {GROUND}
    return {node for node, _ in element.near + element.far} - {GROUND}


class _Graph:
    """What is joined to what, other than through ground."""

    def __init__(self, network: Network) -> None:
        """Note the neighbours of each node, and how many elements and ports meet there."""
        self.near: dict[str, set[str]] = defaultdict(set)
        self.elements = [_nodes(b) for b in network.branches] + [_nodes(b) for b in network.blocks]
        self.ports = [port.node for port in network.ports]
        for nodes in self.elements:
            for node in nodes:
                self.near[node] |= nodes - {node}

    def reached(self, start: str, without: str | None = None) -> set[str]:
        """Return the nodes that can be reached from one, not through another."""
        seen, waiting = {start}, deque([start])
        while waiting:
            for node in self.near[waiting.popleft()]:
                if node not in seen and node != without:
                    seen.add(node)
                    waiting.append(node)
        return seen

    def tee_before(self, supply: str) -> str | None:
        """Return the node, farthest from a supply, that parts it from all ports and where a path goes on."""
        for node in reversed(self.way_to_a_port(supply)):
            beyond = self.reached(supply, node)
            if node != supply and beyond.isdisjoint(self.ports) and self._goes_on(node, beyond):
                return node
        return None

    def _goes_on(self, node: str, beyond: set[str]) -> bool:
        """Tell whether two or more other things than what lies beyond meet at a node."""
        others = sum(node in nodes and not nodes & beyond for nodes in self.elements)
        return others + self.ports.count(node) >= 2

    def way_to_a_port(self, start: str) -> list[str]:
        """Return the nodes of a shortest way from a node to a port; empty when there is none."""
        came: dict[str, str | None] = {start: None}
        waiting = deque([start])
        while waiting:
            node: str | None = waiting.popleft()
            if node in self.ports:
                way = []
                while node is not None:
                    way.append(node)
                    node = came[node]
                return way[::-1]
            assert node is not None
            for other in sorted(self.near[node]):
                if other not in came:
                    came[other] = node
                    waiting.append(other)
        return []
