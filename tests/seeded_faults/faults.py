"""Faults put into a clean drawing at random places: each names the rule that must find it, and the place.

A fault works on the drawing's shapes, vias and holes alone; what the drawing came from is left as it was.
"""

from __future__ import annotations

import math
import random
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import pairwise

import shapely

from layoutgen.artwork import Artwork, Hole, Shape, Via
from layoutgen.geometry import Ring
from layoutgen.origin import Origin
from layoutgen.placement import PlacedPad

XY = tuple[float, float]


@dataclass(frozen=True)
class Seeded:
    """A drawing with one fault: the rules any of which must find it, its place [nm], how near [nm]."""

    artwork: Artwork
    rules: tuple[str, ...]
    at: XY
    within: float = 150_000.0


Fault = Callable[[Artwork, random.Random], Seeded]


def tries() -> Iterator[int]:
    """Yield a number for each try to find a place.

    Raises:
        LookupError: after 200 of them: the board has no such place.
    """
    yield from range(200)
    raise LookupError("the board has no place for this fault")


def as_polygon(shape: Shape) -> shapely.Polygon:
    """Return a shape as a polygon [nm]."""
    return shapely.Polygon(shape.outline.chords(50), [hole.chords(50) for hole in shape.holes])


def as_shapes(shape: Shape, geometry: shapely.geometry.base.BaseGeometry) -> list[Shape]:
    """Return a geometry as shapes like another one, on whole nanometres."""
    out = []
    for part in shapely.get_parts(geometry):
        if part.area < 1.0:
            continue
        rings = [
            Ring(tuple((round(x), round(y)) for x, y in ring.coords[:-1]))
            for ring in (shapely.geometry.polygon.orient(part).exterior, *part.interiors)
        ]
        out.append(replace(shape, outline=rings[0], holes=tuple(rings[1:])))
    return out


def with_cut(
    artwork: Artwork, area: shapely.Polygon, roles: tuple[str, ...], layer: str = "copper_top"
) -> Artwork:
    """Return the drawing with an area taken out of the shapes of some roles."""
    shapes: list[Shape] = []
    for shape in artwork.shapes:
        hit = shape.layer == layer and shape.role in roles and as_polygon(shape).intersects(area)
        shapes += as_shapes(shape, as_polygon(shape).difference(area)) if hit else [shape]
    return replace(artwork, shapes=tuple(shapes))


def with_shape(
    artwork: Artwork, layer: str, area: shapely.Polygon, net: str | None, role: str, name: str
) -> Artwork:
    """Return the drawing with one more shape."""
    blank = Shape(layer=layer, outline=Ring.box(0, 0, 1, 1), net=net, role=role, origin=Origin(name))
    return replace(artwork, shapes=(*artwork.shapes, *as_shapes(blank, area)))


def beam(at: XY, along: XY, length: float, width: float) -> shapely.Polygon:
    """Return a rectangle from a point along a direction [nm]."""
    ux, uy = along
    half = width / 2.0
    corners = [(0.0, -half), (length, -half), (length, half), (0.0, half)]
    return shapely.Polygon([(at[0] + s * ux - n * uy, at[1] + s * uy + n * ux) for s, n in corners])


def straight(artwork: Artwork, rng: random.Random, *, strips: bool = False) -> tuple[str, float, XY, XY]:
    """Return a place amid a long leg of a line, off all other copper: name, width, place [nm], direction.

    With ``strips`` the strips of coupled pairs count as lines, the other strip on their right.
    """
    others = [(shape.origin.element, as_polygon(shape)) for shape in artwork.on("copper_top")]
    legs = [
        (line.name, line.width, a, b)
        for line in artwork.placement.lines.values()
        for a, b in pairwise(line.path)
        if "gnd" not in line.nets
    ]
    legs += list(_strips(artwork)) if strips else []
    legs = [leg for leg in legs if math.dist(*leg[2:]) > 3.0 * leg[1] + 2e6]
    if not legs:
        raise LookupError("no leg is long enough")
    for _ in range(200):
        name, width, a, b = rng.choice(legs)
        share, length = rng.uniform(0.3, 0.7), math.dist(a, b)
        at = (a[0] + share * (b[0] - a[0]), a[1] + share * (b[1] - a[1]))
        around = shapely.Point(at).buffer(width / 2.0 + 100_000.0)
        if not any(element != name and copper.intersects(around) for element, copper in others):
            return name, width, at, ((b[0] - a[0]) / length, (b[1] - a[1]) / length)
    raise LookupError("no leg lies off all other copper")


