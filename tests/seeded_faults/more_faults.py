"""More faults put into a clean drawing at random places; see :mod:`tests.seeded_faults.faults`."""

from __future__ import annotations

import math
import random
from dataclasses import replace

import shapely

from layoutgen.artwork import Artwork, Hole
from layoutgen.geometry import Ring
from layoutgen.origin import Origin
from tests.seeded_faults.faults import (
    Fault,
    Seeded,
    as_polygon,
    as_shapes,
    beam,
    gap_of,
    ground_pad,
    pick_via,
    pour_of,
    straight,
    tries,
    with_cut,
    with_shape,
    without_vias,
)


def limit(artwork: Artwork, key: str) -> float:
    """Return a length of the rule file [nm].

    Raises:
        LookupError: the rule file is silent, so there is nothing to break.
    """
    table, name = key.split(".")
    found = getattr(getattr(artwork.placement.sized.circuit.rules, table), name, None)
    if found is None:
        raise LookupError(f"no {key} in the rule file")
    return float(found) * 1e9


def wide_line(artwork: Artwork, rng: random.Random) -> Seeded:
    """A line 3 % wider than sized, so nearer to the pour than set."""
    pour = pour_of(artwork)
    for _ in tries():
        name, width, at, (ux, uy) = straight(artwork, rng)
        more = 0.015 * width
        reach = width / 2.0 + gap_of(artwork, name)
        edge = shapely.Point(at[0] - uy * reach, at[1] + ux * reach)
        if more > 3_000.0 and pour.boundary.distance(edge) < 100.0:
            break
    line = artwork.placement.lines[name]
    grown = shapely.LineString(line.path).buffer(width / 2.0 + more, cap_style="flat", join_style="mitre")
    seeded = with_shape(artwork, "copper_top", grown, line.nets[0], "line", name)
    return Seeded(seeded, ("ground.gap",), at, 66e6)


def hole_at_a_line(artwork: Artwork, rng: random.Random) -> Seeded:
    """An unplated hole drilled too near a line."""
    _, width, at, (ux, uy) = straight(artwork, rng, strips=True)
    away = width / 2.0 + 500_000.0 + limit(artwork, "holes.min_copper_distance") - 5_000.0
    x, y = round(at[0] - uy * away), round(at[1] + ux * away)
    hole = Hole(x=x, y=y, diameter=1_000_000, plated=False, net=None, origin=Origin("board"))
    return Seeded(
        replace(artwork, holes=(*artwork.holes, hole)), ("holes.min_copper_distance",), (x, y), 800_000.0
    )


def hole_at_a_via(artwork: Artwork, rng: random.Random) -> Seeded:
    """A hole drilled so near a via that the web between them breaks out."""
    via = artwork.vias[pick_via(artwork, rng, "")]
    away = via.drill / 2.0 + 150_000.0 + limit(artwork, "holes.min_web") - 5_000.0
    turn = rng.uniform(0.0, 2.0 * math.pi)
    x, y = round(via.x + away * math.cos(turn)), round(via.y + away * math.sin(turn))
    hole = Hole(x=x, y=y, diameter=300_000, plated=False, net=None, origin=Origin("board"))
    return Seeded(replace(artwork, holes=(*artwork.holes, hole)), ("holes.min_web",), (x, y), 500_000.0)


def copper_at_the_edge(artwork: Artwork, rng: random.Random) -> Seeded:
    """Ground copper drawn a micrometre too near the profile."""
    inset = limit(artwork, "copper.min_edge_distance") - 1_000.0
    x = rng.uniform(0.3, 0.7) * artwork.placement.width
    tab = shapely.box(x, inset, x + 200_000, inset + 400_000)
    seeded = with_shape(artwork, "copper_bottom", tab, "gnd", "plane", "board")
    return Seeded(seeded, ("copper.min_edge_distance",), (x + 100_000, inset / 2.0), 200_000.0)


def thin_ink(artwork: Artwork, rng: random.Random) -> Seeded:
    """A legend stroke a micrometre thinner than can be printed."""
    x, y = (rng.uniform(0.2, 0.8) * side for side in (artwork.placement.width, artwork.placement.height))
    ink = shapely.box(x, y, x + 2e6, y + limit(artwork, "legend.min_line") - 1_000.0)
    seeded = with_shape(artwork, "legend_top", ink, None, "legend", "thin")
    return Seeded(seeded, ("legend.min_line",), (x + 1e6, y), 1.1e6)


