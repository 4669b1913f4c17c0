"""Whether a candidate stands too near to anything, with allowance for what meets in a net."""

from __future__ import annotations

import itertools
import math
from dataclasses import dataclass, field

from layoutgen.circuit import EndKind
from layoutgen.circuit.queries import ends_of
from layoutgen.geometry import Point
from layoutgen.placement.bodies import CLEAR
from layoutgen.placement.budgets import LineLengths
from layoutgen.placement.clearance import Ints, Kind, Obstacle, Obstacles, too_near
from layoutgen.placement.frame import Box
from layoutgen.placement.model import GROUND, Model, strip_owner
from layoutgen.placement.pairs import is_folded_back
from layoutgen.placement.state import Growth, LaidLine, LaidPair, leg_boxes, leg_slices
from layoutgen.placement.words import is_bow

__all__ = ["Neighbours"]

_GRID = 10  # [nm]: rounding of odd widths must not decide
_TOLD = 500  # [nm]: distances that differ by less read alike


@dataclass(slots=True)
class Neighbours:
    """Clearance with allowance: lines that meet are compared beyond ``limits.near`` of the shared node."""

    model: Model
    lengths: LineLengths
    table: Ints
    _cuts: dict[tuple[str, tuple[Point, ...], frozenset[str]], list[Obstacle]] = field(default_factory=dict)
    _bridges: dict[frozenset[str], tuple[tuple[str, str], ...]] = field(default_factory=dict)

    def conflict(self, growth: Growth) -> str | None:
        """Return what a candidate is too near to, or None when it may stand."""
        old = growth.state.obstacles
        for new, other in old.conflicts(growth.obstacles, self.table):
            if new.owner != other.owner and self._really(growth, new, other):
                return self._told(new, other)
        own = Obstacles.empty().plus(growth.obstacles)
        for new, other in own.conflicts(growth.obstacles, self.table):
            if new.owner < other.owner and self._really(growth, new, other):
                return self._told(new, other)
        for line in growth.lines.values():
            if self._folds_on_itself(line):
                return f"the legs of {line.name} would come too near to each other"
        return None

    def _told(self, new: Obstacle, other: Obstacle) -> str:
        """Return what is too near to what, how near, and what is kept."""
        need = int(self.table[new.kind, other.kind])
        if self._shared(new.owner, other.owner)[0] and self._too_close(new, other):
            need = self.model.limits.gap
        apart, way = _distance(new, other), " on its way to the edge" if new.corridor else ""
        told = f"no room for {_named(new.owner)}{way} beside {_named(other.owner)}"
        kept = f"{apart / 1e6:.3f} mm between them, {need / 1e6:.3f} mm are kept"
        return f"{told} ({kept})" if apart < need - _TOLD else told

    def between(self, growth: Growth, added: Obstacles, other: Growth) -> bool:
        """Return whether two candidates would stand too near to each other; ``added`` holds the first."""
        both = Growth(state=growth.state, lines={**growth.lines, **other.lines})
        return any(
            new.owner != old.owner and self._really(both, new, old)
            for new, old in added.conflicts(other.obstacles, self.table)
        )

    def _really(self, growth: Growth, a: Obstacle, b: Obstacle) -> bool:
        """Return whether a conflict stands once the allowance for shared nodes is made."""
        nets_a, nets_b = self._shared(a.owner, b.owner)
        if not nets_a or self._too_close(a, b) or self._are_apart(growth, a, nets_a, b, nets_b):
            return True
        if a.kind == b.kind == Kind.GROUND:  # vias keep their pitch, whatever meets
            return _distance(a, b) < self.model.limits.pitch - self.model.limits.land
        if Kind.BODY in (a.kind, b.kind) and a.kind != b.kind and not self._is_line(growth, a, b):
            return False
        if a.kind != Kind.BODY and b.kind != Kind.BODY and not self._is_line(growth, a, b):
            grounded = Kind.GROUND in (a.kind, b.kind) and a.kind != b.kind
            if not grounded or self._ends_pair(a, b) or self._is_lead(a) or self._is_lead(b):
                return False
            return not self._is_beyond_pair(a, b, nets_a)
        left = self._trimmed(growth, self._softened(a, nets_b), nets_a)
        right = self._trimmed(growth, self._softened(b, nets_a), nets_b)
        if self._is_lead(a) or self._is_lead(b):
            left, right = _beside_leads(left), _beside_leads(right)
        return too_near(left, right, self.table)

    def _softened(self, item: Obstacle, nets: frozenset[str]) -> Obstacle:
        """Return a pad on a shared net as a body: a line that it ends may pass it as it may pass a part."""
        joined = item.kind == Kind.PAD and item.net in nets
        return item._replace(kind=Kind.BODY) if joined else item

    def _is_lead(self, item: Obstacle) -> bool:
        """True for pads and ground copper of a part with more than two pads: no pour lies between them."""
        body = self.model.bodies.get(item.owner)
        return item.kind in (Kind.PAD, Kind.GROUND) and body is not None and len(body.lands) > 2

    def _too_close(self, a: Obstacle, b: Obstacle) -> bool:
        """True when copper of different nets is nearer than may be etched: no allowance mends that."""
        if Kind.BODY in (a.kind, b.kind) or self._nets(a) & self._nets(b) or self._feeds_pair(a, b):
            return False
        return _distance(a, b) < self.model.limits.gap

    def _feeds_pair(self, a: Obstacle, b: Obstacle) -> bool:
        """True for a coupled pair and a line that ends at one of its ends: the artwork notches the line.

        So for two pairs, where just one of the two strips carries what joins the pairs. A line that runs past
        the end, or a pad, cannot be notched.
        """
        pairs = self.model.sized.pairs
        meet = self.model.owner_nets[a.owner] & self.model.owner_nets[b.owner]
        if not meet or {Kind.PAD, Kind.GROUND}.intersection((a.kind, b.kind)) or _overlap(a, b):
            return False
        if a.owner in pairs and b.owner in pairs:
            return a.owner != b.owner and bool(self._nets(a) & meet) != bool(self._nets(b) & meet)
        return a.owner in pairs or b.owner in pairs

    def _are_apart(
        self, growth: Growth, a: Obstacle, nets_a: frozenset[str], b: Obstacle, nets_b: frozenset[str]
    ) -> bool:
        """True for strips of two pairs neither of which carries what joins the pairs: no allowance for them.

        On either side of what joins the pairs, as in a staircase, they lie as the pairs' gaps have it.
        """
        if a.nets is None or b.nets is None or a.nets & nets_a or b.nets & nets_b or a.owner == b.owner:
            return False
        return is_folded_back(self._strip(growth, a), self._strip(growth, b))

    def _strip(self, growth: Growth, item: Obstacle) -> tuple[LaidPair, bool]:
        """Return a pair as it lies, and whether a strip of it is its second."""
        laid = growth.pairs.get(item.owner) or growth.state.pairs[item.owner]
        first = frozenset(net for end, net in self.model.ends[item.owner] if end.index < 2)
        return laid, item.nets != first

    def _ends_pair(self, a: Obstacle, b: Obstacle) -> bool:
        """True when one of two is the ground copper of a pair's strip, beside what the other strip feeds."""
        return any(item.kind == Kind.GROUND and item.owner in self.model.sized.pairs for item in (a, b))

    def _is_beyond_pair(self, a: Obstacle, b: Obstacle, nets: frozenset[str]) -> bool:
        """True for the ground pad of a part that ends a pair's strip: the pour is not to keep off it there.

        It may face that strip across the part, as it may a line's end; off the other strip it keeps a height.
        """
        pad, strip = (a, b) if a.kind == Kind.GROUND else (b, a)
        if strip.nets is None or pad.owner not in self.model.bodies:
            return False
        own = bool(strip.nets & nets & self.model.owner_nets[pad.owner])
        return own or _distance(a, b) >= max(self.model.limits.height, CLEAR)

    def _nets(self, item: Obstacle) -> frozenset[str]:
        if item.kind == Kind.GROUND:
            return frozenset((GROUND,))
        if item.nets is not None:
            return item.nets
        return self.model.owner_nets[item.owner] if item.net is None else frozenset((item.net,))

    def _is_line(self, growth: Growth, a: Obstacle, b: Obstacle) -> bool:
        return any(self._line(growth, item.owner) is not None for item in (a, b))

    def _line(self, growth: Growth, owner: str) -> LaidLine | None:
        return growth.lines.get(owner) or growth.state.lines.get(owner)

    def _trimmed(self, growth: Growth, item: Obstacle, nets: frozenset[str]) -> list[Obstacle]:
        """Return an obstacle, or for a line its boxes without what lies near the shared nodes."""
        line = self._line(growth, item.owner)
        if line is None:
            return [item]
        if item.corridor:
            return [self._cut_corridor(line, item, nets)]
        key = (line.name, line.points, nets)
        if key not in self._cuts:
            self._cuts[key] = self._cut_boxes(line, item, nets)
        return self._cuts[key]

    def _cut_corridor(self, line: LaidLine, item: Obstacle, nets: frozenset[str]) -> Obstacle:
        """Return the way from a line's end to the edge without what of it lies near a shared node, too.

        The line will run there: what of its allowance it does not use up itself holds for its way.
        """
        if line.open_edge is None or line.root_edge is not None:
            return item
        net = self.model.file.lines[line.name].nets[line.start]
        run = sum(math.dist(a, b) for a, b in itertools.pairwise(line.points))
        left = math.floor(self._allowance(net) - run) if net in nets else 0
        return item._replace(box=_shortened(item.box, line.open_edge, left)) if left > 0 else item

    def _cut_boxes(self, line: LaidLine, item: Obstacle, nets: frozenset[str]) -> list[Obstacle]:
        points = line.points
        for index, net in enumerate(self.model.file.lines[line.name].nets):
            if net in nets:
                cut = self._allowance(net)
                points = _cut(points, cut, at_start=index == line.start)
        if len(points) < 2:
            return []
        legs = leg_slices(points, self.model.widths[line.name])
        return [Obstacle(box, item.kind, item.owner) for leg in legs for box in leg]

    def _allowance(self, net: str) -> int:
        """Return how far from a node [nm] a line is not compared with what it meets there.

        At the end of a coupled pair or a radial stub's apex twice as far: there copper begins side
        by side and must part.
        """
        ends = self.model.circuit.nets[net].ends
        radials = self.model.sized.radials
        spreads = any(end.kind is EndKind.COUPLED or end.element in radials for end in ends)
        factor = 2 if spreads else 1
        return factor * self.model.limits.near + self.model.reach_at(net) + _GRID

    def _folds_on_itself(self, line: LaidLine) -> bool:
        if is_bow(line.route.word):
            return False  # its least legs see to that, and boxes are larger than slanted legs
        boxes = leg_boxes(line.points, self.model.widths[line.name])
        for i, a in enumerate(boxes):
            for b in boxes[i + 2 :]:
                dx = max(a[0] - b[2], b[0] - a[2], 0)
                dy = max(a[1] - b[3], b[1] - a[3], 0)
                if math.hypot(dx, dy) < self.model.limits.spacing - 2:
                    return True
        return False

    # -- what meets ----------------------------------------------------------------------------------

    def _shared(self, a: str, b: str) -> tuple[frozenset[str], frozenset[str]]:
        """Return the nets of a and of b near which the two are meant to be near each other."""
        nets_a = self.model.owner_nets.get(a, frozenset())
        nets_b = self.model.owner_nets.get(b, frozenset())
        common = nets_a & nets_b
        if common:
            return common, common
        left, right = set(), set()
        for one, two in self._short_bridges():
            for p, q in ((one, two), (two, one)):
                if p in nets_a and q in nets_b:
                    left.add(p)
                    right.add(q)
        return frozenset(left), frozenset(right)

    def _short_bridges(self) -> tuple[tuple[str, str], ...]:
        """Return the pairs of nets joined by a two-pad part or a line shorter than the allowance."""
        key = frozenset[str]()
        if key not in self._bridges:
            self._bridges[key] = tuple(self._find_bridges())
        return self._bridges[key]

    def _find_bridges(self) -> list[tuple[str, str]]:
        file = self.model.file
        out = []
        for name in (*file.parts, *file.lines):
            nets = [net for _, net in ends_of(file, name)]
            if len(nets) != 2 or GROUND in nets:
                out += self._near_pins(name) if name in file.parts else []
                continue
            if name in file.parts or self._is_short(name):
                out.append((nets[0], nets[1]))
        for pair in file.coupled.values():
            a1, a2, b1, b2 = pair.nets
            out += [(a1, b1), (a2, b2)]
        return out

    def _near_pins(self, name: str) -> list[tuple[str, str]]:
        """Return the pairs of nets whose pads on one part lie within twice the allowance."""
        lands = [land for land in self.model.bodies[name].lands if land.net != GROUND and land.has_copper]
        return [
            (a.net, b.net)
            for a, b in itertools.combinations(lands, 2)
            if math.dist((a.x, a.y), (b.x, b.y)) < 2 * self.model.limits.near
        ]

    def _is_short(self, name: str) -> bool:
        """True for a line that, beyond the pads on it, is shorter than the allowance at both its ends."""
        line = self.model.sized.lines.get(name)
        if line is None or line.free:
            return False
        pads = sum(self._pad_on(name, net) for net in line.nets if net != GROUND)
        return self.lengths.by_bends(name)[0] - pads < 2 * self.model.limits.near

    def _pad_on(self, name: str, net: str) -> int:
        """Return how much of a line lies on the one pad that it ends on in a net [nm]: its node is beyond."""
        ends = self.model.circuit.nets[net].ends
        pads = [end for end in ends if end.kind is EndKind.PAD]
        if len(ends) != 2 or len(pads) != 1:
            return 0
        return self.model.bodies[pads[0].element].land_at(pads[0]).along