def _strips(artwork: Artwork) -> Iterator[tuple[str, int, tuple[int, int], tuple[int, int]]]:
    """Yield the strips of coupled pairs, each with the other one on its right: name, width, ends [nm]."""
    for pair in artwork.placement.pairs.values():
        for path, other in (pair.paths, pair.paths[::-1]):
            a, b = path[0], path[-1]
            away = (other[0][0] - a[0], other[0][1] - a[1])
            left = (b[0] - a[0]) * away[1] - (b[1] - a[1]) * away[0] > 0
            yield (pair.name, pair.width, b, a) if left else (pair.name, pair.width, a, b)


def pour_of(artwork: Artwork) -> shapely.geometry.base.BaseGeometry:
    """Return the pour [nm]."""
    return shapely.union_all([as_polygon(s) for s in artwork.shapes if s.role == "pour"])


def gap_of(artwork: Artwork, name: str) -> float:
    """Return the pour's distance from a line [nm]."""
    sized = artwork.placement.sized
    held = sized.lines[name] if name in sized.lines else sized.pairs[name]
    return held.pour_gap * 1e9


def bridge(artwork: Artwork, rng: random.Random) -> Seeded:
    """A strip of 20 um from a line to the pour."""
    pour = pour_of(artwork)
    for _ in tries():
        name, width, at, (ux, uy) = straight(artwork, rng)
        side, gap = rng.choice((1.0, -1.0)), gap_of(artwork, name)
        across = (-uy * side, ux * side)
        strip = beam(at, across, width / 2.0 + gap + 400_000.0, 20_000.0)
        if strip.intersects(pour):
            break
    away = width / 2.0 + gap / 2.0
    centre = (at[0] + across[0] * away, at[1] + across[1] * away)
    seeded = with_shape(artwork, "copper_top", strip, None, "stray", "stray")
    return Seeded(seeded, ("connectivity.short",), centre, gap)


def cut(artwork: Artwork, rng: random.Random) -> Seeded:
    """A cut of 10 um through a line."""
    _, width, at, along = straight(artwork, rng, strips=True)
    slot = beam((at[0] - 5_000 * along[0], at[1] - 5_000 * along[1]), along, 10_000.0, 2.0 * width)
    return Seeded(with_cut(artwork, slot, ("line", "pair")), ("connectivity.open",), at, width)


def neck(artwork: Artwork, rng: random.Random) -> Seeded:
    """A notch that leaves a neck a micrometre narrower than may be etched."""
    _, width, at, (ux, uy) = straight(artwork, rng, strips=True)
    least = artwork.placement.sized.circuit.rules.copper.min_width or 0.0
    left = least * 1e9 - 1_000.0
    start = (at[0] + uy * (width / 2.0 - left), at[1] - ux * (width / 2.0 - left))
    notch = beam(start, (-uy, ux), 2.0 * width, 60_000.0)
    place = (at[0] + uy * (width / 2.0 - left / 2.0), at[1] - ux * (width / 2.0 - left / 2.0))
    return Seeded(with_cut(artwork, notch, ("line", "pair")), ("copper.min_width",), place)


def notch(artwork: Artwork, rng: random.Random) -> Seeded:
    """An acute notch of 50 degrees in a line's edge."""
    _, width, at, (ux, uy) = straight(artwork, rng, strips=True)
    depth = min(0.3 * width, 100_000.0)
    half = depth * math.tan(math.radians(25.0))
    tip = (at[0] - uy * (width / 2.0 - depth), at[1] + ux * (width / 2.0 - depth))
    mouth = [
        (tip[0] - uy * depth * 1.5 + s * 1.5 * half * ux, tip[1] + ux * depth * 1.5 + s * 1.5 * half * uy)
        for s in (1, -1)
    ]
    return Seeded(
        with_cut(artwork, shapely.Polygon([tip, *mouth]), ("line", "pair")),
        ("copper.min_corner_angle",),
        tip,
        5_000.0,
    )


