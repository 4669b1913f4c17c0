"""The files of a run judged by readers alone: nothing of the package is imported here.

The command is run once on the example amplifier; its GDSII, DXF and report.json are then taken as any
receiver would take them.
"""

from __future__ import annotations

import io
import itertools
import json
import math
import subprocess
import sys
from collections import defaultdict
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import ezdxf
import gdstk
import pytest
import shapely
from shapely.geometry.base import BaseGeometry

ROOT = Path(__file__).parents[2]
COMMAND = [sys.executable, "-c", "from layoutgen.cli import main; main()"]
TOLERANCE_MM = 0.002
CURVE_BAND_MM = 0.0012
UNDERCUT_MM = {"alumina_filter": 0.002}
"""By how much artwork is drawn wider per side than the finished copper that the report states."""


@pytest.fixture(scope="module", params=sorted(path.stem for path in (ROOT / "examples").glob("*.toml")))
def folder(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The files of each example."""
    out: Path = tmp_path_factory.mktemp("files") / request.param
    circuit = ROOT / "examples" / f"{request.param}.toml"
    done = subprocess.run(
        [*COMMAND, "draw", str(circuit), "--out", str(out)], capture_output=True, text=True, check=False
    )
    assert done.returncode == 0, done.stdout + done.stderr
    return out


@pytest.fixture(scope="module")
def report(folder: Path) -> dict[str, Any]:
    loaded: dict[str, Any] = json.loads((folder / "report.json").read_bytes())
    return loaded


@pytest.fixture(scope="module")
def layers(folder: Path, report: dict[str, Any]) -> dict[str, list[shapely.Polygon]]:
    """Polygons [mm] of the GDSII file by layer name."""
    library = gdstk.read_gds(folder / f"{folder.name}.gds")
    (top,) = library.top_level()
    scale = library.unit * 1e3
    return {
        entry["name"]: [
            shapely.Polygon(p.points * scale)
            for p in top.get_polygons(layer=entry["gds"][0], datatype=entry["gds"][1])
        ]
        for entry in report["layers"]
    }


def nearest_width(copper: BaseGeometry, x: float, y: float, nx: float, ny: float, reach: float) -> float:
    """Return the copper's extent [mm] through a point along a normal."""
    probe = shapely.LineString([(x - nx * reach, y - ny * reach), (x + nx * reach, y + ny * reach)])
    parts = shapely.get_parts(shapely.intersection(probe, copper))
    return float(min(parts, key=lambda part: part.distance(shapely.Point(x, y))).length)


def samples(path: list[list[float]], width: float) -> Iterator[tuple[float, float, float, float]]:
    """Yield points and normals along the legs, further than one and a half widths from their ends."""
    for (x0, y0), (x1, y1) in itertools.pairwise(path):
        length = math.dist((x0, y0), (x1, y1))
        count = int(length / 0.1)
        for k in range(1, count):
            along = length * k / count
            if 1.5 * width < along < length - 1.5 * width:
                ux, uy = (x1 - x0) / length, (y1 - y0) / length
                yield x0 + ux * along, y0 + uy * along, -uy, ux


def conductors(report: dict[str, Any]) -> Iterator[tuple[str, list[str | None], list[list[float]], float]]:
    """Yield (name, nets at both ends, path, width) of lines, and of each strip of coupled pairs."""
    for line in report["lines"]:
        if line["width_mm"] is not None:
            yield line["name"], [*line["nets"], None][:2], line["path_mm"], line["width_mm"]
    for pair in report["coupled"]:
        nets = [None if net == "open" else net for net in pair["nets"]]
        for k, path in enumerate(pair["path_mm"]):
            yield pair["name"], nets[2 * k : 2 * k + 2], path, pair["width_mm"]


def others(report: dict[str, Any], name: str) -> BaseGeometry:
    """Return all that may widen a line's copper: other lines, strips, pads, each with a little room."""
    shapes: list[BaseGeometry] = []
    for line in report["lines"]:
        if line["name"] != name and line["width_mm"] is not None:
            shapes.append(shapely.LineString(line["path_mm"]).buffer(line["width_mm"] / 2 + 0.05))
        elif line["name"] != name:
            shapes.append(shapely.Point(line["path_mm"][0]).buffer(line["outer_radius_mm"] + 0.05))
    for pair in report["coupled"]:
        if pair["name"] != name:
            half = pair["width_mm"] / 2 + 0.05
            shapes += [shapely.LineString(path).buffer(half) for path in pair["path_mm"]]
    shapes += [
        shapely.LineString(strip["path_mm"]).buffer(strip["width_mm"] / 2 + 0.05, cap_style="square")
        for strip in report["strips"]
    ]
    for part in report["parts"]:
        shapes += [shapely.Polygon(pad["polygon_mm"]).buffer(0.05) for pad in part["pads"]]
    return shapely.union_all(shapes)


def test_every_line_is_as_wide_as_the_report_says(
    folder: Path, report: dict[str, Any], layers: dict[str, list[shapely.Polygon]]
) -> None:
    """Copper lost to a boolean, a wrong scale, a pour that touches: any changes a width somewhere."""
    copper = shapely.union_all(layers["copper_top"])
    measured = 0
    for name, _, path, width in conductors(report):
        beside = others(report, name)
        shapely.prepare(beside)
        for x, y, nx, ny in samples(path, width):
            across = shapely.LineString([(x - nx * width, y - ny * width), (x + nx * width, y + ny * width)])
            if beside.intersects(across):
                continue
            found = nearest_width(copper, x, y, nx, ny, 2 * width) - 2 * UNDERCUT_MM.get(folder.name, 0.0)
            assert abs(found - width) <= TOLERANCE_MM, (name, x, y, found, width)
            measured += 1
    assert measured > 20


class Groups:
    """Names joined into groups."""

    def __init__(self) -> None:
        self.parent: dict[object, object] = {}

    def find(self, item: object) -> object:
        self.parent.setdefault(item, item)
        while self.parent[item] != item:
            item = self.parent[item]
        return item

    def join(self, a: object, b: object) -> None:
        self.parent[self.find(a)] = self.find(b)


def net_places(report: dict[str, Any]) -> Iterator[tuple[str, str, float, float]]:
    """Yield (net, who, x, y): pads, the two ends of lines (a little inside), ports."""
    for part in report["parts"]:
        for pad in part["pads"]:
            if shapely.Polygon(pad["polygon_mm"]).area > 0:
                yield pad["net"], f"{part['name']}.{pad['pin']}", pad["x_mm"], pad["y_mm"]
    for name, nets, path, _ in conductors(report):
        for net, (x0, y0), (x1, y1) in ((nets[0], path[0], path[1]), (nets[1], path[-1], path[-2])):
            if net is not None and net != "gnd":
                inside = min(0.05, math.dist((x0, y0), (x1, y1)) / 2) / math.dist((x0, y0), (x1, y1))
                yield net, name, x0 + (x1 - x0) * inside, y0 + (y1 - y0) * inside
    for port in report["ports"]:
        turn = math.radians(port["heading_deg"])
        yield (
            port["net"],
            port["name"],
            port["x_mm"] + 0.02 * math.cos(turn),
            port["y_mm"] + 0.02 * math.sin(turn),
        )


def test_copper_connects_exactly_the_nets(
    report: dict[str, Any], layers: dict[str, list[shapely.Polygon]]
) -> None:
    """An open splits a net, a short joins two; lines join the nets at their ends, vias both sides."""
    top = shapely.get_parts(shapely.union_all(layers["copper_top"])).tolist()
    bottom = shapely.get_parts(shapely.union_all(layers["copper_bottom"])).tolist()
    pieces = [("top", k) for k in range(len(top))] + [("bottom", k) for k in range(len(bottom))]
    trees = {"top": shapely.STRtree(top), "bottom": shapely.STRtree(bottom)}
    copper = Groups()
    for drill in layers["drill_plated"]:
        touched = [
            (side, int(k)) for side, tree in trees.items() for k in tree.query(drill, predicate="intersects")
        ]
        for other in touched[1:]:
            copper.join(touched[0], other)
    wanted = Groups()
    for line in report["lines"]:
        if len(line["nets"]) == 2:
            wanted.join(line["nets"][0], line["nets"][1])
    for pair in report["coupled"]:
        a1, a2, b1, b2 = pair["nets"]
        for ends in ((a1, a2), (b1, b2)):
            if "open" not in ends:
                wanted.join(*ends)
    groups: dict[object, set[object]] = defaultdict(set)
    for net, who, x, y in net_places(report):
        hit = trees["top"].query(shapely.Point(x, y), predicate="intersects")
        assert len(hit) == 1, f"no copper under {who} of net {net}"
        groups[wanted.find(net)].add(copper.find(("top", int(hit[0]))))
    assert all(len(found) == 1 for found in groups.values()), "open"
    joined = [next(iter(found)) for found in groups.values()]
    assert len(set(joined)) == len(joined), "short"
    assert len(groups) >= 1
    signal = {group for net, found in groups.items() for group in found if net != wanted.find("gnd")}
    ground = {copper.find(piece) for piece in pieces} - signal
    assert len(ground) <= 1, "copper that hangs on nothing"


def dxf_region(document: Any, layer: str) -> tuple[BaseGeometry, list[BaseGeometry]]:
    """Return a layer's area [mm] by the winding of its outlines, and its arcs as fine chords."""
    outer, holes, curves = [], [], []
    for entity in document.modelspace().query(f'LWPOLYLINE CIRCLE[layer=="{layer}"]'):
        if entity.dxftype() == "CIRCLE":
            middle, radius = entity.dxf.center, entity.dxf.radius
            ring = shapely.Point(middle.x, middle.y).buffer(radius, quad_segs=256)
            outer.append(ring)
            curves.append(ring.exterior)
            continue
        points = [(p.x, p.y) for p in ezdxf.path.make_path(entity).flattening(1e-5)]
        ring = shapely.Polygon(points)
        (outer if shapely.is_ccw(ring.exterior) else holes).append(ring)
        curves += [ring.exterior] if entity.has_arc else []
    return winding(outer, holes), curves


def winding(outer: list[BaseGeometry], holes: list[BaseGeometry]) -> BaseGeometry:
    """Return where outlines wind round more often than holes do.

    A hole takes away the copper of the smallest outline that holds it whole, and no other.
    """
    hosts: dict[int, list[BaseGeometry]] = defaultdict(list)
    order = sorted(range(len(outer)), key=lambda k: outer[k].area)
    for hole in holes:
        hosts[
            next(k for k in order if outer[k].buffer(1e-6).contains(hole) and outer[k].area > hole.area)
        ].append(hole)
    pieces = [ring.difference(shapely.union_all(hosts[k])) for k, ring in enumerate(outer)]
    return shapely.union_all(pieces)


@pytest.mark.parametrize(
    "layer",
    ["copper_top", "copper_bottom", "soldermask_top", "soldermask_bottom", "paste_top", "legend_top",
     "profile", "drill_plated", "drill_nonplated", "findings"],
)  # fmt: skip
def test_dxf_and_gds_agree(folder: Path, layers: dict[str, list[shapely.Polygon]], layer: str) -> None:
    """Two receivers must make the same board: away from curves by geometry, along them within 1.2 um."""
    document = ezdxf.read(io.StringIO((folder / f"{folder.name}.dxf").read_text("utf-8")))
    region, curves = dxf_region(document, layer)
    other = even_odd(layers[layer]) if layer == "profile" else shapely.union_all(layers[layer])
    band = shapely.union_all([curve.buffer(CURVE_BAND_MM) for curve in curves])
    assert region.symmetric_difference(other).difference(band).area < 1e-4
    assert region.is_empty == other.is_empty
    along_curves = math.fsum(curve.length for curve in curves) * CURVE_BAND_MM
    assert abs(region.area - other.area) < 1e-4 + along_curves


def even_odd(polygons: list[shapely.Polygon]) -> BaseGeometry:
    region: BaseGeometry = shapely.Polygon()
    for polygon in polygons:
        region = region.symmetric_difference(polygon)
    return region


def test_drills_are_where_the_report_says(
    report: dict[str, Any], layers: dict[str, list[shapely.Polygon]]
) -> None:
    """Finished hole circles: axis, diameter, plated or not."""
    found = {
        (
            layer,
            round(circle.centroid.x, 4),
            round(circle.centroid.y, 4),
            round(circle.bounds[2] - circle.bounds[0], 4),
        )
        for layer in ("drill_plated", "drill_nonplated")
        for circle in layers[layer]
    }
    told = {
        ("drill_plated", round(v["x_mm"], 4), round(v["y_mm"], 4), round(v["drill_mm"], 4))
        for v in report["vias"]
    }
    for hole in report["holes"]:
        layer = "drill_plated" if hole["plated"] else "drill_nonplated"
        told.add((layer, round(hole["x_mm"], 4), round(hole["y_mm"], 4), round(hole["diameter_mm"], 4)))
    assert len(found) == len(told)
    for entry in told:
        assert any(
            entry[0] == other[0] and all(abs(a - b) < 1e-3 for a, b in zip(entry[1:], other[1:], strict=True))
            for other in found
        ), entry


def test_budgets_add_up_to_the_angle(report: dict[str, Any]) -> None:
    """The promise of every line: one entry called line, all entries together the angle within 0.01 degree."""
    for line in (*report["lines"], *report["coupled"]):
        if line["angle_deg"] is not None:
            assert math.fsum(e["angle_deg"] for e in line["budget"]) == pytest.approx(
                line["angle_deg"], abs=0.01
            )
            assert [e["cause"] for e in line["budget"]].count("line") == 1


def test_centre_lines_are_as_long_as_their_paths(report: dict[str, Any]) -> None:
    """centre_line_mm is what the budget's length stands for; path_mm is what was drawn."""
    for line in report["lines"]:
        if line["angle_deg"] is not None:
            drawn = math.fsum(math.dist(a, b) for a, b in itertools.pairwise(line["path_mm"]))
            assert drawn == pytest.approx(line["centre_line_mm"], abs=1e-5)
            assert len(line["bends"]) == len(line["path_mm"]) - 2
