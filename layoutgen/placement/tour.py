"""The order of placing: a walk over the schematic from one port, deciding what goes straight on at each net.

Which arm of a junction continues straight and which leave at right angles follows from the schematic alone,
so the corrections at a line's ends are known before anything has a place; left or right is the search's
choice. Only the nets of a cluster (``loops``) wait for its drawing. Loops are cut at their closers, so the
walk itself meets none.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from layoutgen.circuit import Circuit, End, EndKind, Net
from layoutgen.circuit.queries import element_key, ends_of, is_shunt, net_of
from layoutgen.errors import WrongInputError
from layoutgen.origin import Fault
from layoutgen.placement.loops import Cluster, Loops, find_loops
from layoutgen.placement.model import GROUND, Model
from layoutgen.placement.twins import Twin, find_twins

__all__ = ["MOST_ARMS", "ArmPlan", "Headings", "Hub", "Tour", "end_key", "plan_tour", "walked_hubs"]

MOST_ARMS = 4

Headings = tuple[tuple[End, float], ...]
"""The ends that meet in a net, each with its outgoing heading [deg] in some common frame."""


@dataclass(frozen=True, slots=True)
class ArmPlan:
    """One arm of a junction as met by the walk: what leaves, and its turn [deg], None for a free side."""

    end: End
    turn: float | None


@dataclass(frozen=True, slots=True)
class Hub:
    """A net as the walk meets it: by which end it arrives, and the arms that leave.

    For a net of a cluster, ``cluster`` is its number and ``inner`` are the ends of the cluster's elements;
    the arms are what leaves the cluster, and their headings come with its drawing.
    """

    net: str
    arrival: End | None
    arms: tuple[ArmPlan, ...]
    bank: tuple[End, ...] = ()
    cluster: int | None = None
    inner: tuple[End, ...] = ()

    def canonical_headings(self) -> Headings:
        """Return every end with its outgoing heading [deg] seen by the arriving traveller."""
        out: list[tuple[End, float]] = [] if self.arrival is None else [(self.arrival, 180.0)]
        if self.cluster is not None:
            rest = [end for end in (*self.inner, *(arm.end for arm in self.arms)) if end != self.arrival]
            return (*out, *zip(rest, (0.0, 90.0, 270.0), strict=False))
        sides = [90.0, 270.0]
        out.extend((arm.end, arm.turn if arm.turn is not None else sides.pop(0)) for arm in self.arms)
        return tuple(out)


@dataclass(frozen=True, slots=True)
class Tour:
    """The walk: hubs by net, the roots of its separate trees, and what hangs on each end.

    ``weight`` counts the elements beyond an end, ``leads_to_port`` tells whether there is a port among them,
    ``edges`` names the edges asked for by those ports; ``stages`` counts, for each net, the transistors that
    the walk passed on its way. ``entries`` are, by cluster, the nets at which the walk enters them. ``twins``
    maps the key of an end to its counterpart in an equal branch that is laid before it; arms of one
    ``likeness`` hold equal branches. ``first_port`` is the least position in the file of the ports beyond;
    ``siblings`` name, for either of two equal arms of one net or cluster, the key of the other.
    """

    hubs: Mapping[str, Hub]
    roots: tuple[End, ...]
    weight: Mapping[tuple[str, int], int]
    leads_to_port: Mapping[tuple[str, int], bool]
    edges: Mapping[tuple[str, int], frozenset[str]]
    stages: Mapping[str, int]
    loops: Loops
    entries: tuple[str, ...]
    twins: Mapping[str, Twin]
    likeness: Mapping[str, int]
    first_port: Mapping[tuple[str, int], int]
    siblings: Mapping[str, str]

    def port_at(self, far: tuple[End, str] | None) -> str | None:
        """Return the port that a line ends in by its far end, when nothing else meets there."""
        if far is None or far[1] == GROUND:
            return None
        hub = self.hubs[far[1]]
        if hub.arrival == far[0] and not hub.bank and len(hub.arms) == 1:
            end = hub.arms[0].end
            return end.element if end.kind is EndKind.PORT else None
        return None

    def ends_in_port(self, end: End) -> bool:
        """True for a line or port that only leads to a port."""
        weight = self.weight.get((end.element, end.index), 0)
        return weight <= 2 and self.leads_to_port.get((end.element, end.index), False)


def end_key(end: End) -> str:
    """Return the name under which an end's choice is kept."""
    return f"{end.element}:{end.index}"


