"""Length budgets: they add up, and every correction has the sign and size of its formula."""

from __future__ import annotations

import itertools
import math
from pathlib import Path

import pytest

from layoutgen.circuit import build_circuit
from layoutgen.errors import WrongInputError
from layoutgen.formulas.bends import bend_excess
from layoutgen.formulas.ends import open_end
from layoutgen.formulas.pads import pad_excess
from layoutgen.formulas.steps import step
from layoutgen.formulas.tees import cross, tee
from layoutgen.formulas.vias import via_inductance
from layoutgen.reading import read_inputs
from layoutgen.sizing import (
    Arm,
    BudgetEntry,
    budget_for_length,
    default_arms,
    default_budgets,
    halved,
    junction_corrections,
    junction_flags,
    line_budget,
    open_end_correction,
    pad_correction,
    size_circuit,
    via_correction,
)

H, ER, T, F = 0.5e-3, 3.66, 0.035, 2e9


def line(*nets, **more):
    return {"nets": list(nets), "impedance": "50 ohm", "angle": "40 deg", **more}


def total(entries):
    return math.fsum(entry.angle for entry in entries)


@pytest.fixture
def star(size):
    """Four lines of different widths at net m, one of them an open stub."""
    return size(
        ports={"p": {"net": "a"}, "q": {"net": "b"}, "r": {"net": "c"}},
        lines={
            "x": line("a", "m"),
            "y": line("m", "b", impedance="35 ohm"),
            "z": line("m", "c", impedance="80 ohm"),
            "s": line("m", impedance="60 ohm"),
        },
    )


def arm(sized, name, index, heading):
    return Arm(name, index, heading, sized.lines[name].width)


