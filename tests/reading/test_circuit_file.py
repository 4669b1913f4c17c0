"""The circuit file, one class a section of the contract: what is read, and what one slip brings.

Every slip must give exactly one fault, at its own line, under its full key path.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import pytest

from layoutgen.reading import Route

if TYPE_CHECKING:
    from conftest import Files

Slip = tuple[str, str, str, str, str]


def check(files: Files, slip: Slip) -> None:
    """Make a slip: old text, new text, key path, text on the faulty line, phrase of the message."""
    old, new, key, anchor, phrase = slip
    fault = files.change(old, new).fault()
    assert fault.key == key
    assert fault.location.line == files.line(anchor)
    assert fault.location.file == str(files.circuit)
    assert phrase in str(fault), str(fault)


def slips(*table: Slip) -> pytest.MarkDecorator:
    return pytest.mark.parametrize("slip", table, ids=lambda slip: f"{slip[2]}: {slip[4]}"[:70])


class TestDesign:
    def test_values(self, files: Files) -> None:
        """Every key arrives, in SI."""
        design = files.read().circuit.design
        assert design.title == "River gauge driver"
        assert design.frequency == 2.245e9
        assert design.band == (2.20e9, 2.29e9)
        assert design.sweep == (1e9, 4e9)
        assert design.points == 201
        assert design.revision == "A"

    def test_optional(self, files: Files) -> None:
        """Left out: sweep, points, revision."""
        files.change('sweep = ["1 GHz", "4 GHz"]\npoints = 201\nrevision = "A"\n', "")
        design = files.read().circuit.design
        assert (design.sweep, design.points, design.revision) == (None, 401, None)

    @slips(
        ('"2.245 GHz"', '"2.245 GHZ"', "design.frequency", "GHZ", "case-sensitive: GHz"),
        ('"2.245 GHz"', "2.245e9", "design.frequency", "2.245e9", "without a unit"),
        ('"2.245 GHz"', '"2.245 mm"', "design.frequency", "2.245 mm", "a length"),
        ('"2.245 GHz"', '"nan GHz"', "design.frequency", "nan", "not finite"),
        ('"2.245 GHz"', '"inf GHz"', "design.frequency", "inf", "not finite"),
        ('"2.245 GHz"', '"2.3 GHz"', "design.frequency", "2.3 GHz", "within band"),
        ('"2.245 GHz"', '"-2.245 GHz"', "design.frequency", "-2.245", "> 0"),
        ('"2.245 GHz"', "2024-01-01", "design.frequency", "2024", "date"),
        ('"2.245 GHz"', '"1e30 Hz"', "design.frequency", "1e30", "beyond any board"),
        ('frequency = "2.245 GHz"\n', "", "design.frequency", "[design]", "found nothing"),
        ("frequency =", "frequncy =", "design.frequncy", "frequncy", '"frequency"'),
        ('["2.20 GHz", "2.29 GHz"]', '["2.29 GHz", "2.20 GHz"]', "design.band", "band", "not rising"),
        ('["2.20 GHz", "2.29 GHz"]', '["2.20 GHz"]', "design.band", "band", "a list of 1"),
        ('["2.20 GHz", "2.29 GHz"]', '["2 GHz", "3 GHz", "4 GHz"]', "design.band", "band", "a list of 3"),
        ('["2.20 GHz", "2.29 GHz"]', '"2.2 GHz"', "design.band", "band", "a list of 2"),
        ('["2.20 GHz", "2.29 GHz"]', '["2.2 GHz", 2.3]', "design.band[1]", "band", "without a unit"),
        ('["1 GHz", "4 GHz"]', '["2.21 GHz", "4 GHz"]', "design.sweep", "sweep", "covers band"),
        ('["1 GHz", "4 GHz"]', '["4 GHz", "1 GHz"]', "design.sweep", "sweep", "not rising"),
        ("points = 201", "points = 201.0", "design.points", "points", "whole number"),
        ("points = 201", "points = true", "design.points", "points", "truth value"),
        ("points = 201", "points = 1", "design.points", "points", "from 2"),
        ("points = 201", f"points = {10**30}", "design.points", "points", "outside 64 bits"),
        ("River gauge driver", "a\\u0007b", "design.title", "title", "control character"),
        ("River gauge driver", "x" * 201, "design.title", "title", "201 characters"),
        ("River gauge driver", "", "design.title", "title", '""'),
        ("[design]", "[desing]", "desing", "[desing]", '"design"'),
    )
    def test_slips(self, files: Files, slip: Slip) -> None:
        """Wrong unit, bare number, order, range, spelling."""
        check(files, slip)


class TestSubstrate:
    def test_values(self, files: Files) -> None:
        """Every key arrives, in SI."""
        substrate = files.read().circuit.substrate
        assert substrate.relative_permittivity == 3.55
        assert substrate.loss_tangent == 0.0027
        assert substrate.height == 0.508e-3
        assert substrate.copper_thickness == 35e-6
        assert substrate.conductivity == 58e6
        assert substrate.copper_roughness == 1.2e-6

    def test_optional(self, files: Files) -> None:
        """The two marked keys have the contract's defaults."""
        files.change('conductivity = "58 MS/m"\ncopper_roughness = "1.2 um"\n', "")
        substrate = files.read().circuit.substrate
        assert (substrate.conductivity, substrate.copper_roughness) == (58e6, 0.0)

    def test_whole_number_is_a_number(self, files: Files) -> None:
        """A pure number may be written without a point."""
        substrate = files.change("= 3.55", "= 4").read().circuit.substrate
        assert substrate.relative_permittivity == 4.0
        assert isinstance(substrate.relative_permittivity, float)

    @slips(
        ("= 3.55", "= 0.99", "substrate.relative_permittivity", "= 0.99", ">= 1"),
        ("= 3.55", '= "3.55"', "substrate.relative_permittivity", '"3.55"', "a number"),
        ("= 3.55", "= inf", "substrate.relative_permittivity", "= inf", "inf"),
        ("= 3.55", "= nan", "substrate.relative_permittivity", "= nan", "nan"),
        ("= 3.55", "= true", "substrate.relative_permittivity", "= true", "truth value"),
        ("= 0.0027", "= -0.1", "substrate.loss_tangent", "= -0.1", ">= 0"),
        ('"0.508 mm"', '"0 mm"', "substrate.height", '"0 mm"', "> 0"),
        ('"0.508 mm"', '"-0.5 mm"', "substrate.height", '"-0.5 mm"', "> 0"),
        ('"0.508 mm"', '"1e-30 m"', "substrate.height", "1e-30", "beyond any board"),
        ('"0.508 mm"', '"3 m"', "substrate.height", "3 m", "beyond any board"),
        ('"0.508 mm"', "0.508", "substrate.height", "0.508", "without a unit"),
        ('"58 MS/m"', '"58 Ms/m"', "substrate.conductivity", "Ms/m", "case-sensitive: mS/m or MS/m"),
        ('"1.2 um"', '"-1.2 um"', "substrate.copper_roughness", "-1.2", ">= 0"),
        ("loss_tangent = 0.0027\n", "", "substrate.loss_tangent", "[substrate]", "found nothing"),
    )
    def test_slips(self, files: Files, slip: Slip) -> None:
        """Signs, kinds of number, plausible sizes."""
        check(files, slip)


