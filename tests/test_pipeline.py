"""The stages in order, the loop between pour and widths, and the public names."""

from __future__ import annotations

import doctest
import math
import tomllib
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
import shapely

import layoutgen
from layoutgen import pipeline
from layoutgen.artwork import Artwork, LineCopper, Sketch
from layoutgen.errors import InfeasibleError
from layoutgen.reading import inputs_from_data
from layoutgen.sizing import SizedCircuit

ROOT = Path(__file__).parents[1]

NOTCH: dict[str, Any] = {
    "format": 1,
    "design": {"title": "Notch", "frequency": "2.245 GHz", "band": ["2.20 GHz", "2.29 GHz"]},
    "substrate": {
        "relative_permittivity": 3.55,
        "loss_tangent": 0.0027,
        "height": "0.508 mm",
        "copper_thickness": "35 um",
    },
    "board": {"rules": "two-layer-standard"},
    "ground": {"max_impedance_shift": "1 %"},
    "ports": {"a": {"net": "a", "edge": "west"}, "b": {"net": "b", "edge": "east"}},
    "lines": {
        "left": {"nets": ["a", "m"], "impedance": "50 ohm", "angle": "40 deg"},
        "right": {"nets": ["m", "b"], "impedance": "50 ohm", "angle": "40 deg"},
        "stub": {"nets": ["m"], "impedance": "50 ohm", "angle": "90 deg"},
    },
}


@pytest.fixture(scope="module")
def notch() -> layoutgen.Inputs:
    return inputs_from_data(NOTCH)


@pytest.fixture(scope="module")
def result(notch: layoutgen.Inputs) -> layoutgen.Result:
    return pipeline.run_inputs(notch.circuit, notch.rules, correction=False)


def test_the_flow_in_the_package_docstring_works() -> None:
    """The first thing a reader tries."""
    done = doctest.testmod(layoutgen)
    assert done.attempted > 5
    assert done.failed == 0


def test_stages_are_told_in_order(notch: layoutgen.Inputs) -> None:
    """Progress names what is at work; a stage left out would be a silent wait."""
    told: list[str] = []
    pipeline.run_inputs(notch.circuit, notch.rules, told.append)
    order = ["circuit", "sizing", "placement", "artwork", "correction", "response", "checks"]
    assert list(dict.fromkeys(told)) == order


def test_every_stage_has_its_seconds(result: layoutgen.Result) -> None:
    """They go into report.json; rounds of one stage add up."""
    assert list(result.seconds) == ["circuit", "sizing", "placement", "artwork", "response", "checks"]
    assert all(seconds > 0.0 for seconds in result.seconds.values())


def test_records_hang_together(result: layoutgen.Result) -> None:
    """Each stage's record holds the one before it: no copy of another run can slip in."""
    assert result.placement is result.artwork.placement
    assert result.circuit is result.sized.circuit
    assert set(result.placement.lines) == set(result.circuit.file.lines)


def test_widths_agree_with_the_pour_as_drawn(result: layoutgen.Result, notch: layoutgen.Inputs) -> None:
    """The loop's purpose: sizing for the measured distances moves no width by a micrometre."""
    from layoutgen.sizing import size_circuit

    again = size_circuit(
        layoutgen.build_circuit(notch.circuit, notch.rules), pipeline.measured_gaps(result.artwork)
    )
    assert pipeline.largest_move(result.sized, again)[1] < 1e-6
    assert result.notes == ()


def test_measured_gaps_are_metres_and_infinity_for_none(result: layoutgen.Result) -> None:
    """Nanometres handed on as metres, or no pour as a pour at zero, would size absurd lines."""
    copper = {"x": LineCopper(name="x", gap_left=1_123_200, gap_right=None)}
    artwork = replace(result.artwork, line_copper=copper)
    assert pipeline.measured_gaps(artwork) == {"x": (pytest.approx(1.1232e-3), math.inf)}