def thin_mask(artwork: Artwork, rng: random.Random) -> Seeded:
    """Two openings with a web of mask between them a micrometre too narrow."""
    web = limit(artwork, "mask.min_web") - 1_000.0
    openings = shapely.union_all([as_polygon(shape) for shape in artwork.on("soldermask_top")])
    for _ in tries():
        x, y = (rng.uniform(0.1, 0.9) * side for side in (artwork.placement.width, artwork.placement.height))
        if not openings.intersects(shapely.box(x - 2e5, y - 2e5, x + 1.4e6, y + 7e5)):
            break
    seeded = artwork
    for x0 in (x, x + 500_000 + web):
        area = shapely.box(x0, y, x0 + 500_000, y + 500_000)
        seeded = with_shape(seeded, "soldermask_top", area, None, "opening", "extra")
    return Seeded(seeded, ("mask.min_web",), (x + 500_000, y + 250_000), 600_000.0)


def small_drill(artwork: Artwork, rng: random.Random) -> Seeded:
    """A via drilled smaller than can be drilled."""
    n = pick_via(artwork, rng, "")
    via = replace(artwork.vias[n], drill=int(limit(artwork, "holes.min_diameter")) - 1_000)
    vias = (*artwork.vias[:n], via, *artwork.vias[n + 1 :])
    return Seeded(replace(artwork, vias=vias), ("holes.min_diameter",), (via.x, via.y))


def small_land(artwork: Artwork, rng: random.Random) -> Seeded:
    """A via listed with a smaller land than the rule file's."""
    n = pick_via(artwork, rng, "")
    via = replace(artwork.vias[n], land=artwork.vias[n].land - 50_000)
    vias = (*artwork.vias[:n], via, *artwork.vias[n + 1 :])
    return Seeded(replace(artwork, vias=vias), ("vias.diameter",), (via.x, via.y))


def near_vias(artwork: Artwork, rng: random.Random) -> Seeded:
    """A second via a micrometre nearer than the least pitch."""
    via = artwork.vias[pick_via(artwork, rng, "")]
    away = limit(artwork, "vias.min_pitch") - 2_000.0
    turn = rng.uniform(0.0, 2.0 * math.pi)
    twin = replace(via, x=round(via.x + away * math.cos(turn)), y=round(via.y + away * math.sin(turn)))
    middle = ((via.x + twin.x) / 2.0, (via.y + twin.y) / 2.0)
    return Seeded(replace(artwork, vias=(*artwork.vias, twin)), ("vias.min_pitch",), middle)


def slit(artwork: Artwork, rng: random.Random) -> Seeded:
    """A slit in the plane a micrometre narrower than the least gap."""
    wide = limit(artwork, "copper.min_gap") - 1_000.0
    plane = shapely.union_all([as_polygon(s) for s in artwork.shapes if s.role == "plane"])
    holes = [shapely.Point(hole.x, hole.y).buffer(hole.diameter / 2.0) for hole in artwork.holes]
    for _ in tries():
        x, y = (rng.uniform(0.1, 0.8) * side for side in (artwork.placement.width, artwork.placement.height))
        gash = shapely.box(x, y, x + 2e6, y + wide)
        if plane.contains(gash.buffer(2e5)) and not gash.intersects(shapely.union_all(holes)):
            break
    seeded = with_cut(artwork, gash, ("plane",), "copper_bottom")
    return Seeded(seeded, ("copper.min_gap",), (x + 1e6, y + wide / 2.0), 1.1e6)


def pour_slit(artwork: Artwork, rng: random.Random) -> Seeded:
    """A slit of 10 um in the pour, such as a scratch in the film leaves."""
    pour = pour_of(artwork)
    x0, y0, x1, y1 = pour.bounds
    for _ in tries():
        x, y, length = rng.uniform(x0, x1), rng.uniform(y0, y1), 1e6
        turn = rng.uniform(0.0, math.pi)
        along = (math.cos(turn), math.sin(turn))
        scratch = beam((x, y), along, length, 10_000.0)
        if pour.contains(scratch.buffer(300_000.0)):
            break
    seeded = with_cut(artwork, scratch, ("pour", "land"))
    middle = (x + along[0] * length / 2.0, y + along[1] * length / 2.0)
    return Seeded(seeded, ("copper.min_gap",), middle, 600_000.0)


