"""The schematic as a graph of nets and elements, ground left out."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from layoutgen.circuit.queries import GROUND, elements, ends_of
from layoutgen.reading import CircuitFile

__all__ = ["Graph", "build_graph"]


@dataclass(frozen=True, slots=True)
class Graph:
    """Which elements meet in which nets; both directions, file order throughout.

    ``nets_of[element]`` are its nets without ground and without repeats (a transistor's or coupled pair's
    are all joined by its body); ``elements_of[net]`` are the elements that end there.
    """

    nets_of: dict[str, tuple[str, ...]]
    elements_of: dict[str, tuple[str, ...]]

    def islands(self) -> list[tuple[str, ...]]:
        """Return the elements that hang together, one tuple per island, in file order."""
        seen: set[str] = set()
        found = []
        for element in self.nets_of:
            if element not in seen:
                island = self._reach(element)
                seen |= island
                found.append(tuple(name for name in self.nets_of if name in island))
        return found

    def _reach(self, element: str) -> set[str]:
        """Return all elements that hang together with one."""
        reached, nets, waiting = {element}, set[str](), [element]
        while waiting:
            for net in self.nets_of[waiting.pop()]:
                if net not in nets:
                    nets.add(net)
                    fresh = [name for name in self.elements_of[net] if name not in reached]
                    reached.update(fresh)
                    waiting.extend(fresh)
        return reached


def build_graph(file: CircuitFile) -> Graph:
    """Return the graph of a circuit."""
    nets_of = {
        name: _unique(net for _, net in ends_of(file, name) if net != GROUND) for name in elements(file)
    }
    elements_of: dict[str, list[str]] = {}
    for name, nets in nets_of.items():
        for net in nets:
            elements_of.setdefault(net, []).append(name)
    return Graph(nets_of, {net: tuple(names) for net, names in elements_of.items()})


def _unique(names: Iterable[str]) -> tuple[str, ...]:
    """Return the names without repeats, in order."""
    return tuple(dict.fromkeys(names))
