"""Verdicts on artwork of other origin: each rule that copper alone can answer passes, fails and stands at its
limit, in a format with true arcs and in one with chords."""

from __future__ import annotations

import itertools
from pathlib import Path
from typing import Any

import ezdxf
import gdstk
import numpy as np
import pytest

from layoutgen.artwork import LAYERS
from layoutgen.checks import CheckResult
from layoutgen.foreign import check_foreign, read_artwork
from layoutgen.foreign.curves import fitted_circle
from layoutgen.reading import rules_from_data

RULES: dict[str, Any] = {
    "format": 1,
    "name": "limits",
    "copper": {
        "min_width": "0.125 mm",
        "min_gap": "0.125 mm",
        "min_edge_distance": "0.3 mm",
        "min_corner_angle": "85 deg",
        "min_island_area": "0.5 mm^2",
    },
    "holes": {
        "drills": ["0.3 mm", "1 mm"],
        "min_diameter": "0.3 mm",
        "min_annular_ring": "0.15 mm",
        "min_web": "0.25 mm",
        "min_copper_distance": "0.2 mm",
        "min_edge_distance": "0.5 mm",
    },
    "vias": {"diameter": "0.6 mm", "drill": "0.3 mm", "min_pitch": "0.8 mm"},
    "mask": {"min_web": "0.1 mm"},
    "legend": {"min_line": "0.12 mm", "min_distance": "0.15 mm"},
}
Box = tuple[str, float, float, float, float]
Disc = tuple[str, float, float, float]
BOARD: Box = ("profile", 0.0, 0.0, 30.0, 20.0)
PAD: Box = ("copper_top", 4.0, 4.0, 8.0, 8.0)


def judged(path: Path, *things: Box | Disc | tuple[str, list[tuple[float, float]]]) -> CheckResult:
    """Write boxes, discs (layer, x, y, diameter) and polygons [mm] on a board, and judge the file."""
    write = _dxf if path.suffix == ".dxf" else _gds
    write(path, [BOARD, *things])
    return check_foreign(read_artwork(path), rules_from_data(RULES))


def _corners(thing: Any) -> list[tuple[float, float]]:
    if len(thing) == 2:
        return list(thing[1])
    _, x0, y0, x1, y1 = thing
    return [(x0, y0), (x1, y0), (x1, y1), (x0, y1)]


def _gds(path: Path, things: list[Any]) -> None:
    library = gdstk.Library(unit=1e-3, precision=1e-9)
    cell = library.new_cell("board")
    for thing in things:
        layer, kind = LAYERS[thing[0]]
        if len(thing) == 4:
            cell.add(gdstk.ellipse(thing[1:3], thing[3] / 2.0, tolerance=0.0009, layer=layer, datatype=kind))
        else:
            cell.add(gdstk.Polygon(_corners(thing), layer=layer, datatype=kind))
    library.write_gds(str(path))


def _dxf(path: Path, things: list[Any]) -> None:
    doc = ezdxf.new("R2010")
    doc.header["$INSUNITS"] = 4
    space = doc.modelspace()
    for thing in things:
        if len(thing) == 4:
            space.add_circle(thing[1:3], thing[3] / 2.0, dxfattribs={"layer": thing[0]})
        else:
            space.add_lwpolyline(_corners(thing), close=True, dxfattribs={"layer": thing[0]})
    doc.saveas(path)


def errors(result: CheckResult) -> list[str]:
    """Return the rules of what is no note."""
    return [finding.rule for finding in result.findings if finding.severity != "note"]


NOTCH = [(4.0, 4.0), (8.0, 4.0), (8.0, 8.0), (4.0, 8.0), (4.0, 6.5), (5.0, 6.0), (4.0, 5.5)]
CASES: dict[str, tuple[list[Any], list[Any]]] = {
    "copper.min_gap": (
        [("copper_top", 8.125, 4.0, 10.0, 8.0)],
        [("copper_top", 8.1249, 4.0, 10.0, 8.0)],
    ),
    "copper.min_width": (
        [("copper_top", 10.0, 4.0, 10.125, 10.0)],
        [("copper_top", 10.0, 4.0, 10.1249, 10.0)],
    ),
    "copper.min_edge_distance": (
        [("copper_top", 0.3, 10.0, 2.0, 12.0)],
        [("copper_top", 0.2999, 10.0, 2.0, 12.0)],
    ),
    "copper.min_island_area": (
        [("copper_top", 10.0, 4.0, 11.0, 4.5)],
        [("copper_top", 10.0, 4.0, 11.0, 4.4999)],
    ),
    "copper.min_corner_angle": (
        [("copper_top", [(14, 4), (18, 4), (18, 8), (14, 8), (14, 7), (15, 7), (15, 6), (14, 6)])],
        [("copper_top", [(x + 10.0, y) for x, y in NOTCH])],
    ),
    "holes.drills": ([("drill_plated", 6, 6, 1.0)], [("drill_plated", 6, 6, 1.01)]),
    "holes.min_edge_distance": (
        [("drill_nonplated", 15, 1.0, 1.0)],
        [("drill_nonplated", 15, 0.999, 1.0)],
    ),
    "holes.min_web": (
        [("drill_plated", 6, 6, 1.0), ("drill_plated", 7.25, 6, 1.0)],
        [("drill_plated", 6, 6, 1.0), ("drill_plated", 7.2499, 6, 1.0)],
    ),
    "holes.min_annular_ring": (
        [("drill_plated", 7.35, 6, 1.0)],
        [("drill_plated", 7.3502, 6, 1.0)],
    ),
    "holes.min_copper_distance": (
        [("drill_nonplated", 8.7, 6, 1.0)],
        [("drill_nonplated", 8.6998, 6, 1.0)],
    ),
    "mask.min_web": (
        [("soldermask_top", 15, 4, 16, 5), ("soldermask_top", 16.1, 4, 17, 5)],
        [("soldermask_top", 15, 4, 16, 5), ("soldermask_top", 16.0999, 4, 17, 5)],
    ),
    "legend.min_line": (
        [("legend_top", 15, 4, 15.12, 6)],
        [("legend_top", 15, 4, 15.1199, 6)],
    ),
    "legend.min_distance": (
        [("soldermask_top", 15, 4, 16, 5), ("legend_top", 16.15, 4, 17, 5)],
        [("soldermask_top", 15, 4, 16, 5), ("legend_top", 16.1499, 4, 17, 5)],
    ),
}


