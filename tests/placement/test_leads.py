"""Parts with leads in rows: pads joined, lines that begin beyond the row, ground vias out of the way."""

from __future__ import annotations

import itertools
from typing import Any

import pytest
import shapely

from layoutgen.errors import InfeasibleError
from layoutgen.geometry import stroke
from layoutgen.pipeline import run_inputs
from layoutgen.placement import Placement
from layoutgen.placement.frame import Pose, ring_to_world, slices_to_world
from layoutgen.reading import inputs_from_data
from tests.placement.circuits import base, chip, divider, free, line, two_ports
from tests.placement.leads import AMPLIFIERS, OSCILLATOR, launched, random_rows, through
from tests.placement.legal import copper, faults, nets_of
from tests.placement.test_frames import placed

GAP = 125_000.0  # [nm], copper.min_gap of the rule file


def errors(data: dict[str, Any]) -> list[str]:
    """Return the findings of severity error of a finished drawing."""
    inputs = inputs_from_data(data)
    findings = run_inputs(inputs.circuit, inputs.rules).checks.findings
    return [f"{finding.rule}: {finding.text}" for finding in findings if finding.severity == "error"]


def near_ground(placement: Placement) -> list[str]:
    """Return signal copper nearer than may be etched to ground copper of parts."""
    grounds = [(ring.polygon(), origin.element) for ring, origin in placement.ground_shapes]
    return [
        f"{name} - ground of {element}"
        for name, (_, polygon) in copper(placement).items()
        for ground, element in grounds
        if nets_of(placement, name) != {"gnd"} and polygon.distance(ground) < GAP - 10.0
    ]


def shared_vias(placement: Placement) -> list[str]:
    """Return ground pads, slugs with vias of their own left out, that have no two vias nearest to them."""
    out = []
    for part in placement.parts.values():
        pads = [pad for pad in part.pads if pad.net == "gnd"]
        axes = [shapely.Point(via.x, via.y) for via in placement.vias if via.purpose == f"part:{part.name}"]
        nearest = [min(pads, key=lambda pad: pad.outline.polygon().distance(axis)).pin for axis in axes]
        out += [f"{part.name}.{pad.pin}" for pad in pads if nearest.count(pad.pin) < 2]
    return out


@pytest.mark.parametrize("name", AMPLIFIERS)
def test_amplifiers_with_leads_in_rows_are_legal(name: str) -> None:
    """Catches a line over a neighbouring lead, ground copper or vias in a lead's way, shared vias."""
    placement = placed(AMPLIFIERS[name])
    assert faults(placement) == []
    assert near_ground(placement) == []
    assert shared_vias(placement) == []


@pytest.mark.parametrize("name", ["six leads, middle ones", "eight leads, two and two", "leads all round"])
def test_amplifiers_with_leads_in_rows_have_no_errors(name: str) -> None:
    """Catches what only the checks of the finished artwork see: openings, shorts, widths, vias per pad."""
    assert errors(AMPLIFIERS[name]) == []


def test_a_line_too_wide_for_its_lead_begins_beyond_the_row() -> None:
    """Catches a line drawn at full width between leads, and a strip wider than its lead."""
    placement = placed(AMPLIFIERS["six leads, middle ones"])
    lead = next(pad for pad in placement.parts["U1"].pads if pad.net == "i")
    strip = next(strip for strip in placement.strips if strip.net == "i")
    row = [pad.outline.polygon() for pad in placement.parts["U1"].pads if pad.net == "gnd"]
    line = placement.lines["l1"]
    area = stroke(line.path, line.width).polygon()
    assert strip.width == 350_000 < line.width
    assert line.path[-1] in strip.path
    assert min(area.distance(pad) for pad in row) >= 200_000
    assert area.distance(lead.outline.polygon()) >= 200_000
    assert line.budget[-1].cause == "step" or any(entry.cause == "step" for entry in line.budget)


