"""Every shipped example through all stages: its networks, its response, what drawing it has changed."""

from __future__ import annotations

import math
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from layoutgen import pipeline
from layoutgen.artwork import Artwork, draw
from layoutgen.circuit import build_circuit
from layoutgen.placement import place
from layoutgen.reading import read_inputs
from layoutgen.response import CLOSE_ENOUGH, respond
from layoutgen.response.drawn import drawn_network
from layoutgen.response.network import Network
from layoutgen.response.solve import solve
from layoutgen.response.trace import trace_copper
from layoutgen.response.wanted import wanted_network
from layoutgen.sizing import size_circuit
from layoutgen.writers import Result

HELD = ("quarter_wave_transformer", "shorted_stub_tee", "stub_notch", "telemetry_driver")
"""Examples whose drawn response is held to the project's limit; loops and pairs are not yet."""
EXAMPLES = [Path(__file__).parents[2] / "examples" / f"{name}.toml" for name in HELD]


@pytest.fixture(scope="module", params=EXAMPLES, ids=lambda path: path.stem)
def example(request: pytest.FixtureRequest) -> tuple[str, Artwork]:
    inputs = read_inputs(request.param)
    circuit = build_circuit(inputs.circuit, inputs.rules)
    return request.param.stem, draw(place(size_circuit(circuit)))


def test_the_solver_equals_scikit_rf(
    example: tuple[str, Artwork], in_scikit_rf: Callable[[Network, np.ndarray], np.ndarray]
) -> None:
    f = np.linspace(1e9, 4e9, 7)
    artwork = example[1]
    for network in (wanted_network(artwork.placement, f, {}), drawn_network(artwork, f, {})):
        assert solve(network) == pytest.approx(in_scikit_rf(network, f), abs=1e-9)


def test_all_copper_is_joined(example: tuple[str, Artwork]) -> None:
    """A pad beside its net's copper, a strip that ends short: the trace would have to tie or note it."""
    copper = trace_copper(example[1])
    assert copper.ties == () and copper.notes == ()


def test_passive_and_reciprocal(example: tuple[str, Artwork]) -> None:
    response = respond(example[1])
    for s in (response.wanted, response.as_drawn):
        assert np.max(np.abs(s - np.swapaxes(s, 1, 2))) < 1e-11
        assert np.max(np.linalg.norm(s, 2, axis=(1, 2))) < 1.0 + 1e-11


class TestCorrected:
    """The examples as the command draws them, with their lengths corrected."""

    @pytest.fixture(scope="class", params=EXAMPLES, ids=lambda path: path.stem)
    @classmethod
    def result(cls, request: pytest.FixtureRequest) -> Result:
        return pipeline.run(request.param)

    def test_the_band_is_as_wanted(self, result: Result) -> None:
        """A lump, pad or via that lengths could make good and do not; the limit is the project's own."""
        found = result.response.correction
        assert found.after < CLOSE_ENOUGH and found.holders == ()
        assert found.after <= found.before

    def test_the_figures_are_those_of_the_drawing(self, result: Result) -> None:
        """Figures of another network, or of another drawing: worked out here from the networks alone."""
        artwork = result.artwork
        f = np.linspace(*result.circuit.file.design.band, 21)
        lossless = solve(drawn_network(artwork, f, {}, lossless=True))
        wanted = solve(wanted_network(artwork.placement, f, {}))
        found = result.response.correction
        assert found.after == pytest.approx(np.max(np.abs(lossless - wanted)), abs=1e-12)
        lossy = solve(drawn_network(artwork, f, {}))
        assert found.losses == pytest.approx(np.max(np.abs(lossy - lossless)), abs=1e-12)

    def test_every_budget_still_adds_up(self, result: Result) -> None:
        """A correction that is drawn but not in the budget, or the other way round."""
        found = result.response.correction.angles
        for name, line in result.placement.lines.items():
            assert math.fsum(entry.angle for entry in line.budget) == pytest.approx(line.angle, abs=1e-9)
            entries = [entry.angle for entry in line.budget if entry.cause == "response_correction"]
            assert entries == ([found[name]] if name in found else [])

    def test_it_settled(self, result: Result) -> None:
        """Notes between the stages say when widths or lengths had not come to rest."""
        assert result.notes == ()


def test_the_amplifier_was_worse_before() -> None:
    """The correction must do something: both matching networks miss 0.02 as their budgets leave them."""
    amplifier = next(path for path in EXAMPLES if path.stem == "telemetry_driver")
    plain = pipeline.run(amplifier, correction=False).response.correction
    assert plain.angles == {} and plain.after == plain.before > CLOSE_ENOUGH
    assert plain.reachable < CLOSE_ENOUGH