def hole_in_a_line(artwork: Artwork, rng: random.Random) -> Seeded:
    """An unplated hole drilled into a line's edge."""
    _, width, at, (ux, uy) = straight(artwork, rng, strips=True)
    x, y = round(at[0] - uy * width / 2.0), round(at[1] + ux * width / 2.0)
    hole = Hole(x=x, y=y, diameter=300_000, plated=False, net=None, origin=Origin("board"))
    rules = ("holes.min_copper_distance",)
    return Seeded(replace(artwork, holes=(*artwork.holes, hole)), rules, (x, y), 600_000.0)


def whisker(artwork: Artwork, rng: random.Random) -> Seeded:
    """A sliver of copper left standing from the pour, thinner than can be etched."""
    rim = pour_of(artwork).boundary
    thin = limit(artwork, "copper.min_width") - 1_000.0
    for _ in tries():
        name, width, at, (ux, uy) = straight(artwork, rng)
        gap, side = gap_of(artwork, name), rng.choice((1.0, -1.0))
        edge = (at[0] - side * uy * (width / 2 + gap), at[1] + side * ux * (width / 2 + gap))
        if gap > 4.0 * thin and rim.distance(shapely.Point(edge)) < 1_000.0:
            break  # shorter ones are corners, by the rule's own words
    inward = (side * uy, -side * ux)
    start = (edge[0] - 200_000.0 * inward[0], edge[1] - 200_000.0 * inward[1])
    finger = beam(start, inward, 200_000.0 + 0.5 * gap, thin)
    seeded = with_shape(artwork, "copper_top", finger, "gnd", "pour", "pour")
    place = (edge[0] + 0.25 * gap * inward[0], edge[1] + 0.25 * gap * inward[1])
    return Seeded(seeded, ("copper.min_width",), place, 0.3 * gap + 100_000.0)


def lost_pad(artwork: Artwork, rng: random.Random) -> Seeded:
    """A pad left out."""
    pads = [
        pad for part in artwork.placement.parts.values() for pad in part.pads if pad.outline.polygon().area
    ]
    pad = rng.choice(pads)
    area = pad.outline.polygon().buffer(5_000.0)
    roles = ("pad", "line", "strip", "ground", "pour", "land", "pair")
    seeded = with_cut(artwork, area, roles)
    rules = ("connectivity.open", "connectivity.floating")
    return Seeded(seeded, rules, (pad.x, pad.y), 5e6)


def lost_opening(artwork: Artwork, rng: random.Random) -> Seeded:
    """A pad left under the mask."""
    pads = [p for part in artwork.placement.parts.values() for p in part.pads if p.outline.polygon().area]
    pad = rng.choice(pads)
    area = pad.outline.polygon().buffer(150_000.0)
    seeded = with_cut(artwork, area, ("opening",), "soldermask_top")
    return Seeded(seeded, ("mask.expansion",), (pad.x, pad.y), 3e6)


def bare_ground_pad(artwork: Artwork, rng: random.Random) -> Seeded:
    """A grounded part whose vias were all left out."""
    owner = rng.choice(sorted({via.purpose for via in artwork.vias if via.purpose.startswith("part:")}))
    gone = [via for via in artwork.vias if via.purpose == owner]
    pad = ground_pad(artwork, owner)
    rules = ("vias.per_ground_pad", "ground.vias")
    return Seeded(without_vias(artwork, gone), rules, (pad.x, pad.y))


def cut_strip(artwork: Artwork, rng: random.Random) -> Seeded:
    """A cut of 10 um through the strip of a bank or to a part, where neither a pad nor a line bridges it."""
    bridges = shapely.union_all(
        [as_polygon(s) for s in artwork.on("copper_top") if s.role in ("pad", "line")]
    )
    strips = [strip for strip in artwork.placement.strips if math.dist(*strip.path[:2]) > 1e6]
    if not strips:
        raise LookupError("no strip is long enough")
    for _ in tries():
        strip = rng.choice(strips)
        a, b = strip.path[:2]
        length, share = math.dist(a, b), rng.uniform(0.1, 0.9)
        along = ((b[0] - a[0]) / length, (b[1] - a[1]) / length)
        at = (a[0] + share * (b[0] - a[0]), a[1] + share * (b[1] - a[1]))
        slot = beam(at, along, 10_000.0, 3.0 * strip.width)
        if not slot.intersects(bridges):
            break
    middle = (at[0] + 5_000.0 * along[0], at[1] + 5_000.0 * along[1])
    return Seeded(with_cut(artwork, slot, ("strip",)), ("connectivity.open",), middle, strip.width)