@pytest.fixture
def restless(monkeypatch: pytest.MonkeyPatch) -> Iterator[list[float]]:
    """Let each sizing change the widths by the next number of the list [m]; none left: by nothing."""
    moves: list[float] = []
    real = pipeline.size_circuit
    shift = 0.0

    def sizing(circuit: layoutgen.Circuit, gaps: Any = None) -> SizedCircuit:
        nonlocal shift
        sized = real(circuit)
        if gaps is not None:
            shift += moves.pop(0) if moves else 0.0
        lines = {name: replace(line, width=line.width + shift) for name, line in sized.lines.items()}
        return replace(sized, lines=lines)

    monkeypatch.setattr(pipeline, "size_circuit", sizing)
    yield moves


@pytest.fixture
def drawings(monkeypatch: pytest.MonkeyPatch) -> list[Artwork]:
    """Every artwork that the loop draws, the drafts and the final one."""
    made: list[Artwork] = []
    sketch, complete = pipeline.sketch, pipeline.complete

    def sketching(placement: layoutgen.Placement) -> Sketch:
        drawn = sketch(placement)
        made.append(drawn.artwork)
        return drawn

    def completing(drawn: Sketch) -> Artwork:
        made.append(complete(drawn))
        return made[-1]

    monkeypatch.setattr(pipeline, "sketch", sketching)
    monkeypatch.setattr(pipeline, "complete", completing)
    return made


def test_it_draws_again_until_widths_rest(
    notch: layoutgen.Inputs, restless: list[float], drawings: list[Artwork]
) -> None:
    """Stopped one round early, the copper drawn is not the copper sized."""
    restless += [4e-6, 1.5e-6, 0.4e-6, 0.0]
    result = pipeline.run_inputs(notch.circuit, notch.rules, correction=False)
    assert len(drawings) == 3 + 1
    assert result.artwork.shapes is drawings[-1].shapes
    assert [bool(artwork.on("profile")) for artwork in drawings] == [False, False, False, True]
    assert result.notes == ()
    assert result.placement.lines["left"].width == round(result.sized.lines["left"].width * 1e9)


def test_it_says_when_widths_do_not_settle(
    notch: layoutgen.Inputs, restless: list[float], drawings: list[Artwork]
) -> None:
    """After four drafts and one more the fourth is drawn, with a note that says which line is how far off."""
    restless += [5e-6] * 9
    result = pipeline.run_inputs(notch.circuit, notch.rules, correction=False)
    assert len(drawings) == pipeline.MAX_ROUNDS + 2 == 6
    assert result.artwork.shapes is drawings[-1].shapes
    assert drawings[-1].placement.lines["left"].width == drawings[3].placement.lines["left"].width
    (note,) = result.notes
    assert note[0] == "assumption.pour"
    assert note[1] in result.sized.lines
    assert "15.0 um" in note[2]  # asked by the last draft, by the one more, and by the final drawing
    assert result.findings[-1 - len(result.response.notes if result.response else ())].severity == "note"


def test_it_draws_once_more_where_widths_then_rest(
    notch: layoutgen.Inputs, restless: list[float], drawings: list[Artwork]
) -> None:
    """Widths that only the last draft asks for would be told in a note, and not drawn."""
    restless += [5e-6] * pipeline.MAX_ROUNDS
    result = pipeline.run_inputs(notch.circuit, notch.rules, correction=False)
    assert len(drawings) == pipeline.MAX_ROUNDS + 2
    assert drawings[-1].placement is drawings[-2].placement
    assert result.notes == ()


SUPPLIED: dict[str, Any] = {
    **NOTCH,
    "ground": {},
    "ports": {
        "a": {"net": "in", "edge": "west"},
        "b": {"net": "out", "edge": "east"},
        "v": {"net": "v", "kind": "dc", "voltage": "12 V", "edge": "north"},
    },
    "lines": {
        "main": {"nets": ["in", "out"], "impedance": "50 ohm", "length": "free"},
        "supply": {"nets": ["v", "b"], "length": "free"},
    },
    "parts": {"C1": {"kind": "capacitor", "nets": ["b", "gnd"], "value": "1 nF", "case": "0603"}},
}