def _named(owner: str) -> str:
    """Return an owner's name for a message: an element, or a net's strip."""
    net = owner.removeprefix(strip_owner(""))
    return owner if net == owner else f"the strip of net {net}"


def _distance(a: Obstacle, b: Obstacle) -> float:
    """Return how far two boxes are apart [nm]."""
    dx = max(a.box[0] - b.box[2], b.box[0] - a.box[2], 0)
    dy = max(a.box[1] - b.box[3], b.box[1] - a.box[3], 0)
    return math.hypot(dx, dy)


def _beside_leads(items: list[Obstacle]) -> list[Obstacle]:
    """Return lines, and pads that are no lead of theirs, as things that keep only what etching needs."""
    kinds = {Kind.LINE: Kind.SUPPLY, Kind.PAD: Kind.GROUND}
    return [item._replace(kind=kinds.get(item.kind, item.kind)) for item in items]


def _overlap(a: Obstacle, b: Obstacle) -> bool:
    """True when the interiors of two boxes overlap."""
    x = a.box[0] < b.box[2] and b.box[0] < a.box[2]
    return x and a.box[1] < b.box[3] and b.box[1] < a.box[3]


def _shortened(box: Box, edge: str, amount: int) -> Box:
    """Return a way to an edge that begins an amount [nm] nearer to it."""
    x0, y0, x1, y1 = box
    if edge in ("east", "west"):
        return (x0 + amount, y0, x1, y1) if edge == "east" else (x0, y0, x1 - amount, y1)
    return (x0, y0 + amount, x1, y1) if edge == "north" else (x0, y0, x1, y1 - amount)


def _cut(points: tuple[Point, ...], amount: int, *, at_start: bool) -> tuple[Point, ...]:
    """Return a path without its first (or last) stretch of a length [nm]."""
    path = list(points if at_start else points[::-1])
    left = float(amount)
    while len(path) > 1:
        leg = math.dist(path[0], path[1])
        if leg > left:
            t = left / leg
            x = round(path[0][0] + t * (path[1][0] - path[0][0]))
            y = round(path[0][1] + t * (path[1][1] - path[0][1]))
            path[0] = (x, y)
            break
        left -= leg
        path.pop(0)
    return tuple(path if at_start else path[::-1]) if len(path) > 1 else ()
