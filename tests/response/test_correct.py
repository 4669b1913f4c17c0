"""The response correction: which lengths, by how much, and that drawing them does what was promised."""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Iterator
from typing import Any, ClassVar

import numpy as np
import pytest

from layoutgen.artwork import Artwork
from layoutgen.placement import place
from layoutgen.reading import circuit_from_data
from layoutgen.response import CLOSE_ENOUGH, correct_lengths, respond
from layoutgen.response.correct import MOST_CHANGE
from layoutgen.response.fit import _bounded, evened_step, largest
from layoutgen.response.match import Match, resized
from layoutgen.response.mirror import length_groups, mirror_groups
from layoutgen.response.rings import loop_numbers
from layoutgen.response.trace import trace_copper
from layoutgen.sizing import size_circuit

MAKER = Callable[..., Artwork]
PORTS = dict[str, Any]
LAUNCH = {"nets": ["o", "out"], "impedance": "50 ohm", "length": "free"}
RESISTOR = {"kind": "resistor", "nets": ["c", "d"], "value": "5 ohm", "case": "0603"}


def by_angle(near: str, far: str, impedance: float, angle: float) -> dict[str, Any]:
    nets = [near, far] if far else [near]
    return {"nets": nets, "impedance": f"{impedance} ohm", "angle": f"{angle} deg"}


def drawn_again(artwork: Artwork, corrections: dict[str, float]) -> Artwork:
    """Return the bare artwork of the same circuit with corrected lengths."""
    placement = artwork.placement
    sized = size_circuit(placement.sized.circuit, corrections=corrections)
    return Artwork(
        placement=place(sized, placement.choices),
        shapes=(),
        vias=(),
        holes=(),
        labels=(),
        line_copper={},
        title_anchor=(0, 0),
    )


@pytest.fixture(scope="module")
def stubs(artwork_of: MAKER, ports: PORTS) -> Artwork:
    """A matching network of wide stubs, whose tees leave a susceptance."""
    lines = {
        "a": by_angle("in", "m", 50, 40),
        "b": by_angle("m", "n", 50, 50),
        "c": by_angle("n", "o", 50, 40),
        "one": by_angle("m", "", 35, 35),
        "two": by_angle("n", "", 35, 35),
        "launch": LAUNCH,
    }
    return artwork_of({"ports": ports, "lines": lines})


