"""Any copper graph gives a passive network: junctions, negative lengths and vias may not amplify."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layoutgen.artwork import Artwork
from layoutgen.placement import Bend
from layoutgen.response.copper import Copper, Joint, JointArm, PairCopper, Piece, Post
from layoutgen.response.drawn import drawn_network
from layoutgen.response.solve import solve

SWEEP = np.array([0.05e9, 0.7e9, 2.245e9, 3.9e9, 9e9, 17e9])
WIDTHS = st.floats(0.13e-3, 9e-3)
LENGTHS = st.floats(0.02e-3, 40e-3)
GAPS = st.one_of(st.just(math.inf), st.floats(0.15e-3, 4e-3))
ENDS = st.sampled_from(["joint", "open", "ground"])


@st.composite
def coppers(draw: Callable[[st.SearchStrategy[Any]], Any]) -> Copper:
    """Draw a tree of joints with two to four arms at right angles; leaves are open, grounded or ports."""
    joints = [Joint("n", "n at 0", 0.0, 0.0)]
    pieces: list[Piece] = []
    posts: list[Post] = []
    free = {0: [0.0, 90.0, 180.0, 270.0]}
    for _ in range(draw(st.integers(1, 8))):
        roomy = sorted(k for k, left in free.items() if left)
        if not roomy:
            break
        at = draw(st.sampled_from(roomy))
        heading = free[at].pop(draw(st.integers(0, len(free[at]) - 1)))
        width, kind = draw(WIDTHS), draw(ENDS)
        bends = (Bend(1, 90.0, draw(st.floats(0.0, 95.0))),) * draw(st.integers(0, 2))
        far = f"end of {len(pieces)}"
        if kind == "joint":
            far = f"n at {len(joints)}"
            joints.append(Joint("n", far, 0.0, 0.0))
            free[len(joints) - 1] = [a for a in (0.0, 90.0, 180.0, 270.0) if a != (heading + 180.0) % 360.0]
            joints[-1].arms.append(JointArm(len(pieces), (heading + 180.0) % 360.0, width, True))
        elif kind == "ground":
            axes = tuple((0.8e-3 * k, 0.0) for k in range(draw(st.integers(1, 3))))
            posts.append(Post(far, axes, draw(st.floats(0.1e-3, 0.3e-3)), width))
        joints[at].arms.append(JointArm(len(pieces), heading, width, draw(st.booleans())))
        gaps = (draw(GAPS), draw(GAPS))
        pieces.append(Piece(joints[at].node, far, width, gaps, draw(LENGTHS), bends, kind == "open"))
    ports = {"p1": joints[0].node, "p2": joints[-1].node}
    return Copper(tuple(pieces), tuple(joints), tuple(posts), (), {}, {}, ports, {}, (), ())


@pytest.fixture(scope="module")
def artwork(artwork_of: Callable[..., Artwork], ports: dict[str, Any]) -> Artwork:
    """Return any artwork with two ports: the board that the drawn copper lies on."""
    line = {"nets": ["in", "out"], "impedance": "50 ohm", "length": "free"}
    return artwork_of({"ports": ports, "lines": {"t": line}})


@given(coppers())
@settings(max_examples=80, deadline=None)
def test_passive_and_reciprocal(artwork: Artwork, copper: Copper) -> None:
    s = solve(drawn_network(artwork, SWEEP, {}, copper=copper))
    assert np.all(np.isfinite(s))
    assert np.max(np.linalg.norm(s, 2, axis=(1, 2))) < 1.0 + 1e-9
    assert np.max(np.abs(s - np.swapaxes(s, 1, 2))) < 1e-9


@given(coppers())
@settings(max_examples=40, deadline=None)
def test_lossless_is_unitary(artwork: Artwork, copper: Copper) -> None:
    s = solve(drawn_network(artwork, SWEEP, {}, lossless=True, copper=copper))
    assert np.max(np.abs(np.swapaxes(s.conj(), 1, 2) @ s - np.eye(2))) < 1e-9


@st.composite
def pairs(draw: Callable[[st.SearchStrategy[Any]], Any]) -> Copper:
    """Draw two coupled pairs in a row with stretches at all corners: ports, open ends, grounded ends."""
    held: list[PairCopper] = []
    pieces: list[Piece] = []
    posts: list[Post] = []
    for number in range(2):
        width, pour = draw(st.floats(0.15e-3, 3e-3)), draw(GAPS)
        nodes = tuple(f"corner {k} of {number}" for k in range(4))
        held.append(PairCopper(nodes, width, draw(st.floats(0.1e-3, 3e-3)), pour, draw(LENGTHS)))
        for k, node in enumerate(nodes):
            far = "p1" if (number, k) == (0, 0) else "p2" if (number, k) == (1, 3) else f"end {k} of {number}"
            if (number, k) in ((0, 3), (1, 0)):
                far = "middle"
            kind = draw(ENDS) if far.startswith("end") else "joint"
            if kind == "ground":
                posts.append(Post(far, ((0.0, 0.0),), 0.15e-3, width))
            length = draw(st.floats(-2e-3, 2e-3))
            pieces.append(Piece(node, far, width, (pour, pour), length, (), kind == "open"))
    ports = {"p1": "p1", "p2": "p2"}
    return Copper(tuple(pieces), (), tuple(posts), tuple(held), {}, {}, ports, {}, (), ())


@given(pairs())
@settings(max_examples=60, deadline=None)
def test_pairs_are_passive_and_reciprocal(artwork: Artwork, copper: Copper) -> None:
    """Modes with losses of their own, planes moved back behind pads."""
    s = solve(drawn_network(artwork, SWEEP, {}, copper=copper))
    assert np.all(np.isfinite(s))
    assert np.max(np.linalg.norm(s, 2, axis=(1, 2))) < 1.0 + 1e-9
    assert np.max(np.abs(s - np.swapaxes(s, 1, 2))) < 1e-9


@given(pairs())
@settings(max_examples=30, deadline=None)
def test_lossless_pairs_are_unitary(artwork: Artwork, copper: Copper) -> None:
    s = solve(drawn_network(artwork, SWEEP, {}, lossless=True, copper=copper))
    assert np.max(np.abs(np.swapaxes(s.conj(), 1, 2) @ s - np.eye(2))) < 1e-9
