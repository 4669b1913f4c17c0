"""A small board through all stages: a coupled pair with open ends, and names too long for fixed columns."""

from __future__ import annotations

import functools
from typing import Any

from layoutgen.pipeline import run_inputs
from layoutgen.reading import inputs_from_data
from layoutgen.writers import Result

FIRST, SECOND = "a_net_with_a_long_name_1", "a_net_with_a_long_name_2"

CIRCUIT: dict[str, Any] = {
    "format": 1,
    "design": {"title": "Gauge pick-up", "frequency": "2.245 GHz", "band": ["2.20 GHz", "2.29 GHz"]},
    "substrate": {
        "relative_permittivity": 3.55,
        "loss_tangent": 0.0027,
        "height": "0.508 mm",
        "copper_thickness": "35 um",
    },
    "board": {"rules": "two-layer-standard"},
    "ground": {"max_impedance_shift": "1 %"},
    "ports": {"harbour_in": {"net": FIRST, "edge": "west"}, "harbour_out": {"net": SECOND, "edge": "east"}},
    "lines": {
        "left": {"nets": [FIRST, "m"], "impedance": "50 ohm", "angle": "40 deg"},
        "right": {"nets": ["k", SECOND], "width": "1.1 mm", "angle": "40 deg"},
    },
    "coupled": {
        "pair": {
            "nets": ["m", "open", "open", "k"],
            "even_impedance": "70 ohm",
            "odd_impedance": "40 ohm",
            "angle": "90 deg",
        }
    },
    "tolerance": {"width": "0.02 mm", "value": "5 %"},
}


@functools.lru_cache(maxsize=1)
def coupled_board() -> Result:
    """Return the board's result; it is made once."""
    inputs = inputs_from_data(CIRCUIT)
    return run_inputs(inputs.circuit, inputs.rules)
