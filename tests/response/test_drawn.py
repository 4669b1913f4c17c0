"""The as-drawn network against the schematic it was drawn from, cause by cause, without losses.

At the design frequency a length budget must have made good everything that it can hold, so as-drawn equals
wanted up to what is lumped; each test puts that lump into the schematic and asks for equality.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from layoutgen.artwork import Artwork, LineCopper
from layoutgen.formulas.tees import tee
from layoutgen.geometry import Ring
from layoutgen.placement import PlacedPart
from layoutgen.response.chain import cascade, line, series
from layoutgen.response.drawn import drawn_network
from layoutgen.response.junctions import post_impedance
from layoutgen.response.medium import medium_of
from layoutgen.response.network import GROUND, Shunt, between, coupled_pair
from layoutgen.response.solve import solve
from layoutgen.response.trace import trace_copper
from layoutgen.response.wanted import wanted_network

MAKER = Callable[..., Artwork]
PORTS = dict[str, Any]

F0 = np.array([2.245e9])
SWEEP = np.linspace(1e9, 4e9, 31)
HEIGHT, THICKNESS = 0.508e-3, 35e-6
RESISTOR = {"kind": "resistor", "nets": ["c", "d"], "value": "5 ohm", "case": "0603"}
LAUNCH = {"nets": ["o", "out"], "impedance": "50 ohm", "length": "free"}


def by_angle(near: str, far: str, impedance: float, angle: float) -> dict[str, Any]:
    """Return a line; an empty far net is an open end."""
    nets = [near, far] if far else [near]
    return {"nets": nets, "impedance": f"{impedance} ohm", "angle": f"{angle} deg"}


def through(impedance: float, angle: float) -> dict[str, Any]:
    """Return a line from port to port; a free one carries it on to the board's edge."""
    return {"t": by_angle("in", "o", impedance, angle), "launch": LAUNCH}


def stubbed(stub: dict[str, Any]) -> dict[str, Any]:
    """Return two lines of 50 ohm with a stub between them."""
    return {"a": by_angle("in", "m", 50, 40), "b": by_angle("m", "o", 50, 50), "stub": stub, "launch": LAUNCH}


def lossless(artwork: Artwork, frequencies: np.ndarray = F0) -> np.ndarray:
    return solve(drawn_network(artwork, frequencies, {}, lossless=True))


def wanted(artwork: Artwork, *shunts: Shunt) -> np.ndarray:
    return solve(replace(wanted_network(artwork.placement, F0, {}), shunts=shunts))


def tee_susceptance(artwork: Artwork, *lines: str) -> Shunt:
    """Return the lump that a tee at net ``m`` leaves."""
    u = [artwork.placement.sized.lines[name].width / HEIGHT for name in lines]
    return Shunt.susceptance("m", tee(*u, 3.55, F0 * HEIGHT, THICKNESS / HEIGHT).susceptance)


