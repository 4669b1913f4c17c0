"""Faults of copper put into a clean drawing at random places; see :mod:`tests.seeded_faults.tools`."""

from __future__ import annotations

import math
import random
from dataclasses import replace

import shapely

from layoutgen.artwork import Artwork
from tests.seeded_faults.tools import (
    UM,
    Fault,
    Place,
    Seeded,
    as_polygon,
    as_shapes,
    beam,
    beside_pour,
    drawn_as,
    gap_of,
    given,
    limit,
    net_of,
    plane_of,
    pour_of,
    straight,
    tries,
    undercut,
    with_cut,
    with_shape,
)

LINES = ("line", "pair")


def bridge(artwork: Artwork, rng: random.Random) -> Seeded:
    """A strip of 20 um from a line to the pour."""
    place, gap = beside_pour(artwork, rng)
    strip = place.box(-10 * UM, 10 * UM, 0.0, place.width / 2.0 + gap + 400 * UM)
    seeded = with_shape(artwork, "copper_top", strip, None, "stray", "stray")
    return Seeded(seeded, ("connectivity.short",), place.at(0.0, (place.width + gap) / 2.0), gap)


def cut(artwork: Artwork, rng: random.Random) -> Seeded:
    """A cut of 10 um through a line."""
    place = straight(artwork, rng)
    slot = place.box(-5 * UM, 5 * UM, -place.width, place.width)
    return Seeded(with_cut(artwork, slot, LINES), ("connectivity.open",), place.middle, place.width)


def neck(artwork: Artwork, rng: random.Random) -> Seeded:
    """A notch that leaves a neck a micrometre narrower than may be etched."""
    place = straight(artwork, rng)
    left = limit(artwork, "copper.min_width") - UM
    edge = left - place.width / 2.0
    notch = place.box(-30 * UM, 30 * UM, edge, 2.0 * place.width)
    return Seeded(with_cut(artwork, notch, LINES), ("copper.min_width",), place.at(0.0, edge - left / 2.0))


def pinch(artwork: Artwork, rng: random.Random) -> Seeded:
    """A line cut from both sides until its halves meet in a point, or barely part."""
    place = straight(artwork, rng)
    deep, wide = place.width, place.width / 2.0
    across = rng.uniform(-0.3, 0.3) * place.width
    corners = [[place.at(s * wide, across + t * deep) for s in (-1.0, 1.0)] for t in (-1.0, 1.0)]
    area = shapely.MultiPolygon([shapely.Polygon([place.at(0.0, across), *mouth]) for mouth in corners])
    seeded = with_cut(artwork, area, LINES)
    return Seeded(seeded, ("copper.min_width", "connectivity.open"), place.at(0.0, across), 10 * UM)


def notch(artwork: Artwork, rng: random.Random) -> Seeded:
    """A notch in a line's edge, a degree sharper than may be."""
    return _notched(artwork, rng, 0.0)


def blunt_notch(artwork: Artwork, rng: random.Random) -> Seeded:
    """A notch in a line's edge, a degree sharper than may be but for its tip, which is 2 um wide."""
    return _notched(artwork, rng, 2 * UM)


def _notched(artwork: Artwork, rng: random.Random, flat: float) -> Seeded:
    """Return the drawing with a notch a degree too sharp, its tip so wide [nm]."""
    place = straight(artwork, rng)
    half = (float(given(artwork, "copper.min_corner_angle")) - math.radians(1.0)) / 2.0
    depth = min(0.3 * place.width, 100 * UM)
    bottom, mouth = place.width / 2.0 - depth, flat / 2.0 + 1.5 * depth * math.tan(half)
    corners = [place.at(s * flat / 2.0, bottom) for s in (-1.0, 1.0)]
    corners += [place.at(s * mouth, bottom + 1.5 * depth) for s in (1.0, -1.0)]
    seeded = with_cut(artwork, shapely.Polygon(corners), LINES)
    return Seeded(seeded, ("copper.min_corner_angle",), place.at(0.0, bottom), 5 * UM)