def plane_off_the_flange(artwork: Artwork, rng: random.Random) -> Seeded:
    """The plane drawn back from a flange's cut-out."""
    parts = [part for part in artwork.placement.parts.values() if part.cutout is not None]
    part = rng.choice(parts)
    assert part.cutout is not None
    hole = part.cutout.polygon()
    seeded = with_cut(artwork, hole.buffer(1_200_000.0, join_style="mitre"), ("plane",), "copper_bottom")
    x0, y0, x1, y1 = hole.bounds
    return Seeded(seeded, ("ground.flange",), ((x0 + x1) / 2, (y0 + y1) / 2), (x1 - x0) + (y1 - y0))


def far_capacitor(artwork: Artwork, rng: random.Random) -> Seeded:
    """The first capacitor of a bank moved away from its feed."""
    nets = [net for net in artwork.placement.sized.circuit.nets.values() if len(net.bank) > 1]
    name = rng.choice(nets).bank[0]
    part = artwork.placement.parts[name]
    push = 4_000_000
    pads = tuple(replace(pad, x=pad.x + push, outline=_moved(pad.outline, push)) for pad in part.pads)
    parts = {**artwork.placement.parts, name: replace(part, x=part.x + push, pads=pads)}
    seeded = replace(artwork, placement=replace(artwork.placement, parts=parts))
    return Seeded(seeded, ("bank.max_distance", "bank.order"), (part.x, part.y), 8e6)


def _moved(ring: Ring, push: int) -> Ring:
    """Return an outline moved east."""
    return Ring(tuple((x + push, y) for x, y in ring.points), ring.bulges)


def ringless_via(artwork: Artwork, rng: random.Random) -> Seeded:
    """Copper of the pour about a via cut away: its ring is gone."""
    n = pick_via(artwork, rng, "pour" if any(v.purpose == "pour" for v in artwork.vias) else "fence")
    via = artwork.vias[n]
    area = shapely.Point(via.x, via.y).buffer(via.land / 2.0 + 50_000.0)
    seeded = with_cut(artwork, area, ("pour", "land", "line", "ground", "strip"))
    return Seeded(seeded, ("holes.min_annular_ring",), (via.x, via.y), 500_000.0)


def lone_copper(artwork: Artwork, rng: random.Random) -> Seeded:
    """A piece of plane cut off all round: it hangs on nothing."""
    vias = [shapely.Point(via.x, via.y) for via in artwork.vias]
    plane = next(shape for shape in artwork.shapes if shape.role == "plane")
    inside = as_polygon(plane)
    for _ in tries():
        x = rng.uniform(0.1, 0.9) * artwork.placement.width
        y = rng.uniform(0.1, 0.9) * artwork.placement.height
        island = shapely.box(x, y, x + 600_000.0, y + 600_000.0)
        moat = island.buffer(200_000.0, join_style="mitre")
        if inside.contains(moat) and not any(moat.intersects(via.buffer(400_000.0)) for via in vias):
            break
    kept = [shape for shape in artwork.shapes if shape is not plane]
    kept += as_shapes(plane, inside.difference(moat.difference(island)))
    seeded = replace(artwork, shapes=tuple(kept))
    rules = ("connectivity.floating", "copper.min_island_area")
    return Seeded(seeded, rules, (x + 300_000, y + 300_000), 500_000.0)


MORE_ANYWHERE: tuple[Fault, ...] = (
    wide_line,
    hole_at_a_line,
    hole_at_a_via,
    copper_at_the_edge,
    thin_ink,
    thin_mask,
    small_drill,
    small_land,
    near_vias,
    slit,
    pour_slit,
    hole_in_a_line,
    whisker,
    ringless_via,
    lone_copper,
)
"""Faults that any board with a pour and a fence can have."""

MORE_WITH_PARTS: tuple[Fault, ...] = (
    lost_pad,
    lost_opening,
    bare_ground_pad,
    cut_strip,
    plane_off_the_flange,
    far_capacitor,
)
"""Faults that need parts, a flange and a bank."""
