"""Loops of the schematic, sorted by how they are laid.

Three ways: parts between the same two nets stand side by side (``Loops.beside``); a loop with a free line is
cut at that line, which is laid last between two placed nodes (``Loops.closers``); what is left, loops of
lines of given length and of two-pad parts, is laid as one ``Cluster`` whose legs come from one linear
program. Loops that no cluster can hold (through transistors, coupled pairs, banks, or too many elements) are
cut at their longest line, whose length then has to meet its far node. Where that finds no place, ``wide``
clusters hold transistors and free RF lines, too: then only loops through coupled pairs and banks are cut.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from layoutgen.circuit import Circuit
from layoutgen.circuit.queries import GROUND, ends_of, is_shunt, two_nets
from layoutgen.errors import InfeasibleError
from layoutgen.sizing import SizedCircuit

__all__ = ["Cluster", "Loops", "find_loops"]

MOST_ELEMENTS = 14
"""Most elements of a cluster [-]: the drawings to try grow exponentially with them."""

MOST_WIDE = 36
"""Most elements of a wide cluster [-], in which smaller loops keep their drawings."""

Node = tuple[bool, str]


@dataclass(frozen=True, slots=True)
class Cluster:
    """A biconnected piece of the schematic: its lines and two-pad parts, and the nets they join."""

    elements: tuple[str, ...]
    nets: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Loops:
    """How the loops of a circuit are laid.

    ``beside`` maps a part to those that stand beside it, between the same two nets.
    """

    closers: frozenset[str]
    clusters: tuple[Cluster, ...]
    beside: Mapping[str, tuple[str, ...]]

    @property
    def companions(self) -> frozenset[str]:
        """The parts that are laid beside another one."""
        return frozenset(name for names in self.beside.values() for name in names)


def find_loops(sized: SizedCircuit, cut: frozenset[str] = frozenset(), *, wide: bool = False) -> Loops:
    """Return how each loop of a circuit is laid.

    Args:
        sized: The circuit.
        cut: Elements of clusters for which no drawing was found: these are cut at a line instead.
        wide: Whether clusters hold free RF lines and transistors, too.

    Raises:
        InfeasibleError: A loop that can be neither drawn as a cluster nor cut, or a net of one with a bank.
    """
    circuit = sized.circuit
    beside = _side_by_side(circuit)
    away = frozenset(name for names in beside.values() for name in names)
    closers = _free_closers(sized, away)
    if wide:
        closers = frozenset(name for name in closers if not sized.lines[name].rf)
    nets_of = {name: nets for name, nets in _nets_of(circuit).items() if name not in away | closers}
    blocks = _blocks(nets_of)
    while (wrong := _not_a_cluster(circuit, blocks, cut, wide=wide)) is not None:
        line = _line_to_cut(sized, wrong)
        closers |= {line}
        del nets_of[line]
        blocks = _blocks(nets_of)
    clusters = [_cluster(block, nets_of) for block in blocks]
    return Loops(closers, tuple(clusters), beside)


def _cluster(block: tuple[str, ...], nets_of: Mapping[str, tuple[str, ...]]) -> Cluster:
    return Cluster(block, tuple(dict.fromkeys(net for name in block for net in nets_of[name])))


def _not_a_cluster(
    circuit: Circuit, blocks: list[tuple[str, ...]], cut: frozenset[str], *, wide: bool
) -> tuple[str, ...] | None:
    """Return the first block that is to be cut: one that is no cluster, or meets another in a net."""
    seen: set[str] = set()
    for block in blocks:
        nets = {net for name in block for _, net in ends_of(circuit.file, name)}
        if cut & set(block) or not _is_cluster(circuit, block, wide=wide) or seen & nets:
            return block
        seen |= nets
    return None


def _nets_of(circuit: Circuit) -> dict[str, tuple[str, ...]]:
    """Return the nets of every element, ground left out, each once."""
    file = circuit.file
    names = (*file.ports, *file.lines, *file.coupled, *file.parts)
    return {
        name: tuple(dict.fromkeys(net for _, net in ends_of(file, name) if net != GROUND)) for name in names
    }


def _side_by_side(circuit: Circuit) -> dict[str, tuple[str, ...]]:
    """Return, for each first part between two nets, the others between the same two."""
    found: dict[frozenset[str], list[str]] = {}
    for name, part in circuit.file.parts.items():
        nets = two_nets(part)
        if nets is not None and not is_shunt(part):
            found.setdefault(frozenset(nets), []).append(name)
    return {names[0]: tuple(names[1:]) for names in found.values() if len(names) > 1}


def _free_closers(sized: SizedCircuit, away: frozenset[str]) -> frozenset[str]:
    """Return the free lines that close a loop when elements are joined, given ones first, supplies last."""
    nets_of = _nets_of(sized.circuit)

    def rank(name: str) -> int:
        line = sized.lines.get(name)
        return 0 if line is None or not line.free else (1 if line.rf else 2)

    joined = _Joined()
    closing = set()
    for name in sorted((n for n in nets_of if n not in away), key=rank):
        fresh = [joined.join((True, name), (False, net)) for net in nets_of[name]]
        if rank(name) and not all(fresh):
            closing.add(name)
    return frozenset(closing)


def _is_cluster(circuit: Circuit, block: tuple[str, ...], *, wide: bool) -> bool:
    """True for a loop of lines and two-pad parts only, no bank on it, and few enough of them.

    A wide one may hold parts of more pads, if the others are on ground.
    """
    file = circuit.file
    joins = _joins_two if wide else _has_two
    plain = all(name in file.lines or (name in file.parts and joins(circuit, name)) for name in block)
    banks = any(circuit.nets[net].bank for name in block for _, net in ends_of(file, name) if net != GROUND)
    return plain and not banks and len(block) <= (MOST_WIDE if wide else MOST_ELEMENTS)


def _has_two(circuit: Circuit, name: str) -> bool:
    return two_nets(circuit.file.parts[name]) is not None


def _joins_two(circuit: Circuit, name: str) -> bool:
    """True for a part with two ends off ground, on different nets."""
    nets = [net for _, net in ends_of(circuit.file, name) if net != GROUND]
    return len(nets) == len(set(nets)) == 2


def _line_to_cut(sized: SizedCircuit, block: tuple[str, ...]) -> str:
    """Return the line at which a block is cut: the longest of its largest loop that lies on no other loop.

    Raises:
        InfeasibleError: A loop without a line.
    """
    inside = [loop for loop in sized.circuit.loops if set(loop) <= set(block)]
    loop = max(inside, key=len, default=block)
    elsewhere = {name for other in inside if other != loop for name in other}
    lines = [name for name in loop if name in sized.lines] or [n for n in block if n in sized.lines]
    if not lines:
        raise InfeasibleError(
            block[0],
            f"it lies on a loop without a line that could close it ({', '.join(block[:8])})",
            'put a line of length = "free" into the loop',
        )
    return max(lines, key=lambda name: (name not in elsewhere, _length(sized, name)))


def _length(sized: SizedCircuit, name: str) -> float:
    """Return about how long a line is [m]."""
    line = sized.lines[name]
    return line.length if line.length is not None else (line.angle or 0.0) / line.beta


class _Joined:
    """Sets of nodes that hang together."""

    def __init__(self) -> None:
        """Start with every node alone."""
        self.parent: dict[Node, Node] = {}

    def join(self, a: Node, b: Node) -> bool:
        """Join two nodes; False when they hung together before."""
        a, b = self._root(a), self._root(b)
        self.parent[a] = b
        return a != b

    def _root(self, node: Node) -> Node:
        while self.parent.setdefault(node, node) != node:
            self.parent[node] = node = self.parent[self.parent[node]]
        return node


def _blocks(nets_of: Mapping[str, tuple[str, ...]]) -> list[tuple[str, ...]]:
    """Return the elements of every biconnected piece that holds a loop, in file order.

    Nets and elements are the nodes of a graph whose edges are ends; depth first with an own stack
    (Hopcroft and Tarjan 1973).
    """
    near: dict[Node, list[Node]] = {}
    for name, nets in nets_of.items():
        for net in nets:
            near.setdefault((True, name), []).append((False, net))
            near.setdefault((False, net), []).append((True, name))
    order = {name: i for i, name in enumerate(nets_of)}
    found = []
    seen: dict[Node, int] = {}
    for root in near:
        if root not in seen:
            found += _blocks_from(root, near, seen)
    blocks = [_elements_in(block, order) for block in found if len(block) > 1]
    return sorted(blocks, key=lambda block: order[block[0]])


def _elements_in(edges: Iterable[tuple[Node, Node]], order: Mapping[str, int]) -> tuple[str, ...]:
    names = {node[1] for edge in edges for node in edge if node[0]}
    return tuple(sorted(names, key=lambda name: order[name]))


def _blocks_from(
    root: Node, near: Mapping[Node, list[Node]], seen: dict[Node, int]
) -> list[list[tuple[Node, Node]]]:
    """Return the edges of each biconnected piece reached from a node."""
    low: dict[Node, int] = {}
    edges: list[tuple[Node, Node]] = []
    place: dict[tuple[Node, Node], int] = {}
    blocks = []
    seen[root] = low[root] = len(seen)
    stack = [(root, root, iter(near[root]))]
    while stack:
        node, parent, rest = stack[-1]
        following = next(rest, None)
        if following is None:
            stack.pop()
            if stack:
                low[parent] = min(low[parent], low[node])
                if low[node] >= seen[parent]:
                    at = place[parent, node]
                    blocks.append(edges[at:])
                    del edges[at:]
        elif following not in seen:
            place[node, following] = len(edges)
            edges.append((node, following))
            seen[following] = low[following] = len(seen)
            stack.append((following, node, iter(near[following])))
        elif following != parent and seen[following] < seen[node]:
            edges.append((node, following))
            low[node] = min(low[node], seen[following])
    return blocks
