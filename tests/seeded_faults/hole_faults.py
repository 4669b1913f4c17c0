"""Faults of vias and holes put into a clean drawing at random; see :mod:`tests.seeded_faults.tools`."""

from __future__ import annotations

import math
import random
from dataclasses import replace

import shapely

from layoutgen.artwork import Artwork, Hole
from layoutgen.formulas.constants import C0
from layoutgen.origin import Origin
from tests.seeded_faults.tools import (
    UM,
    Fault,
    Seeded,
    beside_pour,
    given,
    limit,
    pick_via,
    pour_of,
    straight,
    tries,
    undercut,
    with_cut,
    with_via,
)


def drill(artwork: Artwork, wanted: float) -> int:
    """Return the stocked drill nearest to a diameter [nm]."""
    stock = [round(float(size) * 1e9) for size in given(artwork, "holes.drills")]
    return min(stock, key=lambda size: (abs(size - wanted), size))


def bored(artwork: Artwork, x: float, y: float, diameter: int) -> Artwork:
    """Return the drawing with one more unplated hole."""
    hole = Hole(x=round(x), y=round(y), diameter=diameter, plated=False, net=None, origin=Origin("board"))
    return replace(artwork, holes=(*artwork.holes, hole))


def double_via(artwork: Artwork, rng: random.Random) -> Seeded:
    """A via drilled a second time, a third of its drill aside."""
    via = artwork.vias[pick_via(artwork, rng, "")]
    twin = replace(via, x=via.x + via.drill // 3)
    middle = (via.x + via.drill / 6.0, via.y)
    return Seeded(replace(artwork, vias=(*artwork.vias, twin)), ("holes.min_web",), middle)


def near_vias(artwork: Artwork, rng: random.Random) -> Seeded:
    """A second via a micrometre nearer than the least pitch."""
    via = artwork.vias[pick_via(artwork, rng, "")]
    away, turn = limit(artwork, "vias.min_pitch") - UM, rng.uniform(0.0, 2.0 * math.pi)
    twin = replace(via, x=round(via.x + away * math.cos(turn)), y=round(via.y + away * math.sin(turn)))
    middle = ((via.x + twin.x) / 2.0, (via.y + twin.y) / 2.0)
    return Seeded(replace(artwork, vias=(*artwork.vias, twin)), ("vias.min_pitch",), middle)


def hole_at_a_via(artwork: Artwork, rng: random.Random) -> Seeded:
    """A hole drilled so near a via that the web between them is a micrometre too narrow."""
    via, size = artwork.vias[pick_via(artwork, rng, "")], drill(artwork, 300 * UM)
    web, turn = limit(artwork, "holes.min_web") - UM, rng.uniform(0.0, 2.0 * math.pi)
    along = (math.cos(turn), math.sin(turn))
    x, y = (c + (via.drill / 2.0 + web + size / 2.0) * d for c, d in zip((via.x, via.y), along, strict=True))
    middle = (via.x + (via.drill + web) / 2.0 * along[0], via.y + (via.drill + web) / 2.0 * along[1])
    return Seeded(bored(artwork, x, y, size), ("holes.min_web",), middle)


def hole_at_a_line(artwork: Artwork, rng: random.Random) -> Seeded:
    """An unplated hole drilled a micrometre too near a line."""
    place, size = straight(artwork, rng), drill(artwork, 1_000 * UM)
    near = limit(artwork, "holes.min_copper_distance") - UM
    x, y = place.at(0.0, place.width / 2.0 + near + size / 2.0)
    middle = place.at(0.0, (place.width + near) / 2.0)
    return Seeded(bored(artwork, x, y, size), ("holes.min_copper_distance",), middle)


def hole_in_a_line(artwork: Artwork, rng: random.Random) -> Seeded:
    """An unplated hole drilled into a line's edge."""
    place, size = straight(artwork, rng), drill(artwork, 300 * UM)
    at = place.at(0.0, place.width / 2.0)
    return Seeded(bored(artwork, *at, size), ("holes.min_copper_distance",), at, size)


def edge_hole(artwork: Artwork, rng: random.Random) -> Seeded:
    """A hole a micrometre too near the profile."""
    size, near = drill(artwork, 1_000 * UM), limit(artwork, "holes.min_edge_distance") - UM
    x = rng.uniform(0.3, 0.7) * artwork.placement.width
    y, middle = near + size / 2.0, near / 2.0
    if rng.random() < 0.5:
        y, middle = artwork.placement.height - y, artwork.placement.height - middle
    return Seeded(bored(artwork, x, y, size), ("holes.min_edge_distance",), (x, middle))


def stray_via(artwork: Artwork, rng: random.Random) -> Seeded:
    """A via moved into a line."""
    place, n = straight(artwork, rng), pick_via(artwork, rng, "fence")
    moved = replace(artwork.vias[n], x=round(place.middle[0]), y=round(place.middle[1]))
    return Seeded(with_via(artwork, n, moved), ("connectivity.short",), place.middle, place.width)


def shifted_ring(artwork: Artwork, rng: random.Random) -> Seeded:
    """A barrel pushed to the pour's edge until its ring is a micrometre too narrow."""
    rim = pour_of(artwork).boundary
    for _ in tries():
        n = pick_via(artwork, rng, "fence")
        via = artwork.vias[n]
        edge = shapely.shortest_line(shapely.Point(via.x, via.y), rim).coords[1]
        away = via.drill / 2.0 + limit(artwork, "holes.min_annular_ring") - UM + undercut(artwork)
        share = away / math.dist((via.x, via.y), edge)
        if share < 1.0:
            break
    x, y = (round(e + share * (c - e)) for c, e in zip((via.x, via.y), edge, strict=True))
    middle = ((x + edge[0]) / 2.0, (y + edge[1]) / 2.0)
    return Seeded(
        with_via(artwork, n, replace(via, x=x, y=y)), ("holes.min_annular_ring",), middle, via.land / 2.0
    )


def ringless_via(artwork: Artwork, rng: random.Random) -> Seeded:
    """Copper of the pour about a via cut away: its ring is gone."""
    n = pick_via(artwork, rng, rng.choice(("pour", "fence")))
    via = artwork.vias[n]
    area = shapely.Point(via.x, via.y).buffer(via.land / 2.0 + 50 * UM)
    seeded = with_cut(artwork, area, ("pour", "land", "line", "ground", "strip"))
    return Seeded(seeded, ("holes.min_annular_ring",), (via.x, via.y), via.land)


def wrong_drill(artwork: Artwork, rng: random.Random) -> Seeded:
    """A via of a drill that the board house does not have, a micrometre off the one it has."""
    n = pick_via(artwork, rng, "")
    via = replace(artwork.vias[n], drill=artwork.vias[n].drill + 1_000)
    return Seeded(with_via(artwork, n, via), ("holes.drills",), (via.x, via.y), UM)


def small_drill(artwork: Artwork, rng: random.Random) -> Seeded:
    """A via drilled a micrometre smaller than can be drilled."""
    n = pick_via(artwork, rng, "")
    via = replace(artwork.vias[n], drill=round(limit(artwork, "holes.min_diameter") - UM))
    return Seeded(with_via(artwork, n, via), ("holes.min_diameter",), (via.x, via.y), UM)


def deep_hole(artwork: Artwork, rng: random.Random) -> Seeded:
    """A via a micrometre too narrow for the board's thickness."""
    substrate = artwork.placement.sized.circuit.file.substrate
    depth = (substrate.height + 2.0 * substrate.copper_thickness) * 1e9
    n = pick_via(artwork, rng, "")
    via = replace(artwork.vias[n], drill=int(depth / float(given(artwork, "holes.max_aspect_ratio")) - UM))
    return Seeded(with_via(artwork, n, via), ("holes.max_aspect_ratio",), (via.x, via.y), UM)


def small_land(artwork: Artwork, rng: random.Random) -> Seeded:
    """A via listed with a land a micrometre smaller than the rule file's."""
    n = pick_via(artwork, rng, "")
    via = replace(artwork.vias[n], land=artwork.vias[n].land - 1_002)
    return Seeded(with_via(artwork, n, via), ("vias.diameter",), (via.x, via.y), UM)


def pitch(artwork: Artwork) -> float:
    """Return the pitch [nm] that a fence must keep.

    Raises:
        LookupError: the rule file asks for none.
    """
    rules, file = artwork.placement.sized.circuit.rules.fence, artwork.placement.sized.circuit.file
    wave = C0 / (file.design.band[1] * math.sqrt(file.substrate.relative_permittivity))
    asked = [value for value in (rules.max_pitch, (rules.max_pitch_wavelengths or math.inf) * wave) if value]
    if not asked or not math.isfinite(min(asked)):
        raise LookupError("no pitch of fences in the rule file")
    return max(min(asked), artwork.placement.sized.circuit.rules.vias.min_pitch or 0.0) * 1e9


def lost_fence(artwork: Artwork, rng: random.Random) -> Seeded:
    """The vias behind a place of a straight pour edge beside a line left out, over more than a pitch."""
    rim, step = pour_of(artwork).boundary, pitch(artwork)
    for _ in tries():
        place, gap = beside_pour(artwork, rng)
        reach = place.width / 2.0 + gap
        corridor = place.box(-1.1 * step, 1.1 * step, reach - 20 * UM, reach + 20 * UM)
        edge = place.at(0.0, reach)
        near = [via for via in artwork.vias if math.dist((via.x, via.y), edge) < 0.8 * step]
        loose = all(via.purpose in ("fence", "pour") for via in near)
        if near and loose and rim.intersection(corridor).length > 2.19 * step:
            break
    vias = tuple(via for via in artwork.vias if via not in near)
    return Seeded(
        replace(artwork, vias=vias), ("fence.max_pitch", "fence.max_pitch_wavelengths"), edge, 1.1 * step
    )


def far_fence(artwork: Artwork, rng: random.Random) -> Seeded:
    """A fence via moved two micrometres too far behind the pour's edge."""
    rim, pour = pour_of(artwork).boundary, pour_of(artwork)
    most = limit(artwork, "fence.max_edge_distance") + 2 * UM + undercut(artwork)
    for _ in tries():
        n = pick_via(artwork, rng, "fence")
        via = artwork.vias[n]
        edge = shapely.shortest_line(shapely.Point(via.x, via.y), rim).coords[1]
        share = most / math.dist((via.x, via.y), edge)
        x, y = (round(e + share * (c - e)) for c, e in zip((via.x, via.y), edge, strict=True))
        if shapely.Point(x, y).within(pour) and rim.distance(shapely.Point(x, y)) > most - 10.0:
            break
    middle = ((x + edge[0]) / 2.0, (y + edge[1]) / 2.0)
    seeded = with_via(artwork, n, replace(via, x=x, y=y))
    return Seeded(seeded, ("fence.max_edge_distance",), middle)


HOLES: tuple[Fault, ...] = (
    double_via,
    near_vias,
    hole_at_a_via,
    hole_at_a_line,
    hole_in_a_line,
    edge_hole,
    stray_via,
    shifted_ring,
    ringless_via,
    wrong_drill,
    small_drill,
    deep_hole,
    small_land,
    lost_fence,
    far_fence,
)
"""Faults that any board with a pour and a fence can have."""