class TestLines:
    def test_a_straight_line_is_the_ideal_line(self, artwork_of: MAKER, ports: PORTS) -> None:
        """Any difference of width, gap, permittivity or length between sizing and response shows here."""
        artwork = artwork_of({"ports": ports, "lines": through(70, 77)})
        assert lossless(artwork) == pytest.approx(wanted(artwork), abs=2e-6)

    def test_bends_are_allowed_for(self, artwork_of: MAKER, ports: PORTS) -> None:
        """A bend's change of length taken twice, or not at all, is about 1.3 deg, 0.02 in S."""
        turned = {**ports, "p2": {**ports["p2"], "edge": "north"}}
        hints = {"t": {"route": ["6 mm", "left", "*"]}}
        artwork = artwork_of({"ports": turned, "lines": through(50, 100), "layout": {"hints": hints}})
        assert len(artwork.placement.lines["t"].bends) == 1
        assert lossless(artwork) == pytest.approx(wanted(artwork), abs=2e-6)

    def test_the_pour_it_got_counts(self, artwork_of: MAKER, ports: PORTS) -> None:
        """A line whose pour came nearer than meant has a lower impedance in the as-drawn response."""
        artwork = artwork_of({"ports": ports, "lines": through(50, 90)})
        near = LineCopper(name="t", gap_left=300_000, gap_right=300_000)
        squeezed = replace(artwork, line_copper={"t": near})
        medium = medium_of(artwork.placement.sized.circuit, F0, lossless=True)
        z = float(medium.line(artwork.placement.lines["t"].width * 1e-9, 3e-4, 3e-4).impedance)
        assert z < 47.0
        expected = (2500 - z * z) / (2500 + z * z)
        assert abs(lossless(squeezed)[0, 0, 0]) == pytest.approx(expected, abs=2e-3)
        assert abs(lossless(artwork)[0, 0, 0]) < 1e-5

    def test_dispersion_and_loss(self, artwork_of: MAKER, ports: PORTS) -> None:
        """Off the design frequency: phase by the permittivity there, loss by conductor and dielectric."""
        artwork = artwork_of({"ports": ports, "lines": through(50, 90)})
        f = np.array([4e9])
        medium = medium_of(artwork.placement.sized.circuit, f)
        lines = artwork.placement.lines
        gap = artwork.placement.sized.lines["t"].pour_gap
        k = medium.line(lines["t"].width * 1e-9, gap, gap).wave_number[0]
        length = (lines["t"].centre_line + lines["launch"].centre_line) * 1e-9
        s21 = solve(drawn_network(artwork, f, {}))[0, 1, 0]
        assert s21 == pytest.approx(np.exp(-1j * k * length), abs=1e-4)
        assert 0.2 < -k.imag < 0.6
        static = medium.line(lines["t"].width * 1e-9, gap, gap)
        ratio = (
            static.wave_number.real
            / medium_of(artwork.placement.sized.circuit, F0)
            .line(lines["t"].width * 1e-9, gap, gap)
            .wave_number.real
        )
        assert ratio[0] > 4.0 / 2.245 * 1.001

    def test_lines_by_length_are_wanted_as_drawn(self, artwork_of: MAKER, ports: PORTS) -> None:
        """The schematic gives them no angle, so the response must not show a difference of angle."""
        lines = {"a": {"nets": ["in", "o"], "width": "1.5 mm", "length": "9 mm"}, "launch": LAUNCH}
        artwork = artwork_of({"ports": ports, "lines": lines})
        assert lossless(artwork) == pytest.approx(wanted(artwork), abs=2e-6)

    def test_the_wanted_line_is_proportional_to_frequency(self, artwork_of: MAKER, ports: PORTS) -> None:
        lines = {"t": by_angle("in", "out", 70, 90)}
        artwork = artwork_of({"ports": ports, "lines": lines})
        twice = solve(wanted_network(artwork.placement, 2.0 * F0, {}))
        assert twice[0] == pytest.approx(np.array([[0.0, -1.0], [-1.0, 0.0]]), abs=1e-12)

    def test_a_shorted_stub_by_hand(self, artwork_of: MAKER, ports: PORTS) -> None:
        """Nets, ground and orientation of the wanted network, against its own chain matrices."""
        lines = {"t": by_angle("in", "out", 50, 60), "stub": by_angle("out", "gnd", 60, 50)}
        artwork = artwork_of({"ports": ports, "lines": lines})
        network = wanted_network(artwork.placement, F0, {})
        by_hand = (
            between("in", "out", line(50.0, np.radians([60.0]))),
            between("out", GROUND, cascade(line(60.0, np.radians([50.0])), series(0.0))),
        )
        assert solve(network) == pytest.approx(solve(replace(network, branches=by_hand)), abs=1e-12)