class TestBoard:
    def test_values(self, files: Files) -> None:
        """Every key arrives."""
        board = files.read().circuit.board
        assert board.rules == "house.toml"
        assert board.size == (60e-3, 40e-3)
        assert (board.margin, board.corner_radius, board.mask_over_lines) == (1e-3, 1e-3, False)
        assert [(hole.at, hole.diameter, hole.plated) for hole in board.holes] == [
            ((3e-3, 3e-3), 2.7e-3, False),
            ((57e-3, 3e-3), 2.7e-3, True),
        ]

    def test_grows(self, files: Files) -> None:
        """Without a size the board grows to holes, ports and hints: they are no faults."""
        files.change('size = ["60 mm", "40 mm"]\n', "").change('["3 mm", "3 mm"]', '["300 mm", "3 mm"]')
        board = files.read().circuit.board
        assert board.size is None
        assert board.holes[0].at == (0.3, 3e-3)

    def test_grows_only_from_its_corner(self, files: Files) -> None:
        """The origin is the board's corner: nothing lies left of or below it."""
        files.change('size = ["60 mm", "40 mm"]\n', "").change('["3 mm", "3 mm"]', '["-3 mm", "3 mm"]')
        fault = files.fault()
        assert fault.key == "board.holes[0].at"
        assert "south-west corner" in fault.allowed

    def test_touching_the_edge_is_inside(self, files: Files) -> None:
        """A hole whose wall touches the outline lies wholly on the board."""
        files.change('["3 mm", "3 mm"]', '["1.35 mm", "1.35 mm"]').read()

    @slips(
        ('"house.toml"', '"/etc/house.toml"', "board.rules", "rules", "absolute"),
        ('"house.toml"', "'C:\\house.toml'", "board.rules", "rules", "absolute"),
        ('"house.toml"', "'\\\\server\\house.toml'", "board.rules", "rules", "absolute"),
        ('"house.toml"', '"hause.toml"', "board.rules", "rules", "no such file"),
        ('"house.toml"', '"two-layer-standart"', "board.rules", "rules", 'nearest is "two-layer-standard"'),
        ('"house.toml"', "1", "board.rules", "rules", "the number 1"),
        ('rules = "house.toml"\n', "", "board.rules", "[board]", "found nothing"),
        ('size = ["60 mm", "40 mm"]', 'size = ["60 mm", "40"]', "board.size[1]", "size", "without a unit"),
        ('margin = "1 mm"', 'margin = "-1 mm"', "board.margin", "margin", ">= 0"),
        ('margin = "1 mm"', 'margin = "20 mm"', "board.margin", "margin", "half"),
        ('corner_radius = "1 mm"', 'corner_radius = "21 mm"', "board.corner_radius", "corner_radius", "half"),
        ("= false\nholes", '= "no"\nholes', "board.mask_over_lines", "mask_over", "true or false"),
        ('["3 mm", "3 mm"]', '["1.3 mm", "3 mm"]', "board.holes[0].at", "1.3 mm", "not wholly on the board"),
        ('["57 mm", "3 mm"]', '["57 mm", "39 mm"]', "board.holes[1].at", "39 mm", "not wholly on the board"),
        ("plated = true", "plated = 1", "board.holes[1].plated", "plated = 1", "true or false"),
        (", plated = true", "", "board.holes[1].plated", '"57 mm"', "found nothing"),
        (
            'diameter = "2.7 mm", plated = true',
            'diametre = "2.7 mm", plated = true',
            "board.holes[1].diametre",
            "diametre",
            '"diameter"',
        ),
    )
    def test_slips(self, files: Files, slip: Slip) -> None:
        """Rule file, outline, holes."""
        check(files, slip)


