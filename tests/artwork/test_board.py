"""Profile, plane, holes, labels, measured gaps."""

from __future__ import annotations

import math
from types import ModuleType

import pytest
import shapely

from layoutgen.artwork import LAYERS, draw


def test_profile_has_true_arcs_and_every_cutout(boards: ModuleType) -> None:
    """Would catch corners as chords, or a slot that nobody routes."""
    artwork = draw(boards.stage().placement())
    outline, slot = artwork.on("profile")
    assert (outline.role, slot.role) == ("profile", "cutout")
    assert sum(1 for bulge in outline.outline.bulges if bulge) == 4
    area = outline.outline.polygon(10.0).area
    assert area == pytest.approx(40e6 * 26e6 - (4.0 - math.pi) * 1e12, rel=1e-7)
    assert slot.outline.polygon().bounds == (17_800_000, 7_800_000, 22_200_000, 18_200_000)
    assert outline.outline.polygon().exterior.is_ccw


def test_sharp_boards_have_plain_corners(boards: ModuleType) -> None:
    """Would catch zero-length arcs on a board without corner radius."""
    (outline,) = draw(boards.straight().placement()).on("profile")
    assert outline.outline.points == ((0, 0), (30_000_000, 0), (30_000_000, 16_000_000), (0, 16_000_000))
    assert outline.outline.is_straight


