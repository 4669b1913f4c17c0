"""Widths, gaps and electrical lengths of single lines."""

from __future__ import annotations

import math

import pytest

from layoutgen.errors import WrongInputError
from layoutgen.formulas.limits import ipc2221_width, ipc2221b_clearance
from layoutgen.formulas.microstrip import hammerstad_jensen_1980, kirschning_jansen_1982_permittivity
from layoutgen.formulas.pour import microstrip_beside_pour, pour_gap_for_shift
from layoutgen.formulas.synthesis import width_for_impedance

C0 = 299_792_458.0
H, ER, T = 0.5e-3, 3.66, 0.035
POUR = {"max_impedance_shift": "1 %"}
DC = {"p": {"net": "a"}, "v": {"kind": "dc", "net": "v", "voltage": "28 V"}}


def line(*nets, **more):
    return {"nets": list(nets), "impedance": "50 ohm", "angle": "30 deg", **more}


def capacitor(a, b="gnd"):
    return {"kind": "capacitor", "nets": [a, b], "value": "10 pF", "case": "0603"}


class TestWidth:
    def test_without_ground_is_that_of_the_bare_line_with_thickness(self, size):
        """Would catch a zero-thickness width (1.7 % wider) or a pour that is not there."""
        x = size().lines["x"]
        assert x.width == pytest.approx(float(width_for_impedance(50.0, ER, T).u) * H, abs=0.6e-9)
        assert math.isinf(x.pour_gap) and math.isinf(x.gap_left) and math.isinf(x.gap_right)
        thin = float(width_for_impedance(50.0, ER).u) * H
        assert x.width < 0.99 * thin

    def test_is_a_whole_number_of_nanometres_and_meets_the_impedance(self, size):
        """Would catch widths off the grid, or an impedance that is the asked one repeated, not that drawn."""
        x = size(ground=POUR).lines["x"]
        assert x.width * 1e9 == pytest.approx(round(x.width * 1e9), abs=1e-6)
        got = microstrip_beside_pour(x.width / H, ER, T, x.gap_left / H, x.gap_right / H)
        assert x.impedance == pytest.approx(float(got.impedance), rel=1e-12)
        assert x.impedance == pytest.approx(50.0, rel=1e-5)
        assert x.asked_impedance == 50.0

    def test_allows_for_the_pour_at_the_distance_it_is_drawn_at(self, size):
        """Would catch a width that ignores the pour: beside it the line is narrower."""
        bare, beside = size().lines["x"], size(ground=POUR).lines["x"]
        assert beside.width < bare.width
        u = float(width_for_impedance(50.0, ER, T).u)
        assert beside.pour_gap == pytest.approx(float(pour_gap_for_shift(u, ER, T, 0.01)) * H, abs=1.1e-9)
        assert beside.gap_left == beside.gap_right == beside.pour_gap

    def test_a_gap_in_the_file_replaces_the_shift(self, size):
        """Would catch a gap that is ignored, or one used beyond six heights, where it counts as none."""
        near, far = size(ground={"gap": "0.4 mm"}).lines["x"], size(ground={"gap": "3 mm"}).lines["x"]
        assert near.pour_gap == pytest.approx(0.4e-3) and near.gap_left == pytest.approx(0.4e-3)
        assert far.pour_gap == pytest.approx(3e-3) and math.isinf(far.gap_left)
        assert near.width < far.width

    def test_measured_gaps_resize_that_line_only(self, size):
        """Would catch measured gaps that are ignored, swapped between lines, or averaged wrongly."""
        lines = {"x": line("a", "m"), "y": line("m", "b")}
        sized = size(gaps={"x": (0.3e-3, math.inf)}, ground=POUR, lines=lines)
        x, y = sized.lines["x"], sized.lines["y"]
        assert (x.gap_left, x.gap_right) == (0.3e-3, math.inf)
        assert x.pour_gap == y.pour_gap
        assert x.width == pytest.approx(
            float(width_for_impedance(50.0, ER, T, 0.6, math.inf).u) * H, abs=0.6e-9
        )
        assert y.width == size(ground=POUR, lines=lines).lines["y"].width

    @pytest.mark.parametrize(
        ("change", "ratio"),
        [
            ({"height": "1 mm", "copper_thickness": "35 um"}, 2.0),
            ({"relative_permittivity": 9.8}, None),
            ({"copper_thickness": "70 um"}, None),
        ],
    )
    def test_follows_the_substrate(self, size, change, ratio):
        """Would catch a height, permittivity or thickness that does not reach the drawing."""
        sized = size(substrate=change)
        substrate = sized.circuit.file.substrate
        t = substrate.copper_thickness / substrate.height
        u = float(width_for_impedance(50.0, substrate.relative_permittivity, t).u)
        assert sized.lines["x"].width == pytest.approx(u * substrate.height, abs=0.6e-9)
        before = size().lines["x"].width
        assert abs(sized.lines["x"].width / before - 1.0) > 0.01
        if ratio is not None:
            assert sized.lines["x"].width == pytest.approx(ratio * before, abs=2e-9)

    def test_given_width_gives_impedance(self, size):
        """Would catch a given width that is changed, or an impedance left empty."""
        x = size(lines={"x": {"nets": ["a", "b"], "width": "0.3 mm", "length": "5 mm"}}).lines["x"]
        assert x.width == pytest.approx(0.3e-3) and x.asked_impedance is None
        assert x.impedance == pytest.approx(float(hammerstad_jensen_1980(0.6, ER, T).impedance), rel=1e-12)
        assert x.length == pytest.approx(5e-3) and x.angle is None and not x.free

    def test_grounded_coplanar_takes_its_own_gap(self, size):
        """Would catch a coplanar line sized with the board's pour distance."""
        lines = {"x": line("a", "b", kind="grounded_coplanar", gap="0.25 mm")}
        x = size(ground=POUR, lines=lines).lines["x"]
        assert (x.pour_gap, x.gap_left, x.gap_right) == (0.25e-3,) * 3
        assert x.width == pytest.approx(float(width_for_impedance(50.0, ER, T, 0.5, 0.5).u) * H, abs=0.6e-9)

    def test_grounded_coplanar_needs_a_pour(self, size):
        """Would catch a coplanar line drawn without its ground."""
        with pytest.raises(WrongInputError, match=r"lines\.x\.kind.*without \[ground\]"):
            size(lines={"x": line("a", "b", kind="grounded_coplanar", gap="0.25 mm")})


