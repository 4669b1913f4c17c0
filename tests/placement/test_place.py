"""The whole stage on circuits that each ask for one thing, judged by an independent look (legal.py)."""

from __future__ import annotations

import copy
import itertools
import math
from pathlib import Path
from typing import Any

import pytest

from layoutgen.circuit import build_circuit
from layoutgen.errors import InfeasibleError, WrongInputError
from layoutgen.placement import Placement, place
from layoutgen.reading import inputs_from_data, read_inputs
from layoutgen.sizing import size_circuit
from tests.placement.circuits import CIRCUITS, base, chip, free, line, port, through_with, two_ports
from tests.placement.legal import faults

EXAMPLES = sorted((Path(__file__).parents[2] / "examples").glob("*.toml"))


def placed(data: dict[str, Any]) -> Placement:
    inputs = inputs_from_data(data)
    return place(size_circuit(build_circuit(inputs.circuit, inputs.rules)))


@pytest.mark.parametrize("name", CIRCUITS)
def test_every_kind_of_circuit_is_legal(name: str) -> None:
    """Catches overlaps, loose ends, copper over the edge, wrong lengths, folds too near."""
    assert faults(placed(CIRCUITS[name])) == []


@pytest.mark.parametrize("path", EXAMPLES, ids=lambda path: path.stem)
def test_every_example_is_legal(path: Path) -> None:
    """Catches an example that a change of the search has broken."""
    inputs = read_inputs(path)
    assert faults(place(size_circuit(build_circuit(inputs.circuit, inputs.rules)))) == []


@pytest.mark.parametrize("name", ["cross", "long feed", "coupler"])
def test_the_same_circuit_gives_the_same_placement(name: str) -> None:
    """Catches a dependence on hash order or on what ran before."""
    assert repr(placed(CIRCUITS[name]).lines) == repr(placed(CIRCUITS[name]).lines)


def test_a_board_without_size_comes_in_half_millimetres_with_ports_at_their_edges() -> None:
    """Catches a frame that is not rounded, or a port that is not moved to it."""
    placement = placed(CIRCUITS["cross"])
    assert placement.width % 500_000 == 0
    assert placement.height % 500_000 == 0
    assert placement.ports["p1"].x == 300_000
    assert placement.ports["p2"].x == placement.width - 300_000
    assert placement.lines["exit"].path[-1] == (placement.ports["p2"].x, placement.ports["p2"].y)
    assert (placement.ports["p1"].heading, placement.ports["p2"].heading) == (0.0, 180.0)


def test_given_lengths_end_in_a_strip_and_say_so() -> None:
    """Catches a line of given length stretched to the edge, or a port left hanging inside the board."""
    placement = placed(CIRCUITS["plain"])
    end = placement.lines["only"].path[-1]
    strip = placement.strips[-1]
    assert strip.path[0] == end
    assert strip.path[-1] == (placement.width - 300_000, end[1])
    assert math.dist(*strip.path) < 500_000
    assert any(rule == "placement.port" and element == "p2" for rule, element, _ in placement.notes)


def test_a_given_board_keeps_its_size_and_its_ports() -> None:
    """Catches a board that grows although its size was given, and a free line short of the edge."""
    placement = placed(CIRCUITS["fixed board"])
    assert (placement.width, placement.height) == (30_000_000, 14_000_000)
    assert placement.ports["p1"].x == 300_000
    assert placement.ports["p2"].x == 29_700_000


def test_ports_at_given_places() -> None:
    """Catches ``at`` measured from the wrong end, or not obeyed."""
    placement = placed(CIRCUITS["ports placed"])
    assert placement.ports["p1"].y == 9_000_000
    assert placement.ports["p2"].y == 14_000_000


def test_a_port_to_the_edge_has_no_inset() -> None:
    """Catches the edge distance applied to a port that runs to the profile."""
    placement = placed(CIRCUITS["to edge"])
    assert placement.ports["p1"].x == 0
    assert placement.ports["p2"].x == placement.width


def test_a_hinted_route_is_drawn_as_written() -> None:
    """Catches turns mirrored, legs that are not those written, a heading not obeyed."""
    path = placed(CIRCUITS["hinted feed"]).lines["feed"].path
    steps = [(b[0] - a[0], b[1] - a[1]) for a, b in itertools.pairwise(path)]
    assert steps[0] == (0, -5_000_000)
    assert steps[1][0] > 0 and steps[1][1] == 0
    assert steps[2] == (0, -4_000_000)


def test_a_hinted_route_given_from_the_far_net() -> None:
    """Catches a route taken as seen from where the search came, not from the line's first net."""
    data = copy.deepcopy(CIRCUITS["hinted feed"])
    data["parts"] = {"R1": chip("resistor", "50 ohm", "t", "gnd")}
    data["lines"]["feed"]["nets"] = ["t", "n"]
    data["layout"]["hints"]["feed"] = {"route": ["4 mm", "left", "*", "right", "5 mm"]}
    path = placed(data).lines["feed"].path
    steps = [(b[0] - a[0], b[1] - a[1]) for a, b in itertools.pairwise(path)]
    assert math.hypot(*steps[0]) == 4_000_000
    assert math.hypot(*steps[2]) == 5_000_000
    assert steps[0][0] * steps[1][1] - steps[0][1] * steps[1][0] > 0  # a left turn