class TestJunctions:
    def test_step_lengthens_both_lines_by_the_formula(self, star):
        """Would catch sides swapped, a sign turned, or heights taken for metres."""
        found = junction_corrections(star, "m", [arm(star, "x", 1, 180.0), arm(star, "y", 0, 0.0)])
        expected = step(star.lines["x"].width / H, star.lines["y"].width / H, ER, T)
        assert found["x", 1].angle == pytest.approx(star.lines["x"].beta * float(expected.d_1) * H, rel=1e-12)
        assert found["y", 0].angle == pytest.approx(star.lines["y"].beta * float(expected.d_2) * H, rel=1e-12)
        assert {entry.cause for entry in found.values()} == {"step"}
        assert {entry.at for entry in found.values()} == {"m"}

    def test_equal_widths_are_no_step(self, size):
        """Would catch entries of zero between equal lines."""
        sized = size(lines={"x": line("a", "m"), "y": line("m", "b")})
        assert junction_corrections(sized, "m", [arm(sized, "x", 1, 90.0), arm(sized, "y", 0, 270.0)]) == {}

    def test_two_lines_at_an_angle_share_a_bend(self, star):
        """Would catch a corner of two lines left without a correction, or counted twice."""
        found = junction_corrections(star, "m", [arm(star, "x", 1, 180.0), arm(star, "z", 0, 90.0)], 50.0)
        x = star.lines["x"]
        change = float(bend_excess(x.width / H, ER, 50.0, 90.0, T).length_change)
        assert found["x", 1] == BudgetEntry("bend", pytest.approx(0.5 * x.beta * change * H, rel=1e-12), "m")
        assert found["z", 0].angle < 0.0

    def test_tee_takes_off_and_its_side_is_the_arm_without_an_opposite(self, star):
        """Would catch a side line taken as main whatever the order of the arms."""
        arms = [arm(star, "z", 0, 90.0), arm(star, "x", 1, 180.0), arm(star, "y", 0, 0.0)]
        u = {name: star.lines[name].width / H for name in "xyz"}
        expected = tee(u["x"], u["y"], u["z"], ER, F * H, T)
        for order in itertools.permutations(arms):
            found = junction_corrections(star, "m", order)
            for key, d in ((("x", 1), expected.d_a), (("y", 0), expected.d_b), (("z", 0), expected.d_side)):
                beta = star.lines[key[0]].beta
                assert found[key].angle == pytest.approx(-beta * float(d) * H, rel=1e-9)
                assert found[key].cause == "tee"

    def test_turning_a_junction_changes_nothing(self, star):
        """Would catch headings compared without their period."""
        arms = [("x", 1, 170.0), ("y", 0, 350.0), ("z", 0, 80.0), ("s", 0, 260.0)]
        reference = junction_corrections(star, "m", [arm(star, *spec) for spec in arms])
        for turn in (37.0, 200.0, 359.0):
            turned = [Arm(a, i, (heading + turn) % 360.0, star.lines[a].width) for a, i, heading in arms]
            assert junction_corrections(star, "m", turned) == reference

    def test_pads_are_arms_without_an_entry(self, star):
        """Would catch a shunt pad that is ignored, or that gets an entry of its own."""
        pad = Arm("C1", 0, 270.0, 0.95e-3, is_line=False)
        found = junction_corrections(star, "m", [arm(star, "x", 1, 180.0), arm(star, "y", 0, 0.0), pad])
        u = [width / H for width in (star.lines["x"].width, star.lines["y"].width, 0.95e-3)]
        expected = tee(*u, ER, F * H, T)
        assert set(found) == {("x", 1), ("y", 0)}
        assert found["x", 1].angle == pytest.approx(
            -star.lines["x"].beta * float(expected.d_a) * H, rel=1e-12
        )

    def test_cross_has_the_wider_opposite_pair_as_mains(self, star):
        """Would catch mains chosen by order, or neighbours taken as opposite."""
        arms = [
            arm(star, "z", 0, 90.0),
            arm(star, "x", 1, 180.0),
            arm(star, "s", 0, 270.0),
            arm(star, "y", 0, 0.0),
        ]
        u = {name: star.lines[name].width / H for name in "xyzs"}
        expected = cross(u["x"], u["y"], u["z"], u["s"], ER, F * H, T)
        found = junction_corrections(star, "m", arms)
        for name, index, d in (
            ("x", 1, expected.d_w),
            ("y", 0, expected.d_e),
            ("z", 0, expected.d_n),
            ("s", 0, expected.d_s),
        ):
            assert found[name, index].angle == pytest.approx(-star.lines[name].beta * float(d) * H, rel=1e-9)
            assert found[name, index].cause == "cross"

    def test_five_arms_are_refused(self, star):
        """Would catch a fifth arm dropped in silence."""
        arms = [arm(star, "x", 1, 72.0 * k) for k in range(5)]
        with pytest.raises(ValueError, match="5 arms"):
            junction_corrections(star, "m", arms)

    def test_one_line_and_one_pad_are_no_junction(self, star):
        """Would catch a pad counted both as step and as pad."""
        pad = Arm("C1", 0, 0.0, 2e-3, is_line=False)
        assert junction_corrections(star, "m", [arm(star, "x", 1, 180.0), pad]) == {}

    def test_a_banks_node_has_none(self, amplifier):
        """Would catch corrections at a bank, whose strip is in the circuit instead."""
        assert junction_corrections(amplifier, "d_bank", default_arms(amplifier, "d_bank")[:4]) == {}

    def test_flags_outside_the_fits(self, star, amplifier):
        """Would catch a tee of a 14 h wide line that passes without a word, or a flag that is always on."""
        inside = [arm(star, "x", 1, 180.0), arm(star, "y", 0, 0.0), arm(star, "z", 0, 90.0)]
        assert junction_flags(star, "m", inside) == ()
        assert "net f: tee" in junction_flags(amplifier, "f", default_arms(amplifier, "f"))[0]
        assert "net s: step" in junction_flags(amplifier, "s", default_arms(amplifier, "s"))[0]


