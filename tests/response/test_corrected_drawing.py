"""The pipeline's side of the response: corrected drawings, what happens when they fail, data beside code."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import pytest

from layoutgen import pipeline
from layoutgen.artwork import Artwork
from layoutgen.errors import InfeasibleError
from layoutgen.reading import Inputs, inputs_from_data
from layoutgen.response import NOTE_RULE, LengthFit
from layoutgen.writers import Result

BASE: dict[str, Any] = {
    "format": 1,
    "design": {"title": "Gauge link", "frequency": "2.245 GHz", "band": ["2.20 GHz", "2.29 GHz"]},
    "substrate": {
        "relative_permittivity": 3.55,
        "loss_tangent": 0.0027,
        "height": "0.508 mm",
        "copper_thickness": "35 um",
    },
    "board": {"rules": "two-layer-standard"},
    "ports": {"p": {"net": "in", "edge": "west"}, "q": {"net": "out", "edge": "east"}},
}


def by_angle(near: str, far: str, impedance: float, angle: float) -> dict[str, Any]:
    nets = [near, far] if far else [near]
    return {"nets": nets, "impedance": f"{impedance} ohm", "angle": f"{angle} deg"}


@pytest.fixture(scope="module")
def stubbed() -> Inputs:
    lines = {
        "a": by_angle("in", "m", 50, 40),
        "b": by_angle("m", "o", 50, 50),
        "stub": by_angle("m", "", 30, 60),
        "launch": {"nets": ["o", "out"], "impedance": "50 ohm", "length": "free"},
    }
    return inputs_from_data({**BASE, "lines": lines})


def fits(monkeypatch: pytest.MonkeyPatch, fit: Callable[..., LengthFit]) -> None:
    """Let the pipeline correct lengths by another fit."""
    monkeypatch.setattr(pipeline, "correct_lengths", fit)


class TestCorrection:
    def test_it_is_drawn(self, stubbed: Inputs) -> None:
        """The correction worked out but never drawn, or drawn but not reported."""
        plain = pipeline.run_inputs(stubbed.circuit, stubbed.rules, correction=False)
        result = pipeline.run_inputs(stubbed.circuit, stubbed.rules)
        found = result.response.correction
        assert found.after < 0.2 * found.before
        assert found.before == pytest.approx(plain.response.correction.after, abs=1e-3)
        moved = plain.placement.lines["stub"].centre_line - result.placement.lines["stub"].centre_line
        beta = result.sized.lines["stub"].beta
        assert moved * 1e-9 * beta == pytest.approx(found.angles["stub"], abs=2e-3)
        assert "correction" in result.seconds and "correction" not in plain.seconds

    def test_it_never_makes_it_worse(self, stubbed: Inputs, monkeypatch: pytest.MonkeyPatch) -> None:
        """A fit that has gone wrong: the lengths of the budgets stand, with a note."""
        fits(monkeypatch, lambda artwork, sized, folder: LengthFit({"stub": 0.3}, 0.5, 0.1, 0.5))
        result = pipeline.run_inputs(stubbed.circuit, stubbed.rules)
        plain = pipeline.run_inputs(stubbed.circuit, stubbed.rules, correction=False)
        assert result.response.correction.angles == {}
        assert result.placement.lines["stub"].path == plain.placement.lines["stub"].path
        (note,) = result.notes
        assert note[0] == NOTE_RULE and "0.5000" in note[2]

    def test_lengths_that_cannot_be_drawn_are_left(
        self, stubbed: Inputs, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        """No placement with corrected lengths must not lose the placement without."""
        fits(monkeypatch, lambda artwork, sized, folder: LengthFit({"stub": 1.2}, 0.1, 0.1, 0.01))
        result = pipeline.run_inputs(stubbed.circuit, stubbed.rules)
        assert result.response.correction.angles == {}
        (note,) = result.notes
        assert "no placement with corrected lengths" in note[2]

    def test_an_error_without_correction_is_the_users(self, monkeypatch: pytest.MonkeyPatch) -> None:
        """Caught as if the correction were to blame, it would be searched for twice."""
        data = {**BASE, "lines": {"a": by_angle("in", "out", 50, 200)}}
        data["board"] = {"rules": "two-layer-standard", "size": ["10 mm", "10 mm"]}
        inputs = inputs_from_data(data)
        calls = []
        real = pipeline.place
        monkeypatch.setattr(pipeline, "place", lambda *args: calls.append(args) or real(*args))
        with pytest.raises(InfeasibleError):
            pipeline.run_inputs(inputs.circuit, inputs.rules)
        assert len(calls) == 1

    def test_it_says_when_it_does_not_settle(self, stubbed: Inputs, monkeypatch: pytest.MonkeyPatch) -> None:
        angles = iter([0.01, 0.02, 0.03, 0.04, 0.05, 0.06])
        fits(
            monkeypatch,
            lambda artwork, sized, folder: LengthFit({"stub": next(angles)}, 0.05, 0.06, 0.01),
        )
        result = pipeline.run_inputs(stubbed.circuit, stubbed.rules)
        (note,) = result.notes
        assert "not settled after 4 drawings" in note[2] and "0.0100" in note[2]

    def test_sizes_that_go_round_are_drawn_once(
        self, stubbed: Inputs, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        """Two states of the pour that call for each other: a fourth draft would be the second again."""
        real, asked = pipeline.size_circuit, []

        def sizing(circuit: Any, gaps: Any = None) -> Any:
            asked.append(gaps)
            sized = real(circuit)
            more = (0.0, 5e-6, 0.0, 5e-6, 0.0, 5e-6)[len(asked) - 1]
            lines = {name: replace(line, width=line.width + more) for name, line in sized.lines.items()}
            return replace(sized, lines=lines)

        monkeypatch.setattr(pipeline, "size_circuit", sizing)
        drawn: list[str] = []
        for name in ("sketch", "complete"):
            made = getattr(pipeline, name)
            monkeypatch.setattr(pipeline, name, lambda a, n=name, f=made: drawn.append(n) or f(a))
        pipeline.run_inputs(stubbed.circuit, stubbed.rules, correction=False)
        assert drawn == ["sketch", "sketch", "complete"]

    def test_what_the_board_takes_back_does_not_run_away(self) -> None:
        """All lengths given, the board in steps of 0.5 mm: a strip makes up for whatever a line gives.

        The nearest of the drawings stands, with a note; the last one need not be the nearest.
        """
        lines = {
            "a": by_angle("in", "m", 50, 40),
            "b": by_angle("m", "out", 50, 50),
            "stub": by_angle("m", "", 30, 60),
        }
        inputs = inputs_from_data({**BASE, "lines": lines})
        plain = pipeline.run_inputs(inputs.circuit, inputs.rules, correction=False).response.correction
        result = pipeline.run_inputs(inputs.circuit, inputs.rules)
        found = result.response.correction
        assert found.after <= min(found.before, plain.after)
        assert any("not settled" in note[2] for note in result.notes)


class TestLoops:
    """Like lines of a loop that was given one cross-section keep it from drawing to drawing."""

    @pytest.fixture
    def drawn(self, drawn_example: Callable[[str], Result]) -> Artwork:
        """Return a hybrid one of whose lines has got pour nearer than the line opposite."""
        artwork = drawn_example("branch_line_hybrid").artwork
        copper = dict(artwork.line_copper)
        copper["across_1"] = replace(copper["across_1"], gap_left=400_000)
        return replace(artwork, line_copper=copper)

    def test_the_pour_asks_for_sizes_alike(self, drawn: Artwork) -> None:
        own, none = pipeline._sizes_by_pour(drawn, False)
        assert own.lines["across_1"].width != own.lines["across_2"].width and none == ()
        alike, notes = pipeline._sizes_by_pour(drawn, True)
        assert alike.lines["across_1"].width == alike.lines["across_2"].width
        assert "across_1" in {note[1] for note in notes}

    def test_it_is_seen_where_a_placement_has_done_it(self, drawn: Artwork) -> None:
        """Sizes that the placement had to change, and the next drawing takes back: it would never settle."""
        own, _ = pipeline._sizes_by_pour(drawn, False)
        draft = SimpleNamespace(artwork=drawn)
        clock = pipeline._Clock(lambda stage: None)
        asked = pipeline._asked(own, draft, clock, None, False)
        assert asked.alike
        assert asked.again.lines["across_1"].width == asked.again.lines["across_2"].width
        assert not pipeline._asked(drawn.placement.sized, draft, clock, None, False).alike
        assert pipeline._asked(drawn.placement.sized, draft, clock, None, True).alike


class TestPorts:
    def test_terminations_alone_are_ports(self) -> None:
        """A bias board for a device has no RF port, but its pins see something."""
        data = {
            **BASE,
            "ports": {"vd": {"kind": "dc", "net": "vd", "voltage": "5 V", "edge": "north"}},
            "lines": {
                "drain": by_angle("d", "gnd", 50, 60),
                "gate": by_angle("g", "gnd", 50, 60),
                "feed": by_angle("e", "vd", 90, 90),
            },
            "parts": {
                "Q1": {
                    "kind": "transistor",
                    "footprint": "flange",
                    "pins": {"gate": "g", "drain": "d", "source": "gnd"},
                    "terminations": {"gate": "9-6j ohm", "drain": "7+4j ohm"},
                },
                "C1": {"kind": "capacitor", "nets": ["d", "e"], "value": "10 pF", "case": "0603"},
            },
            "footprints": {
                "flange": {
                    "cutout": {"size": ["4.4 mm", "10.4 mm"], "at": ["0 mm", "0 mm"]},
                    "pads": {
                        "gate": {"at": ["-3.6 mm", "0 mm"], "size": ["2.4 mm", "2 mm"], "heading": "west"},
                        "drain": {"at": ["3.6 mm", "0 mm"], "size": ["2.4 mm", "2 mm"], "heading": "east"},
                        "source": {"ground": "flange"},
                    },
                }
            },
        }
        inputs = inputs_from_data(data)
        response = pipeline.run_inputs(inputs.circuit, inputs.rules).response
        assert response is not None and response.ports == ("Q1.gate", "Q1.drain")
        assert [pin.pin for pin in response.device.pins] == ["Q1.gate", "Q1.drain"]

    def test_no_ports_no_response(self) -> None:
        data = {
            **BASE,
            "ports": {
                "v": {"kind": "dc", "net": "v", "voltage": "5 V", "edge": "west"},
                "w": {"kind": "dc", "net": "w", "voltage": "5 V", "edge": "east"},
            },
            "lines": {"t": {"nets": ["v", "w"], "length": "free"}},
        }
        inputs = inputs_from_data(data)
        assert pipeline.run_inputs(inputs.circuit, inputs.rules).response is None


def test_data_files_of_a_circuit_built_in_code(tmp_path: Path) -> None:
    """Its records have no folder: data are looked for where the caller says, not where the program runs."""
    (tmp_path / "r.s2p").write_text("# GHz S RI R 50\n1 0.1 0 0.9 0 0.9 0 0.1 0\n4 0.1 0 0.9 0 0.9 0 0.1 0\n")
    data = {
        **BASE,
        "lines": {"a": by_angle("in", "c", 50, 30), "b": by_angle("d", "out", 50, 30)},
        "parts": {
            "R1": {"kind": "resistor", "nets": ["c", "d"], "value": "10 ohm", "case": "0603", "data": "r.s2p"}
        },
    }
    inputs = inputs_from_data(data, folder=tmp_path)
    result = pipeline.run_inputs(inputs.circuit, inputs.rules, folder=tmp_path)
    assert abs(result.response.wanted_at_spots[1, 1, 0]) == pytest.approx(0.9, abs=1e-9)