class TestGround:
    def test_values(self, files: Files) -> None:
        """Percent becomes a fraction; the gap is optional."""
        ground = files.read().circuit.ground
        assert ground is not None
        assert (ground.max_impedance_shift, ground.gap, ground.fence) == (0.01, None, True)

    def test_left_out(self, files: Files) -> None:
        """Without the table there is no pour."""
        files.change('[ground]\nmax_impedance_shift = "1 %"\nfence = true\n', "")
        assert files.read().circuit.ground is None

    def test_defaults(self, files: Files) -> None:
        """An empty table is a pour with the contract's defaults."""
        files.change('max_impedance_shift = "1 %"\nfence = true\n', "")
        ground = files.read().circuit.ground
        assert ground is not None
        assert (ground.max_impedance_shift, ground.fence) == (0.01, True)

    @slips(
        ('"1 %"', "0.01", "ground.max_impedance_shift", "0.01", "without a unit"),
        ('"1 %"', '"100 %"', "ground.max_impedance_shift", "100 %", "< 100 %"),
        ('"1 %"', '"0 %"', "ground.max_impedance_shift", "0 %", "> 0"),
        ('"1 %"', '"1 %"\ngap = "-1 mm"', "ground.gap", "-1 mm", ">= 0"),
        ("fence = true", 'fence = "true"', "ground.fence", "fence", "true or false"),
    )
    def test_slips(self, files: Files, slip: Slip) -> None:
        """Percentages and signs."""
        check(files, slip)


class TestPorts:
    def test_values(self, files: Files) -> None:
        """Ports arrive in file order with their keys."""
        ports = files.read().circuit.ports
        assert list(ports) == ["rf_in", "rf_out", "vg"]
        assert (ports["rf_in"].net, ports["rf_in"].impedance, ports["rf_in"].at) == ("in", 50, 16e-3)
        assert (ports["rf_out"].impedance, ports["rf_out"].current) == (45 + 5j, 10e-3)
        vg = ports["vg"]
        assert (vg.kind, vg.voltage, vg.edge, vg.impedance, vg.to_edge) == ("dc", -2.8, "north", None, False)

    def test_rf_impedance_left_out(self, files: Files) -> None:
        """An RF port without an impedance is one of 50 ohm; a dc port has none."""
        files.change('impedance = "45+5j ohm"\n', "")
        assert files.read().circuit.ports["rf_out"].impedance == 50

    @slips(
        ('voltage = "-2.8 V"\n', "", "ports.vg.voltage", "[ports.vg]", "voltage"),
        ('[ports.vg]\nkind = "dc"', "[ports.vg]", "ports.vg.voltage", "voltage", 'kind = "dc"'),
        ('kind = "dc"', 'kind = "DC"', "ports.vg.kind", 'kind = "DC"', '"rf" or "dc"'),
        (
            'voltage = "-2.8 V"',
            'voltage = "-2.8 V"\nimpedance = "50 ohm"',
            "ports.vg.impedance",
            'impedance = "50 ohm"\nedge = "north"',
            "rf",
        ),
        ('net = "out"', 'net = "gnd"', "ports.rf_out.net", 'net = "gnd"', "reserved"),
        ('net = "out"', 'net = "open"', "ports.rf_out.net", 'net = "open"', "reserved"),
        ('net = "out"', 'nett = "out"', "ports.rf_out.nett", "nett", '"net"'),
        ('net = "out"\n', "", "ports.rf_out.net", "[ports.rf_out]", "found nothing"),
        ('impedance = "45+5j ohm"', 'impedance = "-45+5j ohm"', "ports.rf_out.impedance", "-45", "real part"),
        ('impedance = "45+5j ohm"', 'impedance = "5j ohm"', "ports.rf_out.impedance", '"5j', "real part"),
        ('edge = "west"', 'edge = "left"', "ports.rf_in.edge", "left", '"west", "east", "north" or "south"'),
        ('edge = "west"\n', "", "ports.rf_in.at", 'at = "16 mm"', "edge"),
        ('at = "16 mm"', 'at = "40.1 mm"', "ports.rf_in.at", "40.1 mm", "0 mm to 40 mm"),
        ('at = "16 mm"', 'at = "-1 mm"', "ports.rf_in.at", "-1 mm", "0 mm to 40 mm"),
        ('at = "16 mm"', 'to_edge = 1\nat = "16 mm"', "ports.rf_in.to_edge", "to_edge", "true or false"),
        ('current = "10 mA"', 'current = "10 mV"', "ports.rf_out.current", "10 mV", "a current"),
        ("[ports.rf_out]", "[port.rf_out]", "port", "[port.rf_out]", '"ports"'),
        ("[ports.rf_out]", '[ports."rf out"]', 'ports."rf out"', "rf out", "A-Z a-z 0-9 _ -"),
        ("[ports.rf_out]", f"[ports.{'x' * 65}]", f'ports."{"x" * 64}..."', "xxx", "1 to 64"),
    )
    def test_slips(self, files: Files, slip: Slip) -> None:
        """Kinds, edges, reserved nets, names."""
        check(files, slip)


