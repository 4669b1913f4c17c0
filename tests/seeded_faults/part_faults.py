"""Faults of mask, legend, parts and banks put into a clean drawing; see :mod:`tests.seeded_faults.tools`."""

from __future__ import annotations

import math
import random
from dataclasses import replace

import shapely

from layoutgen.artwork import Artwork
from layoutgen.formulas.limits import ipc2221_width
from layoutgen.geometry import Ring
from layoutgen.placement import PlacedPart
from tests.seeded_faults.tools import (
    UM,
    Fault,
    Geometry,
    Seeded,
    as_polygon,
    beam,
    drawn_as,
    given,
    ground_pad,
    limit,
    pick_pad,
    pick_via,
    straight,
    tries,
    with_cut,
    with_shape,
    without_vias,
)


def thin_ink(artwork: Artwork, rng: random.Random) -> Seeded:
    """A legend stroke a micrometre thinner than can be printed."""
    thin = limit(artwork, "legend.min_line") - UM
    x, y = (rng.uniform(0.2, 0.8) * side for side in (artwork.placement.width, artwork.placement.height))
    ink = shapely.box(x, y, x + 2_000 * UM, y + thin)
    seeded = with_shape(artwork, "legend_top", ink, None, "legend", "thin")
    return Seeded(seeded, ("legend.min_line",), (x + 1_000 * UM, y), 1_100 * UM)


def inked_pad(artwork: Artwork, rng: random.Random) -> Seeded:
    """Legend across a pad."""
    limit(artwork, "legend.min_distance")
    pad = pick_pad(artwork, rng)
    ink = shapely.box(pad.x - 100 * UM, pad.y - 100 * UM, pad.x + 100 * UM, pad.y + 100 * UM)
    seeded = with_shape(artwork, "legend_top", ink, None, "legend", "ink")
    return Seeded(seeded, ("legend.min_distance",), (pad.x, pad.y))


def near_ink(artwork: Artwork, rng: random.Random) -> Seeded:
    """A dot of legend a micrometre too near an opening of the mask."""
    away = limit(artwork, "legend.min_distance") - UM
    openings = shapely.union_all([as_polygon(shape) for shape in artwork.on("soldermask_top")])
    radius = 100 * UM
    rim = openings.buffer(away + radius, quad_segs=64).boundary
    centre = rim.interpolate(rng.random(), normalized=True)
    dot = centre.buffer(radius, quad_segs=64)
    seeded = with_shape(artwork, "legend_top", dot, None, "legend", "dot")
    at = shapely.shortest_line(centre, openings).interpolate(radius + away / 2.0)
    return Seeded(seeded, ("legend.min_distance",), (at.x, at.y))


def thin_mask(artwork: Artwork, rng: random.Random) -> Seeded:
    """Two openings with a web of mask between them a micrometre too narrow."""
    web = limit(artwork, "mask.min_web") - UM
    openings = shapely.union_all([as_polygon(shape) for shape in artwork.on("soldermask_top")])
    for _ in tries():
        x, y = (rng.uniform(0.1, 0.9) * side for side in (artwork.placement.width, artwork.placement.height))
        if not openings.intersects(shapely.box(x, y, x + 1_000 * UM + web, y + 500 * UM).buffer(2.0 * web)):
            break
    seeded = artwork
    for x0 in (x, x + 500 * UM + web):
        area = shapely.box(x0, y, x0 + 500 * UM, y + 500 * UM)
        seeded = with_shape(seeded, "soldermask_top", area, None, "opening", "extra")
    return Seeded(seeded, ("mask.min_web",), (x + 500 * UM + web / 2.0, y + 250 * UM))


def _tongue(artwork: Artwork, rng: random.Random, over: float) -> Seeded:
    """Return the drawing with mask so far over an edge of a pad, short of it when negative [nm]."""
    expansion = limit(artwork, "mask.expansion")
    profile = shapely.union_all([as_polygon(s) for s in artwork.shapes if s.role == "profile"])
    cutouts = shapely.union_all([as_polygon(s) for s in artwork.shapes if s.role == "cutout"])
    for _ in tries():
        pad = pick_pad(artwork, rng)
        x0, y0, x1, y1 = pad.outline.polygon().bounds
        turn = rng.choice((0, 1, 2, 3))
        along = ((1, 0), (0, 1), (-1, 0), (0, -1))[turn]
        out, across = ((x1 - x0, y1 - y0), (y1 - y0, x1 - x0))[turn % 2]
        edge = ((x0 + x1 + out * along[0]) / 2.0, (y0 + y1 + out * along[1]) / 2.0)
        start = (edge[0] - over * along[0], edge[1] - over * along[1])
        tongue = beam(start, along, over + expansion + 150 * UM, 0.2 * across)
        if profile.contains(tongue) and not cutouts.intersects(tongue):
            break
    seeded = with_cut(artwork, tongue, ("opening",), "soldermask_top")
    return Seeded(seeded, ("mask.expansion",), edge, expansion + 0.2 * across)


