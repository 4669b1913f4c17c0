"""Equal branches: which end of one answers to which of another, so that both can be laid alike."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from layoutgen.circuit import Circuit, End
from layoutgen.circuit.queries import GROUND, ends_of
from layoutgen.placement.loops import Loops

if TYPE_CHECKING:
    from layoutgen.placement.tour import Hub

__all__ = ["Twin", "find_twins"]


@dataclass(frozen=True, slots=True)
class Twin:
    """The key of a counterpart, and whether to mirror it or to copy it as it lies."""

    key: str
    mirrors: bool


_PLACE_FIELDS = {"nets", "net", "pins", "edge", "at"}


def find_twins(
    circuit: Circuit,
    hubs: Mapping[str, Hub],
    order: Sequence[str],
    loops: Loops,
    ports: Mapping[tuple[str, int], int],
) -> tuple[dict[str, Twin], dict[str, int], dict[str, str]]:
    """Return, by the key of an end, its counterpart in an equal branch that comes before it.

    The two arms themselves mirror each other. What hangs on them does too, but for branches with several
    ports: ports come in file order along an edge, so the second branch is a copy of the first.

    The second result gives every arm a number: equal numbers, equal branches. The third names, for either of
    two equal arms, the other one.

    Args:
        circuit: The circuit.
        hubs: Every net as the walk meets it.
        order: Nets in the order of the walk.
        loops: How its loops are laid.
        ports: Number of ports beyond an end.
    """
    finder = _Finder(circuit, hubs, loops)
    for net in reversed(order):
        finder.sign(net)
    twins: dict[str, Twin] = {}
    siblings: dict[str, str] = {}
    for net in order:
        for first, second in finder.equal_arms(hubs[net]):
            mirrors = ports.get((first.element, first.index), 0) <= 1
            found = list(finder.counterparts(first, second))
            twins.update((own, Twin(other, mirrors)) for own, other in found)
            own, other = found[0]
            twins[own] = Twin(other, mirrors=True)
            siblings |= {own: other, other: own}
    return twins, finder.likeness(), siblings


class _Finder:
    """Signatures of what hangs on each end, as small numbers: equal numbers, equal branches."""

    def __init__(self, circuit: Circuit, hubs: Mapping[str, Hub], loops: Loops) -> None:
        self.circuit, self.hubs, self.loops = circuit, hubs, loops
        self.numbers: dict[object, int] = {}
        self.nets: dict[str, int] = {}
        self.data: dict[str, str] = {}
        self.inside: dict[int, list[str]] = {}
        file = circuit.file
        names = (*file.ports, *file.lines, *file.coupled, *file.parts)
        self.position = {name: i for i, name in enumerate(names)}

    def sign(self, net: str) -> None:
        """Give a net the number of all that hangs on it; the nets beyond it have theirs."""
        hub = self.hubs[net]
        arms = tuple((self._of(arm.end), arm.turn) for arm in hub.arms)
        bank = tuple(self._data(end.element) for end in hub.bank)
        inner: tuple[object, ...] = ()
        if hub.cluster is not None:
            inner = tuple((self._data(end.element), end.index) for end in hub.inner)
            if hub.arrival in hub.inner:
                self.inside.setdefault(hub.cluster, []).append(net)
            else:
                nets = self.inside.get(hub.cluster, [])
                inner = (*inner, *(self.nets[other] for other in nets))
        self.nets[net] = self._number((arms, bank, inner))

    def likeness(self) -> dict[str, int]:
        """Return the number of every arm by its key."""
        arms = [arm.end for hub in self.hubs.values() for arm in hub.arms]
        return {f"{end.element}:{end.index}": self._of(end) for end in arms}

    def equal_arms(self, hub: Hub) -> Iterator[tuple[End, End]]:
        """Yield the two arms of a net, or of a cluster, that hold equal branches."""
        if hub.cluster is None:
            arms = [arm.end for arm in hub.arms if arm.turn is None]
        elif hub.arrival not in hub.inner:
            arms = [arm.end for net in self.inside.get(hub.cluster, ()) for arm in self.hubs[net].arms]
        else:
            return
        numbers = [self._of(end) for end in arms]
        for number in dict.fromkeys(numbers):
            same = [end for end, other in zip(arms, numbers, strict=True) if other == number]
            if len(same) == 2:
                first, second = sorted(same, key=lambda end: (self.position[end.element], end.index))
                yield first, second

    def counterparts(self, first: End, second: End) -> Iterator[tuple[str, str]]:
        """Yield (key of second, key of first) for two equal branches, end by end."""
        stack = [(first, second)]
        while stack:
            a, b = stack.pop()
            yield f"{b.element}:{b.index}", f"{a.element}:{a.index}"
            for net_a, net_b in zip(self._beyond(a), self._beyond(b), strict=True):
                stack.extend(zip(self._leaving(net_a), self._leaving(net_b), strict=True))

    def _leaving(self, net: str) -> list[End]:
        """Return the ends that are laid from a net, those of a whole cluster where it is entered there."""
        hub = self.hubs[net]
        ends = [arm.end for arm in hub.arms]
        if hub.cluster is not None and hub.arrival not in hub.inner:
            ends += hub.inner
            for other in self.inside.get(hub.cluster, ()):
                ends += [arm.end for arm in self.hubs[other].arms]
        return ends

    def _beyond(self, end: End) -> list[str]:
        """Return the nets that the walk reaches through an end, inner ones of clusters left out."""
        found = []
        for far, net in ends_of(self.circuit.file, end.element):
            hub = self.hubs.get(net)
            inner = hub is not None and hub.cluster is not None and far in hub.inner
            if far.index != end.index and hub is not None and hub.arrival == far and not inner:
                found.append(net)
        return found

    def _of(self, end: End) -> int:
        """Return the number of an end and all beyond it."""
        far = []
        for other, net in ends_of(self.circuit.file, end.element):
            if other.index == end.index:
                continue
            reached = net in self.hubs and self.hubs[net].arrival == other
            far.append(GROUND if net == GROUND else self.nets.get(net, -1) if reached else -1)
        closes = end.element in self.loops.closers
        return self._number((self._data(end.element), end.index, tuple(far), closes))

    def _data(self, element: str) -> str:
        """Return what is asked of an element, its place left out."""
        if element not in self.data:
            file = self.circuit.file
            tables = (file.ports, file.lines, file.coupled, file.parts)
            record = next(table[element] for table in tables if element in table)
            self.data[element] = repr(record.model_dump(exclude=_PLACE_FIELDS))
        return self.data[element]

    def _number(self, what: object) -> int:
        return self.numbers.setdefault(what, len(self.numbers))