class TestEnds:
    def test_open_end_lengthens(self, star):
        """Would catch a stub drawn too long by twice its end."""
        s = star.lines["s"]
        expected = s.beta * float(open_end(s.width / H, ER, T)) * H
        assert open_end_correction(star, "s") == BudgetEntry("open_end", pytest.approx(expected), "open")
        assert expected > 0.0

    def test_a_wider_pad_lengthens_and_a_covered_one_does_nothing(self, star):
        """Would catch a pad counted though the line's own copper covers it."""
        x = star.lines["x"]
        wide = pad_correction(star, "x", "a", 2e-3, 0.8e-3)
        expected = x.beta * float(pad_excess(x.width / H, 4.0, 1.6, ER, T)) * H
        assert wide == BudgetEntry("pad", pytest.approx(expected, rel=1e-12), "a")
        assert wide.angle > 0.0
        assert pad_correction(star, "x", "a", 0.9 * x.width, 0.8e-3).angle == 0.0

    def test_via_adds_the_angle_of_its_reactance(self, size):
        """Would catch an inductance over the wrong impedance, or a radius taken for a diameter."""
        sized = size(
            rules={"vias": {"diameter": "0.6 mm", "drill": "0.3 mm", "plating": "20 um"}},
            lines={"x": line("a", "b"), "g": line("b", "gnd")},
        )
        g = sized.lines["g"]
        inductance = float(via_inductance(0.17e-3, H, g.width))
        entry = via_correction(sized, "g", "gnd", 1, 0.3e-3)
        assert math.tan(entry.angle) == pytest.approx(2 * math.pi * F * inductance / g.impedance)
        assert (entry.cause, entry.at) == ("via", "gnd")
        two = via_correction(sized, "g", "gnd", 2, 0.3e-3, 0.8e-3).angle
        assert 0.5 * entry.angle < two < entry.angle


class TestLineBudget:
    ENDS = (BudgetEntry("tee", -0.02, "m"), BudgetEntry("open_end", 0.03, "open"))

    @pytest.mark.parametrize("turns", [(), ((90.0, 60.0),), ((90.0, 60.0), (-90.0, 60.0), (45.0, 30.0))])
    def test_adds_up_to_the_asked_angle(self, star, turns):
        """Would catch an entry that is left out of the length."""
        length, entries = line_budget(star, "x", self.ENDS, turns)
        assert total(entries) == pytest.approx(math.radians(40.0), abs=1e-12)
        assert entries[0].cause == "line" and [e.cause for e in entries].count("line") == 1
        assert entries[0].angle == pytest.approx(star.lines["x"].beta * length, rel=1e-14)
        assert [e.at for e in entries if e.cause == "bend"] == [f"bend {k + 1}" for k in range(len(turns))]

    def test_a_bend_makes_the_centre_line_longer(self, star):
        """Would catch a bend that is added where it is taken off."""
        straight, _ = line_budget(star, "x", ())
        bent, _ = line_budget(star, "x", (), [(90.0, star.lines["x"].mitre_percent)])
        assert bent - straight == pytest.approx(-star.lines["x"].bend_length, rel=1e-9)
        left, right = (line_budget(star, "x", (), [(turn, 60.0)])[0] for turn in (90.0, -90.0))
        assert left == right

    def test_inverse_of_the_budget_for_a_length(self, star):
        """Would catch the two directions disagreeing."""
        turns = ((90.0, 60.0), (45.0, 20.0))
        length, entries = line_budget(star, "x", self.ENDS, turns)
        angle, again = budget_for_length(star, "x", length, self.ENDS, turns)
        assert angle == pytest.approx(math.radians(40.0), abs=1e-12)
        assert [e.cause for e in again] == [e.cause for e in entries]

    def test_no_length_left_names_the_least_angle(self, star):
        """Would catch a negative length, or a least angle that does not work either."""
        ends = (BudgetEntry("pad", math.radians(45.0), "a"),)
        with pytest.raises(WrongInputError) as error:
            line_budget(star, "x", ends)
        (fault,) = error.value.faults
        assert fault.key == "lines.x.angle"
        least = float(fault.allowed.removeprefix("at least ").removesuffix(" deg"))
        assert 45.0 < least <= 45.02

    def test_a_line_by_length_has_no_asked_angle(self, size):
        """Would catch a length invented for a line that has one."""
        sized = size(lines={"x": {"nets": ["a", "b"], "impedance": "50 ohm", "length": "5 mm"}})
        with pytest.raises(ValueError, match="not given by angle"):
            line_budget(sized, "x", ())

    def test_halved_ends_of_a_pair(self, size):
        """Would catch a pair that takes both strips' ends in full."""
        sized = size(
            lines={},
            coupled={
                "k": {
                    "nets": ["a", "open", "open", "b"],
                    "even_impedance": "60 ohm",
                    "odd_impedance": "42 ohm",
                    "angle": "90 deg",
                }
            },
        )
        end = open_end_correction(sized, "k")
        length, entries = line_budget(sized, "k", halved([end, end]))
        assert total(entries) == pytest.approx(math.pi / 2, abs=1e-12)
        assert sized.pairs["k"].beta * length == pytest.approx(math.pi / 2 - end.angle, rel=1e-12)


