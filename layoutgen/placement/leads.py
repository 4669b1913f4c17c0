"""Leads side by side: pads of one part that stand in a row, with ground pads between them.

Three things follow from leads in a row. Pads of one part on one net are one conductor: those that face the
same way with nothing between are covered by a bar across, others are bonded by a strip under the part's body
where there is room; the walk then meets one pad. A line wider than its lead's share of the row begins beyond
the row, at the end of a strip as wide as the lead. (So does a chip wider than the pair's strip that it ends,
beyond the pair.) And the vias of ground pads stand where they leave the ways of the signal leads free: in a
row across just outside the pad where that does, else in a column, to one side, or under the body (common
practice, no source).
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace

from layoutgen.circuit import Circuit, End, EndKind, Net
from layoutgen.circuit.queries import collect_ends
from layoutgen.errors import InfeasibleError
from layoutgen.geometry import Point
from layoutgen.placement.bodies import CLEAR, BodyLand, Bond, PartBody, clear_of, part_body
from layoutgen.placement.budgets import LineLengths, Roles
from layoutgen.placement.frame import hull
from layoutgen.placement.grounds import fit_ground_vias
from layoutgen.placement.launches import is_launch, launches_of
from layoutgen.placement.model import GROUND, Limits, Model
from layoutgen.placement.state import leg_boxes
from layoutgen.sizing import Arm, BudgetEntry, SizedCircuit, junction_corrections
from layoutgen.units import to_nm

__all__ = ["LeadLengths", "fit_leads", "with_single_leads"]

_FLUSH = 1_000  # [nm]: outer edges that differ by less lie in one row


def with_single_leads(sized: SizedCircuit) -> SizedCircuit:
    """Return the circuit as the walk is to meet it: of pads of one part that are one conductor, the first.

    The signal pad of a port's launch is none of its ends. The lands stay as they are; :func:`fit_leads` joins
    them.

    Raises:
        InfeasibleError: Pads of one net that nothing can join.
    """
    limits = Limits.of(sized)
    parts = dict(sized.circuit.file.parts)
    for name, lands in sized.lands.items():
        pins, body = parts[name].pins, part_body(lands, limits)
        if is_launch(sized.circuit.file, parts[name], body):
            grounds = {pin: net for pin, net in (pins or {}).items() if net == GROUND}
            parts[name] = parts[name].model_copy(update={"pins": grounds})
            continue
        if pins is None or len(set(pins.values()) - {GROUND}) == sum(n != GROUND for n in pins.values()):
            continue
        _refuse_apart(name, pins, body, limits)
        gone = {pin for group in _conductors(body, limits) for pin in group[0][1:]}
        if gone:
            left = {pin: net for pin, net in pins.items() if pin not in gone}
            parts[name] = parts[name].model_copy(update={"pins": left})
    if all(part is sized.circuit.file.parts[name] for name, part in parts.items()):
        return sized
    file = sized.circuit.file.model_copy(update={"parts": parts})
    return replace(sized, circuit=_with_ends(replace(sized.circuit, file=file)))


def _refuse_apart(name: str, pins: Mapping[str, str], body: PartBody, limits: Limits) -> None:
    """Refuse pads of one net that nothing can join.

    Raises:
        InfeasibleError: Names the part, two of its pads and their net.
    """
    joined = {pin for group in _conductors(body, limits) for pin in group[0]}
    for land in body.lands:
        first = next(other for other in body.lands if other.net == land.net)
        apart = land.has_copper and first.has_copper and land is not first and land.pin not in joined
        if land.net != GROUND and apart:
            reason = (
                f"its pads {first.pin} and {land.pin} on net {pins[land.pin]} cannot be joined: "
                "other pads stand in every way between them"
            )
            raise InfeasibleError(
                name, reason, f"one of the two pins on a net of its own in [parts.{name}] pins"
            )


def _with_ends(circuit: Circuit) -> Circuit:
    """Return a circuit with the ends of its nets as its file has them."""
    ends = collect_ends(circuit.file)
    nets = {name: _net(net, ends.get(name, ())) for name, net in circuit.nets.items()}
    return replace(circuit, nets=nets)


def _net(net: Net, ends: tuple[End, ...]) -> Net:
    """Return a net with other ends, its bank's feed among them."""
    feed = net.feed
    if feed is not None and feed not in ends:
        feed = next((end for end in ends if end.element == feed.element), None)
    return replace(net, ends=ends, feed=feed)