class TestJunctions:
    def test_a_step_is_allowed_for(self, artwork_of: MAKER, ports: PORTS) -> None:
        lines = {"a": by_angle("in", "m", 50, 40), "b": by_angle("m", "o", 25, 40), "launch": LAUNCH}
        artwork = artwork_of({"ports": ports, "lines": lines})
        assert lossless(artwork) == pytest.approx(wanted(artwork), abs=2e-6)

    def test_a_tee_leaves_its_susceptance(self, artwork_of: MAKER, ports: PORTS) -> None:
        """Wrong roles of the arms, planes of the wrong sign or a lost susceptance: none passes 2e-6."""
        artwork = artwork_of({"ports": ports, "lines": stubbed(by_angle("m", "", 35, 35))})
        lump = tee_susceptance(artwork, "a", "b", "stub")
        assert lossless(artwork) == pytest.approx(wanted(artwork, lump), abs=2e-6)
        assert np.max(np.abs(wanted(artwork) - wanted(artwork, lump))) > 1e-3

    def test_a_grounded_stub_has_the_inductance_of_its_vias(self, artwork_of: MAKER, ports: PORTS) -> None:
        """The budget shortens the stub by the vias' angle; the network must hold the same vias."""
        artwork = artwork_of({"ports": ports, "lines": stubbed(by_angle("m", "gnd", 60, 60))})
        posts = trace_copper(artwork).posts
        assert len(posts) == 1 and len(posts[0].axes) == 2
        lump = tee_susceptance(artwork, "a", "b", "stub")
        assert lossless(artwork) == pytest.approx(wanted(artwork, lump), abs=2e-6)

    def test_vias_side_by_side_share_less_than_in_half(self, artwork_of: MAKER, ports: PORTS) -> None:
        artwork = artwork_of({"ports": ports, "lines": stubbed(by_angle("m", "gnd", 60, 60))})
        medium = medium_of(artwork.placement.sized.circuit, F0, lossless=True)
        two = trace_copper(artwork).posts[0]
        one = replace(two, axes=two.axes[:1])
        ratio = (post_impedance(two, medium) / post_impedance(one, medium)).real[0]
        assert 0.5 < ratio < 0.8

    def test_vias_lose_only_where_losses_are_asked_for(self, artwork_of: MAKER, ports: PORTS) -> None:
        artwork = artwork_of({"ports": ports, "lines": stubbed(by_angle("m", "gnd", 60, 60))})
        circuit, post = artwork.placement.sized.circuit, trace_copper(artwork).posts[0]
        assert post_impedance(post, medium_of(circuit, F0)).real[0] > 1e-3
        assert post_impedance(post, medium_of(circuit, F0, lossless=True)).real[0] == 0.0