def covered_pad(artwork: Artwork, rng: random.Random) -> Seeded:
    """Mask that reaches 10 um over a pad's edge."""
    return _tongue(artwork, rng, 10 * UM)


def tight_opening(artwork: Artwork, rng: random.Random) -> Seeded:
    """Mask that comes a micrometre too near to a pad's edge."""
    return _tongue(artwork, rng, UM - limit(artwork, "mask.expansion"))


def lost_opening(artwork: Artwork, rng: random.Random) -> Seeded:
    """A pad left under the mask."""
    away = limit(artwork, "mask.expansion") + 100 * UM
    pad = pick_pad(artwork, rng)
    seeded = with_cut(artwork, pad.outline.polygon().buffer(away), ("opening",), "soldermask_top")
    return Seeded(seeded, ("mask.expansion",), (pad.x, pad.y), 0.1 * _size(pad.outline))


def lost_pad(artwork: Artwork, rng: random.Random) -> Seeded:
    """A pad left out."""
    pad = pick_pad(artwork, rng)
    area = pad.outline.polygon().buffer(5 * UM)
    seeded = with_cut(artwork, area, ("pad", "line", "strip", "ground", "pour", "land", "pair"))
    return Seeded(seeded, ("connectivity.open",), (pad.x, pad.y), _size(pad.outline))


def chipped_pad(artwork: Artwork, rng: random.Random) -> Seeded:
    """A corner of a pad left out, 20 um deep."""
    pad = pick_pad(artwork, rng)
    x0, y0, x1, y1 = pad.outline.polygon().bounds
    x, y = rng.choice((x0, x1)), rng.choice((y0, y1))
    chip = shapely.box(x - 20 * UM, y - 20 * UM, x + 20 * UM, y + 20 * UM)
    if not chip.intersects(pad.outline.polygon().buffer(-5 * UM)):
        raise LookupError("no corner there")
    seeded = with_cut(artwork, chip, ("pad", "line", "strip", "ground", "pour", "land", "pair"))
    return Seeded(seeded, ("connectivity.open",), (x, y), 20 * UM)


def lost_via(artwork: Artwork, rng: random.Random) -> Seeded:
    """Vias of a ground pad left out, lands and all, until one is missing of those that each pad needs."""
    needed = int(given(artwork, "vias.per_ground_pad"))
    owner = artwork.vias[pick_via(artwork, rng, "part:")].purpose
    own, pad = [via for via in artwork.vias if via.purpose == owner], ground_pad(artwork, owner)
    seeded = without_vias(artwork, rng.sample(own, len(own) - needed + 1))
    return Seeded(seeded, ("vias.per_ground_pad",), (pad.x, pad.y))


def bare_ground_pad(artwork: Artwork, rng: random.Random) -> Seeded:
    """A grounded part whose vias were all left out."""
    owner = artwork.vias[pick_via(artwork, rng, "part:")].purpose
    seeded = without_vias(artwork, [via for via in artwork.vias if via.purpose == owner])
    pad = ground_pad(artwork, owner)
    return Seeded(seeded, ("ground.vias", "vias.per_ground_pad"), (pad.x, pad.y))


def swapped_pair(artwork: Artwork, rng: random.Random) -> Seeded:
    """The first two capacitors of a bank changed places."""
    first, second = rng.choice(_banks(artwork))[:2]
    parts = dict(artwork.placement.parts)
    one, other = parts[first], parts[second]
    parts[first], parts[second] = replace(other, name=first), replace(one, name=second)
    at = ((one.x + other.x) / 2.0, (one.y + other.y) / 2.0)
    seeded = replace(artwork, placement=replace(artwork.placement, parts=parts))
    return Seeded(seeded, ("bank.order",), at, _size(one.outline) + _size(other.outline))


def far_capacitor(artwork: Artwork, rng: random.Random) -> Seeded:
    """The first capacitor of a bank moved away from its feed, past the second."""
    most = limit(artwork, "bank.max_distance")
    first, second = rng.choice(_banks(artwork))[:2]
    part, other = artwork.placement.parts[first], artwork.placement.parts[second]
    push = round(most + 2.0 * math.dist((part.x, part.y), (other.x, other.y)))
    pads = tuple(replace(pad, x=pad.x + push, outline=_moved(pad.outline, push)) for pad in part.pads)
    moved: dict[str, PlacedPart] = {
        **artwork.placement.parts,
        first: replace(part, x=part.x + push, pads=pads),
    }
    seeded = replace(artwork, placement=replace(artwork.placement, parts=moved))
    return Seeded(seeded, ("bank.max_distance", "bank.order"), (part.x, part.y), 2.0 * push)


