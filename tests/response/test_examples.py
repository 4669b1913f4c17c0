"""Every shipped example through all stages: its networks, its response, what drawing it has changed."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from layoutgen.artwork import Artwork, draw
from layoutgen.circuit import build_circuit
from layoutgen.placement import place
from layoutgen.reading import read_inputs
from layoutgen.response import respond
from layoutgen.response.drawn import drawn_network
from layoutgen.response.network import Network
from layoutgen.response.solve import solve
from layoutgen.response.trace import trace_copper
from layoutgen.response.wanted import wanted_network
from layoutgen.sizing import size_circuit

EXAMPLES = sorted((Path(__file__).parents[2] / "examples").glob("*.toml"))
MATCHED_WITHIN = {"telemetry_driver": 0.03}
"""Lossless |as-drawn - wanted| in the band, before any correction by lengths; 0.02 where not named."""


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


def test_drawing_it_has_changed_little(example: tuple[str, Artwork]) -> None:
    """The budgets hold what can be held: what is left comes from lumps, pads, gaps and vias."""
    name, artwork = example
    low, high = artwork.placement.sized.circuit.file.design.band
    f = np.linspace(low, high, 11)
    drawn = solve(drawn_network(artwork, f, {}, lossless=True))
    difference = np.max(np.abs(drawn - solve(wanted_network(artwork.placement, f, {}))))
    assert difference < MATCHED_WITHIN.get(name, 0.02)