def plan_tour(model: Model, cut: frozenset[str] = frozenset(), *, wide: bool = False) -> Tour:
    """Return the walk over a circuit.

    Args:
        model: The circuit.
        cut: Elements of clusters that are to be cut at a line, because no drawing of them was found.
        wide: Whether clusters hold free RF lines and transistors, too.

    Raises:
        InfeasibleError: A loop that cannot be drawn in any way.
        WrongInputError: A junction has more than four arms.
    """
    loops = find_loops(model.sized, cut, wide=wide)
    walk = _Walk(model.circuit, loops)
    walk.run()
    faults = walk.crowded()
    if faults:
        raise WrongInputError(faults)
    twins, likeness, siblings = find_twins(model.circuit, walk.hubs, walk.order, loops, walk.port_count)
    return Tour(
        walk.hubs,
        tuple(walk.roots),
        walk.weight,
        walk.to_port,
        walk.edges,
        walk.stages,
        loops,
        tuple(walk.entries[k] for k in range(len(loops.clusters))),
        twins,
        likeness,
        walk.first_port,
        siblings,
    )


def walked_hubs(circuit: Circuit, loops: Loops) -> Mapping[str, Hub]:
    """Return every net as the walk meets it, also those with more arms than can be drawn."""
    walk = _Walk(circuit, loops)
    walk.run()
    return walk.hubs