class TestPropagation:
    def test_permittivity_is_dispersive(self, size):
        """Would catch static permittivity used for lengths (1 % at 10 GHz here)."""
        x = size(design={"frequency": "10 GHz", "band": ["9 GHz", "11 GHz"]}).lines["x"]
        static = hammerstad_jensen_1980(x.width / H, ER, T).effective_permittivity
        ee = float(kirschning_jansen_1982_permittivity(static, x.width / H, ER, 10e9 * H))
        assert x.effective_permittivity == pytest.approx(ee, rel=1e-12)
        assert x.effective_permittivity > 1.01 * float(static)
        assert x.beta == pytest.approx(2 * math.pi * 10e9 * math.sqrt(ee) / C0, rel=1e-12)

    def test_loss_grows_with_roughness_and_loss_tangent(self, size):
        """Would catch a loss term that is missing, or nepers reported as decibels."""
        base = size().lines["x"].loss
        rough = size(substrate={"copper_roughness": "2 um"}).lines["x"].loss
        lossy = size(substrate={"loss_tangent": 0.02}).lines["x"].loss
        assert rough > 1.2 * base and lossy > 1.5 * base
        x = size(substrate={"loss_tangent": 0.02}).lines["x"]
        ee = x.effective_permittivity
        dielectric = 27.3 * ER * (ee - 1) * 0.02 / (math.sqrt(ee) * (ER - 1)) / (C0 / 2e9)  # dB/m
        flat = size(substrate={"loss_tangent": 0.0}).lines["x"].loss
        assert x.loss - flat == pytest.approx(dielectric, rel=1e-3)

    def test_bends_shorten_and_mitre_is_douville_james(self, size):
        """Would catch a bend length of the wrong sign or in units of the height."""
        x = size().lines["x"]
        u = x.width / H
        assert x.mitre_percent == pytest.approx(52 + 65 * math.exp(-1.35 * u), rel=1e-12)
        assert -1.5 * x.width < x.bend_length < -0.3 * x.width

    def test_second_model_is_near(self, size):
        """Would catch a spread that compares different things."""
        assert 0.0 < size().lines["x"].spread < 0.01

    def test_free_line_has_length_zero_until_placed(self, size):
        """Would catch a free line taken as one of a given length."""
        x = size(lines={"x": {"nets": ["a", "b"], "impedance": "50 ohm", "length": "free"}}).lines["x"]
        assert x.free and x.length == 0.0 and x.angle is None


