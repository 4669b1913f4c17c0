"""Remedies: what a message names was placed before it was named, and suits the kind of element."""

from __future__ import annotations

import re
from typing import Any

import pytest

from layoutgen.circuit import build_circuit
from layoutgen.errors import InfeasibleError
from layoutgen.placement import Placement
from layoutgen.placement.model import Model
from layoutgen.placement.remedies import Remedies
from layoutgen.placement.requests import with_port_order
from layoutgen.reading import inputs_from_data
from layoutgen.sizing import SizedCircuit, size_circuit
from tests.placement.circuits import base, chip, divider, free, line, port, through_with
from tests.placement.leads import pad, part
from tests.placement.legal import faults
from tests.placement.test_frames import HOLE, board, pinned, placed


def test_a_pinned_part_too_near_is_told_a_place_that_does() -> None:
    """Catches a part told to leave another way, and a place named that cannot be kept either."""
    data = pinned(at=["8 mm", "20 mm"])
    with pytest.raises(InfeasibleError) as caught:
        placed(data)
    assert "leave" not in caught.value.remedy
    at = re.search(
        r'at = \["([0-9.]+ mm)", "([0-9.]+ mm)"\] in \[layout.hints.C2\] would do', str(caught.value)
    )
    assert at is not None
    data["layout"]["hints"]["C2"]["at"] = [at[1], at[2]]
    assert faults(placed(data)) == []


def test_a_line_between_two_edges_names_the_board_it_fits() -> None:
    """Catches a size that fails with the same sentence when it is applied."""
    ports = {"p1": port("a", edge="west", at="10 mm"), "p2": port("z", edge="east", at="10 mm")}
    data = base(ports=ports, lines={"only": line("a", "z", angle="60 deg")}, board=board("30 mm", "20 mm"))
    with pytest.raises(InfeasibleError) as caught:
        placed(data)
    size = re.search(r"a board of ([0-9.]+ mm) x ([0-9.]+ mm) would do", caught.value.remedy)
    assert size is not None
    data["board"]["size"] = [size[1], size[2]]
    assert faults(placed(data)) == []


def test_a_line_too_short_for_what_stands_at_its_ends_is_told_a_length_that_does() -> None:
    """Catches advice to leave another way for a stub that has tried every way."""
    data = through_with({"tiny": line("n", "k", angle="2.5 deg"), "st": line("k", angle="14 deg")})
    data["lines"]["exit"] = free("k", "z")
    with pytest.raises(InfeasibleError) as caught:
        placed(data)
    found = re.search(r'angle = "([0-9.]+ deg)" for tiny would do', caught.value.remedy)
    assert found is not None
    data["lines"]["tiny"]["angle"] = found[1]
    assert faults(placed(data)) == []


def test_a_size_named_for_a_board_with_holes_leaves_a_way_round_them() -> None:
    """Catches the board named that would be drawn if its holes were not in the way."""
    holes = [{**HOLE, "at": ["10 mm", f"{y} mm"], "diameter": "2.7 mm"} for y in range(2, 20, 3)]
    ports = {"p1": port("a", edge="west"), "p2": port("z", edge="east")}
    mid = {"mid": line("n", "m", angle="60 deg")}
    data = through_with(mid, ports=ports, board=board("40 mm", "20 mm", holes=holes))
    with pytest.raises(InfeasibleError) as caught:
        placed(data)
    size = re.search(r"a board of ([0-9.]+ mm) x ([0-9.]+ mm) would do", caught.value.remedy)
    assert size is not None
    data["board"]["size"] = [size[1], size[2]]
    assert faults(placed(data)) == []


def crossed_outputs() -> dict[str, Any]:
    """Return a part whose outputs would have to cross for their ports to come in file order."""
    pads = {
        "i": pad(-1.0, 0, 0.6, 0.35, "west"),
        "a": pad(1.0, 0.65, 0.6, 0.35, "east"),
        "b": pad(1.0, -0.65, 0.6, 0.35, "east"),
    }
    return base(
        ports={"p": port("a", edge="west"), "upper": port("y", edge="east"), "lower": port("z", edge="east")},
        lines={"in": free("a", "i"), "up": free("u", "y"), "down": free("d", "z")},
        parts={"T1": part("three", {"i": "i", "a": "u", "b": "d"})},
        footprints={"three": {"pads": pads}},
    )


