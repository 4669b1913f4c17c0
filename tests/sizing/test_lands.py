"""Lands of chips by IPC-7351's equations, and of footprints."""

from __future__ import annotations

import pytest

from layoutgen.errors import WrongInputError
from layoutgen.sizing.chips import BODIES, land_pattern

MM = 1e-3


def chip(case, **more):
    return {"C": {"kind": "capacitor", "nets": ["a", "b"], "value": "10 pF", "case": case, **more}}


def three_pads():
    return {
        "cutout": {"size": ["4 mm", "10 mm"], "at": ["0 mm", "0 mm"]},
        "holes": [{"at": ["0 mm", "7 mm"], "diameter": "2.7 mm", "plated": False}],
        "pads": {
            "gate": {"at": ["-3 mm", "0 mm"], "size": ["2 mm", "1 mm"], "heading": "west"},
            "drain": {"at": ["3 mm", "0 mm"], "size": ["2 mm", "3 mm"], "heading": "east"},
            "slug": {
                "at": ["0 mm", "-4 mm"],
                "size": ["1 mm", "1 mm"],
                "ground": "vias",
                "thermal": "12 K/W",
            },
            "source": {"ground": "flange"},
        },
    }


class TestWorkedExample:
    """0603 resistor, nominal density, F = P = 0.05 mm, heel 0: digits of the worked example."""

    def test_unrounded(self):
        """Would catch a tolerance added where it is taken off, or one terminal counted once."""
        pattern = land_pattern("0603", rounded=False)
        assert [round(value / MM, 3) for value in (pattern.z, pattern.g, pattern.x)] == [2.412, 0.696, 0.960]
        assert round(pattern.pad_length / MM, 3) == 0.858
        assert round(2 * pattern.centre / MM, 3) == 1.554

    def test_rounded(self):
        """Would catch rounding of the pad instead of Z, G and X, or to another step."""
        pattern = land_pattern("0603")
        assert [round(value / MM, 6) for value in (pattern.z, pattern.g, pattern.x)] == [2.40, 0.70, 0.95]

    def test_other_tolerances(self):
        """Would catch F and P that are not inputs: F = P = 0.1 mm gives 2.445 / 0.684 / 0.987."""
        pattern = land_pattern("0603", fabrication=0.1 * MM, placement=0.1 * MM, rounded=False)
        assert [round(value / MM, 3) for value in (pattern.z, pattern.g, pattern.x)] == [2.445, 0.684, 0.987]


@pytest.mark.parametrize("case", list(BODIES))
def test_denser_levels_have_smaller_pads(case):
    """Would catch density levels swapped, or a toe taken for a heel."""
    most, nominal, least = (land_pattern(case, density) for density in ("most", "nominal", "least"))
    assert most.z > nominal.z > least.z
    assert most.x >= nominal.x >= least.x
    assert nominal.g > 0.1 * MM
    assert nominal.z > BODIES[case].length[1]


def test_chip_pad_1_lies_west_and_carries_the_first_net(size):
    """Would catch a chip drawn with its nets swapped."""
    lands = size(lines={}, parts=chip("0603")).lands["C"]
    one, two = lands.pads
    assert (one.pin, one.net, one.heading) == ("1", "a", 180.0)
    assert (two.pin, two.net, two.heading) == ("2", "b", 0.0)
    assert one.x == pytest.approx(-0.775 * MM) and two.x == pytest.approx(0.775 * MM)
    assert (one.width, one.height) == (pytest.approx(0.85 * MM), pytest.approx(0.95 * MM))


def test_courtyard_surrounds_pads_and_body(size):
    """Would catch a courtyard round the body alone."""
    lands = size(lines={}, parts=chip("0603")).lands["C"]
    assert lands.outline == pytest.approx((-0.85 * MM, -0.475 * MM, 0.85 * MM, 0.475 * MM))
    assert lands.courtyard == pytest.approx((-1.45 * MM, -0.725 * MM, 1.45 * MM, 0.725 * MM))