class TestFlags:
    def test_none_inside_all_ranges(self, size):
        """Would catch flags that are always on."""
        assert size(ground=POUR).lines["x"].flags == ()

    def test_wide_line_beside_a_pour(self, size):
        """Would catch a 10 ohm line that passes without a word."""
        flags = size(ground=POUR, lines={"x": line("a", "b", impedance="10 ohm")}).lines["x"].flags
        assert any(flag.startswith("impedance beside a pour: W/h 17") for flag in flags)
        assert any(flag.startswith("bend length") for flag in flags)

    def test_thin_copper(self, size):
        """Would catch a loss formula used where the copper is thinner than three skin depths."""
        flags = size(substrate={"copper_thickness": "3 um"}).lines["x"].flags
        assert any("three skin depths" in flag for flag in flags)

    def test_transverse_resonance(self, size):
        """Would catch a line as wide as half a wave that passes without a word."""
        tables = {"design": {"frequency": "20 GHz", "band": ["19 GHz", "21 GHz"]}}
        flags = size(**tables, lines={"x": line("a", "b", impedance="15 ohm")}).lines["x"].flags
        assert any("transverse resonance" in flag for flag in flags)


class TestFaults:
    def test_impossible_impedances_are_all_named_with_the_range(self, size):
        """Would catch a run that stops at the first, or a range that would not do."""
        lines = {
            "x": line("a", "m", impedance="0.5 ohm"),
            "y": line("m", "n", impedance="60 ohm"),
            "z": line("n", "b", impedance="400 ohm"),
        }
        with pytest.raises(WrongInputError) as error:
            size(lines=lines)
        assert [fault.key for fault in error.value.faults] == ["lines.x.impedance", "lines.z.impedance"]
        low, high = (float(text) for text in error.value.faults[1].allowed.split(" ohm")[0].split(" to "))
        edges = {"x": line("a", "m", impedance=f"{low} ohm"), "y": line("m", "b", impedance=f"{high} ohm")}
        assert size(lines=edges).lines["y"].width >= 0.1e-3 - 1e-12
        with pytest.raises(WrongInputError):
            size(lines={"x": line("a", "b", impedance=f"{high + 0.02} ohm")})

    def test_narrowest_width_is_the_board_houses(self, size):
        """Would catch a least width that does not come from the rule file."""
        rules = {"copper": {"min_width": "0.4 mm"}}
        with pytest.raises(WrongInputError, match=r"down to 0\.4 mm"):
            size(rules=rules, lines={"x": line("a", "b", impedance="100 ohm")})

    def test_substrate_outside_the_formula(self, size):
        """Would catch impedances computed far outside Hammerstad and Jensen's range."""
        with pytest.raises(WrongInputError, match=r"substrate\.copper_thickness.*0\.2 heights"):
            size(substrate={"copper_thickness": "120 um"})
        with pytest.raises(WrongInputError, match=r"substrate\.relative_permittivity"):
            size(substrate={"relative_permittivity": 200.0})

    def test_width_outside_the_formula(self, size):
        """Would catch a width of 120 heights that is given an impedance."""
        with pytest.raises(WrongInputError, match=r"lines\.x\.width: found 60 mm"):
            size(lines={"x": {"nets": ["a", "b"], "width": "60 mm", "length": "5 mm"}})