def fit_leads(model: Model) -> None:
    """Join the leads of each part that are one conductor, set ground vias clear of leads, place the nodes."""
    for launch in launches_of(model).values():
        model.owner_nets[launch.body.name] = frozenset([launch.land.net])
    for name, plain in model.bodies.items():
        if len(plain.lands) > 2 and not plain.nodes:
            model.bodies[name] = _with_nodes(model, _with_vias(model, _joined(plain, model.limits)))
        elif not plain.nodes:
            model.bodies[name] = replace(plain, nodes=tuple(_nodes_beyond_pairs(model, plain)))


def _joined(body: PartBody, limits: Limits) -> PartBody:
    """Return a body with bars and bonds on the leads that are one conductor."""
    leads, bonds = [], list[Bond]()
    for pins, found in _conductors(body, limits):
        bonds += found
        row = [land for land in body.lands if land.pin in pins and _is_beside(land, body.land(pins[0]))]
        leads.append(_hull_land(row))
    return replace(body, leads=tuple(leads), bonds=tuple(bonds))


# -- one conductor ---------------------------------------------------------------------------------------


def _conductors(body: PartBody, limits: Limits) -> list[tuple[tuple[str, ...], tuple[Bond, ...]]]:
    """Return the pins that are one conductor, the first one first, each with the copper that joins them."""
    nets = dict.fromkeys(land.net for land in body.lands if land.net != GROUND and land.has_copper)
    out = []
    for net in nets:
        own = [land for land in body.lands if land.net == net and land.has_copper]
        pins, bonds = [own[0].pin], list[Bond]()
        for land in own[1:]:
            joined = [body.land(pin) for pin in pins]
            bond = _bond(body, joined, land, limits)
            if bond is not None:
                pins.append(land.pin)
                bonds.append(bond)
        if len(pins) > 1:
            out.append((tuple(pins), tuple(bonds)))
    return out


def _bond(body: PartBody, joined: Sequence[BodyLand], land: BodyLand, limits: Limits) -> Bond | None:
    """Return the copper that joins a land to the nearest of others on its net; None without room."""
    near = sorted(joined, key=lambda other: abs(other.x - land.x) + abs(other.y - land.y))
    others = [other.box for other in body.lands if other.net != land.net and other.has_copper]
    for other in near:
        width = min(land.along, other.along) if _is_beside(land, other) else min(land.across, other.across)
        for path in _paths((other.x, other.y), (land.x, land.y)):
            boxes = leg_boxes(path, width)
            if all(clear_of(box, stands, limits.gap) for box in boxes for stands in others):
                return Bond(land.net, width, path)
    return None


def _is_beside(a: BodyLand, b: BodyLand) -> bool:
    """True for lands that face the same way with their outer edges in one line."""
    flush = abs(a.outer.x - b.outer.x) <= _FLUSH or abs(a.outer.y - b.outer.y) <= _FLUSH
    return a.heading == b.heading and (flush or a.pin == b.pin)


def _paths(a: Point, b: Point) -> Iterator[tuple[Point, ...]]:
    """Yield the ways between two points: straight, with a jog half-way, by one corner or the other."""
    (ax, ay), (bx, by) = a, b
    if ax == bx or ay == by:
        yield (a, b)
        return
    middle = (ax + bx) // 2, (ay + by) // 2
    yield (a, (middle[0], ay), (middle[0], by), b)
    yield (a, (ax, middle[1]), (bx, middle[1]), b)
    yield (a, (bx, ay), b)
    yield (a, (ax, by), b)


