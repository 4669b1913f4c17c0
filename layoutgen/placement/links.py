"""How the arms of a net are shared out over a chain of junctions, and how wide and long its strips are.

The two arms that go straight on, the spine's if it passes, stand at the two ends. The others leave sideways,
two to a junction in file order; ends that a loop joins stay together at an end of the chain, so that no strip
comes to lie in the loop. A strip is as long as those of its arms that leave to one side must lie apart: lines
keep the spacing rule, parts what the search asks of their courtyards and pads.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from layoutgen.circuit import Circuit, End, EndKind
from layoutgen.circuit.queries import GROUND, ends_of
from layoutgen.placement.bodies import part_body
from layoutgen.placement.clearance import Kind, clearance_table
from layoutgen.placement.frame import Pose, to_world
from layoutgen.placement.kit import part_obstacles
from layoutgen.placement.loops import Loops
from layoutgen.placement.model import Limits
from layoutgen.placement.tour import Hub
from layoutgen.sizing import SizedCircuit, strip_width
from layoutgen.units import to_nm

__all__ = ["Chain", "chain_of"]

_AT_ONE = 2  # arms that leave sideways at one junction
_STEP = 1_000  # [nm]: strips have lengths in whole steps
_MOST_SIDES = 8  # junctions for which all ways to choose sides are compared

Groups = tuple[tuple[End, ...], ...]
Leaves = Mapping[End, float]


@dataclass(frozen=True, slots=True, kw_only=True)
class Chain:
    """A net's arms by junction, from one end of the chain to the other, and the strips between them.

    ``mains`` are the elements that go straight on at the two ends; ``width`` [m] is that of all strips,
    ``lengths`` [m] and ``currents`` [A] are theirs one by one.
    """

    net: str
    mains: tuple[str, str]
    groups: Groups
    width: float
    lengths: tuple[float, ...]
    currents: tuple[float, ...]


def chain_of(sized: SizedCircuit, hub: Hub, ends: Sequence[End], loops: Loops, longer: float = 0.0) -> Chain:
    """Return the chain for a net with too many arms.

    Args:
        sized: The sized circuit.
        hub: The net as the walk meets it.
        ends: Its arms, in file order.
        loops: How loops are laid: parts beside one of the arms go with it.
        longer: How much longer the strips are to be than their arms ask, in widths of the spacing rule [-].
    """
    first, last = _mains(sized.circuit, hub)
    rest = [end for end in ends if end not in (first, last)]
    width = _width(sized, (first, last), ends)
    apart = _Apart(sized, hub.net, width, _leaves(sized.circuit, rest))
    orders = (rest, sorted(rest, key=apart.reach, reverse=True))
    sides, places = _shared(apart, [_in_order(first, order, hub) for order in orders], to_nm(width))
    arms = ((first, *sides[0]), *sides[1:-1], (*sides[-1], last))
    groups = tuple(_with_companions(sized, hub.net, group, loops) for group in arms)
    currents = _currents(sized, hub.net, groups)
    return Chain(
        net=hub.net,
        mains=(first.element, last.element),
        groups=groups,
        width=max(width, strip_width(sized, max(currents)) if any(currents) else 0.0),
        lengths=tuple((b - a + longer * apart.limits.spacing) * 1e-9 for a, b in itertools.pairwise(places)),
        currents=currents,
    )


def _shared(apart: _Apart, orders: Sequence[Sequence[End]], width: int) -> tuple[Groups, tuple[int, ...]]:
    """Return the arms that leave sideways by junction, and where the junctions lie [nm].

    Where file order makes a chain longer by more than a strip's ``width`` [nm], those that reach farthest to
    their sides come first, the other of the orders: a radial stub then has its side to itself.
    """
    shared = (_in_groups(order, apart.leaves) for order in orders)
    plain, other = ((groups, apart.places(groups)) for groups in shared)
    return other if other[1][-1] < plain[1][-1] - width else plain


def _in_groups(rest: Sequence[End], leaves: Leaves) -> Groups:
    """Return arms by junction, each at the first that has room on the side to which its hint has it leave."""
    groups: list[list[End]] = []
    for end in rest:
        leave = leaves.get(end)
        fitting = (g for g in groups if len(g) < _AT_ONE and (leave is None or leave != leaves.get(g[0])))
        group = next(fitting, None)
        if group is None:
            groups.append([end])
        else:
            group.append(end)
    return tuple(map(tuple, groups))


def _leaves(circuit: Circuit, ends: Sequence[End]) -> Leaves:
    """Return the headings [deg] by which hints have lines leave by their first ends."""
    hints = circuit.file.layout.hints
    asked = {end: hints[end.element].leave for end in ends if end.element in hints and end.index == 0}
    return {end: leave % 360.0 for end, leave in asked.items() if leave is not None}


def _mains(circuit: Circuit, hub: Hub) -> tuple[End, End]:
    """Return the arms at the two ends of a chain: those on the spine, else how the walk comes and goes on."""
    place = {name: k for k, name in enumerate(circuit.spine)}
    met = [end for end in circuit.nets[hub.net].ends if end.element in place]
    on_spine = sorted(met, key=lambda end: place[end.element])
    if len(on_spine) == _AT_ONE:
        return on_spine[0], on_spine[1]
    onward = [arm.end for arm in hub.arms] or [end for end in hub.inner if end != hub.arrival]
    assert hub.arrival is not None  # a net is met by something
    return hub.arrival, onward[0]


def _in_order(first: End, rest: Sequence[End], hub: Hub) -> list[End]:
    """Return the arms that leave sideways in their order, those of a loop at that end which lies in it."""
    return sorted(rest, key=lambda end: (end in hub.inner) != (first in hub.inner))


def _with_companions(sized: SizedCircuit, net: str, group: Sequence[End], loops: Loops) -> tuple[End, ...]:
    """Return a junction's ends with those of parts that stand beside one of them."""
    beside = {name for end in group for name in loops.beside.get(end.element, ())}
    return (*group, *(end for end in sized.circuit.nets[net].ends if end.element in beside))