def narrow_gap(artwork: Artwork, rng: random.Random) -> Seeded:
    """Copper of the pour a micrometre nearer to a line than the least gap."""
    name, width, at, (ux, uy) = straight(artwork, rng, strips=True)
    least = (artwork.placement.sized.circuit.rules.copper.min_gap or 0.0) * 1e9 - 1_000.0
    away = width / 2.0 + least
    start = (at[0] - uy * away, at[1] + ux * away)
    finger = beam(start, (-uy, ux), gap_of(artwork, name) + 400_000.0, 300_000.0)
    place = (at[0] - uy * (away - least / 2.0), at[1] + ux * (away - least / 2.0))
    return Seeded(
        with_shape(artwork, "copper_top", finger, "gnd", "pour", "pour"), ("copper.min_gap",), place
    )


def near_pour(artwork: Artwork, rng: random.Random) -> Seeded:
    """Pour drawn two micrometres nearer to a line than set."""
    lines = shapely.union_all([as_polygon(s) for s in artwork.shapes if s.role in ("line", "pair")])
    for _ in tries():
        name, width, at, (ux, uy) = straight(artwork, rng, strips=True)
        gap = gap_of(artwork, name) - 2_000.0
        away = width / 2.0 + gap
        strip = beam((at[0] - uy * away, at[1] + ux * away), (-uy, ux), 50_000.0, 500_000.0)
        if strip.distance(lines) > gap - 10.0:
            break
    place = (at[0] - uy * (away - gap / 2.0), at[1] + ux * (away - gap / 2.0))
    return Seeded(with_shape(artwork, "copper_top", strip, "gnd", "pour", "pour"), ("ground.gap",), place)


def sliver(artwork: Artwork, rng: random.Random) -> Seeded:
    """A scrap of copper in the gap beside a line."""
    name, width, at, (ux, uy) = straight(artwork, rng, strips=True)
    away = width / 2.0 + gap_of(artwork, name) / 2.0
    middle = (at[0] - uy * away, at[1] + ux * away)
    scrap = shapely.Point(middle).buffer(50_000.0, quad_segs=4)
    seeded = with_shape(artwork, "copper_top", scrap, None, "pour", "scrap")
    return Seeded(seeded, ("copper.min_island_area", "connectivity.floating"), middle)


def slot(artwork: Artwork, rng: random.Random) -> Seeded:
    """A slot of 10 um in the plane under a line."""
    for _ in tries():
        name, width, at, along = straight(artwork, rng, strips=True)
        if name in artwork.placement.pairs or artwork.placement.sized.lines[name].rf:
            break
    gash = beam(at, along, 10_000.0, 3.0 * width)
    return Seeded(with_cut(artwork, gash, ("plane",), "copper_bottom"), ("ground.under_line",), at, width)


def pick_via(artwork: Artwork, rng: random.Random, purpose: str) -> int:
    """Return the index of a via whose purpose begins with a word."""
    return rng.choice([n for n, via in enumerate(artwork.vias) if via.purpose.startswith(purpose)])


def lost_via(artwork: Artwork, rng: random.Random) -> Seeded:
    """Vias of a ground pad left out, lands and all, until one is missing of those that each pad needs."""
    owner = artwork.vias[pick_via(artwork, rng, "part:")].purpose
    own = [via for via in artwork.vias if via.purpose == owner]
    needed = artwork.placement.sized.circuit.rules.vias.per_ground_pad or 1
    pad = ground_pad(artwork, owner)
    return Seeded(
        without_vias(artwork, rng.sample(own, len(own) - needed + 1)),
        ("vias.per_ground_pad",),
        (pad.x, pad.y),
    )


