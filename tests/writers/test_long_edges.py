"""Edges below a micrometre: merged, in both DXF files, without moving area; judged by ezdxf and GDAL."""

from __future__ import annotations

import io
import itertools
import math
import random
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
import shapely
from ezdxf import recover

from layoutgen.artwork import Shape
from layoutgen.geometry import Ring
from layoutgen.origin import Origin
from layoutgen.writers import Job, Result
from layoutgen.writers.dxf import write_dxf
from layoutgen.writers.dxf_r12 import write_dxf_r12
from layoutgen.writers.long_edges import SHORTEST_NM, long_edges
from layoutgen.writers.outlines import doubled_area
from layoutgen.writers.proof import prove

STEP = ((0, 0), (30_000_000, 0), (30_000_000, 4_000_000), (12_000_000, 4_000_000), (12_000_000, 4_000_700),
        (0, 4_000_700))  # fmt: skip
"""A step of 0.7 um in a straight edge of 30 mm: losing one end of it would move 0.0042 mm^2 or more."""
CHAMFER = ((0, 0), (20_000_000, 0), (20_000_000, 9_999_500), (19_999_600, 10_000_000), (0, 10_000_000))
REPEATED = ((0, 0), (0, 0), (5_000_000, 0), (5_000_000, 0), (5_000_000, 5_000_000), (0, 5_000_001))
SAW = tuple(
    (round((8e6 + shift) * math.cos(k / 50)), round((8e6 + shift) * math.sin(k / 50)))
    for k in range(314)
    for shift in (0, 700)
)
"""Steps of 0.7 um to the same side, every 160 um: areas too small to notice add up."""
TINY_ARC = Ring(
    ((0, 0), (9_000_000, 0), (9_000_300, 300), (9_000_300, 6_000_000), (0, 6_000_000)),
    (0.0, math.tan(math.pi / 8), 0.0, 0.0, 0.0),
)
BESIDE_ARC = Ring(
    ((0, 0), (9_000_000, 0), (9_000_000, 600), (7_000_000, 2_000_600), (0, 2_000_600)),
    (0.0, 0.0, math.tan(math.pi / 8), 0.0, 0.0),
)
RINGS = {
    "step": Ring(STEP),
    "chamfer": Ring(CHAMFER),
    "repeated": Ring(REPEATED),
    "saw": Ring(SAW),
    "tiny arc": TINY_ARC,
    "beside an arc": BESIDE_ARC,
}
LIMIT_MM2 = 1e-4


def corners_of(ring: Ring) -> Ring:
    """Return what is left of an outline, as an outline."""
    corners = long_edges(ring)
    bulges = tuple(bulge for _, bulge in corners)
    return Ring(tuple(point for point, _ in corners), bulges if any(bulges) else ())


def shortest(points: Any) -> float:
    return min(math.dist(a, b) for a, b in itertools.pairwise([*points, points[0]]))


@pytest.mark.parametrize("name", RINGS)
def test_no_short_edge_is_left_and_the_area_stays(name: str) -> None:
    """Leaving out vertices as they come would move a long neighbour, and with it a hundredth of a mm^2."""
    ring, left = RINGS[name], corners_of(RINGS[name])
    assert shortest(ring.points) < SHORTEST_NM <= shortest(left.points)
    assert abs(doubled_area(ring) - doubled_area(left)) / 2e12 < LIMIT_MM2
    assert left.polygon(5).is_valid


def test_random_outlines_keep_their_area() -> None:
    """Short edges anywhere, several in a row, at any angle to neighbours of 1 mm or so."""
    rng = random.Random(11)
    for _ in range(200):
        points: list[tuple[int, int]] = []
        for k in range(24):
            x, y = 4e6 * math.cos(k * math.pi / 12), 4e6 * math.sin(k * math.pi / 12)
            points.append((round(x), round(y)))
            for _ in range(rng.choice((0, 0, 1, 3))):
                last = points[-1]
                points.append((last[0] + rng.randint(-450, 450), last[1] + rng.randint(-450, 450)))
        ring = Ring(tuple(points))
        left = corners_of(ring)
        assert shortest(left.points) >= SHORTEST_NM
        assert left.polygon().exterior.hausdorff_distance(ring.polygon().exterior) < 2 * SHORTEST_NM
        assert abs(doubled_area(ring) - doubled_area(left)) / 2e12 < LIMIT_MM2


def test_outlines_without_short_edges_stay_as_they_are() -> None:
    """A clean outline must come out vertex by vertex, bulges on their edges."""
    ring = Ring(((0, 0), (1000, 0), (1000, 1000), (0, 1000)), (0.0, 0.4, 0.0, -0.2))
    assert long_edges(ring) == list(zip(ring.points, ring.bulges, strict=True))