class TestLines:
    def test_values(self, files: Files) -> None:
        """Lines arrive in file order; angles in radians; free stays a word."""
        lines = files.read().circuit.lines
        assert list(lines) == ["series_in", "gate_feed", "supply", "bypass", "wall", "stub"]
        assert (lines["series_in"].nets, lines["series_in"].impedance) == (("in", "a"), 50.0)
        assert lines["series_in"].angle == math.radians(24.0)
        assert (lines["supply"].length, lines["supply"].impedance, lines["supply"].width) == (
            "free",
            None,
            None,
        )
        bypass = lines["bypass"]
        assert (bypass.shape, bypass.nets, bypass.sector) == ("radial", ("vg_rf",), math.radians(60.0))
        assert (bypass.radius, bypass.inner_radius) == (9e-3, 0.4e-3)
        assert (lines["wall"].kind, lines["wall"].gap) == ("grounded_coplanar", 0.3e-3)
        assert (lines["stub"].nets, lines["stub"].width, lines["stub"].length) == (("a2",), 1.1e-3, 5e-3)

    def test_current_override(self, files: Files) -> None:
        """A line's own current is read, with its sign."""
        files.change('angle = "24 deg"', 'angle = "24 deg"\ncurrent = "-0.2 A"')
        assert files.read().circuit.lines["series_in"].current == -0.2

    def test_line_to_ground(self, files: Files) -> None:
        """gnd may stand at either end of a line."""
        files.append('[lines.short]\nnets = ["gnd", "a"]\nimpedance = "50 ohm"\nangle = "10 deg"\n')
        assert files.read().circuit.lines["short"].nets == ("gnd", "a")

    def test_radial_of_the_usual_kind(self, files: Files) -> None:
        """The default kind may be written on a radial stub."""
        files.change('sector = "60 deg"', 'sector = "60 deg"\nkind = "microstrip"').read()

    def test_radial_with_sector_alone(self, files: Files) -> None:
        """Both radii may be left out."""
        files.change('radius = "9 mm"\ninner_radius = "0.4 mm"\n', "")
        assert files.read().circuit.lines["bypass"].radius is None

    @slips(
        (
            'impedance = "95 ohm"\n',
            "",
            "lines.gate_feed.impedance",
            "[lines.gate_feed]",
            "neither impedance nor width",
        ),
        (
            'impedance = "95 ohm"',
            'impedence = "95 ohm"',
            "lines.gate_feed.impedence",
            "impedence",
            '"impedance"',
        ),
        (
            'impedance = "95 ohm"',
            'impedance = "95 Ohm"',
            "lines.gate_feed.impedance",
            "95 Ohm",
            "case-sensitive: ohm",
        ),
        (
            'impedance = "95 ohm"',
            'impedance = "95+1j ohm"',
            "lines.gate_feed.impedance",
            "95+1j",
            "a complex value",
        ),
        (
            'impedance = "95 ohm"',
            'impedance = "95 ohm"\nwidth = "1 mm"',
            "lines.gate_feed.width",
            'width = "1 mm"',
            "not both",
        ),
        ('impedance = "95 ohm"', 'width = "0 mm"', "lines.gate_feed.width", '"0 mm"', "> 0"),
        (
            'angle = "24 deg"',
            'angle = "24 deg"\nlength = "1 mm"',
            "lines.series_in.length",
            'length = "1 mm"',
            "not both",
        ),
        ('angle = "24 deg"\n', "", "lines.series_in.angle", "[lines.series_in]", "neither angle nor length"),
        ('angle = "24 deg"', 'angle = "0 deg"', "lines.series_in.angle", "0 deg", "> 0"),
        ('angle = "24 deg"', 'angle = "24 mm"', "lines.series_in.angle", "24 mm", "a length"),
        ('angle = "24 deg"', 'length = "Free"', "lines.series_in.length", "Free", '"free"'),
        ('length = "5 mm"', 'length ="free"', "lines.stub.length", 'length ="free"', "open stub"),
        ('["in", "a"]', '["in", "in"]', "lines.series_in.nets[1]", '["in", "in"]', "another net"),
        ('["in", "a"]', '["gnd", "gnd"]', "lines.series_in.nets[1]", '["gnd", "gnd"]', "another net"),
        ('["in", "a"]', '["in", "open"]', "lines.series_in.nets[1]", '["in", "open"]', "reserved"),
        ('["in", "a"]', '["in", "a b"]', "lines.series_in.nets[1]", '["in", "a b"]', "A-Z a-z 0-9 _ -"),
        ('["in", "a"]', '["in", 7]', "lines.series_in.nets[1]", '["in", 7]', "the number 7"),
        ('["in", "a"]', '["in", "a", "g"]', "lines.series_in.nets", '["in", "a", "g"]', "a list of 1 or 2"),
        ('["in", "a"]', "[]", "lines.series_in.nets", "nets = []", "a list of 1 or 2"),
        ('nets = ["a2"]', 'nets = ["gnd"]', "lines.stub.nets[0]", 'nets = ["gnd"]', "joins nothing"),
        ('sector = "60 deg"\n', "", "lines.bypass.sector", "[lines.bypass]", "opening angle"),
        ('sector = "60 deg"', 'sector = "180 deg"', "lines.bypass.sector", "180 deg", "< 180 deg"),
        ('"0.4 mm"', '"9 mm"', "lines.bypass.inner_radius", "inner_radius", "less than radius"),
        ('shape = "radial"\n', "", "lines.bypass.sector", "sector", 'shape = "radial"'),
        ('shape = "radial"', 'shape = "round"', "lines.bypass.shape", '"round"', '"radial"'),
        (
            'sector = "60 deg"',
            'sector = "60 deg"\nimpedance = "50 ohm"',
            "lines.bypass.impedance",
            'impedance = "50 ohm"\nradius',
            "radial stub",
        ),
        ('["vg_rf"]', '["vg_rf", "vg"]', "lines.bypass.nets", '["vg_rf", "vg"]\nshape', "one net"),
        ('gap = "0.3 mm"\n', "", "lines.wall.gap", "[lines.wall]", "strip to pour"),
        ('kind = "grounded_coplanar"\n', "", "lines.wall.gap", "gap", "grounded_coplanar"),
        (
            'kind = "grounded_coplanar"',
            'kind = "coplanar"',
            "lines.wall.kind",
            '"coplanar"',
            "grounded_coplanar",
        ),
        (
            'sector = "60 deg"\nradius',
            'angle = "60 deg"\nsector = "60 deg"\nradius',
            "lines.bypass.angle",
            'angle = "60 deg"',
            "radial stub",
        ),
    )
    def test_slips(self, files: Files, slip: Slip) -> None:
        """Alternatives, ends, radial stubs, coplanar lines."""
        check(files, slip)


