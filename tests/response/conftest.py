"""Small circuits as bare artworks without polygons, and scikit-rf as an outside reference of the solver.

The circuits go through reading, circuit, sizing and placement.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from layoutgen.artwork import Artwork
from layoutgen.circuit import build_circuit
from layoutgen.placement import place
from layoutgen.reading import inputs_from_data
from layoutgen.response.chain import Chain
from layoutgen.response.network import GROUND, Branch, Network
from layoutgen.sizing import size_circuit


def _artwork(tables: dict[str, Any], folder: Path | None = None) -> Artwork:
    """Return the artwork of a circuit: the given tables over those that every circuit needs."""
    data = {
        "format": 1,
        "design": {
            "title": "Gauge link test piece",
            "frequency": "2.245 GHz",
            "band": ["2.20 GHz", "2.29 GHz"],
            "sweep": ["1 GHz", "4 GHz"],
            "points": 31,
        },
        "substrate": {
            "relative_permittivity": 3.55,
            "loss_tangent": 0.0027,
            "height": "0.508 mm",
            "copper_thickness": "35 um",
            "copper_roughness": "1.2 um",
        },
        "board": {"rules": "two-layer-standard"},
        "ground": {"max_impedance_shift": "1 %"},
        **tables,
    }
    inputs = inputs_from_data(data, folder=folder)
    placement = place(size_circuit(build_circuit(inputs.circuit, inputs.rules)))
    return Artwork(
        placement=placement, shapes=(), vias=(), holes=(), labels=(), line_copper={}, title_anchor=(0, 0)
    )


@pytest.fixture(scope="session")
def artwork_of() -> Callable[..., Artwork]:
    """Return the maker of bare artworks; their lines have the pour that sizing meant them to have."""
    return _artwork


@pytest.fixture(scope="session")
def ports() -> dict[str, Any]:
    """Return two ports of 50 ohm, west and east."""
    return {
        "p1": {"net": "in", "impedance": "50 ohm", "edge": "west"},
        "p2": {"net": "out", "impedance": "50 ohm", "edge": "east"},
    }


@pytest.fixture(scope="session")
def in_scikit_rf() -> Callable[[Network, np.ndarray], np.ndarray]:
    """Return the function that solves a network by scikit-rf's joining of waves: S (B, N, N)."""
    return _in_scikit_rf


def _in_scikit_rf(network: Network, frequencies: np.ndarray) -> np.ndarray:
    """Join every element, as S-parameters, node by node, at frequencies (B,) [Hz]."""
    import skrf
    from skrf.circuit import Circuit

    frequency = skrf.Frequency.from_f(frequencies, unit="hz")
    at: dict[str, list[tuple[Any, int]]] = {}
    for k, port in enumerate(network.ports):
        at.setdefault(port.node, []).append((Circuit.Port(frequency, f"port{k}", z0=port.impedance), 0))
    for k, (s, nodes, z0) in enumerate(_as_s_parameters(network)):
        element = skrf.Network(frequency=frequency, s=s, z0=z0, name=f"element{k}")
        for end, node in enumerate(nodes):
            at.setdefault(node, []).append((element, end))
    for k, (element, end) in enumerate(at.pop(GROUND, [])):
        at[f"ground {k}"] = [(element, end), (Circuit.Ground(frequency, f"gnd{k}"), 0)]
    for k, (node, ends) in enumerate(list(at.items())):
        if len(ends) == 1:
            at[node] = [*ends, (Circuit.Open(frequency, f"open{k}"), 0)]
    return np.asarray(Circuit(list(at.values())).network.s)


def _as_s_parameters(network: Network) -> Iterator[tuple[np.ndarray, tuple[str, ...], Any]]:
    """Yield S (B, M, M), the nodes and the reference [ohm] of every element; modes of pairs come in twos."""
    from skrf.network import a2s

    size = network.size
    modes = [branch for branch in network.branches if len(branch.near) == 2]
    for branch in network.branches:
        if len(branch.near) == 1:
            yield a2s(_abcd(branch.chain, size)), (branch.near[0][0], branch.far[0][0]), 50.0
    for even, odd in zip(modes[::2], modes[1::2], strict=True):
        nodes = (even.near[0][0], even.far[0][0], even.near[1][0], even.far[1][0])
        yield _pair_s(even, odd, size), nodes, 50.0
    for shunt in network.shunts:
        y = 50.0 * np.broadcast_to(shunt.admittance, (size,))
        yield ((1.0 - y) / (1.0 + y))[:, None, None], (shunt.node,), 50.0
    for block in network.blocks:
        assert all(minus == GROUND for _, minus in block.ends)
        yield block.s, tuple(plus for plus, _ in block.ends), block.z0


def _abcd(chain: Chain, size: int) -> np.ndarray:
    """Return chain parameters as matrices (B, 2, 2)."""
    a, b, c, d = (np.broadcast_to(value, (size,)) for value in chain)
    return np.moveaxis(np.array([[a, b], [c, d]]), 2, 0)


def _pair_s(even: Branch, odd: Branch, size: int) -> np.ndarray:
    """Return S (B, 4, 4) at 50 ohm of a coupled pair by the textbook sum of its modes' S-parameters."""
    import skrf

    e, o = (skrf.network.a2s(_abcd(mode.chain, size)) for mode in (even, odd))
    same, cross = 0.5 * (e + o), 0.5 * (e - o)
    return np.concatenate([np.concatenate([same, cross], 2), np.concatenate([cross, same], 2)], 1)
