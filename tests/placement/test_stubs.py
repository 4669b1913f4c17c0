"""Stubs too short to stick out of what they leave: wrong input, with the least angle that works."""

from __future__ import annotations

import copy
import re
from typing import Any

import pytest

from layoutgen.errors import WrongInputError
from tests.placement.circuits import chip, line, through_with
from tests.placement.legal import faults
from tests.placement.test_frames import placed

STUBS: dict[str, Any] = {
    "open": through_with(
        {"mid": line("n", "m", angle="40 deg"), "st": line("n", z="80 ohm", angle="0.1 deg")}
    ),
    "grounded": through_with({"mid": line("n", "m", angle="40 deg"), "st": line("n", "gnd", angle="1 deg")}),
    "by length": through_with(
        {"mid": line("n", "m", angle="40 deg"), "st": line("n", z="80 ohm", length="0.4 mm")}
    ),
    "on a wide host": through_with(
        {"mid": line("n", "m", z="15 ohm", angle="60 deg"), "st": line("n", "gnd", angle="9 deg")}
    ),
}


@pytest.mark.parametrize("name", STUBS)
def test_a_hidden_stub_is_refused_and_what_is_named_does(name: str) -> None:
    """Catches a stub drawn inside its host or shorting it, and a least value that does not do."""
    data = copy.deepcopy(STUBS[name])
    with pytest.raises(WrongInputError) as caught:
        placed(data)
    found = re.search(r"lines\.st\.(angle|length).*allowed: at least ([0-9.]+ (?:deg|mm))", str(caught.value))
    assert found is not None
    data["lines"]["st"][found[1]] = found[2]
    assert faults(placed(data)) == []


def test_a_stub_on_a_pad_must_reach_beyond_the_pad() -> None:
    """Catches a stub that ends under the pad whose inner edge it starts from."""
    data = through_with(
        {"mid": line("n", "m", angle="40 deg"), "st": line("k", angle="2 deg")},
        {"C1": chip("capacitor", "1 pF", "n", "k")},
    )
    with pytest.raises(WrongInputError, match=r"lines\.st\.angle"):
        placed(data)