class _Walk:
    """State of one walk: depth first, with an own stack so that deep circuits are no trouble."""

    def __init__(self, circuit: Circuit, loops: Loops) -> None:
        self.circuit = circuit
        self.file = circuit.file
        self.loops = loops
        self.skipped = loops.companions
        self.cluster_of = _by_net(loops.clusters)
        self.in_cluster = _by_element(loops.clusters)
        self.spine = {name: i for i, name in enumerate(circuit.spine)}
        self.arrivals: dict[str, End] = {}
        self.order: list[str] = []
        self.roots: list[End] = []
        self.hubs: dict[str, Hub] = {}
        self.weight: dict[tuple[str, int], int] = {}
        self.to_port: dict[tuple[str, int], bool] = {}
        self.edges: dict[tuple[str, int], frozenset[str]] = {}
        self.stages: dict[str, int] = {}
        self.entries: dict[int, str] = {}
        self.first_port: dict[tuple[str, int], int] = {}
        self.port_count: dict[tuple[str, int], int] = {}
        self.port_order = {name: i for i, name in enumerate(self.file.ports)}

    def run(self) -> None:
        """Visit everything, then weigh the branches from the leaves up and plan each net's arms."""
        for root in self._root_candidates():
            net = net_of(self.file, root)
            if net in self.arrivals:
                continue
            self.roots.append(root)
            self._visit(root, net)
        for net in reversed(self.order):
            self._weigh(net)
        for net in self.order:
            self.hubs[net] = self._hub(self.circuit.nets[net], self.arrivals[net])
            for k in self.cluster_of.get(net, ()):
                self.entries.setdefault(k, net)

    def crowded(self) -> list[Fault]:
        """Return a fault for each junction with more arms than can be drawn."""
        faults = []
        for hub in self.hubs.values():
            ends = self._ends(hub.net)
            if not hub.bank and len(ends) > MOST_ARMS:
                key = f"{element_key(self.file, ends[-1].element)}.nets"
                found = f"net {hub.net} with {len(ends)} arms"
                allowed = f"at most {MOST_ARMS} arms at a junction, banks excepted"
                faults.append(Fault(self.file.location(key), key, found, allowed))
        return faults

    def _ends(self, net: str) -> list[End]:
        """Return the ends that are arms of a net: those of parts laid beside another are not."""
        return [end for end in self.circuit.nets[net].ends if end.element not in self.skipped]

    def _root_candidates(self) -> list[End]:
        names = [
            *self.circuit.spine[:1],
            *self.file.ports,
            *self.file.lines,
            *self.file.coupled,
            *self.file.parts,
        ]
        return [ends[0][0] for name in names if (ends := ends_of(self.file, name)) and ends[0][1] != GROUND]

    def _visit(self, root: End, net: str) -> None:
        stack = [(net, root)]
        self.arrivals[net], self.stages[net] = root, 0
        while stack:
            here, arrival = stack.pop()
            self.order.append(here)
            for end in self._ends(here):
                if end == arrival or end.element in self.loops.closers:
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

    def _edges_on(self, net: str) -> frozenset[str]:
        """Return the edges asked for by the ports on a net."""
        asked = [self._asked_edge(end) for end in self._ends(net)]
        return frozenset[str]().union(*asked)

    def _weigh(self, net: str) -> None:
        arrival = self.arrivals[net]
        for end in self._ends(net):
            if end == arrival:
                continue
            weight, port, edges = 1, end.kind is EndKind.PORT, self._asked_edge(end)
            self._note_ports(end)
            for far, far_net in ends_of(self.file, end.element):
                if far != end and end.element in self.loops.closers:
                    edges |= self._edges_on(far_net)
                if self.arrivals.get(far_net) == far and far != end:
                    weight += self.weight.get((far_net, -1), 0)
                    port = port or self.to_port.get((far_net, -1), False)
                    edges |= self.edges.get((far_net, -1), frozenset())
            key, whole = (end.element, end.index), (net, -1)
            self.weight[key], self.to_port[key], self.edges[key] = weight, port, edges
            self.edges[whole] = self.edges.get(whole, frozenset()) | edges
            self.weight[(net, -1)] = self.weight.get((net, -1), 0) + weight
            self.to_port[(net, -1)] = self.to_port.get((net, -1), False) or port

    def _note_ports(self, end: End) -> None:
        """Note how many ports lie beyond an end, and the first of them."""
        found = [(self.port_order[end.element], 1)] if end.kind is EndKind.PORT else []
        for far, net in ends_of(self.file, end.element):
            if far != end and self.arrivals.get(net) == far and (net, -1) in self.port_count:
                found.append((self.first_port[net, -1], self.port_count[net, -1]))
        if not found:
            return
        net = net_of(self.file, end)
        for key in ((end.element, end.index), (net, -1)):
            first, count = self.first_port.get(key), self.port_count.get(key, 0)
            least = min(index for index, _ in found)
            self.first_port[key] = least if first is None else min(first, least)
            self.port_count[key] = count + sum(number for _, number in found)

    def _hub(self, net: Net, arrival: End) -> Hub:
        cluster = self._cluster_at(net.name)
        if cluster is not None:
            inner = tuple(end for end in self._ends(net.name) if self.in_cluster.get(end.element) == cluster)
            arms = [end for end in self._ends(net.name) if end != arrival and end not in inner]
            return Hub(net.name, arrival, tuple(ArmPlan(e, None) for e in arms), (), cluster, inner)
        bank = tuple(end for name in net.bank for end in net.ends if end.element == name)
        if bank and net.feed is not None and net.feed != arrival:
            bank = bank[::-1]
        others = [end for end in self._ends(net.name) if end != arrival and end not in bank]
        if not others:
            return Hub(net.name, arrival, (), bank)
        through = min(others, key=self._straightness)
        rest = [end for end in others if end != through]
        if self._splits_evenly(through, rest):
            return Hub(net.name, arrival, tuple(ArmPlan(end, None) for end in others), bank)
        return Hub(net.name, arrival, (ArmPlan(through, 0.0), *(ArmPlan(end, None) for end in rest)), bank)

    def _cluster_at(self, net: str) -> int | None:
        """Return the number of the cluster that a net belongs to."""
        return next(iter(self.cluster_of.get(net, ())), None)

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


def _by_net(clusters: tuple[Cluster, ...]) -> dict[str, tuple[int, ...]]:
    """Return the clusters of each net."""
    out: dict[str, tuple[int, ...]] = {}
    for k, cluster in enumerate(clusters):
        for net in cluster.nets:
            out[net] = (*out.get(net, ()), k)
    return out


def _by_element(clusters: tuple[Cluster, ...]) -> dict[str, int]:
    """Return the cluster of each element that belongs to one."""
    return {name: k for k, cluster in enumerate(clusters) for name in cluster.elements}