def test_density_comes_from_the_rule_file(size):
    """Would catch a density that is ignored, or notes that name another one."""
    sized = size(rules={"land_pattern": {"density": "least"}}, lines={}, parts=chip("0402"))
    pattern = land_pattern("0402", "least")
    assert sized.lands["C"].pads[0].height == pytest.approx(pattern.x)
    (note,) = sized.notes
    assert "0402" in note and "least density" in note and "toe 0.1, heel 0, side -0.05 mm" in note


PART = {
    "kind": "transistor",
    "footprint": "f",
    "pins": {"drain": "b", "gate": "a", "slug": "gnd", "source": "gnd"},
}


class TestFootprint:
    def test_pads_are_as_drawn_with_the_nets_of_the_pins(self, size):
        """Would catch pads matched by order instead of by pin."""
        lands = size(lines={}, parts={"Q": PART}, footprints={"f": three_pads()}).lands["Q"]
        gate = lands.pad("gate")
        assert (gate.net, gate.x, gate.width, gate.height) == ("a", -3 * MM, 2 * MM, 1 * MM)
        assert gate.heading == 180.0 and lands.pad("drain").heading == 0.0
        slug = lands.pad("slug")
        assert (slug.ground, slug.thermal, slug.net, slug.heading) == ("vias", 12.0, "gnd", 270.0)
        source = lands.pad("source")
        assert source.ground == "flange" and source.width == source.height == 0.0

    def test_outline_is_round_pads_and_cutout_and_the_courtyard_round_holes_too(self, size):
        """Would catch screw heads outside the courtyard."""
        lands = size(lines={}, parts={"Q": PART}, footprints={"f": three_pads()}).lands["Q"]
        assert lands.outline == pytest.approx((-4 * MM, -5 * MM, 4 * MM, 5 * MM))
        assert lands.courtyard == pytest.approx((-4.25 * MM, -5.25 * MM, 4.25 * MM, 8.6 * MM))
        assert lands.cutout == pytest.approx((-2 * MM, -5 * MM, 2 * MM, 5 * MM))
        assert lands.holes == ((0.0, pytest.approx(7 * MM), pytest.approx(2.7 * MM), False),)

    @staticmethod
    def load(nets, pads):
        both = {
            "tab": {"at": ["2 mm", "0 mm"], "size": ["1 mm", "1 mm"], "heading": "east"},
            "flange": {"ground": "flange"},
            "leg": {"at": ["-2 mm", "0 mm"], "size": ["1 mm", "1 mm"], "heading": "west"},
        }
        cutout = {"size": ["2 mm", "6 mm"], "at": ["0 mm", "0 mm"]}
        return {
            "lines": {},
            "ports": {"p": {"net": "a"}, "q": {"net": "b"}, "r": {"net": "a"}, "s": {"net": "b"}},
            "parts": {
                "R": {"kind": "resistor", "nets": nets, "value": "50 ohm", "footprint": "f"},
                "C": chip("0603")["C"],
            },
            "footprints": {"f": {"cutout": cutout, "pads": {name: both[name] for name in pads}}},
        }

    def test_two_nets_take_the_pads_in_file_order(self, size):
        """Would catch two-pad parts whose footprint is turned."""
        lands = size(**self.load(["b", "a"], ["tab", "leg"])).lands["R"]
        assert [(pad.pin, pad.net) for pad in lands.pads] == [("tab", "b"), ("leg", "a")]

    @pytest.mark.parametrize(
        ("nets", "pads"), [(["a", "gnd"], ["tab", "flange"]), (["gnd", "a"], ["flange", "tab"])]
    )
    def test_a_ground_pad_takes_ground(self, size, nets, pads):
        """Would catch a flange load with its tab on ground; pads stand in the order of the nets."""
        lands = size(**self.load(nets, pads)).lands["R"]
        assert [pad.net for pad in lands.pads] == nets
        assert lands.pad("tab").net == "a" and lands.pad("flange").net == "gnd"

    def test_a_ground_pad_on_another_net_is_refused(self, size):
        """Would catch a signal soldered to the carrier, whichever stage looks after it."""
        with pytest.raises(WrongInputError, match=r"parts\.R\.nets"):
            size(**self.load(["a", "b"], ["tab", "flange"]))
