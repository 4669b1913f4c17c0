"""Boards that were not drawn here: copper without nets, roles or circuit behind it."""

from __future__ import annotations

import numpy as np
import pytest
import shapely

from layoutgen.checks import CheckResult, check_board
from layoutgen.checks.board import Board, Drill, Layer, Piece
from layoutgen.checks.limits import Limits
from layoutgen.checks.netgraph import clusters
from layoutgen.checks.rules import RULES
from layoutgen.reading import rules_from_data
from tests.checks.boards import RULES as BASE
from tests.checks.boards import changed

LIMITS = {
    "copper": {
        "min_width": "0.2 mm",
        "min_gap": "0.2 mm",
        "min_edge_distance": "0.3 mm",
        "min_island_area": "0.5 mm^2",
    },
    "holes": {"min_annular_ring": "0.1 mm", "min_edge_distance": "0.5 mm"},
}
MM = 1e6


def judged(*boxes: tuple[float, float, float, float], outline: bool = True) -> CheckResult:
    """Return the findings on boxes of copper [mm] with one plated hole in the first."""
    pieces = tuple(Piece(shapely.box(*(v * MM for v in b)), f"shape:{k}") for k, b in enumerate(boxes))
    board = Board(
        limits=Limits(rules_from_data(changed(BASE, LIMITS))),
        top=Layer("copper_top", pieces),
        bottom=Layer("copper_bottom", ()),
        drills=(Drill("hole:0", 5 * MM, 5 * MM, 0.3 * MM, True),),
        outline=shapely.box(0, 0, 30 * MM, 20 * MM) if outline else None,
    )
    return check_board(board)


def test_copper_without_nets_is_judged() -> None:
    """Catches rules that need nets, roles or a circuit where copper alone is enough."""
    result = judged((4, 4, 6, 6), (6.1, 4, 8, 6), (10, 4, 14, 4.1), (0.1, 8, 4, 10))
    found = {(f.rule, frozenset(f.items)) for f in result.findings}
    assert found == {
        ("copper.min_gap", frozenset(("shape:0", "shape:1"))),
        ("copper.min_width", frozenset(("shape:2",))),
        ("copper.min_island_area", frozenset(("shape:2",))),
        ("copper.min_edge_distance", frozenset(("shape:3", "board"))),
    }


def test_rules_on_the_circuit_are_listed() -> None:
    """Catches rules that could not run without the circuit read as passed."""
    reasons = {entry.rule: entry.reason for entry in judged((4, 4, 6, 6)).not_checked}
    for rule in RULES:
        if rule.needs_circuit:
            assert all("needs the circuit" in reasons[name] for name in rule.names)


@pytest.mark.parametrize("rule", ["copper.min_edge_distance", "holes.min_edge_distance"])
def test_no_profile_is_listed(rule: str) -> None:
    """Catches edge rules read as passed on a drawing without a profile."""
    reasons = {entry.rule: entry.reason for entry in judged((4, 4, 6, 6), outline=False).not_checked}
    assert reasons[rule] == "the drawing has no profile"


@pytest.mark.parametrize("seed", range(20))
def test_clusters_against_a_plain_search(seed: int) -> None:
    """Catches a cluster left in two or two joined by mistake."""
    rng = np.random.default_rng(seed)
    count = int(rng.integers(1, 60))
    pairs = rng.integers(0, count, size=(int(rng.integers(0, 80)), 2))
    near: dict[int, set[int]] = {k: {k} for k in range(count)}
    for a, b in pairs.tolist():
        joined = near[a] | near[b]
        for k in joined:
            near[k] = joined
    assert clusters(count, pairs).tolist() == [min(near[k]) for k in range(count)]
