"""Every shipped example as the command draws it: its networks, and how near it comes to its schematic."""

from __future__ import annotations

import math
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from layoutgen import pipeline
from layoutgen.response import CLOSE_ENOUGH, NOTE_RULE, Correction
from layoutgen.response.drawn import drawn_network
from layoutgen.response.network import Network
from layoutgen.response.solve import solve
from layoutgen.response.trace import trace_copper
from layoutgen.response.wanted import wanted_network
from layoutgen.writers import Result

FOLDER = Path(__file__).parents[2] / "examples"
EXAMPLES = sorted(path.stem for path in FOLDER.glob("*.toml"))
HELD_BY = {"equal_divider": "R1", "edge_coupled_band_pass": "pair_2"}
"""What is known to hold the band of an example above 0.02, whatever the lengths of its lines."""
MAY_MISS = {*HELD_BY, "alumina_filter", "balanced_stage", "corporate_feed_8"}


@pytest.fixture(scope="module", params=EXAMPLES)
def result(request: pytest.FixtureRequest, drawn_example: Callable[[str], Result]) -> Result:
    return drawn_example(request.param)


@pytest.fixture
def found(result: Result) -> Correction:
    assert result.response is not None and result.response.correction is not None
    return result.response.correction


def test_the_solver_equals_scikit_rf(
    result: Result, in_scikit_rf: Callable[[Network, np.ndarray], np.ndarray]
) -> None:
    f = np.linspace(1e9, 4e9, 5)
    for network in (wanted_network(result.placement, f, {}), drawn_network(result.artwork, f, {})):
        assert solve(network) == pytest.approx(in_scikit_rf(network, f), abs=1e-9)


def test_all_copper_is_joined(result: Result) -> None:
    """A pad beside its net's copper, a strip that ends short: the trace would have to tie or note it."""
    copper = trace_copper(result.artwork)
    assert copper.ties == () and copper.notes == ()


def test_passive_and_reciprocal(result: Result) -> None:
    response = result.response
    for s in (response.wanted, response.as_drawn):
        assert np.max(np.abs(s - np.swapaxes(s, 1, 2))) < 1e-11
        assert np.max(np.linalg.norm(s, 2, axis=(1, 2))) < 1.0 + 1e-11


def test_the_band_is_as_wanted(result: Result, found: Correction) -> None:
    """A lump, pad or via that lengths could make good and do not; the limit is the project's own."""
    assert found.after <= found.before
    if Path(result.circuit.file.file).stem not in MAY_MISS:
        assert found.after < CLOSE_ENOUGH


def test_lengths_do_what_they_can_and_the_rest_is_named(result: Result, found: Correction) -> None:
    """A band that is off without a word, or an element blamed for what other lengths would remove."""
    notes = [note for note in result.response.notes if note[0] == NOTE_RULE and "differ" in note[2]]
    if found.after <= CLOSE_ENOUGH:
        assert found.holders == () and notes == []
        return
    assert CLOSE_ENOUGH < found.reachable <= found.after < 1.1 * found.reachable
    first = found.holders[0]
    assert first.without < 0.8 * found.after
    assert first.element == HELD_BY.get(Path(result.circuit.file.file).stem, first.element)
    ((_, element, text),) = notes
    assert element == first.element
    assert f"{found.after:.3f}" in text and f"{first.without:.3f} without {first.cause}" in text


def test_every_example_was_worse(found: Correction) -> None:
    """Drawn with the schematic's bare lengths, junctions, pads and ends would show in every one."""
    assert found.unallowed > CLOSE_ENOUGH
    assert found.unallowed > 1.3 * found.after


def test_the_figures_are_those_of_the_drawing(result: Result, found: Correction) -> None:
    """Figures of another network, or of another drawing: worked out here from the networks alone."""
    artwork = result.artwork
    f = np.linspace(*result.circuit.file.design.band, 21)
    lossless = solve(drawn_network(artwork, f, {}, lossless=True))
    wanted = solve(wanted_network(artwork.placement, f, {}))
    assert found.after == pytest.approx(np.max(np.abs(lossless - wanted)), abs=1e-12)
    lossy = solve(drawn_network(artwork, f, {}))
    assert found.losses == pytest.approx(np.max(np.abs(lossy - lossless)), abs=1e-12)


def test_every_budget_still_adds_up(result: Result, found: Correction) -> None:
    """A correction that is drawn but not in the budget, or the other way round."""
    for name, line in (result.placement.lines | result.placement.pairs).items():
        assert math.fsum(entry.angle for entry in line.budget) == pytest.approx(line.angle, abs=1e-9)
        entries = [entry.angle for entry in line.budget if entry.cause == "response_correction"]
        assert entries == ([found.angles[name]] if name in found.angles else [])


def test_it_settled(result: Result) -> None:
    """A note between the stages says when corrected lengths had not come to rest, or could not be drawn."""
    assert [note for note in result.notes if note[0] == NOTE_RULE] == []


def test_the_amplifier_was_worse_before() -> None:
    """The correction must do something: both matching networks miss 0.02 as their budgets leave them."""
    plain = pipeline.run(FOLDER / "telemetry_driver.toml", correction=False).response.correction
    assert plain.angles == {} and plain.after == plain.before > CLOSE_ENOUGH
    assert plain.reachable < CLOSE_ENOUGH