class TestPads:
    def test_a_part_stands_between_the_pads_inner_edges(self, artwork_of: MAKER, ports: PORTS) -> None:
        """Lines wider than the pads: nothing but the gap under the part may differ from the schematic."""
        lines = {"a": by_angle("in", "c", 45, 30), "b": by_angle("d", "o", 45, 30), "launch": LAUNCH}
        artwork = artwork_of({"ports": ports, "lines": lines, "parts": {"R1": RESISTOR}})
        copper = trace_copper(artwork)
        assert copper.gaps["R1"].gap == pytest.approx(0.7e-3, abs=1e-6)
        network = drawn_network(artwork, F0, {}, lossless=True, copper=replace(copper, gaps={}))
        assert solve(network) == pytest.approx(wanted(artwork), abs=2e-6)
        difference = np.max(np.abs(lossless(artwork) - wanted(artwork)))
        assert 1e-3 < difference < 0.03

    def test_a_pad_wider_than_its_line_is_a_piece_of_its_own(self, artwork_of: MAKER, ports: PORTS) -> None:
        lines = {"a": by_angle("in", "c", 90, 30), "b": by_angle("d", "o", 90, 30), "launch": LAUNCH}
        artwork = artwork_of({"ports": ports, "lines": lines, "parts": {"R1": RESISTOR}})
        pads = [piece for piece in trace_copper(artwork).pieces if piece.far.startswith("pad R1")]
        assert [round(piece.width * 1e3, 3) for piece in pads] == [0.95, 0.95]
        assert [round(piece.length * 1e3, 3) for piece in pads] == [0.85, 0.85]
        assert 1e-3 < np.max(np.abs(lossless(artwork) - wanted(artwork))) < 0.1

    def test_each_bank_part_has_its_own_axis_and_vias(self, artwork_of: MAKER, ports: PORTS) -> None:
        """Three capacitors at one point, or on common vias, would resonate otherwise."""
        capacitor = {"kind": "capacitor", "nets": ["bank", "gnd"], "case": "0603"}
        feed = {"feed": by_angle("m", "bank", 90, 90), "supply": {"nets": ["bank", "vd"], "length": "free"}}
        lines = {"a": by_angle("in", "m", 50, 40), "b": by_angle("m", "o", 50, 50), "launch": LAUNCH, **feed}
        parts = {
            f"C{k}": {**capacitor, "value": value} for k, value in enumerate(("22 pF", "1 nF", "100 nF"))
        }
        supply = {"vd": {"kind": "dc", "net": "vd", "voltage": "5 V"}}
        copper = trace_copper(artwork_of({"ports": ports | supply, "lines": lines, "parts": parts}))
        nodes = {piece.near for piece in copper.pieces if piece.far.startswith("pad C")}
        assert len(nodes) == 3
        assert sorted(post.node for post in copper.posts) == [f"foot of C{k}.1" for k in range(3)]
        strips = [p for p in copper.pieces if p.near.startswith("bank") and p.far.startswith("bank")]
        assert len(strips) == 2 and all(piece.length > 1e-3 for piece in strips)
        assert copper.ties == () and copper.notes == ()

    def test_a_pad_off_its_net_is_told(self, artwork_of: MAKER, ports: PORTS) -> None:
        """A part moved away from its copper must not be joined silently."""
        lines = {"a": by_angle("in", "c", 45, 30), "b": by_angle("d", "o", 45, 30), "launch": LAUNCH}
        artwork = artwork_of({"ports": ports, "lines": lines, "parts": {"R1": RESISTOR}})
        parts = {"R1": moved(artwork.placement.parts["R1"], 0, 3_000_000)}
        broken = replace(artwork, placement=replace(artwork.placement, parts=parts))
        assert [note[1] for note in trace_copper(broken).notes] == ["R1", "R1"]


class TestOthers:
    def test_a_coupled_pair_has_the_speeds_of_its_modes(self, artwork_of: MAKER, ports: PORTS) -> None:
        """Both modes with the mean speed would hide the pair's loss of directivity."""
        pair = {"nets": ["a1", "a2", "b1", "b2"], "angle": "90 deg"}
        pair |= {"even_impedance": "62 ohm", "odd_impedance": "41 ohm"}
        more = {name: {"net": name, "impedance": "50 ohm"} for name in ("c", "d")}
        ends = {"a1": "in", "a2": "out", "b1": "c", "b2": "d"}
        lines = {
            f"to_{a}": {"nets": [a, b], "impedance": "50 ohm", "length": "free"} for a, b in ends.items()
        }
        artwork = artwork_of({"ports": ports | more, "coupled": {"pair": pair}, "lines": lines})
        drawn = trace_copper(artwork).pairs[0]
        medium = medium_of(artwork.placement.sized.circuit, F0, lossless=True)
        even, odd = medium.pair(drawn.width, drawn.gap, drawn.pour_gap)
        assert float(even.impedance) == pytest.approx(62.0, abs=0.01)
        assert float(odd.impedance) == pytest.approx(41.0, abs=0.01)
        assert even.wave_number[0] > 1.02 * odd.wave_number[0]
        mean = 0.5 * (even.wave_number + odd.wave_number)[0] * drawn.length
        assert math.degrees(mean) == pytest.approx(90.0, abs=1.0)
        network = wanted_network(artwork.placement, F0, {})
        chains = even.chain(drawn.length), odd.chain(drawn.length)
        modes = coupled_pair(("a1", "a2", "b1", "b2"), *chains)
        exact = solve(replace(network, branches=(*network.branches[:4], *modes)))
        assert len(network.branches) == 6
        assert lossless(artwork) == pytest.approx(exact, abs=1e-3)
        isolated = [abs(s[0, 3, 0]) for s in (wanted(artwork), exact, lossless(artwork))]
        assert isolated[0] < 5e-3 < isolated[1] == pytest.approx(isolated[2], abs=1e-3)

    def test_a_radial_stub_is_short_at_the_design_frequency(self, artwork_of: MAKER, ports: PORTS) -> None:
        stub = {"nets": ["m"], "shape": "radial", "sector": "60 deg"}
        lines = {"a": by_angle("in", "m", 50, 90), "b": by_angle("m", "o", 50, 90), "launch": LAUNCH}
        artwork = artwork_of({"ports": ports, "lines": lines | {"fan": stub}})
        assert abs(wanted(artwork)[0, 1, 0]) < 1e-4
        assert abs(lossless(artwork)[0, 1, 0]) < 1e-4
        assert abs(lossless(artwork, np.array([1.2e9]))[0, 1, 0]) > 0.2


