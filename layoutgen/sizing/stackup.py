"""The numbers of substrate, copper and rules that every size depends on, gathered once."""

from __future__ import annotations

import math
from dataclasses import dataclass

from layoutgen.circuit import Circuit
from layoutgen.formulas.constants import C0
from layoutgen.formulas.limits import ipc2221b_clearance
from layoutgen.formulas.pour import NO_POUR_GAP
from layoutgen.origin import Fault
from layoutgen.reading import RuleFile

__all__ = ["NM", "Stackup", "clearance", "rounded_up", "to_nm"]

NM = 1e-9
_MAX_ER, _MAX_T = 128.0, 0.2
_FALLBACK_WIDTH = 0.15e-3


@dataclass(frozen=True, slots=True)
class Stackup:
    """Substrate and copper in SI, and the rules' least width and gap.

    ``er`` [-], ``loss_tangent`` [-], ``height`` [m], ``thickness`` [m], ``conductivity`` [S/m],
    ``roughness`` [m], ``frequency`` [Hz] (the design frequency), ``top`` [Hz] (the band's upper edge),
    ``min_width`` [m], ``min_gap`` [m].
    """

    er: float
    loss_tangent: float
    height: float
    thickness: float
    conductivity: float
    roughness: float
    frequency: float
    top: float
    min_width: float
    min_gap: float

    @classmethod
    def of(cls, circuit: Circuit) -> Stackup:
        """Return the numbers of a circuit; a rule file without least width or gap gives 0.15 mm and 0."""
        substrate, design, copper = circuit.file.substrate, circuit.file.design, circuit.rules.copper
        return cls(
            er=substrate.relative_permittivity,
            loss_tangent=substrate.loss_tangent,
            height=substrate.height,
            thickness=substrate.copper_thickness,
            conductivity=substrate.conductivity,
            roughness=substrate.copper_roughness,
            frequency=design.frequency,
            top=design.band[1],
            min_width=copper.min_width if copper.min_width is not None else _FALLBACK_WIDTH,
            min_gap=copper.min_gap or 0.0,
        )

    @property
    def t(self) -> float:
        """Copper thickness over substrate height [-]."""
        return self.thickness / self.height

    @property
    def fh(self) -> float:
        """Design frequency times substrate height [Hz m]."""
        return self.frequency * self.height

    @property
    def k0(self) -> float:
        """Phase constant of free space at the design frequency [rad/m]."""
        return 2.0 * math.pi * self.frequency / C0

    def gap_or_none(self, gap: float) -> float:
        """Return a pour's distance [m]; infinity from six substrate heights on, where it counts as none."""
        return gap if gap < NO_POUR_GAP * self.height * (1.0 - 1e-12) else math.inf

    def faults(self, circuit: Circuit) -> list[Fault]:
        """Return what of the substrate lies outside the impedance formula's range."""
        found = []
        if self.er > _MAX_ER:
            key = "substrate.relative_permittivity"
            found.append(
                (key, f"{self.er:g}", f"at most {_MAX_ER:g}, the range of Hammerstad and Jensen 1980")
            )
        if self.t > _MAX_T:
            key = "substrate.copper_thickness"
            most = f"at most {_MAX_T:g} heights, the range of Hammerstad and Jensen 1980"
            found.append((key, f"{self.t:.3g} substrate heights", most))
        return [Fault(circuit.file.location(key), key, what, allowed) for key, what, allowed in found]


def to_nm(length: float) -> float:
    """Return a length [m] rounded to a whole nanometre, ties to even."""
    return float(round(length / NM) * NM)


def rounded_up(length: float, step: float = NM) -> float:
    """Return a length [m] rounded up to a whole step [m]; one within a millionth of a step stays there."""
    return float(math.ceil(length / step - 1e-6) * step)


def clearance(rules: RuleFile, voltage: float) -> float:
    """Return the least distance [m] to ground for a voltage [V], zero without a voltage rule.

    Beyond the last row of a table of the rule file's own its last distance is taken; the check reports it.
    """
    rule = rules.voltage
    if rule is None:
        return 0.0
    if rule.table is not None:
        return next((d for limit, d in rule.table if abs(voltage) <= limit), rule.table[-1][1])
    return float(ipc2221b_clearance(voltage, rule.condition)) if rule.condition is not None else 0.0