# -- how wide --------------------------------------------------------------------------------------------


def _width(sized: SizedCircuit, mains: Sequence[End], ends: Sequence[End]) -> float:
    """Return the width [m] of a chain's strips: the widest line that goes straight on.

    Where pads go straight on at both ends, the widest line of all; without any line the narrowest pad.
    """
    lines = _line_widths(sized, mains) or _line_widths(sized, ends)
    pads = [_pad_width(sized, end) for end in ends if end.kind is EndKind.PAD]
    return max(lines) if lines else min(pads)


def _line_widths(sized: SizedCircuit, ends: Sequence[End]) -> list[float]:
    """Return the widths [m] of the lines and coupled strips among some ends."""
    held = {name: line.width for name, line in sized.lines.items()}
    held |= {name: pair.width for name, pair in sized.pairs.items()}
    return [held[end.element] for end in ends if end.element in held]


def _currents(sized: SizedCircuit, net: str, groups: Sequence[Sequence[End]]) -> tuple[float, ...]:
    """Return the magnitude of the direct current [A] in each strip: what enters by the arms before it."""
    into = itertools.accumulate(sum(_entering(sized, net, end) for end in group) for group in groups[:-1])
    return tuple(abs(current) for current in into)


def _entering(sized: SizedCircuit, net: str, end: End) -> float:
    """Return the direct current [A] that flows into a net from an end."""
    currents, name = sized.circuit.dc.currents, end.element
    if end.kind is EndKind.PORT:
        return -currents.get(name, 0.0)
    if end.kind is EndKind.COUPLED:
        return currents.get(f"{name}:{end.index // 2}", 0.0) * (1.0 if end.index % 2 else -1.0)
    if end.pin:
        pins = [land.pin for land in sized.lands[name].pads if land.net == net]
        return -math.fsum(currents.get(f"{name}.{pin}", 0.0) for pin in pins)
    return currents.get(name, 0.0) * (1.0 if end.index else -1.0)


# -- how long --------------------------------------------------------------------------------------------


