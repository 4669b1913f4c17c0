"""All discontinuities under one name: ends, bends, steps, tees, vias, pads, gaps and radial stubs."""

from __future__ import annotations

from layoutgen.formulas.bends import BendResult, bend_excess, douville_james_1978_mitre
from layoutgen.formulas.ends import (
    hammerstad_open_end,
    kirschning_jansen_koster_1981,
    open_end,
    open_end_in_range,
)
from layoutgen.formulas.pads import GapResult, chip_gap, pad_excess
from layoutgen.formulas.radial import radial_stub_line, radial_stub_radius, radial_stub_reactance
from layoutgen.formulas.steps import StepResult, line_constants, step
from layoutgen.formulas.tees import CrossResult, TeeResult, cross, hammerstad_1981_tee, tee
from layoutgen.formulas.vias import (
    goldfarb_pucel_1991,
    via_array_inductance,
    via_equivalent_length,
    via_inductance,
    via_inductance_in_range,
    via_resistance,
)

__all__ = [
    "BendResult",
    "CrossResult",
    "GapResult",
    "StepResult",
    "TeeResult",
    "bend_excess",
    "chip_gap",
    "cross",
    "douville_james_1978_mitre",
    "goldfarb_pucel_1991",
    "hammerstad_1981_tee",
    "hammerstad_open_end",
    "kirschning_jansen_koster_1981",
    "line_constants",
    "open_end",
    "open_end_in_range",
    "pad_excess",
    "radial_stub_line",
    "radial_stub_radius",
    "radial_stub_reactance",
    "step",
    "tee",
    "via_array_inductance",
    "via_equivalent_length",
    "via_inductance",
    "via_inductance_in_range",
    "via_resistance",
]
