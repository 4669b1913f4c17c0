"""Coupled pairs: width and gap from two impedances, or the impedances of a width and gap."""

from __future__ import annotations

import math
from collections.abc import Mapping

import numpy as np

from layoutgen.circuit import Circuit
from layoutgen.formulas.coupled import coupled_pair, kirschning_jansen_1984_permittivity
from layoutgen.formulas.synthesis import coupled_dimensions
from layoutgen.origin import Fault
from layoutgen.reading import CircuitFile, CoupledPair
from layoutgen.sizing.pours import Gaps
from layoutgen.sizing.records import SizedPair
from layoutgen.sizing.stackup import NM, Stackup, to_nm

__all__ = ["PairSize", "pair_fault", "pair_sizes", "sized_pair"]

PairSize = tuple[float, float, bool]
"""Width and gap of a pair [m], and whether they have the impedances asked for."""

_MET = 1e-6


def pair_sizes(file: CircuitFile, stackup: Stackup, gaps: Gaps) -> dict[str, PairSize]:
    """Return every pair's width and gap [m], in whole nanometres, and whether they meet what was asked."""
    h = stackup.height
    sizes = {
        name: (pair.width, pair.gap, True)
        for name, pair in file.coupled.items()
        if pair.width is not None and pair.gap is not None
    }
    asked = [name for name in file.coupled if name not in sizes]
    if asked:
        even = np.array([file.coupled[name].even_impedance for name in asked], dtype=np.float64)
        odd = np.array([file.coupled[name].odd_impedance for name in asked], dtype=np.float64)
        left, right = (np.array([gaps[name][side] / h for name in asked]) for side in (1, 2))
        found = coupled_dimensions(even, odd, stackup.er, stackup.t, left, right)
        got = coupled_pair(found.u, found.g, stackup.er, stackup.t, left, right)
        met = (np.abs(got.z_even / even - 1.0) < _MET) & (np.abs(got.z_odd / odd - 1.0) < _MET)
        for i, name in enumerate(asked):
            sizes[name] = (to_nm(float(found.u[i]) * h), to_nm(float(found.g[i]) * h), bool(met[i]))
    return sizes


def pair_fault(
    file: CircuitFile,
    stackup: Stackup,
    name: str,
    gap: tuple[float, float, float],
    sizes: PairSize,
) -> Fault | None:
    """Return the fault of a pair that cannot be made, or None."""
    pair = file.coupled[name]
    width, between, met = sizes
    if pair.width is not None:
        return _given_fault(file, stackup, name, pair)
    if met and width >= stackup.min_width - NM and between >= stackup.min_gap - NM:
        return None
    h = stackup.height
    key = f"coupled.{name}.even_impedance"
    found = f"{pair.even_impedance:g} ohm with odd_impedance {pair.odd_impedance:g} ohm"
    if met:
        found += f", which needs a width of {width * 1e3:.4g} mm and a gap of {between * 1e3:.4g} mm"
    w, s = max(width, stackup.min_width), max(stackup.min_gap, 0.1 * h)
    near = coupled_pair(w / h, s / h, stackup.er, stackup.t, gap[1] / h, gap[2] / h)
    allowed = (
        f"width >= {stackup.min_width * 1e3:g} mm, gap >= {stackup.min_gap * 1e3:g} mm; "
        f"strips {w * 1e3:.4g} mm wide and {s * 1e3:.4g} mm apart have "
        f"{float(near.z_even):.2f} and {float(near.z_odd):.2f} ohm"
    )
    return Fault(file.location(key), key, found, allowed)


def _given_fault(file: CircuitFile, stackup: Stackup, name: str, pair: CoupledPair) -> Fault | None:
    """Return the fault of a pair given by width and gap, or None."""
    h = stackup.height
    for key, value, low, high in (("width", pair.width, 0.01, 100.0), ("gap", pair.gap, 0.001, 100.0)):
        if value is not None and not low <= value / h <= high:
            path = f"coupled.{name}.{key}"
            return Fault(
                file.location(path),
                path,
                f"{value * 1e3:g} mm",
                f"{low * h * 1e3:g} to {high * h * 1e3:g} mm",
            )
    return None


def sized_pair(
    circuit: Circuit,
    stackup: Stackup,
    name: str,
    gap: tuple[float, float, float],
    sizes: PairSize,
) -> SizedPair:
    """Return one pair's record."""
    pair = circuit.file.coupled[name]
    width, between, _ = sizes
    h, er = stackup.height, stackup.er
    u, g = width / h, between / h
    modes = coupled_pair(u, g, er, stackup.t, gap[1] / h, gap[2] / h)
    even, odd = kirschning_jansen_1984_permittivity(modes.ee_even, modes.ee_odd, u, g, er, stackup.fh)
    currents: Mapping[str, float] = circuit.dc.currents
    flags = []
    if not bool(modes.in_range):
        flags.append(
            f"coupled pair: W/h {u:.3g} and S/h {g:.3g} (0.1 to 10), er {er:g} (to 18), "
            f"t/h {stackup.t:.3g} (to 0.1)"
        )
    if stackup.fh > 25e6:
        flags.append(f"pair's dispersion (Kirschning-Jansen 1984): f h {stackup.fh / 1e6:.3g} GHz mm (to 25)")
    return SizedPair(
        name=name,
        nets=pair.nets,
        width=width,
        gap=between,
        even_impedance=float(modes.z_even),
        odd_impedance=float(modes.z_odd),
        permittivity_even=float(even),
        permittivity_odd=float(odd),
        angle=pair.angle,
        length=pair.length,
        beta=0.5 * stackup.k0 * (math.sqrt(float(even)) + math.sqrt(float(odd))),
        pour_gap=gap[0],
        currents=(abs(currents[f"{name}:0"]), abs(currents[f"{name}:1"])),
        flags=tuple(flags),
    )
