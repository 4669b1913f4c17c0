"""Short stubs to ground: what counts as gnd at their end stops short of the line they leave."""

from __future__ import annotations

import pytest

from layoutgen.pipeline import run_inputs
from layoutgen.reading import inputs_from_data
from tests.placement.circuits import base, free, line, two_ports


@pytest.mark.parametrize("angle", ["7 deg", "8 deg", "20 deg"])
def test_a_short_stub_to_ground_is_no_short_of_its_host(angle: str) -> None:
    """Catches a region at a stub's grounded end that reaches into the line the stub leaves."""
    data = base(
        ports=two_ports(),
        lines={"in": free("a", "m"), "st": line("m", "gnd", angle=angle), "out": free("m", "z")},
    )
    inputs = inputs_from_data(data)
    result = run_inputs(inputs.circuit, inputs.rules, correction=False)
    errors = [finding for finding in result.checks.findings if finding.severity == "error"]
    assert errors == []
