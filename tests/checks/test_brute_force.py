"""The fast searches against all pairs, on random boards, in both directions."""

from __future__ import annotations

import functools
import itertools
import math
import random

import numpy as np
import pytest
import shapely

from layoutgen.checks import Finding, check
from layoutgen.checks.board import Board
from layoutgen.checks.drawn import board_of
from layoutgen.checks.drills import near_drills
from layoutgen.checks.facing import edges_of, facing
from layoutgen.checks.near import near_nets
from tests.checks.boards import Sheet, box, polygon
from tests.seeded_faults.harness import TESTED, drawn

SEEDS = range(200)
NETS = ("a", "b", "v")
ELEMENTS = {"a": "la", "b": "lb", "v": "lv"}


def random_sheet(seed: int) -> Sheet:
    """Return a sheet with twenty boxes and triangles and ten holes, some of them too near each other."""
    rng = random.Random(seed)
    limits = {
        "copper": {"min_gap": "0.4 mm", "min_edge_distance": "0.5 mm"},
        "holes": {"min_web": "0.5 mm", "min_copper_distance": "0.3 mm", "min_edge_distance": "0.5 mm"},
    }
    sheet = Sheet(limits)
    for k in range(20):
        net = NETS[k % 3]
        x, y = rng.uniform(1.5, 26), rng.uniform(1.5, 16)
        w, h = rng.uniform(0.3, 3.5), rng.uniform(0.3, 3.5)
        outline = (
            box(x, y, x + w, y + h) if k % 2 else polygon((x, y), (x + w, y + h / 3), (x + w / 3, y + h))
        )
        sheet.copper(outline, net, "strip", f"{ELEMENTS[net]}-{k}")
    for _ in range(6):
        sheet.hole(rng.uniform(0.8, 29), rng.uniform(0.8, 19), 1.0)
    for _ in range(4):
        sheet.via(rng.uniform(1, 29), rng.uniform(1, 19), draw=False)
    return sheet


@functools.cache
def judged(seed: int) -> tuple[Board, tuple[Finding, ...]]:
    """Return a random board and its findings, notes left out."""
    artwork = random_sheet(seed).artwork()
    return board_of(artwork), tuple(f for f in check(artwork).findings if f.severity != "note")


def found(seed: int, rule: str) -> list[Finding]:
    """Return the findings of one rule on a random board."""
    return [finding for finding in judged(seed)[1] if finding.rule == rule]


def pairs(findings: list[Finding]) -> dict[frozenset[str], float]:
    """Return the measured values by pair of items; slits within one piece or one net left out."""
    return {
        frozenset(f.items): f.measured
        for f in findings
        if f.measured is not None and not f.text.startswith("slit")
    }


@pytest.mark.parametrize("seed", SEEDS)
def test_gaps(seed: int) -> None:
    """Catches a pair of nets the tree search misses or invents, and a distance that is not the least."""
    board, _ = judged(seed)
    expected: dict[frozenset[str], float] = {}
    for p, q in itertools.combinations(board.top.pieces, 2):
        gap = p.polygon.distance(q.polygon) / 1e6
        if p.node != q.node and 0.0 < gap < 0.4 - 1e-5:
            key = frozenset((p.item, q.item))
            expected[key] = min(gap, expected.get(key, 1.0))
    measured = pairs(found(seed, "copper.min_gap"))
    assert measured.keys() == expected.keys()
    assert all(measured[key] == pytest.approx(expected[key], abs=1e-6) for key in expected)


@pytest.mark.parametrize("seed", SEEDS)
def test_hole_distances(seed: int) -> None:
    """Catches a pair of holes, or of hole and copper, that the search misses or invents."""
    board, _ = judged(seed)
    webs: dict[frozenset[str], float] = {}
    for a, b in itertools.combinations(board.drills, 2):
        web = shapely.Point(a.x, a.y).distance(shapely.Point(b.x, b.y)) - (a.diameter + b.diameter) / 2
        if web < 0.5e6 - 1:
            webs[frozenset((a.item, b.item))] = web / 1e6
    assert pairs(found(seed, "holes.min_web")) == pytest.approx(webs, abs=1e-6)
    copper: dict[frozenset[str], float] = {}
    for drill, piece in itertools.product(board.drills, board.top.pieces):
        gap = (shapely.Point(drill.x, drill.y).distance(piece.polygon) - drill.diameter / 2) / 1e6
        foreign = not drill.plated or (gap > 0.0 and piece.node != drill.node)
        if foreign and gap < 0.3 - 1e-5:
            copper[frozenset((drill.item, piece.item))] = max(gap, 0.0)
    assert pairs(found(seed, "holes.min_copper_distance")) == pytest.approx(copper, abs=2e-5)