class TestFit:
    def test_what_it_promises_is_what_the_next_drawing_does(self, stubs: Artwork) -> None:
        """A correction of the wrong sign, of the wrong line, or not drawn at all, makes it worse."""
        fit = correct_lengths(stubs)
        assert fit.now == fit.uncorrected > 0.01
        assert fit.expected < 0.2 * fit.now
        again = correct_lengths(drawn_again(stubs, dict(fit.corrections)))
        assert again.now == pytest.approx(fit.expected, abs=2e-5)
        assert again.uncorrected == pytest.approx(fit.now, abs=2e-5)

    def test_it_rests_once_it_is_there(self, stubs: Artwork) -> None:
        """Drawings for a gain that nobody sees would never end."""
        fit = correct_lengths(stubs)
        assert correct_lengths(drawn_again(stubs, dict(fit.corrections))).corrections == fit.corrections

    def test_it_starts_again_from_what_was_drawn(self, stubs: Artwork) -> None:
        """Corrections that add up from drawing to drawing would run away."""
        fit = correct_lengths(stubs)
        wrong = {name: angle - 0.05 for name, angle in fit.corrections.items()}
        again = correct_lengths(drawn_again(stubs, wrong))
        assert again.now > again.expected + 0.005
        assert again.corrections == pytest.approx(dict(fit.corrections), abs=2e-3)

    def test_nothing_to_gain_nothing_done(self, artwork_of: MAKER, ports: PORTS) -> None:
        lines = {"t": by_angle("in", "o", 70, 77), "launch": LAUNCH}
        fit = correct_lengths(artwork_of({"ports": ports, "lines": lines}))
        assert fit.corrections == {} and fit.now == fit.uncorrected == fit.expected

    def test_what_the_response_does_not_feel_stays(self, artwork_of: MAKER, ports: PORTS) -> None:
        """Least squares alone would give such a line any length."""
        lines = {
            "a": by_angle("in", "m", 50, 40),
            "b": by_angle("m", "o", 50, 50),
            "stub": by_angle("m", "", 35, 35),
            "launch": LAUNCH,
            "feed": by_angle("m", "bank", 95, 90),
            "beyond": by_angle("bank", "vd", 60, 45),
        }
        short = {"kind": "capacitor", "nets": ["bank", "gnd"], "value": "1 uF", "case": "0402"}
        supply = {"vd": {"kind": "dc", "net": "vd", "voltage": "5 V"}}
        parts = {"C1": short, "C2": {**short, "value": "1 nF"}}
        fit = correct_lengths(artwork_of({"ports": ports | supply, "lines": lines, "parts": parts}))
        assert "stub" in fit.corrections
        assert abs(fit.corrections.get("beyond", 0.0)) < math.radians(0.5)

    def test_bounds_hold(self, artwork_of: MAKER, ports: PORTS) -> None:
        """Pads far wider than thin lines ask for more than is allowed: half the angle."""
        lines = {"a": by_angle("in", "c", 95, 16), "b": by_angle("d", "o", 95, 16), "launch": LAUNCH}
        big = {**RESISTOR, "case": "1210"}
        fit = correct_lengths(artwork_of({"ports": ports, "lines": lines, "parts": {"R1": big}}))
        most = max(abs(angle) for angle in fit.corrections.values())
        assert most <= min(0.5 * math.radians(16.0), MOST_CHANGE) + 1e-6
        assert most > 0.4 * math.radians(16.0)

    def test_mirror_images_move_together(self, artwork_of: MAKER, ports: PORTS) -> None:
        lines = {
            "a": by_angle("in", "c", 60, 40),
            "b": by_angle("d", "out", 60, 40),
        }
        artwork = artwork_of({"ports": ports, "lines": lines, "parts": {"R1": RESISTOR}})
        corrections = correct_lengths(artwork).corrections
        assert corrections["a"] == corrections["b"] != 0.0

    def test_new_sizes_are_reckoned_with(self, stubs: Artwork) -> None:
        """The next drawing has other widths; a fit to the old ones would need a drawing more."""
        sized = stubs.placement.sized
        near = dict.fromkeys(sized.lines, (0.0004, 0.0004))
        other = size_circuit(sized.circuit, gaps=near)
        assert other.lines["one"].width < 0.97 * sized.lines["one"].width
        copper = resized(trace_copper(stubs), sized, other)
        for piece, old in zip(copper.pieces, trace_copper(stubs).pieces, strict=True):
            if piece.line:
                assert piece.width == other.lines[piece.line].width
                turned = piece.length * other.lines[piece.line].beta
                assert turned == pytest.approx(old.length * sized.lines[piece.line].beta, rel=1e-12)
        assert correct_lengths(stubs, sized=other).now != correct_lengths(stubs).now


def test_derivatives_are_those_of_the_network(stubs: Artwork) -> None:
    """A line's length in a wrong place of the batch, or a wrong unit: against a step ten times as long."""
    match = Match(stubs, {})
    here, slope = match.around(np.zeros(len(match.groups)))
    for k in range(len(match.groups)):
        step = np.zeros(len(match.groups))
        step[k] = 0.01
        there = match.difference(np.array([step]))[0].ravel()
        assert (there - here) / 0.01 == pytest.approx(slope[:, k], abs=0.02)
        assert np.max(np.abs(slope[:, k])) > 0.1


@pytest.mark.parametrize("seed", range(8))
def test_a_bounded_step_is_no_worse_than_any_point_inside(seed: int) -> None:
    """Outside the bounds, or far from the minimum: against scipy's bounded least squares."""
    from scipy.optimize import lsq_linear

    rng = np.random.default_rng(seed)
    a, b = rng.normal(size=(12, 4)), rng.normal(size=12)
    low, high = -rng.uniform(0.0, 0.3, 4), rng.uniform(0.0, 0.3, 4)
    step = _bounded(a.T @ a, a.T @ b, low, high)
    assert np.all(step >= low) and np.all(step <= high)
    best = lsq_linear(a, -b, bounds=(low - 1e-12, high)).cost
    start = 0.5 * b @ b
    assert 0.5 * np.sum((a @ step + b) ** 2) <= best + 0.15 * (start - best)


