"""Whatever the substrate and the lines: widths meet impedances, budgets add up, or the fault says why."""

from __future__ import annotations

import itertools
import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layoutgen.errors import WrongInputError
from layoutgen.formulas.pour import microstrip_beside_pour
from layoutgen.sizing import default_budgets, line_budget

substrates = st.fixed_dictionaries(
    {
        "relative_permittivity": st.floats(1.5, 12.0),
        "height": st.floats(0.1, 1.6).map(lambda mm: f"{mm!r} mm"),
        "copper_thickness": st.floats(5.0, 20.0).map(lambda um: f"{um!r} um"),
    }
)
grounds = st.sampled_from([None, {}, {"gap": "0.3 mm"}, {"max_impedance_shift": "0.3 %"}])


@settings(max_examples=60, deadline=None)
@given(substrates, grounds, st.lists(st.floats(5.0, 200.0), min_size=1, max_size=5))
def test_widths_meet_the_impedances_or_the_fault_gives_the_range(size, substrate, ground, ohms):
    """Would catch a width that misses its impedance by more than a nanometre's worth, or a wrong range."""
    lines = {
        f"x{i}": {"nets": [f"n{i}", f"n{i + 1}"], "impedance": f"{ohm!r} ohm", "angle": "50 deg"}
        for i, ohm in enumerate(ohms)
    }
    ports = {"p": {"net": "n0"}, "q": {"net": f"n{len(ohms)}"}}
    tables = {"substrate": substrate, "lines": lines, "ports": ports}
    try:
        sized = size(**tables, **({} if ground is None else {"ground": ground}))
    except WrongInputError as error:
        for fault in error.faults:
            asked = float(fault.found.removesuffix(" ohm"))
            low, high = (float(word) for word in fault.allowed.split(" ohm")[0].split(" to "))
            assert not low <= asked <= high
        return
    h = sized.circuit.file.substrate.height
    er, t = (
        sized.circuit.file.substrate.relative_permittivity,
        sized.circuit.file.substrate.copper_thickness / h,
    )
    for line, ohm in zip(sized.lines.values(), ohms, strict=True):
        near = [
            float(
                microstrip_beside_pour(
                    (line.width + d) / h, er, t, line.gap_left / h, line.gap_right / h
                ).impedance
            )
            for d in (-0.6e-9, 0.6e-9)
        ]
        assert near[1] <= ohm <= near[0]
    ordered = sorted(zip(ohms, (line.width for line in sized.lines.values()), strict=True))
    assert all(wide[1] >= narrow[1] for wide, narrow in itertools.pairwise(ordered))


@settings(max_examples=60, deadline=None)
@given(
    st.lists(st.tuples(st.floats(25.0, 110.0), st.floats(5.0, 120.0)), min_size=2, max_size=4),
    st.lists(st.tuples(st.sampled_from([90.0, -90.0, 45.0, -45.0]), st.floats(0.0, 90.0)), max_size=4),
)
def test_budgets_add_up_at_any_junction(size, arms, turns):
    """Would catch a budget that does not close, at steps, tees and crosses alike."""
    lines = {
        f"x{i}": {"nets": ["m", f"n{i}"], "impedance": f"{ohm!r} ohm", "angle": f"{deg!r} deg"}
        for i, (ohm, deg) in enumerate(arms)
    }
    sized = size(lines=lines, ports={f"p{i}": {"net": f"n{i}"} for i in range(len(arms))})
    try:
        budgets = default_budgets(sized)
        for name, (_, entries) in list(budgets.items()):
            ends = [entry for entry in entries if entry.cause != "line"]
            budgets[f"{name}*"] = line_budget(sized, name, ends, turns)
    except WrongInputError as error:
        assert all(fault.allowed.startswith("at least") for fault in error.faults)
        return
    for name, (length, entries) in budgets.items():
        asked = math.radians(arms[int(name.strip("x*"))][1])
        assert math.fsum(entry.angle for entry in entries) == pytest.approx(asked, abs=1e-12)
        assert length > 0.0
