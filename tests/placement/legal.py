"""An independent look at a placement: polygons by shapely, nothing of the search's own book-keeping."""

from __future__ import annotations

import itertools
import math

import shapely

from layoutgen.geometry import stroke
from layoutgen.placement import Placement

TOLERANCE = 10.0  # [nm]


def copper(placement: Placement) -> dict[str, tuple[str, shapely.Polygon]]:
    """Return (net key, polygon [nm]) by element name for lines, strips and pads with copper."""
    out: dict[str, tuple[str, shapely.Polygon]] = {}
    for line in placement.lines.values():
        ring = stroke(line.path, line.width, [bend.mitre_percent for bend in line.bends])
        out[line.name] = (line.name, _notched(placement, set(line.nets), ring.polygon()))
    for pair in placement.pairs.values():
        for side, path in zip("ab", pair.paths, strict=True):
            start = 2 * "ab".index(side)
            nets = set(pair.nets[start : start + 2]) - {"open"}
            area = stroke(path, pair.width).polygon()
            out[f"{pair.name}.{side}"] = (pair.name, _notched(placement, nets, area, pair.name))
    for strip in placement.strips:
        area = stroke(strip.path, strip.width).polygon()
        out[strip.name] = (strip.net, _notched(placement, {strip.net}, area))
    for part in placement.parts.values():
        for pad in part.pads:
            polygon = pad.outline.polygon()
            if polygon.area > 0:
                out[f"{part.name}.{pad.pin}"] = (pad.net, polygon)
    return out


def _notched(placement: Placement, nets: set[str], area: shapely.Polygon, of: str = "") -> shapely.Polygon:
    """Return copper that ends at one strip of a coupled pair without what lies beside the other strip.

    Only its last bit may be wider than the strip that it feeds: it keeps most of its area.
    """
    gap = placement.sized.circuit.rules.copper.min_gap * 1e9  # type: ignore[union-attr, operator]
    left = area
    for pair in (pair for name, pair in placement.pairs.items() if name != of):
        own = [bool(nets & set(pair.nets[2 * side : 2 * side + 2])) for side in (0, 1)]
        for side, path in enumerate(pair.paths):
            if own[1 - side] and not own[side]:
                other = stroke(path, pair.width).polygon()
                if area.intersection(other).area < 1.0:
                    left = left.difference(other.buffer(gap, join_style="mitre"))
    return left


def nets_of(placement: Placement, name: str) -> set[str]:
    """Return the nets that an item of :func:`copper` may touch."""
    if name in placement.lines:
        return set(placement.lines[name].nets)
    strip = next((s for s in placement.strips if s.name == name), None)
    if strip is not None:
        return {strip.net}
    part, pin = name.rsplit(".", 1)
    if part in placement.pairs:
        start = 2 * "ab".index(pin)
        return set(placement.pairs[part].nets[start : start + 2]) - {"open"}
    return {next(pad.net for pad in placement.parts[part].pads if pad.pin == pin)}


def overlaps(placement: Placement) -> list[str]:
    """Return the pairs of items without a common net whose copper is nearer than the gap rule."""
    gap = placement.sized.circuit.rules.copper.min_gap * 1e9  # type: ignore[union-attr, operator]
    items = copper(placement)
    return [
        f"{a} - {b}: {items[a][1].distance(items[b][1]) / 1e6:.3f} mm"
        for a, b in itertools.combinations(items, 2)
        if not nets_of(placement, a) & nets_of(placement, b)
        and items[a][1].distance(items[b][1]) < gap - TOLERANCE
    ]


def loose_ends(placement: Placement) -> list[str]:
    """Return nets whose copper does not hang together, lines taken as touching both their nets."""
    items = copper(placement)
    out = []
    for net in placement.sized.circuit.nets.values():
        if net.name == "gnd":
            continue
        pieces = [items[name][1] for name in items if net.name in nets_of(placement, name)]
        if len(pieces) > 1 and shapely.union_all(pieces).geom_type != "Polygon":
            out.append(net.name)
    return out


def parted_ends(placement: Placement) -> list[str]:
    """Return nets, banks excepted, whose lines do not end in one and the same point, to the nanometre.

    Where more than four ends meet, they may end at the ends of the net's strips.
    """
    circuit = placement.sized.circuit
    out = []
    for net in circuit.nets.values():
        if net.name == "gnd" or net.bank:
            continue
        ends = {
            line.path[0 if index == 0 else -1]
            for line in placement.lines.values()
            for index, name in enumerate(line.nets)
            if name == net.name
        }
        strips = {at for s in placement.strips if s.net == net.name for at in (s.path[0], s.path[-1])}
        if len(ends) > 1 and not (len(net.ends) > 4 and ends <= strips):
            out.append(f"{net.name}: {sorted(ends)}")
    return out


def outside(placement: Placement) -> list[str]:
    """Return items that reach over the edge distance, ports' copper at their own edge excepted by nothing."""
    edge = placement.sized.circuit.rules.copper.min_edge_distance * 1e9  # type: ignore[union-attr, operator]
    room = shapely.box(edge, edge, placement.width - edge, placement.height - edge).buffer(TOLERANCE)
    to_edge = {port.net for port in placement.ports.values() if port.to_edge}
    return [
        name
        for name, (_, polygon) in copper(placement).items()
        if not room.covers(polygon) and not nets_of(placement, name) & to_edge
    ]


def wrong_lengths(placement: Placement, limit_deg: float = 0.01) -> list[str]:
    """Return lines whose drawn centre-line and corrections do not add up to the angle asked."""
    out = []
    for line in placement.lines.values():
        sized = placement.sized.lines[line.name]
        drawn = sum(math.dist(a, b) for a, b in itertools.pairwise(line.path)) * 1e-9 * sized.beta
        others = sum(entry.angle for entry in line.budget if entry.cause != "line")
        asked = placement.sized.circuit.file.lines[line.name].angle
        if asked is not None and abs(math.degrees(drawn + others - asked)) > limit_deg:
            out.append(f"{line.name}: {math.degrees(drawn + others - asked):+.4f} deg")
        if asked is None and abs(math.degrees(drawn + others - line.angle)) > limit_deg:
            out.append(f"{line.name}: says {math.degrees(line.angle):.4f} deg")
    return out


def tight_folds(placement: Placement) -> list[str]:
    """Return lines two of whose legs, not joined by one bend, come nearer than the spacing rule."""
    heights = placement.sized.circuit.rules.spacing.min_line_heights  # type: ignore[union-attr]
    spacing = heights * placement.sized.circuit.file.substrate.height * 1e9  # type: ignore[operator]
    out = []
    for line in placement.lines.values():
        legs = [
            shapely.LineString(leg).buffer(line.width / 2, cap_style="flat")
            for leg in itertools.pairwise(line.path)
        ]
        for i, j in itertools.combinations(range(len(legs)), 2):
            if j - i > 1 and legs[i].distance(legs[j]) < spacing - 1000:
                out.append(f"{line.name}: legs {i} and {j}")
    return out


def faults(placement: Placement) -> list[str]:
    """Return everything that is wrong with a placement."""
    return [
        *overlaps(placement),
        *(f"loose: {name}" for name in loose_ends(placement)),
        *(f"parted: {text}" for text in parted_ends(placement)),
        *(f"outside: {name}" for name in outside(placement)),
        *(f"length: {text}" for text in wrong_lengths(placement)),
        *(f"fold: {text}" for text in tight_folds(placement)),
    ]