def narrow_gap(artwork: Artwork, rng: random.Random) -> Seeded:
    """Copper of the pour a micrometre nearer to a line than the least gap."""
    least = limit(artwork, "copper.min_gap") - UM
    for _ in tries():
        place = straight(artwork, rng)
        if (seeded := _fingered(artwork, place, least)) is not None:
            break
    return Seeded(seeded, ("copper.min_gap",), place.at(0.0, (place.width + least) / 2.0))


def charged_gap(artwork: Artwork, rng: random.Random) -> Seeded:
    """Copper of the pour a micrometre nearer to a line on a supply than its voltage asks for."""
    volts = artwork.placement.sized.circuit.dc.voltages
    for _ in tries():
        place = straight(artwork, rng)
        least = _clearance(artwork, abs(volts.get(net_of(artwork, place.name), 0.0))) - UM
        if least > UM and (seeded := _fingered(artwork, place, least)) is not None:
            break
    rules = ("voltage.condition", "voltage.table")
    return Seeded(seeded, rules, place.at(0.0, (place.width + least) / 2.0))


def _fingered(artwork: Artwork, place: Place, gap: float) -> Artwork | None:
    """Return the drawing with pour at a gap [nm] from a line, None where that would meet other copper."""
    near, far = place.width / 2.0 + gap, place.width / 2.0 + gap_of(artwork, place.name) + 400 * UM
    finger = place.box(-150 * UM, 150 * UM, near, far)
    outer = place.box(-150 * UM, 150 * UM, near + gap, far)
    lines = shapely.union_all([as_polygon(s) for s in artwork.shapes if s.role in (*LINES, "radial", "pad")])
    if outer.distance(lines) < 1.5 * gap:
        return None
    return with_shape(artwork, "copper_top", finger, "gnd", "pour", "pour")


_TABLE_6_1_B2 = ((15.0, 0.1), (30.0, 0.1), (50.0, 0.6))
"""Voltage [V] up to which a distance [mm] is enough: first rows of IPC-2221B table 6-1, column B2."""


def _clearance(artwork: Artwork, volts: float) -> float:
    """Return the distance [nm] that a voltage to ground asks for, 0 for none.

    Raises:
        LookupError: the rule file asks for none.
    """
    rules = artwork.placement.sized.circuit.rules.voltage
    rows = [(float(up_to), float(gap) * 1e3) for up_to, gap in rules.table or ()]
    if rules.condition == "B2":
        rows = list(_TABLE_6_1_B2)
    if not rows:
        raise LookupError("no distance for voltages in the rule file")
    return next((gap for up_to, gap in rows if volts <= up_to), 0.0) * 1e6 if volts else 0.0


def near_pour(artwork: Artwork, rng: random.Random) -> Seeded:
    """Pour drawn two micrometres nearer to a line than set."""
    lines = shapely.union_all([as_polygon(s) for s in artwork.shapes if s.role in LINES])
    for _ in tries():
        place = straight(artwork, rng)
        gap = gap_of(artwork, place.name) - 2 * UM
        away = place.width / 2.0 + gap
        strip = place.box(-100 * UM, 100 * UM, away, away + 50 * UM)
        if strip.distance(lines) > gap - undercut(artwork) - 10.0:
            break
    seeded = with_shape(artwork, "copper_top", strip, "gnd", "pour", "pour")
    return Seeded(seeded, ("ground.gap",), place.at(0.0, away - gap / 2.0))


def wide_line(artwork: Artwork, rng: random.Random) -> Seeded:
    """A line 3 % wider than sized over a stretch, so nearer to the pour than set."""
    for _ in tries():
        place, gap = beside_pour(artwork, rng)
        half = 0.515 * place.width
        if half - place.width / 2.0 > 1.5 * UM:
            break
    wider = place.box(-200 * UM, 200 * UM, -half, half)
    role = "line" if place.name in artwork.placement.lines else "pair"
    net = net_of(artwork, place.name)
    seeded = with_shape(artwork, "copper_top", wider, net, role, place.name)
    return Seeded(seeded, ("ground.gap",), place.middle, place.width + gap)