def _hull_land(row: Sequence[BodyLand]) -> BodyLand:
    """Return one land in place of a row of lands."""
    x0, y0, x1, y1 = (round(value) for value in hull([land.box for land in row]))
    return replace(row[0], x=(x0 + x1) // 2, y=(y0 + y1) // 2, box=(x0, y0, x1, y1))


# -- vias and nodes --------------------------------------------------------------------------------------


def _with_vias(model: Model, body: PartBody) -> PartBody:
    """Return a body whose ground vias leave the ways of its signal leads free, as far as they can."""
    if all(land.net != GROUND or land.ground is not None for land in body.lands):
        return body
    widths = {land.net: _width_at(model, land.net) for land in body.lands if land.net != GROUND}
    return fit_ground_vias(body, widths, model.limits)


def _width_at(model: Model, net: str) -> int:
    """Return the width of the widest line or pad in a net [nm], and in nets beyond its chips."""
    ends = [end for end in model.circuit.nets[net].ends if end.kind is not EndKind.PORT]
    chips = [end.element for end in ends if end.kind is EndKind.PAD and not end.pin]
    beyond = {far for name in chips for _, far in model.ends[name] if far not in (GROUND, net)}
    ends += [end for far in sorted(beyond) for end in model.circuit.nets[far].ends]
    pads = [end for end in ends if end.kind is EndKind.PAD]
    wide = [model.widths.get(end.element, 0) for end in ends]
    return max([*wide, *(model.bodies[end.element].land_at(end).across for end in pads)], default=0)


def _with_nodes(model: Model, body: PartBody) -> PartBody:
    """Return a body that says where what meets its leads has its node."""
    nodes = {}
    for end, net in model.ends[body.name]:
        if net == GROUND or not body.land_at(end).has_copper:
            continue
        lone = _lone_line(model, net, end)
        node = (
            -body.land_at(end).along if lone is None else _node(body, body.land_at(end), lone, model.limits)
        )
        nodes[body.land_at(end).pin] = node
    return replace(body, nodes=tuple(nodes.items()))


def _nodes_beyond_pairs(model: Model, body: PartBody) -> Iterator[tuple[str, int]]:
    """Yield the pins of a two-pad part that are wider than the pair's strip they end, and how far off it is.

    On the strip such a pad would be nearer to the other one than the pair's gap: it begins beyond the strips'
    ends by that gap, at the end of a strip as wide as the pair's.
    """
    for end, net in model.ends[body.name]:
        if net == GROUND or not body.land_at(end).has_copper:
            continue
        others = [other for other in model.circuit.nets[net].ends if other != end]
        if len(others) == 1 and others[0].kind is EndKind.COUPLED:
            pair = model.sized.pairs[others[0].element]
            if body.land_at(end).across > to_nm(pair.width):
                yield body.land_at(end).pin, max(to_nm(pair.gap), model.limits.gap)


def _lone_line(model: Model, net: str, pad: End) -> int | None:
    """Return the width [nm] of the one line or pair that meets a pad; None where more, or none, meet."""
    others = [end for end in model.circuit.nets[net].ends if end != pad]
    lone = len(others) == 1 and others[0].kind in (EndKind.LINE, EndKind.COUPLED)
    return model.widths[others[0].element] if lone and others[0].element in model.widths else None


def _node(body: PartBody, land: BodyLand, width: int, limits: Limits) -> int:
    """Return how far beyond a pad's outer edge the node of a line lies [nm]; negative: on the pad.

    On the pad's inner edge where the line passes between its neighbours, in the middle of a bar across, or
    beyond all that stands in the line's way.
    """
    stands = [box for box in body.copper_ahead(land) if box[2] > -land.along]
    half = (width + 1) // 2
    if all(max(box[1], -box[3]) >= half + limits.gap for box in stands):
        return -land.along // 2 if body.is_joined(land) else -land.along
    return body.free_from(land, half, limits.gap) + _for_neighbours(body, land, half, limits)


def _for_neighbours(body: PartBody, land: BodyLand, half: int, limits: Limits) -> int:
    """Return how much farther a line begins [nm], so that signal leads beside it can turn away before it."""
    room = max(limits.gap, CLEAR)
    signals = [other for other in body.lands if other.net not in (GROUND, land.net) and other.has_copper]
    in_way = [
        other.across
        for other in signals
        if other.heading == land.heading
        for box in (body.seen_ahead(land, other.box),)
        if box[2] > -room and max(box[1], -box[3]) < half + room
    ]
    return max(in_way) + room if in_way else 0


# -- lengths ---------------------------------------------------------------------------------------------


class LeadLengths(LineLengths):
    """Lengths of lines, of which some begin beyond a row of leads or on the bar across several."""

    def _end(self, name: str, index: int, net: str, roles: Roles) -> BudgetEntry | None:
        """Return the correction at one end of a line: there it meets a strip, or the two halves of a bar."""
        pad = self._pad_apart(name, index, net)
        if pad is None:
            return super()._end(name, index, net, roles)
        body = self.model.bodies[pad.element]
        land, line = body.land_at(pad), Arm(name, index, 180.0, self.model.widths[name] * 1e-9)
        is_strip = body.node_of(land) >= 0
        sides = (0.0,) if is_strip else (90.0, 270.0)
        across = min(land.across, self.model.widths[name]) if is_strip else land.along
        arms = (Arm(name, -1, side, across * 1e-9, is_line=is_strip) for side in sides)
        return junction_corrections(self.model.sized, net, (line, *arms)).get((name, index))

    def _pad_apart(self, name: str, index: int, net: str) -> End | None:
        """Return the one pad that a line meets in a net, where the line's node is not on its inner edge."""
        hub = self.tour.hubs.get(net)
        if hub is None or hub.bank or hub.cluster is not None:
            return None
        others = [
            end for end in self.model.circuit.nets[net].ends if (end.element, end.index) != (name, index)
        ]
        if len(others) != 1 or others[0].kind is not EndKind.PAD:
            return None
        body = self.model.bodies[others[0].element]
        return others[0] if body.is_apart(body.land_at(others[0])) else None
