"""All geometric rules on 1e5 shapes and 1e5 holes against the bare library queries that they need.

Run: python benchmarks/bench_checks.py [SHAPES]. The bare queries are what nobody can do without: trees over
shapes, edges, holes; pairs within the limits; their distances. Both run in this process, one after the other,
in one thread; times are the processor's, so that other work on the machine does not count.
"""

from __future__ import annotations

import math
import resource
import sys
import time
from collections.abc import Callable

import numpy as np
import shapely

from layoutgen.checks import check_board
from layoutgen.checks.board import Board, Drill, Layer, Piece
from layoutgen.checks.limits import Limits
from layoutgen.reading import rules_from_data

LIMIT, EXPONENT, GIBIBYTES = 3.0, 1.2, 2.0
MM = 1e6
RULES = {
    "format": 1,
    "name": "benchmark",
    "copper": {
        "min_width": "0.125 mm",
        "min_gap": "0.125 mm",
        "min_edge_distance": "0.3 mm",
        "min_corner_angle": "85 deg",
        "min_island_area": "0.1 mm^2",
    },
    "holes": {
        "drills": ["0.3 mm"],
        "min_diameter": "0.25 mm",
        "min_annular_ring": "0.125 mm",
        "min_web": "0.25 mm",
        "min_copper_distance": "0.2 mm",
        "min_edge_distance": "0.5 mm",
    },
    "vias": {"diameter": "0.6 mm", "drill": "0.3 mm", "min_pitch": "0.8 mm"},
}


def board_with(count: int) -> Board:
    """Return a board of so many eight-cornered pieces of copper, one plated hole in each."""
    rng = np.random.default_rng(1)
    side = math.ceil(math.sqrt(count))
    x, y = (axis.ravel()[:count] * 1.6 * MM + MM for axis in np.meshgrid(np.arange(side), np.arange(side)))
    half = rng.uniform(0.55, 0.72, count) * MM
    cut = 0.3 * half
    corners = np.stack(
        [
            np.stack((x + sx * (half - cx * cut), y + sy * (half - cy * cut)), axis=1)
            for sx, sy, cx, cy in (
                (-1, -1, 1, 0), (1, -1, 1, 0), (1, -1, 0, 1), (1, 1, 0, 1),
                (1, 1, 1, 0), (-1, 1, 1, 0), (-1, 1, 0, 1), (-1, -1, 0, 1),
            )
        ],
        axis=1,
    )  # fmt: skip
    polygons = shapely.polygons(np.rint(corners))
    pieces = tuple(Piece(p, f"copper:{k}", f"net:{k}", f"net:{k}") for k, p in enumerate(polygons))
    drills = tuple(
        Drill(f"via:{k}", a, b, 0.3 * MM, True, f"net:{k}", f"net:{k}", 0.6 * MM)
        for k, (a, b) in enumerate(zip(np.rint(x).tolist(), np.rint(y).tolist(), strict=True))
    )
    size = side * 1.6 * MM + 2.0 * MM
    return Board(
        limits=Limits(rules_from_data(RULES)),
        top=Layer("copper_top", pieces),
        bottom=Layer("copper_bottom", ()),
        drills=drills,
        outline=shapely.box(-MM, -MM, size, size),
    )


def bare(board: Board) -> None:
    """Ask the library alone what the rules must ask it: each tree once, each query once."""
    polygons = np.array([piece.polygon for piece in board.top.pieces], dtype=object)
    tree = shapely.STRtree(polygons)
    tree.query(polygons, predicate="intersects")  # which pieces are one
    i, j = tree.query(polygons, predicate="dwithin", distance=0.125 * MM)  # gaps
    shapely.distance(polygons[i], polygons[j])
    rings = shapely.get_rings(polygons)
    points, ring = shapely.get_coordinates(rings, return_index=True)
    same = ring[1:] == ring[:-1]
    start, end = points[:-1][same], points[1:][same]
    edges = shapely.linestrings(np.stack((start, end), axis=1))
    edge_tree = shapely.STRtree(edges)
    for reach in (0.125 * MM, 0.125 * MM):  # widths, then slits; the distances of edges are left to numpy
        low, high = np.minimum(start, end) - reach, np.maximum(start, end) + reach
        edge_tree.query(shapely.box(low[:, 0], low[:, 1], high[:, 0], high[:, 1]))
    assert board.outline is not None
    rim = board.outline.boundary
    shapely.prepare(rim)
    shapely.dwithin(polygons, rim, 0.3 * MM)
    holes = shapely.points([(drill.x, drill.y) for drill in board.drills])
    shapely.dwithin(holes, rim, 0.65 * MM)
    hole_tree = shapely.STRtree(holes)
    for reach in (0.55 * MM, 0.8 * MM):  # webs, pitch
        i, j = hole_tree.query(holes, predicate="dwithin", distance=reach)
        shapely.distance(holes[i], holes[j])
    i, j = tree.query(holes, predicate="dwithin", distance=0.35 * MM)  # copper of other nets
    shapely.distance(holes[i], polygons[j])
    i, j = tree.query(holes, predicate="dwithin", distance=0.15 * MM)  # copper of their own
    shapely.distance(holes[i], shapely.boundary(polygons[j]))


def seconds(work: Callable[[Board], object], board: Board) -> float:
    """Return the processor's time for some work."""
    begin = time.process_time()
    work(board)
    return time.process_time() - begin


def main() -> int:
    """Print both times, their ratio, the growth from a quarter of the shapes, and the peak memory."""
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 100_000
    check_board(board_with(100))
    quarter = seconds(check_board, board_with(count // 4))
    library = seconds(bare, board_with(count))
    board = board_with(count)
    whole = seconds(check_board, board)
    ratio, growth = whole / library, math.log(whole / quarter) / math.log(4.0)
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024**2
    rows = (
        (f"rules on {count} shapes and holes", f"{whole:.2f} s", True),
        ("bare library queries", f"{library:.2f} s", True),
        ("ratio", f"{ratio:.2f}, limit {LIMIT}", ratio <= LIMIT),
        ("growth exponent", f"{growth:.2f}, limit {EXPONENT}", growth <= EXPONENT),
        ("peak memory", f"{peak:.2f} GiB, limit {GIBIBYTES}", peak <= GIBIBYTES),
    )
    for name, text, kept in rows:
        print(f"{name:<40} {text:<24} {'' if kept else 'MISSED'}")
    return 0 if all(kept for _, _, kept in rows) else 1


if __name__ == "__main__":
    sys.exit(main())