def test_what_a_line_is_worth_belongs_to_the_pour_as_drawn() -> None:
    """Would catch impedance and permittivity of the assumed pour beside the distances of the drawn one."""
    from layoutgen.formulas.microstrip import kirschning_jansen_1982_permittivity
    from layoutgen.formulas.pour import microstrip_beside_pour

    inputs = inputs_from_data(SUPPLIED)
    result = pipeline.run_inputs(inputs.circuit, inputs.rules, correction=False)
    copper, line = result.artwork.line_copper["supply"], result.placement.lines["supply"]
    gaps = [math.inf if gap is None else gap / 508e3 for gap in (copper.gap_left, copper.gap_right)]
    assert max(gaps) > 1.0  # half a height is what the sizing asked for
    u, t = line.width / 508e3, 35.0 / 508.0
    section = microstrip_beside_pour(u, 3.55, t, *gaps)
    ee = kirschning_jansen_1982_permittivity(section.effective_permittivity, u, 3.55, 2.245e9 * 508e-6)
    sized = result.sized.lines["supply"]
    assert sized.impedance == pytest.approx(float(section.impedance), rel=1e-9)
    assert sized.effective_permittivity == pytest.approx(float(ee), rel=1e-9)
    assert line.angle == math.fsum(entry.angle for entry in line.budget)
    (own,) = (entry.angle for entry in line.budget if entry.cause == "line")
    assert own == pytest.approx(sized.beta * line.centre_line * 1e-9, rel=1e-9)


def test_pour_follows_a_coplanar_line_over_its_whole_length() -> None:
    """Would catch the wider distance of the microstrip lines beside it kept far into the coplanar line."""
    lines = {
        "left": {"nets": ["a", "m"], "impedance": "50 ohm", "length": "free"},
        "slab": {
            "nets": ["m", "n"],
            "kind": "grounded_coplanar",
            "gap": "0.3 mm",
            "impedance": "50 ohm",
            "angle": "40 deg",
        },
        "right": {"nets": ["n", "b"], "impedance": "50 ohm", "length": "free"},
    }
    inputs = inputs_from_data({**NOTCH, "ground": {}, "lines": lines})
    result = pipeline.run_inputs(inputs.circuit, inputs.rules, correction=False)
    assert [f.text for f in result.findings if f.counts] == []
    slab = result.placement.lines["slab"]
    (x0, y), (x1, _) = sorted(slab.path)
    pours = [s.outline.polygon() for s in result.artwork.shapes if s.role == "pour"]
    for side in (-1, 1):
        beside = shapely.box(x0 + 301_000, y, x1 - 301_000, y + side * (slab.width / 2 + 310_000))
        assert sum(beside.intersection(pour).area for pour in pours) > 0.9 * 10_000 * (x1 - x0 - 602_000)
        assert min(beside.distance(pour) for pour in pours) == 0.0


def test_bias_is_that_of_the_lengths_as_placed() -> None:
    """The voltage drop of a free supply line is known only once it is placed."""
    data = {
        **NOTCH,
        "ports": {
            "a": {"net": "a", "edge": "west", "current": "0.5 A"},
            "vd": {"net": "v", "kind": "dc", "voltage": "5 V", "edge": "north"},
        },
        "lines": {
            "left": {"nets": ["a", "m"], "impedance": "50 ohm", "angle": "40 deg"},
            "feed": {"nets": ["m", "n"], "impedance": "90 ohm", "angle": "90 deg"},
            "supply": {"nets": ["n", "v"], "length": "free"},
        },
        "parts": {
            "C1": {"kind": "capacitor", "nets": ["n", "gnd"], "value": "22 pF", "case": "0603"},
            "C2": {"kind": "capacitor", "nets": ["n", "gnd"], "value": "1 nF", "case": "0603"},
        },
    }
    inputs = inputs_from_data(data)
    result = pipeline.run_inputs(inputs.circuit, inputs.rules)
    supply = result.placement.lines["supply"]
    squares = supply.centre_line / supply.width
    drop = result.circuit.dc.voltages["v"] - result.circuit.dc.voltages["n"]
    assert drop == pytest.approx(0.5 * squares / (58e6 * 35e-6), rel=1e-6)