def test_pads_of_one_net_side_by_side_are_one_piece_of_copper() -> None:
    """Catches pads of a net left apart, and a line that ends on one of them instead of between them."""
    placement = placed(AMPLIFIERS["twin leads"])
    for net, name, end in (("i", "in", -1), ("o", "out", 0)):
        pads = [pad for pad in placement.parts["U1"].pads if pad.net == net]
        bar = next(strip for strip in placement.strips if strip.net == net)
        assert set(bar.path) == {(pad.x, pad.y) for pad in pads}
        node = placement.lines[name].path[end]
        assert node == (pads[0].x, (pads[0].y + pads[1].y) // 2)
        assert any(entry.cause == "tee" for entry in placement.lines[name].budget)
    assert all(len(pins) == 5 for pins in [placement.sized.circuit.file.parts["U1"].pins or {}])


def test_pads_of_one_net_that_nothing_can_join_are_told() -> None:
    """Catches a part laid twice, or advice on lengths, where another pad stands between two of one net."""
    pins = {pin: net for pin, net in AMPLIFIERS["eight leads"]["parts"]["U1"]["pins"].items() if pin != "p4"}
    data = through("eight", {**pins, "p2": "gnd", "p1": "i", "p3": "i", "p4": "gnd", "p6": "o"})
    with pytest.raises(InfeasibleError, match="pads p1 and p3 on net i cannot be joined") as caught:
        placed(data)
    assert caught.value.element == "U1"


def test_a_bank_at_a_lead_beside_a_line_goes_off_to_the_other_side() -> None:
    """Catches a bank laid straight on, along the line of the neighbouring lead, or no place at all."""
    placement = placed(OSCILLATOR)
    assert faults(placement) == []
    device = {pad.pin: pad for pad in placement.parts["Q1"].pads}
    away = device["p1"].y - device["p2"].y
    for name in ("Ce", "Re"):
        assert (placement.parts[name].y - device["p1"].y) * away > 0


def test_what_leaves_a_part_backwards_turns_at_once() -> None:
    """Catches an output line drawn back along the input because both leads face the same way."""
    placement = placed(AMPLIFIERS["leads to one side"])
    first, second, third = placement.lines["l2"].path[:3]
    assert (second[0] - first[0]) * (third[0] - second[0]) + (second[1] - first[1]) * (
        third[1] - second[1]
    ) == 0
    assert placement.ports["p2"].edge == "east"


@pytest.mark.parametrize("heading", ["45 deg", "135 deg", "315 deg"])
def test_parts_at_45_degrees(heading: str) -> None:
    """Catches a slanted part refused because the boxes round it and its lines are too large."""
    hint = {"heading": heading}
    chips = base(
        ports=two_ports(),
        lines={"in": free("a", "i"), "out": free("o", "z")},
        parts={"U1": chip("capacitor", "10 pF", "i", "o")},
        layout={"hints": {"U1": hint}},
    )
    cross = through("cross", {"g": "i", "d": "o", "s1": "gnd", "s2": "gnd"}, layout={"hints": {"U1": hint}})
    for data in (chips, cross):
        placement = placed(data)
        assert placement.parts["U1"].heading == float(heading.split()[0])
        assert faults(placement) == []
        assert near_ground(placement) == []


def test_lines_of_given_length_turn_to_a_slanted_part() -> None:
    """Catches lines of given length bent by quarter turns only, or given the length for a quarter turn."""
    data = base(
        ports=two_ports(),
        lines={
            "in": line("a", "n", length="6 mm"),
            "mid": line("n", "i", angle="60 deg", z="60 ohm"),
            "out": line("o", "z", angle="90 deg"),
        },
        parts={"U1": chip("capacitor", "10 pF", "i", "o")},
        layout={"hints": {"U1": {"heading": "45 deg"}}},
    )
    placement = placed(data)
    assert placement.parts["U1"].heading == 45.0
    turns = [bend.turn for name in ("in", "mid", "out") for bend in placement.lines[name].bends]
    assert turns == [45.0, -45.0]
    assert faults(placement) == []


@pytest.mark.parametrize("heading", [30.0, 45.0, 100.0, 225.0, 315.0])
def test_slices_cover_a_slanted_box_closely(heading: float) -> None:
    """Catches a corner of a slanted box that no slice covers, and slices much larger than the box."""
    pose, box = Pose(12_345, -6_789, heading), (-400_000, -900_000, 2_000_000, 900_000)
    area = ring_to_world(pose, box).polygon()
    cover = shapely.union_all([shapely.box(*piece) for piece in slices_to_world(pose, box)])
    assert cover.buffer(2.0).covers(area)
    assert cover.area < 1.35 * area.area


@pytest.mark.parametrize("seed", range(12))
def test_random_rows_of_leads(seed: int) -> None:
    """Catches copper too near to other copper, loose pads, crashes, whatever stands in the rows."""
    try:
        placement = placed(random_rows(seed))
    except InfeasibleError as error:
        assert error.element and error.reason and error.remedy
        return
    assert faults(placement) == []
    assert near_ground(placement) == []


class TestLaunches:
    """A part with one signal pad on a port's net, between ground pads: an edge connector."""

    @pytest.mark.parametrize("to_edge", [False, True])
    @pytest.mark.parametrize("free_exit", [False, True])
    def test_its_pad_ends_at_the_edge(self, *, to_edge: bool, free_exit: bool) -> None:
        """Catches a connector inside the board, a port that is not at its pad, a line over the pad."""
        placement = placed(launched(to_edge=to_edge, free_exit=free_exit))
        assert faults(placement) == []
        inset = 0 if to_edge else 300_000
        first, last = (self._signal(placement, name) for name in ("J1", "J2"))
        assert first.bounds[0] == 300_000
        assert placement.ports["p1"].x == inset
        assert placement.lines["in"].path[0][0] == first.bounds[2]
        short = placement.width - 300_000 - last.bounds[2]
        assert short == 0 if free_exit else 0 <= short < 500_000
        assert placement.lines["out"].path[-1][0] == last.bounds[0]
        assert placement.width % 500_000 == 0

    def _signal(self, placement: Placement, name: str) -> shapely.Polygon:
        """Return the outline of a connector's signal pad."""
        return next(pad for pad in placement.parts[name].pads if pad.pin == "c").outline.polygon()

    def test_the_finished_board_has_no_errors(self) -> None:
        """Catches pads of a launch too near to the profile, and copper that does not reach the port."""
        assert errors(launched()) == []
        assert errors(launched(to_edge=True)) == []


def test_a_divider_with_a_small_resistor_is_symmetric() -> None:
    """Catches arms of different shape where the resistor is too short for a symmetric drawing."""
    data = divider()
    data["parts"]["R1"]["case"] = "0402"
    placement = placed(data)
    assert faults(placement) == []
    axis = placement.ports["p1"].y
    one, other = (placement.lines[name].path for name in ("arm_1", "arm_2"))
    mirrored = [(x, 2 * axis - y) for x, y in other]
    assert all(abs(x - p) <= 2 and abs(y - q) <= 2 for (x, y), (p, q) in zip(one, mirrored, strict=True))


def test_banks_between_chips_in_a_row() -> None:
    """Catches a chip laid over the last part of the bank before it."""
    pairs = itertools.pairwise(["n", "x", "y", "m"])
    chips = {f"C{k}": chip("capacitor", "0.5 pF", a, b, case="0402") for k, (a, b) in enumerate(pairs)}
    for net in ("x", "y"):
        chips[f"L{net}"] = chip("inductor", "2 nH", net, "gnd", case="0402")
        chips[f"C{net}"] = chip("capacitor", "2 pF", net, "gnd", case="0402")
    data = base(ports=two_ports(), lines={"in": free("a", "n"), "out": free("m", "z")}, parts=chips)
    assert faults(placed(data)) == []