def test_plane_covers_the_board_but_for_edge_slot_and_holes(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch a plane that is cut by the router, touches a drill, or is missing somewhere."""
    placement = boards.stage().placement()
    (plane,) = draw(placement).on("copper_bottom")
    assert (plane.role, plane.net) == ("plane", "gnd")
    area = measures.polygon(plane, tolerance=10.0)
    missing = shapely.box(0, 0, 40e6, 26e6).difference(area)
    slot = placement.parts["Q1"].cutout.polygon()
    assert slot.buffer(299_999, join_style="mitre").difference(missing).is_empty
    for hole in placement.holes:
        assert shapely.Point(hole.x, hole.y).buffer(hole.diameter / 2 + 199_990).difference(missing).is_empty
    expected = (
        39.4e6 * 25.4e6
        - (4.0 - math.pi) * 0.7e6**2
        - 5.0e6 * 11.0e6
        - 2 * math.pi * 1.55e6**2
        + 2 * _segment(1.55e6, 7.2e6 - 5.5e6)
    )
    assert area.area == pytest.approx(expected, rel=1e-4)


def _segment(radius: float, distance: float) -> float:
    """Return the area of a circle's segment beyond a chord."""
    if distance >= radius:
        return 0.0
    return radius**2 * math.acos(distance / radius) - distance * math.sqrt(radius**2 - distance**2)


def test_plane_keeps_true_arcs_where_nothing_touches(boards: ModuleType) -> None:
    """Would catch antipads as polygons where a circle would do."""
    (plane,) = draw(boards.straight().hole(4.0, 4.0, 2.7).hole(26.0, 4.0, 2.7).placement()).on(
        "copper_bottom"
    )
    assert [hole.bulges for hole in plane.holes] == [(-1.0, -1.0)] * 2
    assert not shapely.LinearRing(plane.holes[0].chords()).is_ccw


def test_plane_with_touching_clearances_is_still_right(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch overlapping holes in one polygon, which most readers take as copper."""
    placement = boards.straight().hole(4.0, 4.0, 2.7).hole(6.0, 4.0, 2.7).hole(1.5, 12.0, 2.7).placement()
    shapes = draw(placement).on("copper_bottom")
    for shape in shapes:
        assert measures.polygon(shape).is_valid
    copper = shapely.union_all([measures.polygon(s) for s in shapes])
    for hole in placement.holes:
        assert copper.distance(shapely.Point(hole.x, hole.y)) >= hole.diameter / 2 + 200_000


@pytest.mark.parametrize("undercut", [0, 20_000])
@pytest.mark.parametrize("web", [30_000, 110_000, 130_000, 150_000])
def test_plane_has_no_neck_too_narrow_beside_a_hole(
    boards: ModuleType, measures: ModuleType, web: int, undercut: int
) -> None:
    """Would catch a sliver of plane between a legal hole and the board's edge, or between two holes."""
    board = boards.straight()
    board.rules = {"copper": {"undercut": f"{undercut} nm"}}
    at_edge, apart = (300_000 + web + 1_550_000) / 1e6, (3_100_000 + web) / 1e6
    board.hole(at_edge, 12.0, 2.7).hole(20.0, 4.0, 2.7).hole(20.0 + apart, 4.0, 2.7)
    copper = shapely.union_all(
        measures.areas(draw(board.placement()), "plane", layer="copper_bottom", undercut=undercut)
    )
    wide = copper.buffer(-62_400, join_style="mitre").buffer(62_400, join_style="mitre")
    left = [piece for piece in shapely.get_parts(copper.difference(wide)) if piece.area > 1e9]
    assert left == []
    assert (copper.geom_type == "Polygon" and len(copper.interiors) == 3) == (web >= 138_000)
    assert copper.area > 0.98 * (29.4e6 * 15.4e6 - 3 * math.pi * 1.55e6**2)


def test_holes_are_those_of_the_placement_in_order(boards: ModuleType) -> None:
    """Would catch hole:N in findings pointing at another hole."""
    placement = boards.stage().hole(3.0, 3.0, 2.7, plated=True).placement()
    holes = draw(placement).holes
    assert [(h.x, h.y, h.diameter, h.plated, h.net) for h in holes] == [
        (h.x, h.y, h.diameter, h.plated, "gnd" if h.plated else None) for h in placement.holes
    ]


@pytest.mark.parametrize("ground", [{}, None])
def test_plated_holes_have_lands_on_ground_free_of_mask(
    boards: ModuleType, measures: ModuleType, ground: dict[str, str] | None
) -> None:
    """Would catch a plated hole without copper around it, cut off from ground, or under mask."""
    board = boards.straight().hole(4.0, 3.5, 2.7, plated=True)
    board.ground = ground
    artwork = draw(board.placement())
    land = shapely.Point(4_000_000, 3_500_000).buffer(1_350_000 + 395_000)
    assert measures.ground(artwork).covers(land)
    assert shapely.union_all([measures.polygon(s) for s in artwork.on("copper_bottom")]).covers(land)
    opening = shapely.union_all(measures.areas(artwork, "opening", layer="soldermask_top"))
    assert opening.covers(land)
    assert all(math.dist((via.x, via.y), (4e6, 3.5e6)) > 1_750_000 + 300_000 for via in artwork.vias)


def test_reference_names_ports_elements_and_each_net_once(boards: ModuleType) -> None:
    """Would catch names missing on the reference layer, or printed into the copper."""
    placement = boards.feed().placement()
    labels = draw(placement).labels
    assert {label.layer for label in labels} == {"reference"}
    texts = [label.text for label in labels]
    assert texts[0] == "+" and (labels[0].x, labels[0].y) == (0, 0)
    for name in (*placement.lines, *placement.parts, *placement.ports):
        assert name in texts
    for net in ("a", "b", "t", "k", "v", "gnd"):
        assert texts.count(net) == 1
    feed = next(label for label in labels if label.text == "feed")
    assert (feed.x, feed.y, feed.rotation) == (12_000_000, 11_000_000, 90.0)


def test_shapes_come_by_layer_in_the_order_of_the_layers(boards: ModuleType) -> None:
    """Would catch an order that changes with the board."""
    layers = [shape.layer for shape in draw(boards.feed().placement()).shapes]
    order = list(LAYERS)
    assert [order.index(layer) for layer in layers] == sorted(order.index(layer) for layer in layers)


@pytest.mark.parametrize("name", ["straight", "tee", "feed", "stage", "shorted"])
def test_outlines_run_ccw_and_holes_cw_on_every_layer(boards: ModuleType, name: str) -> None:
    """Would catch outlines the wrong way round, which DXF readers fill inside out."""
    for shape in draw(boards.BOARDS[name]().placement()).shapes:
        assert shapely.LinearRing(shape.outline.chords()).is_ccw, shape
        assert not any(shapely.LinearRing(hole.chords()).is_ccw for hole in shape.holes)


def test_measured_gap_is_that_over_most_of_the_line(boards: ModuleType) -> None:
    """Would catch a mean, which a pad's wider keep-out would pull away from what the line sees."""
    board = boards.straight()
    for x in (6.0, 14.0, 22.0):
        board.chip(f"C{x:.0f}", x, 8.0 + 0.55 + 0.775 + 0.3, 90.0, ("a", "gnd"))
    measured = draw(board.placement()).line_copper["main"]
    assert (measured.gap_left, measured.gap_right) == (1_000_000, 1_000_000)


def test_measured_gap_tells_left_from_right(boards: ModuleType) -> None:
    """Would catch the sides swapped: left is north of a line that heads east."""
    for path, sides in (
        ([(5.0, 2.0), (25.0, 2.0)], (1_000_000, None)),
        ([(25.0, 2.0), (5.0, 2.0)], (None, 1_000_000)),
    ):
        board = boards.BoardBuilder(30.0, 16.0)
        board.line("edge", path, 1.0, ("a", "b"))
        measured = draw(board.placement()).line_copper["edge"]
        assert (measured.gap_left, measured.gap_right) == sides


@pytest.mark.parametrize(("gap", "expected"), [(2.9, 2_900_000), (3.2, None)])
def test_pour_beyond_six_heights_counts_as_none(boards: ModuleType, gap: float, expected: int | None) -> None:
    """Would catch a far pour reported as if the line felt it (six heights are 3.048 mm here)."""
    board = boards.BoardBuilder(30.0, 24.0)
    board.line("main", [(0.3, 12.0), (29.7, 12.0)], 1.1, ("a", "b"), gap=gap)
    assert draw(board.placement()).line_copper["main"].gap_left == expected


def test_measured_gap_is_finished_copper_to_finished_copper(boards: ModuleType) -> None:
    """Would catch the undercut taken off the reported gap."""
    board = boards.straight()
    board.rules = {"copper": {"undercut": "35 um"}}
    assert draw(board.placement()).line_copper["main"].gap_left == 1_000_000


@pytest.mark.parametrize(
    "rules",
    [
        {"copper": None, "fence": None, "mask": None, "legend": None},
        {"copper": {"undercut": "35 um", "min_width": "0.3 mm", "min_gap": "0.3 mm"}},
        {
            "vias": {"diameter": "1.0 mm", "drill": "0.5 mm", "min_pitch": "1.2 mm"},
            "holes": {"drills": ["0.5 mm"]},
        },
        {"fence": {"max_edge_distance": "0.3 mm"}},
    ],
)
@pytest.mark.parametrize("name", ["feed", "stage"])
def test_sparse_and_coarse_rules_are_drawn_too(
    boards: ModuleType, rules: dict[str, object], name: str
) -> None:
    """Would catch a crash where a rule file is silent, or where its sizes leave little room."""
    board = boards.BOARDS[name]()
    board.rules = rules
    artwork = draw(board.placement())
    assert any(shape.role == "pour" for shape in artwork.shapes)
    assert any(via.purpose == "fence" for via in artwork.vias)
