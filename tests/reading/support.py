"""A faultless pair of files, and a way to break them: shared by the tests of reading."""

from __future__ import annotations

from pathlib import Path

import pytest

from layoutgen.errors import WrongInputError
from layoutgen.origin import Fault
from layoutgen.reading import Inputs, read_inputs

CIRCUIT = """\
format = 1

[design]
title = "River gauge driver"
frequency = "2.245 GHz"
band = ["2.20 GHz", "2.29 GHz"]
sweep = ["1 GHz", "4 GHz"]
points = 201
revision = "A"

[substrate]
relative_permittivity = 3.55
loss_tangent = 0.0027
height = "0.508 mm"
copper_thickness = "35 um"
conductivity = "58 MS/m"
copper_roughness = "1.2 um"

[board]
rules = "house.toml"
size = ["60 mm", "40 mm"]
margin = "1 mm"
corner_radius = "1 mm"
mask_over_lines = false
holes = [
    { at = ["3 mm", "3 mm"], diameter = "2.7 mm", plated = false },
    { at = ["57 mm", "3 mm"], diameter = "2.7 mm", plated = true },
]

[ground]
max_impedance_shift = "1 %"
fence = true

[ports.rf_in]
net = "in"
impedance = "50 ohm"
edge = "west"
at = "16 mm"

[ports.rf_out]
net = "out"
impedance = "45+5j ohm"
edge = "east"
current = "10 mA"

[ports.vg]
kind = "dc"
net = "vg"
voltage = "-2.8 V"
edge = "north"

[lines.series_in]
nets = ["in", "a"]
impedance = "50 ohm"
angle = "24 deg"

[lines.gate_feed]
nets = ["g", "vg_rf"]
impedance = "95 ohm"
angle = "90 deg"

[lines.supply]
nets = ["vg_rf", "vg"]
length = "free"

[lines.bypass]
nets = ["vg_rf"]
shape = "radial"
sector = "60 deg"
radius = "9 mm"
inner_radius = "0.4 mm"

[lines.wall]
nets = ["d", "a1"]
kind = "grounded_coplanar"
gap = "0.3 mm"
impedance = "50 ohm"
angle = "40 deg"

[lines.stub]
nets = ["a2"]
width = "1.1 mm"
length = "5 mm"

[coupled.pickup]
nets = ["a1", "a2", "b1", "open"]
even_impedance = "56 ohm"
odd_impedance = "45 ohm"
angle = "90 deg"

[parts.C1]
kind = "capacitor"
nets = ["a", "g"]
value = "8.2 pF"
case = "0603"
series_resistance = "0.1 ohm"
series_inductance = "0.5 nH"
data = "c1.s2p"
planes = "pad_inner"
rating = { voltage = "100 V", current = "1 A", power = "0.1 W" }

[parts.C2]
kind = "capacitor"
nets = ["a2", "out"]
value = "8.2 pF"
case = "0603"

[parts.R1]
kind = "resistor"
nets = ["b1", "gnd"]
value = "50 ohm"
case = "0402"

[parts.Q1]
kind = "transistor"
footprint = "flange"
pins = { gate = "g", drain = "d", source = "gnd" }
dc = [{ from = "drain", to = "source", current = "350 mA" }]
terminations = { gate = "9-6j ohm", drain = "7 + 4j ohm" }

[footprints.flange]
cutout = { size = ["4.4 mm", "10.4 mm"], at = ["0 mm", "0 mm"] }
holes = [{ at = ["0 mm", "7.2 mm"], diameter = "2.7 mm", plated = false }]
pads.gate = { at = ["-3.6 mm", "0 mm"], size = ["2.4 mm", "2.0 mm"], heading = "west" }
pads.drain = { at = ["3.6 mm", "0 mm"], size = ["2.4 mm", "4.0 mm"], heading = "east" }
pads.source = { ground = "flange" }

[layout]
spine = ["rf_in", "Q1", "rf_out"]

[layout.hints.gate_feed]
leave = "north"
route = ["4 mm", "left", "*", "right 45 deg", "*"]

[layout.hints.Q1]
at = ["30 mm", "20 mm"]
heading = "east"

[tolerance]
relative_permittivity = 0.05
height = "0.02 mm"
width = "0.02 mm"
value = "5 %"
"""

RULES = """\
format = 1
name = "Two layers, invented class"
source = "invented example"

[copper]
min_width = "0.125 mm"
min_gap = "0.125 mm"
min_edge_distance = "0.30 mm"
min_corner_angle = "85 deg"
min_island_area = "0.5 mm^2"
undercut = "0 um"

[holes]
drills = ["0.3 mm", "0.4 mm", "2.7 mm"]
min_diameter = "0.25 mm"
max_aspect_ratio = 8
min_annular_ring = "0.125 mm"
min_web = "0.25 mm"
min_copper_distance = "0.20 mm"
min_edge_distance = "0.50 mm"

[vias]
diameter = "0.6 mm"
drill = "0.3 mm"
min_pitch = "0.8 mm"
max_current = "1.0 A"
plating = "20 um"
per_ground_pad = 2

[fence]
max_pitch = "2.0 mm"
max_pitch_wavelengths = 0.05
max_edge_distance = "0.8 mm"

[mask]
expansion = "0.05 mm"
min_web = "0.10 mm"

[legend]
min_line = "0.12 mm"
min_distance = "0.15 mm"

[current]
temperature_rise = "20 K"
max_density = "120 A/mm^2"

[voltage]
condition = "B2"

[spacing]
min_line_heights = 3.0
max_coupling = "-30 dB"

[bank]
max_distance = "1.0 mm"

[land_pattern]
density = "nominal"

[severity]
"fence.max_pitch" = "error"

[waive.first-article]
rule = "copper.min_gap"
items = ["C1", "series_in"]
reason = "approved at first article"
until = "2027-06-30"
"""


class Files:
    """A folder with the two faultless files, which a test changes and reads."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder
        self.circuit = folder / "gauge.toml"
        self.rules = folder / "house.toml"
        self.circuit.write_text(CIRCUIT, encoding="utf-8")
        self.rules.write_text(RULES, encoding="utf-8")
        (folder / "c1.s2p").write_text("# GHz S MA R 50\n", encoding="utf-8")

    def change(self, old: str, new: str, *, rules: bool = False) -> Files:
        """Replace one text, found exactly once, of the circuit or rule file."""
        path = self.rules if rules else self.circuit
        text = path.read_text(encoding="utf-8")
        assert text.count(old) == 1, f"{old!r} is there {text.count(old)} times"
        path.write_text(text.replace(old, new), encoding="utf-8")
        return self

    def append(self, text: str, *, rules: bool = False) -> Files:
        """Add text at the end of the circuit or rule file."""
        path = self.rules if rules else self.circuit
        path.write_text(path.read_text(encoding="utf-8") + text, encoding="utf-8")
        return self

    def read(self) -> Inputs:
        return read_inputs(self.circuit)

    def faults(self) -> tuple[Fault, ...]:
        """Read and return the faults; fail when there are none."""
        with pytest.raises(WrongInputError) as caught:
            self.read()
        return caught.value.faults

    def fault(self) -> Fault:
        """Read and return the only fault."""
        faults = self.faults()
        assert len(faults) == 1, "\n".join(map(str, faults))
        return faults[0]

    def line(self, text: str, *, rules: bool = False) -> int:
        """Return the 1-based line of a text found exactly once."""
        content = (self.rules if rules else self.circuit).read_text(encoding="utf-8")
        assert content.count(text) == 1, f"{text!r} is there {content.count(text)} times"
        return content[: content.index(text)].count("\n") + 1
