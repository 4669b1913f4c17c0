"""Lines of the drawn examples against a 2-D field solution that shares nothing with the package.

Source: finite elements by scikit-fem (field2d.py), accuracy 0.06 % against the reference tables.
"""

from __future__ import annotations

import math
from functools import lru_cache
from pathlib import Path

import pytest

from layoutgen.pipeline import Result, run
from tests.published.field2d import solve_line

EXAMPLES = Path(__file__).parents[2] / "examples"
WITHIN = 0.015
LINES = [
    ("quarter_wave_transformer", "launch"),
    ("quarter_wave_transformer", "section_1"),
    ("quarter_wave_transformer", "section_2"),
    ("shorted_stub_tee", "drain_static"),
    ("shorted_stub_tee", "feed"),
    ("stub_notch", "notch"),
]


@lru_cache
def drawn(example: str) -> Result:
    return run(EXAMPLES / f"{example}.toml")


@pytest.mark.parametrize(("example", "name"), LINES)
def test_drawn_width_and_pour_give_the_impedance_asked(example: str, name: str) -> None:
    """Catches widths that do not fit the pour as it was drawn, left and right, with thickness."""
    artwork = drawn(example).artwork
    substrate = artwork.placement.sized.circuit.file.substrate
    asked = artwork.placement.sized.circuit.file.lines[name].impedance
    h = substrate.height * 1e9
    copper = artwork.line_copper[name]
    gaps = [math.inf if gap is None else gap / h for gap in (copper.gap_left, copper.gap_right)]
    solved = solve_line(
        artwork.placement.lines[name].width / h,
        substrate.relative_permittivity,
        substrate.copper_thickness / substrate.height,
        *gaps,
    )
    assert asked is not None
    assert solved.impedance == pytest.approx(asked, rel=WITHIN)