def sliver(artwork: Artwork, rng: random.Random) -> Seeded:
    """A scrap of copper in the gap beside a line, smaller than may be."""
    place, gap = beside_pour(artwork, rng)
    radius = min(
        0.25 * gap, 0.95 * math.sqrt(float(given(artwork, "copper.min_island_area")) / math.pi) * 1e9
    )
    middle = place.at(0.0, (place.width + gap) / 2.0)
    scrap = shapely.Point(middle).buffer(radius, quad_segs=4)
    seeded = with_shape(artwork, "copper_top", scrap, None, "pour", "scrap")
    return Seeded(seeded, ("copper.min_island_area",), middle)


def whisker(artwork: Artwork, rng: random.Random) -> Seeded:
    """A sliver of copper left standing from the pour, a micrometre thinner than can be etched."""
    thin = limit(artwork, "copper.min_width") - UM
    for _ in tries():
        place, gap = beside_pour(artwork, rng)
        if gap > 4.0 * thin:
            break  # shorter ones are corners, by the rule's own words
    rim = place.width / 2.0 + gap
    finger = place.box(-thin / 2.0, thin / 2.0, rim - 0.5 * gap, rim + 2.0 * thin)
    seeded = with_shape(artwork, "copper_top", finger, "gnd", "pour", "pour")
    return Seeded(seeded, ("copper.min_width",), place.at(0.0, rim - 0.25 * gap), 0.3 * gap)


def copper_at_the_edge(artwork: Artwork, rng: random.Random) -> Seeded:
    """Ground copper a micrometre too near the profile."""
    inset = limit(artwork, "copper.min_edge_distance") - UM
    x = rng.uniform(0.3, 0.7) * artwork.placement.width
    tab = shapely.box(x, inset, x + 200 * UM, inset + 400 * UM)
    seeded = with_shape(artwork, "copper_bottom", tab, "gnd", "plane", "board")
    return Seeded(seeded, ("copper.min_edge_distance",), (x + 100 * UM, inset / 2.0), 200 * UM)


def slot(artwork: Artwork, rng: random.Random) -> Seeded:
    """A slot of 10 um in the plane under a line that carries RF."""
    for _ in tries():
        place = straight(artwork, rng)
        if place.name in artwork.placement.pairs or artwork.placement.sized.lines[place.name].rf:
            break
    gash = place.box(-5 * UM, 5 * UM, -1.5 * place.width, 1.5 * place.width)
    seeded = with_cut(artwork, gash, ("plane",), "copper_bottom")
    return Seeded(seeded, ("ground.under_line",), place.middle, place.width)


def slit(artwork: Artwork, rng: random.Random) -> Seeded:
    """A slit in the plane a micrometre narrower than the least gap, off all holes."""
    least = limit(artwork, "copper.min_gap")
    wide, length = least - UM, 6.0 * least
    holes = shapely.union_all(
        [shapely.Point(hole.x, hole.y).buffer(hole.diameter / 2.0) for hole in artwork.holes]
        + [shapely.Point(via.x, via.y).buffer(via.land / 2.0) for via in artwork.vias]
    )
    solid = plane_of(artwork).difference(holes)
    for _ in tries():
        x, y = (rng.uniform(0.1, 0.9) * side for side in (artwork.placement.width, artwork.placement.height))
        gash = shapely.box(x, y, x + length, y + wide)
        if solid.contains(gash.buffer(1.5 * least)):
            break
    seeded = with_cut(artwork, gash, ("plane",), "copper_bottom")
    return Seeded(seeded, ("copper.min_gap",), (x + length / 2.0, y + wide / 2.0), length / 2.0 + wide)


def pour_slit(artwork: Artwork, rng: random.Random) -> Seeded:
    """A slit of 10 um in the pour, such as a scratch in the film leaves."""
    least, pour = limit(artwork, "copper.min_gap"), pour_of(artwork)
    x0, y0, x1, y1 = pour.bounds
    for _ in tries():
        at, turn, length = (rng.uniform(x0, x1), rng.uniform(y0, y1)), rng.uniform(0.0, math.pi), 6.0 * least
        along = (math.cos(turn), math.sin(turn))
        scratch = beam(at, along, length, 10 * UM)
        if pour.contains(scratch.buffer(2.0 * least)):
            break
    seeded = with_cut(artwork, scratch, ("pour", "land"))
    middle = (at[0] + along[0] * length / 2.0, at[1] + along[1] * length / 2.0)
    return Seeded(seeded, ("copper.min_gap",), middle, length / 2.0 + 10 * UM)