def ground_pad(artwork: Artwork, owner: str) -> PlacedPad:
    """Return the ground pad of the part that vias with a purpose belong to; a part has one at most here."""
    part = artwork.placement.parts[owner.partition(":")[2]]
    (pad,) = (pad for pad in part.pads if pad.net == "gnd" and pad.ground != "flange")
    return pad


def without_vias(artwork: Artwork, gone: Sequence[Via]) -> Artwork:
    """Return the drawing without some vias and their lands."""
    shapes = tuple(
        s for s in artwork.shapes if not (s.role == "land" and any(is_at(s, v.x, v.y) for v in gone))
    )
    return replace(artwork, shapes=shapes, vias=tuple(via for via in artwork.vias if via not in gone))


def is_at(shape: Shape, x: float, y: float) -> bool:
    """Tell whether a round shape stands at a point."""
    (ax, ay), (bx, by) = shape.outline.points[:2]
    return len(shape.outline.points) == 2 and ((ax + bx) / 2, (ay + by) / 2) == (x, y)


def double_via(artwork: Artwork, rng: random.Random) -> Seeded:
    """A via drilled a second time 0.1 mm aside."""
    via = artwork.vias[pick_via(artwork, rng, "")]
    twin = replace(via, x=via.x + 100_000)
    return Seeded(replace(artwork, vias=(*artwork.vias, twin)), ("holes.min_web",), (via.x + 50_000, via.y))


def stray_via(artwork: Artwork, rng: random.Random) -> Seeded:
    """A via moved into a line."""
    for _ in tries():
        _, width, at, _ = straight(artwork, rng)
        if width > 300_000:
            break
    n = pick_via(artwork, rng, "fence")
    moved = replace(artwork.vias[n], x=round(at[0]), y=round(at[1]))
    vias = (*artwork.vias[:n], moved, *artwork.vias[n + 1 :])
    return Seeded(replace(artwork, vias=vias), ("connectivity.short",), at, 300_000.0)


def lost_fence(artwork: Artwork, rng: random.Random) -> Seeded:
    """A via that stands beside a line, and its two neighbours, left out."""
    rim = pour_of(artwork).boundary
    for _ in tries():
        name, width, at, (ux, uy) = straight(artwork, rng)
        reach = rng.choice((1.0, -1.0)) * (width / 2.0 + gap_of(artwork, name))
        edge = (at[0] - uy * reach, at[1] + ux * reach)
        way = shapely.LineString([(edge[0] + s * ux, edge[1] + s * uy) for s in (-3e6, 3e6)])
        if rim.intersection(way.buffer(1_000.0)).length > 5.9e6:
            break
    loose = [via for via in artwork.vias if via.purpose in ("fence", "pour")]
    near = sorted(loose, key=lambda via: math.dist((via.x, via.y), edge))[:3]
    vias = tuple(via for via in artwork.vias if via not in near)
    return Seeded(
        replace(artwork, vias=vias), ("fence.max_pitch", "fence.max_pitch_wavelengths"), edge, 2_000_000.0
    )


def shifted_ring(artwork: Artwork, rng: random.Random) -> Seeded:
    """A barrel pushed aside until its ring is too narrow: the via stands at the pour's very edge."""
    rim = pour_of(artwork).boundary
    n = pick_via(artwork, rng, "fence")
    via = artwork.vias[n]
    edge = shapely.shortest_line(shapely.Point(via.x, via.y), rim).coords[1]
    share = 1.0 - 200_000.0 / math.dist((via.x, via.y), edge)
    x, y = round(via.x + share * (edge[0] - via.x)), round(via.y + share * (edge[1] - via.y))
    vias = (*artwork.vias[:n], replace(via, x=x, y=y), *artwork.vias[n + 1 :])
    return Seeded(replace(artwork, vias=vias), ("holes.min_annular_ring",), (x, y), 400_000.0)