@pytest.mark.parametrize("suffix", [".dxf", ".gds"])
@pytest.mark.parametrize("rule", CASES)
def test_at_the_limit_and_just_beyond(rule: str, suffix: str, tmp_path: Path) -> None:
    """Catches a rule that passes what lies 0.1 um beyond its limit, or that finds what lies at it."""
    passing, failing = CASES[rule]
    assert errors(judged(tmp_path / f"pass{suffix}", PAD, *passing)) == []
    assert set(errors(judged(tmp_path / f"fail{suffix}", PAD, *failing))) == {rule}


@pytest.mark.parametrize(("short", "severity"), [(0.0009, "note"), (0.003, "error")])
def test_chords_of_curves_are_weighed_in_formats_without_curves(
    short: float, severity: str, tmp_path: Path
) -> None:
    """Catches two round pads at the least gap found for their chords, and a gap too narrow by more passed."""
    apart = 3.0 + 0.125 - short
    discs = [("copper_top", 12, 10, 3.0), ("copper_top", 12 + apart, 10, 3.0)]
    found = [f for f in judged(tmp_path / "a.gds", *discs).findings if f.rule == "copper.min_gap"]
    assert [f.severity for f in found] == [severity]


def test_straight_edges_beside_round_ones_are_exact(tmp_path: Path) -> None:
    """Catches a shortfall between straight edges forgiven because something round is drawn elsewhere."""
    result = judged(
        tmp_path / "a.gds",
        PAD,
        ("copper_top", 8.1245, 4, 10, 8),
        ("copper_top", 15, 12, 3),
        ("drill_plated", 6, 6, 1),
    )
    assert errors(result) == ["copper.min_gap"]


@pytest.mark.parametrize("code", [2, 5, 6, 8, 9, 12, 13, 14])
def test_units_that_a_drawing_may_state(code: int, tmp_path: Path) -> None:
    """Catches a stated unit taken for none, or for another length."""
    metres = {2: 0.3048, 5: 1e-2, 6: 1.0, 8: 25.4e-9, 9: 25.4e-6, 12: 1e-9, 13: 1e-6, 14: 0.1}[code]
    doc = ezdxf.new("R2010")
    doc.header["$INSUNITS"] = code
    side = 0.01 / metres
    corners = [(0, 0), (side, 0), (side, side), (0, side)]
    doc.modelspace().add_lwpolyline(corners, close=True, dxfattribs={"layer": "copper_top"})
    doc.saveas(tmp_path / "a.dxf")
    (copper,) = read_artwork(tmp_path / "a.dxf").layers["copper_top"]
    assert np.asarray(copper.bounds) == pytest.approx((0, 0, 1e7, 1e7), abs=1.0)


@pytest.mark.parametrize("corners", [16, 24, 37])
def test_a_drill_read_from_chords_is_the_stocked_one(corners: int, tmp_path: Path) -> None:
    """Catches "1.0000 mm has no drill, the nearest is 1.0000 mm" on vertices rounded to nanometres."""
    things: list[Any] = [PAD]
    for k, size in enumerate((1.0, 1.002)):
        turn = 2.0 * np.pi * (np.arange(corners) + 0.3) / corners
        x, y = 6.0 + 0.0000003 + 7.0 * k + 0.5 * size * np.cos(turn), 6.0 + 0.5 * size * np.sin(turn)
        things.append(("drill_plated", list(zip(x.tolist(), y.tolist(), strict=True))))
    found = [f for f in judged(tmp_path / "a.gds", *things).findings if f.rule == "holes.drills"]
    assert [f.measured for f in found] == [1.002]


@pytest.mark.parametrize("grid", [1, 10, 1_000])
def test_diameters_of_chords_are_as_good_as_their_grid(grid: int) -> None:
    """Catches a mean of rounded vertices taken for the diameter, or one rounder than the grid allows."""
    for size, corners in itertools.product((200_000, 250_000, 999_400, 1_270_000, 3_200_000), (8, 24, 36)):
        turn = 2.0 * np.pi * np.arange(corners) / corners
        points = size / 2.0 * np.column_stack((np.cos(turn), np.sin(turn))) + (12_345_678, -7_654_321)
        rounded = grid * np.rint(points / grid)
        fitted = fitted_circle(rounded, 1_000.0)
        assert fitted is not None
        assert abs(fitted[2] - size) <= (1.5 * grid if size == 999_400 and grid > 100 else 1e-6), (
            size,
            corners,
        )
