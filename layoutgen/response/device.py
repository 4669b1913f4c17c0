"""At the device: what each transistor pin sees, how open the feeds look, whether the device is stable.

In: a circuit file, both networks without the transistors, their data. Out: the records that the report shows.
Impedances are those looking into the board, to ground, with the transistor taken away; every other port of
the response is loaded with its own impedance, and the device's other pins with theirs: the termination that
the file gives, or 50 ohm where the file gives data.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import replace
from typing import NamedTuple

import numpy as np

from layoutgen.reading import CircuitFile
from layoutgen.response.chain import ComplexArray, FloatArray
from layoutgen.response.feeds import find_feeds
from layoutgen.response.network import Network, Port
from layoutgen.response.parts import data_terminals, response_ports
from layoutgen.response.records import DeviceView, FeedView, PinView, Stability
from layoutgen.response.solve import solve
from layoutgen.response.touchstone import PartData

__all__ = ["Board", "device_view", "passive_data", "rollett_1962_stability"]

_Z0 = 50.0 + 0.0j


class Board(NamedTuple):
    """One of the two responses: its network at frequencies (F,) [Hz], and the node of each port and pin."""

    network: Callable[[FloatArray], Network]
    nodes: Mapping[str, str]


def passive_data(file: CircuitFile, data: Mapping[str, PartData]) -> dict[str, PartData]:
    """Return the data of all parts that are no transistors."""
    return {name: held for name, held in data.items() if file.parts[name].kind != "transistor"}


def device_view(
    file: CircuitFile, data: Mapping[str, PartData], wanted: Board, drawn: Board, sweep: FloatArray
) -> DeviceView | None:
    """Return what the transistors of a board see; None for a board with neither transistor pins nor feeds.

    Args:
        file: The circuit.
        data: Measured data by part, those of transistors too.
        wanted: The schematic without its transistors.
        drawn: The drawing without its transistors.
        sweep: Frequencies (F,) of the response [Hz].
    """
    f = _frequencies(file, passive_data(file, data))
    names = _device_pins(file)
    supplies = [name for name, port in file.ports.items() if port.kind == "dc"]
    seen, feeds = [], []
    for board in (wanted, drawn):
        network = board.network(f)
        ports = _ports(file, names)
        network = replace(network, ports=tuple(Port(board.nodes[name], z) for name, z in ports.items()))
        seen.append(_impedances(network, [list(ports).index(name) for name in names]))
        feeds.append(find_feeds(network, {name: board.nodes[name] for name in supplies}))
    view = DeviceView(
        frequencies=tuple(f.tolist()),
        pins=tuple(
            PinView(pin=name, device=device, wanted=_values(seen[0][:, k]), as_drawn=_values(seen[1][:, k]))
            for k, (name, device) in enumerate(names.items())
        ),
        feeds=tuple(
            FeedView(net=net, ports=ports, wanted=_values(z), as_drawn=_values(feeds[1][ports][1]))
            for ports, (net, z) in feeds[0].items()
            if ports in feeds[1]
        ),
        stability=tuple(_stabilities(file, data, sweep)),
    )
    return view if view.pins or view.feeds else None


def _frequencies(file: CircuitFile, data: Mapping[str, PartData]) -> FloatArray:
    """Return band edges and design frequency, and its second harmonic where all data cover it [Hz]."""
    low, high = file.design.band
    asked = np.array([low, file.design.frequency, high, 2.0 * file.design.frequency])
    kept = np.ones(asked.shape, dtype=np.bool_)
    for part in data.values():
        kept &= part.covers(asked)
    return asked[kept]


def _device_pins(file: CircuitFile) -> dict[str, complex | None]:
    """Return the transistors' RF pins with the device's impedance [ohm]; None where data stand for it."""
    pins: dict[str, complex | None] = {}
    for name, part in file.parts.items():
        if part.kind == "transistor":
            pins |= {f"{name}.{pin}": complex(z) for pin, z in part.terminations.items()}
            if part.data is not None:
                pins |= {f"{name}.{pin}": None for pin in data_terminals(part)}
    return pins


def _ports(file: CircuitFile, pins: Mapping[str, complex | None]) -> dict[str, complex]:
    """Return all ports of the board without its transistors, with their loads [ohm]."""
    return {**dict(response_ports(file)), **{name: _Z0 if z is None else z for name, z in pins.items()}}


def _impedances(network: Network, at: list[int]) -> ComplexArray:
    """Return the impedance (F, P) [ohm] looking into some of a network's ports, the others loaded."""
    s = solve(network)[:, at, at]
    z0 = np.array([network.ports[k].impedance for k in at], dtype=np.complex128)
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray((np.conj(z0) + z0 * s) / (1.0 - s))


def _values(array: ComplexArray) -> tuple[complex, ...]:
    """Return an array as plain numbers."""
    return tuple(complex(value) for value in array)


def rollett_1962_stability(s: ComplexArray) -> tuple[FloatArray, FloatArray]:
    """Return the stability factor K and the distance mu of a two-port, both (F,) [-].

    Args:
        s: S-parameters (F, 2, 2) [-].

    Returns:
        K, above 1 with |det S| < 1 for an unconditionally stable two-port, infinite without feedback; and
        mu (Edwards and Sinsky 1992), above 1 for one: the distance from the centre of the Smith chart to
        the nearest load that makes it unstable.

    Source: J. M. Rollett, "Stability and power-gain invariants of linear twoports", IRE Trans. Circuit Theory
        9 (1962), pp. 29-32; M. L. Edwards and J. H. Sinsky, IEEE Trans. MTT 40 (1992), pp. 2303-2311 (from
        memory).
    Range: any S.
    """
    s11, s12, s21, s22 = s[:, 0, 0], s[:, 0, 1], s[:, 1, 0], s[:, 1, 1]
    delta = s11 * s22 - s12 * s21
    loop = np.abs(s12 * s21)
    with np.errstate(divide="ignore", invalid="ignore"):
        k = (1.0 - np.abs(s11) ** 2 - np.abs(s22) ** 2 + np.abs(delta) ** 2) / (2.0 * loop)
        mu = (1.0 - np.abs(s11) ** 2) / (np.abs(s22 - delta * np.conj(s11)) + loop)
    return np.asarray(k), np.asarray(mu)


def _stabilities(file: CircuitFile, data: Mapping[str, PartData], sweep: FloatArray) -> Iterator[Stability]:
    """Yield the stability of each transistor with data of two ports, over the sweep."""
    for name, held in data.items():
        if file.parts[name].kind == "transistor" and held.z0.size == 2 and sweep.size:
            k, mu = rollett_1962_stability(held.at(sweep))
            least = int(np.argmin(mu))
            yield Stability(
                part=name,
                k=float(k[least]),
                mu=float(mu[least]),
                at=float(sweep[least]),
                unstable=_range(sweep[mu <= 1.0]),
            )


def _range(frequencies: FloatArray) -> tuple[float, float] | None:
    """Return the least and the largest frequency [Hz], None of none."""
    return (float(frequencies[0]), float(frequencies[-1])) if frequencies.size else None
