"""The spine: the path of elements that is drawn straight through."""

from __future__ import annotations

import heapq
from collections.abc import Iterable, Iterator

from layoutgen.circuit.graph import Graph
from layoutgen.errors import WrongInputError
from layoutgen.origin import Fault
from layoutgen.reading import CircuitFile

__all__ = ["find_spine"]

_DC_COST = 1000
_RESISTOR_COST = 10


def find_spine(file: CircuitFile, graph: Graph, dc: frozenset[str]) -> tuple[str, ...]:
    """Return the elements along the spine, ports included.

    With ``[layout] spine`` it is that list with what lies between its elements filled in. Else it runs from
    the first RF port to the next one that can be reached, or, with one RF port, to the element farthest
    from it; without any, from the first port. Ways through DC nets are taken only where there is no other,
    ways through resistors only where they save more than ten elements; then the shorter way, then file order.

    Raises:
        WrongInputError: The list names no element of the circuit, or no path leads from one to the next.
    """
    costs = _Costs(file, graph, dc)
    if file.layout.spine is not None:
        return _expanded(file, costs, file.layout.spine)
    rf = [name for name, port in file.ports.items() if port.kind == "rf"]
    ports = rf or list(file.ports)
    start = ports[0]
    for goal in rf[1:]:
        path = next(costs.paths(graph.nets_of[start], goal, {start}), None)
        if path is not None:
            return (start, *path[0], goal)
    return (start, *_to_farthest(costs, start, bool(rf)))


class _Costs:
    """Shortest ways through the graph."""

    def __init__(self, file: CircuitFile, graph: Graph, dc: frozenset[str]) -> None:
        """Give each element its cost."""
        self.graph, self.dc = graph, dc
        self.order = {name: i for i, name in enumerate(graph.nets_of)}
        self.cost = {name: self._cost(file, name) for name in graph.nets_of}

    def _cost(self, file: CircuitFile, name: str) -> int:
        """Return what it costs to pass an element."""
        part = file.parts.get(name)
        cost = _RESISTOR_COST if part is not None and part.kind == "resistor" else 1
        return cost + _DC_COST * any(net in self.dc for net in self.graph.nets_of[name])

    def reach(self, starts: Iterable[str], banned: set[str]) -> dict[str, tuple[int, tuple[str, ...]]]:
        """Return for every net that can be reached from the nets ``starts``: cost and elements on the way.

        Elements in ``banned`` are not passed. Ties go to the way whose elements stand first in the file.
        """
        done: dict[str, tuple[int, tuple[str, ...]]] = {}
        heap: list[tuple[int, tuple[int, ...], str, tuple[str, ...]]] = [(0, (), net, ()) for net in starts]
        heapq.heapify(heap)
        while heap:
            cost, ranks, net, path = heapq.heappop(heap)
            if net in done:
                continue
            done[net] = (cost, path)
            for element in self.graph.elements_of.get(net, ()):
                if element in banned or element in path:
                    continue
                for far in self.graph.nets_of[element]:
                    if far not in done:
                        item = (
                            cost + self.cost[element],
                            (*ranks, self.order[element]),
                            far,
                            (*path, element),
                        )
                        heapq.heappush(heap, item)
        return done

    def paths(
        self, starts: Iterable[str], goal: str, banned: set[str]
    ) -> Iterator[tuple[tuple[str, ...], str]]:
        """Yield (elements on the way, net of arrival) for each net of an element, the cheapest first."""
        reached = self.reach(starts, banned | {goal})
        arrivals = [net for net in self.graph.nets_of[goal] if net in reached]
        for net in sorted(arrivals, key=lambda net: reached[net][0]):
            yield reached[net][1], net


def _to_farthest(costs: _Costs, start: str, avoid_dc: bool) -> tuple[str, ...]:
    """Return the way from a port to the element with most elements before it, that element included."""
    reached = costs.reach(costs.graph.nets_of[start], {start})
    best: tuple[str, ...] = ()
    for net, (_, path) in sorted(reached.items(), key=lambda item: len(item[1][1])):
        if avoid_dc and net in costs.dc:
            continue
        for element in costs.graph.elements_of[net]:
            if element != start and element not in path and len(path) + 1 > len(best):
                best = (*path, element)
    return best


def _expanded(file: CircuitFile, costs: _Costs, named: tuple[str, ...]) -> tuple[str, ...]:
    """Return the named elements with those between them filled in."""
    faults = [
        _fault(
            file, i, f'"{name}", no element of the circuit', "the name of a port, line, coupled pair or part"
        )
        for i, name in enumerate(named)
        if name not in costs.graph.nets_of
    ]
    faults += [
        _fault(file, i, f'"{name}" a second time', "each element once")
        for i, name in enumerate(named)
        if name in named[:i]
    ]
    if faults:
        raise WrongInputError(faults)
    best: list[int] = [0]
    path = _continued(costs, named, 1, frozenset(costs.graph.nets_of[named[0]]), (named[0],), best)
    if path is None:
        at = best[0] + 1
        found = f'no path from "{named[at - 1]}" to "{named[at]}" that passes no element twice'
        raise WrongInputError([_fault(file, at, found, "elements that lines, series parts and pins join")])
    return path


def _continued(
    costs: _Costs,
    named: tuple[str, ...],
    at: int,
    leaving: frozenset[str],
    path: tuple[str, ...],
    best: list[int],
) -> tuple[str, ...] | None:
    """Return the path continued to the last named element, or None; ``best`` keeps how far it came."""
    best[0] = max(best[0], at - 1)
    if at == len(named):
        return path
    goal = named[at]
    starts = [net for net in costs.graph.nets_of[named[at - 1]] if net in leaving]
    for way, net in costs.paths(starts, goal, {*path, *named[at + 1 :]}):
        exits = frozenset(costs.graph.nets_of[goal]) - {net}
        found = _continued(costs, named, at + 1, exits, (*path, *way, goal), best)
        if found is not None:
            return found
    return None


def _fault(file: CircuitFile, index: int, found: str, allowed: str) -> Fault:
    """Return a fault of one entry of ``[layout] spine``."""
    return Fault(file.location("layout.spine"), f"layout.spine[{index}]", found, allowed)