@pytest.mark.parametrize(
    ("changes", "er", "h", "t"),
    [
        ({}, 3.55, 508e-6, 35e-6),
        ({"height": "0.813 mm"}, 3.55, 813e-6, 35e-6),
        ({"relative_permittivity": 9.8}, 9.8, 508e-6, 35e-6),
        ({"copper_thickness": "70 um"}, 3.55, 508e-6, 70e-6),
    ],
    ids=["as it is", "height", "permittivity", "thickness"],
)
def test_the_drawing_follows_the_substrate(changes: dict[str, Any], er: float, h: float, t: float) -> None:
    """The drawn copper, put back into the formulas, has the impedance and angle asked for."""
    from layoutgen.formulas.microstrip import hammerstad_jensen_1980, kirschning_jansen_1982_permittivity

    data = {**NOTCH, "substrate": {**NOTCH["substrate"], **changes}}
    del data["ground"]
    inputs = inputs_from_data(data)
    result = pipeline.run_inputs(inputs.circuit, inputs.rules)
    drawn = [shape for shape in result.artwork.shapes if shape.role == "line"]
    assert len(drawn) == 3
    for shape in drawn:
        line = result.placement.lines[shape.origin.element]
        x0, y0, x1, y1 = shape.outline.polygon().bounds
        across = y1 - y0 if line.path[0][1] == line.path[-1][1] else x1 - x0
        u = across * 1e-9 / h
        impedance, ee, _ = hammerstad_jensen_1980(u, er, t / h)
        assert impedance == pytest.approx(50.0, abs=1e-3)
        at_frequency = kirschning_jansen_1982_permittivity(ee, u, er, 2.245e9 * h)
        (own,) = (entry.angle for entry in line.budget if entry.cause == "line")
        beta = 2.0 * math.pi * 2.245e9 * math.sqrt(float(at_frequency)) / 299_792_458.0
        assert beta * line.centre_line * 1e-9 == pytest.approx(own, abs=math.radians(0.001))
        assert math.fsum(entry.angle for entry in line.budget) == pytest.approx(
            line.angle, abs=math.radians(0.01)
        )


BARE_RULES: dict[str, Any] = {
    "format": 1,
    "name": "only what is required",
    "vias": {"diameter": "0.6 mm", "drill": "0.3 mm"},
    "holes": {"drills": ["0.3 mm"]},
}


@pytest.mark.parametrize(
    ("copper", "inset"),
    [({}, 300_000), ({"min_edge_distance": "0.2 mm"}, 200_000), ({"min_edge_distance": "0 mm"}, 0)],
)
def test_ports_paths_and_copper_end_at_one_distance_from_the_profile(
    copper: dict[str, Any], inset: int
) -> None:
    """A port placed at the profile whose copper is cut back by a habit is reported where there is none."""
    rules = {**BARE_RULES, "copper": copper}
    inputs = inputs_from_data({**NOTCH, "board": {}}, rules=rules)
    result = pipeline.run_inputs(inputs.circuit, inputs.rules, correction=False)
    assert [f.text for f in result.findings if f.counts] == []
    (shape,) = [s for s in result.artwork.shapes if s.role == "line" and s.origin.element == "left"]
    line, port = result.placement.lines["left"], result.placement.ports["a"]
    assert port.x == min(x for x, _ in line.path) == shape.outline.polygon().bounds[0] == inset


@pytest.mark.parametrize("path", sorted((ROOT / "examples").glob("*.toml")), ids=lambda path: path.stem)
def test_examples_run_without_errors(path: Path) -> None:
    """Each example is what a user starts from."""
    result = pipeline.run(path)
    assert [f.text for f in result.findings if f.counts] == []
    assert result.checks.not_checked


def test_pins_that_no_lengths_fit_are_refused() -> None:
    """The settled lengths are tried, but a pin a millimetre off must still end in a clear refusal."""
    data = tomllib.loads((ROOT / "examples" / "telemetry_driver.toml").read_text("utf-8"))
    data["layout"] = {
        "hints": {
            "C1": {"at": ["14 mm", "13.361 mm"], "heading": "east"},
            "Q1": {"at": ["36 mm", "13.361 mm"], "heading": "east"},
        }
    }
    with pytest.raises(InfeasibleError, match=r"Q1|C1"):
        _run_data(data)


def _run_data(data: dict[str, Any]) -> layoutgen.Result:
    inputs = inputs_from_data(data)
    return pipeline.run_inputs(inputs.circuit, inputs.rules)