@pytest.mark.parametrize(
    "ring", [Ring(((0, 0), (400, 0), (0, 400))), Ring.circle(0, 0, 300), Ring(((0, 0), (500, 0)), (0.0, 1.0))]
)
def test_an_outline_smaller_than_a_micrometre_is_still_one(ring: Ring) -> None:
    """Merged to a point or a line, the entity would be no legal polyline."""
    assert len(long_edges(ring)) >= len(ring.points)


@pytest.fixture(scope="module")
def rough(handmade: Result) -> Result:
    """The board with all outlines that have short edges, as copper and as a hole."""
    shapes = [
        Shape(layer="copper_top", outline=ring, net="gnd", role="pour", origin=Origin(name))
        for name, ring in RINGS.items()
    ]
    holes = (Ring(tuple((x + 1_000_000, y + 1_000_000) for x, y in STEP[::-1])),)
    board = Ring.box(0, 0, 40_000_000, 30_000_000)
    shapes.append(
        Shape(
            layer="copper_bottom", outline=board, holes=holes, net="gnd", role="plane", origin=Origin("plane")
        )
    )
    artwork = replace(handmade.artwork, shapes=tuple(shapes), vias=(), holes=())
    return replace(handmade, artwork=artwork)


def corners_in(line: Any) -> list[tuple[float, ...]]:
    """Return x, y and bulge of a polyline's vertices, new or old."""
    if line.dxftype() == "LWPOLYLINE":
        return [tuple(point) for point in line.get_points("xyb")]
    return [(v.dxf.location.x, v.dxf.location.y, v.dxf.bulge) for v in line.vertices]


@pytest.mark.parametrize("write", [write_dxf, write_dxf_r12])
def test_ezdxf_and_gdal_find_the_model(
    rough: Result, write: Callable[[Result, Job], bytes], tmp_path: Path
) -> None:
    """Every polygon closed, its area within 1e-4 mm^2, nothing to mend, no edge below 1 um."""
    pyogrio = pytest.importorskip("pyogrio")
    data = write(rough, Job(stem="board"))
    document, auditor = recover.read(io.BytesIO(data))
    assert (auditor.errors, auditor.fixes) == ([], [])
    wanted = sorted(
        abs(doubled_area(ring)) / 2e12
        for s in rough.artwork.shapes
        for ring in (Ring(s.outline.chords()) if write is write_dxf_r12 else s.outline, *s.holes)
    )
    found = []
    for line in document.modelspace().query('LWPOLYLINE POLYLINE[layer ? "copper.*"]'):
        points = corners_in(line)
        assert line.is_closed if line.dxftype() == "POLYLINE" else line.closed
        assert shortest([(x, y) for x, y, _ in points]) >= SHORTEST_NM / 1e6 - 1e-9
        corners = tuple((round(x * 1e6), round(y * 1e6)) for x, y, _ in points)
        found.append(abs(doubled_area(Ring(corners, tuple(bulge for *_, bulge in points)))) / 2e12)
    assert sorted(found) == pytest.approx(wanted, abs=LIMIT_MM2)
    path = tmp_path / "board.dxf"
    path.write_bytes(data)
    pyogrio.set_gdal_config_options({"OGR_ARC_STEPSIZE": "0.1"})
    try:
        meta, _, shapes, fields = pyogrio.raw.read(path)
    finally:
        pyogrio.set_gdal_config_options({"OGR_ARC_STEPSIZE": None})
    layers = fields[list(meta["fields"]).index("Layer")]
    lines = [shapely.from_wkb(s) for s, n in zip(shapes, layers, strict=True) if str(n).startswith("copper")]
    assert all(line.is_ring or line.geom_type == "Polygon" for line in lines)
    areas = sorted(shapely.Polygon(shapely.get_coordinates(line)).area for line in lines)
    assert areas == pytest.approx(wanted, abs=LIMIT_MM2)


def test_the_proof_takes_merged_edges_and_finds_short_ones(rough: Result) -> None:
    """A step evened out is no fault of the file; an edge of 0.5 um in it is one."""
    data = write_dxf(rough, Job(stem="board"))
    assert prove(rough, {"board.dxf": data}).failures == ()
    corner = b" 10\n40.000000\n 20\n0.000000\n"
    assert data.count(corner) == 1
    sharp = data.replace(corner, corner + b" 10\n40.000000\n 20\n0.000500\n")
    failed = prove(rough, {"board.dxf": sharp}).failures
    assert any("below 1 um" in check.what for check in failed)