def test_a_step_evens_differences_out() -> None:
    """Least squares of 3 and 1, 1, 1 give 1.5; the lowest largest difference is 1. Bounds are kept to."""
    difference = np.array([3.0, 1.0, 1.0, 1.0], dtype=complex)
    slope = np.ones((4, 1), dtype=complex)
    zero, far = np.zeros(1), np.full(1, 9.0)
    step = evened_step(difference, slope, zero, -far, far)
    assert largest(difference + slope @ step) == pytest.approx(1.0, abs=0.01)
    near = np.full(1, 0.5)
    assert evened_step(difference, slope, zero, -near, near) == pytest.approx([-0.5])


@pytest.mark.parametrize("seed", range(4))
def test_evened_steps_are_as_low_as_a_linear_program_says(seed: int) -> None:
    """Weights that stick or vanish would leave a higher difference than need be."""
    from scipy.optimize import linprog

    rng = np.random.default_rng(seed)
    d = rng.normal(size=30) + 1j * rng.normal(size=30)
    slope = rng.normal(size=(30, 3)) + 1j * rng.normal(size=(30, 3))
    step = evened_step(d, slope, np.zeros(3), np.full(3, -9.0), np.full(3, 9.0))
    around = np.exp(2j * np.pi * np.arange(64) / 64)
    rows = [np.hstack([(slope * w).real, -np.ones((30, 1))]) for w in around]
    best = linprog(
        [0.0, 0.0, 0.0, 1.0],
        A_ub=np.vstack(rows),
        b_ub=np.concatenate([-(d * w).real for w in around]),
        bounds=[(None, None)] * 4,
    ).fun
    assert largest(d + slope @ step) < 1.03 * best


class TestWhatHolds:
    """Where lengths cannot do it, the element that holds it is named."""

    FOOTPRINT: ClassVar[dict[str, Any]] = {
        "cutout": {"size": ["4.4 mm", "10.4 mm"], "at": ["0 mm", "0 mm"]},
        "pads": {
            "gate": {"at": ["-3.6 mm", "0 mm"], "size": ["2.4 mm", "2.0 mm"], "heading": "west"},
            "drain": {"at": ["3.6 mm", "0 mm"], "size": ["2.4 mm", "4.0 mm"], "heading": "east"},
            "source": {"ground": "flange"},
        },
    }

    def test_wide_pads_on_thin_lines(self, artwork_of: MAKER, ports: PORTS) -> None:
        """A drain pad of 12 ohm on a line of 45: no length removes that, and the pad must be named."""
        part = {
            "kind": "transistor",
            "footprint": "flange",
            "pins": {"gate": "c", "drain": "d", "source": "gnd"},
            "terminations": {"drain": "7+4j ohm", "gate": "45 ohm"},
        }
        lines = {"a": by_angle("in", "c", 45, 30), "b": by_angle("d", "o", 45, 30), "launch": LAUNCH}
        tables = {"ports": ports, "lines": lines, "parts": {"Q1": part}}
        response = respond(artwork_of({**tables, "footprints": {"flange": self.FOOTPRINT}}))
        found = response.correction
        assert found.after >= found.reachable > CLOSE_ENOUGH
        assert (found.holders[0].element, found.holders[0].what) == ("Q1", "its pads")
        assert found.holders[0].without < 0.5 * found.reachable
        assert response.notes[-1][1] == "Q1" and f"{found.after:.3f}" in response.notes[-1][2]

    def test_unequal_speeds_of_a_pair(self, artwork_of: MAKER, ports: PORTS) -> None:
        """A coupler's lost directivity comes from its modes: equal speeds would restore it."""
        pair = {"nets": ["a1", "a2", "b1", "b2"], "angle": "270 deg"}
        pair |= {"even_impedance": "62 ohm", "odd_impedance": "41 ohm"}
        more = {name: {"net": name, "impedance": "50 ohm"} for name in ("c", "d")}
        ends = {"a1": "in", "a2": "out", "b1": "c", "b2": "d"}
        lines = {
            f"to_{a}": {"nets": [a, b], "impedance": "50 ohm", "length": "free"} for a, b in ends.items()
        }
        artwork = artwork_of({"ports": ports | more, "coupled": {"pair": pair}, "lines": lines})
        found = respond(artwork).correction
        assert found.reachable > CLOSE_ENOUGH
        assert (found.holders[0].element, found.holders[0].what) == (
            "pair",
            "the unequal speeds of its modes",
        )
        assert found.holders[0].without < 0.02

    def test_mirror_images_hold_together(self, artwork_of: MAKER, ports: PORTS) -> None:
        """One of two like pads made ideal changes little: only both together show what holds."""
        part = {"kind": "resistor", "value": "0.1 ohm", "case": "2512"}
        lines = {
            "a": by_angle("in", "c", 95, 30),
            "b": by_angle("d", "e", 95, 30),
            "c": by_angle("f", "out", 95, 30),
        }
        parts = {"R1": {**part, "nets": ["c", "d"]}, "R2": {**part, "nets": ["e", "f"]}}
        found = respond(artwork_of({"ports": ports, "lines": lines, "parts": parts})).correction
        assert found.reachable > CLOSE_ENOUGH
        assert (found.holders[0].element, found.holders[0].alike) == ("R1", ("R2",))
        assert found.holders[0].cause.endswith("and those of R2")

    def test_lengths_that_would_do_are_said_to(self, stubs: Artwork) -> None:
        """An element blamed for what the correction, switched off, would have removed."""
        response = respond(stubs)
        found = response.correction
        assert found.after > CLOSE_ENOUGH > found.reachable and found.holders == ()
        assert "other lengths" in response.notes[-1][2]