def test_ports_whose_order_asks_for_a_crossing_are_told_the_other_order() -> None:
    """Catches advice on lengths where only the order of two ports of one edge stands in the way."""
    data = crossed_outputs()
    with pytest.raises(InfeasibleError) as caught:
        placed(data)
    assert caught.value.remedy == "[ports.lower], [ports.upper] in this order in the file would do"
    data["ports"] = {name: data["ports"][name] for name in ("p", "lower", "upper")}
    assert faults(placed(data)) == []


def test_what_is_too_near_is_told_with_its_distance_and_the_least_one() -> None:
    """Catches a reason that names two elements and not what is kept between them."""
    data = base(
        ports={"p1": port("a"), "p2": port("z")},
        lines={
            "in": free("a", "m"),
            "short": line("m", "n", angle="2.5 deg"),
            "stub": line("n", angle="14 deg"),
            "out": free("n", "z"),
        },
    )
    with pytest.raises(InfeasibleError) as caught:
        placed(data)
    assert re.search(r"stub beside in \(0\.1\d\d mm between them, 0\.125 mm are kept\)", caught.value.reason)


def test_ends_of_a_pair_that_lie_side_by_side_are_told_to_need_other_impedances() -> None:
    """Catches advice on hints or boards where two wide lines begin side by side at narrow strips."""
    pair = {"nets": ["i", "gnd", "o", "gnd"], "angle": "80 deg"}
    data = base(
        ports={"p1": port("a"), "p2": port("z")},
        lines={"in": free("a", "i"), "out": free("o", "z")},
        coupled={"comb": {**pair, "even_impedance": "75 ohm", "odd_impedance": "45 ohm"}},
    )
    with pytest.raises(InfeasibleError) as caught:
        placed(data)
    assert "impedances nearer to each other for comb" in caught.value.remedy


def test_two_of_three_ports_on_one_edge_are_told_to_be_swapped() -> None:
    """Catches ports tried in the opposite order only, which of three ports is none with two swapped."""
    lines = {"in": free("a", "t"), **{f"l{k}": free("t", f"q{k}") for k in (1, 2, 3)}}
    ports = {"p": port("a", edge="west"), **{name: port(name, edge="east") for name in ("q1", "q3", "q2")}}
    inputs = inputs_from_data(base(ports=ports, lines=lines))
    model = Model(size_circuit(build_circuit(inputs.circuit, inputs.rules)))
    some = placed(base(ports={"p1": port("a"), "p2": port("z")}, lines={"only": free("a", "z")}))

    def only_in_order(changed: SizedCircuit) -> Placement | None:
        return some if list(changed.circuit.file.ports) == ["p", "q1", "q2", "q3"] else None

    told = Remedies(model, only_in_order, lambda: None).best("l3")
    assert told == "[ports.q1], [ports.q2], [ports.q3] in this order in the file would do"


def test_ports_in_another_order_are_tried_with_the_straight_path_that_follows() -> None:
    """Catches a swap of two ports that draws when it is made but is not found when it is tried."""
    data = divider()
    inputs = inputs_from_data(data)
    sized = size_circuit(build_circuit(inputs.circuit, inputs.rules))
    data["ports"] = {name: data["ports"][name] for name in ("p1", "p3", "p2")}
    again = build_circuit(inputs_from_data(data).circuit, inputs.rules)
    tried = with_port_order(sized, ["p1", "p3", "p2"]).circuit
    assert sized.circuit.spine != again.spine
    assert (tried.spine, tried.nets) == (again.spine, again.nets)


def test_what_is_told_suits_the_kind_of_element_where_nothing_that_was_tried_does() -> None:
    """Catches length = "free" named for a line whose length is free already, and longer lines for none."""
    lines = {"in": free("a", "n"), "mid": line("m", "k", angle="60 deg"), "out": free("k", "z")}
    parts = {"C1": chip("capacitor", "22 pF", "n", "o"), "C2": chip("capacitor", "22 pF", "o", "m")}
    inputs = inputs_from_data(base(ports={"p1": port("a"), "p2": port("z")}, lines=lines, parts=parts))
    model = Model(size_circuit(build_circuit(inputs.circuit, inputs.rules)))
    remedies = Remedies(model, lambda _: None, lambda: None)
    assert remedies.best("in") == "another order of the arms or ports, or leave or route in [layout.hints.in]"
    assert remedies.best("C1") == "more distance: a line between C1 and what stands beside it"
    assert remedies.best("mid") == 'longer lines beside mid, or length = "free" for one of them'
    assert remedies.best("C2") == 'longer lines beside C2, or length = "free" for one of them'