def _moated(artwork: Artwork, rng: random.Random, side: float, rule: str) -> Seeded:
    """Return the drawing with a square of plane cut off all round, away from vias; its side finished [nm]."""
    vias = shapely.union_all([shapely.Point(via.x, via.y).buffer(via.land / 2.0) for via in artwork.vias])
    plane = next(shape for shape in artwork.shapes if shape.role == "plane")
    inside, width = as_polygon(plane), 1.6 * limit(artwork, "copper.min_gap")
    for _ in tries():
        x, y = (rng.uniform(0.1, 0.9) * size for size in (artwork.placement.width, artwork.placement.height))
        island = shapely.box(x, y, x + side, y + side)
        moat = drawn_as(island, width)
        if inside.contains(moat) and moat.distance(vias) > width:
            break
    edge = undercut(artwork)
    left = inside.difference(drawn_as(moat, -edge).difference(drawn_as(island, edge)))
    kept = [shape for shape in artwork.shapes if shape is not plane]
    seeded = replace(artwork, shapes=(*kept, *as_shapes(plane, left)))
    return Seeded(seeded, (rule,), (x + side / 2.0, y + side / 2.0), side + width)


def lone_copper(artwork: Artwork, rng: random.Random) -> Seeded:
    """A piece of plane cut off all round, smaller than an island may be."""
    side = math.sqrt(0.95 * float(given(artwork, "copper.min_island_area"))) * 1e9
    return _moated(artwork, rng, side, "copper.min_island_area")


def lone_plane(artwork: Artwork, rng: random.Random) -> Seeded:
    """A piece of plane cut off all round, as large as an island may be: it does not hang on the rest."""
    side = math.sqrt(1.05 * float(given(artwork, "copper.min_island_area"))) * 1e9
    return _moated(artwork, rng, side, "connectivity.open")


def lost_line(artwork: Artwork, rng: random.Random) -> Seeded:
    """A line, a strip of a coupled pair or a radial stub left out of the drawing."""
    gone = rng.choice([s for s in artwork.on("copper_top") if s.role in (*LINES, "radial")])
    kept = tuple(shape for shape in artwork.shapes if shape is not gone)
    x0, y0, x1, y1 = as_polygon(gone).bounds
    middle, reach = ((x0 + x1) / 2.0, (y0 + y1) / 2.0), math.hypot(x1 - x0, y1 - y0) / 2.0
    return Seeded(replace(artwork, shapes=kept), ("connectivity.open",), middle, reach)


def short_end(artwork: Artwork, rng: random.Random) -> Seeded:
    """Two micrometres left out of the end of an open line or strip."""
    ends = [
        (line.name, line.width, line.path[-2:])
        for line in artwork.placement.lines.values()
        if len(line.nets) == 1
    ]
    for pair in artwork.placement.pairs.values():
        ways = (way for path in pair.paths for way in (path[::-1], path))
        ends += [
            (pair.name, pair.width, way) for way, net in zip(ways, pair.nets, strict=True) if net == "open"
        ]
    if not ends:
        raise LookupError("no open end")
    name, width, (a, b) = rng.choice(ends)
    along = ((b[0] - a[0]) / math.dist(a, b), (b[1] - a[1]) / math.dist(a, b))
    end = Place(name, width, b, along)
    seeded = with_cut(artwork, end.box(-2 * UM, 100 * UM, -0.7 * width, 0.7 * width), LINES)
    return Seeded(seeded, ("connectivity.open",), b, 2 * UM)


COPPER: tuple[Fault, ...] = (
    bridge,
    cut,
    neck,
    pinch,
    notch,
    blunt_notch,
    narrow_gap,
    near_pour,
    wide_line,
    sliver,
    whisker,
    copper_at_the_edge,
    slot,
    slit,
    pour_slit,
    lone_copper,
    lone_plane,
    lost_line,
    short_end,
)
"""Faults that any board with lines and a pour can have."""

CHARGED: tuple[Fault, ...] = (charged_gap,)
"""Faults that need a direct voltage."""
