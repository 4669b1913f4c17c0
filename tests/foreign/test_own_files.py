"""Our own files read back as artwork of other origin: what is drawn without errors is judged without any."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from layoutgen.foreign import check_foreign, read_artwork
from layoutgen.pipeline import run_inputs
from layoutgen.reading import inputs_from_data
from layoutgen.writers.dxf import write_dxf
from layoutgen.writers.gds import write_gds
from layoutgen.writers.oasis import write_oasis
from layoutgen.writers.records import Job

WRITERS = {"gds": write_gds, "dxf": write_dxf, "oas": write_oasis}


def _circuit(rules: str) -> dict[str, Any]:
    """Return two lines, a stub and a shunt resistor: vias of a part, of the fence and of the pour."""
    return {
        "format": 1,
        "design": {"title": "Stub", "frequency": "2.245 GHz", "band": ["2.20 GHz", "2.29 GHz"]},
        "substrate": {
            "relative_permittivity": 3.55,
            "loss_tangent": 0.0027,
            "height": "0.508 mm",
            "copper_thickness": "35 um",
        },
        "board": {"rules": rules},
        "ground": {},
        "ports": {
            "a": {"net": "a", "edge": "west", "impedance": "50 ohm"},
            "b": {"net": "b", "edge": "east", "impedance": "50 ohm"},
        },
        "lines": {
            "left": {"nets": ["a", "m"], "impedance": "50 ohm", "length": "free"},
            "right": {"nets": ["m", "b"], "impedance": "50 ohm", "angle": "40 deg"},
            "stub": {"nets": ["m", "s"], "impedance": "70 ohm", "angle": "60 deg"},
        },
        "parts": {"R1": {"kind": "resistor", "nets": ["s", "gnd"], "value": "50 ohm", "case": "0603"}},
    }


@pytest.mark.parametrize("rules", ["thick-copper", "thin-film-ceramic"])
def test_undercut_is_taken_off_before_a_file_is_judged(rules: str, tmp_path: Path) -> None:
    """Would catch lands, gaps or widths of the drawn artwork judged as if they were finished copper."""
    inputs = inputs_from_data(_circuit(rules))
    result = run_inputs(inputs.circuit, inputs.rules, correction=False)
    assert [finding.text for finding in result.findings if finding.counts] == []
    for suffix, writer in WRITERS.items():
        path = tmp_path / f"stub.{suffix}"
        path.write_bytes(writer(result, Job(stem="stub", repeatable=True)))
        found = check_foreign(read_artwork(path), inputs.rules)
        assert [(f.rule, f.text) for f in found.findings if f.severity == "error"] == [], suffix