EXAMPLES = sorted((Path(__file__).parents[2] / "examples").glob("*.toml"))


class TestDefaults:
    @pytest.mark.parametrize("path", EXAMPLES, ids=lambda path: path.stem)
    def test_every_line_of_every_example_adds_up(self, path):
        """Would catch a line of an example whose budget does not close, or whose impedance is missed."""
        found = read_inputs(path)
        sized = size_circuit(build_circuit(found.circuit, found.rules))
        budgets = default_budgets(sized)
        assert set(budgets) == {*sized.lines, *sized.pairs}
        for name, (length, entries) in budgets.items():
            held = sized.lines.get(name) or sized.pairs[name]
            if held.angle is not None:
                assert total(entries) == pytest.approx(held.angle, abs=1e-12)
                assert length > 0.0
        for line in sized.lines.values():
            if line.asked_impedance is not None:
                assert line.impedance == pytest.approx(line.asked_impedance, rel=1e-5)

    def test_every_line_of_the_amplifier_adds_up(self, amplifier):
        """Would catch any line of the example whose budget does not close."""
        budgets = default_budgets(amplifier)
        assert set(budgets) == set(amplifier.lines)
        for name, (length, entries) in budgets.items():
            held = amplifier.lines[name]
            if held.free:
                assert (length, entries) == (0.0, ())
            else:
                assert total(entries) == pytest.approx(held.angle, abs=1e-12)
                assert length > 0.0

    def test_roles_follow_the_spine(self, amplifier):
        """Would catch the stub taken as main because it is the widest."""
        mains = [arm.element for arm in default_arms(amplifier, "m_in")[:2]]
        assert mains == ["match_in", "gate_line"]
        causes = {entry.at: entry.cause for entry in default_budgets(amplifier)["gate_line"][1]}
        assert causes == {"gate_line": "line", "m_in": "tee", "b_in": "tee"}

    def test_shorted_and_open_stubs_and_lengths(self, size):
        """Would catch a grounded end without its via, or a line by length with another length."""
        sized = size(
            lines={
                "x": {"nets": ["a", "m"], "impedance": "50 ohm", "length": "7 mm"},
                "y": line("m", "b"),
                "g": line("m", "gnd"),
                "o": line("b"),
            }
        )
        budgets = default_budgets(sized)
        assert budgets["x"][0] == pytest.approx(7e-3)
        assert [entry.cause for entry in budgets["g"][1]] == ["line", "tee", "via"]
        assert [entry.cause for entry in budgets["o"][1]] == ["line", "open_end"]

    def test_lines_too_short_are_all_named(self, size):
        """Would catch a run that stops at the first."""
        sized = size(
            lines={"x": line("a", "b"), "s": line("a", angle="0.3 deg"), "r": line("b", angle="0.2 deg")}
        )
        with pytest.raises(WrongInputError) as error:
            default_budgets(sized)
        assert [fault.key for fault in error.value.faults] == ["lines.s.angle", "lines.r.angle"]

    def test_a_pair_between_lines(self, size):
        """Would catch strips of a pair that are no arms, or open ends that are forgotten."""
        sized = size(
            lines={"x": line("a", "m"), "y": line("n", "b")},
            coupled={
                "k": {
                    "nets": ["m", "open", "open", "n"],
                    "even_impedance": "60 ohm",
                    "odd_impedance": "42 ohm",
                    "angle": "90 deg",
                }
            },
        )
        length, entries = default_budgets(sized)["k"]
        assert sorted(entry.cause for entry in entries) == ["line", "open_end", "open_end", "step", "step"]
        assert total(entries) == pytest.approx(math.pi / 2, abs=1e-12)
        assert 0.0 < length < math.pi / 2 / sized.pairs["k"].beta