class TestCoupled:
    def test_values(self, files: Files) -> None:
        """Four nets, two impedances."""
        pair = files.read().circuit.coupled["pickup"]
        assert pair.nets == ("a1", "a2", "b1", "open")
        assert (pair.even_impedance, pair.odd_impedance, pair.angle) == (56.0, 45.0, math.radians(90.0))

    def test_dimensions(self, files: Files) -> None:
        """Width and gap stand for the impedances, a length for the angle."""
        files.change(
            'even_impedance = "56 ohm"\nodd_impedance = "45 ohm"\nangle = "90 deg"',
            'width = "1 mm"\ngap = "0.2 mm"\nlength = "20 mm"',
        )
        pair = files.read().circuit.coupled["pickup"]
        assert (pair.width, pair.gap, pair.length, pair.angle) == (1e-3, 0.2e-3, 20e-3, None)

    @slips(
        (
            '"56 ohm"',
            '"45 ohm"',
            "coupled.pickup.even_impedance",
            "even_impedance",
            "more than odd_impedance",
        ),
        (
            'even_impedance = "56 ohm"\n',
            "",
            "coupled.pickup.even_impedance",
            "[coupled.pickup]",
            "found nothing",
        ),
        (
            'odd_impedance = "45 ohm"\n',
            "",
            "coupled.pickup.odd_impedance",
            "[coupled.pickup]",
            "found nothing",
        ),
        (
            'even_impedance = "56 ohm"\nodd_impedance = "45 ohm"\n',
            "",
            "coupled.pickup.even_impedance",
            "[coupled.pickup]",
            "neither",
        ),
        (
            'odd_impedance = "45 ohm"',
            'odd_impedance = "45 ohm"\nwidth = "1 mm"',
            "coupled.pickup.width",
            'width = "1 mm"',
            "not both",
        ),
        (
            'odd_impedance = "45 ohm"\nangle = "90 deg"',
            'odd_impedance = "45 ohm"',
            "coupled.pickup.angle",
            "[coupled.pickup]",
            "neither",
        ),
        (
            'odd_impedance = "45 ohm"\nangle = "90 deg"',
            'odd_impedance = "45 ohm"\nlength ="free"',
            "coupled.pickup.length",
            'length ="free"',
            "a length",
        ),
        ('"b1", "open"]', '"b1"]', "coupled.pickup.nets", '["a1", "a2", "b1"]', "a list of 4"),
        ('"b1", "open"]', '"b1", "b1"]', "coupled.pickup.nets[3]", '"b1", "b1"]', "second line"),
        ('"b1", "open"]', '"b1", "opn"]', "coupled.pickup.nets[3]", '"opn"]', "used once"),
    )
    def test_slips(self, files: Files, slip: Slip) -> None:
        """Alternatives and ends."""
        check(files, slip)