def edge_hole(artwork: Artwork, rng: random.Random) -> Seeded:
    """A hole too near the profile."""
    x = round(rng.uniform(0.3, 0.7) * artwork.placement.width)
    y = rng.choice((900_000, artwork.placement.height - 900_000))
    hole = Hole(x=x, y=y, diameter=1_000_000, plated=False, net=None, origin=Origin("board"))
    place = (x, 200_000 if y == 900_000 else artwork.placement.height - 200_000)
    return Seeded(replace(artwork, holes=(*artwork.holes, hole)), ("holes.min_edge_distance",), place)


def wrong_drill(artwork: Artwork, rng: random.Random) -> Seeded:
    """A via of a drill that the board house does not have."""
    n = pick_via(artwork, rng, "")
    via = replace(artwork.vias[n], drill=330_000)
    vias = (*artwork.vias[:n], via, *artwork.vias[n + 1 :])
    return Seeded(replace(artwork, vias=vias), ("holes.drills",), (via.x, via.y))


def inked_pad(artwork: Artwork, rng: random.Random) -> Seeded:
    """Legend across a pad."""
    pad = rng.choice(
        [p for part in artwork.placement.parts.values() for p in part.pads if p.outline.polygon().area]
    )
    ink = shapely.box(pad.x - 100_000, pad.y - 100_000, pad.x + 100_000, pad.y + 100_000)
    return Seeded(
        with_shape(artwork, "legend_top", ink, None, "legend", "board"),
        ("legend.min_distance",),
        (pad.x, pad.y),
    )


def covered_pad(artwork: Artwork, rng: random.Random) -> Seeded:
    """Mask that reaches 10 um over a pad's edge."""
    pads = [
        (part, p) for part in artwork.placement.parts.values() for p in part.pads if p.outline.polygon().area
    ]
    _, pad = rng.choice(pads)
    x0, y0, x1, y1 = pad.outline.polygon().bounds
    tongue = shapely.box(x0 + 0.4 * (x1 - x0), y1 - 10_000, x0 + 0.6 * (x1 - x0), y1 + 200_000)
    seeded = with_cut(artwork, tongue, ("opening",), "soldermask_top")
    return Seeded(seeded, ("mask.expansion",), ((x0 + x1) / 2, y1), 1.5 * (x1 - x0 + y1 - y0))


def swapped_pair(artwork: Artwork, rng: random.Random) -> Seeded:
    """The first two capacitors of a bank changed places."""
    nets = [net for net in artwork.placement.sized.circuit.nets.values() if len(net.bank) > 1]
    first, second = rng.choice(nets).bank[:2]
    parts = dict(artwork.placement.parts)
    parts[first], parts[second] = (
        replace(parts[second], name=first),
        replace(parts[first], name=second),
    )
    places = [(p.x, p.y) for p in (parts[first], parts[second])]
    at = ((places[0][0] + places[1][0]) / 2, (places[0][1] + places[1][1]) / 2)
    seeded = replace(artwork, placement=replace(artwork.placement, parts=parts))
    return Seeded(seeded, ("bank.order",), at, 3e6)


def thin_feed(artwork: Artwork, rng: random.Random) -> Seeded:
    """A line that carries direct current narrowed to 30 um at one place."""
    currents = artwork.placement.sized.circuit.dc.currents
    for _ in tries():
        name, width, at, (ux, uy) = straight(artwork, rng)
        if abs(currents.get(name, 0.0)) > 0.2:
            break
    start = (at[0] + uy * (width / 2.0 - 30_000.0), at[1] - ux * (width / 2.0 - 30_000.0))
    gash = beam(start, (-uy, ux), 2.0 * width, 60_000.0)
    return Seeded(
        with_cut(artwork, gash, ("line",)), ("current.temperature_rise", "current.max_density"), at, width
    )


ANYWHERE: tuple[Fault, ...] = (
    bridge,
    cut,
    neck,
    notch,
    narrow_gap,
    near_pour,
    sliver,
    slot,
    double_via,
    stray_via,
    lost_fence,
    shifted_ring,
    edge_hole,
    wrong_drill,
)
"""Faults that any board with a pour and a fence can have."""

WITH_BANKS: tuple[Fault, ...] = (lost_via, inked_pad, covered_pad, swapped_pair, thin_feed)
"""Faults that need parts, a bank and direct current."""