def circuit(**tables: Any) -> Any:
    """Return a circuit file of the given tables."""
    base = {
        "format": 1,
        "design": {"title": "t", "frequency": "2 GHz", "band": ["1.9 GHz", "2.1 GHz"]},
        "substrate": {
            "relative_permittivity": 3.55,
            "loss_tangent": 0.0027,
            "height": "0.508 mm",
            "copper_thickness": "35 um",
        },
        "board": {"rules": "two-layer-standard"},
    }
    return circuit_from_data({**base, **tables})


class TestLengthGroups:
    HYBRID: ClassVar[dict[str, Any]] = {
        "s1": by_angle("n1", "n2", 35.36, 90),
        "p1": by_angle("n2", "n3", 50, 90),
        "s2": by_angle("n4", "n3", 35.36, 90),
        "p2": by_angle("n1", "n4", 50, 90),
    }

    def test_opposite_sides_of_a_loop_stay_equal(self) -> None:
        """One port ends in a part: no mirror images any more, and a rectangle that no longer closes."""
        load = {"kind": "resistor", "nets": ["n4", "gnd"], "value": "50 ohm", "case": "0603"}
        file = circuit(
            ports={str(k): {"net": f"n{k}"} for k in range(1, 4)}, lines=self.HYBRID, parts={"R": load}
        )
        assert len(mirror_groups(file)) == 4
        assert length_groups(file) == (("s1", "s2"), ("p1", "p2"))

    def test_loops_apart_are_apart(self) -> None:
        """Two hybrids on one line would share their lengths for nothing; their line is on no loop."""
        moved = {"n1": "m1", "n2": "m2", "n3": "m3", "n4": "m4"}
        other = {f"t{k}": {**v, "nets": [moved[n] for n in v["nets"]]} for k, v in self.HYBRID.items()}
        lines = {**self.HYBRID, **other, "between": by_angle("n3", "m1", 35.36, 90)}
        ends = {"a": {"net": "n1"}, "b": {"net": "n2", "impedance": "40 ohm"}, "c": {"net": "m2"}}
        ends |= {"d": {"net": "m4", "impedance": "30 ohm"}, "e": {"net": "n4", "impedance": "20 ohm"}}
        assert length_groups(circuit(ports=ends, lines=lines)) == (
            ("s1", "s2"),
            ("p1", "p2"),
            ("ts1", "ts2"),
            ("tp1", "tp2"),
            ("between",),
        )

    @pytest.mark.parametrize("seed", range(12))
    def test_loops_as_by_taking_nets_away(self, seed: int) -> None:
        """Two elements are on one loop when no single net or element parts them: tried one by one."""
        rng = np.random.default_rng(seed)
        nets = {f"e{k}": [f"n{i}" for i in rng.choice(7, 2, replace=False)] for k in range(9)}
        found = loop_numbers(nets)
        for a, b in itertools.combinations(nets, 2):
            together = found.get(a, -1) == found.get(b, -2)
            assert together == _on_one_loop(nets, a, b)