class _Apart:
    """How far apart arms must leave a chain to one side: by the distances that the search keeps."""

    def __init__(self, sized: SizedCircuit, net: str, width: float, leaves: Leaves) -> None:
        """Keep the circuit, the net, its strips' width [m], and how hints have lines leave it."""
        self.sized, self.limits, self.net, self.width = sized, Limits.of(sized), net, width
        self.leaves = leaves
        gap = sized.default_pour_gap
        self.table = clearance_table(self.limits, 2 * self.limits.height if math.isinf(gap) else to_nm(gap))
        self._known: dict[End, tuple[tuple[Kind, float], ...]] = {}

    def places(self, sides: Groups) -> tuple[int, ...]:
        """Return where the junctions of the shortest chain lie [nm], over all choices of sides."""
        every = list(_ways(len(sides)))
        hinted = [ways for ways in every if self._as_hinted(sides, ways)]
        return min((self._placed(sides, ways) for ways in hinted or every), key=lambda found: found[-1])

    def _as_hinted(self, sides: Groups, ways: Sequence[int]) -> bool:
        """True where lines that hints have leave alike leave to one side, and others to the other."""
        held = [
            (self.leaves[end], way * sign)
            for group, way in zip(sides, ways, strict=True)
            for end, sign in zip(group, (1, -1), strict=False)
            if end in self.leaves
        ]
        return all((a[0] == b[0]) == (a[1] == b[1]) for a, b in itertools.combinations(held, 2))

    def _placed(self, sides: Groups, ways: Sequence[int]) -> tuple[int, ...]:
        """Return where junctions lie on a chain [nm]; the first arm of each leaves to the given side."""
        places: list[int] = [0]
        for k in range(1, len(sides)):
            needs = [
                places[j] + self._need(a, b)
                for j in range(k)
                for a, one in zip(sides[j], (ways[j], -ways[j]), strict=False)
                for b, other in zip(sides[k], (ways[k], -ways[k]), strict=False)
                if one == other
            ]
            places.append(math.ceil(max(needs, default=places[-1]) / _STEP) * _STEP)
        return tuple(places)

    def _need(self, a: End, b: End) -> float:
        """Return the distance [nm] of the centre-lines of two arms that leave to one side."""
        pairs = itertools.product(self._halves(a), self._halves(b))
        return max(one + other + int(self.table[kind, beside]) for (kind, one), (beside, other) in pairs)

    def reach(self, end: End) -> float:
        """Return how far an arm reaches to either side of its axis [nm]."""
        return max(half for _, half in self._halves(end))

    def _halves(self, end: End) -> tuple[tuple[Kind, float], ...]:
        """Return how far what is at an arm reaches to either side of its axis [nm], by its kind."""
        if end not in self._known:
            is_pad = end.kind is EndKind.PAD
            self._known[end] = self._of_part(end) if is_pad else ((Kind.LINE, self._half(end) * 1e9),)
        return self._known[end]

    def _of_part(self, end: End) -> tuple[tuple[Kind, float], ...]:
        """Return how far a part's boxes reach from the axis of one of its pads [nm]."""
        body = part_body(self.sized.lands[end.element], self.limits)
        land = body.land_at(end)
        pose = Pose(0, 0, -land.heading % 360.0)
        axis = to_world(pose, land.x, land.y)[1]
        boxes = [(item.kind, item.box) for item in part_obstacles(body, pose)]
        own = ((kind, float(max(box[3] - axis, axis - box[1]))) for kind, box in boxes)
        return (*own, *self._beyond(end.element))

    def _beyond(self, part: str) -> Iterator[tuple[Kind, float]]:
        """Yield how far the lines that go on straight behind a part reach from its axis [nm]."""
        for _, net in ends_of(self.sized.circuit.file, part):
            ends = self.sized.circuit.nets[net].ends if net not in (self.net, GROUND) else ()
            if len(ends) == _AT_ONE:
                yield from ((Kind.LINE, self._half(end) * 1e9) for end in ends if end.kind is EndKind.LINE)

    def _half(self, end: End) -> float:
        """Return how far a line, radial stub, coupled pair or a port's strip reaches from its axis [m]."""
        sized, name = self.sized, end.element
        if name in sized.radials:
            stub = sized.radials[name]
            return stub.outer_radius * math.sin(min(0.5 * stub.sector, math.pi / 2))
        if name in sized.pairs:
            return 1.5 * sized.pairs[name].width + sized.pairs[name].gap
        return 0.5 * (sized.lines[name].width if name in sized.lines else self.width)


def _ways(count: int) -> Iterator[tuple[int, ...]]:
    """Yield the sides to which the first arms of junctions may leave, the first always to one."""
    free = min(count, _MOST_SIDES) - 1
    for ways in itertools.product((1, -1), repeat=free):
        yield (1, *ways, *([1] * (count - 1 - free)))


def _pad_width(sized: SizedCircuit, end: End) -> float:
    """Return a pad's size across its heading [m]."""
    lands = sized.lands[end.element]
    land = lands.pad(end.pin) if end.pin else lands.pads[end.index]
    return land.height if abs(math.cos(math.radians(land.heading))) > math.sqrt(0.5) else land.width