class TestSupplies:
    @pytest.fixture
    def tables(self):
        return {
            "ports": {"p": {"net": "a", "current": "3 A"}, "v": DC["v"]},
            "lines": {"f": line("a", "w"), "s": {"nets": ["w", "v"], "length": "free"}},
            "parts": {"C": capacitor("w")},
        }

    def test_width_follows_from_ipc_2221(self, size, tables):
        """Would catch a supply line that ignores its current or its rule."""
        sized = size(rules={"current": {"temperature_rise": "20 K"}}, **tables)
        need = float(ipc2221_width(3.0, 17.5e-6, 20.0))
        s = sized.lines["s"]
        assert s.current == pytest.approx(3.0)
        assert need <= s.width < need + 10.01e-6
        assert s.width * 1e5 == pytest.approx(round(s.width * 1e5), abs=1e-6)
        assert s.temperature_rise <= 20.0
        assert not s.rf and sized.lines["f"].rf

    def test_a_stub_with_an_impedance_on_a_dc_net_is_rf(self, size, tables):
        """Would catch a quarter-wave bypass stub drawn and checked as if it were a supply line."""
        tables["lines"]["stub"] = line("w", angle="90 deg", impedance="30 ohm")
        lines = size(ground=POUR, **tables).lines
        assert lines["stub"].rf and not lines["s"].rf
        assert lines["stub"].pour_gap > 1.5 * H

    def test_density_governs_where_it_asks_for_more(self, size, tables):
        """Would catch the smaller of the two rules being taken."""
        rules = {"current": {"temperature_rise": "60 K", "max_density": "20 A/mm^2"}}
        assert size(rules=rules, **tables).lines["s"].width == pytest.approx(8.58e-3, abs=1e-9)

    def test_without_current_rules_the_narrowest_line_is_drawn(self, size, tables):
        """Would catch an invented limit where the rule file has none."""
        assert size(**tables).lines["s"].width == pytest.approx(0.1e-3)

    def test_own_current_of_a_line_governs_its_width(self, size, tables):
        """Would catch an override that does not reach the width."""
        tables["lines"]["s"]["current"] = "5 A"
        s = size(rules={"current": {"temperature_rise": "20 K"}}, **tables).lines["s"]
        assert s.current == 5.0
        assert s.width >= float(ipc2221_width(5.0, 17.5e-6, 20.0))

    def test_pour_keeps_half_a_height_or_the_clearance_of_the_voltage(self, size, tables):
        """Would catch a pour beside a supply line nearer than its voltage allows."""
        assert size(ground=POUR, **tables).lines["s"].pour_gap == pytest.approx(0.25e-3)
        tables["ports"]["v"] = {**DC["v"], "voltage": "200 V"}
        sized = size(rules={"voltage": {"condition": "B2"}}, ground=POUR, **tables)
        assert sized.lines["s"].pour_gap == pytest.approx(float(ipc2221b_clearance(200.0, "B2")))
        assert sized.lines["f"].pour_gap >= float(ipc2221b_clearance(200.0, "B2")) - 1e-9

    def test_a_voltage_table_of_the_rule_file(self, size, tables):
        """Would catch the next row taken at a row's own voltage, or the last one."""
        rules = {"voltage": {"table": [["10 V", "0.26 mm"], ["28 V", "0.3 mm"], ["100 V", "1.1 mm"]]}}
        assert size(rules=rules, ground=POUR, **tables).lines["s"].pour_gap == pytest.approx(0.3e-3)

    def test_parallel_supplies_share_by_their_true_widths(self, size):
        """Would catch currents left at the first guess of equal lines."""
        sized = size(
            rules={"current": {"temperature_rise": "20 K"}},
            ports={"p": {"net": "a", "current": "2 A"}, "v": DC["v"]},
            lines={
                "wide": {"nets": ["a", "v"], "width": "2 mm", "length": "10 mm"},
                "narrow": {"nets": ["a", "v"], "width": "0.5 mm", "length": "10 mm"},
            },
        )
        assert sized.lines["wide"].current == pytest.approx(1.6)
        assert sized.lines["narrow"].current == pytest.approx(0.4)
        drop = 1.6 * 10e-3 / (58e6 * 17.5e-6 * 2e-3)
        assert sized.circuit.nets["a"].voltage == pytest.approx(28.0 - drop)

    def test_drawn_lengths_refine_the_bias_point(self, size):
        """Would catch placed lengths that do not reach currents and voltages."""
        from layoutgen.sizing import placed_dc

        sized = size(
            ports={"p": {"net": "a", "current": "2 A"}, "v": DC["v"]},
            lines={
                "one": {"nets": ["a", "v"], "width": "1 mm", "length": "10 mm"},
                "two": {"nets": ["a", "v"], "width": "1 mm", "length": "free"},
            },
        )
        placed = placed_dc(sized, {"two": 30e-3})
        assert placed.lines["one"].current == pytest.approx(1.5)
        assert placed.lines["two"].current == pytest.approx(0.5)
        assert placed.lines["one"].width == sized.lines["one"].width
        assert placed.circuit.dc.currents["p"] == 2.0


def test_gap_below_what_can_be_etched_is_raised_and_said_so(size):
    """Would catch a pour drawn onto its line by gap = 0."""
    sized = size(ground={"gap": "0.02 mm"})
    assert sized.lines["x"].pour_gap == pytest.approx(0.1e-3)
    assert any("raised to 0.1 mm beside x" in note for note in sized.notes)


def test_pour_of_pads_and_strips_is_that_of_50_ohm(size):
    """Would catch a default distance that is missing or infinite where there is a pour."""
    sized = size(ground=POUR)
    assert sized.default_pour_gap == sized.lines["x"].pour_gap
    assert math.isinf(size().default_pour_gap)