@pytest.fixture(scope="module")
def board(artwork_of: MAKER, ports: PORTS) -> Artwork:
    """Return a filter of stubs, a shorted stub and a resistor to ground: most kinds of joint."""
    lines = {
        "a": by_angle("in", "m", 50, 40),
        "b": by_angle("m", "n", 65, 60),
        "c": by_angle("n", "o", 50, 30),
        "open": by_angle("m", "", 35, 35),
        "shorted": by_angle("n", "gnd", 60, 60),
        "arm": by_angle("o", "r", 50, 30),
        "launch": LAUNCH,
    }
    parts = {"R1": {"kind": "resistor", "nets": ["r", "gnd"], "value": "120 ohm", "case": "0402"}}
    return artwork_of({"ports": ports, "lines": lines, "parts": parts})


def moved(part: PlacedPart, dx: int, dy: int) -> PlacedPart:
    """Return a part with its pads elsewhere."""
    pads = []
    for pad in part.pads:
        outline = Ring(tuple((x + dx, y + dy) for x, y in pad.outline.points), pad.outline.bulges)
        pads.append(replace(pad, x=pad.x + dx, y=pad.y + dy, outline=outline))
    return replace(part, x=part.x + dx, y=part.y + dy, pads=tuple(pads))


class TestWholeBoard:
    def test_reciprocal(self, board: Artwork) -> None:
        s = solve(drawn_network(board, SWEEP, {}))
        assert np.max(np.abs(s - np.swapaxes(s, 1, 2))) < 1e-12

    def test_passive_everywhere(self, board: Artwork) -> None:
        """Losses of a negative length, or of a wrong sign, would give gain somewhere."""
        s = solve(drawn_network(board, np.linspace(0.1e9, 20e9, 400), {}))
        assert np.max(np.linalg.norm(s, 2, axis=(1, 2))) < 1.0

    def test_lossless_is_unitary_without_resistors(self, artwork_of: MAKER, ports: PORTS) -> None:
        lines = stubbed(by_angle("m", "gnd", 60, 60)) | {"open": by_angle("m", "", 35, 35)}
        s = lossless(artwork_of({"ports": ports, "lines": lines}), SWEEP)
        assert np.max(np.abs(np.swapaxes(s.conj(), 1, 2) @ s - np.eye(2))) < 1e-12

    def test_independent_of_where_things_lie(self, board: Artwork) -> None:
        """Positions enter through distances only."""
        dx, dy = 7_000_001, 3_000_003
        held = board.placement
        there = replace(
            held,
            lines={
                name: replace(item, path=tuple((x + dx, y + dy) for x, y in item.path))
                for name, item in held.lines.items()
            },
            ports={name: replace(item, x=item.x + dx, y=item.y + dy) for name, item in held.ports.items()},
            parts={name: moved(part, dx, dy) for name, part in held.parts.items()},
            vias=tuple(replace(via, x=via.x + dx, y=via.y + dy) for via in held.vias),
            strips=tuple(
                replace(strip, path=tuple((x + dx, y + dy) for x, y in strip.path)) for strip in held.strips
            ),
        )
        first = solve(drawn_network(board, SWEEP, {}))
        again = solve(drawn_network(replace(board, placement=there), SWEEP, {}))
        assert again == pytest.approx(first, abs=1e-9)