class TestPlanes:
    """Where a part's data were measured decides whose the pad is."""

    @pytest.fixture
    def held(self, build, tmp_path):
        """Sizes two lines with a resistor between them, whose data were measured at the given planes."""
        (tmp_path / "r.s2p").write_text("# GHz S RI R 50\n1 0 0 1 0 1 0 0 0\n3 0 0 1 0 1 0 0 0\n")

        def sized(**more):
            part = {"kind": "resistor", "nets": ["c", "d"], "value": "5 ohm", "case": "0603", **more}
            tables = {"lines": {"x": line("a", "c"), "y": line("d", "b")}, "parts": {"R": part}}
            return size_circuit(build(folder=tmp_path, **tables))

        return sized

    def test_a_pad_within_the_data_takes_its_length_off(self, held):
        """Would catch a pad counted in the line and in the data: 0.85 mm too much on each side."""
        sized = held(data="r.s2p", planes="pad_outer")
        entry = pad_correction(sized, "x", "c", 0.95e-3, 0.85e-3)
        assert entry == BudgetEntry("pad", -sized.lines["x"].beta * 0.85e-3, "c")

    def test_the_outer_edge_is_where_data_are_measured_when_nothing_is_said(self, held):
        said, unsaid = held(data="r.s2p", planes="pad_outer"), held(data="r.s2p")
        assert pad_correction(unsaid, "x", "c", 1e-3, 1e-3) == pad_correction(said, "x", "c", 1e-3, 1e-3)

    @pytest.mark.parametrize("more", [{}, {"data": "r.s2p", "planes": "pad_inner"}])
    def test_a_pad_outside_the_data_belongs_to_the_line(self, held, more):
        """Would catch planes read the other way round, or planes that count without data."""
        sized = held(**more)
        u = sized.lines["x"].width / H
        expected = sized.lines["x"].beta * H * float(pad_excess(u, 2.4e-3 / H, 2e-3 / H, ER, T))
        assert pad_correction(sized, "x", "c", 2.4e-3, 2e-3).angle == pytest.approx(expected, rel=1e-12)


class TestResponseCorrection:
    def test_it_is_an_entry_and_the_sum_stays(self, build):
        """Would catch a correction that moves the angle asked for instead of the copper."""
        circuit = build(lines={"x": line("a", "b")})
        plain, corrected = size_circuit(circuit), size_circuit(circuit, corrections={"x": 0.1})
        length, entries = line_budget(corrected, "x", ())
        assert [entry.cause for entry in entries] == ["line", "response_correction"]
        assert total(entries) == pytest.approx(math.radians(40.0), rel=1e-12)
        assert line_budget(plain, "x", ())[0] - length == pytest.approx(0.1 / plain.lines["x"].beta, rel=1e-9)

    def test_nothing_changes_without_one(self, build):
        circuit = build(lines={"x": line("a", "b")})
        assert line_budget(size_circuit(circuit, corrections={}), "x", ()) == line_budget(
            size_circuit(circuit), "x", ()
        )

    def test_lines_by_length_have_none(self, build):
        """Would catch a line drawn as written with an entry that says otherwise."""
        circuit = build(lines={"x": {"nets": ["a", "b"], "impedance": "50 ohm", "length": "9 mm"}})
        entries = budget_for_length(size_circuit(circuit, corrections={"x": 0.1}), "x", 9e-3, ())[1]
        assert [entry.cause for entry in entries] == ["line"]

    def test_it_can_leave_no_length(self, build):
        """Would catch a negative length handed on to the placement."""
        sized = size_circuit(build(lines={"x": line("a", "b")}), corrections={"x": 0.8})
        with pytest.raises(WrongInputError, match=r"lines\.x\.angle"):
            line_budget(sized, "x", ())