def test_a_pinned_part_lies_where_the_hint_says() -> None:
    """Catches ``at`` not obeyed to the nanometre, and a heading not obeyed."""
    data = through_with(
        {"mid": line("k", "m", angle="60 deg")},
        {"C1": chip("capacitor", "10 pF", "n", "k")},
        board={"rules": "two-layer-standard", "size": ["40 mm", "20 mm"]},
        layout={"hints": {"C1": {"at": ["12 mm", "9 mm"], "heading": "east"}}},
    )
    part = placed(data).parts["C1"]
    assert (part.x, part.y, part.heading) == (12_000_000, 9_000_000, 0.0)
    assert faults(placed(data)) == []


def test_bank_order_and_side() -> None:
    """Catches a bank whose smallest capacitor is not the first from the feed."""
    placement = placed(CIRCUITS["long feed"])
    feed_end = placement.lines["feed"].path[-1]
    distances = [
        math.dist(feed_end, (placement.parts[name].x, placement.parts[name].y)) for name in ("C1", "C2")
    ]
    assert distances[0] < distances[1]
    assert placement.strips[0].net == "k"


def test_each_ground_pad_has_vias_of_its_own() -> None:
    """Catches shunt parts that share vias or have none."""
    placement = placed(CIRCUITS["long feed"])
    for name in ("C1", "C2"):
        assert sum(via.purpose == f"part:{name}" for via in placement.vias) == 2


def test_a_shorted_line_ends_on_a_via() -> None:
    """Catches a short that is not at the via's axis."""
    placement = placed(CIRCUITS["shorted"])
    end = placement.lines["short"].path[-1]
    assert any((via.x, via.y) == end and via.purpose == "line:short" for via in placement.vias)


def test_a_taller_substrate_makes_wider_lines_and_longer_boards() -> None:
    """Catches sizes that do not follow the file."""
    thick = copy.deepcopy(CIRCUITS["plain"])
    thick["substrate"]["height"] = "0.762 mm"
    assert placed(thick).lines["only"].width > 1.4 * placed(CIRCUITS["plain"]).lines["only"].width


class TestInfeasible:
    """Exit status 3: the element, why, and what would do."""

    def test_too_small_a_board_names_a_size_that_would_do(self) -> None:
        """Catches a remedy that does not help: the named size is tried."""
        data = copy.deepcopy(CIRCUITS["long feed"])
        data["board"]["size"] = ["12 mm", "8 mm"]
        with pytest.raises(InfeasibleError) as caught:
            placed(data)
        width, height = caught.value.remedy.removeprefix("a board of ").removesuffix(" would do").split(" x ")
        data["board"]["size"] = [width, height]
        assert faults(placed(data)) == []

    def test_a_hint_that_cannot_be_kept(self) -> None:
        """Catches a binding hint that is quietly dropped: two parts pinned farther apart than their line."""
        data = through_with(
            {"mid": line("k", "l", angle="60 deg")},
            {"C1": chip("capacitor", "10 pF", "n", "k"), "C2": chip("capacitor", "10 pF", "l", "m")},
            board={"rules": "two-layer-standard", "size": ["60 mm", "20 mm"]},
            layout={
                "hints": {
                    "C1": {"at": ["12 mm", "9 mm"], "heading": "east"},
                    "C2": {"at": ["42 mm", "9 mm"], "heading": "east"},
                }
            },
        )
        with pytest.raises(InfeasibleError) as caught:
            placed(data)
        assert caught.value.element in ("mid", "C2")
        assert caught.value.remedy

    def test_a_leave_hint_turns_what_leads_to_it(self) -> None:
        """Catches a heading hint that is given up although turning the line before it would keep it."""
        data = copy.deepcopy(CIRCUITS["hinted feed"])
        data["layout"]["hints"]["feed"] = {"leave": "west"}
        placement = placed(data)
        first, second = placement.lines["feed"].path[:2]
        assert second[0] < first[0] and second[1] == first[1]
        assert faults(placement) == []


def test_too_short_a_line_is_wrong_input() -> None:
    """Catches a line drawn with no length because its corrections eat it."""
    data = base(ports={"p1": port("a")}, lines={"in": free("a", "n"), "tail": line("n", angle="0.4 deg")})
    with pytest.raises(WrongInputError) as caught:
        placed(data)
    assert caught.value.faults[0].key.startswith("lines.tail")


def test_input_and_output_stay_on_their_sides_of_the_transistor() -> None:
    """Catches a gate feed laid beside the output, where the two would couple."""
    inputs = read_inputs(next(path for path in EXAMPLES if path.stem == "telemetry_driver"))
    placement = place(size_circuit(build_circuit(inputs.circuit, inputs.rules)))
    device = placement.parts["Q1"].x
    for name in ("gate_feed", "gate_supply", "stub_in"):
        assert max(x for x, _ in placement.lines[name].path) < device
    for name in ("drain_feed", "drain_supply"):
        assert min(x for x, _ in placement.lines[name].path) > device


def test_ports_of_one_edge_come_in_file_order() -> None:
    """Catches ports in the order in which the search met them."""
    data = through_with(
        {
            "mid": line("n", "m", angle="90 deg"),
            "feed_1": line("n", "v1", angle="60 deg", z="80 ohm"),
            "feed_2": line("m", "v2", angle="60 deg", z="80 ohm"),
        },
        ports={
            **two_ports(),
            "p3": port("v1", edge="north"),
            "p4": port("v2", edge="north"),
        },
    )
    ports = placed(data).ports
    assert ports["p3"].x < ports["p4"].x
    assert ports["p3"].y == ports["p4"].y
