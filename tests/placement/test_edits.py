"""An edit moves what it must and nothing else."""

from __future__ import annotations

import copy
import tomllib
from pathlib import Path
from typing import Any

import pytest

from layoutgen.artwork import draw
from layoutgen.circuit import build_circuit
from layoutgen.placement import Placement, place
from layoutgen.reading import inputs_from_data
from layoutgen.sizing import size_circuit
from tests.placement.circuits import chip, line, through_with, two_ports
from tests.placement.legal import faults
from tests.placement.loop_circuits import side_longer

AMPLIFIER = Path(__file__).parents[2] / "examples" / "telemetry_driver.toml"


def placed(data: dict[str, Any]) -> Placement:
    inputs = inputs_from_data(data)
    return place(size_circuit(build_circuit(inputs.circuit, inputs.rules)))


def test_a_capacitor_value_changes_nothing_on_the_board() -> None:
    """Catches a drawing that depends on the value of a part beyond the order of its bank."""
    data = tomllib.loads(AMPLIFIER.read_text("utf-8"))
    other = copy.deepcopy(data)
    other["parts"]["C1"]["value"], other["parts"]["C8"]["value"] = "27 pF", "2.2 nF"
    plain, changed = draw(placed(data)), draw(placed(other))
    bare = [[(s.layer, s.outline, s.holes, s.net, s.role) for s in art.shapes] for art in (plain, changed)]
    assert bare[0] == bare[1]
    assert [(via.x, via.y) for via in plain.vias] == [(via.x, via.y) for via in changed.vias]


def _shapes(placement: Placement, without: str) -> dict[str, list[tuple[int, int]]]:
    """Return the legs of every other line, as steps from vertex to vertex [nm]."""
    return {
        name: [(b[0] - a[0], b[1] - a[1]) for a, b in zip(found.path, found.path[1:], strict=False)]
        for name, found in placement.lines.items()
        if name != without
    }


@pytest.mark.parametrize("name", ["stub", "short"])
def test_an_angle_moves_only_what_hangs_on_its_line(name: str) -> None:
    """Catches a search that lays the rest of the board anew for one degree of a stub."""
    data = through_with(
        {
            "mid": line("n", "m", angle="60 deg"),
            "stub": line("n", angle="40 deg", z="70 ohm"),
            "short": line("m", "gnd", angle="30 deg", z="80 ohm"),
        },
        {"C1": chip("capacitor", "1.2 pF", "m", "gnd", case="0402")},
        two_ports(),
    )
    other = copy.deepcopy(data)
    other["lines"][name]["angle"] = f"{float(data['lines'][name]['angle'].split()[0]) + 1.0} deg"
    assert _shapes(placed(data), name) == _shapes(placed(other), name)


@pytest.mark.parametrize(("name", "degrees"), [("s1", 1.0), ("s2", 0.5), ("v2", 2.0)])
def test_a_degree_of_a_hybrids_side_bows_that_side_only(name: str, degrees: float) -> None:
    """Catches a hybrid that no longer closes, or is drawn anew, for one degree of one of its sides."""
    placement = placed(side_longer(name, degrees))
    assert faults(placement) == []
    assert {line for line in ("s1", "s2", "v1", "v2") if placement.lines[line].bends} == {name}
    turns = [bend.turn for bend in placement.lines[name].bends]
    assert len(turns) == 4 and max(map(abs, turns)) <= 45.0


@pytest.mark.parametrize("name", ["stub_in", "drain_tab"])
def test_an_angle_of_the_amplifier_moves_free_lines_only(name: str) -> None:
    """Catches a real board that is laid anew, or not at all, for one degree of one of its lines."""
    data = tomllib.loads(AMPLIFIER.read_text("utf-8"))
    other = copy.deepcopy(data)
    other["lines"][name]["angle"] = f"{float(data['lines'][name]['angle'].split()[0]) + 1.0} deg"
    before, after = _shapes(placed(data), name), _shapes(placed(other), name)
    given = [line for line, record in data["lines"].items() if record.get("length") != "free"]
    assert [line for line in given if line != name and before[line] != after[line]] == []
