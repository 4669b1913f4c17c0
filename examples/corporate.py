"""A corporate feed of any power of two through the Python API: python examples/corporate.py [WAYS] [FOLDER].

Equal dividers in ranks, joined by free lines, feed the antenna row of a gauge base station. The scenario is
invented. Without a folder the board is drawn and checked, and only figures are printed.
"""

from __future__ import annotations

import sys
from typing import Any

import layoutgen

Data = dict[str, Any]


def feed(ways: int) -> Data:
    """Return the circuit of a corporate feed as the tables of a circuit file.

    Args:
        ways: Number of outputs [-], a power of two from 2 on.
    """
    if ways < 2 or ways & (ways - 1):
        raise ValueError(f"{ways} ways; a power of two from 2 on")
    data: Data = {
        "format": 1,
        "design": {
            "title": f"Corporate feed, {ways} ways",
            "frequency": "2.245 GHz",
            "band": ["2.20 GHz", "2.29 GHz"],
            "points": 51,
        },
        "substrate": {
            "relative_permittivity": 3.55,
            "loss_tangent": 0.0027,
            "height": "0.508 mm",
            "copper_thickness": "35 um",
        },
        "board": {"rules": "two-layer-standard"},
        "ground": {},
        "ports": {"transmitter": {"net": "in", "impedance": "50 ohm", "edge": "west"}},
        "lines": {"launch": free("in", "t")},
        "parts": {},
    }
    _divider(data, "t", ways, "")
    return data


def free(*nets: str) -> Data:
    """Return a 50 ohm line of free length."""
    return {"nets": list(nets), "impedance": "50 ohm", "length": "free"}


def _divider(data: Data, net: str, ways: int, tag: str) -> None:
    """Add the divider that is fed at a net, and all that follow."""
    for side in "ab":
        arm = {"nets": [net, f"m{tag}{side}"], "impedance": "70.7 ohm", "angle": "90 deg"}
        data["lines"][f"arm{tag}{side}"] = arm
    data["parts"][f"R{tag or '0'}"] = {
        "kind": "resistor",
        "nets": [f"m{tag}a", f"m{tag}b"],
        "value": "100 ohm",
        "case": "0603",
    }
    for side in "ab":
        end = f"m{tag}{side}"
        if ways == 2:
            _output(data, end, tag + side)
        else:
            data["lines"][f"on{tag}{side}"] = free(end, f"t{tag}{side}")
            _divider(data, f"t{tag}{side}", ways // 2, tag + side)


def _output(data: Data, net: str, tag: str) -> None:
    """Add one output with its line to the east edge."""
    data["ports"][f"element_{len(data['ports'])}"] = {
        "net": f"o{tag}",
        "impedance": "50 ohm",
        "edge": "east",
    }
    data["lines"][f"out{tag}"] = free(net, f"o{tag}")


def _ways(text: str) -> int:
    """Return the number of ways asked for, or end with a message."""
    ways = int(text) if text.isascii() and text.isdigit() else 0
    if ways < 2 or ways & (ways - 1):
        sys.exit(f"{text!r} ways; a power of two from 2 on; usage: examples/corporate.py [WAYS] [FOLDER]")
    return ways


def main() -> None:
    """Draw a feed, tell its size and its findings, and write the files where a folder is given."""
    ways = _ways(sys.argv[1]) if len(sys.argv) > 1 else 8
    inputs = layoutgen.inputs_from_data(feed(ways))
    if len(sys.argv) > 2:
        result = layoutgen.run_inputs(inputs.circuit, inputs.rules)
        for path in layoutgen.write(result, sys.argv[2], layoutgen.Job(stem=f"corporate_feed_{ways}")):
            print(path)
        return
    sized = layoutgen.size_circuit(layoutgen.build_circuit(inputs.circuit, inputs.rules))
    artwork = layoutgen.draw(layoutgen.place(sized))
    board = artwork.placement
    errors = [finding for finding in layoutgen.check(artwork).findings if finding.severity == "error"]
    print(
        f"{ways} ways: {board.width / 1e6:g} x {board.height / 1e6:g} mm, {len(board.lines)} lines, "
        f"{len(board.parts)} resistors, {len(errors)} errors"
    )


if __name__ == "__main__":
    main()