class TestParts:
    def test_values(self, files: Files) -> None:
        """Every key of chips and of a transistor arrives."""
        parts = files.read().circuit.parts
        c1, q1 = parts["C1"], parts["Q1"]
        assert list(parts) == ["C1", "C2", "R1", "Q1"]
        assert (c1.kind, c1.nets, c1.value, c1.case) == ("capacitor", ("a", "g"), 8.2e-12, "0603")
        assert (c1.series_resistance, c1.series_inductance) == (0.1, 0.5e-9)
        assert (c1.data, c1.planes) == ("c1.s2p", "pad_inner")
        assert c1.rating is not None
        assert (c1.rating.voltage, c1.rating.current, c1.rating.power) == (100.0, 1.0, 0.1)
        assert (q1.footprint, q1.pins) == ("flange", {"gate": "g", "drain": "d", "source": "gnd"})
        assert [(dc.from_, dc.to, dc.current) for dc in q1.dc] == [("drain", "source", 0.35)]
        assert q1.terminations == {"gate": 9 - 6j, "drain": 7 + 4j}

    def test_defaults(self, files: Files) -> None:
        """What may be left out of a chip."""
        c2 = files.read().circuit.parts["C2"]
        assert (c2.series_resistance, c2.series_inductance, c2.data, c2.planes) == (
            0.0,
            0.0,
            None,
            "pad_outer",
        )
        assert (c2.rating, c2.dc, c2.terminations, c2.pins) == (None, (), {}, None)

    def test_each_rating_is_optional(self, files: Files) -> None:
        """One rating alone is enough."""
        files.change(', current = "1 A", power = "0.1 W" }', " }")
        rating = files.read().circuit.parts["C1"].rating
        assert rating is not None
        assert (rating.voltage, rating.current, rating.power) == (100.0, None, None)

    def test_data_of_a_transistor(self, files: Files) -> None:
        """Data need their ports; terminations are then left out."""
        (files.folder / "q1.s2p").write_text("# GHz S MA R 50\n", encoding="utf-8")
        files.change(
            'terminations = { gate = "9-6j ohm", drain = "7 + 4j ohm" }',
            'data = "q1.s2p"\ndata_ports = ["gate", "drain"]',
        )
        assert files.read().circuit.parts["Q1"].data_ports == ("gate", "drain")

    def test_one_port_data_of_a_shunt_part(self, files: Files) -> None:
        """A file of one port describes a part with an end on gnd."""
        (files.folder / "r1.S1P").write_text("# GHz S MA R 50\n", encoding="utf-8")
        files.change('case = "0402"', 'case = "0402"\ndata = "r1.S1P"')
        assert files.read().circuit.parts["R1"].data == "r1.S1P"

    @slips(
        ('kind = "resistor"', 'kind = "resister"', "parts.R1.kind", "resister", '"resistor"'),
        ('kind = "resistor"\n', "", "parts.R1.kind", "[parts.R1]", "found nothing"),
        ('value = "50 ohm"', 'value = "50 nH"', "parts.R1.value", '"50 nH"', "an inductance"),
        ('value = "50 ohm"', "value = 50", "parts.R1.value", "value = 50", "without a unit"),
        ('value = "50 ohm"', 'value = "0 ohm"', "parts.R1.value", '"0 ohm"', "> 0"),
        ('value = "50 ohm"\n', "", "parts.R1.value", "[parts.R1]", "the resistor's value"),
        ('case = "0402"', "case = 402", "parts.R1.case", "case = 402", '"0402"'),
        ('case = "0402"', 'case = "1608"', "parts.R1.case", '"1608"', '"0603"'),
        ('case = "0402"\n', "", "parts.R1.case", "[parts.R1]", "neither case nor footprint"),
        (
            'case = "0402"',
            'case = "0402"\nfootprint = "flange"',
            "parts.R1.footprint",
            'footprint = "flange"',
            "not both",
        ),
        ('case = "0402"', 'footprint = "flange"', "parts.R1.footprint", 'footprint = "flange"', "3 pads"),
        ('case = "0402"', 'case = "0402"\ndc = []', "parts.R1.dc", "dc = []", "pins"),
        ('nets = ["b1", "gnd"]\n', "", "parts.R1.nets", "[parts.R1]", "neither nets nor pins"),
        ('nets = ["b1", "gnd"]', 'nets = ["b1", "b1"]', "parts.R1.nets[1]", '["b1", "b1"]', "another net"),
        (
            'nets = ["b1", "gnd"]',
            'nets = ["gnd", "gnd"]',
            "parts.R1.nets[1]",
            '["gnd", "gnd"]',
            "another net",
        ),
        ('nets = ["b1", "gnd"]', 'nets = ["b1"]', "parts.R1.nets", '["b1"]', "a list of 2"),
        (
            'series_resistance = "0.1 ohm"',
            'series_resistance = "-1 ohm"',
            "parts.C1.series_resistance",
            "-1 ohm",
            ">= 0",
        ),
        ('data = "c1.s2p"', 'data = "c2.s2p"', "parts.C1.data", "c2.s2p", "no such file"),
        ('data = "c1.s2p"', 'data = "/tmp/c1.s2p"', "parts.C1.data", "/tmp", "absolute"),
        ('data = "c1.s2p"', 'data = "c1.csv"', "parts.C1.data", "c1.csv", "Touchstone"),
        ('data = "c1.s2p"', 'data = "."', "parts.C1.data", 'data = "."', "Touchstone"),
        (
            'planes = "pad_inner"',
            'planes = "inner"',
            "parts.C1.planes",
            '"inner"',
            '"pad_outer" or "pad_inner"',
        ),
        ('voltage = "100 V"', 'voltage = "100 A"', "parts.C1.rating.voltage", "100 A", "a current"),
        ('voltage = "100 V"', 'voltge = "100 V"', "parts.C1.rating.voltge", "voltge", '"voltage"'),
        ('footprint = "flange"', 'footprint = "flnge"', "parts.Q1.footprint", "flnge", '"flange"'),
        ('footprint = "flange"\n', "", "parts.Q1.footprint", "[parts.Q1]", "[footprints]"),
        (
            'footprint = "flange"',
            'footprint = "flange"\ncase = "0603"',
            "parts.Q1.case",
            'case = "0603"\npins',
            "two pads",
        ),
        ("pins = { gate =", "pins = { gat =", "parts.Q1.pins.gat", "gat =", '"gate"'),
        (', source = "gnd" }', " }", "parts.Q1.pins", "pins = {", 'the pad "source"'),
        (', source = "gnd" }', ', source = "d" }', "parts.Q1.pins.source", "pins = {", '"gnd"'),
        ('from = "drain"', 'from = "dran"', "parts.Q1.dc[0].from", "dran", '"drain"'),
        ('from = "drain"', 'from = "source"', "parts.Q1.dc[0].to", 'from = "source"', "another pin"),
        ('from = "drain", ', "", "parts.Q1.dc[0].from", "dc = [", "found nothing"),
        ('gate = "9-6j ohm"', 'gate = "-9-6j ohm"', "parts.Q1.terminations.gate", "-9-6j", "real part"),
        (
            'gate = "9-6j ohm"',
            'gate = "9-j6 ohm"',
            "parts.Q1.terminations.gate",
            "9-j6",
            "not a number and a unit",
        ),
        (
            'gate = "9-6j ohm"',
            'source = "9-6j ohm"',
            "parts.Q1.terminations.source",
            "terminations",
            "on gnd",
        ),
        (
            'gate = "9-6j ohm"',
            'base = "9-6j ohm"',
            "parts.Q1.terminations.base",
            "terminations",
            '"gate", "drain" or "source"',
        ),
        ("dc = [{", 'data_ports = ["gate"]\ndc = [{', "parts.Q1.data_ports", "data_ports", "without data"),
        ("dc = [{", 'value = "1 pF"\ndc = [{', "parts.Q1.value", 'value = "1 pF"', "resistor"),
        (
            "dc = [{",
            'series_inductance = "1 nH"\ndc = [{',
            "parts.Q1.series_inductance",
            'series_inductance = "1 nH"',
            "two pads",
        ),
    )
    def test_slips(self, files: Files, slip: Slip) -> None:
        """Kinds, pads, data, pins."""
        check(files, slip)

    def test_terminations_beside_data(self, files: Files) -> None:
        """Both at once are wrong input."""
        fault = files.change("dc = [{", 'data = "c1.s2p"\ndata_ports = ["gate", "drain"]\ndc = [{').fault()
        assert fault.key == "parts.Q1.terminations"
        assert f"data (line {files.line('data_ports') - 1})" in fault.found

    @pytest.mark.parametrize(
        ("name", "keys", "key", "phrase"),
        [
            ("q1.s2p", 'data = "q1.s2p"', "data_ports", "found nothing"),
            ("q1.s3p", 'data = "q1.s3p"\ndata_ports = ["gate", "drain"]', "data", "a file of 3 ports"),
            ("q1.s2p", 'data = "q1.s2p"\ndata_ports = ["gate", "gate"]', "data_ports[1]", "each pin once"),
            ("q1.s2p", 'data = "q1.s2p"\ndata_ports = ["gate", "drein"]', "data_ports[1]", '"drain"'),
        ],
    )
    def test_data_of_a_transistor_slips(
        self, files: Files, name: str, keys: str, key: str, phrase: str
    ) -> None:
        """Ports of the data are pins, each once, as many as the file's name tells."""
        (files.folder / name).write_text("# GHz S MA R 50\n", encoding="utf-8")
        files.change('terminations = { gate = "9-6j ohm", drain = "7 + 4j ohm" }', keys)
        fault = files.fault()
        assert fault.key == f"parts.Q1.{key}"
        assert phrase in str(fault)

    @pytest.mark.parametrize(("name", "phrase"), [("c1.s1p", "one port"), ("c1.s3p", "3 ports")])
    def test_ports_of_a_chip(self, files: Files, name: str, phrase: str) -> None:
        """A chip in series has two ports, one only with an end on gnd."""
        (files.folder / name).write_text("# GHz S MA R 50\n", encoding="utf-8")
        fault = files.change('"c1.s2p"', f'"{name}"').fault()
        assert fault.key == "parts.C1.data"
        assert phrase in fault.found

    def test_kind_faulty_hides_nothing_else(self, files: Files) -> None:
        """A faulty kind is one fault: the value is not judged by it."""
        assert files.change('kind = "resistor"', 'kind = "ohm"').fault().key == "parts.R1.kind"