def _on_one_loop(nets: dict[str, list[str]], a: str, b: str) -> bool:
    """Tell whether some loop without a crossing runs through two elements: two ways without a common net."""
    (p, q), rest = nets[a], [set(held) for name, held in nets.items() if name not in (a, b)]
    r, s = nets[b]
    for x, y in ((r, s), (s, r)):
        for way in _ways(p, x, rest, {q, y}):
            if next(_ways(q, y, rest, way), None) is not None:
                return True
    return False


def _ways(start: str, end: str, rest: list[set[str]], barred: set[str]) -> Iterator[set[str]]:
    """Yield the nets of each way between two nets that leaves out barred ones."""
    if start in barred or end in barred:
        return
    if start == end:
        yield {start}
        return
    for other in {net for held in rest if start in held for net in held} - {start}:
        for way in _ways(other, end, rest, barred | {start}):
            yield way | {start}


class TestMirrorGroups:
    def test_the_arms_of_a_divider(self) -> None:
        """Arms told apart by their order in the file, or by their ports' names."""
        file = circuit(
            ports={"p": {"net": "in"}, "q": {"net": "two", "edge": "east"}, "r": {"net": "three"}},
            lines={"x": by_angle("in", "two", 70.7, 90), "y": by_angle("three", "in", 70.7, 90)},
            parts={"R": {"kind": "resistor", "nets": ["two", "three"], "value": "100 ohm", "case": "0603"}},
        )
        assert mirror_groups(file) == (("x", "y"),)

    def test_equal_lines_in_unequal_places(self) -> None:
        """Equal values alone would tie lines that see different things."""
        file = circuit(
            ports={"p": {"net": "in"}, "q": {"net": "two"}, "r": {"net": "three", "impedance": "75 ohm"}},
            lines={"x": by_angle("in", "two", 70.7, 90), "y": by_angle("in", "three", 70.7, 90)},
        )
        assert mirror_groups(file) == (("x",), ("y",))

    def test_far_neighbours_count(self) -> None:
        """Lines alike in all they touch, but one chain ends in 50 ohm and the other in 75."""
        chain = {f"a{k}": by_angle(f"n{k}", f"n{k + 1}", 50, 20) for k in range(6)}
        ends = {"p": {"net": "n0"}, "q": {"net": "n6", "impedance": "75 ohm"}}
        groups = mirror_groups(circuit(ports=ends, lines=chain))
        assert groups == tuple((name,) for name in chain)
        ends["q"] = {"net": "n6"}
        groups = mirror_groups(circuit(ports=ends, lines=chain))
        assert groups == (("a0", "a5"), ("a1", "a4"), ("a2", "a3"))

    def test_the_arms_of_a_hybrid(self) -> None:
        file = circuit(
            ports={str(k): {"net": f"n{k}"} for k in range(1, 5)},
            lines={
                "s1": by_angle("n1", "n2", 35.36, 90),
                "p1": by_angle("n2", "n3", 50, 90),
                "s2": by_angle("n3", "n4", 35.36, 90),
                "p2": by_angle("n4", "n1", 50, 90),
            },
        )
        assert mirror_groups(file) == (("s1", "s2"), ("p1", "p2"))

    def test_pairs_of_a_symmetric_filter(self) -> None:
        """Ends of a pair taken in order only: the last section is the first one turned round."""
        pair = {"even_impedance": "70.61 ohm", "odd_impedance": "39.24 ohm", "angle": "90 deg"}
        file = circuit(
            ports={"p": {"net": "n0"}, "q": {"net": "n2"}},
            coupled={
                "first": {**pair, "nets": ["n0", "open", "open", "n1"]},
                "last": {**pair, "nets": ["n1", "open", "open", "n2"]},
            },
        )
        assert mirror_groups(file) == (("first", "last"),)

    def test_a_line_by_length_has_no_part(self) -> None:
        lines = {"x": {"nets": ["in", "two"], "impedance": "50 ohm", "length": "9 mm"}}
        assert mirror_groups(circuit(ports={"p": {"net": "in"}, "q": {"net": "two"}}, lines=lines)) == ()
