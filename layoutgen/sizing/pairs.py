"""Coupled pairs: width and gap from two impedances, or the impedances of a width and gap."""

from __future__ import annotations

import math
from collections.abc import Mapping

from layoutgen.circuit import OPEN, Circuit
from layoutgen.formulas.coupled import coupled_pair, kirschning_jansen_1984_permittivity
from layoutgen.formulas.synthesis import coupled_dimensions
from layoutgen.origin import Fault
from layoutgen.reading import CircuitFile, CoupledPair
from layoutgen.sizing.pours import bare_widths, rf_pour_gaps
from layoutgen.sizing.records import SizedPair
from layoutgen.sizing.stackup import NM, Stackup, to_nm

__all__ = ["pair_fault", "pair_gap", "pair_sizes", "sized_pair"]


def pair_gap(
    circuit: Circuit, stackup: Stackup, pair: CoupledPair, measured: tuple[float, float] | None
) -> tuple[float, float, float]:
    """Return the pour's distance [m] from a pair: as drawn, and left and right as the sizing assumes it.

    It is that of a single line as wide, or of the impedance sqrt(Z_even Z_odd).
    """
    if pair.width is not None:
        u = pair.width / stackup.height
    else:
        u = bare_widths(stackup, [math.sqrt((pair.even_impedance or 50.0) * (pair.odd_impedance or 50.0))])[0]
    nets = [net for net in pair.nets if net != OPEN]
    gap = rf_pour_gaps(circuit, stackup, [u], [nets])[0]
    left, right = measured if measured is not None else (gap, gap)
    return gap, stackup.gap_or_none(left), stackup.gap_or_none(right)


def pair_sizes(
    stackup: Stackup, pair: CoupledPair, gap: tuple[float, float, float]
) -> tuple[float, float, bool]:
    """Return a pair's width and gap [m], in whole nanometres, and whether they meet what was asked."""
    if pair.width is not None and pair.gap is not None:
        return pair.width, pair.gap, True
    h = stackup.height
    found = coupled_dimensions(
        pair.even_impedance or 0.0, pair.odd_impedance or 0.0, stackup.er, stackup.t, gap[1] / h, gap[2] / h
    )
    width, between = to_nm(float(found.u) * h), to_nm(float(found.g) * h)
    if width <= 0.0 or between <= 0.0:
        return width, between, False
    got = coupled_pair(width / h, between / h, stackup.er, stackup.t, gap[1] / h, gap[2] / h)
    met = (
        abs(float(got.z_even) / (pair.even_impedance or 1.0) - 1.0) < 1e-4
        and abs(float(got.z_odd) / (pair.odd_impedance or 1.0) - 1.0) < 1e-4
    )
    return width, between, met


def pair_fault(
    file: CircuitFile,
    stackup: Stackup,
    name: str,
    gap: tuple[float, float, float],
    sizes: tuple[float, float, bool],
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
    sizes: tuple[float, float, bool],
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