class TestFootprints:
    def test_values(self, files: Files) -> None:
        """Headings are degrees; a flange pin has no pad."""
        footprint = files.read().circuit.footprints["flange"]
        assert footprint.cutout is not None
        assert (footprint.cutout.size, footprint.cutout.at) == ((4.4e-3, 10.4e-3), (0.0, 0.0))
        assert footprint.holes[0].at == (0.0, 7.2e-3)
        gate, source = footprint.pads["gate"], footprint.pads["source"]
        assert (gate.at, gate.size, gate.heading, gate.ground) == (
            (-3.6e-3, 0.0),
            (2.4e-3, 2e-3),
            180.0,
            None,
        )
        assert (source.at, source.size, source.heading, source.ground) == (None, None, None, "flange")

    def test_exposed_pad(self, files: Files) -> None:
        """A pad over thermal vias needs no heading."""
        files.change(
            'pads.source = { ground = "flange" }',
            'pads.source = { at = ["0 mm", "0 mm"], size = ["2 mm", "2 mm"], '
            'ground = "vias", thermal = "12 K/W" }',
        )
        pad = files.read().circuit.footprints["flange"].pads["source"]
        assert (pad.ground, pad.thermal, pad.heading) == ("vias", 12.0, None)

    @slips(
        (
            'heading = "west"',
            'heading = "left"',
            "footprints.flange.pads.gate.heading",
            "left",
            '"east", "north"',
        ),
        ('heading = "west"', "heading = 180", "footprints.flange.pads.gate.heading", "180", "without a unit"),
        (', heading = "west"', "", "footprints.flange.pads.gate.heading", "pads.gate", "found nothing"),
        (
            'size = ["2.4 mm", "2.0 mm"], ',
            "",
            "footprints.flange.pads.gate.size",
            "pads.gate",
            "found nothing",
        ),
        ('"2.0 mm"]', '"0 mm"]', "footprints.flange.pads.gate.size[1]", "pads.gate", "> 0"),
        (
            'ground = "flange"',
            'ground = "flange", heading = "west"',
            "footprints.flange.pads.source.heading",
            "pads.source",
            "no pad",
        ),
        (
            'ground = "flange"',
            'ground = "flange", thermal = "1 K/W"',
            "footprints.flange.pads.source.thermal",
            "pads.source",
            "vias",
        ),
        (
            'ground = "flange"',
            'ground = "carrier"',
            "footprints.flange.pads.source.ground",
            "pads.source",
            '"flange" or "vias"',
        ),
        (
            'cutout = { size = ["4.4 mm", "10.4 mm"], at = ["0 mm", "0 mm"] }\n',
            "",
            "footprints.flange.pads.source.ground",
            "pads.source",
            "cut-out",
        ),
        (
            'cutout = { size = ["4.4 mm", "10.4 mm"], at',
            'cutout = { size = ["4.4 mm", "-1 mm"], at',
            "footprints.flange.cutout.size[1]",
            "cutout",
            "> 0",
        ),
        ("pads.gate", "pad.gate", "footprints.flange.pad", "pad.gate", '"pads"'),
    )
    def test_slips(self, files: Files, slip: Slip) -> None:
        """What pads need and exclude."""
        check(files, slip)


