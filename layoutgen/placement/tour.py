"""The order of placing: a walk over the schematic from one port, deciding what goes straight on at each net.

Which arm of a junction continues straight and which leave at right angles follows from the schematic alone,
so the corrections at a line's ends are known before anything has a place; left or right is the search's
choice.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from layoutgen.circuit import Circuit, End, EndKind, Net
from layoutgen.circuit.queries import ends_of, is_shunt
from layoutgen.errors import InfeasibleError, WrongInputError
from layoutgen.origin import Fault
from layoutgen.placement.model import GROUND, Model

__all__ = ["ArmPlan", "Hub", "Tour", "plan_tour"]

MOST_ARMS = 4


@dataclass(frozen=True, slots=True)
class ArmPlan:
    """One arm of a junction as met by the walk: what leaves, and its turn [deg], None for a free side."""

    end: End
    turn: float | None


@dataclass(frozen=True, slots=True)
class Hub:
    """A net as the walk meets it: by which end it arrives, and the arms that leave."""

    net: str
    arrival: End | None
    arms: tuple[ArmPlan, ...]
    bank: tuple[End, ...] = ()

    def canonical_headings(self) -> tuple[tuple[End, float], ...]:
        """Return every end with its outgoing heading [deg] seen by the arriving traveller."""
        out: list[tuple[End, float]] = [] if self.arrival is None else [(self.arrival, 180.0)]
        sides = [90.0, 270.0]
        out.extend((arm.end, arm.turn if arm.turn is not None else sides.pop(0)) for arm in self.arms)
        return tuple(out)


@dataclass(frozen=True, slots=True)
class Tour:
    """The walk: hubs by net, the roots of its separate trees, and what hangs on each end.

    ``weight`` counts the elements beyond an end, ``leads_to_port`` tells whether there is a port among them,
    ``edges`` names the edges asked for by those ports; ``stages`` counts, for each net, the transistors that
    the walk passed on its way.
    """

    hubs: Mapping[str, Hub]
    roots: tuple[End, ...]
    weight: Mapping[tuple[str, int], int]
    leads_to_port: Mapping[tuple[str, int], bool]
    edges: Mapping[tuple[str, int], frozenset[str]]
    stages: Mapping[str, int]


def plan_tour(model: Model) -> Tour:
    """Return the walk over a circuit.

    Raises:
        InfeasibleError: The circuit holds a loop, which this version does not place.
        WrongInputError: A junction has more than four arms.
    """
    circuit = model.circuit
    if circuit.loops:
        loop = circuit.loops[0]
        raise InfeasibleError(
            loop[0],
            f"it lies on a loop ({', '.join(loop[:8])}{', ...' if len(loop) > 8 else ''}), "
            "and this version places circuits without loops only",
            "open the loop, or draw its two halves as separate circuits",
        )
    walk = _Walk(circuit)
    walk.run()
    faults = walk.crowded()
    if faults:
        raise WrongInputError(faults)
    return Tour(walk.hubs, tuple(walk.roots), walk.weight, walk.to_port, walk.edges, walk.stages)


class _Walk:
    """State of one walk: depth first, with an own stack so that deep circuits are no trouble."""

    def __init__(self, circuit: Circuit) -> None:
        self.circuit = circuit
        self.file = circuit.file
        self.spine = {name: i for i, name in enumerate(circuit.spine)}
        self.arrivals: dict[str, End] = {}
        self.order: list[str] = []
        self.roots: list[End] = []
        self.hubs: dict[str, Hub] = {}
        self.weight: dict[tuple[str, int], int] = {}
        self.to_port: dict[tuple[str, int], bool] = {}
        self.edges: dict[tuple[str, int], frozenset[str]] = {}
        self.stages: dict[str, int] = {}

    def run(self) -> None:
        """Visit everything, then weigh the branches from the leaves up and plan each net's arms."""
        for root in self._root_candidates():
            net = self._net_of(root)
            if net in self.arrivals:
                continue
            self.roots.append(root)
            self._visit(root, net)
        for net in reversed(self.order):
            self._weigh(net)
        for net in self.order:
            self.hubs[net] = self._hub(self.circuit.nets[net], self.arrivals[net])

    def crowded(self) -> list[Fault]:
        """Return a fault for each junction with more arms than can be drawn."""
        faults = []
        for hub in self.hubs.values():
            arms = len(hub.arms) + 1
            if not hub.bank and arms > MOST_ARMS:
                element = hub.arms[-1].end.element
                origin = next(
                    f"{table}.{element}"
                    for table in ("ports", "lines", "coupled", "parts")
                    if element in getattr(self.file, table)
                )
                faults.append(
                    Fault(
                        self.file.location(f"{origin}.nets"),
                        f"{origin}.nets",
                        f"net {hub.net} with {arms} arms",
                        f"at most {MOST_ARMS} arms at a junction, banks excepted",
                    )
                )
        return faults

    def _root_candidates(self) -> list[End]:
        names = [
            *self.circuit.spine[:1],
            *self.file.ports,
            *self.file.lines,
            *self.file.coupled,
            *self.file.parts,
        ]
        return [ends[0][0] for name in names if (ends := ends_of(self.file, name)) and ends[0][1] != GROUND]

    def _net_of(self, end: End) -> str:
        return next(net for found, net in ends_of(self.file, end.element) if found.index == end.index)

    def _visit(self, root: End, net: str) -> None:
        stack = [(net, root)]
        self.arrivals[net], self.stages[net] = root, 0
        while stack:
            here, arrival = stack.pop()
            self.order.append(here)
            for end in self.circuit.nets[here].ends:
                if end == arrival:
                    continue
                for far, far_net in ends_of(self.file, end.element):
                    if far.index != end.index and far_net != GROUND and far_net not in self.arrivals:
                        self.arrivals[far_net] = far
                        self.stages[far_net] = self.stages[here] + self._is_device(end)
                        stack.append((far_net, far))

    def _is_device(self, end: End) -> bool:
        return end.kind is EndKind.PAD and self.file.parts[end.element].kind == "transistor"

    def _asked_edge(self, end: End) -> frozenset[str]:
        edge = self.file.ports[end.element].edge if end.kind is EndKind.PORT else None
        return frozenset() if edge is None else frozenset([edge])

    def _weigh(self, net: str) -> None:
        arrival = self.arrivals[net]
        for end in self.circuit.nets[net].ends:
            if end == arrival:
                continue
            weight, port, edges = 1, end.kind is EndKind.PORT, self._asked_edge(end)
            for far, far_net in ends_of(self.file, end.element):
                if self.arrivals.get(far_net) == far and far != end:
                    weight += self.weight.get((far_net, -1), 0)
                    port = port or self.to_port.get((far_net, -1), False)
                    edges |= self.edges.get((far_net, -1), frozenset())
            key, whole = (end.element, end.index), (net, -1)
            self.weight[key], self.to_port[key], self.edges[key] = weight, port, edges
            self.edges[whole] = self.edges.get(whole, frozenset()) | edges
            self.weight[(net, -1)] = self.weight.get((net, -1), 0) + weight
            self.to_port[(net, -1)] = self.to_port.get((net, -1), False) or port

    def _hub(self, net: Net, arrival: End) -> Hub:
        bank = tuple(end for name in net.bank for end in net.ends if end.element == name)
        if bank and net.feed is not None and net.feed != arrival:
            bank = bank[::-1]
        others = [end for end in net.ends if end != arrival and end not in bank]
        if not others:
            return Hub(net.name, arrival, (), bank)
        through = min(others, key=self._straightness)
        rest = [end for end in others if end != through]
        if self._splits_evenly(through, rest):
            return Hub(net.name, arrival, tuple(ArmPlan(end, None) for end in others), bank)
        return Hub(net.name, arrival, (ArmPlan(through, 0.0), *(ArmPlan(end, None) for end in rest)), bank)

    def _straightness(self, end: End) -> tuple[int, int, int, int, int]:
        """Return a key that is least for the arm which should go straight on."""
        key = (end.element, end.index)
        part = end.kind is EndKind.PAD and is_shunt(self.file.parts[end.element])
        radial = end.kind is EndKind.LINE and self.file.lines[end.element].shape == "radial"
        return (
            self.spine.get(end.element, len(self.spine)),
            int(part or radial),
            int(not self.to_port.get(key, False)),
            int(end.kind is not EndKind.PORT),
            -self.weight.get(key, 0),
        )

    def _splits_evenly(self, through: End, rest: list[End]) -> bool:
        """True for two like lines off the spine that lead on alike: a divider's arms."""
        if len(rest) != 1 or through.kind is not EndKind.LINE or rest[0].kind is not EndKind.LINE:
            return False
        if through.element in self.spine and len(self.spine) > 1 and self._has_one_way_spine():
            return False
        first, second = self.file.lines[through.element], self.file.lines[rest[0].element]
        same = (first.impedance, first.width, first.angle, first.length) == (
            second.impedance,
            second.width,
            second.angle,
            second.length,
        )
        key, other = (through.element, through.index), (rest[0].element, rest[0].index)
        return (
            same and first.shape is None and len(first.nets) == 2 and self.weight[key] == self.weight[other]
        )

    def _has_one_way_spine(self) -> bool:
        """True when the user named the spine: a named path is drawn straight, never split."""
        return self.file.layout is not None and self.file.layout.spine is not None
