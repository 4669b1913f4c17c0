"""Cross-sections of lines: widths from impedances beside their pour, and what a width is worth."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from layoutgen.formulas.bends import bend_excess, douville_james_1978_mitre
from layoutgen.formulas.constants import C0
from layoutgen.formulas.loss import (
    dielectric_attenuation,
    hammerstad_jensen_1980_conductor_attenuation,
    skin_depth,
)
from layoutgen.formulas.microstrip import (
    hammerstad_jensen_1980,
    kirschning_jansen_1982_permittivity,
    wheeler_hammerstad_width,
)
from layoutgen.formulas.pour import microstrip_beside_pour
from layoutgen.formulas.synthesis import width_for_impedance
from layoutgen.sizing.stackup import Stackup, to_nm

__all__ = ["MAX_U", "MIN_U", "Section", "impedance_limits", "sections", "widths_for"]

MIN_U, MAX_U = 0.01, 100.0
"""Widths over height between which Hammerstad and Jensen 1980 holds [-]."""

_DB_PER_NEPER = 20.0 / math.log(10.0)


@dataclass(frozen=True, slots=True, kw_only=True)
class Section:
    """What a drawn cross-section is worth: the fields of the same names in ``SizedLine``."""

    impedance: float
    effective_permittivity: float
    beta: float
    loss: float
    spread: float
    mitre_percent: float
    bend_length: float
    flags: tuple[str, ...]


def widths_for(
    stackup: Stackup, impedances: Sequence[float], left: Sequence[float], right: Sequence[float]
) -> list[float]:
    """Return the width [m], in whole nanometres, of a line of each impedance [ohm] beside its pour.

    Args:
        stackup: Substrate and copper.
        impedances: Impedances asked for [ohm], shape (N,).
        left: Gaps to the pour on the left, infinity for none [m], shape (N,).
        right: Gaps to the pour on the right [m], shape (N,).
    """
    if not impedances:
        return []
    h = stackup.height
    found = width_for_impedance(
        np.asarray(impedances), stackup.er, stackup.t, np.asarray(left) / h, np.asarray(right) / h
    )
    return [to_nm(float(u) * h) for u in found.u]


def impedance_limits(stackup: Stackup, left: float, right: float) -> tuple[float, float]:
    """Return the lowest and highest impedance [ohm] beside a pour at these gaps [m].

    The lowest belongs to a width of 100 heights, the highest to ``copper.min_width`` (or 0.01 heights).
    """
    h = stackup.height
    ends = np.array([MAX_U, max(MIN_U, stackup.min_width / h)])
    low, high = microstrip_beside_pour(ends, stackup.er, stackup.t, left / h, right / h).impedance
    return float(low), float(high)


def sections(
    stackup: Stackup, widths: Sequence[float], left: Sequence[float], right: Sequence[float]
) -> list[Section]:
    """Return what lines of given widths [m] beside their pour [m] are worth, all shapes (N,)."""
    if not widths:
        return []
    w = np.asarray(widths)
    h, er, t = stackup.height, stackup.er, stackup.t
    u = w / h
    line = microstrip_beside_pour(u, er, t, np.asarray(left) / h, np.asarray(right) / h)
    ee = kirschning_jansen_1982_permittivity(line.effective_permittivity, u, er, stackup.fh)
    f = stackup.frequency
    loss = hammerstad_jensen_1980_conductor_attenuation(
        f, line.impedance, w, stackup.conductivity, stackup.roughness
    ) + dielectric_attenuation(f, er, ee, stackup.loss_tangent)
    thin = hammerstad_jensen_1980(u, er).impedance
    other = hammerstad_jensen_1980(wheeler_hammerstad_width(thin, er), er).impedance
    mitre = douville_james_1978_mitre(u)
    bend = bend_excess(u, er, mitre, 90.0, t)
    return [
        Section(
            impedance=float(line.impedance[i]),
            effective_permittivity=float(ee[i]),
            beta=stackup.k0 * math.sqrt(ee[i]),
            loss=_DB_PER_NEPER * float(loss[i]),
            spread=abs(float(other[i] / thin[i]) - 1.0),
            mitre_percent=float(mitre[i]),
            bend_length=float(bend.length_change[i]) * h,
            flags=_flags(
                stackup, float(u[i]), min(left[i], right[i]), bool(line.in_range[i]), bool(bend.in_range[i])
            ),
        )
        for i in range(len(widths))
    ]


def _flags(
    stackup: Stackup, u: float, gap: float, line_in_range: bool, bend_in_range: bool
) -> tuple[str, ...]:
    """Return which formulas are used outside their range, and how."""
    found = []
    if not line_in_range:
        near = "no pour" if math.isinf(gap) else f"gap {gap / stackup.height:.3g} h (from 0.12)"
        found.append(
            f"impedance beside a pour: W/h {u:.3g} (compared for 0.2 to 8), {near}, "
            f"er {stackup.er:g} (to 13), t/h {stackup.t:.2g} (to 0.1)"
        )
    if not (0.1 <= u <= 100.0 and stackup.er <= 20.0 and stackup.fh <= 39e6):
        found.append(
            f"dispersion (Kirschning-Jansen 1982): W/h {u:.3g} (0.1 to 100), er {stackup.er:g} (to 20), "
            f"f h {stackup.fh / 1e6:.3g} GHz mm (to 39)"
        )
    if not bend_in_range:
        found.append(
            f"bend length (fit to field solutions): W/h {u:.3g} (0.5 to 4), er {stackup.er:g} (to 13)"
        )
    if not (0.25 <= u <= 2.75 and 2.5 <= stackup.er <= 25.0):
        found.append(
            f"bend mitre (Douville-James 1978): W/h {u:.3g} (0.25 to 2.75), er {stackup.er:g} (2.5 to 25)"
        )
    if stackup.thickness < 3.0 * float(skin_depth(stackup.frequency, stackup.conductivity)):
        found.append("conductor loss: copper thinner than three skin depths")
    cutoff = C0 / (math.sqrt(stackup.er) * (2.0 * u + 0.8) * stackup.height)
    if stackup.top > cutoff:
        found.append(
            f"transverse resonance: a strip {u:.3g} h wide carries a second mode from {cutoff / 1e9:.3g} GHz "
            "(c/[sqrt(er)(2W + 0.8h)], from memory)"
        )
    return tuple(found)
