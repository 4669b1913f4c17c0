"""Boards whose frame is known from the start: holes, pinned parts and ports at given places."""

from __future__ import annotations

from typing import Any

import pytest

from layoutgen.artwork import draw
from layoutgen.checks import check
from layoutgen.circuit import build_circuit
from layoutgen.placement import Placement, place
from layoutgen.reading import inputs_from_data
from layoutgen.sizing import size_circuit
from tests.placement.circuits import base, chip, free, line, port, through_with, two_ports
from tests.placement.legal import faults

HOLE = {"at": ["3 mm", "3 mm"], "diameter": "0.3 mm", "plated": False}


def placed(data: dict[str, Any]) -> Placement:
    inputs = inputs_from_data(data)
    return place(size_circuit(build_circuit(inputs.circuit, inputs.rules)))


def board(*size: str, **more: Any) -> dict[str, Any]:
    return {"rules": "two-layer-standard", "size": list(size), **more}


def test_a_free_line_takes_up_what_a_board_with_a_hole_leaves_over() -> None:
    """Catches a free line of stock lengths only, after which lines of given length miss the far edge."""
    data = base(
        ports=two_ports(),
        lines={
            "in": free("a", "m"),
            "mid": line("m", "n", angle="90 deg", z="70 ohm"),
            "out": line("n", "z", length="10 mm"),
        },
        board=board("46 mm", "23 mm", holes=[HOLE]),
    )
    placement = placed(data)
    assert faults(placement) == []
    assert placement.lines["out"].path[-1][0] == 46_000_000 - 300_000


def pinned(**hint: Any) -> dict[str, Any]:
    return through_with(
        {"mid": line("k", "l", angle="60 deg")},
        {"C1": chip("capacitor", "10 pF", "n", "k"), "C2": chip("capacitor", "10 pF", "l", "m")},
        board=board("60 mm", "40 mm", holes=[HOLE]),
        layout={"hints": {"C2": hint}},
    )


@pytest.mark.parametrize("y", ["20 mm", "11 mm"])
def test_a_part_pinned_beyond_given_lengths_on_a_board_with_a_hole(y: str) -> None:
    """Catches a pinned part that a free line in front of a part and a given line cannot be aimed at."""
    placement = placed(pinned(at=["35 mm", y]))
    assert faults(placement) == []
    assert (placement.parts["C2"].x, placement.parts["C2"].y) == (35_000_000, round(float(y[:-3]) * 1e6))


@pytest.mark.parametrize(("name", "heading"), [("north", 90.0), ("south", 270.0)])
def test_a_heading_alone_turns_the_free_line_before_it(name: str, heading: float) -> None:
    """Catches a heading that is kept only where the part has a place, too."""
    data = pinned(heading=name)
    del data["board"]["size"], data["board"]["holes"]
    placement = placed(data)
    assert faults(placement) == []
    assert placement.parts["C2"].heading == heading
    assert not placement.lines["mid"].bends


def test_given_lengths_may_end_short_of_a_given_board_as_of_a_grown_one() -> None:
    """Catches a board size that is refused although it is the one drawn when none is given."""
    data = base(
        ports={"p1": port("a", edge="west"), "p2": port("z", edge="east")},
        lines={"only": line("a", "z", angle="60 deg")},
    )
    grown = placed(data)
    data["board"]["size"] = [f"{grown.width / 1e6} mm", f"{grown.height / 1e6} mm"]
    given = placed(data)
    assert faults(given) == []
    assert given.ports["p2"].x == given.width - 300_000
    assert [strip.net for strip in given.strips] == [strip.net for strip in grown.strips] == ["z"]


@pytest.mark.parametrize("case", ["0402", "0603", "1206"])
def test_a_part_in_series_feeds_one_shunt_capacitor_and_a_supply(case: str) -> None:
    """Catches the most ordinary bias feed refused for a hundredth of a millimetre of courtyard."""
    data = base(
        ports={**two_ports(), "v": {"kind": "dc", "net": "v", "voltage": "15 V", "edge": "north"}},
        lines={"in": free("a", "m"), "out": free("m", "z"), "supply": {"nets": ["y", "v"], "length": "free"}},
        parts={
            "R1": chip("resistor", "150 ohm", "m", "y"),
            "C1": chip("capacitor", "1 nF", "y", "gnd", case=case),
        },
    )
    assert faults(placed(data)) == []


def test_holes_of_ground_vias_keep_their_distance_from_the_profile() -> None:
    """Catches vias of parts placed by their copper's margin alone, where holes must keep farther."""
    data = base(
        ports=two_ports(),
        lines={"in": free("a", "m"), "out": free("m", "z")},
        parts={"C1": chip("capacitor", "1 pF", "m", "gnd")},
    )
    placement = placed(data)
    wall = min(min(v.x, v.y, placement.width - v.x, placement.height - v.y) for v in placement.vias) - 150_000
    assert wall >= 500_000


def test_lines_keep_off_the_land_of_a_plated_board_hole() -> None:
    """Catches a line led past a plated hole's wall only: its land would be shorted, or a hair away."""
    hole = {"at": ["21 mm", "9 mm"], "diameter": "3.2 mm", "plated": True}
    data = base(
        ports=two_ports(),
        lines={"in": line("a", "m", angle="60 deg"), "out": free("m", "z")},
        board=board("42 mm", "23 mm", holes=[hole]),
    )
    found = [f for f in check(draw(placed(data))).findings if f.severity == "error"]
    assert found == []