def _banks(artwork: Artwork) -> list[tuple[str, ...]]:
    """Return the parts of each bank, in their order.

    Raises:
        LookupError: there is none.
    """
    nets = artwork.placement.sized.circuit.nets.values()
    found = [net.bank for net in nets if len(net.bank) > 1]
    if not found:
        raise LookupError("no bank")
    return found


def _moved(ring: Ring, push: int) -> Ring:
    """Return an outline moved east."""
    return Ring(tuple((x + push, y) for x, y in ring.points), ring.bulges)


def _size(ring: Ring) -> float:
    """Return the longest way across an outline's box [nm]."""
    x0, y0, x1, y1 = ring.polygon().bounds
    return math.hypot(x1 - x0, y1 - y0)


def thin_feed(artwork: Artwork, rng: random.Random) -> Seeded:
    """A line that carries direct current narrowed at one place, a twentieth too narrow for its current."""
    currents = artwork.placement.sized.circuit.dc.currents
    for _ in tries():
        place = straight(artwork, rng, strips=False)
        left, rule = _needed(artwork, abs(currents.get(place.name, 0.0)))
        left *= 0.95
        if 2 * UM < left < 0.8 * place.width:
            break
    gash = place.box(-30 * UM, 30 * UM, left - place.width / 2.0, 2.0 * place.width)
    at = place.at(0.0, (left - place.width) / 2.0)
    return Seeded(with_cut(artwork, gash, ("line",)), (rule,), at)


def _needed(artwork: Artwork, current: float) -> tuple[float, str]:
    """Return the width [nm] that a current asks for, and the rule that does.

    Raises:
        LookupError: the rule file has no rule on current.
    """
    rules, file = artwork.placement.sized.circuit.rules.current, artwork.placement.sized.circuit.file
    thickness = file.substrate.copper_thickness
    found = []
    if rules.temperature_rise is not None and current:
        width = float(ipc2221_width(current, thickness, rules.temperature_rise))
        found.append((width * 1e9, "current.temperature_rise"))
    if rules.max_density is not None:
        found.append((current / (rules.max_density * thickness) * 1e9, "current.max_density"))
    if not found:
        raise LookupError("no rule on current in the rule file")
    return max(found)


def cut_strip(artwork: Artwork, rng: random.Random) -> Seeded:
    """A cut of 10 um through the strip of a bank or to a part, where neither a pad nor a line bridges it."""
    bridges = shapely.union_all(
        [as_polygon(s) for s in artwork.on("copper_top") if s.role in ("pad", "line")]
    )
    strips = [strip for strip in artwork.placement.strips if math.dist(*strip.path[:2]) > 200 * UM]
    if not strips:
        raise LookupError("no strip is long enough")
    for _ in tries():
        strip = rng.choice(strips)
        a, b = strip.path[:2]
        length, share = math.dist(a, b), rng.uniform(0.1, 0.9)
        along = ((b[0] - a[0]) / length, (b[1] - a[1]) / length)
        at = (a[0] + share * (b[0] - a[0]), a[1] + share * (b[1] - a[1]))
        slot = beam(at, along, 10 * UM, 3.0 * strip.width)
        if not slot.intersects(bridges):
            break
    middle = (at[0] + 5 * UM * along[0], at[1] + 5 * UM * along[1])
    return Seeded(with_cut(artwork, slot, ("strip",)), ("connectivity.open",), middle, strip.width)


def plane_off_the_flange(artwork: Artwork, rng: random.Random) -> Seeded:
    """The plane drawn two micrometres too far back from a flange's cut-out."""
    back = limit(artwork, "copper.min_edge_distance") + 2 * UM
    cutouts = [p.cutout for p in artwork.placement.parts.values() if p.cutout is not None]
    if not cutouts:
        raise LookupError("no flange")
    ring = rng.choice(cutouts)
    hole: Geometry = ring.polygon()
    seeded = with_cut(artwork, drawn_as(hole, back), ("plane",), "copper_bottom")
    return Seeded(seeded, ("ground.flange",), (hole.centroid.x, hole.centroid.y), 0.6 * _size(ring))


PARTS: tuple[Fault, ...] = (
    thin_ink,
    inked_pad,
    near_ink,
    thin_mask,
    covered_pad,
    tight_opening,
    lost_opening,
    lost_pad,
    chipped_pad,
    lost_via,
    bare_ground_pad,
    swapped_pair,
    far_capacitor,
    thin_feed,
    cut_strip,
    plane_off_the_flange,
)
"""Faults that need a mask and a legend, parts, a flange, a bank, or direct current."""