@pytest.mark.parametrize("seed", SEEDS)
def test_edge_distances(seed: int) -> None:
    """Catches copper or a hole near the profile that the search misses or invents."""
    board, _ = judged(seed)
    assert board.outline is not None
    rim = board.outline.boundary
    copper = {
        frozenset((p.item, "board")): p.polygon.distance(rim) / 1e6
        for p in board.top.pieces
        if p.polygon.distance(rim) < 0.5e6 - 10 or not board.outline.covers(p.polygon)
    }
    assert pairs(found(seed, "copper.min_edge_distance")).keys() == copper.keys()
    holes = {
        frozenset((d.item, "board")): (shapely.Point(d.x, d.y).distance(rim) - d.diameter / 2) / 1e6
        for d in board.drills
    }
    near = {key: value for key, value in holes.items() if value < 0.5 - 1e-5}
    assert pairs(found(seed, "holes.min_edge_distance")) == pytest.approx(near, abs=1e-6)


@pytest.mark.parametrize("stem", TESTED)
def test_gaps_of_the_examples(stem: str) -> None:
    """Catches a pair of nets or holes of an example that the searches miss or invent."""
    artwork = drawn(stem)
    board = board_of(artwork)
    limit, web = 1.1e6, 0.8e6
    expected: dict[tuple[int, int], float] = {}
    for i, p in enumerate(board.top.pieces):
        apart = shapely.distance(p.polygon, board.top.polygons)
        for j in np.flatnonzero((apart > 0.0) & (apart < limit - 10.0)).tolist():
            if i < j and board.top.nodes[i] != board.top.nodes[j]:
                expected[i, j] = float(apart[j])
    fast = {(pair.first, pair.second): pair.distance for pair in near_nets(board.top, limit)}
    assert fast == pytest.approx(expected, abs=1e-3)
    webs = {}
    for a, b in itertools.combinations(board.drills, 2):
        gap = math.hypot(a.x - b.x, a.y - b.y) - (a.diameter + b.diameter) / 2.0
        if gap < web:
            webs[a.item, b.item] = gap
    near = near_drills(board, web)
    found_webs = {
        (n.first.item, n.second.item): n.pitch - (n.first.diameter + n.second.diameter) / 2 for n in near
    }
    assert found_webs == pytest.approx(webs, abs=1e-3)


def blob(rng: random.Random) -> shapely.Polygon:
    """Return a random polygon of boxes and a triangle joined, with necks and slits of all widths."""
    shapes = [shapely.Polygon([(0, 0), (rng.randint(3, 9), rng.randint(0, 3)), (rng.randint(0, 4), 9)])]
    for _ in range(7):
        x, y = rng.uniform(0, 8), rng.uniform(0, 8)
        shapes.append(shapely.box(x, y, x + rng.uniform(0.2, 5), y + rng.uniform(0.2, 5)))
    union = shapely.union_all(shapes)
    return max(shapely.get_parts(union), key=lambda part: part.area)


def samples(outline: shapely.Polygon, step: float) -> list[tuple[int, float, shapely.Point, float, float]]:
    """Return points along all rings: ring, way along it, point, direction of the outline there."""
    out = []
    for number, ring in enumerate((outline.exterior, *outline.interiors)):
        count = int(ring.length / step)
        for k in range(count):
            way = (k + 0.5) * ring.length / count
            point, ahead = ring.interpolate(way), ring.interpolate(way + 1e-4)
            out.append((number, way, point, ahead.x - point.x, ahead.y - point.y))
    return out


def sampled_least(outline: shapely.Polygon, apart: float, step: float, *, inside: bool) -> float:
    """Return the least distance between samples of facing edges across copper (or void), corners left out.

    Brute force over pairs of points: the outline must run against itself there, and the connection must lie
    inside (outside) from end to end.
    """
    best = float("inf")
    lengths = [ring.length for ring in (outline.exterior, *outline.interiors)]
    points = samples(outline, step)
    spots = np.array([p for _, _, p, _, _ in points], dtype=object)
    i, j = shapely.STRtree(spots).query(spots, predicate="dwithin", distance=1.0)
    for a, b in zip(i[i < j].tolist(), j[i < j].tolist(), strict=True):
        (ra, sa, pa, ax, ay), (rb, sb, pb, bx, by) = points[a], points[b]
        way = abs(sa - sb)
        corner = ra == rb and min(way, lengths[ra] - way) < apart
        distance = pa.distance(pb)
        if corner or ax * bx + ay * by >= 0.0 or distance >= best:
            continue
        ends = [(pa.x + t * (pb.x - pa.x), pa.y + t * (pb.y - pa.y)) for t in (0.01, 0.99)]
        line = shapely.LineString(ends)
        if (inside and outline.covers(line)) or (not inside and not outline.intersects(line)):
            best = distance
    return best


@pytest.mark.parametrize("seed", range(30))
@pytest.mark.parametrize("inside", [True, False])
def test_facing_edges_against_sampled_outlines(seed: int, inside: bool) -> None:
    """Catches a neck or slit that the edge search misses, or one narrower than any the outline has.

    The samples stand every 0.02, so they see the least distance within about that, from above.
    """
    rng = random.Random(1000 + seed)
    outline = blob(rng)
    limit, step = 0.6, 0.02
    apart = 3.5 * limit
    places = facing(edges_of(np.array([outline], dtype=object)), limit, apart, across_copper=inside)
    least = float(places.distance.min()) if len(places.distance) else float("inf")
    sampled = sampled_least(outline, apart, step, inside=inside)
    if sampled < limit:
        assert least <= sampled + 1e-9
    if least < limit:
        assert sampled <= least + 2.5 * step