class TestLayout:
    def test_values(self, files: Files) -> None:
        """Headings in degrees; a route alternates lengths [m] and turns [deg], left positive."""
        layout = files.read().circuit.layout
        assert layout.spine == ("rf_in", "Q1", "rf_out")
        feed, q1 = layout.hints["gate_feed"], layout.hints["Q1"]
        assert feed.leave == 90.0
        assert feed.route == Route((4e-3, None, None), (90.0, -45.0))
        assert (q1.at, q1.heading) == ((30e-3, 20e-3), 0.0)

    def test_left_out(self, files: Files) -> None:
        """Without the table there are no hints."""
        text = files.circuit.read_text(encoding="utf-8")
        files.circuit.write_text(text[: text.index("[layout]")], encoding="utf-8")
        layout = files.read().circuit.layout
        assert (layout.spine, layout.hints) == (None, {})

    @pytest.mark.parametrize(
        ("route", "expected"),
        [
            ('["*"]', Route((None,), ())),
            ('["1 mm", "right", "40 mil"]', Route((1e-3, 1.016e-3), (-90.0,))),
            ('["1 mm", "left 30 deg", "*"]', Route((1e-3, None), (30.0,))),
            ('["1 mm", "left 179 deg", "*"]', Route((1e-3, None), (179.0,))),
        ],
    )
    def test_routes(self, files: Files, route: str, expected: Route) -> None:
        """Words of turns and lengths."""
        files.change('["4 mm", "left", "*", "right 45 deg", "*"]', route)
        assert files.read().circuit.layout.hints["gate_feed"].route == expected

    @pytest.mark.parametrize(
        ("route", "phrase"),
        [
            ("[]", "a list of 0"),
            ('"4 mm"', '"4 mm"'),
            ('["left", "4 mm"]', "where a length belongs"),
            ('["4 mm", "left"]', "not ending with a length"),
            ('["4 mm", "5 mm", "4 mm"]', "where a turn belongs"),
            ('["4 mm", "left", 4]', "without a unit"),
            ('["4 mm", "up", "4 mm"]', "where a turn belongs"),
            ('["4 mm", "left 180 deg", "4 mm"]', "< 180 deg"),
            ('["4 mm", "left -45 deg", "4 mm"]', "> 0 deg"),
            ('["4 mm", "left 361 deg", "4 mm"]', "< 180 deg"),
            ('["4 mm", "left 45", "4 mm"]', "without a unit"),
            ('["-4 mm"]', "-4 mm"),
            ('["0 mm"]', "0 mm"),
        ],
    )
    def test_faulty_routes(self, files: Files, route: str, phrase: str) -> None:
        """A route is a strict alternation that starts and ends with a length."""
        fault = files.change('["4 mm", "left", "*", "right 45 deg", "*"]', route).fault()
        assert fault.key == "layout.hints.gate_feed.route"
        assert phrase in str(fault)

    @slips(
        ('"Q1", "rf_out"]', '"Q2", "rf_out"]', "layout.spine[1]", "spine", "unknown name"),
        ('"Q1", "rf_out"]', '"rf_in", "rf_out"]', "layout.spine[1]", "spine", "each element once"),
        ('["rf_in", "Q1", "rf_out"]', '["rf_in"]', "layout.spine", "spine", "at least 2"),
        (
            "[layout.hints.gate_feed]",
            "[layout.hints.gatefeed]",
            "layout.hints.gatefeed",
            "gatefeed",
            '"gate_feed"',
        ),
        (
            "[layout.hints.gate_feed]",
            "[layout.hint.gate_feed]",
            "layout.hint",
            "[layout.hint.gate_feed]",
            '"hints"',
        ),
        ('leave = "north"', 'leave = "up"', "layout.hints.gate_feed.leave", '"up"', '"north"'),
        (
            'leave = "north"',
            'heading = "north"',
            "layout.hints.gate_feed.heading",
            'heading = "north"',
            "leave and route",
        ),
        (
            'heading = "east"\n\n[tolerance]',
            'leave = "east"\n\n[tolerance]',
            "layout.hints.Q1.leave",
            'leave = "east"',
            "at and heading",
        ),
        (
            'at = ["30 mm", "20 mm"]',
            'at = ["30 mm", "41 mm"]',
            "layout.hints.Q1.at",
            "41 mm",
            "not wholly on the board",
        ),
        (
            'at = ["30 mm", "20 mm"]',
            'at = ["4 mm", "20 mm"]',
            "layout.hints.Q1.at",
            '"4 mm", "20 mm"',
            'the pad "gate"',
        ),
        (
            'at = ["30 mm", "20 mm"]',
            'at = ["30 mm", "32 mm"]',
            "layout.hints.Q1.at",
            "32 mm",
            "hole 0 of the footprint",
        ),
    )
    def test_slips(self, files: Files, slip: Slip) -> None:
        """Names of elements, keys that suit them, places on the board."""
        check(files, slip)

    def test_port_is_no_hint(self, files: Files) -> None:
        """A port's place belongs into its own table."""
        fault = files.change(
            "[layout.hints.Q1]", '[layout.hints.rf_in]\nat = ["1 mm", "1 mm"]\n[layout.hints.Q1]'
        ).fault()
        assert fault.key == "layout.hints.rf_in.at"
        assert "edge and at" in fault.allowed

    @pytest.mark.parametrize("heading", ["east", "west"])
    def test_turned_footprint_stays_on_the_board(self, files: Files, heading: str) -> None:
        """Pads are turned before they are judged: 4.8 mm from the west edge just holds the pads east-west."""
        files.change('at = ["30 mm", "20 mm"]', 'at = ["4.8 mm", "20 mm"]')
        files.change('heading = "east"\n\n[tol', f'heading = "{heading}"\n\n[tol').read()

    def test_turned_hole_leaves_the_board(self, files: Files) -> None:
        """Turned north, the flange's screw hole lies west of the board."""
        files.change('at = ["30 mm", "20 mm"]', 'at = ["5 mm", "20 mm"]')
        fault = files.change('heading = "east"\n\n[tol', 'heading = "north"\n\n[tol').fault()
        assert "hole 0" in fault.found


class TestTolerance:
    def test_values(self, files: Files) -> None:
        """Plus-minus limits in SI."""
        tolerance = files.read().circuit.tolerance
        assert tolerance is not None
        assert (tolerance.relative_permittivity, tolerance.height) == (0.05, 0.02e-3)
        assert (tolerance.width, tolerance.value) == (0.02e-3, 0.05)

    def test_left_out_is_zero(self, files: Files) -> None:
        """A limit that is left out does not vary."""
        tolerance = files.change('value = "5 %"\n', "").read().circuit.tolerance
        assert tolerance is not None
        assert tolerance.value == 0.0

    @slips(
        (
            'height = "0.02 mm"',
            'height = "0.6 mm"',
            "tolerance.height",
            "0.6 mm",
            "less than substrate.height",
        ),
        (
            "relative_permittivity = 0.05",
            "relative_permittivity = 2.6",
            "tolerance.relative_permittivity",
            "= 2.6",
            "at most",
        ),
        ('value = "5 %"', "value = 0.05", "tolerance.value", "value = 0.05", "without a unit"),
        ('value = "5 %"', 'value = "100 %"', "tolerance.value", "100 %", "< 100 %"),
    )
    def test_slips(self, files: Files, slip: Slip) -> None:
        """Limits leave something of what they limit."""
        check(files, slip)
